"""A fitting as the lists and forms of the app name it, and what is said of its figure."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from budget.catalogue import Kind, fitting
from budget.catalogue.provenance import how_known
from budget.description.finding import Path
from budget.network.results import LossResult
from budget.report.figures import Figures
from budget.report.plain import plain
from budget.screens.runs import Weighed
from budget.units import Dimension


@dataclass(frozen=True, slots=True, eq=False)
class Listed:
    """A fitting of the list: counted by its name or of a kind, standing in the section or not yet."""

    name: str
    count: int = 0
    path: Path | None = None
    """Of its entry `[[..fitting]]`; None where it is counted in `fittings`, or does not stand there yet."""
    kind: Kind | None = None
    values: Mapping[str, float | str] | None = None
    """Its parameters; None where one is lacking."""

    @property
    def asks(self) -> bool:
        """Whether it has parameters that are asked for."""
        return self.kind is not None and bool(self.kind.parameters)


def about(entry: Listed, weighed: Weighed | None, figures: Figures, *, asking: bool = False) -> tuple[str, ...]:
    """Say of a fitting: by what method, on which velocity, from which source, and how the figure is known."""
    found, loss = entry.kind, weighed.loss if weighed is not None else None
    lines = []
    if found is not None and entry.values is None and not asking:
        lacking = " and ".join(parameter.name for parameter in found.parameters if parameter.default is None)
        lines.append(f"{lacking} must be stated: Enter asks for {'it' if ' and ' not in lacking else 'them'}")
    if loss is not None:
        remark = loss.reference.partition(": ")[2]
        lines.append(f"{loss.method}, {velocity(loss, figures)}" + (f"; {remark}" if remark else ""))
    if found is not None:
        origin, known, scatter = found.source, found.known_from, found.scatter
        confidence = found.confidence
    else:
        listed_ = fitting(entry.name)
        origin, known = (loss.source, loss.known_from) if loss is not None else ("", "")
        scatter = listed_.scatter if listed_ is not None and loss is not None and loss.method != "own" else None
        confidence = listed_.confidence if listed_ is not None and loss is not None and loss.method != "own" else ""
    said = [how_known(known) if known else "", f"confidence {confidence}" if confidence else ""]
    said += [f"source: {plain(origin) or 'none stated'}", f"scatter {scatter}" if scatter else ""]
    law = f"{found.formula}; holds for {found.validity}" + (f"; {found.note}" if found.note else "") if found else ""
    return (*lines, "; ".join(filter(None, said)), law)


def velocity(loss: LossResult, figures: Figures) -> str:
    """Name the velocity to which a coefficient refers, with its figure."""
    spelled = figures.text(loss.reference_velocity, Dimension.VELOCITY, unit=True)
    return f"{loss.reference.partition(': ')[0]} {spelled}"


def spelled_parameters(values: Mapping[str, float | str]) -> str:
    """Spell parameters with their values in one line."""
    return ", ".join(f"{name} {value if isinstance(value, str) else f'{value:g}'}" for name, value in values.items())
