"""The run as rows of the ledger: an indented tree in file order, and the cells of a row as safe, finished text."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from typing import Literal

from budget.description.finding import Level, Path
from budget.description.model import Description, Item, Run, Section, Source, Terminal
from budget.document import Snapshot
from budget.network.results import ItemResult, RunResult, SectionResult, SourceResult, TerminalResult
from budget.report.figures import NONE, Figures, plain_number
from budget.report.plain import plain
from budget.report.tree import hang
from budget.screens.safe import steady
from budget.units import Dimension

Kind = Literal["source", "section", "terminal", "item"]

INDEX_SIGN = "»"
OVER_SIGN = "!"
FOLDED_SIGN = "+"
ITEM_SIGN = "· "

DEEPEST_INDENT = 7
"""Cells; a branch that hangs deeper is not indented further."""

_COLUMN_OF_CODE: Mapping[str, str] = {
    "velocity": "velocity",
    "slow": "velocity",
    "gradient": "gradient",
    "excess": "margin",
    "nothing-in-hand": "sum",
    "unknown-size": "size",
    "size": "size",
    "no-flow": "flow",
}


@dataclass(frozen=True, slots=True)
class Row:
    """One row: the keys that lead to its table, what it is, the ID it belongs to, and how deep it hangs."""

    path: Path
    kind: Kind
    id: str
    depth: int
    branch: bool = False
    """Whether other rows hang on it."""

    @property
    def shares_id(self) -> bool:
        """Whether another part has the ID that the file gives it: it is known by another, which the file can't name."""
        return self.path[1] != self.id


@dataclass(frozen=True, slots=True)
class Cell:
    """One cell: its text, the role of its style, and a sign behind it."""

    text: str = ""
    role: str = ""
    sign: str = ""


EMPTY = Cell()


def tree(description: Description) -> tuple[Row, ...]:
    """Return every row of a run: each source, its items, its sections and terminals as they hang, in file order.

    What hangs on nothing known stands at the end, so that it can be mended.
    """
    hung = tuple(hang(description))
    rows: list[Row] = []
    for place, (id_, depth) in enumerate(hung):
        branch = place + 1 < len(hung) and hung[place + 1].depth > depth
        rows += _own_rows(description, id_, depth, branch)
    return tuple(rows)


def visible(rows: Iterable[Row], folded: frozenset[str]) -> Iterator[Row]:
    """Leave out what hangs on a folded row, and the items of one."""
    hidden_below: int | None = None
    for row in rows:
        if hidden_below is not None and row.depth > hidden_below:
            continue
        hidden_below = row.depth if row.kind != "item" and row.id in folded else None
        yield row


def beneath(rows: tuple[Row, ...], place: int) -> tuple[Row, ...]:
    """Return the rows that hang on the row at `place`, items left out."""
    root = rows[place]
    below = []
    for row in rows[place + 1 :]:
        if row.depth <= root.depth:
            break
        if row.kind != "item":
            below.append(row)
    return tuple(below)


def bearing(rows: tuple[Row, ...], row: Row) -> frozenset[str]:
    """Return the IDs of the rows on which a row hangs."""
    found, depth = set(), row.depth
    for above in reversed(rows[: rows.index(row)]):
        if above.depth < depth:
            found.add(above.id)
            depth = above.depth
    return frozenset(found)


