"""Opening another run: a list of those at hand, a look at the one that is taken, and the way out of the present one."""

from __future__ import annotations

import dataclasses
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from budget.description import read_text
from budget.description.libraries import library_paths
from budget.report.plain import plain
from budget.screens import saving, turning
from budget.screens.background import in_background
from budget.screens.chooser import Choice, Offer
from budget.screens.opened import Opened, left_behind, open_run
from budget.screens.recovering import clock
from budget.screens.saving import Leaving
from budget.storage import StorageError
from budget.storage.recents import recent_runs
from budget.storage.runs import Found, is_same, runs_at_hand

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

LOOKING = "looking for runs; the path of one can be written here"
NOTHING = "there is no run but this one; write the path of one"


def open_other(app: BudgetApp) -> None:
    """Offer the runs at hand; what is written on the Text screen is taken first.

    The list is there at once, and filled when the disk has told what there is: a path can be written meanwhile.
    """
    if app.at == "text" and app.text.changed and not turning.apply_text(app):
        return
    try:
        present = (app.document.path or Path("run.toml")).absolute()
    except OSError:
        app.say("the folder in which the app was started is gone; start it anew from another one", "error")
        return
    text = app.document.snapshot.text
    offer = Offer(
        "Open another run", ("run", "open or changed", "title"), (), lambda path: _look_at(app, Path(str(path))),
        write=partial(_written, present), empty=LOOKING, beneath=lambda path: (plain(str(path)),),
    )  # fmt: skip
    app.offer(offer)

    def look() -> tuple[Found, ...]:
        return runs_at_hand(present, recent_runs(), library_paths(read_text(text)))

    def fill(found: tuple[Found, ...]) -> None:
        chooser = app.choosers["list"]
        if app.at == "list" and chooser.offer is offer:
            filled = dataclasses.replace(offer, choices=[_choice(one) for one in found], empty=NOTHING)
            chooser.present(filled, keep=True)
            app.tell()

    in_background(app, look, fill)


def _choice(found: Found) -> Choice:
    when = f"{'open' if found.recent else 'changed'} {clock(found.time)}"
    return Choice((plain(found.path.name), when, plain(found.title)), found.path, words=plain(str(found.path.parent)))


def _written(present: Path, text: str) -> Choice:
    """Return the entry of a path as it is typed; nothing is asked of the disk before it is taken."""
    path = Path(text) if text.startswith("~") else present.parent / text
    return Choice((plain(text), "", "the file of that name"), path)


# Taking one


def _look_at(app: BudgetApp, path: Path) -> None:
    """Read a run before the present one is left, so that one that can't be opened changes nothing."""
    app.say(f"reading {plain(path.name)}")
    in_background(app, partial(_read, path, app.document.path), partial(_go_on, app))


def _read(path: Path, present: Path | None) -> Opened | str:
    """Read a run in full, or say why not."""
    name = path.name
    try:
        path = path.expanduser()
        if "\0" in str(path):
            return "no file has such a name"
        if present is not None and is_same(path, present):
            return f"{name} is open already"
        if not path.exists() and not path.is_symlink() and left_behind(path) is None:
            return f"there is no {name}; budget new FILE writes a run to start from"
        return open_run(path)
    except StorageError as refused:
        return str(refused).replace(str(path), name)
    except OSError as wrong:
        return f"{name} could not be read: {wrong.strerror or wrong}"
    except RuntimeError:
        return f"{name} could not be found: there is no such home folder"
    except Exception as fault:  # noqa: BLE001 - what the program makes of another file must not end the present run
        from budget.storage.faults import record_fault  # noqa: PLC0415 - seldom, if ever

        record_fault(fault, "budget edit, opening another run")
        return f"{name} could not be read: internal error: {type(fault).__name__}; budget check tells more of it"


def _go_on(app: BudgetApp, read: Opened | str) -> None:
    """Leave the present run for one that was read, with what is unsaved asked about first."""
    if isinstance(read, str):
        app.say(plain(read), "error")
        return
    name = plain(read.path.name)
    if app.entry is not None or app.at in ("list", "form") or app.written is not None:
        app.say(f"{name} can be opened; ask for it again when this is done", "note")
        return

    def go() -> None:
        app.following = read
        app.exit(0)

    app.say("")
    saving.leave(app, Leaving(go, "save, and open the other", "keep the changes for the next time, and open the other",
                              "open the other without saving"))  # fmt: skip
