"""The links of a report: what closes the rings of a run."""

from __future__ import annotations

from budget.description import Description
from budget.network import Budget
from budget.report.figures import Figures
from budget.report.plain import plain
from budget.report.table import Column, table, wrapped
from budget.units import Dimension

_LEGEND = (
    "flow: from the first section to the second; a negative one runs the other way. vel. and grad.: of the first leg "
    "where there are two. drop: both legs with what stands on them."
)


def links(description: Description, budget: Budget, figures: Figures) -> list[str]:
    """Return the links as a table; nothing where there are none."""
    columns = [
        Column("", left=True),
        Column("from", left=True),
        Column("to", left=True),
        Column("size", left=True),
        Column("length", figures.unit(Dimension.LENGTH)),
        Column("flow", figures.unit(Dimension.FLOW)),
        Column("vel.", figures.unit(Dimension.VELOCITY)),
        Column("grad.", figures.unit(Dimension.GRADIENT)),
        Column("drop", figures.unit(Dimension.PRESSURE)),
    ]
    rows = []
    for id_, result in budget.links.items():
        link, leg = description.links[id_], result.run.legs[0]
        rows.append(
            (
                plain(id_),
                plain(link.from_ or ""),
                plain(link.to or ""),
                link.run.geometry.label if link.run.geometry else "",
                figures.text(link.run.length, Dimension.LENGTH),
                figures.flow(result.run.flow, result.run.mass_flow),
                figures.text(leg.velocity, Dimension.VELOCITY),
                figures.text(leg.gradient, Dimension.GRADIENT),
                figures.pressure(result.run.drop, budget.sources[result.source].fluid.density),
            )
        )
    return [*table(columns, rows), *wrapped(_LEGEND, "  ", "  ")] if rows else []
