"""Edits that change the shape of a run: adding, duplicating, moving, deleting. Each is one value and one undo step."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import pairwise
from typing import Any, Literal

from budget.description.edits import AddTable, CopyTable, Edit, MoveTable, RemoveTable, SetValue, Several, Unset
from budget.description.finding import Path
from budget.description.model import Description, Section, Terminal
from budget.screens.naming import new_id
from budget.screens.rows import Row, beneath
from budget.screens.writing import copied, index_of, last_table, start_of, stated_keys

Where = Literal["after", "before", "beneath"]

_COPIED_TO_A_SECTION = ("pipe", "duct", "size", "bore", "length", "paired", "class", "fitting_method")
_COPIED_TO_A_TERMINAL = (
    "pipe", "duct", "size", "bore", "length", "paired", "takeoff", "balance", "flow", "load", "drop", "static_drop",
    "neck", "at", "exponent", "return_temperature",
)  # fmt: skip


class ShapingError(ValueError):
    """A change of shape that makes no sense here; the text says why."""


@dataclass(frozen=True, slots=True)
class Change:
    """An edit, what it is called in the list of undo steps, and where the cursor goes then."""

    edit: Edit
    label: str
    path: Path


def add_section(text: str, description: Description, rows: tuple[Row, ...], place: int, where: Where) -> Change:
    """Add a section after a row (between it and what hangs on it), before it, or beneath it as a new branch.

    After means farther from the source. It takes its size and length from its neighbour, and before a row also what
    that was at its junction. Raises ShapingError on a terminal's far side and on the near side of a source.
    """
    place = _owner(rows, place)
    row = rows[place]
    side = _side(description, row)
    if row.kind == "source" and where == "before":
        raise ShapingError("nothing comes before a source; add after or beneath it")
    if row.kind == "terminal" and where != "before":
        raise ShapingError("nothing hangs on a terminal; add before it")
    id_ = new_id("S1" if row.kind == "source" else _section_like(description, row), _taken(description))
    path: Path = ("section", id_)
    parent = _named(row) if where != "before" else (_held_by(description, row) or "")
    if not parent:
        raise ShapingError(f"{row.id} hangs on nothing; write what it hangs on first")
    model = _section_model(description, row)
    values = {side: parent, **copied(text, model, _COPIED_TO_A_SECTION)}
    if not ({"size", "bore"} & set(values)):
        values["length"] = values.get("length", 1)
    hung: list[Edit] = []
    if where == "before":
        hung = [SetValue((*row.path, side), id_)]
    elif where == "after":
        hung = [SetValue((*part.path, side), id_) for part in _hanging_on(description, row.id, side)]
    anchor = row.path if where == "before" else last_table(text, row.path)
    joined: list[Edit] = []
    if where == "before":
        taken_over = copied(text, row.path, _joint_of(row))
        values |= taken_over
        joined = [Unset((*row.path, key)) for key in taken_over]
    added = AddTable(path, values, after=None if where == "before" else anchor)
    moved = [MoveTable(path, before=row.path)] if where == "before" else []
    return Change(Several((added, *moved, *hung, *joined)), f"add section {id_}", path)


def add_terminal(text: str, description: Description, rows: tuple[Row, ...], place: int) -> Change:
    """Add a terminal beside the one under the cursor, or on the section or source there.

    It takes its flow, drop, size and device from the nearest terminal, and a new ID after it.
    """
    place = _owner(rows, place)
    row = rows[place]
    sibling = _nearest_terminal(description, rows, place)
    if row.kind == "terminal":
        parent, side = _held_by(description, row) or "", _side(description, row)
    else:
        parent, side = _named(row), _side(description, row)
    if not parent:
        raise ShapingError(f"{row.id} hangs on nothing; write what it hangs on first")
    if side == "to" and not description.fluid.gas:
        raise ShapingError("a terminal is added on the section that feeds it; this one is a return")
    id_ = new_id(sibling.id if sibling else "T1", _taken(description), itself=sibling is None)
    path: Path = ("terminal", id_)
    values: dict[str, Any] = {side: parent}
    if sibling is not None:
        values |= copied(text, sibling.path, _COPIED_TO_A_TERMINAL)
        if values.get("takeoff") != "none":
            values.pop("takeoff", None)
        if sibling.to is not None and sibling.from_ is not None and side == "from":
            values["to"] = sibling.to
    if not {"flow", "load"} & set(values):
        values |= _first_terminal(description)
    after = last_table(text, sibling.path if sibling else row.path)
    return Change(AddTable(path, values, after=after), f"add terminal {id_}", path)


def duplicate(text: str, description: Description, rows: tuple[Row, ...], place: int) -> Change:
    """Duplicate a row with everything that hangs on it, under new IDs, beside the original."""
    row = rows[place]
    if row.kind == "item":
        return _duplicate_item(text, row)
    if row.kind == "source":
        raise ShapingError("a source can't be duplicated; duplicate a branch of it")
    taken = set(_taken(description))
    names: dict[str, str] = {}
    branch = (row, *beneath(rows, place))
    if not any(part.kind == "terminal" for part in branch):
        raise ShapingError(f"no terminal hangs on {row.id} here; duplicate the branch with its terminals")
    for part in branch:
        names[part.id] = new_id(part.id, taken)
        taken.add(names[part.id])
    copies: list[Edit] = []
    for part in branch:
        changes = {side: names[held] for side, held in _hangings(description, part) if held in names}
        copies.append(CopyTable(part.path, (part.path[0], names[part.id]), changes))
    label = f"duplicate {row.id} as {names[row.id]}"
    return Change(Several(tuple(copies)), label, (row.path[0], names[row.id]))


def delete(text: str, _description: Description, rows: tuple[Row, ...], place: int) -> Change:
    """Delete a row with everything that hangs on it; what cases say of it goes too."""
    row = rows[place]
    if row.kind == "item":
        return Change(RemoveTable(row.path), f"delete an item of {row.id}", row.path[:2])
    branch = (row, *beneath(rows, place))
    gone = {part.id for part in branch}
    removed: list[Edit] = [RemoveTable(part.path) for part in branch]
    removed += _without_in_cases(text, gone)
    more = f" and {len(branch) - 1} more" if len(branch) > 1 else ""
    near = rows[place - 1].path if place else ()
    return Change(Several(tuple(removed)), f"delete {row.id}{more}", near)


def rehang(description: Description, row: Row, parent: str) -> Change:
    """Hang a branch on another section or source, on the same side of it."""
    side = _side(description, row)
    return Change(SetValue((*row.path, side), parent), f"hang {row.id} on {parent}", row.path)


def parents_for(description: Description, rows: tuple[Row, ...], place: int) -> tuple[str, ...]:
    """Return the IDs on which the branch of a row can hang: sources and sections that don't hang on it."""
    row = rows[place]
    if row.kind in ("source", "item"):
        raise ShapingError("only a section or a terminal can be moved")
    own = {row.id, *(part.id for part in beneath(rows, place))}
    side = _side(description, row)
    sections = (
        s.id for s in description.sections.values() if s.id == s.path[1] and (s.from_ is not None) == (side == "from")
    )
    return tuple(id_ for id_ in (*description.sources, *sections) if id_ not in own)


