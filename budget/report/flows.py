"""The flows as installed as text and as JSON: sources, sections, terminals."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from budget.description import Description
from budget.network import Budget
from budget.network.flows import Flows, SectionFlow, SourceFlow, TerminalFlow
from budget.report.figures import NONE, Figures
from budget.report.located import Located
from budget.report.plain import plain
from budget.report.table import Column, table
from budget.units import Dimension

_KEYS = {
    "sources": ("flow", "pressure", "speed", "power"),
    "sections": ("flow", "return_flow"),
    "terminals": ("flow", "design_flow", "share", "within"),
}
_FINDING = ("level", "code", "message", "table", "key", "line", "column")


def flows_values(flows: Flows | None, findings: Iterable[Located]) -> dict[str, Any]:
    """Return the flows as one JSON object, SI base units; of an unreadable file (None) the findings alone."""
    shown = [{key: getattr(one, key) for key in _FINDING} for one in findings]
    if flows is None:
        return {"findings": shown}
    kinds: Mapping[str, Mapping[str, Any]] = {
        "sources": flows.sources,
        "sections": flows.sections,
        "terminals": flows.terminals,
    }
    found: dict[str, Any] = {
        name: {id_: {key: _known(getattr(one, key)) for key in _KEYS[name]} for id_, one in records.items()}
        for name, records in kinds.items()
    }
    if flows.links:
        found["links"] = {
            id_: {key: _known(getattr(one, key)) for key in _KEYS["sections"]} for id_, one in flows.links.items()
        }
    return found | {"findings": shown}


def _known(value: float | None) -> float | None:
    return value if value is None or math.isfinite(value) else None


def flows_text(description: Description, budget: Budget, flows: Flows) -> str:
    """Return the flows as tables, in the units of the design; "" where none could be computed."""
    figures = Figures(description)
    parts = [
        _part("Sources", _source_columns(figures), [_source(budget, one, figures) for one in flows.sources.values()]),
        _part("Sections", _section_columns(figures), [_section(one, figures) for one in flows.sections.values()]),
        _part("Links", _section_columns(figures), [_section(one, figures) for one in flows.links.values()]),
        _part("Terminals", _terminal_columns(figures), [_terminal(one, figures) for one in flows.terminals.values()]),
    ]
    return "\n".join(f"{part}\n" for part in parts if part)


def _part(title: str, columns: Sequence[Column], rows: Sequence[Sequence[str]]) -> str:
    return "\n".join([title, *table(columns, rows)]) if rows else ""


def _source_columns(figures: Figures) -> list[Column]:
    return [
        Column("", left=True),
        Column("flow", figures.unit(Dimension.FLOW)),
        Column("pressure", figures.unit(Dimension.PRESSURE)),
        Column("speed", "%", optional=True),
        Column("power", figures.unit(Dimension.POWER), optional=True),
        Column("design", figures.unit(Dimension.FLOW)),
        Column("required", figures.unit(Dimension.PRESSURE)),
    ]


def _source(budget: Budget, one: SourceFlow, figures: Figures) -> tuple[str, ...]:
    design = budget.sources[one.id]
    return (
        plain(one.id),
        figures.flow(one.flow, one.mass_flow),
        figures.pressure(one.pressure, design.fluid.density),
        NONE if one.speed is None else _percent(one.speed),
        figures.text(one.power, Dimension.POWER),
        figures.flow(design.flow, design.mass_flow),
        figures.pressure(design.required, design.fluid.density),
    )


def _section_columns(figures: Figures) -> list[Column]:
    unit = figures.unit(Dimension.FLOW)
    return [Column("", left=True), Column("flow", unit), Column("return", unit, optional=True)]


def _section(one: SectionFlow, figures: Figures) -> tuple[str, ...]:
    back = NONE if one.return_flow is None else figures.flow(one.return_flow, one.return_mass_flow)
    return plain(one.id), figures.flow(one.flow, one.mass_flow), back


def _terminal_columns(figures: Figures) -> list[Column]:
    unit = figures.unit(Dimension.FLOW)
    return [
        Column("", left=True),
        Column("flow", unit),
        Column("design", unit),
        Column("share", "%"),
        Column("", left=True),
    ]


def _terminal(one: TerminalFlow, figures: Figures) -> tuple[str, ...]:
    verdict = "" if one.within else "over" if one.share > one.wanted else "under"
    if one.wanted == 0.0 and one.within:
        verdict = "off"
    return (
        plain(one.id),
        figures.flow(one.flow, one.mass_flow),
        figures.flow(one.design_flow, one.design_mass_flow),
        _percent(one.share),
        verdict,
    )


def _percent(share: float) -> str:
    return f"{100.0 * share:.1f}" if math.isfinite(share) else NONE
