"""The tables of a report: the run as an indented ledger, its terminals, its balancing devices, its fittings."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from budget.catalogue.provenance import how_known
from budget.description import Description, Item, Run
from budget.network import Budget, DeviceResult, ItemResult, LossResult, RunResult, SectionResult, TerminalResult
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
_LEGEND_OF_TERMINALS = (
    "own: the drop of the terminal itself. circuit: from the source to the terminal and back, devices fully open. "
    "excess: what no device takes up. authority: of its control item at design flow; low: when all others are shut."
)
_LEGEND_OF_DEVICES = "open: the drop fully open at design flow, or the least drop where that is more. drop: as set."


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


def terminals(budget: Budget, figures: Figures) -> list[str]:
    """Return the circuit of every terminal: what it is made of, its margin, what remains, its authority."""
    pressure = figures.unit(Dimension.PRESSURE)
    columns = [
        Column("terminal", left=True),
        Column("flow", figures.unit(Dimension.FLOW)),
        Column("own", pressure),
        Column("items", pressure, optional=True),
        Column("run-out", pressure, optional=True),
        Column("static", pressure, optional=True),
        Column("circuit", pressure),
        Column("margin", pressure),
        Column("excess", pressure),
        Column("authority", optional=True),
        Column("low", optional=True),
        Column("", left=True),
    ]
    rows = []
    for result in budget.terminals.values():
        density = budget.sources[result.source].fluid.density
        values = (
            result.drop,
            result.items_drop if result.items else None,
            result.run_out.drop if result.run_out else None,
            result.static or None,
            result.circuit,
            result.margin,
            result.excess,
        )
        rows.append((
            plain(result.id),
            figures.flow(result.flow, result.mass_flow),
            *(figures.pressure(value, density) for value in values),
            plain_number(result.authority, 2),
            plain_number(result.authority_low, 2),
            INDEX if result.index else "",
        ))  # fmt: skip
    return [*table(columns, rows), *wrapped(_LEGEND_OF_TERMINALS, "  ", "  ")] if rows else []


def items(budget: Budget, figures: Figures) -> list[str]:
    """Return every item with its drop at design flow and the heading that it counts under."""
    columns = [
        Column("stands on", left=True),
        Column("drop", figures.unit(Dimension.PRESSURE)),
        Column("heading", left=True),
        Column("item", left=True),
    ]
    rows = []
    for id_, carried, density in _items(budget):
        for item in carried:
            name = plain(item.name) + (", inside" if item.inside else "")
            rows.append((plain(id_), figures.pressure(item.drop, density), item.heading, name))
    return table(columns, rows) if rows else []


def _items(budget: Budget) -> Iterator[tuple[str, tuple[ItemResult, ...], float]]:
    for source in budget.sources.values():
        yield source.id, source.items, source.fluid.density
    carriers: Iterable[SectionResult | TerminalResult] = (*budget.sections.values(), *budget.terminals.values())
    for result in carriers:
        yield result.id, result.items, budget.sources[result.source].fluid.density


def devices(budget: Budget, figures: Figures) -> list[str]:
    """Return every balancing device: where it stands, its drop, its opening, its setting, its signal."""
    pressure = figures.unit(Dimension.PRESSURE)
    columns = [
        Column("stands on", left=True),
        Column("device", left=True),
        Column("holds", left=True, optional=True),
        Column("open", pressure),
        Column("takes up", pressure),
        Column("drop", pressure),
        Column("Kv", optional=True),
        Column("k", optional=True),
        Column("setting"),
        Column("signal", pressure, optional=True),
    ]
    rows = []
    for id_, device, density in _devices(budget):
        rows.append((
            plain(id_),
            plain(device.name),
            _held(device, figures, density),
            *(figures.pressure(value, density) for value in (device.base, device.take_up, device.drop)),
            plain_number(device.kv),
            plain_number(device.k),
            plain_number(device.setting),
            figures.pressure(device.signal, density),
        ))  # fmt: skip
    if not rows:
        return []
    origins = dict.fromkeys((device.name, device.origin) for _, device, _ in _devices(budget) if device.origin)
    said = [line for name, origin in origins for line in wrapped(f"{plain(name)}: from {plain(origin)}", "  ", "    ")]
    return [*table(columns, rows), *wrapped(_LEGEND_OF_DEVICES, "  ", "  "), *said]


def libraries(description: Description) -> list[str]:
    """Return every library with what the run takes from it."""
    shared: dict[str, list[str]] = {}
    for (kind, name), line in description.lines.items():
        shared.setdefault(line.origin, []).append(f"{kind} {plain(name)}")
    for what, entries in (("fitting", description.fittings), ("device", description.devices)):
        for name, entry in entries.items():
            shared.setdefault(entry.origin, []).append(f"{what} {plain(name)}")
    return [
        line
        for origin, names in shared.items()
        if origin
        for line in wrapped(f"{plain(origin)}: {', '.join(names)}", "  ", "    ")
    ]


def _devices(budget: Budget) -> Iterator[tuple[str, DeviceResult, float]]:
    carriers: Iterable[SectionResult | TerminalResult] = (*budget.sections.values(), *budget.terminals.values())
    for result in carriers:
        if result.device is not None:
            yield result.id, result.device, budget.sources[result.source].fluid.density


def _held(device: DeviceResult, figures: Figures, density: float) -> str:
    if device.set_point is None:
        return device.holds or ""
    return f"{device.holds} {figures.pressure(device.set_point, density, unit=True)}"


def fittings(budget: Budget, figures: Figures) -> list[str]:
    """Return every fitting of the supply leg with its loss coefficient, and where the coefficients come from."""
    columns = [
        Column("stands on", left=True),
        Column("count"),
        Column("fitting", left=True),
        Column("K of one"),
        Column("loss", figures.unit(Dimension.PRESSURE)),
        Column("method", left=True),
    ]
    rows: list[tuple[str, ...]] = []
    origins: dict[str, None] = {}
    for id_, run, density in _runs(budget):
        for loss in run.legs[0].losses if run.legs else ():
            rows.append((
                plain(id_),
                str(loss.count),
                plain(loss.name),
                plain_number(loss.k),
                figures.pressure(loss.drop, density),
                plain(loss.method),
            ))  # fmt: skip
            origins[f"{plain(loss.name)}, {plain(loss.method)}: {_origin(loss)}"] = None
    return _with_origins(columns, rows, origins)


def joints(budget: Budget, figures: Figures) -> list[str]:
    """Return each leg's part of a junction and its change of area, with the velocity that the coefficient is on."""
    columns = [
        Column("stands on", left=True),
        Column("leg", left=True),
        Column("junction or change of area", left=True),
        Column("K"),
        Column("on", figures.unit(Dimension.VELOCITY)),
        Column("loss", figures.unit(Dimension.PRESSURE)),
        Column("method", left=True),
    ]
    rows: list[tuple[str, ...]] = []
    origins: dict[str, None] = {}
    for id_, run, density in _runs(budget):
        for leg in run.legs:
            for loss in leg.joints:
                rows.append((
                    plain(id_),
                    leg.leg,
                    loss.name,
                    plain_number(loss.k),
                    figures.text(loss.reference_velocity, Dimension.VELOCITY),
                    figures.pressure(loss.drop, density),
                    loss.method,
                ))  # fmt: skip
                origins[f"{loss.method}: {_origin(loss)}; on the {loss.reference}"] = None
    return _with_origins(columns, rows, origins)


def _origin(loss: LossResult) -> str:
    known = how_known(loss.known_from) if loss.known_from else ""
    return "; ".join(filter(None, (plain(loss.source), plain(known)))) or "no source stated"


def _with_origins(columns: list[Column], rows: list[tuple[str, ...]], origins: Iterable[str]) -> list[str]:
    if not rows:
        return []
    return [*table(columns, rows), *(line for origin in origins for line in wrapped(origin, "  ", "    "))]


def _runs(budget: Budget) -> Iterator[tuple[str, RunResult, float]]:
    for section in budget.sections.values():
        yield section.id, section.run, budget.sources[section.source].fluid.density
    for terminal in budget.terminals.values():
        if terminal.run_out is not None:
            yield terminal.id, terminal.run_out, budget.sources[terminal.source].fluid.density
