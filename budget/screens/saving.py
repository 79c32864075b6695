"""Saving the run, and the way out where it is not saved."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

from budget.report.plain import plain
from budget.screens.chooser import Choice, Offer
from budget.screens.entering import Entry, begin
from budget.screens.field import Field
from budget.screens.writing import WritingError
from budget.storage import ChangedOnDisk, StorageError

if TYPE_CHECKING:
    from budget.document import Snapshot
    from budget.screens.app import BudgetApp

Doing = Callable[[], object]


def save(app: BudgetApp, then: Doing | None = None) -> None:
    """Write the run to its file, then do what comes next; where the file was changed by others, ask."""
    if app.document.path is None:
        save_as(app, then)
        return
    _write(app, app.document.path, then, over=False)


def save_as(app: BudgetApp, then: Doing | None = None) -> None:
    """Ask for another file, beside the present one where no folder is named, and write the run there."""
    here = app.document.path or Path("run.toml").absolute()

    def target(text: str) -> Path:
        if not text.strip():
            raise WritingError("write the name of a file")
        return here.parent / Path(text.strip()).expanduser()

    def attempt(text: str) -> Snapshot | None:
        target(text)
        return None

    def take(text: str) -> None:
        path = target(text)
        if path.exists() and path != app.document.path:
            ask(app, f"{path} exists", (("write over it", lambda: _write(app, path, then, over=True)),))
        else:
            _write(app, path, then, over=False)

    begin(app, Entry("save as", Field.holding(str(here)), attempt, take))


def leave(app: BudgetApp) -> None:
    """Quit; where the run is not saved, ask first."""
    if not app.document.dirty:
        app.exit(0)
        return
    ask(
        app,
        "The run is not saved",
        (
            ("save and quit", lambda: save(app, then=lambda: app.exit(0))),
            ("quit without saving", lambda: app.exit(0)),
        ),
    )


def _write(app: BudgetApp, path: Path, then: Doing | None, *, over: bool) -> None:
    try:
        app.document.save(path, over=over)
    except ChangedOnDisk as changed:
        ask(
            app,
            str(changed).partition(";")[0],
            (
                ("save under another name", lambda: save_as(app, then)),
                ("write over what is on disk", lambda: _write(app, path, then, over=True)),
            ),
        )
        return
    except StorageError as refused:
        app.say(plain(str(refused)), "error")
        return
    app.show(app.document.snapshot)
    app.say(f"saved {plain(str(path))}")
    if then is not None:
        then()


def ask(app: BudgetApp, question: str, answers: tuple[tuple[str, Doing], ...], stay: str = "stay") -> None:
    """Ask, with a list of what can be done; the last is to leave things as they are."""
    choices = [Choice((text,), doing) for text, doing in (*answers, (stay, lambda: app.say("")))]

    def take(doing: object) -> None:
        if callable(doing):
            doing()

    app.offer(Offer(plain(question), ("",), choices, take))