class View:
    """What the ledger shows of one snapshot: its rows, and the cells of a row when they are asked for."""

    __slots__ = ("_cells", "_levels", "_marks", "figures", "snapshot", "texts")

    def __init__(self, snapshot: Snapshot) -> None:
        """Take a snapshot; nothing is computed or spelled before it is asked for."""
        self.snapshot = snapshot
        self.figures = Figures(snapshot.description)
        self._cells: dict[Path, Mapping[str, Cell]] = {}
        self.texts: dict[Path, str] = {}
        """What rows say, to be sought in, as far as it was asked for."""
        self._marks: dict[str, dict[str, Level]] = {}
        self._levels: dict[Path, Level] = {}
        for finding in snapshot.findings:
            if finding.level is not Level.NOTE and finding.owner:
                marks = self._marks.setdefault(finding.owner, {})
                marks.setdefault(_COLUMN_OF_CODE.get(finding.code, "id"), finding.level)
                if self._levels.get(finding.path[:4]) is not Level.ERROR:
                    self._levels[finding.path[:4]] = finding.level

    def on_index(self, row: Row) -> bool:
        """Whether a row is on the index circuit."""
        return row.id in self.snapshot.budget.index

    def level(self, row: Row) -> Level | None:
        """Return the gravest finding of a row above a note; of an item, what is found at itself."""
        if row.kind == "item":
            return self._levels.get(row.path)
        marks = self._marks.get(row.id, {}).values()
        return Level.ERROR if Level.ERROR in marks else (Level.WARNING if marks else None)

    def cells(self, row: Row) -> Mapping[str, Cell]:
        """Return the cells of a row by column; a column that says nothing of this row is left out."""
        found = self._cells.get(row.path)
        if found is None:
            found = self._cells[row.path] = self._marked(row, self._spell(row))
        return found

    def _spell(self, row: Row) -> dict[str, Cell]:
        description, budget = self.snapshot.description, self.snapshot.budget
        match row.kind:
            case "source":
                return self._source(description.sources[row.id], budget.sources.get(row.id))
            case "section":
                return self._section(description.sections[row.id], budget.sections.get(row.id))
            case "terminal":
                return self._terminal(description.terminals[row.id], budget.terminals.get(row.id))
            case "item":
                return self._item(row)

    def _source(self, source: Source, result: SourceResult | None) -> dict[str, Cell]:
        cells = {"id": Cell(steady(source.id), "title"), "title": Cell(plain(source.title))}
        if result is not None:
            density = result.fluid.density
            cells["flow"] = Cell(self.figures.flow(result.flow, result.mass_flow))
            cells["drop"] = Cell(self.figures.pressure(result.items_drop, density)) if result.items else EMPTY
            cells["sum"] = Cell(self.figures.pressure(result.required, density))
        return cells

    def _section(self, section: Section, result: SectionResult | None) -> dict[str, Cell]:
        cells = {"id": Cell(steady(section.id)), **self._run(section.run, result.run if result else None)}
        cells |= self._texts(section)
        if result is not None:
            density = self._density(result.source)
            cells["flow"] = Cell(self.figures.flow(result.run.flow, result.run.mass_flow))
            cells["drop"] = Cell(self.figures.pressure(result.run.drop, density))
            cells["sum"] = Cell(self.figures.pressure(result.cumulative, density))
            cells["differential"] = Cell(self.figures.pressure(result.differential, density))
            cells["margin"] = Cell(self.figures.pressure(result.margin, density))
        return cells

    def _terminal(self, terminal: Terminal, result: TerminalResult | None) -> dict[str, Cell]:
        cells = {"id": Cell(steady(terminal.id)), **self._texts(terminal)}
        if terminal.run is not None:
            cells |= self._run(terminal.run, result.run_out if result else None)
        if result is not None:
            density = self._density(result.source)
            cells["flow"] = Cell(self.figures.flow(result.flow, result.mass_flow))
            cells["drop"] = Cell(self.figures.pressure(result.drop, density))
            cells["sum"] = Cell(self.figures.pressure(result.circuit, density))
            cells["differential"] = Cell(self.figures.pressure(result.differential, density))
            cells["margin"] = Cell(self.figures.pressure(result.margin, density))
        return cells

    def _item(self, row: Row) -> dict[str, Cell]:
        item, result, source = find_item(self.snapshot, row)
        cells = {"id": Cell(ITEM_SIGN + steady(item.name), "faint"), "title": Cell(plain(item.name))}
        for name, value in (("Kv", item.kv), ("k", item.k)):
            if value is not None:
                cells["size"] = Cell(f"{name} {plain_number(value)}")
        if item.equivalent_length is not None:
            cells["length"] = Cell(self.figures.text(item.equivalent_length, Dimension.LENGTH))
        if result is not None:
            cells["drop"] = Cell(self.figures.pressure(result.drop, self._density(source)))
        return cells

    def _run(self, run: Run, result: RunResult | None) -> dict[str, Cell]:
        cells = {
            "size": Cell(steady(run.geometry.label) if run.geometry else NONE),
            "length": Cell(self.figures.text(run.length, Dimension.LENGTH)),
            "fittings": Cell(plain(", ".join(f"{use.count} {use.name}" for use in run.fittings))),
        }
        if result is not None and result.legs:
            leg = result.legs[0]
            cells["velocity"] = Cell(self.figures.text(leg.velocity, Dimension.VELOCITY))
            cells["gradient"] = Cell(self.figures.text(leg.gradient, Dimension.GRADIENT))
        return cells

    @staticmethod
    def _texts(part: Section | Terminal) -> dict[str, Cell]:
        return {"title": Cell(plain(part.title)), "balance": Cell(steady(part.balance or ""))}

    def _marked(self, row: Row, cells: dict[str, Cell]) -> dict[str, Cell]:
        """Add the signs: the index circuit in the ID's style, what is over its limit behind its figure."""
        if row.kind == "item":
            return cells
        if row.kind != "source" and self.on_index(row):
            cells["id"] = Cell(cells["id"].text, "index")
        for column, level in self._marks.get(row.id, {}).items():
            cell = cells.get(column, EMPTY)
            cells[column] = Cell(cell.text, "over" if level is Level.WARNING else "error", OVER_SIGN)
        return cells

    def _density(self, source: str) -> float | None:
        result = self.snapshot.budget.sources.get(source)
        return result.fluid.density if result is not None else None


def find_item(snapshot: Snapshot, row: Row) -> tuple[Item, ItemResult | None, str]:
    """Return an item of a row, its result where there is one, and the ID of its source."""
    description, budget = snapshot.description, snapshot.budget
    results: SourceResult | SectionResult | TerminalResult | None
    if row.path[0] == "source":
        items, results, source = description.sources[row.id].items, budget.sources.get(row.id), row.id
    elif row.path[0] == "section":
        items, results = description.sections[row.id].items, budget.sections.get(row.id)
        source = results.source if results else ""
    else:
        items, results = description.terminals[row.id].items, budget.terminals.get(row.id)
        source = results.source if results else ""
    place = next(place for place, item in enumerate(items) if item.path == row.path)
    found = results.items if results is not None else ()
    return items[place], found[place] if place < len(found) else None, source


def _own_rows(description: Description, id_: str, depth: int, branch: bool) -> list[Row]:
    part: Source | Section | Terminal
    kind: Kind
    if id_ in description.sources:
        part, kind = description.sources[id_], "source"
    elif id_ in description.sections:
        part, kind = description.sections[id_], "section"
    elif id_ in description.terminals:
        part, kind = description.terminals[id_], "terminal"
    else:
        return []
    rows = [Row(part.path, kind, id_, depth, branch or bool(part.items))]
    rows += [Row(item.path, "item", id_, depth + 1) for item in part.items]
    return rows
