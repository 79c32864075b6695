"""Where legs meet: which is the branch and which goes straight on, and the changes of area that follow."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from budget.description import Description, Finding, Path, Section, Terminal, error, warning
from budget.network.arrays import AreaChanges, Bools, Ints, Junctions, Legs
from budget.network.topology import Topology
from budget.physics.area_changes import contraction, enlargement
from budget.physics.junctions import FAMILIES

STATED = ("straight", "branch")


@dataclass(frozen=True, slots=True)
class _Member:
    """A leg that meets others, with what its owner says of the junction."""

    id: str
    path: Path
    leg: int
    """-1 for a terminal that has no run-out."""
    takeoff: str | None
    own: bool
    """Whether the takeoff is stated by the owner itself, not by the defaults."""
    has_tee: bool

    @property
    def place(self) -> Path:
        return (*self.path, "takeoff") if self.own or self.takeoff is None else ("defaults", "takeoff")


def find_junctions(
    description: Description, topology: Topology, legs: Legs, used: Bools, findings: list[Finding]
) -> Junctions:
    """Return the junctions of a run; findings where legs meet and what is stated does not fit, or nothing is."""
    rows: dict[str, list[float]] = defaultdict(list)
    found: dict[tuple[str, Path], Finding] = {}
    for parent, members in _meeting(description, topology, used).items():
        for finding in _doubts(parent, members):
            found.setdefault((finding.code, finding.path), finding)  # a paired section meets others on both its legs
        if parent < 0 or len(members) != 2 or {m.takeoff for m in members} in ({"straight"}, {"branch"}):
            continue
        counted = [m for m in members if m.takeoff in STATED and m.leg >= 0]
        if not counted or any(m.leg < 0 for m in members):
            continue
        first, second = members if members[0].takeoff == "branch" or members[1].takeoff == "straight" else members[::-1]
        owner = description.terminals[first.id].run if legs.run_out[first.leg] else description.sections[first.id].run
        rows["branch"].append(first.leg)
        rows["straight"].append(second.leg)
        rows["combined"].append(parent)
        rows["branch_counts"].append(first.takeoff == "branch")
        rows["straight_counts"].append(second.takeoff == "straight")
        rows["family"].append(FAMILIES.index(owner.junction if owner else FAMILIES[0]))
        rows["converging"].append(not legs.outward[parent])
        rows["angle"].append(owner.angle if owner else 90.0)
    findings += found.values()
    branch, combined = _whole(rows["branch"]), _whole(rows["combined"])
    return Junctions(
        branch=branch,
        straight=_whole(rows["straight"]),
        combined=combined,
        branch_counts=_truth(rows["branch_counts"]),
        straight_counts=_truth(rows["straight_counts"]),
        family=_whole(rows["family"]),
        converging=_truth(rows["converging"]),
        angle=np.array(rows["angle"], dtype=np.float64),
        area_ratio=legs.area[branch] / legs.area[combined],
    )


def _whole(values: list[float]) -> Ints:
    return np.array(values, dtype=np.int64)


def _truth(values: list[float]) -> Bools:
    return np.array(values, dtype=np.bool_)


def _meeting(description: Description, topology: Topology, used: Bools) -> dict[int, list[_Member]]:
    """Return the members that meet at the end of each leg (at -1 - n: of source n), those that carry flow."""
    meeting: dict[int, dict[str, _Member]] = defaultdict(dict)
    for number, leg in enumerate(topology.legs):
        if used[number]:
            at = leg.parent if leg.parent >= 0 else -1 - leg.source
            owner = description.terminals[leg.owner] if leg.run_out else description.sections[leg.owner]
            meeting[at][leg.owner] = _member(owner, number)
    for ends in (topology.outward, topology.back):
        for id_, end in ends.items():
            if id_ not in topology.run_out_legs:
                at = end if end >= 0 else -1 - topology.terminal_source[id_]
                meeting[at][id_] = _member(description.terminals[id_], -1)
    return {at: list(members.values()) for at, members in meeting.items()}


def _member(owner: Section | Terminal, leg: int) -> _Member:
    tee = owner.run is not None and any(use.name.startswith("tee ") for use in owner.run.fittings)
    return _Member(owner.id, owner.path, leg, owner.takeoff, owner.takeoff_stated, tee)


def _doubts(parent: int, members: list[_Member]) -> Iterator[Finding]:
    """Find what is stated and does not fit, and what is not stated where it should be."""
    if parent < 0:
        yield from _misplaced(members, 'at a source only "none" fits; state "none", and k for a header')
        return
    if len(members) == 1:
        yield from _misplaced(members, "no other leg meets it there; remove it")
        return
    if len(members) > 2:
        text = f'{len(members)} legs meet, a junction has two; state "none", and k as an item'
        yield from _misplaced(members, text)
    elif {m.takeoff for m in members} in ({"straight"}, {"branch"}):
        text = 'of two legs one is the branch and one goes straight on; of a symmetrical split state "none", and k'
        yield from _misplaced(members, text)
    elif any(m.leg < 0 for m in members):
        name = next(m.id for m in members if m.leg < 0)
        yield from _misplaced(members, f"{name!r} meets it without a size, which a junction needs; give it one")
    for member in members:
        counted = len(members) == 2 and all(m.leg >= 0 for m in members)
        unstated = member.takeoff is None or (not member.own and member.takeoff in STATED and not counted)
        if unstated and not member.has_tee:
            yield warning(
                "junction",
                'legs meet and the junction is not stated, its loss is not counted; state takeoff, or "none"',
                (*member.path, "takeoff"),
            )


def _misplaced(members: list[_Member], remedy: str) -> Iterator[Finding]:
    for member in members:
        if member.own and member.takeoff in STATED:
            yield error("takeoff", f"takeoff {member.takeoff!r} does not fit: {remedy}", member.place)


def find_area_changes(description: Description, topology: Topology, legs: Legs, findings: list[Finding]) -> AreaChanges:
    """Return the change of area that each leg states toward its source; abrupt or by its included angle."""
    count = len(legs)
    k, area = np.zeros(count), np.ones(count)
    for number, leg in enumerate(topology.legs):
        owner = description.terminals[leg.owner] if leg.run_out else description.sections[leg.owner]
        stated = owner.run.transition if owner.run else None
        if stated is None:
            continue
        if leg.parent < 0:
            if leg.first:
                text = "a transition needs a section toward the source; remove it"
                findings.append(error("takeoff", text, (*owner.path, "transition")))
            continue
        own, other = float(legs.area[number]), float(legs.area[leg.parent])
        small, large = min(own, other), max(own, other)
        area[number] = small
        if math.isnan(small):
            k[number] = math.nan
            continue
        widening = (own > other) == leg.outward
        angle = 180.0 if stated == "abrupt" else float(stated)
        change = enlargement if widening else contraction
        k[number] = float(change(small / large, angle)) if own != other else 0.0
    return AreaChanges(k, area)
