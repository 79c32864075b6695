"""Proportional balancing: the order of work, what the measured flows say, and what to adjust next.

Terminals of a branch are brought into proportion with each other first, then branches with each other, then mains;
what all of them have too much or too little is set at the pump or fan, last. Published as the proportional method in
the commissioning codes for water and air distribution systems (known from memory).
"""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np

from budget.description import Basis, Finding, Path, error, warning
from budget.description.readings import Measured, Readings
from budget.network.arrays import DeviceUse
from budget.network.budget import Budget
from budget.network.media import pascals
from budget.network.results import DeviceResult, SectionResult, TerminalResult
from budget.physics.fittings import valve_drop

SMALL = 1e-9
"""A share this near to an end of its tolerance is within it."""

Kind = Literal["terminal", "section", "source"]
Verdict = Literal["within", "low", "high"]


@dataclass(frozen=True, slots=True)
class Step:
    """One stop of whoever commissions: a terminal, a section with a device, at the end the pump or fan."""

    id: str
    kind: Kind
    branch: str
    """The section with a device, or the source, whose flow it shares with others; of a source itself ""."""
    margin: float
    reference: bool = False
    """It has the least margin of its branch: it stays at its setting, the others are brought to its share."""
    suction: bool = False
    """It hangs on a fan itself, on its suction side, and shares nothing with the other side."""


@dataclass(frozen=True, slots=True)
class Judged:
    """A measured flow beside the design flow."""

    id: str
    flow: float
    """m3/s at the supply density."""
    design_flow: float
    share: float
    """Of the design flow; 1 is as designed."""
    verdict: Verdict


@dataclass(frozen=True, slots=True)
class Next:
    """What to do next: measure, adjust to a share, look after what can't be adjusted, set the source, or nothing."""

    action: Literal["measure", "adjust", "look", "source", "done"]
    id: str = ""
    branch: str = ""
    reference: str = ""
    share: float = math.nan
    target: float = math.nan
    """Share to adjust to: that of the reference as measured, which rises a little on the way."""
    flow: float = math.nan
    """Flow to adjust to, m3/s."""


def order_of_work(budget: Budget) -> tuple[Step, ...]:
    """Return everything to be measured and set, in the order of the proportional method.

    A branch is what shares the flow of a section with a balancing device, or of the source. A branch inside another
    comes before the branch outside; of what shares a branch, the least margin (nearest to the index) comes first as
    the reference, the largest last. Ties keep the order of the file. The source comes after all that hangs on it.
    """
    description = budget.run.layout.description
    members: dict[str, list[Step]] = {}
    rank = description.rank()
    for id_, result in _results(budget):
        kind: Kind = "terminal" if id_ in budget.terminals else "section"
        if kind == "terminal" or result.device is not None:
            branch = _branch(budget, id_) or result.source
            part = description.sections.get(id_) or description.terminals[id_]
            suction = description.fluid.gas and branch in budget.sources and part.from_ is None
            members.setdefault(branch, []).append(Step(id_, kind, branch, result.margin, suction=suction))
    steps: list[Step] = []
    for source in budget.sources:
        for group in _walk(source, members, rank):
            for side in (True, False):
                own = [step for step in group if step.suction is side]
                first = next((step.id for step in own if not _holds_flow(budget, step.id)), None)
                steps += [dataclasses.replace(step, reference=step.id == first) for step in own]
        steps.append(Step(source, "source", "", math.nan))
    return tuple(steps)


def _results(budget: Budget) -> Iterable[tuple[str, SectionResult | TerminalResult]]:
    yield from budget.sections.items()
    yield from budget.terminals.items()


def _branch(budget: Budget, id_: str) -> str:
    """Return the nearest section toward the source with a device, of the supply side first; "" for none."""
    description = budget.run.layout.description
    part = description.sections.get(id_) or description.terminals[id_]
    for side in ("from_", "to"):
        above = getattr(part, side)
        seen: set[str] = {id_}
        while above in description.sections and above not in seen:
            seen.add(above)
            section = description.sections[above]
            if section.balance is not None and above in budget.sections:
                return str(above)
            above = section.from_ if section.from_ is not None else section.to
    return ""


def _walk(root: str, members: Mapping[str, list[Step]], rank: Mapping[str, int]) -> list[list[Step]]:
    """Return the members of each branch within one, inner branches first, its own members last."""
    order: list[list[Step]] = []
    pending = [root]
    while pending:  # outer branches first, their last member first; turned round at the end
        branch = pending.pop()
        own = sorted(
            members.get(branch, ()),
            key=lambda step: (math.isnan(step.margin), round(step.margin, 6), rank.get(step.id, 0)),
        )
        order.append(own)
        pending += [step.id for step in own if step.id in members]
    return order[::-1]


