"""The flows as installed: what each source gives, what sections and terminals get, and what is doubtful about it."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np

from budget.description import Case, Finding, Path, error, warning
from budget.network.computed import Computed
from budget.network.flows.cases import Devices, Setup, set_up
from budget.network.flows.graph import Network
from budget.network.flows.installed import Installed, install
from budget.network.flows.solve import Solution, solve_switching
from budget.physics.arrays import Array
from budget.physics.power import hydraulic_power, shaft_power

_SLACK = 1e-6  # of the network's pressure, by which a control may be beyond its range before it is taken for that
_BACKWARD = 1e-6  # of design flow, from which a flow counts as running backward


@dataclass(frozen=True, slots=True)
class SourceFlow:
    """The operating point of a pump or fan."""

    id: str
    flow: float
    """m3/s at the supply density."""
    mass_flow: float
    pressure: float
    """Pa, across the source and its items."""
    speed: float | None
    """Over that of its curve; None where it has none."""
    power: float | None
    """At the shaft, W; None without an efficiency."""


@dataclass(frozen=True, slots=True)
class SectionFlow:
    """What flows in a section, m3/s at the supply density; negative against the direction of design."""

    id: str
    flow: float
    return_flow: float | None
    mass_flow: float
    return_mass_flow: float | None


@dataclass(frozen=True, slots=True)
class TerminalFlow:
    """What a terminal gets."""

    id: str
    source: str
    flow: float
    mass_flow: float
    design_flow: float
    design_mass_flow: float
    share: float
    """Of design flow."""
    wanted: float
    """Share of design flow that it should have in this case."""
    within: bool
    """Whether what it gets is within the tolerance of what it should have."""


@dataclass(frozen=True, slots=True)
class Flows:
    """A run solved: IDs that hang on a source that can't be computed are missing."""

    sources: dict[str, SourceFlow]
    sections: dict[str, SectionFlow]
    terminals: dict[str, TerminalFlow]
    links: dict[str, SectionFlow]
    findings: tuple[Finding, ...]
    settled: bool
    installed: Installed
    solution: Solution


def solve_flows(
    run: Computed,
    case: Case | None = None,
    devices: Devices = "given",
    *,
    start: Array | None = None,
    watch: Callable[[int, float], None] | None = None,
) -> Flows:
    """Solve a run for the flows that its pumps or fans drive, in a case, with its balancing devices as said.

    `start` are flows of every edge to begin with, those of an earlier solution; none: those of design. `watch` is
    called after every step and may raise to stop.
    """
    with np.errstate(all="ignore"):  # what can't be computed is NaN on purpose, and its source is left out
        setup = set_up(run, case, devices)
        installed = install(run, setup)

    def switch(found: Solution, network: Network, alone: bool) -> Network | None:
        return _switched(installed, setup, found, network, alone)

    network = installed.network
    solution, network, settled = solve_switching(
        network, network.typical if start is None else start, switch, watch=watch
    )
    return _Records(run, case, setup, installed, network, solution, settled).all()


def _switched(installed: Installed, setup: Setup, found: Solution, network: Network, alone: bool) -> Network | None:
    """Return the network with its devices doing what they can at a solution; None where they already do.

    A differential-holding device can while what it has to drop is more than it drops fully open; a pump while its curve
    at full speed gives more than it needs.
    """
    controls, held = network.controls, network.held
    slack = _SLACK * max(float(np.abs(found.drop[network.open]).max(initial=0.0)), 1e-12)
    on = controls.on.copy()
    for place, edge in enumerate(controls.edge.tolist()):
        pump = installed.pumps.get(place)
        if pump is not None and setup.running[pump].curve is None:
            continue
        if controls.on[place]:
            own = found.pressure[network.start[edge]] - found.pressure[network.end[edge]]
            on[place] = own - found.drop[edge] >= -slack
        else:
            reached = float(found.pressure[controls.high[place]] - found.pressure[controls.low[place]])
            on[place] = reached > controls.set_point[place] + slack
    wrong = np.flatnonzero(on != controls.on)
    if alone and len(wrong):
        on = np.where(np.arange(len(on)) == wrong[0], on, controls.on)
    doing = None
    if held is not None and not (alone and len(wrong)):
        doing = held.fitting(found.flow, slack)
        off = np.flatnonzero(doing != held.doing)
        if alone and len(off):
            doing = np.where(np.arange(len(doing)) == off[0], doing, held.doing)
        held = dataclasses.replace(held, doing=doing) if len(off) else held
    if held is network.held and not len(wrong):
        return None
    return dataclasses.replace(network, controls=dataclasses.replace(controls, on=on), held=held)


