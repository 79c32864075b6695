"""What hangs on what: every leg of the run, the leg that it joins toward its source, and each terminal's path.

A leg is a section's supply, return, discharge or suction pipe or duct, or that of a run-out. Legs form trees whose
roots are the sources; a terminal's path is one chain outward and one chain back.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from itertools import chain
from typing import Literal

from budget.description import Description, Finding, Run, Section, Terminal, error, nearest, note
from budget.network.results import Side

AT_SOURCE = -1
"""Parent of a leg that joins the source itself."""

Kind = Literal["closed", "open", "air"]


@dataclass(frozen=True, slots=True)
class Leg:
    """One pipe or duct of a section or run-out, in one direction of flow."""

    owner: str
    """ID of the section, or of the terminal whose run-out it is."""
    run_out: bool
    side: Side
    outward: bool
    """On the way from the source to the terminals."""
    first: bool
    """The leg in which the owner's items and device stand."""
    parent: int
    source: int


@dataclass(slots=True)
class Topology:
    """The legs of a run and how terminals hang on them; indices into `legs`."""

    legs: list[Leg] = field(default_factory=list)
    section_legs: dict[str, tuple[int, ...]] = field(default_factory=dict)
    run_out_legs: dict[str, tuple[int, ...]] = field(default_factory=dict)
    outward: dict[str, int] = field(default_factory=dict)
    """Last leg on a terminal's way out, run-out included; AT_SOURCE where it hangs on the source itself."""
    back: dict[str, int] = field(default_factory=dict)
    """First leg on a terminal's way back."""
    terminal_source: dict[str, int] = field(default_factory=dict)
    kinds: list[Kind] = field(default_factory=list)
    findings: list[Finding] = field(default_factory=list)

    def chain(self, leg: int) -> list[int]:
        """Return the legs from one to its source, itself first."""
        found = []
        while leg >= 0:
            found.append(leg)
            leg = self.legs[leg].parent
        return found


def connect(description: Description) -> Topology:
    """Find the legs and paths of a run. What can't be connected is left out, and a finding says why."""
    topology = Topology(kinds=[_kind(description, id_) for id_ in description.sources])
    rooted = _Rooting(description, topology).run()
    for id_ in rooted:
        _add_section_legs(description, topology, rooted, id_)
    numbers = {id_: number for number, id_ in enumerate(description.sources)}
    unpaired = _find_unpaired(description, rooted)
    for terminal in description.terminals.values():
        _Joining(description, topology, rooted, numbers, unpaired, terminal).run()
    _find_idle(description, topology, rooted)
    return topology


def _kind(description: Description, id_: str) -> Kind:
    if description.fluid.gas:
        return "air"
    return "open" if description.sources[id_].open else "closed"


def _up(section: Section) -> str | None:
    return section.from_ if section.from_ is not None else section.to


class _Rooting:
    """Follows every section to its source."""

    def __init__(self, description: Description, topology: Topology) -> None:
        self.description = description
        self.topology = topology
        self.numbers = {id_: number for number, id_ in enumerate(description.sources)}
        self.root: dict[str, int | None] = {}

    def run(self) -> dict[str, int]:
        """Return the source number of each section, those nearer the source first."""
        order: list[str] = []
        for id_ in self.description.sections:
            self._follow(id_, order)
        return {id_: number for id_ in order if (number := self.root[id_]) is not None}

    def _follow(self, id_: str, order: list[str]) -> None:
        trail: list[str] = []
        at: str | None = id_
        place: dict[str, int] = {}
        found: int | None = None
        while True:
            if at is None:
                break
            if at in self.numbers:
                found = self.numbers[at]
                break
            if at in self.root:
                found = self.root[at]
                break
            if at in place:
                ring = trail[place[at] :]
                self._wrong(
                    "cycle",
                    ring[0],
                    f"{' -> '.join(map(repr, [*ring, ring[0]]))} hang on each other; correct one of them",
                )
                break
            place[at] = len(trail)
            trail.append(at)
            at = self._target(at)
        for name in reversed(trail):
            self.root[name] = found
            order.append(name)

    def _target(self, id_: str) -> str | None:
        """Return what a section hangs on, or None with a finding where it can't."""
        section, known = self.description.sections[id_], self.description
        target = _up(section)
        if target is None or target in known.sources:
            return target
        key = "from" if section.from_ is not None else "to"
        if target in known.terminals:
            self._wrong("wrong-connection", id_, f"{target!r} is a terminal; name a section or a source", key)
            return None
        other = known.sections.get(target)
        if other is None:
            hint = nearest(target, chain(known.sources, known.sections))
            self._wrong("dangling", id_, f"{target!r} is neither a source nor a section; {hint}", key)
            return None
        if other.from_ is None and other.to is None:
            return target  # nothing is known of it, and it says so itself
        if key == "from" and other.from_ is None:
            self._wrong(
                "wrong-connection", id_, f"{target!r} is on the way back; fluid can't reach {id_!r} from it", key
            )
            return None
        if key == "to" and other.from_ is not None and known.fluid.gas:
            text = f"{target!r} is on the discharge side; to needs the suction side"
            self._wrong("wrong-connection", id_, text, key)
            return None
        if key == "to" and other.from_ is not None and not other.run.paired:
            self._wrong("unpaired", id_, f"{target!r} has no return leg to discharge into; make it paired", key)
            return None
        return target

    def _wrong(self, code: str, id_: str, message: str, key: str | None = None) -> None:
        section = self.description.sections[id_]
        key = key or ("from" if section.from_ is not None else "to")
        self.topology.findings.append(error(code, message, (*section.path, key)))


