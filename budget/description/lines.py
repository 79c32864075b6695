"""The pipe and duct lines of a design: local names for lines of the catalogue, or lines of one's own."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any, Literal

from budget.catalogue import duct_line, duct_names, pipe_line, pipe_names
from budget.description.finding import Path, dotted
from budget.description.model import Line
from budget.description.schema import KEYED
from budget.description.values import Reading, nearest

Kind = Literal["pipe", "duct"]


def read_lines(reading: Reading, data: Mapping[str, Any]) -> dict[tuple[str, str], Line]:
    """Read [pipe.*] and [duct.*], by kind and local name."""
    lines: dict[tuple[str, str], Line] = {}
    for kind in ("pipe", "duct"):
        entries = data.get(kind, {})
        if not isinstance(entries, dict):
            reading.wrong("type", f"{kind} must hold tables with a name each; write [{kind}.NAME]", (kind,))
            continue
        for name, entry in entries.items():
            path: Path = (kind, name)
            if not isinstance(entry, dict):
                reading.wrong("type", f"{name!r} must be a table; write [{dotted(path)}]", path)
                continue
            values = reading.table(entry, KEYED[kind], path)
            lines[kind, name] = _line(reading, kind, name, values, entry, path)
    return lines


def _line(reading: Reading, kind: str, name: str, values: dict[str, Any], entry: Mapping[str, Any], path: Path) -> Line:
    wanted = values.get("catalogue")
    listed = (pipe_line(wanted) if kind == "pipe" else duct_line(wanted)) if wanted is not None else None
    if wanted is not None and listed is None:
        known = pipe_names() if kind == "pipe" else duct_names()
        hint = nearest(wanted, known, 3)
        reading.wrong("unknown-line", f"{wanted!r} is not in the catalogue; {hint}", (*path, "catalogue"))
    if "catalogue" not in entry and "roughness" not in entry:
        reading.wrong("missing", f"the {kind} {name!r} has neither catalogue nor roughness; state one", path)
    if wanted is not None and "sizes" in entry:
        reading.wrong("contradiction", "catalogue and sizes are both stated; keep one", (*path, "sizes"))
    flexible = kind == "duct" and bool(getattr(listed, "flexible", False))
    if "compression" in values and not flexible:
        reading.wrong("contradiction", "compression belongs to flexible duct; remove it", (*path, "compression"))
    roughness = values.get("roughness", listed.roughness if listed else None)
    if reading.faulty((*path, "roughness")):
        roughness = None  # the catalogue's would not be what was meant
    return Line(
        name=name,
        kind="pipe" if kind == "pipe" else "duct",
        roughness=roughness,
        catalogue=listed.name if listed else wanted,
        own_sizes=values.get("sizes", {}) if listed is None else {},
        flexible=flexible,
        compression=values.get("compression", 0.0),
        source=listed.source if listed else values.get("source", ""),
    )
