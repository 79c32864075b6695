"""Row detail: everything written and everything computed for a row, leg by leg, each fitting with its source."""

from __future__ import annotations

from collections.abc import Iterator

from budget.description.finding import Path
from budget.document import Snapshot
from budget.network.results import RunResult, SectionResult, SourceResult, TerminalResult
from budget.report.figures import Figures, plain_number
from budget.report.plain import plain
from budget.screens.joining import STATED, hangs_on_section, part_of
from budget.screens.losses import Losses
from budget.screens.page import Line
from budget.screens.rows import Row, find_item
from budget.screens.writing import index_of, is_stated, stated_keys, written
from budget.units import Dimension

MOST_SERVED = 12
"""Terminals that are named of those that a section serves."""


def lines_of(snapshot: Snapshot, row: Row) -> list[Line]:
    """Return the lines of a row: what is wrong with it, what is written, what is computed."""
    lines = [Line(row.kind, plain(row.id), "title")]
    lines += [
        Line(finding.level.value, plain(finding.message), finding.level.value)
        for finding in snapshot.findings
        if finding.owner == row.id and row.kind != "item"
    ]
    lines += [Line("as written", "", "heading"), *_written(snapshot.text, row.path), *_unstated(snapshot, row)]
    return [*lines, *_Computed(snapshot, row).lines()]


def _written(text: str, table: Path) -> Iterator[Line]:
    for key in stated_keys(text, table):
        path = (*table, key)
        yield Line(f"  {plain(key)}", plain(written(text, path)), "", path)
    for path in index_of(text).tables():
        if len(path) == len(table) + 2 and path[: len(table)] == table:
            name = written(text, (*path, "name")) or written(text, (*path, "kind"))
            yield Line(f"  {plain(str(path[-2]))} {path[-1]}", plain(name), "")


def _unstated(snapshot: Snapshot, row: Row) -> Iterator[Line]:
    """Yield what could be stated of the junction that a row hangs on, with what stands for it now."""
    part = part_of(snapshot.description, row.id) if row.kind in ("section", "terminal") else None
    if part is None or part.run is None or not hangs_on_section(snapshot.description, part):
        return
    run, joined = part.run, part.takeoff in STATED
    for key, value, shown in (
        ("takeoff", part.takeoff, True),
        ("junction", run.junction, joined),
        ("angle", f"{run.angle:g} deg", joined),
        ("transition", None, True),
    ):
        path = (*row.path, key)
        if shown and not is_stated(snapshot.text, path):
            yield Line(f"  {key}", f"not stated: {value}" if value else "not stated", "faint", path)