def _add_section_legs(description: Description, topology: Topology, rooted: dict[str, int], id_: str) -> None:
    section, source = description.sections[id_], rooted[id_]
    kind = topology.kinds[source]
    target = _up(section)
    legs = topology.section_legs.get(target or "", ())
    add = _adder(topology, id_, run_out=False, source=source)
    if section.from_ is None:
        if section.run.paired_stated and section.run.paired:
            topology.findings.append(
                error(
                    "paired", "a section that leads back has no leg to pair; remove paired", (*section.path, "paired")
                )
            )
        parent = legs[-1] if legs else AT_SOURCE
        side: Side = "return" if kind == "closed" else "suction"
        topology.section_legs[id_] = (add(side, parent, outward=False, first=True),)
        return
    supply = add(
        "supply" if kind == "closed" else "discharge", legs[0] if legs else AT_SOURCE, outward=True, first=True
    )
    topology.section_legs[id_] = (supply,)
    if kind == "air":
        if section.run.paired_stated and section.run.paired:
            topology.findings.append(
                error("paired", "a gas has no return leg to pair; remove paired", (*section.path, "paired"))
            )
        return
    if section.run.paired and (not legs or len(legs) == 2):
        back = add("return", legs[1] if legs else AT_SOURCE, outward=False, first=False)
        topology.section_legs[id_] = (supply, back)


def _adder(topology: Topology, owner: str, *, run_out: bool, source: int) -> Callable[..., int]:
    def add(side: Side, parent: int, *, outward: bool, first: bool) -> int:
        topology.legs.append(Leg(owner, run_out, side, outward, first, parent, source))
        return len(topology.legs) - 1

    return add


def _find_unpaired(description: Description, rooted: dict[str, int]) -> dict[str, str]:
    """Return by section the nearest one, itself or upstream of it, that has no return leg of its own."""
    found: dict[str, str] = {}
    for id_ in rooted:  # what a section hangs on comes before it
        section = description.sections[id_]
        nearest_one = id_ if not section.run.paired else found.get(section.from_ or "")
        if nearest_one is not None:
            found[id_] = nearest_one
    return found


