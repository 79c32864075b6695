"""Copying rows out of the app: as a table with tabs, to the terminal's clipboard and to a file beside it.

A terminal takes a text for its clipboard by OSC 52, and says nothing where it or a multiplexer before it does not.
"""

from __future__ import annotations

import os
import re
from collections.abc import Callable, Iterable, Sequence
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from budget.report.figures import NONE
from budget.report.plain import plain
from budget.report.schedule_text import harmless
from budget.screens.background import in_background
from budget.screens.columns import COLUMNS
from budget.screens.rows import EMPTY, Row, View
from budget.storage.folders import state_folder
from budget.storage.writing import replace

if TYPE_CHECKING:
    from budget.document import Snapshot
    from budget.screens.app import BudgetApp
    from budget.screens.balance import Balance
    from budget.screens.board import Board

LARGEST = 74_000
"""Bytes of a text; OSC 52 makes four of three, and some terminals drop what is longer than 100,000."""

FILE = "copied.tsv"
"""In the user's state folder: what was copied last."""

_NUMBER = re.compile(r"[+-]?[0-9]+(\.[0-9]+)?(e[+-]?[0-9]+)?")


def copy_rows(app: BudgetApp) -> None:
    """Copy the row in hand with what hangs on it, or the rows of the schedule, and say where to."""
    ledger, snapshot = app.ledger, app.ledger.view.snapshot
    if app.at == "balance":
        count, table = _of_schedule(app.boards["balance"])
        whole = count
    else:
        rows = branch(ledger.shown if ledger.filter else ledger.rows, ledger.row)
        count, whole = len(rows), len(branch(ledger.rows, ledger.row))
        # Of thousands of rows most were never spelled: that is done beside the keyboard, on a view of its own.
        table = partial(_of_rows, snapshot, rows)
    if not count:
        app.say("there is no row to copy", "note")
        return
    part = f"{count} of {whole}" if count < whole else str(count)
    said = f"{part} row{'s' if whole > 1 else ''} copied"
    in_background(app, table, lambda text: _hand_over(app, text, said))


def branch(rows: Sequence[Row], row: Row | None) -> tuple[Row, ...]:
    """Return a row with the rows that hang on it, its items among them, of those that are given."""
    if row is None or row not in rows:
        return ()
    start = rows.index(row)
    end = next((place for place in range(start + 1, len(rows)) if rows[place].depth <= row.depth), len(rows))
    return tuple(rows[start:end])


def table_of_rows(view: View, rows: Iterable[Row]) -> str:
    """Return rows of the ledger as a table with every column."""
    heads = [headed(one.title, view.figures.unit(one.dimension) if one.dimension else "") for one in COLUMNS]
    cells = (view.cells(row) for row in rows)
    return tabbed(heads, ([found.get(one.key, EMPTY).text for one in COLUMNS] for found in cells))


def table_of_schedule(board: Balance) -> str:
    """Return the rows of the schedule as a table with every column of its screen."""
    heads = [headed(one.title, one.unit) for one in board.heads]
    cells = (board.cells(row) for row in board.schedule.rows)
    return tabbed(heads, ([found.get(one.key, EMPTY).text for one in board.heads] for found in cells))


def headed(title: str, unit: str) -> str:
    """Return the heading of a column with its unit."""
    return f"{title} [{unit}]" if unit else title


def tabbed(heads: Iterable[str], rows: Iterable[Iterable[str]]) -> str:
    """Return a table as text: a line of headings and one for each row, tabs between the cells."""
    return "".join("\t".join(cell(text) for text in row) + "\n" for row in (heads, *rows))


def cell(text: str) -> str:
    """Return a text as a cell for a spreadsheet: nothing for no figure, on one line, never a formula."""
    if text == NONE:
        return ""
    said = text if _NUMBER.fullmatch(text) else harmless(text)
    # What begins with a quote would take the tabs up to the next one into the cell.
    return '"' + said.replace('"', '""') + '"' if said.startswith('"') else said


def objection(text: str) -> str:
    """Say why a text can't be given to the clipboard of this terminal; "" where it can."""
    if len(text.encode()) > LARGEST:
        return "too many rows for a clipboard"
    return "this console has no clipboard" if os.environ.get("TERM") == "linux" else ""


def _of_rows(snapshot: Snapshot, rows: tuple[Row, ...]) -> str:
    return table_of_rows(View(snapshot), rows)


def _of_schedule(board: Board) -> tuple[int, Callable[[], str]]:
    from budget.screens.balance import Balance  # noqa: PLC0415 - it is there where it is in front

    text = table_of_schedule(board) if isinstance(board, Balance) else ""
    return len(board.ids), lambda: text


def _hand_over(app: BudgetApp, text: str, said: str) -> None:
    """Give a text to the terminal, and then to the disk, which may hang."""
    reason = objection(text)
    if not reason:
        app.copy_to_clipboard(text)
    in_background(
        app,
        lambda: _write(text),
        lambda where: app.say(*_told(f"not copied: {reason}" if reason else said, where, copied=not reason)),
    )


def _write(text: str) -> Path | OSError:
    try:
        path = state_folder() / FILE
        replace(path, text.encode(), mode=0o600)
    except OSError as refused:
        return refused
    return path


def _told(said: str, where: Path | OSError, *, copied: bool) -> tuple[str, str]:
    """Say what was copied, with where the same stands, as a multiplexer may drop what is for the clipboard."""
    if isinstance(where, OSError):
        reason = plain(where.strerror or str(where))
        lost = "a terminal multiplexer may drop them, and " if copied else ""
        return f"{said}; {lost}{FILE} could not be written: {reason}", "warning"
    try:
        shown = f"~/{where.relative_to(Path.home())}"
    except (ValueError, RuntimeError):
        shown = str(where)
    if not copied:
        return f"{said}; they are in {plain(shown)}", "warning"
    return f"{said}; should a terminal multiplexer drop them, they are also in {plain(shown)}", ""
