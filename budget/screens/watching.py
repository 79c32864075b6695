"""Looking whether somebody else changed the file, while the app is open."""

from __future__ import annotations

from typing import TYPE_CHECKING

from budget.description import Library
from budget.report.plain import plain
from budget.screens import unsaved
from budget.screens.background import in_background
from budget.storage import Look, Stamp

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

EVERY = 3.0
"""Seconds from one look to the next."""


def look(app: BudgetApp, *, anyway: bool = False) -> None:
    """Look at the file, in a thread: a folder on a network may hang. Not while it is looked at or saved already."""
    tell_of_keeping(app)
    if (app.looking and not anyway) or app.saving is not None:
        return
    app.looking = True
    stamp, document = app.document.stamp, app.document

    def seen() -> tuple[Look, tuple[Library, ...]]:
        return document.look(), document.look_at_libraries()

    in_background(app, seen, lambda found: _meet(app, *found, stamp))


def _meet(app: BudgetApp, seen: Look, libraries: tuple[Library, ...], stamp: Stamp | None) -> None:
    app.looking = False
    document = app.document
    if app.saving is not None or document.stamp != stamp:
        return  # it was saved in the meantime
    busy = app.entry is not None or app.at in ("list", "form") or app.written is not None
    if busy and seen.what != "same":
        return  # the hands are at something that a reload would take away; it is looked at again soon
    known, before = document.on_disk.what, document.snapshot
    if not busy and document.take_libraries(libraries):
        app.show(document.snapshot, before)
        app.tell()
        app.say("a library of the run was changed on disk and read again")
        before = document.snapshot
    if document.meet(seen, app.ledger.mark):
        app.reload_text()
        app.show(document.snapshot, before)
        app.tell()
        back = "" if document.read_only else f"; {app.keys('undo')} brings back what was here before"
        app.say(f"reloaded: {_name(app)} was changed on disk{back}")
    elif document.on_disk.what != known:
        unsaved.note(app)
        app.tell_state()
        told = {
            "changed": f"{_name(app)} was changed on disk; {app.keys('show_changes')} shows what differs",
            "there": f"{_name(app)} was made by somebody else; {app.keys('show_changes')} shows what differs",
            "gone": f"{_name(app)} is gone from disk; {app.keys('save')} writes it anew",
            "same": "",
        }[seen.what]
        app.say(f"{_name(app)} was changed on disk and {plain(seen.why)}" if seen.why else told, "warning")


def tell_of_keeping(app: BudgetApp) -> None:
    """Say once where what is unsaved can't be kept, and once that it can again."""
    problem = app.keeper.problem
    if problem == app.told_problem:
        return
    app.told_problem = problem
    app.tell_state()
    if problem:
        app.say(f"unsaved changes could not be kept for recovery: {plain(problem)}; save often", "warning")


def _name(app: BudgetApp) -> str:
    return plain(app.document.path.name) if app.document.path is not None else "the file"
