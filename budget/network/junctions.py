"""Where legs meet: which is the branch and which goes straight on, and the changes of area that follow."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from budget.description import Description, Finding, Path, Run, Section, Terminal, error, warning
from budget.network.arrays import AreaChanges, Bools, Ints, Junctions, Legs
from budget.network.topology import Topology
from budget.physics.area_changes import ABRUPT, contraction, enlargement
from budget.physics.junctions import FAMILIES

STATED = ("straight", "branch")
Broken = Mapping[Path, set[str]]
"""Keys of each table that could not be read."""


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
    broken: bool
    """Whether it is stated, but could not be read."""
    has_tee: bool
    run: Run | None

    @property
    def place(self) -> Path:
        return (*self.path, "takeoff")


def find_junctions(
    description: Description, topology: Topology, legs: Legs, used: Bools, broken: Broken, findings: list[Finding]
) -> Junctions:
    """Return the junctions of a run; findings where legs meet and what is stated does not fit, or nothing is."""
    rows: dict[str, list[float]] = defaultdict(list)
    meeting = _meeting(description, topology, used, broken)
    doubts: dict[tuple[str, Path], Finding] = {}
    for finding in (*_misplaced(meeting), *_doubts(meeting)):
        doubts.setdefault((finding.code, finding.path), finding)  # a paired section meets others on both its legs
    findings += doubts.values()
    unknown: list[int] = []
    for parent, members in meeting.items():
        if parent < 0 or len(members) < 2:
            continue
        unknown += [member.leg for member in members if member.broken and member.leg >= 0]
        if not _is_junction(members) or not any(member.takeoff in STATED for member in members):
            continue
        first, second = members if members[0].takeoff == "branch" or members[1].takeoff == "straight" else members[::-1]
        rows["branch"].append(first.leg)
        rows["straight"].append(second.leg)
        rows["combined"].append(parent)
        rows["branch_counts"].append(first.takeoff == "branch")
        rows["straight_counts"].append(second.takeoff == "straight")
        rows["family"].append(FAMILIES.index(_stated("junction", first, second)))
        rows["converging"].append(not legs.outward[parent])
        lost = any(_is_broken(broken, first.path, key) for key in ("junction", "angle"))
        rows["angle"].append(math.nan if lost else _stated("angle", first, second))
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
        unknown=_whole(unknown),
    )


def _whole(values: Sequence[float]) -> Ints:
    return np.array(values, dtype=np.int64)


def _truth(values: Sequence[float]) -> Bools:
    return np.array(values, dtype=np.bool_)


def _is_broken(broken: Broken, path: Path, key: str) -> bool:
    """Whether a key could not be read, where it stands or among the defaults."""
    return key in broken.get(path, ()) or ("defaults", key) in broken


def _stated(key: str, branch: _Member, straight: _Member) -> Any:
    """Return family or angle: what the branch itself states, else the straight leg, else the default."""
    runs = [run for run in (branch.run, straight.run) if run is not None]
    return getattr(next((run for run in runs if key in run.own_junction), runs[0]), key)


def _is_junction(members: Sequence[_Member]) -> bool:
    """Whether those that meet make a junction: two legs with a size, not both the same part of it."""
    alike = members[0].takeoff == members[-1].takeoff and members[0].takeoff in STATED
    return len(members) == 2 and all(member.leg >= 0 for member in members) and not alike


_Meeting = Mapping[int, Sequence[_Member]]


def _meeting(description: Description, topology: Topology, used: Bools, broken: Broken) -> _Meeting:
    """Return the members that meet at the end of each leg (at -1 - n: of source n), those that carry flow."""
    meeting: dict[int, dict[str, _Member]] = defaultdict(dict)
    for number, leg in enumerate(topology.legs):
        if used[number]:
            at = leg.parent if leg.parent >= 0 else -1 - leg.source
            owner = description.terminals[leg.owner] if leg.run_out else description.sections[leg.owner]
            meeting[at][leg.owner] = _member(owner, number, broken)
    for ends in (topology.outward, topology.back):
        for id_, end in ends.items():
            if id_ not in topology.run_out_legs:
                at = end if end >= 0 else -1 - topology.terminal_source[id_]
                meeting[at][id_] = _member(description.terminals[id_], -1, broken)
    return {at: list(members.values()) for at, members in meeting.items()}


def _member(owner: Section | Terminal, leg: int, broken: Broken) -> _Member:
    run = owner.run
    names = [] if run is None else [use.name for use in run.fittings] + [use.kind for use in run.uses]
    lost = not owner.takeoff_stated and _is_broken(broken, owner.path, "takeoff")
    return _Member(
        id=owner.id,
        path=owner.path,
        leg=leg,
        takeoff=None if lost else owner.takeoff,
        own=owner.takeoff_stated,
        broken=lost,
        has_tee=any(name.startswith("tee ") for name in names),
        run=run,
    )


def _misplaced(meeting: _Meeting) -> Iterator[Finding]:
    """Find what is stated where nothing meets: on no leg of its owner there is a junction."""
    meets = {member.id for at, members in meeting.items() for member in members if at >= 0 and len(members) > 1}
    for at, members in meeting.items():
        for member in members:
            if member.own and member.takeoff in STATED and member.id not in meets:
                remedy = (
                    'at a source only "none" fits; state "none", and k for a header'
                    if at < 0
                    else "no other leg meets it there; remove it"
                )
                yield error("takeoff", f"takeoff {member.takeoff!r} does not fit: {remedy}", member.place)


def _doubts(meeting: _Meeting) -> Iterator[Finding]:
    """Find what is stated of legs that meet and does not fit, and what is not stated where it should be."""
    for at, members in meeting.items():
        if at < 0 or len(members) < 2:
            continue
        fits = _is_junction(members)
        for member in members:
            stated = member.takeoff in STATED
            if stated and member.own and not fits:
                text = f"takeoff {member.takeoff!r} does not fit: {_why(members)}"
                yield error("takeoff", text, member.place)
            elif (member.takeoff is None or (stated and not fits)) and not (member.has_tee or member.broken):
                yield warning(
                    "junction",
                    'legs meet and the junction is not stated, its loss is not counted; state takeoff, or "none"',
                    member.place,
                )
        yield from _contradictions(members)


def _why(members: Sequence[_Member]) -> str:
    """Say why members that meet make no junction, and what to do."""
    if len(members) > 2:
        return f'{len(members)} legs meet, a junction has two; state "none", and k as an item'
    sizeless = [member.id for member in members if member.leg < 0]
    if sizeless:
        return f"{sizeless[0]!r} meets it without a size, which a junction needs; give it one"
    return 'of two legs one is the branch and one goes straight on; of a symmetrical split state "none", and k'


def _contradictions(members: Sequence[_Member]) -> Iterator[Finding]:
    """Find a family or an angle that both legs of a junction state, and not the same."""
    runs = [(member, member.run) for member in members if member.run is not None]
    if not _is_junction(members) or len(runs) != 2:
        return
    (first, one), (second, other) = runs
    for key in ("junction", "angle"):
        if key in one.own_junction & other.own_junction and getattr(one, key) != getattr(other, key):
            text = f"{key} is not that of {first.id!r}, which it meets; a junction has one, state it on the branch"
            yield error("takeoff", text, (*second.path, key))


def find_area_changes(
    description: Description, topology: Topology, legs: Legs, broken: Broken, findings: list[Finding]
) -> AreaChanges:
    """Return the change of area that each leg states toward its source; abrupt or by its included angle."""
    angle = np.full(len(legs), np.nan)
    lost: list[int] = []
    for number, leg in enumerate(topology.legs):
        owner = description.terminals[leg.owner] if leg.run_out else description.sections[leg.owner]
        stated = owner.run.transition if owner.run else None
        if "transition" in broken.get(owner.path, ()):
            lost.append(number)
        elif stated is not None and leg.parent >= 0:
            angle[number] = ABRUPT if stated == "abrupt" else float(stated)
        elif stated is not None and leg.first:
            text = "a transition needs a section toward the source; remove it"
            findings.append(error("takeoff", text, (*owner.path, "transition")))
    k, area = np.zeros(len(legs)), np.ones(len(legs))
    k[lost] = np.nan
    changing = np.flatnonzero(~np.isnan(angle))
    own, other = legs.area[changing], legs.area[legs.parent[changing]]
    area[changing] = np.minimum(own, other)
    ratio = area[changing] / np.maximum(own, other)
    widening = (own > other) == legs.outward[changing]
    changed = np.where(widening, enlargement(ratio, angle[changing]), contraction(ratio, angle[changing]))
    k[changing] = np.where(own == other, 0.0, changed)
    return AreaChanges(k, area)
