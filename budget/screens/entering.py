"""Writing in a cell or at the foot: every valid keystroke is tried out on the run, Enter makes it one undo step."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING

from budget.description.edits import Edit, EditError, RenameKey, SetValue, Unset, rename_everywhere
from budget.description.finding import Path, dotted
from budget.document import Snapshot
from budget.report.plain import plain
from budget.screens.field import Field
from budget.screens.writing import WritingError, key_of_cell, objection, value_of, written

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

Attempt = Callable[[str], Snapshot | None]
"""Tries a text out; returns what the run would be, None for no change; raises WritingError or EditError."""


@dataclass(slots=True)
class Entry:
    """A field that is being written in: what it is for, how a text is tried out, and what Enter does with it."""

    label: str
    field: Field
    attempt: Attempt
    accept: Callable[[str], None]
    in_cell: bool = False
    problem: str = ""
    path: Path = ()
    tried: str | None = None
    """The last text that could stand."""
    light: bool = False
    """Whether a text is tried out at once even on a large run, as nothing is computed."""
    undo: Callable[[], object] | None = None
    """Puts back what trying out has changed on the screen, where the field is left."""


def begin(app: BudgetApp, entry: Entry) -> None:
    """Open a field, in its cell or at the foot."""
    app.entry = entry
    app.say("")
    _paint(app, entry)
    app.tell()


def press(app: BudgetApp, entry: Entry, field: Field) -> None:
    """Take a keystroke: the value is tried out, and the budget runs along with every valid one.

    Where a run is so large that this takes a while, it waits for a pause in the typing.
    """
    typed = field.text != entry.field.text
    entry.field = field
    _paint(app, entry)
    if typed:
        later = app.call_later if entry.light else app.trials.later
        later(partial(_try_out, app, entry, field.text))


def _try_out(app: BudgetApp, entry: Entry, text: str) -> None:
    if app.entry is not entry or entry.field.text != text:
        return
    try:
        tried = entry.attempt(text)
        entry.problem, entry.tried = "", text
    except (WritingError, EditError) as wrong:
        tried, entry.problem = None, plain(str(wrong))
    app.show(tried or app.document.snapshot, before=app.document.snapshot)
    _paint(app, entry)


def accept(app: BudgetApp) -> bool:
    """Enter what is written; False where it can't stand, and the field stays open."""
    entry = app.entry
    if entry is None:
        return True
    text = entry.field.text
    try:
        if text != entry.tried:
            entry.attempt(text)
        end(app)
        entry.accept(text)
    except (WritingError, EditError) as wrong:
        entry.problem = plain(str(wrong))
        app.entry = entry
        _paint(app, entry)
        app.tell()
        return False
    return True


def leave(app: BudgetApp) -> None:
    """Close the field and leave things as they were."""
    if app.entry is not None and app.entry.undo is not None:
        app.entry.undo()
    end(app)
    app.show(app.document.snapshot)


def end(app: BudgetApp) -> None:
    """Take the field away."""
    app.entry = None
    app.ledger.field, app.ledger.problem = None, ""
    app.foot.ask("", None)
    app.say("")
    app.tell()


def edit_cell(app: BudgetApp) -> None:
    """Open the cell under the cursor: its value as it is written in the file."""
    row = app.ledger.row
    if row is None:
        app.say("the run is empty: write [source.P1] on the Text screen", "note")
        return
    path = key_of_cell(app.document.snapshot.text, row, app.ledger.column)
    if path is None:
        app.say(f"{app.ledger.column} is computed; Tab goes to the next cell that can be edited", "note")
    elif path == row.path:
        rename(app)
    else:
        edit_key(app, path, in_cell=True)


def edit_key(app: BudgetApp, path: Path, *, in_cell: bool = False) -> None:
    """Open a value by its keys, in the cell under the cursor or at the foot."""
    before = written(app.document.snapshot.text, path)
    begin(
        app,
        Entry(
            label=dotted(path[2:]) + (f" of {plain(str(path[1]))}" if len(path) > 2 else ""),
            field=Field.holding(before),
            attempt=lambda text: try_value(app, path, before, text),
            accept=lambda text: set_value(app, path, before, text),
            in_cell=in_cell,
            path=path,
        ),
    )


