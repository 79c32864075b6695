"""The other tables of a report: terminals, items, balancing devices, libraries, fittings, junctions."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from budget.catalogue.provenance import how_known
from budget.description import Description
from budget.network import Budget, DeviceResult, ItemResult, LossResult, RunResult, SectionResult, TerminalResult
from budget.report.figures import Figures, plain_number
from budget.report.ledger import INDEX
from budget.report.plain import plain
from budget.report.table import Column, table, wrapped
from budget.units import Dimension

_LEGEND_OF_TERMINALS = (
    "own: the drop of the terminal itself. circuit: from the source to the terminal and back, devices fully open. "
    "excess: what no device takes up. authority: of its control item at design flow; low: when all others are shut."
)
_LEGEND_OF_DEVICES = "open: the drop fully open at design flow, or the least drop where that is more. drop: as set."


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
