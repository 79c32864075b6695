"""What changed in the run since its file was saved, or since a git revision: keys, figures and findings.

Git is asked beside the keyboard, and so is the older version computed.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

from budget.description import SourceText, read_text
from budget.description.differences import compare
from budget.description.libraries import Library
from budget.document import Snapshot, take
from budget.report.changes import Changes, changes_between
from budget.report.changes_text import changes_lines
from budget.report.plain import plain
from budget.screens.background import in_background
from budget.screens.chooser import Choice, Offer
from budget.storage import StorageError, read_libraries
from budget.storage.revisions import Revision, list_revisions, read_past

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

T = TypeVar("T")


def show(app: BudgetApp, title: str, before: str) -> None:
    """Show what changed since an earlier text of the run; without any, what the run states."""
    after, path = app.document.snapshot, app.document.path

    def work() -> Changes:
        if not before:
            return Changes(compare(before, after.text), (), (), ())
        source = read_text(before)
        return _changes(source, read_libraries(source, path), after)

    _beside(app, work, partial(_list, app, title))


def show_since_revision(app: BudgetApp) -> None:
    """Offer the revisions that touched the run's file; show what changed since the one that is picked or written."""
    path = app.document.path
    if path is None:
        app.say("the run has no file yet; save it first", "note")
        return
    app.say("git is asked which revisions there are")
    _beside(app, lambda: _answer(lambda: list_revisions(path)), partial(_offer, app, path))


def _offer(app: BudgetApp, path: Path, found: tuple[Revision, ...] | StorageError) -> None:
    if isinstance(found, StorageError):
        _refuse(app, path, found)
        return

    def written(text: str) -> Choice:
        return Choice((plain(text), "", "the revision as written"), text)

    def picked(value: object) -> None:
        if isinstance(value, Revision):
            _show_since(app, path, value.id, f"{value.short} {value.subject}")
        else:
            _show_since(app, path, str(value), str(value))

    app.say("")
    choices = [Choice((plain(one.short), plain(one.date), plain(one.subject)), one) for one in found]
    app.offer(
        Offer(
            "Changes since which revision?", ("", "date", "subject"), choices, picked, write=written,
            empty="no revision has this file under its name; write one",
        )
    )  # fmt: skip


def _show_since(app: BudgetApp, path: Path, revision: str, name: str) -> None:
    """Show what changed since a revision."""
    after = app.document.snapshot

    def work() -> tuple[Changes, tuple[str, ...]]:
        past = read_past(path, revision)
        remarks = [f"the library {plain(one)} is not in that revision; it is read from disk" for one in past.from_disk]
        return _changes(past.source, past.libraries, after, checked_out=True), tuple(remarks)

    def then(found: tuple[Changes, tuple[str, ...]] | StorageError) -> None:
        if isinstance(found, StorageError):
            _refuse(app, path, found)
        else:
            app.say("")
            _list(app, f"Changes since {plain(name)}", *found)

    app.say("git is asked what the file was")
    _beside(app, lambda: _answer(work), then)


def _changes(
    source: SourceText, libraries: tuple[Library, ...], after: Snapshot, *, checked_out: bool = False
) -> Changes:
    """Return what changed since a text; where either can't be computed, its keys alone."""
    before = take(source, libraries=libraries)
    if before.readable and after.readable:
        return changes_between(before, after, checked_out=checked_out)
    return Changes(compare(source.text, after.text), (), (), ())


def _list(app: BudgetApp, title: str, changes: Changes, remarks: tuple[str, ...] = ()) -> None:
    """List what changed, the figures of the sources first; Enter and Escape go back."""
    width = app.size.width - (app.beside_width if app.wide else 0) - 2
    lines = (*remarks, *changes_lines(changes, width, first=("source",)))
    choices = [Choice((line,), role="" if line.startswith(" ") else "title") for line in lines]
    offer = Offer(
        title, ("",), choices, lambda _: app.turn_to("ledger"), filters=False, leave=lambda: app.turn_to("ledger"),
        empty="nothing differs",
    )  # fmt: skip
    app.offer(offer)


def _refuse(app: BudgetApp, path: Path, refused: StorageError) -> None:
    """Say at the foot what git had to say, the file by its name alone."""
    message = str(refused)
    for name in {str(path), os.path.realpath(path)}:
        message = message.replace(name, path.name)
    app.say(plain(message), "error")


def _answer(work: Callable[[], T]) -> T | StorageError:
    try:
        return work()
    except StorageError as refused:
        return refused


def _beside(app: BudgetApp, work: Callable[[], T], then: Callable[[T], object]) -> None:
    """Do a piece of work beside the keyboard; where the hands have gone elsewhere by then, only say that it is done."""
    here = (app.at, app.entry)

    def go_on(result: T) -> None:
        if (app.at, app.entry) == here:
            then(result)
        else:
            app.say("what changed is known by now; ask for it again", "note")

    in_background(app, work, go_on)
