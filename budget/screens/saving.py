"""Saving the run, beside the keyboard, and the way out where it is not saved."""

from __future__ import annotations

import dataclasses
import os
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from budget.description import Library
from budget.report.plain import plain
from budget.screens import unsaved
from budget.screens.asking import ask
from budget.screens.background import in_background
from budget.screens.entering import Entry, begin
from budget.screens.field import Field
from budget.screens.writing import WritingError
from budget.storage import ChangedOnDisk, Look, Stamp, StorageError, look
from budget.storage.recents import note_recent

if TYPE_CHECKING:
    from budget.document import Saving, Snapshot
    from budget.screens.app import BudgetApp

Doing = Callable[[], object]

Done = tuple[Stamp, tuple[Library, ...]]
"""What stands on disk after a save, and the libraries that the run names there."""

LONGEST_NAME = 36
"""Letters of a file's name in a question; what it is about must have room as well."""


def save(app: BudgetApp, then: Doing | None = None) -> None:
    """Write the run to its file, then do what comes next; where the file was changed by others, ask."""
    if app.document.read_only:
        ask(app, app.document.read_only, (("save under another name", lambda: save_as(app, then)),))
    elif app.document.path is None:
        save_as(app, then)
    elif app.saving is not None:
        app.after_saving = partial(save, app, then)
    else:
        write(app, app.document.prepare(), then)


def save_as(app: BudgetApp, then: Doing | None = None) -> None:
    """Ask for another file, beside the present one where no folder is named, and write the run there."""
    here = app.document.path or Path("run.toml").absolute()

    def target(text: str) -> Path:
        if not text.strip():
            raise WritingError("write the name of a file")
        if "\0" in text:
            raise WritingError("no file has such a name")
        return here.parent / Path(text.strip()).expanduser()

    def attempt(text: str) -> Snapshot | None:
        target(text)
        return None

    def take(text: str) -> None:
        if app.saving is not None:
            app.after_saving = partial(take, text)
            return
        saving = app.document.prepare(target(text))
        if saving.path == app.document.path:
            save(app, then)
        else:
            write(app, saving, then)

    begin(app, Entry("save as", Field.holding(str(here)), attempt, take))


def write(app: BudgetApp, saving: Saving, then: Doing | None) -> None:
    """Write what is to be saved, in a thread, so that the next edit need not wait for the disk."""
    app.saving = saving
    app.saver = in_background(app, partial(_write, app, saving), partial(_written, app, saving, then))


def _write(app: BudgetApp, saving: Saving) -> Done | StorageError:
    try:
        return saving.write(app.keeper.keep_now), app.document.look_at_libraries(saving.path)
    except StorageError as refused:
        return refused


def _written(app: BudgetApp, saving: Saving, then: Doing | None, outcome: Done | StorageError) -> None:
    app.saving = None
    queued, app.after_saving = app.after_saving, None
    if isinstance(outcome, StorageError):
        _refused(app, saving, then, outcome)
        return
    before, renamed = app.document.snapshot, saving.path != app.document.path
    app.document.saved(saving, *outcome)
    unsaved.note(app)
    if renamed:
        remember(app)
    if app.document.snapshot is not before and app.entry is None:
        app.show(app.document.snapshot)
    app.tell_state()
    app.say(f"saved {plain(str(saving.path))}")
    for doing in (then, queued):
        if doing is not None:
            doing()


def remember(app: BudgetApp) -> None:
    """Have the run's file remembered among those that were open of late."""
    if app.document.path is not None:
        in_background(app, partial(note_recent, app.document.path), lambda _: None)


def _refused(app: BudgetApp, saving: Saving, then: Doing | None, refused: StorageError) -> None:
    if app.entry is not None:  # the hands are at another value; what it is about is told, and asked at the next save
        app.tell_state()
        app.say(plain(str(refused)), "error")
        return
    elsewhere = ("save under another name", lambda: save_as(app, then))
    if not isinstance(refused, ChangedOnDisk):
        ask(app, _short(refused, saving.path), (elsewhere, ("try again", lambda: save(app, then))))
    elif saving.path == app.document.path:
        from budget.screens import conflict  # noqa: PLC0415 - the first frame does not wait for it

        conflict.settle(app, elsewhere, lambda: save(app, then))
    else:
        in_background(app, partial(look, saving.path, None), partial(_ask_over, app, saving, then, refused))


def _ask_over(app: BudgetApp, saving: Saving, then: Doing | None, refused: ChangedOnDisk, seen: Look) -> None:
    """Ask whether another file is to be written over, as it was seen and no other."""
    over = dataclasses.replace(saving, stamp=seen.stamp, over=seen.stamp is None)
    ask(
        app,
        _short(refused, saving.path),
        (
            ("write over it", lambda: write(app, over, then)),
            ("save under another name", lambda: save_as(app, then)),
        ),
    )


def _short(refused: StorageError, path: Path) -> str:
    """Say what was wrong with the name of the file alone, so that it can be read on one line."""
    name = path.name if len(path.name) <= LONGEST_NAME else f"{path.name[: LONGEST_NAME - 9]}…{path.name[-8:]}"
    return str(refused).replace(str(path), name).replace(os.path.realpath(path), name).partition(";")[0]


@dataclass(frozen=True, slots=True)
class Leaving:
    """Where the way out of a run leads, and what the answers are called that take it."""

    go: Doing
    save: str
    keep: str
    discard: str


def leave(app: BudgetApp, leaving: Leaving | None = None) -> None:
    """Leave the run, to quit where nothing else is said; where it is not saved, ask first."""
    way = leaving or Leaving(
        lambda: app.exit(0), "save and quit", "quit, and keep the changes for the next time", "quit without saving"
    )
    if app.saving is not None:
        app.after_saving = partial(leave, app, way)
        app.say("still saving")
        return
    if not app.document.dirty:
        way.go()
        return

    def keep() -> None:
        if app.keep_now():
            way.go()
        else:
            app.say(f"the changes could not be kept: {plain(app.keeper.problem)}; save the run elsewhere", "error")

    def throw_away() -> None:
        app.discarding = True
        way.go()

    ask(
        app,
        "The run is not saved",
        (
            (way.save, lambda: save(app, then=lambda: leave(app, way))),
            (way.keep, keep),
            (way.discard, throw_away),
        ),
    )