def shift(text: str, description: Description, rows: tuple[Row, ...], place: int, step: int) -> Change:
    """Move a branch in the file before or behind its neighbour on the same section."""
    row = rows[place]
    if row.kind == "item":
        raise ShapingError("items keep their order; move the section")
    neighbours = [
        other
        for other in rows
        if other.kind != "item"
        and other.depth == row.depth
        and _held_by(description, other) == _held_by(description, row)
    ]
    at = neighbours.index(row) + step
    if not 0 <= at < len(neighbours):
        raise ShapingError(f"{row.id} is the {'first' if step < 0 else 'last'} of its neighbours")
    other = neighbours[at]
    branch = (row, *beneath(rows, place))
    if step < 0:
        edits: tuple[Edit, ...] = tuple(MoveTable(part.path, before=other.path) for part in branch)
    else:
        behind = (other, *beneath(rows, rows.index(other)))
        anchor = max((part.path for part in behind), key=lambda path: start_of(text, path))
        chain = [anchor, *(part.path for part in branch)]
        edits = tuple(MoveTable(path, after=before) for before, path in pairwise(chain))
    return Change(Several(edits), f"move {row.id} {'up' if step < 0 else 'down'}", row.path)


def _owner(rows: tuple[Row, ...], place: int) -> int:
    """Return the place of the section, terminal or source to which the row of an item belongs."""
    while rows[place].kind == "item":
        place -= 1
    return place


