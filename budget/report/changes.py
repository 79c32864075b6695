"""What changed between two versions of a run: keys, figures and findings.

Figures are told where they are not spelled as they were, in the units of the newer version; both versions are computed
alike. An ID that is in one version alone is told as such, without its figures.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass
from decimal import Decimal, InvalidOperation
from typing import Literal, Protocol

from budget.description import Description
from budget.description.differences import TableChanges, compare
from budget.description.model import Run
from budget.description.pieces import line_ends, with_line_ends
from budget.network import Budget, DeviceResult, LinkResult, SectionResult, SourceResult, TerminalResult
from budget.report.figures import GRAVITY, NONE, Figures, plain_number
from budget.report.located import Located
from budget.report.plain import plain
from budget.units import Basis, Dimension, basis_of

Kind = Literal["source", "terminal", "device", "section", "link"]
Standing = Literal["added", "removed", "changed"]

KINDS: tuple[Kind, ...] = ("source", "terminal", "device", "section", "link")
"""What has figures, in the order in which they are told."""


class Version(Protocol):
    """One version of a run with all that follows from it."""

    @property
    def text(self) -> str:
        """The text of its file."""

    @property
    def description(self) -> Description:
        """What was read."""

    @property
    def budget(self) -> Budget:
        """What was computed."""

    @property
    def findings(self) -> tuple[Located, ...]:
        """What is wrong or doubtful."""


@dataclass(frozen=True, slots=True)
class FigureChange:
    """One figure that changed: its name among the results, what it is called, and both values.

    `before` and `after` are as shown, a dash for none; `was` and `now` in SI, or the text where it is one.
    """

    name: str
    title: str
    unit: str
    before: str
    after: str
    was: float | str | None
    now: float | str | None

    @property
    def difference(self) -> str:
        """By how much, as shown and with its sign; "" where one of them is no number."""
        try:
            return f"{Decimal(self.after) - Decimal(self.before):+f}"
        except InvalidOperation:
            return ""


@dataclass(frozen=True, slots=True)
class RowChanges:
    """What became of a source, terminal, section or link, or of the device that stands on one."""

    kind: Kind
    id: str
    standing: Standing
    figures: tuple[FigureChange, ...] = ()


@dataclass(frozen=True, slots=True)
class Changes:
    """All that changed: the keys table by table, the figures row by row, findings that came up and that went."""

    keys: tuple[TableChanges, ...]
    rows: tuple[RowChanges, ...]
    new: tuple[Located, ...]
    gone: tuple[Located, ...]

    def __bool__(self) -> bool:
        """Whether anything changed."""
        return bool(self.keys or self.rows or self.new or self.gone)


def changes_between(before: Version, after: Version, *, checked_out: bool = False) -> Changes:
    """Return what changed from one version of a run to another.

    With `checked_out` the one before comes out of version control and the other was put on disk by it: how lines end
    is a matter of the machine then, and no change.
    """
    text = before.text
    if checked_out and line_ends(after.text) in ("LF", "CRLF"):
        text = with_line_ends(text, line_ends(after.text))
    return Changes(
        compare(text, after.text),
        tuple(_rows(before, after)),
        tuple(_unknown(after.findings, before.findings)),
        tuple(_unknown(before.findings, after.findings)),
    )


def _unknown(findings: Iterable[Located], known: Iterable[Located]) -> Iterator[Located]:
    """Run through findings that are not known yet; one that moved, or whose figures changed, is."""
    told = list(known)
    places = {(one.code, one.path) for one in told}
    said = {(one.code, one.owner, one.message) for one in told}
    for one in findings:
        if (one.code, one.path) not in places and (one.code, one.owner, one.message) not in said:
            yield one


# Rows


@dataclass(frozen=True, slots=True)
class _Cell:
    """A figure of one version: in SI or as a text, and as it is shown."""

    name: str
    title: str
    unit: str
    value: float | str | None
    shown: str


_Row = tuple[_Cell, ...]
"""The figures of a row; none where it could not be computed."""


def _rows(before: Version, after: Version) -> Iterator[RowChanges]:
    figures = Figures(after.description)
    old, new = (_Reader(version, figures).tables() for version in (before, after))
    for kind in KINDS:
        yield from _compared(kind, old[kind], new[kind])


def _compared(kind: Kind, before: Mapping[str, _Row], after: Mapping[str, _Row]) -> Iterator[RowChanges]:
    for id_, cells in after.items():
        if id_ not in before:
            yield RowChanges(kind, id_, "added")
        elif changed := tuple(_changed(before[id_], cells)):
            yield RowChanges(kind, id_, "changed", changed)
    yield from (RowChanges(kind, id_, "removed") for id_ in before if id_ not in after)


def _changed(before: _Row, after: _Row) -> Iterator[FigureChange]:
    old, new = ({cell.name: cell for cell in row} for row in (before, after))
    for name, cell in ({**new, **old} | new).items():
        was, now = old.get(name), new.get(name)
        shown = [one.shown if one is not None else NONE for one in (was, now)]
        if shown[0] != shown[1]:
            values = [one.value if one is not None else None for one in (was, now)]
            yield FigureChange(name, cell.title, cell.unit, *shown, *values)


class _Reader:
    """Reads the figures of one version, spelled in the units of the newer."""

    def __init__(self, version: Version, figures: Figures) -> None:
        self.description, self.budget, self.figures = version.description, version.budget, figures

    def tables(self) -> Mapping[Kind, Mapping[str, _Row]]:
        """Return the figures of all rows by kind and ID, in the order of the file."""
        described, budget = self.description, self.budget
        carriers: tuple[SectionResult | TerminalResult, ...]
        carriers = (*budget.sections.values(), *budget.terminals.values())
        return {
            "source": {id_: tuple(self._source(budget.sources.get(id_))) for id_ in described.sources},
            "terminal": {id_: tuple(self._terminal(budget.terminals.get(id_))) for id_ in described.terminals},
            "device": {one.id: tuple(self._device(one, one.device)) for one in carriers if one.device is not None},
            "section": {
                id_: tuple(self._run(one.run, budget.sections.get(id_))) for id_, one in described.sections.items()
            },
            "link": {id_: tuple(self._run(one.run, budget.links.get(id_))) for id_, one in described.links.items()},
        }

    def _source(self, result: SourceResult | None) -> Iterator[_Cell]:
        if result is None:
            return
        density = result.fluid.density
        index = ", ".join(result.index)
        yield _Cell("index", "index", "", index, plain(index) or NONE)
        for name in ("required", "reserve", "duty"):
            yield self._pressure(name, name, getattr(result, name), density)
        mass = result.mass_flow * result.duty_flow / result.flow if result.flow else result.mass_flow
        yield self._flow("duty_flow", "duty flow", result.duty_flow, mass)
        if result.kind != "air" and basis_of(self.figures.unit(Dimension.PRESSURE), Dimension.PRESSURE) != Basis.HEAD:
            yield self._measure("duty_head", "duty as a head", result.duty / (density * GRAVITY), Dimension.LENGTH)
        yield self._pressure("available", "available", result.available, density)
        yield self._pressure("in_hand", "in hand", result.in_hand, density)
        for heading, spent in result.spent.items():
            yield self._pressure(f"spent.{heading}", f"spent: {heading}", spent, density)

    def _terminal(self, result: TerminalResult | None) -> Iterator[_Cell]:
        if result is None:
            return
        density = self._density(result)
        yield self._flow("flow", "flow", result.flow, result.mass_flow)
        yield self._pressure("margin", "margin", result.margin, density)
        yield self._pressure("excess", "excess", result.excess, density)
        yield _Cell("authority", "authority", "", _known(result.authority), plain_number(result.authority, 2))

    def _device(self, carrier: SectionResult | TerminalResult, device: DeviceResult) -> Iterator[_Cell]:
        density = self._density(carrier)
        yield _Cell("name", "device", "", device.name, plain(device.name))
        yield _Cell("setting", "setting", "", _known(device.setting), plain_number(device.setting))
        yield self._pressure("drop", "drop", device.drop, density)
        yield self._pressure("take_up", "takes up", device.take_up, density)

    def _run(self, run: Run, result: SectionResult | LinkResult | None) -> Iterator[_Cell]:
        size = run.geometry.label if run.geometry is not None else None
        yield _Cell("size", "size", "", size, plain(size) if size else NONE)
        if result is None:
            return
        found = result.run
        yield self._flow("flow", "flow", found.flow, found.mass_flow)
        yield self._pressure("drop", "drop", found.drop, self._density(result))
        if found.legs:
            yield self._measure("velocity", "velocity", found.legs[0].velocity, Dimension.VELOCITY)

    def _density(self, result: SectionResult | TerminalResult | LinkResult) -> float:
        return self.budget.sources[result.source].fluid.density

    def _pressure(self, name: str, title: str, value: float | None, density: float) -> _Cell:
        unit = self.figures.unit(Dimension.PRESSURE)
        return _Cell(name, title, unit, _known(value), self.figures.pressure(value, density))

    def _flow(self, name: str, title: str, volume: float, mass: float) -> _Cell:
        return _Cell(name, title, self.figures.unit(Dimension.FLOW), _known(volume), self.figures.flow(volume, mass))

    def _measure(self, name: str, title: str, value: float, dimension: Dimension) -> _Cell:
        return _Cell(name, title, self.figures.unit(dimension), _known(value), self.figures.text(value, dimension))


def _known(value: float | None) -> float | None:
    return value if value is not None and math.isfinite(value) else None