def judge(budget: Budget, readings: Readings, tolerance: float) -> tuple[dict[str, Judged], tuple[Finding, ...]]:
    """Return each measured flow as a share of the design flow, and findings with their place in the readings file.

    A flow read from a signal goes through the measuring orifice of the device, else through its Kv at the setting that
    the reading states, else at that which the run states, else at the one proposed.
    """
    found: dict[str, Judged] = {}
    findings: list[Finding] = []
    uses = _uses(budget)
    for id_, reading in readings.measured.items():
        design = _design(budget, id_)
        if design is None:
            text = "it has no design flow to compare with; mend the run first"
            findings.append(error("reading", text, reading.path))
            continue
        flow, design_mass = design
        density = design_mass / flow
        mass = _mass(budget, uses, reading, density)
        if isinstance(mass, Finding):
            findings.append(mass)
            continue
        share = mass / design_mass
        one = Judged(id_, mass / density, flow, share, _verdict(share, tolerance))
        found[id_] = one
        if one.verdict != "within":
            side = "below" if one.verdict == "low" else "above"
            key = "signal" if reading.flow is None else "flow"
            text = (
                f"the measured flow, {{0}}, is {100.0 * share:.1f} % of the design flow, {{1}}: {side} its tolerance "
                f"of {100.0 * tolerance:g} % either way"
            )
            findings.append(
                warning("measured-flow", text, (*reading.path, key), (one.flow, "flow"), (one.design_flow, "flow"))
            )
    return found, tuple(findings)


def _design(budget: Budget, id_: str) -> tuple[float, float] | None:
    """Return the design flow in m3/s and kg/s; None where it has none."""
    section = budget.sections.get(id_)
    result = section.run if section is not None else budget.sources.get(id_) or budget.terminals.get(id_)
    return (result.flow, result.mass_flow) if result is not None and result.mass_flow > 0.0 else None


def _verdict(share: float, tolerance: float) -> Verdict:
    if share < 1.0 - tolerance - SMALL:
        return "low"
    return "high" if share > 1.0 + tolerance + SMALL else "within"


def _uses(budget: Budget) -> dict[str, DeviceUse]:
    layout = budget.run.layout
    return {
        layout.terminals.ids[use.number] if use.terminal else layout.topology.legs[use.number].owner: use
        for use in layout.devices
    }


def _mass(budget: Budget, uses: Mapping[str, DeviceUse], reading: Measured, density: float) -> float | Finding:
    """Return the mass flow of a reading, kg/s, or why it can't be told."""
    if reading.flow is not None:
        return reading.flow.value if reading.flow.basis is Basis.MASS else reading.flow.value * density
    path: Path = (*reading.path, "signal")
    use = uses.get(reading.id)
    if use is None or reading.signal is None:
        return error("reading", "no device stands there that gives a signal; state the flow", path)
    kv = use.device.signal_kv
    if kv is None:
        name = _plain(use.device.name)
        if not use.device.kv or use.device.holds:
            return error("reading", f"{name} gives no signal; state the flow", path)
        setting = reading.setting if reading.setting is not None else _set_at(budget, reading.id)
        if setting is None:
            text = "the signal is across the valve, whose setting is not known; state the setting at which it was read"
            return error("reading", text, path)
        kv = kv_at(use.device.kv, setting)
        if kv is None:
            text = f"the setting {setting:g} is outside the table of {name}; correct it"
            return error("reading", text, (*reading.path, "setting"))
    return flow_of_signal(pascals(reading.signal, use.density), kv, use.density) * use.density


def _set_at(budget: Budget, id_: str) -> float | None:
    """Return where a device is set: as the run states, else as proposed."""
    description = budget.run.layout.description
    stated = (description.sections.get(id_) or description.terminals[id_]).setting
    device = (budget.sections.get(id_) or budget.terminals[id_]).device
    return stated if stated is not None or device is None else device.setting


def kv_at(table: tuple[tuple[float, float], ...], setting: float) -> float | None:
    """Return the Kv at a setting, interpolated on its logarithm; None outside the table."""
    settings = [at for at, _ in table]
    edge = SMALL * (settings[-1] - settings[0])
    if not settings[0] - edge <= setting <= settings[-1] + edge:
        return None
    return math.exp(float(np.interp(setting, settings, [math.log(kv) for _, kv in table])))


def flow_of_signal(signal: float, kv: float, density: float) -> float:
    """Return the flow, m3/s, whose drop across a valve or orifice of a Kv is `signal`, Pa."""
    return math.sqrt(signal / float(valve_drop(1.0, kv, density)))


def _plain(text: str) -> str:
    return repr(text).replace("{", "{{").replace("}", "}}")


