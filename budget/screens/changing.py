"""Changing the run: its shape, and one step back and forth."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from budget.description.edits import EditError
from budget.document import Snapshot
from budget.report.plain import plain
from budget.screens import shaping
from budget.screens.chooser import Choice, Offer
from budget.screens.ledger import Mark

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp


def reshape(app: BudgetApp, make: Callable[..., shaping.Change], *extra: object) -> None:
    """Make a change of shape where the cursor is, as one undo step, and go to what is new."""
    row, snapshot = app.ledger.row, app.document.snapshot
    if row is None:
        app.say("the run is empty: write [source.P1] on the Text screen", "note")
        return
    place = app.ledger.rows.index(row)
    try:
        change = make(snapshot.text, snapshot.description, app.ledger.rows, place, *extra)
        app.apply(change.edit, change.label, path=change.path)
    except (shaping.ShapingError, EditError) as refused:
        app.say(plain(str(refused)), "error")
        return
    app.say(f"{change.label}: done; {app.keys('undo')} takes it back")


def move(app: BudgetApp) -> None:
    """Offer what a branch may hang on."""
    row, snapshot = app.ledger.row, app.document.snapshot
    if row is None:
        return
    try:
        ids = shaping.parents_for(snapshot.description, app.ledger.rows, app.ledger.rows.index(row))
    except shaping.ShapingError as refused:
        app.say(plain(str(refused)), "note")
        return

    def title(id_: str) -> str:
        part = snapshot.description.sections.get(id_) or snapshot.description.sources.get(id_)
        return plain(part.title) if part else ""

    def take(parent: object) -> None:
        reshape(app, lambda _text, description, _rows, _place: shaping.rehang(description, row, str(parent)))

    app.offer(Offer(f"hang {plain(row.id)} on", ("ID", "title"), [Choice((plain(i), title(i)), i) for i in ids], take))


def undo(app: BudgetApp) -> None:
    """Take the last step back; the cursor goes where it was."""
    document = app.document
    if not document.can_undo:
        app.say("nothing to undo", "note")
        return
    step, before = document.history, document.snapshot
    document.undo()
    _return_to(app, step.mark, before, f"undone: {step.label}")


def redo(app: BudgetApp) -> None:
    """Make a step again that was taken back."""
    document = app.document
    if not document.can_redo:
        app.say("nothing to redo", "note")
        return
    before = document.snapshot
    document.redo()
    _return_to(app, document.history.mark, before, f"redone: {document.history.label}")


def _return_to(app: BudgetApp, mark: object, before: Snapshot, message: str) -> None:
    app.show(app.document.snapshot, before=before)
    if isinstance(mark, Mark):
        app.ledger.return_to(mark)
    app.tell()
    app.say(plain(message))
