"""Proposals as text and as JSON: sizes of a control valve for an authority, devices that would do in a place."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator
from typing import Any

from budget.network import Budget
from budget.network.proposals import DeviceChoice, KvChoice, KvProposal, propose_devices, propose_kv
from budget.report.figures import Figures, plain_number
from budget.report.plain import plain
from budget.report.table import Column, table, wrapped
from budget.units import Dimension


def proposals_text(budget: Budget, id_: str, authority: float, figures: Figures) -> str:
    """Return what is proposed for a section or terminal: its control valve, then its balancing device."""
    result = budget.sections.get(id_) or budget.terminals[id_]
    density = budget.sources[result.source].fluid.density
    valve = propose_kv(budget.run, id_, authority)
    devices = propose_devices(budget.run, id_)
    lines = [plain(id_)]
    if valve is None:
        lines += ["", "No control item here has an authority at design flow."]
    else:
        lines += ["", plain(valve.item), *_valve(valve, density, figures)]
    if devices:
        lines += ["", "Balancing device", *_devices(devices, density, figures)]
    return "\n".join(lines) + "\n"


def _valve(found: KvProposal, density: float, figures: Figures) -> Iterator[str]:
    pressure = figures.unit(Dimension.PRESSURE)
    columns = [
        Column("", left=True),
        Column("Kv"),
        Column("drop", pressure),
        Column("authority"),
        Column("required", pressure),
    ]

    def row(label: str, one: KvChoice) -> tuple[str, ...]:
        drop, required = (figures.pressure(value, density) for value in (one.drop, one.required))
        return label, plain_number(one.kv), drop, plain_number(one.authority, 2), required

    rows = [row("present", found.present)]
    if found.exact is not None:
        rows.append(row(f"for {plain_number(found.wanted, 2)}", found.exact))
    rows += [row("size", one) for one in found.choices]
    yield from table(columns, rows)
    if found.exact is None:
        yield "  No Kv reaches that authority here."


def _devices(found: tuple[DeviceChoice, ...], density: float, figures: Figures) -> Iterator[str]:
    pressure = figures.unit(Dimension.PRESSURE)
    columns = [
        Column("device", left=True),
        Column("open", pressure),
        Column("drop", pressure),
        Column("setting"),
        Column("signal", pressure, optional=True),
        Column("required", pressure),
        Column("", left=True),
    ]
    rows = []
    for one in found:
        said = "" if one.suits else "outside its table" if not one.in_table else "signal too small"
        base, drop, signal, required = (
            figures.pressure(value, density) for value in (one.base, one.drop, one.signal, one.required)
        )
        rows.append((plain(one.name), base, drop, plain_number(one.setting), signal, required, said))
    yield from table(columns, rows)
    yield from wrapped("The best one first. required: of the source, with that device in place.", "  ", "  ")


def proposals_object(budget: Budget, id_: str, authority: float) -> dict[str, Any]:
    """Return the same in SI, null for what does not exist."""
    valve = propose_kv(budget.run, id_, authority)
    return {
        "id": id_,
        "control": None if valve is None else _known(dataclasses.asdict(valve)),
        "devices": [_known(dataclasses.asdict(one)) | {"suits": one.suits} for one in propose_devices(budget.run, id_)],
    }


def _known(value: Any) -> Any:
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, dict):
        return {key: _known(inner) for key, inner in value.items()}
    return [_known(inner) for inner in value] if isinstance(value, list | tuple) else value