class _Joining:
    """Hangs one terminal on the legs of its path."""

    def __init__(
        self,
        description: Description,
        topology: Topology,
        rooted: dict[str, int],
        numbers: dict[str, int],
        unpaired: dict[str, str],
        terminal: Terminal,
    ) -> None:
        self.description = description
        self.topology = topology
        self.rooted = rooted
        self.numbers = numbers
        self.unpaired = unpaired
        self.terminal = terminal

    def run(self) -> None:
        """Add the run-out's legs and note where the path starts and ends."""
        terminal = self.terminal
        out = self._place("from", terminal.from_)
        back = self._place("to", terminal.to)
        if out is False or back is False or (out is None and back is None):
            return
        source = next(place[1] for place in (out, back) if place)
        kind = self.topology.kinds[source]
        if out and back and out[1] != back[1]:
            self._wrong("wrong-connection", "from and to lead to different sources", "to")
            return
        if kind == "air" and out and back:
            self._wrong("contradiction", "an air terminal has from or to, not both; remove one", "to")
            return
        if kind != "air" and not out:
            self._wrong("missing", "a liquid reaches the terminal by from; state it", "from")
            return
        if kind == "closed" and not back:
            back = self._paired_back(source)
            if not back:
                return
        self._attach(source, kind, out or None, back or None)

    def _place(self, key: str, target: str | None) -> tuple[int, int] | Literal[False] | None:
        """Return leg (or AT_SOURCE) and source that `from` or `to` names; None: not stated; False: wrong."""
        if target is None:
            return None
        if target in self.numbers:
            return AT_SOURCE, self.numbers[target]
        section = self.description.sections.get(target)
        if section is None:
            if target in self.description.terminals:
                self._wrong("wrong-connection", f"{target!r} is a terminal; name a section or a source", key)
            else:
                known = chain(self.numbers, self.description.sections)
                self._wrong("dangling", f"{target!r} is neither a source nor a section; {nearest(target, known)}", key)
            return False
        legs = self.topology.section_legs.get(target)
        if legs is None:
            return False  # what it hangs on is wrong itself, and said so
        if key == "from":
            if section.from_ is None:
                self._wrong(
                    "wrong-connection", f"{target!r} leads back to the source; from needs one that leads out", key
                )
                return False
            return legs[0], self.rooted[target]
        if section.from_ is not None and len(legs) < 2:
            if self.description.fluid.gas:
                self._wrong("wrong-connection", f"{target!r} is on the discharge side; to needs the suction side", key)
            else:
                self._wrong("unpaired", f"{target!r} has no return leg to return by; make it paired", key)
            return False
        return legs[-1], self.rooted[target]

    def _paired_back(self, source: int) -> tuple[int, int] | None:
        """Return the return leg of the section that feeds the terminal; an error names the unpaired one."""
        feeding = self.terminal.from_ or ""
        if at := self.unpaired.get(feeding):
            self._wrong("unpaired", f"it returns by {at!r}, which is not paired; pair it, or state to", "from")
            return None
        legs = self.topology.section_legs.get(feeding, ())
        return (legs[1] if legs else AT_SOURCE), source

    def _attach(self, source: int, kind: Kind, out: tuple[int, int] | None, back: tuple[int, int] | None) -> None:
        terminal, id_ = self.terminal, self.terminal.id
        self.topology.terminal_source[id_] = source
        out_leg = out[0] if out else None
        back_leg = back[0] if back else None
        run = terminal.run
        if run is not None:
            out_leg, back_leg = self._run_out(run, source, kind, out_leg, back_leg)
        if out_leg is not None:
            self.topology.outward[id_] = out_leg
        if back_leg is not None:
            self.topology.back[id_] = back_leg

    def _run_out(
        self, run: Run, source: int, kind: Kind, out: int | None, back: int | None
    ) -> tuple[int | None, int | None]:
        add = _adder(self.topology, self.terminal.id, run_out=True, source=source)
        legs = []
        if kind == "air":
            if run.paired_stated and run.paired:
                self._wrong("paired", "a gas has no return leg to pair; remove paired", "paired")
            if out is not None:
                out = add("discharge", out, outward=True, first=True)
                legs.append(out)
            else:
                back = add("suction", back, outward=False, first=True)
                legs.append(back)
        else:
            out = add("supply" if kind == "closed" else "discharge", out, outward=True, first=True)
            legs.append(out)
            if run.paired and back is not None:
                back = add("return" if kind == "closed" else "suction", back, outward=False, first=False)
                legs.append(back)
            elif kind == "closed" and self.terminal.to is None:
                self._wrong("unpaired", "its run-out has no return leg; make it paired, or state to", "paired")
        self.topology.run_out_legs[self.terminal.id] = tuple(legs)
        return out, back

    def _wrong(self, code: str, message: str, key: str) -> None:
        self.topology.findings.append(error(code, message, (*self.terminal.path, key)))


def _find_idle(description: Description, topology: Topology, rooted: dict[str, int]) -> None:
    """Find sections and sources that serve no terminal, and return legs that carry nothing.

    A terminal that could not be connected has a finding of its own: what it names is not idle.
    Nor is what a link joins.
    """
    lost = [terminal for id_, terminal in description.terminals.items() if id_ not in topology.terminal_source]
    named = {target for terminal in lost for target in (terminal.from_, terminal.to) if target is not None}
    named |= {target for link in description.links.values() for target in (link.from_, link.to) if target is not None}
    ends = [*topology.outward.values(), *topology.back.values()]
    ends += [topology.section_legs[id_][0] for id_ in named if id_ in topology.section_legs]
    used: set[int] = set()
    for leg in ends:
        while leg >= 0 and leg not in used:
            used.add(leg)
            leg = topology.legs[leg].parent
    served = {topology.legs[leg].owner for leg in used if not topology.legs[leg].run_out}
    for id_, section in description.sections.items():
        if id_ in rooted and id_ not in served:
            topology.findings.append(
                error("no-terminal", f"{id_!r} serves no terminal; hang one on it, or remove it", section.path)
            )
            continue
        legs = topology.section_legs.get(id_, ())
        if len(legs) == 2 and section.run.paired_stated and legs[1] not in used:
            topology.findings.append(
                note("return-unused", "its return leg carries nothing; it needs no pairing", (*section.path, "paired"))
            )
    busy = {*topology.terminal_source.values(), *(rooted[id_] for id_ in named if id_ in rooted)}
    for number, source in enumerate(description.sources.values()):
        if number not in busy and source.id not in named:
            topology.findings.append(
                error("no-terminal", f"{source.id!r} serves no terminal; hang one on it, or remove it", source.path)
            )
