"""How a run is set up for a solve: where its devices stand, what is shut, what is part open, how its sources run."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise
from typing import Literal

import numpy as np

from budget.description import Case, Device, Finding, Item, Section, SourceCase, Terminal, error, warning
from budget.network.arrays import DeviceUse
from budget.network.computed import Computed
from budget.network.flows.sources import Running, running
from budget.network.takeup import adjust
from budget.physics.arrays import Array
from budget.physics.fittings import valve_drop
from budget.physics.power import velocity_pressure

Devices = Literal["given", "open", "set", "rounded"]
"""Where balancing devices stand: as the file states, and where it does not, at the drop proposed; all fully open; all
at the drop proposed; or all at the setting proposed, rounded to what their scale shows. What holds a flow or a
differential does so however the others stand."""


@dataclass(frozen=True, slots=True, eq=False)
class Setup:
    """A run as it is set up."""

    shut: frozenset[int]
    """Carriers (legs, terminals, sources) that let nothing through."""
    shares: dict[int, float]
    """Share of its design flow that a device on a carrier holds."""
    openings: Array
    """Kv of each item over that fully open; 1 for what is no control item."""
    coefficients: Array
    """What each device drops over the square of the flow in kg/s; of a holding one while it is fully open."""
    running: tuple[Running, ...]
    findings: tuple[Finding, ...]


def set_up(run: Computed, case: Case | None = None, devices: Devices = "given") -> Setup:
    """Set a run up for a case. Findings where something that the case names has nothing there to act on."""
    layout = run.layout
    stated = Case("", ("case", "")) if case is None else case
    findings: list[Finding] = []
    carriers = _carriers(run)
    first_source = len(layout.legs) + len(layout.terminals)
    shut = {carriers[id_] for id_ in stated.off if id_ in carriers}
    shares = _shares(run, stated, carriers, shut, findings)
    openings = _openings(run, stated, carriers, shut, findings)
    coefficients = np.array([_coefficient(run, number, devices) for number in range(len(layout.devices))])
    sources = tuple(
        running(run, number, first_source + number, stated.sources.get(id_, SourceCase()))
        for number, id_ in enumerate(layout.description.sources)
    )
    findings += _strange_sensors(run)
    shut |= {source.edge for source in sources if source.units < 1}
    return Setup(frozenset(shut), shares, openings, coefficients, sources, tuple(findings))


def _strange_sensors(run: Computed) -> Iterator[Finding]:
    """Find sources whose sensor hangs on another source; they hold their set point at themselves."""
    topology = run.layout.topology
    sources = {id_: topology.legs[legs[0]].source for id_, legs in topology.section_legs.items()}
    sources |= topology.terminal_source
    for number, source in enumerate(run.layout.description.sources.values()):
        if source.sensor is not None and sources.get(source.sensor, number) != number:
            text = f"its sensor {source.sensor!r} hangs on another source; name one of its own"
            yield error("wrong-connection", text, (*source.path, "sensor"))


def _carriers(run: Computed) -> dict[str, int]:
    """Return the carrier in which the items and the device of each section, terminal and source stand."""
    layout = run.layout
    found = {id_: legs[0] for id_, legs in layout.topology.section_legs.items()}
    found |= {id_: len(layout.legs) + number for number, id_ in enumerate(layout.terminals.ids)}
    first = len(layout.legs) + len(layout.terminals)
    return found | {id_: first + number for number, id_ in enumerate(layout.description.sources)}


def _shares(
    run: Computed, case: Case, carriers: dict[str, int], shut: set[int], findings: list[Finding]
) -> dict[int, float]:
    holding = {use.carrier for use in run.layout.devices if use.device.holds == "flow"}
    shares = {}
    for id_, share in case.share.items():
        carrier = carriers.get(id_)
        if carrier is None:
            continue
        if share == 0.0:
            shut.add(carrier)
        elif carrier in holding:
            shares[carrier] = share
        else:
            text = f"nothing holds the flow of {id_!r}, so its share has no effect; remove it"
            findings.append(warning("case-idle", text, (*case.path, "share", id_)))
    return shares


def _openings(run: Computed, case: Case, carriers: dict[str, int], shut: set[int], findings: list[Finding]) -> Array:
    items = run.layout.items
    found = np.ones(len(items))
    for id_, stroke in case.stroke.items():
        controls = [
            number
            for number in np.flatnonzero(items.carrier == carriers.get(id_, -1)).tolist()
            if items.items[number].control is not None
        ]
        if not controls:
            text = f"{id_!r} has no control item, so its stroke has no effect; remove it"
            findings.append(warning("case-idle", text, (*case.path, "stroke", id_)))
        for number in controls:
            item = items.items[number]
            if item.control == "three-port":
                # What does not pass the terminal passes the bypass: the circuit keeps its flow.
                text = f"the three-port valve of {id_!r} keeps the flow of its circuit at any stroke; remove it"
                findings.append(warning("case-idle", text, (*case.path, "stroke", id_)))
            elif stroke == 0.0:
                shut.add(carriers[id_])
            else:
                found[number] = relative_opening(item, stroke)
    return found


def relative_opening(item: Item, stroke: float) -> float:
    """Return the Kv of a control item at a stroke over that fully open.

    Equal percentage R^(h - 1), also where no characteristic is stated (common practice); linear 1/R + (1 - 1/R) h; R is
    the rangeability. Source: IEC 60534-2-4 (from memory).
    """
    least = 1.0 / item.rangeability
    if item.characteristic == "linear":
        return least + (1.0 - least) * stroke
    return float(item.rangeability ** (stroke - 1.0))


def _coefficient(run: Computed, number: int, devices: Devices) -> float:
    layout, drops = run.layout, run.drops
    use = layout.devices[number]
    mass = float((drops.leg_mass, drops.terminal_mass)[use.terminal][use.number])
    if mass == 0.0:
        return 0.0
    base = float(drops.device_base[number])
    if use.device.holds or devices == "open":
        return base / mass**2
    owner = _owner(run, use)
    if devices == "given" and owner.setting is not None:
        return _at_opening(run, use, opening_at(use.device, owner.setting), mass)
    drop = base + float(run.take_up.taken[number])
    if devices == "rounded":
        setting = adjust(layout, drops, number, drop).setting
        if setting is not None:
            return _at_opening(run, use, opening_at(use.device, rounded(use.device, setting)), mass)
    return drop / mass**2


def _owner(run: Computed, use: DeviceUse) -> Section | Terminal:
    description = run.layout.description
    if use.terminal:
        return description.terminals[run.layout.terminals.ids[use.number]]
    return description.sections[run.layout.topology.legs[use.number].owner]


def _at_opening(run: Computed, use: DeviceUse, value: float, mass: float) -> float:
    """Return a device's coefficient at a Kv or, of a damper, at a loss coefficient."""
    if use.device.kv:
        return float(valve_drop(1.0 / use.density, value, use.density))
    if not math.isnan(use.neck):
        return value * float(velocity_pressure(use.density, 1.0 / (use.density * use.neck)))
    pv = float(run.drops.velocity_pressure[use.reference]) if use.reference >= 0 else math.nan
    return value * pv / mass**2


