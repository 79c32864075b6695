"""What holds for every run with junctions and changes of area: its losses add up to the required pressure."""

from __future__ import annotations

import math
import random
import tomllib
from collections import defaultdict
from typing import Any

import tomli_w
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from budget.description import describe, read_text
from budget.network import Budget, LegResult, SectionResult, evaluate, lay_out
from tests.independent.runs import features, generate

SEEDS = st.integers(2_000_000, 3_000_000)


def joined(seed: int) -> str | None:
    """A generated run with a junction wherever two legs with a size meet, and changes of area here and there.

    None for a run of more than 120 sections.
    """
    text = generate(seed)
    if text.count("\n[section.") > 120:
        return None
    data, rng = tomllib.loads(text), random.Random(seed)
    for id_, takeoff in _takeoffs(text).items():
        table = data["section"] if id_ in data["section"] else data["terminal"]
        table[id_]["takeoff"] = takeoff
        for name in [name for name in table[id_].get("fittings", {}) if name.startswith("tee ")]:
            del table[id_]["fittings"][name]
        if takeoff == "branch" and rng.random() < 0.4:
            table[id_]["angle"] = rng.choice((30, "45 deg", 60, 80))
        if takeoff == "branch" and rng.random() < 0.4:
            table[id_]["junction"] = "tee-idelchik"
    for section in data["section"].values():
        if section.get("from", section.get("to")) in data["section"] and rng.random() < 0.4:
            section["transition"] = rng.choice(("abrupt", 15, "30 deg", 90))
    return tomli_w.dumps(data)


def _takeoffs(text: str) -> dict[str, str]:
    """What each section and run-out is: the larger flow goes straight on; "none" where it can't be told."""
    layout = lay_out(describe(read_text(text)))
    meeting: dict[int, dict[str, int]] = defaultdict(dict)
    for number, leg in enumerate(layout.topology.legs):
        if leg.parent >= 0 and layout.end[number] > layout.start[number]:
            meeting[leg.parent][leg.owner] = number
    for ends in (layout.topology.outward, layout.topology.back):
        for id_, end in ends.items():
            if end >= 0 and id_ not in layout.topology.run_out_legs:
                meeting[end][id_] = -1
    roles: dict[str, str] = {}
    for met in meeting.values():
        if len(met) > 2 or (len(met) == 2 and -1 in met.values()):
            roles |= dict.fromkeys(met, "none")
    for met in meeting.values():
        if len(met) == 2 and -1 not in met.values():
            served = {id_: int(layout.end[leg] - layout.start[leg]) for id_, leg in met.items()}
            for id_, role in zip(sorted(served, key=lambda one: served[one]), ("branch", "straight"), strict=True):
                roles[id_] = role if roles.get(id_, role) == role else "none"
    return {id_: role for id_, role in roles.items() if role != "none"}


def worked_out(text: str) -> Budget:
    budget = evaluate(describe(read_text(text)))
    assert [finding for finding in budget.findings if finding.level == "error"] == []
    return budget


def lost(leg: LegResult) -> float:
    """What a leg loses by its parts: friction, each fitting, its part of a junction and its change of area."""
    return math.fsum([leg.friction, *(loss.drop for loss in (*leg.losses, *leg.joints))])


def beside(section: SectionResult) -> float:
    """What stands in the first leg beside its losses."""
    return section.run.items + section.run.static + (section.device.base if section.device else 0.0)


def circuit(budget: Budget, id_: str) -> float:
    """The circuit of a terminal, leg by leg along its path; up to the first device that holds a differential."""
    terminal = budget.terminals[id_]
    path = list(terminal.path)
    outward: list[str] = []
    at = budget.run.layout.description.terminals[id_].from_
    while at is not None and at in budget.sections:
        outward.insert(0, at)
        at = budget.run.layout.description.sections[at].from_
    assert path[: len(outward)] == outward
    back = path[len(outward) :]
    parts = [terminal.drop, terminal.items_drop, terminal.static, terminal.device.base if terminal.device else 0.0]
    if terminal.run_out:
        parts += [lost(leg) for leg in terminal.run_out.legs]
    holders = [id_ for id_ in outward if (device := budget.sections[id_].device) and device.holds == "differential"]
    if holders:
        held = budget.sections[holders[0]].device
        assert held is not None
        assert held.set_point is not None
        parts = [held.set_point]
        outward = outward[: outward.index(holders[0]) + 1]
        back = back[back.index(holders[0]) :]
    for id_ in outward:
        parts += [lost(budget.sections[id_].run.legs[0]), beside(budget.sections[id_])]
    for id_ in back:
        section = budget.sections[id_]
        parts.append(lost(section.run.legs[-1]))
        if len(section.run.legs) == 1:
            parts.append(beside(section))
    return math.fsum(parts)


def check(text: str) -> Budget:
    budget = worked_out(text)
    for source in budget.sources.values():
        whole = math.fsum([source.items_drop, *(circuit(budget, id_) for id_ in source.index)])
        statics = [abs(section.run.static) for section in budget.sections.values()]
        scale = max(
            abs(source.required), source.items_drop, *statics, *(abs(t.static) for t in budget.terminals.values())
        )
        assert abs(whole - source.required) <= 1e-9 * scale
        assert abs(math.fsum(source.spent.values()) - source.required) <= 1e-9 * scale
    for section in budget.sections.values():
        run = section.run
        parts = (run.friction, run.fittings, run.junction, run.transition, run.items)
        assert math.isclose(run.drop, math.fsum(parts), rel_tol=1e-12)
        assert math.isclose(
            run.drop, math.fsum([run.items, *map(lost, run.legs)]), rel_tol=1e-9, abs_tol=1e-9 * abs(run.friction)
        )
    return budget


@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.filter_too_much])
@given(SEEDS)
def test_losses_along_the_index_circuit_add_up_to_the_required_pressure(seed: int) -> None:
    text = joined(seed)
    assume(text is not None)
    check(text or "")


def test_the_runs_hold_what_they_should() -> None:
    junctions = gains = changes = both = 0
    kinds: set[str] = set()
    for seed in range(2_000_000, 2_000_040):
        text = joined(seed)
        if text is None:
            continue
        budget = check(text)
        joints: list[Any] = [joint for s in budget.sections.values() for leg in s.run.legs for joint in leg.joints]
        junctions += sum("junction" in joint.name for joint in joints)
        gains += sum(joint.k < 0.0 for joint in joints)
        changes += sum(joint.name == "change of area" for joint in joints)
        both += any(sum(bool(leg.joints) for leg in s.run.legs) == 2 for s in budget.sections.values())
        kinds |= {"air", "open", "closed", "reverse return"} & features(generate(seed))
    assert min(junctions, gains, changes, both) > 10
    assert kinds == {"air", "open", "closed", "reverse return"}
