"""The first table of a report: the run as an indented ledger."""

from __future__ import annotations

from collections.abc import Iterator

from budget.description import Description, Item, Run
from budget.network import Budget, DeviceResult, ItemResult, RunResult, SectionResult, TerminalResult
from budget.report.figures import Figures, plain_number
from budget.report.plain import plain
from budget.report.table import Column, table, wrapped
from budget.report.tree import hang
from budget.units import Dimension

DEEPEST_INDENT = 20
"""Levels; a row that hangs deeper says its level in brackets."""

NAME_ROOM = 25
"""Columns that names of items and devices may take, indent and all, where the IDs need fewer; the item and device
tables have them whole."""

INDEX = "index"
"""The sign of the index circuit, a word so that it can be heard as well."""

_LEGEND = (
    "sum: along the largest circuit through the row, from the source, with static heads, devices fully open. diff.: "
    "what is available at the connection of the row. margin: what could be added there before the index circuit moves. "
    "vel. and grad.: of the supply leg where there are two. drop: both legs with what stands on them; of a terminal "
    "and of a device, its own. Of a terminal, sum is its whole circuit."
)


def ledger(description: Description, budget: Budget, figures: Figures) -> list[str]:
    """Return the run as an indented tree, a row for each source, item, section, terminal and run-out."""
    pressure = figures.unit(Dimension.PRESSURE)
    columns = [
        Column("", left=True),
        Column("size", left=True),
        Column("length", figures.unit(Dimension.LENGTH)),
        Column("flow", figures.unit(Dimension.FLOW)),
        Column("vel.", figures.unit(Dimension.VELOCITY)),
        Column("grad.", figures.unit(Dimension.GRADIENT)),
        Column("drop", pressure),
        Column("sum", pressure),
        Column("diff.", pressure),
        Column("margin", pressure),
        Column("", left=True),
    ]
    return [
        *table(columns, _Rows(description, budget, figures).all()),
        *wrapped(_LEGEND, "  ", "  "),
    ]


class _Rows:
    """The rows of the ledger."""

    def __init__(self, description: Description, budget: Budget, figures: Figures) -> None:
        self.description, self.budget, self.figures = description, budget, figures
        tree = tuple(hang(description))
        self.tree = tree
        self.step = "  " if max((one.depth for one in tree), default=0) <= 6 else " "
        self.room = max((len(self._name(id_, depth)) for id_, depth in tree), default=0)
        self.room = max(self.room, NAME_ROOM)

    def all(self) -> Iterator[tuple[str, ...]]:
        for id_, depth in self.tree:
            if id_ in self.description.sources:
                yield from self._source(id_, depth)
            elif id_ in self.description.sections:
                yield from self._section(id_, depth)
            elif id_ in self.description.terminals:
                yield from self._terminal(id_, depth)

    def _source(self, id_: str, depth: int) -> Iterator[tuple[str, ...]]:
        source, result = self.description.sources[id_], self.budget.sources.get(id_)
        flow = self.figures.flow(result.flow, result.mass_flow) if result else ""
        yield self._row(self._name(id_, depth), flow=flow)
        density = result.fluid.density if result else None
        yield from self._items(source.items, result.items if result else (), depth, density)

    def _section(self, id_: str, depth: int) -> Iterator[tuple[str, ...]]:
        section, result = self.description.sections[id_], self.budget.sections.get(id_)
        cells = self._run(section.run, result.run if result else None)
        density = self._density(result)
        if result is not None:
            cells["sum"] = self.figures.pressure(result.cumulative, density)
            cells["differential"] = self.figures.pressure(result.differential, density)
            cells["margin"] = self.figures.pressure(result.margin, density)
            cells["index"] = INDEX if result.index else ""
            cells["drop"] = self.figures.pressure(result.run.drop, density)
        yield self._row(self._name(id_, depth), **cells)
        yield from self._items(section.items, result.items if result else (), depth, density)
        yield from self._device(result.device if result else None, depth, density)

    def _terminal(self, id_: str, depth: int) -> Iterator[tuple[str, ...]]:
        terminal, result = self.description.terminals[id_], self.budget.terminals.get(id_)
        density = self._density(result)
        cells = {}
        if result is not None:
            cells = {
                "flow": self.figures.flow(result.flow, result.mass_flow),
                "drop": self.figures.pressure(result.drop, density),
                "sum": self.figures.pressure(result.circuit, density),
                "differential": self.figures.pressure(result.differential, density),
                "margin": self.figures.pressure(result.margin, density),
                "index": INDEX if result.index else "",
            }
        yield self._row(self._name(id_, depth), **cells)
        if terminal.run is not None:
            cells = self._run(terminal.run, result.run_out if result else None)
            if result is not None and result.run_out is not None:
                cells["drop"] = self.figures.pressure(result.run_out.drop, density)
            yield self._row(self._standing("run-out", depth), **cells)
        yield from self._items(terminal.items, result.items if result else (), depth, density)
        yield from self._device(result.device if result else None, depth, density)

    def _device(self, device: DeviceResult | None, depth: int, density: float | None) -> Iterator[tuple[str, ...]]:
        if device is not None:
            yield self._row(self._standing(device.name, depth), drop=self.figures.pressure(device.base, density))

    def _items(
        self, items: tuple[Item, ...], results: tuple[ItemResult, ...], depth: int, density: float | None
    ) -> Iterator[tuple[str, ...]]:
        for place, item in enumerate(items):
            sizes = [f"{name} {plain_number(v)}" for name, v in (("Kv", item.kv), ("k", item.k)) if v is not None]
            drop = results[place].drop if place < len(results) else None
            yield self._row(
                self._standing(item.name, depth),
                size="".join(sizes),
                length=self.figures.text(item.equivalent_length, Dimension.LENGTH) if item.equivalent_length else "",
                drop=self.figures.pressure(drop, density),
            )

    def _run(self, run: Run, result: RunResult | None) -> dict[str, str]:
        cells = {
            "size": plain(run.geometry.label) if run.geometry else "-",
            "length": self.figures.text(run.length, Dimension.LENGTH),
        }
        if result is not None and result.legs:
            leg = result.legs[0]
            cells["flow"] = self.figures.flow(result.flow, result.mass_flow)
            cells["velocity"] = self.figures.text(leg.velocity, Dimension.VELOCITY)
            cells["gradient"] = self.figures.text(leg.gradient, Dimension.GRADIENT)
        return cells

    def _density(self, result: SectionResult | TerminalResult | None) -> float | None:
        return self.budget.sources[result.source].fluid.density if result is not None else None

    def _name(self, id_: str, depth: int) -> str:
        return self._indented(plain(id_), depth)

    def _standing(self, name: str, depth: int) -> str:
        """Name what stands on a row, beneath it; a long name is cut."""
        text = self._indented(f"- {plain(name)}", depth + 1)
        return text if len(text) <= self.room else text[: self.room - 3].rstrip() + "..."

    def _indented(self, text: str, depth: int) -> str:
        if depth > DEEPEST_INDENT:
            return f"{self.step * DEEPEST_INDENT}[{depth}] {text}"
        return self.step * depth + text

    @staticmethod
    def _row(
        name: str,
        *,
        size: str = "",
        length: str = "",
        flow: str = "",
        velocity: str = "",
        gradient: str = "",
        drop: str = "",
        sum: str = "",  # noqa: A002 - the column's name
        differential: str = "",
        margin: str = "",
        index: str = "",
    ) -> tuple[str, ...]:
        return (name, size, length, flow, velocity, gradient, drop, sum, differential, margin, index)
