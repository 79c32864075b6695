"""Links: what closes a ring between two sections, the legs that it has, and the part of the run that is in rings."""

from __future__ import annotations

import dataclasses
from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from budget.description import Description, Finding, Link, Section, error, nearest, warning
from budget.network.arrays import Bools, Ints, Items, Junctions, Zone
from budget.network.equipment import DROP
from budget.network.topology import Leg, Topology


@dataclass(slots=True)
class Joined:
    """The legs of every link, and the legs of the trees at whose far ends each begins and ends."""

    legs: list[Leg] = field(default_factory=list)
    first: list[int] = field(default_factory=list)
    second: list[int] = field(default_factory=list)
    of: dict[str, tuple[int, ...]] = field(default_factory=dict)
    """By the ID of a link the numbers of its legs."""

    def add(self, link: str, like: Leg, first: int, second: int) -> None:
        """Add a leg that flows from the far end of one leg to that of another; it is of the kind of those two."""
        self.of[link] = (*self.of.get(link, ()), len(self.legs))
        lead = len(self.of[link]) == 1
        self.legs.append(Leg(link, run_out=False, side=like.side, outward=like.outward, first=lead, parent=-1,
                             source=like.source))  # fmt: skip
        self.first.append(first)
        self.second.append(second)


def join_links(
    description: Description, topology: Topology, zones: Sequence[Zone], zone: Ints, findings: list[Finding]
) -> Joined:
    """Find what every link joins. One that can't be joined is left out, and a finding says why."""
    joined = Joined()
    behind = {end: number for number, found in enumerate(zones) for end in (found.leg, found.back) if end >= 0}

    def zone_at(leg: int) -> int:
        return behind.get(leg, int(zone[leg]))

    for link in description.links.values():
        first, second = (_end(description, link, key, findings) for key in ("from", "to"))
        if first is None or second is None:
            continue
        legs = [topology.section_legs.get(end.id, ()) for end in (first, second)]
        if not legs[0] or not legs[1]:
            continue  # what they hang on is wrong itself, and said so
        wrong = _misfit(first, second, [topology.legs[pair[0]].source for pair in legs])
        if not wrong and zone_at(legs[0][0]) != zone_at(legs[1][0]):
            wrong = "a device holds a differential between the two; join sections on the same side of it"
        if wrong:
            findings.append(error("wrong-connection", wrong, (*link.path, "to")))
            continue
        joined.add(link.id, topology.legs[legs[0][0]], legs[0][0], legs[1][0])
        pairs = topology.kinds[topology.legs[legs[0][0]].source] != "air" and first.from_ is not None
        if link.run.paired and pairs and len(legs[0]) == len(legs[1]) == 2:
            joined.add(link.id, topology.legs[legs[0][1]], legs[1][1], legs[0][1])
        elif link.run.paired and link.run.paired_stated:
            text = "the sections that it joins have no return legs; remove paired"
            findings.append(error("paired", text, (*link.path, "paired")))
    return joined


def _end(description: Description, link: Link, key: str, findings: list[Finding]) -> Section | None:
    target = link.from_ if key == "from" else link.to
    if target is None:
        return None  # not stated, and said so
    if target not in description.sections:
        hint = nearest(target, description.sections)
        findings.append(error("dangling", f"{target!r} is not a section; {hint}", (*link.path, key)))
        return None
    return description.sections[target]


def _misfit(first: Section, second: Section, sources: Sequence[int]) -> str:
    """Say why two sections can't be joined; nothing where they can."""
    if first.id == second.id:
        return "it begins and ends at the same section; name another"
    if (first.from_ is None) != (second.from_ is None):
        return f"{first.id!r} and {second.id!r} do not both lead out or both lead back; join two of a kind"
    if sources[0] != sources[1]:
        return f"{first.id!r} and {second.id!r} hang on different sources; join two of the same"
    return ""


def find_ringed(topology: Topology, joined: Joined) -> Bools:
    """Find the legs of the trees that are in a ring: those between the ends of a link."""
    ringed = np.zeros(len(topology.legs), dtype=np.bool_)
    for first, second in zip(joined.first, joined.second, strict=True):
        at, other = first, second
        while at != other:  # whichever has the higher number goes up: a parent has a lower one
            at, other = max(at, other), min(at, other)
            ringed[at] = True
            at = topology.legs[at].parent
    return ringed


def uncounted(
    description: Description, topology: Topology, junctions: Junctions, joined: Joined, ringed: Bools,
    findings: list[Finding],
) -> Junctions:  # fmt: skip
    """Return the junctions without those in a ring, whose flows may come from any side; a warning for each leg."""
    if not joined.legs:
        return junctions
    ends = np.zeros(len(ringed), dtype=np.bool_)
    ends[[*joined.first, *joined.second]] = True
    combined = junctions.combined
    lost = ringed[junctions.branch] | ringed[junctions.straight] | ringed[combined] | ends[combined]
    said = set()
    for number in np.flatnonzero(lost).tolist():
        for leg, counts in (
            (junctions.branch, junctions.branch_counts),
            (junctions.straight, junctions.straight_counts),
        ):
            found = topology.legs[int(leg[number])]
            owners = description.terminals if found.run_out else description.sections
            path = (*owners[found.owner].path, "takeoff")
            if counts[number] and path not in said:
                said.add(path)
                text = 'its junction is in a ring and not counted; state "none", and k as an item'
                findings.append(warning("junction", text, path))
    kept = {
        part.name: getattr(junctions, part.name)[~lost]
        for part in dataclasses.fields(junctions)
        if part.name != "unknown"
    }
    return dataclasses.replace(junctions, **kept)


def check_rings(
    description: Description, topology: Topology, items: Items, ringed: Bools, link_items: Items,
    findings: list[Finding],
) -> None:  # fmt: skip
    """Find what a ring can't hold: devices and control items, and drops at a flow that is yet to be found."""
    for id_, legs in topology.section_legs.items():
        section = description.sections[id_]
        if ringed[legs[0]] and section.balance:
            text = "what a device takes up in a ring would move its flows; put it on a section outside the ring"
            findings.append(error("contradiction", text, (*section.path, "balance")))
        for item in section.items if ringed[legs[0]] else ():
            if item.control:
                text = "a control item in a ring would move its flows; put it on a section outside the ring"
                findings.append(error("contradiction", text, (*item.path, "control")))
    in_ring = np.flatnonzero((items.carrier < len(ringed)) & (items.form == DROP)).tolist()
    doubtful = [(items, number) for number in in_ring if ringed[items.carrier[number]]]
    doubtful += [(link_items, number) for number in np.flatnonzero(link_items.form == DROP).tolist()]
    for among, number in doubtful:
        if np.isnan(among.at[number]) and not np.isnan(among.value[number]):
            text = "in a ring the flow comes from solving; state at, the flow of this drop, or state kv"
            findings.append(error("missing", text, (*among.items[number].path, "at")))
