"""Lists in the ledger's place: picking a value, taking what is marked, and the list of everything that can be done."""

from __future__ import annotations

from typing import TYPE_CHECKING

from budget.description.finding import Path
from budget.report.located import Located
from budget.screens import boards, changing, entering, fitting_form
from budget.screens.actions import ACTIONS, Place
from budget.screens.chooser import Choice, Offer
from budget.screens.picking import offer_for
from budget.screens.writing import key_of_cell

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

MOST = 10_000
"""Fittings of a kind on a section: no more can be counted, or taken away at once."""


def pick(app: BudgetApp) -> None:
    """Offer what can stand in the cell, or in the line of the row detail."""
    row = app.ledger.row
    if app.at in app.boards:
        boards.pick_device(app)
        return
    if app.at == "detail":
        marked = app.choosers["detail"].marked
        path = marked.value if marked is not None and isinstance(marked.value, tuple) else None
    elif app.at == "findings":
        marked = app.choosers["findings"].marked
        path = marked.value.path if marked is not None and isinstance(marked.value, Located) else None
    else:
        path = key_of_cell(app.document.snapshot.text, row, app.ledger.column) if row is not None else None
    if path is not None and row is not None and path == row.path and app.at != "findings":
        changing.move(app)
        return
    _offer_for(app, path)


def pick_key(app: BudgetApp, key: str) -> None:
    """Offer what can stand at a key of the row under the cursor."""
    row = app.ledger.row
    _offer_for(app, (*row.path[:2], key) if row is not None else None)


def pick_instead(app: BudgetApp) -> None:
    """Turn from writing a value to picking it."""
    entry = app.entry
    if entry is None or not entry.path:
        return
    entering.leave(app)
    _offer_for(app, entry.path)


def _offer_for(app: BudgetApp, path: Path | None) -> None:
    offer = offer_for(app, path) if path is not None else None
    if offer is None:
        app.say("there is no list for this; Enter writes it", "note")
    else:
        app.offer(offer)


def choose(app: BudgetApp) -> None:
    """Take what is marked in the list."""
    marked, offer = app.choosers[app.at].marked, app.choosers[app.at].offer
    if app.at == "list":
        app.turn_to(app.returns_to)
    if marked is not None:
        offer.take(marked.value)


def leave(app: BudgetApp) -> None:
    """Leave a field or a list, and things as they were."""
    if app.entry is not None:
        entering.leave(app)
        return
    if app.at == "form" and app.form.sheet is not None:
        app.form.sheet.leave()
        return
    offer = app.choosers["list"].offer if app.at == "list" else None
    app.turn_to(app.returns_to)
    app.show(app.document.snapshot)
    app.tell()
    if offer is not None and offer.leave is not None:
        offer.leave()


def write(app: BudgetApp, key: str, character: str | None) -> bool:
    """Filter the list by what is written; left and right step the marked entry where it counts something."""
    chooser = app.choosers["list"]
    marked, step = chooser.marked, chooser.offer.step
    if step is not None and key in ("left", "right", "minus", "plus") and marked is not None:
        step(marked.value, 1 if key in ("right", "plus") else -1)
        return True
    if step is not None and key == "delete" and marked is not None and not chooser.field.text:
        step(marked.value, -MOST)
        return True
    field = chooser.field.press(key, character)
    if field is not None:
        chooser.write(field)
        app.tell()
    return field is not None


def next_field(app: BudgetApp, step: int) -> None:
    """Go to another value of the form."""
    app.form.go(step)
    app.tell()


def fill_in(app: BudgetApp, changed: bool) -> None:
    """Tell what the values in the form lead to, where one of them was changed."""
    if changed:
        app.trials.later(lambda: fitting_form.try_out(app))


def show_commands(app: BudgetApp) -> None:
    """List every action that works here, with its keys."""
    here: Place = app.at if app.at != "list" else "ledger"
    actions = [a for a in ACTIONS if here in a.places and a.id not in ("up", "down", "left", "right", "commands")]
    choices = [Choice((a.title, app.keymap.shown(a.id, 3), a.id), a.id) for a in actions]
    app.offer(Offer("do", ("", "key", "name in the config"), choices, lambda name: app.do(str(name))))