class _Computed:
    """The figures of one row, spelled with their units."""

    def __init__(self, snapshot: Snapshot, row: Row) -> None:
        self.snapshot, self.row = snapshot, row
        self.figures = Figures(snapshot.description)
        self.density: float | None = None

    def lines(self) -> Iterator[Line]:
        budget = self.snapshot.budget
        if self.row.kind == "item":
            yield from self._item()
        elif self.row.kind == "source":
            source = budget.sources.get(self.row.id)
            yield from self._source(source) if source else _nothing()
        elif self.row.kind == "section":
            section = budget.sections.get(self.row.id)
            yield from self._section(section) if section else _nothing()
        else:
            terminal = budget.terminals.get(self.row.id)
            yield from self._terminal(terminal) if terminal else _nothing()

    def _source(self, result: SourceResult) -> Iterator[Line]:
        self.density = result.fluid.density
        fluid = result.fluid
        yield Line(f"{result.kind} circuit", "", "heading")
        yield Line("  fluid", plain(fluid.name))
        for label, density, viscosity in (
            ("  supply", fluid.density, fluid.viscosity),
            ("  return", fluid.return_density, fluid.return_viscosity),
        ):
            text = self.figures.text(density, Dimension.DENSITY, unit=True)
            yield Line(label, f"{text}, {self.figures.text(viscosity, Dimension.VISCOSITY, unit=True)}")
        yield self._flow("flow", result.flow, result.mass_flow)
        yield Line("duty", "", "heading")
        for label, value in (
            ("required", result.required), ("of it static", result.static), ("reserve", result.reserve),
            ("duty", result.duty), ("available", result.available), ("in hand", result.in_hand),
            ("discharge", result.discharge_required), ("suction", result.suction_required),
            ("external total", result.external_total), ("external static", result.external_static),
        ):  # fmt: skip
            yield from self._pressure(label, value)
        yield self._flow("duty flow", result.duty_flow, None)
        yield from self._leakage(result.leakage)
        for label, value in (
            ("hydraulic power", result.hydraulic_power), ("shaft power", result.shaft_power),
            ("electrical power", result.electrical_power),
        ):  # fmt: skip
            if value is not None:
                yield Line(f"  {label}", self.figures.text(value, Dimension.POWER, unit=True))
        if result.sfp is not None:
            yield Line("  specific power", f"{plain_number(result.sfp)} W/(m3/s)")
        yield Line("spent, of its budget", "", "heading")
        for heading, value in result.spent.items():
            limit = result.budget.get(heading)
            of = f" of {self.figures.pressure(limit, self.density, unit=True)}" if limit is not None else ""
            over = limit is not None and value > limit
            spent = self.figures.pressure(value, self.density, unit=True)
            yield Line(f"  {heading}", spent + of, "over" if over else "")
        if result.items:
            yield Line("items", "", "heading")
        yield from Losses(self.figures, self.density).items(result.items)

    def _section(self, result: SectionResult) -> Iterator[Line]:
        self._take_density(result.source)
        yield from self._size(result.run)
        losses = Losses(self.figures, self.density)
        yield from losses.sums(result.run)
        yield Line("in the circuit", "", "heading")
        yield from self._pressure("sum so far", result.cumulative)
        yield from self._pressure("differential", result.differential)
        yield from self._pressure("margin", result.margin)
        yield Line("  index circuit", "yes" if result.index else "no", "index" if result.index else "")
        more = len(result.serves) - MOST_SERVED
        named = plain(", ".join(result.serves[:MOST_SERVED])) + (f" and {more} more" if more > 0 else "")
        yield Line("  serves", f"{len(result.serves)}: {named}")
        yield from self._authority(result.authority, result.authority_low)
        yield from losses.legs(result.run, result.items, result.device)

    def _terminal(self, result: TerminalResult) -> Iterator[Line]:
        self._take_density(result.source)
        yield Line("circuit", "", "heading")
        yield self._flow("flow", result.flow, result.mass_flow)
        for label, value in (
            ("drop", result.drop), ("items", result.items_drop), ("static", result.static),
            ("circuit", result.circuit), ("differential", result.differential), ("margin", result.margin),
            ("excess", result.excess),
        ):  # fmt: skip
            yield from self._pressure(label, value)
        yield Line("  index circuit", "yes" if result.index else "no", "index" if result.index else "")
        yield Line("  path", plain(" ".join(result.path)))
        yield from self._authority(result.authority, result.authority_low)
        losses = Losses(self.figures, self.density)
        yield from losses.items(result.items)
        yield from losses.device(result.device)
        if result.run_out is not None:
            yield from self._size(result.run_out, "run-out")
            yield from losses.sums(result.run_out)
            yield from losses.legs(result.run_out)

    def _item(self) -> Iterator[Line]:
        item, result, source = find_item(self.snapshot, self.row)
        self._take_density(source)
        if result is None:
            yield from _nothing()
            return
        yield Line("computed", "", "heading")
        yield from self._pressure("drop", result.drop)
        yield Line("  heading", result.heading)
        if item.control:
            yield Line("  control", item.control)

    def _size(self, run: RunResult, what: str = "computed") -> Iterator[Line]:
        yield Line(what, "", "heading")
        yield self._flow("flow", run.flow, run.mass_flow)
        for label, value in (("bore", run.bore), ("width", run.width), ("height", run.height)):
            if value is not None:
                yield Line(f"  {label}", self.figures.text(value, Dimension.LENGTH, small=True, unit=True))
        yield from self._leakage(run.leakage)

    def _leakage(self, leakage: float | None) -> Iterator[Line]:
        if leakage is not None:
            yield Line("  leakage", f"{self.figures.text(leakage, Dimension.FLOW, unit=True)} at mean static pressure")

    def _authority(self, authority: float | None, low: float | None) -> Iterator[Line]:
        if authority is not None:
            yield Line("  authority", plain_number(authority, 2))
        if low is not None:
            yield Line("  low authority", plain_number(low, 2))

    def _pressure(self, label: str, value: float | None) -> Iterator[Line]:
        if value is not None:
            yield Line(f"  {label}", self.figures.pressure(value, self.density, unit=True))

    def _flow(self, label: str, volume: float, mass: float | None) -> Line:
        return Line(f"  {label}", self.figures.flow(volume, mass, unit=True))

    def _take_density(self, source: str) -> None:
        result = self.snapshot.budget.sources.get(source)
        self.density = result.fluid.density if result is not None else None


def _nothing() -> Iterator[Line]:
    yield Line("nothing is computed", "until the errors are mended", "error")
