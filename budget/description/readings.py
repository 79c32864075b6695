"""Readings: what was measured on site, in a file of its own beside the run, keyed by the run's IDs."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from itertools import chain
from typing import Any

from budget.description.finding import Finding, Path
from budget.description.model import Description
from budget.description.schema import FORMAT, Measure, Number, Spec, Text
from budget.description.source import Source
from budget.description.values import Reading as Values
from budget.description.values import nearest, what_is
from budget.units import Dimension, Quantity

KEYS: Mapping[str, Spec] = {
    "flow": Measure(Dimension.FLOW, 0.0, 1e4),
    "signal": Measure(Dimension.PRESSURE, 0.0, 1e8),
    "setting": Number(),
    "note": Text(),
}
"""Keys of a reading; `date` is read apart, for it may be a date of TOML or a text."""


@dataclass(frozen=True, slots=True)
class Measured:
    """One reading: a flow, or the signal of the device that stands there and the setting at which it was read."""

    id: str
    path: Path
    flow: Quantity | None = None
    """Of a terminal, section or source; m3/s at the supply density, or kg/s."""
    signal: Quantity | None = None
    """Pa, or metres of the fluid."""
    setting: float | None = None
    date: str = ""
    """Year, month and day: 2026-03-31; "" where it is not stated."""
    note: str = ""


@dataclass(frozen=True, slots=True)
class Readings:
    """What was measured, by ID in the order of the file, and what is wrong with the file."""

    measured: Mapping[str, Measured] = field(default_factory=dict)
    findings: tuple[Finding, ...] = ()


def read_readings(source: Source, description: Description) -> Readings:
    """Read a readings file for a run: tables `[reading.ID]` with flow or signal, setting, date and note.

    Bare numbers take the units of the run. Nothing is raised: a reading that can't be read is left out, and a
    finding with its place in the readings file says why.
    """
    if source.data is None:
        return Readings(findings=source.findings)
    values = Values(units=description.design.units, gas=description.fluid.gas)
    for key in source.data:
        if key not in ("format", "reading"):
            code = "unknown-table" if isinstance(source.data[key], dict | list) else "unknown-key"
            values.wrong(code, f"{key!r} can't stand in a readings file; write [reading.ID]", (key,))
    stated = source.data.get("format", FORMAT)
    if stated != FORMAT or isinstance(stated, bool):
        text = f"{what_is(stated)} is no format known here; write format = {FORMAT}, or leave it out"
        values.wrong("format", text, ("format",))
    entries = source.data.get("reading", {})
    if not isinstance(entries, dict):
        values.wrong("type", "reading must hold tables with an ID each; write [reading.ID]", ("reading",))
        entries = {}
    found = {}
    for id_, entry in entries.items():
        one = _measured(values, description, id_, entry)
        if one is not None:
            found[id_] = one
    return Readings(found, tuple(values.findings))


def _measured(values: Values, description: Description, id_: str, entry: Any) -> Measured | None:
    path: Path = ("reading", id_)
    if not isinstance(entry, dict):
        values.wrong("type", f"{id_!r} must be a table; write [reading.{id_}]", path)
        return None
    run = (description.sources, description.sections, description.terminals)
    if not any(id_ in known for known in run):
        values.wrong("dangling", f"{id_!r} is not an ID of the run; {nearest(id_, chain(*run))}", path)
        return None
    stated = [key for key in ("flow", "signal") if key in entry]
    if len(stated) == 2:
        text = "flow and signal are both stated; keep the one that was measured"
        values.wrong("contradiction", text, (*path, "signal"))
        return None
    if not stated:
        values.wrong("missing", 'nothing was measured; write flow = "0.12 L/s", or the signal of its device', path)
        return None
    read = values.table({key: value for key, value in entry.items() if key != "date"}, KEYS, path, "a reading")
    date = _date(values, entry.get("date", ""), (*path, "date"))
    if stated[0] not in read or date is None:
        return None
    return Measured(id_, path, read.get("flow"), read.get("signal"), read.get("setting"), date, read.get("note", ""))


def _date(values: Values, stated: Any, path: Path) -> str | None:
    if isinstance(stated, dt.datetime):
        return stated.date().isoformat()
    if isinstance(stated, dt.date):
        return stated.isoformat()
    if stated == "":
        return ""
    if isinstance(stated, str):
        try:
            return dt.date.fromisoformat(stated.strip()).isoformat()
        except ValueError:
            pass
    values.wrong("type", f"{what_is(stated)} where a date was due; write year, month, day: 2026-03-31", path)
    return None