def step_of(device: Device) -> float:
    """Return the step of a device's scale: a fifth of the least difference of its table, or the 1, 2 or 5 below.

    A tenth of a turn where the table goes by half turns, 5 deg where it goes by 30 deg (common practice). 0 for a table
    of one setting.
    """
    settings = sorted(setting for setting, _ in device.kv or device.k)
    least = min((later - earlier for earlier, later in pairwise(settings)), default=0.0) / 5.0
    if not least > 0.0:
        return 0.0
    decade = 10.0 ** math.floor(math.log10(least * (1.0 + 1e-9)))
    return decade * max(mantissa for mantissa in (1.0, 2.0, 5.0) if mantissa * decade <= least * (1.0 + 1e-9))


def rounded(device: Device, setting: float) -> float:
    """Return the setting of a device's scale that is nearest to one, within its table."""
    step = step_of(device)
    settings = [point for point, _ in device.kv or device.k]
    nearest = round(setting / step) * step if step else setting
    return min(max(nearest, min(settings)), max(settings))


def opening_at(device: Device, setting: float) -> float:
    """Return a device's Kv or loss coefficient at a setting, interpolated on its logarithm; the ends are held."""
    points = sorted(device.kv or device.k)
    settings = [point for point, _ in points]
    return math.exp(float(np.interp(setting, settings, [math.log(found) for _, found in points])))
