"""What is computed for a run, one record a source, section and terminal, named as the results are named.

SI base units throughout: m3/s, kg/s, Pa, m/s, m, W, K; fractions 0 to 1. A figure that can't be computed is None
where the text says so, else NaN (written as null): a finding says why.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

Side = Literal["supply", "return", "discharge", "suction"]


@dataclass(frozen=True, slots=True)
class LossResult:
    """One loss of a leg: so many fittings of a name, its part of a junction, or a change of area."""

    name: str
    count: int
    k: float
    """Loss coefficient of one, at this leg's Reynolds number."""
    drop: float
    """Loss of all of them, Pa; negative for a gain."""
    method: str
    source: str
    known_from: str
    reference: str
    """Which velocity the coefficient refers to."""
    reference_velocity: float


@dataclass(frozen=True, slots=True)
class LegResult:
    """A section's supply, return, discharge or suction leg."""

    leg: Side
    mass_flow: float
    velocity: float
    velocity_pressure: float
    reynolds: float
    regime: str
    friction_factor: float
    gradient: float
    friction: float
    junction: float
    losses: tuple[LossResult, ...] = ()
    """Its fittings."""
    joints: tuple[LossResult, ...] = ()
    """Its part of the junction that it hangs on, and the change of area there."""


@dataclass(frozen=True, slots=True)
class ItemResult:
    """The drop of one item at design flow."""

    name: str
    drop: float
    heading: str
    inside: bool
    control: str | None


@dataclass(frozen=True, slots=True)
class DeviceResult:
    """A balancing device: what it drops fully open, what it takes up, and where it is set."""

    name: str
    base: float
    take_up: float
    drop: float
    kv: float | None
    k: float | None
    setting: float | None
    signal: float | None
    holds: str | None
    set_point: float | None = None
    origin: str = ""
    """The library that it stands in; "" for the run itself."""


@dataclass(frozen=True, slots=True, eq=False)
class RunResult:
    """Pipe or duct of a section or a run-out."""

    flow: float
    mass_flow: float
    bore: float | None
    width: float | None
    height: float | None
    hydraulic_diameter: float
    area: float
    k_total: float
    friction: float
    fittings: float
    junction: float
    transition: float
    items: float
    static: float
    drop: float
    leakage: float | None
    """Greatest leakage by its class at mean static pressure, m3/s; None where it states no class."""
    legs: tuple[LegResult, ...]


@dataclass(frozen=True, slots=True, eq=False)
class SectionResult:
    """One section of the run."""

    id: str
    source: str
    run: RunResult
    cumulative: float
    differential: float | None
    margin: float
    index: bool
    serves: tuple[str, ...]
    authority: float | None
    authority_low: float | None
    device: DeviceResult | None
    items: tuple[ItemResult, ...]


@dataclass(frozen=True, slots=True)
class LinkResult:
    """What closes a ring; a negative flow runs from its `to` to its `from`."""

    id: str
    source: str
    run: RunResult
    items: tuple[ItemResult, ...]


@dataclass(frozen=True, slots=True, eq=False)
class TerminalResult:
    """One terminal, with its run-out."""

    id: str
    source: str
    flow: float
    mass_flow: float
    circuit: float
    drop: float
    items_drop: float
    static: float
    run_out: RunResult | None
    differential: float | None
    margin: float
    excess: float
    index: bool
    path: tuple[str, ...]
    authority: float | None
    authority_low: float | None
    device: DeviceResult | None
    items: tuple[ItemResult, ...]


@dataclass(frozen=True, slots=True)
class FluidResult:
    """Properties of the fluid on its supply and return leg (of a gas: discharge and suction side)."""

    name: str
    density: float
    viscosity: float
    specific_heat: float
    return_density: float
    return_viscosity: float


@dataclass(frozen=True, slots=True, eq=False)
class SourceResult:
    """What the pump or fan must deliver."""

    id: str
    kind: Literal["closed", "open", "air"]
    fluid: FluidResult
    flow: float
    mass_flow: float
    required: float
    static: float
    reserve: float
    duty: float
    duty_flow: float
    available: float | None
    in_hand: float | None
    index: tuple[str, ...]
    """Terminal IDs named: one, or one a side for air."""
    discharge_required: float | None
    suction_required: float | None
    items_drop: float
    static_pressure: float | None
    external_total: float | None
    external_static: float | None
    hydraulic_power: float | None
    shaft_power: float | None
    electrical_power: float | None
    sfp: float | None
    leakage: float | None
    """Of all ducts that state a class, m3/s."""
    spent: Mapping[str, float]
    budget: Mapping[str, float]
    items: tuple[ItemResult, ...]
