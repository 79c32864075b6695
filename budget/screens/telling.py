"""Screens that tell of the row under the cursor: the row detail and the calculation of its figures."""

from __future__ import annotations

from typing import TYPE_CHECKING

from budget.report.plain import plain
from budget.screens import choosing
from budget.screens.calculation import steps_of
from budget.screens.chooser import Offer
from budget.screens.detail import lines_of
from budget.screens.page import lay_lines
from budget.screens.rows import Row

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp


def show_detail(app: BudgetApp) -> None:
    """Show everything written and computed for the row under the cursor."""
    if app.at == "findings":
        choosing.choose(app)
    if app.ledger.row is not None:
        app.chooser("detail").present(_detail(app, app.ledger.row, app.size.width, whole=app.wide))
        app.turn_to("detail")


def show_explain(app: BudgetApp) -> None:
    """Show how the figures of the row under the cursor are worked out."""
    if app.ledger.row is not None:
        app.chooser("explain").present(_explained(app, app.ledger.row))
        app.turn_to("explain")


def follow(app: BudgetApp) -> None:
    """Let what is told follow the cursor and the run, where it is in view."""
    row, beside = app.ledger.row, app.choosers.get("beside")
    if row is None:
        return
    if beside is not None and beside.display:
        beside.present(_detail(app, row, app.beside_width, whole=False))
    if app.at == "detail":
        app.choosers["detail"].present(_detail(app, row, app.size.width, whole=app.wide), keep=True)
    if app.at == "explain":
        app.choosers["explain"].present(_explained(app, row), keep=True)


def _detail(app: BudgetApp, row: Row, width: int, *, whole: bool) -> Offer:
    choices = lay_lines(lines_of(app.ledger.view.snapshot, row), width, whole=whole)
    return Offer("Row detail", ("", ""), choices, lambda _: None, filters=False)


def _explained(app: BudgetApp, row: Row) -> Offer:
    choices = lay_lines(steps_of(app.ledger.view.snapshot, row), app.size.width, whole=app.wide)
    return Offer(f"Explain {plain(row.id)}", ("", ""), choices, lambda _: None, filters=False)