def try_value(app: BudgetApp, path: Path, before: str, text: str) -> Snapshot | None:
    """Return what the run would be with a value; raises WritingError where the value can't stand."""
    if text == before:
        return None
    after = app.trials.preview(edit_of(path, before, text))
    wrong = objection(app.document.snapshot, after, path)
    if wrong:
        raise WritingError(wrong)
    return after


def set_value(app: BudgetApp, path: Path, before: str, text: str) -> None:
    """Put a value into the document, as one undo step."""
    if text == before:
        app.show(app.document.snapshot)
        return
    app.apply(edit_of(path, before, text), f"{dotted(path[2:])} of {path[1]}")


def edit_of(path: Path, before: str, text: str) -> Edit:
    """Return the edit that a typed text means; an empty one takes the key out."""
    if not text.strip():
        return Unset(path)
    return SetValue(path, value_of(text, path, before))


def set_key(app: BudgetApp) -> None:
    """Ask for a key and its value, `limit_velocity = 1.2 m/s`, and set it on the row; no value takes the key out."""
    row = app.ledger.row
    if row is None:
        return

    def parts(text: str) -> tuple[Path, str]:
        name, sign, value = text.partition("=")
        if not sign or not name.strip():
            raise WritingError("write KEY = VALUE")
        keys = tuple(int(part) if part.isdecimal() else part.strip('"') for part in name.strip().split("."))
        return (*row.path, *keys), value.strip()

    def attempt(text: str) -> Snapshot | None:
        path, value = parts(text)
        return try_value(app, path, written(app.document.snapshot.text, path), value)

    def take(text: str) -> None:
        path, value = parts(text)
        set_value(app, path, written(app.document.snapshot.text, path), value)

    begin(app, Entry(f"{dotted(row.path)}: key = value", Field(), attempt, take))


def rename(app: BudgetApp) -> None:
    """Ask for another ID; everything that refers to it follows."""
    row = app.ledger.row
    if row is None or row.kind == "item":
        app.say("an item has a name, not an ID; edit its cell", "note")
        return

    def edit(text: str) -> Edit:
        if not text.strip():
            raise WritingError("an ID can't be empty")
        known = app.document.snapshot.description
        if text in known.sources or text in known.sections or text in known.terminals:
            raise WritingError(f"{plain(text)} is taken")
        if row.shares_id:  # what names the ID means the other that has it
            return RenameKey(row.path, text)
        return rename_everywhere(app.document.snapshot.text, str(row.path[0]), row.id, text)

    def attempt(text: str) -> Snapshot | None:
        if text == row.id:
            return None
        after = app.trials.preview(edit(text))
        wrong = objection(app.document.snapshot, after, (row.path[0], text))
        if wrong:
            raise WritingError(wrong)
        return None

    def take(text: str) -> None:
        if text != row.id:
            app.apply(edit(text), f"rename {row.id} to {text}", path=(row.path[0], text))

    in_cell = app.ledger.column == "id"
    begin(app, Entry(f"new ID of {plain(row.id)}", Field.holding(row.id), attempt, take, in_cell))


def next_cell(app: BudgetApp, step: int) -> None:
    """Move the cursor to the next cell that can be edited, on this row or another."""
    ledger, text = app.ledger, app.document.snapshot.text
    keys: list[str] = [placed.column.key for placed in ledger.placed]
    place, column = ledger.cursor, keys.index(ledger.column)
    for _ in range(len(keys) * 3 * max(1, ledger.page)):
        column += step
        if not 0 <= column < len(keys):
            column, place = (0, place + 1) if step > 0 else (len(keys) - 1, place - 1)
        if not 0 <= place < len(ledger.shown):
            return
        key = keys[column]
        if key != "id" and key_of_cell(text, ledger.shown[place], key) is not None:
            ledger.column = key
            ledger.go(place)
            app.tell()
            return


def accept_and_move(app: BudgetApp, step: int) -> None:
    """Enter what is written and open the next cell."""
    in_cell = app.entry is not None and app.entry.in_cell
    if accept(app) and in_cell:
        next_cell(app, step)
        edit_cell(app)


def _paint(app: BudgetApp, entry: Entry) -> None:
    if entry.in_cell:
        app.ledger.field, app.ledger.problem = entry.field, entry.problem
        app.ledger.repaint()
        app.foot.say(entry.problem or entry.label, "error" if entry.problem else "faint")
    else:
        app.foot.message, app.foot.role = entry.problem, "error"
        app.foot.ask(entry.label, entry.field)
