"""The pipe or duct of a row, what was computed for it, and what each of many fittings would cost in it."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Sequence
from dataclasses import dataclass

from budget.description.finding import Path
from budget.description.model import FittingCount, FittingUse, Run
from budget.document import Snapshot
from budget.network import evaluate
from budget.network.results import LossResult, RunResult


@dataclass(frozen=True, slots=True)
class Weighed:
    """One fitting in a section: its loss on the leg that comes first, and its drop on all legs, Pa."""

    loss: LossResult
    drop: float


def run_of(snapshot: Snapshot, table: Path) -> Run | None:
    """Return the pipe or duct of a section or of a terminal's run-out."""
    description, id_ = snapshot.description, str(table[1])
    if table[0] == "section" and id_ in description.sections:
        return description.sections[id_].run
    if table[0] == "terminal" and id_ in description.terminals:
        return description.terminals[id_].run
    return None


def result_of(snapshot: Snapshot, table: Path) -> RunResult | None:
    """Return what was computed for the pipe or duct of a section or of a terminal's run-out."""
    section = snapshot.budget.sections.get(str(table[1]))
    if section is not None:
        return section.run
    terminal = snapshot.budget.terminals.get(str(table[1]))
    return terminal.run_out if terminal is not None else None


def density_of(snapshot: Snapshot, table: Path) -> float | None:
    """Return the supply density of the source on which a section or terminal hangs, kg/m3."""
    budget, id_ = snapshot.budget, str(table[1])
    result = budget.sections.get(id_) or budget.terminals.get(id_)
    source = budget.sources.get(result.source) if result is not None else None
    return source.fluid.density if source is not None else None


def weigh(
    snapshot: Snapshot, table: Path, counts: Sequence[FittingCount], uses: Sequence[FittingUse]
) -> tuple[Weighed | None, ...]:
    """Return what each fitting would cost in a section or run-out, first the counted ones; None where it can't be said.

    The run is computed once, with all of them in place of those that stand there: none changes what another costs.
    """
    run, description, id_ = run_of(snapshot, table), snapshot.description, str(table[1])
    if run is None:
        return (None,) * (len(counts) + len(uses))
    full = dataclasses.replace(run, fittings=tuple(counts), uses=tuple(uses))
    if table[0] == "section":
        section = dataclasses.replace(description.sections[id_], run=full)
        description = dataclasses.replace(description, sections={**description.sections, id_: section})
    else:
        terminal = dataclasses.replace(description.terminals[id_], run=full)
        description = dataclasses.replace(description, terminals={**description.terminals, id_: terminal})
    computed = dataclasses.replace(snapshot, budget=evaluate(description))
    return losses_of(result_of(computed, table), len(counts) + len(uses))


def losses_of(result: RunResult | None, count: int) -> tuple[Weighed | None, ...]:
    """Return the fittings of a computed run, so many, each with its drop on all legs."""
    if result is None or not result.legs:
        return (None,) * count
    legs = [leg.losses for leg in result.legs]
    return tuple(Weighed(on[0], math.fsum(loss.drop for loss in on)) for on in zip(*legs, strict=True))