class _Records:
    """Makes records of a solution."""

    def __init__(
        self,
        run: Computed,
        case: Case | None,
        setup: Setup,
        installed: Installed,
        network: Network,
        solution: Solution,
        settled: bool,
    ) -> None:
        self.run, self.case, self.setup, self.installed = run, case, setup, installed
        self.network, self.solution, self.settled = network, solution, settled
        self.layout = run.layout
        self.flow: Array = solution.flow

    def all(self) -> Flows:
        terminals = {one.id: one for one in self._terminals()}
        sources = {one.id: one for one in self._sources()}
        findings = (*self.setup.findings, *self._findings(sources, terminals))
        sections = {one.id: one for one in self._sections()}
        links = {one.id: one for one in self._links()}
        return Flows(sources, sections, terminals, links, findings, self.settled, self.installed, self.solution)

    def _known(self, source: int) -> bool:
        return not self.installed.unknown[source]

    def _sources(self) -> Iterator[SourceFlow]:
        for number, (id_, source) in enumerate(self.layout.description.sources.items()):
            if not self._known(number):
                continue
            running = self.setup.running[number]
            mass = float(self.flow[running.edge])
            volume = mass / self.layout.media[number].supply.density
            shut = bool(self.network.shut is not None and self.network.shut[running.edge])
            pressure = 0.0 if shut else self._gain(number, mass)
            speed = None if running.curve is None else running.speed
            if running.set_point is not None and running.curve is not None:
                speed = running.speed_at(mass, pressure)
            power = None
            if source.efficiency is not None:
                power = float(shaft_power(hydraulic_power(volume, pressure), source.efficiency))
            yield SourceFlow(id_, volume, mass, pressure, 0.0 if shut and speed is not None else speed, power)

    def _gain(self, number: int, mass: float) -> float:
        """Return what a source gives: its pressure difference and what its items cost."""
        running = self.setup.running[number]
        edge, edges = running.edge, self.installed.edges
        pressure = self.solution.pressure
        rise = float(pressure[edges.outlet[number]] - pressure[edges.inlet[number]])
        # The law of the source's edge is its items less what it gives by itself.
        items = float(self.solution.drop[edge]) + running.gain(mass)[0]
        return rise + items

    def _sections(self) -> Iterator[SectionFlow]:
        for id_ in self.layout.description.sections:
            legs = self.layout.topology.section_legs.get(id_)
            if not legs or not self._known(self.layout.topology.legs[legs[0]].source):
                continue
            density = self.layout.media[self.layout.topology.legs[legs[0]].source].supply.density
            flows = [float(self.flow[leg]) for leg in legs]
            back = flows[1] if len(flows) > 1 else None
            yield SectionFlow(id_, flows[0] / density, None if back is None else back / density, flows[0], back)

    def _links(self) -> Iterator[SectionFlow]:
        links, edges = self.layout.links, self.installed.edges
        for id_, numbers in links.of.items():
            source = links.found[numbers[0]].source
            if self._known(source):
                density = self.layout.media[source].supply.density
                flows = [float(self.flow[edges.links[number]]) for number in numbers]
                back = flows[1] if len(flows) > 1 else None
                yield SectionFlow(id_, flows[0] / density, None if back is None else back / density, flows[0], back)

    def _terminals(self) -> Iterator[TerminalFlow]:
        terminals, first = self.layout.terminals, len(self.layout.legs)
        tolerance = self.layout.description.limits.tolerance
        names = tuple(self.layout.description.sources)
        for number, id_ in enumerate(terminals.ids):
            source = int(terminals.source[number])
            if not self._known(source):
                continue
            design = float(self.run.drops.terminal_mass[number])
            density = self.layout.media[source].supply.density
            mass = float(self.flow[first + number])
            wanted = 0.0 if first + number in self.setup.shut else self.setup.shares.get(first + number, 1.0)
            share = mass / design
            within = abs(share - wanted) <= tolerance * wanted + 1e-6
            yield TerminalFlow(
                id_, names[source], mass / density, mass, design / density, design, share, wanted, within
            )

    def _findings(self, sources: dict[str, SourceFlow], terminals: dict[str, TerminalFlow]) -> Iterator[Finding]:
        description = self.layout.description
        if not self.settled:
            path = self._owner(self.solution.worst)
            text = "the flows did not settle, and the figures are not to be relied on; it is furthest off here"
            yield error("not-settled", text, path)
        for id_, source in sources.items():
            number = list(description.sources).index(id_)
            running = self.setup.running[number]
            path = (*description.sources[id_].path, "curve")
            if (
                running.edge not in self.setup.shut
                and running.set_point is None
                and running.off_curve(source.mass_flow)
            ):
                text = "flow {0} is outside the points of its curve; the figures are extrapolated"
                yield warning("off-curve", text, path, (source.flow, "flow"))
            yield from self._unreached(number)
        for id_, terminal in terminals.items():
            if not terminal.within:
                text = f"it gets {_percent(terminal.share)} of design flow, {{0}}"
                if terminal.wanted != 1.0:
                    text += f", and should have {_percent(terminal.wanted)}"
                yield warning(
                    "flow-tolerance", text, (*description.terminals[id_].path, "flow"), (terminal.flow, "flow")
                )
        yield from self._backward()

    def _unreached(self, number: int) -> Iterator[Finding]:
        """Find a source that does not reach its set point at full speed."""
        for place, source in self.installed.pumps.items():
            if source == number and not self.network.controls.on[place]:
                running = self.setup.running[number]
                path: Path = (*self.layout.sources[number].path, "set_point")
                text = "its set point, {0}, is not reached at full speed"
                yield warning("set-point-missed", text, path, (running.set_point or 0.0, "pressure"))

    def _backward(self) -> Iterator[Finding]:
        """Find the sections in which the flow runs against the direction of design."""
        topology = self.layout.topology
        for id_, section in self.layout.description.sections.items():
            for leg in topology.section_legs.get(id_, ()):
                design = float(self.run.drops.leg_mass[leg])
                along = float(self.flow[leg]) * (-1.0 if design < 0.0 else 1.0)  # in a ring it may be negative
                if along < -_BACKWARD * max(abs(design), 1e-12):
                    density = self.layout.media[topology.legs[leg].source].supply.density
                    text = "the flow runs backward, {0}"
                    yield warning("backward", text, section.path, (-along / density, "flow"))
                    break

    def _owner(self, edge: int) -> Path:
        """Return the path of what an edge belongs to."""
        layout, description = self.layout, self.layout.description
        edges = self.installed.edges
        first_source = len(layout.legs) + len(layout.terminals)
        if edge in edges.links:
            return description.links[layout.links.found[int(edge - edges.links[0])].owner].path
        if edge >= first_source + len(layout.media):
            edge = int(edges.behind[edge - first_source - len(layout.media)])
        if edge >= first_source:
            return self.layout.sources[edge - first_source].path
        if edge >= len(layout.legs):
            return description.terminals[layout.terminals.ids[edge - len(layout.legs)]].path
        leg = layout.topology.legs[edge]
        return (description.terminals if leg.run_out else description.sections)[leg.owner].path


def _percent(share: float) -> str:
    return f"{100.0 * share:.0f} %" if math.isfinite(share) else "-"