def _taken(description: Description) -> set[str]:
    return {*description.sources, *description.sections, *description.terminals}


def _part(description: Description, id_: str) -> Section | Terminal | None:
    return description.sections.get(id_) or description.terminals.get(id_)


def _named(row: Row) -> str:
    """Return the ID by which another table can name a row."""
    if row.shares_id:
        raise ShapingError(f"{row.id} can't be named, as another has its ID; rename it first")
    return row.id


def _side(description: Description, row: Row) -> Literal["from", "to"]:
    """Return the key by which a row hangs on its parent; what hangs on it uses the same one."""
    part = _part(description, row.id)
    return "to" if part is not None and part.from_ is None and part.to is not None else "from"


def _held_by(description: Description, row: Row) -> str | None:
    part = _part(description, row.id)
    return None if part is None else part.from_ or part.to


def _hanging_on(description: Description, id_: str, side: str) -> list[Section | Terminal]:
    """Return the sections and terminals that name an ID as what they hang on, on one side."""
    parts: list[Section | Terminal] = [*description.sections.values(), *description.terminals.values()]
    return [part for part in parts if (part.from_ if side == "from" else part.to) == id_]


def _joint_of(row: Row) -> tuple[str, ...]:
    """Return the keys that say what a row is at its junction; a section put before it has its size, if it is one."""
    return ("takeoff", "junction", "angle", *(("transition",) if row.kind == "section" else ()))


def _hangings(description: Description, row: Row) -> tuple[tuple[str, str], ...]:
    part = _part(description, row.id)
    found = (("from", part.from_), ("to", part.to)) if part is not None else ()
    return tuple((side, held) for side, held in found if held is not None)


def _section_like(description: Description, row: Row) -> str:
    """Return the ID that a new section's is counted on from: that of the section here or above."""
    if row.id in description.sections:
        return row.id
    held = _held_by(description, row)
    return held if held is not None and held in description.sections else next(iter(description.sections), "S1")


def _section_model(description: Description, row: Row) -> Path | None:
    if row.id in description.sections:
        return row.path
    held = _held_by(description, row)
    if held is not None and held in description.sections:
        return ("section", held)
    first = next((s for s in description.sections.values() if row.id in (s.from_, s.to)), None)
    return first.path if first else None


def _nearest_terminal(description: Description, rows: tuple[Row, ...], place: int) -> Terminal | None:
    """Return the terminal here, else the last one beneath, else the nearest above or below in the ledger."""
    row = rows[place]
    if row.kind == "terminal":
        return description.terminals[row.id]
    ids = [part.id for part in beneath(rows, place) if part.kind == "terminal"]
    ids += [part.id for part in (*rows[place::-1], *rows[place:]) if part.kind == "terminal"][:1]
    last_beneath = [part.id for part in beneath(rows, place) if part.kind == "terminal"]
    chosen = last_beneath[-1:] or ids[:1]
    return description.terminals[chosen[0]] if chosen else None


def _first_terminal(description: Description) -> dict[str, Any]:
    gas = description.fluid.gas
    if description.design.units == "IP":
        return {"flow": "100 cfm", "drop": "0.1 inH2O"} if gas else {"flow": "1 gpm", "drop": "4 ftH2O"}
    return {"flow": "50 L/s", "drop": "25 Pa"} if gas else {"flow": "0.1 L/s", "drop": "10 kPa"}


def _duplicate_item(text: str, row: Row) -> Change:
    array = row.path[:3]
    count = sum(path[:3] == array and len(path) == 4 for path in index_of(text).tables())
    values = copied(text, row.path, stated_keys(text, row.path))
    path = (*array, count)
    return Change(AddTable(array, values, after=row.path, array=True), f"duplicate an item of {row.id}", path)


def _without_in_cases(text: str, gone: set[str]) -> list[Edit]:
    """Return the edits that take IDs out of what the cases say of terminals."""
    edits: list[Edit] = []
    index = index_of(text)
    for case in (path for path in index.tables() if path[:1] == ("case",) and len(path) == 2):
        data: Mapping[str, Any] = copied(text, case, ("off", "share", "stroke"))
        for key, value in data.items():
            kept = [i for i in value if i not in gone]
            if len(kept) == len(value):
                continue
            left: Any = kept if isinstance(value, list) else {i: value[i] for i in kept}
            edits.append(SetValue((*case, key), left))
    return edits