def next_step(budget: Budget, steps: Iterable[Step], judged: Mapping[str, Judged], tolerance: float) -> Next:
    """Propose what to do next, going through the order of work.

    Of the first branch that is not in proportion: measure what was not measured yet; then throttle, in the order of
    work, the first member that has more than the tolerance above the share of the least supplied one (the reference),
    to that share. Where all branches are in proportion and flows are still outside the tolerance, the source is set.
    """
    groups: dict[tuple[str, bool, str], list[Step]] = {}
    for step in steps:
        key = (step.branch, step.suction, step.id if step.kind == "source" else "")
        groups.setdefault(key, []).append(step)
    for (branch, _, source), group in groups.items():
        if source:
            found = _of_source(budget, source, judged, tolerance)
        else:
            found = _of_branch(budget, branch, group, judged, tolerance)
        if found is not None:
            return found
    return Next("done")


def _of_branch(
    budget: Budget, branch: str, group: list[Step], judged: Mapping[str, Judged], tolerance: float
) -> Next | None:
    shares: dict[str, float] = {}
    for step in group:
        share = _share(budget, step.id, judged)
        if share is None:
            return Next("measure", step.id, branch)
        if not _holds_flow(budget, step.id):
            shares[step.id] = share
    if not shares or all(_verdict(share, tolerance) == "within" for share in shares.values()):
        return None
    reference = min(shares, key=lambda id_: shares[id_])
    least = shares[reference]
    if least <= 0.0:
        return Next("look", reference, branch, share=least)
    for id_, share in shares.items():
        if share > least * (1.0 + tolerance + SMALL) and _adjustable(budget, id_):
            return _adjust(budget, id_, branch, reference, share, least)
    return None


def _of_source(budget: Budget, source: str, judged: Mapping[str, Judged], tolerance: float) -> Next | None:
    """Set the source where all is in proportion and flows are outside their tolerance."""
    terminals = budget.terminals
    own = {id_: one for id_, one in judged.items() if id_ in terminals and terminals[id_].source == source}
    free = {id_: one.share for id_, one in own.items() if not _holds_flow(budget, id_)}
    if any(_verdict(share, tolerance) != "within" for share in free.values()):
        least, most = min(free, key=lambda id_: free[id_]), max(free, key=lambda id_: free[id_])
        if free[most] * (1.0 - tolerance) > free[least] * (1.0 + tolerance + SMALL):
            # No flow of the source brings both within their tolerance.
            if not _adjustable(budget, most):
                return Next("look", most, source, least, free[most], free[least])
            return _adjust(budget, most, source, least, free[most], free[least])
        whole = _share(budget, source, judged)
        middle = 0.5 * (free[least] + free[most])
        target = math.nan if whole is None else whole / middle
        flow = target * budget.sources[source].flow
        return Next("source", source, share=middle if whole is None else whole, target=target, flow=flow)
    for id_, one in own.items():
        if one.verdict != "within":
            return Next("look", id_, source, share=one.share)
    return None


def _adjust(budget: Budget, id_: str, branch: str, reference: str, share: float, target: float) -> Next:
    result = budget.sections.get(id_)
    flow = result.run.flow if result is not None else budget.terminals[id_].flow
    return Next("adjust", id_, branch, reference, share, target, target * flow)


def _share(budget: Budget, id_: str, judged: Mapping[str, Judged]) -> float | None:
    """Return the measured share of a design flow; of a section or source also from all that it serves."""
    if id_ in judged:
        return judged[id_].share
    if id_ in budget.terminals:
        return None
    if id_ in budget.sections:
        served: Iterable[str] = budget.sections[id_].serves
    else:
        terminals = budget.terminals.values()
        description = budget.run.layout.description.terminals
        own = [one.id for one in terminals if one.source == id_]
        # Of a fan that carries terminals on both sides the discharge side counts, as for its design flow.
        served = [one for one in own if description[one].from_ is not None] or own
    # What holds its flow doesn't follow the branch.
    served = [one for one in served if not _holds_flow(budget, one)] or served
    parts = [(judged.get(one), budget.terminals[one].mass_flow) for one in served]
    whole = math.fsum(mass for _, mass in parts)
    if not parts or not whole > 0.0 or any(one is None for one, _ in parts):
        return None
    return math.fsum(one.share * mass for one, mass in parts if one is not None) / whole


def _device(budget: Budget, id_: str) -> DeviceResult | None:
    result = budget.sections.get(id_) or budget.terminals.get(id_)
    return result.device if result is not None else None


def _holds_flow(budget: Budget, id_: str) -> bool:
    device = _device(budget, id_)
    return device is not None and device.holds == "flow"


def _adjustable(budget: Budget, id_: str) -> bool:
    device = _device(budget, id_)
    return device is not None and device.holds != "flow"
