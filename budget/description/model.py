"""The run as it was described: typed, in SI base units, frozen, in file order.

Lengths in m, flows in m3/s or kg/s, pressures in Pa (or metres of the fluid itself, where the quantity's basis
says so), temperatures in K, differences in K, fractions 0 to 1, angles in degrees. A value that could not be read
is None, and a finding says why; what can be computed without it still is.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from budget.description.finding import Finding, Path
from budget.units import Quantity

Units = Literal["SI", "IP"]


@dataclass(frozen=True, slots=True)
class Design:
    """The title block."""

    title: str = ""
    number: str = ""
    revision: str = ""
    note: str = ""
    units: Units = "SI"


@dataclass(frozen=True, slots=True)
class Fluid:
    """What flows, on the supply and the return leg."""

    name: str | None = None
    temperature: float | None = None
    return_temperature: float | None = None
    concentration: float | None = None
    concentration_by: str | None = None
    altitude: float = 0.0
    humidity: float = 0.5
    density: float | None = None
    viscosity: Quantity | None = None
    specific_heat: float | None = None

    @property
    def gas(self) -> bool:
        """Whether it is a gas: air, or a custom fluid lighter than 50 kg/m3."""
        return self.name == "air" or (self.name == "custom" and self.density is not None and self.density < 50.0)


@dataclass(frozen=True, slots=True)
class Geometry:
    """The clear cross-section of a pipe or duct."""

    shape: Literal["round", "rectangular", "oval"]
    width: float
    height: float
    nominal: float
    label: str

    @property
    def bore(self) -> float | None:
        """Inside diameter of a round one, m."""
        return self.width if self.shape == "round" else None


@dataclass(frozen=True, slots=True)
class Line:
    """A pipe or duct line under its local name: roughness, and for a pipe the bores by size."""

    name: str
    kind: Literal["pipe", "duct"]
    roughness: float | None
    catalogue: str | None = None
    own_sizes: Mapping[str, float] = field(default_factory=dict)
    flexible: bool = False
    compression: float = 0.0
    source: str = ""
    origin: str = ""
    """The library that it stands in, as the run writes its path; "" for the run itself."""


@dataclass(frozen=True, slots=True)
class OwnFitting:
    """A fitting of the design's own: a loss coefficient and where it was found."""

    name: str
    k: float
    source: str = ""
    known_from: str = ""
    origin: str = ""
    """The library that it stands in, as the run writes its path; "" for the run itself."""


@dataclass(frozen=True, slots=True)
class FittingCount:
    """So many fittings of one name."""

    name: str
    count: int
    path: Path


@dataclass(frozen=True, slots=True)
class FittingUse:
    """So many fittings of one kind, with the parameters of that kind in the units that it states."""

    kind: str
    count: int
    values: Mapping[str, float | str]
    path: Path


@dataclass(frozen=True, slots=True)
class Item:
    """Anything in line that is not a fitting: plant, strainers, coils, filters, control valves."""

    path: Path
    name: str
    k: float | None = None
    kv: float | None = None
    drop: Quantity | None = None
    at: Quantity | None = None
    exponent: float = 2.0
    equivalent_length: float | None = None
    parallel: int = 1
    tested_density: float | None = None
    clean: Quantity | None = None
    final: Quantity | None = None
    state: str = "mean"
    heading: str | None = None
    inside: bool = False
    control: str | None = None
    characteristic: str | None = None
    rangeability: float = 50.0


@dataclass(frozen=True, slots=True)
class Device:
    """A balancing device with its setting table."""

    name: str
    kv: tuple[tuple[float, float], ...] = ()
    k: tuple[tuple[float, float], ...] = ()
    signal_kv: float | None = None
    least_signal: Quantity | None = None
    least_drop: Quantity | None = None
    greatest_drop: Quantity | None = None
    holds: Literal["flow", "differential"] | None = None
    set_point: Quantity | None = None
    source: str = ""
    origin: str = ""
    """The library that it stands in, as the run writes its path; "" for the run itself."""


@dataclass(frozen=True, slots=True)
class Run:
    """The pipe or duct of a section or run-out: what it is made of, and what stands along it."""

    line: Line | None = None
    geometry: Geometry | None = None
    length: float | None = None
    paired: bool = False
    paired_stated: bool = False
    compression: float = 0.0
    fittings: tuple[FittingCount, ...] = ()
    uses: tuple[FittingUse, ...] = ()
    fitting_method: str = "by size"
    junction: str = "tee-crane"
    angle: float = 90.0
    own_junction: frozenset[str] = frozenset()
    """Which of junction and angle are stated here, not by the defaults."""
    transition: float | Literal["abrupt"] | None = None
    leakage: str | None = None
    limit_velocity: float | None = None
    limit_gradient: float | None = None
    class_: str | None = None
    diversity: float | None = None


@dataclass(frozen=True, slots=True)
class Section:
    """A length of pipe or duct between two joints of the run."""

    id: str
    path: Path
    title: str = ""
    note: str = ""
    location: str = ""
    from_: str | None = None
    to: str | None = None
    run: Run = field(default_factory=Run)
    items: tuple[Item, ...] = ()
    balance: str | None = None
    setting: float | None = None
    rise: float = 0.0
    takeoff: str | None = None
    takeoff_stated: bool = False
    accept: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Link:
    """What joins the downstream ends of two discharge sections, or the upstream ends of two return sections."""

    id: str
    path: Path
    title: str = ""
    note: str = ""
    location: str = ""
    from_: str | None = None
    to: str | None = None
    run: Run = field(default_factory=Run)
    items: tuple[Item, ...] = ()
    accept: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Terminal:
    """What the run is there for: an emitter, coil, outlet or grille, with its run-out if it has one."""

    id: str
    path: Path
    title: str = ""
    note: str = ""
    location: str = ""
    from_: str | None = None
    to: str | None = None
    flow: Quantity | None = None
    load: float | None = None
    return_temperature: float | None = None
    drop: Quantity | None = None
    at: Quantity | None = None
    exponent: float = 2.0
    static_drop: Quantity | None = None
    neck: Geometry | None = None
    run: Run | None = None
    items: tuple[Item, ...] = ()
    balance: str | None = None
    setting: float | None = None
    rise: float = 0.0
    outlet_pressure: Quantity | None = None
    takeoff: str | None = None
    takeoff_stated: bool = False
    accept: Mapping[str, str] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Source:
    """A pump or a fan, or any boundary with a given differential."""

    id: str
    path: Path
    title: str = ""
    note: str = ""
    location: str = ""
    open: bool = False
    available: Quantity | None = None
    reserve: float = 0.0
    flow_reserve: float = 0.0
    efficiency: float | None = None
    motor_efficiency: float | None = None
    curve: tuple[tuple[Quantity, Quantity], ...] = ()
    curve_density: float | None = None
    curve_is: str = "total"
    running: int = 1
    controls: str = "fixed"
    set_point: Quantity | None = None
    sensor: str | None = None
    temperature: float | None = None
    return_temperature: float | None = None
    outlet: Geometry | None = None
    items: tuple[Item, ...] = ()


@dataclass(frozen=True, slots=True)
class Limits:
    """What a section may reach before a finding is made of it."""

    velocity: float | None = None
    gradient: float | None = None
    least_velocity: float | None = None
    velocity_by_bore: tuple[tuple[float, float], ...] = ()
    classes: Mapping[str, Mapping[str, float]] = field(default_factory=dict)
    authority: float = 0.3
    authority_note: float = 0.5
    tolerance: float = 0.1


@dataclass(frozen=True, slots=True)
class SourceCase:
    """How a source runs in a case; None for what stays as it is."""

    speed: float | None = None
    running: int | None = None
    set_point: Quantity | None = None


@dataclass(frozen=True, slots=True)
class Case:
    """A what-if for the flows as installed: what is off, what holds less, what is part open, how sources run."""

    id: str
    path: Path
    title: str = ""
    note: str = ""
    off: tuple[str, ...] = ()
    share: Mapping[str, float] = field(default_factory=dict)
    """Of design flow, by ID, where something holds the flow."""
    stroke: Mapping[str, float] = field(default_factory=dict)
    """Of the control item, by ID: 0 shut, 1 fully open."""
    sources: Mapping[str, SourceCase] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Description:
    """A whole run as described, with everything that was found wrong while reading it."""

    design: Design = field(default_factory=Design)
    display: Mapping[str, str] = field(default_factory=dict)
    fluid: Fluid = field(default_factory=Fluid)
    limits: Limits = field(default_factory=Limits)
    budget: Mapping[str, Quantity] = field(default_factory=dict)
    lines: Mapping[tuple[str, str], Line] = field(default_factory=dict)
    fittings: Mapping[str, OwnFitting] = field(default_factory=dict)
    devices: Mapping[str, Device] = field(default_factory=dict)
    sources: Mapping[str, Source] = field(default_factory=dict)
    sections: Mapping[str, Section] = field(default_factory=dict)
    terminals: Mapping[str, Terminal] = field(default_factory=dict)
    links: Mapping[str, Link] = field(default_factory=dict)
    cases: Mapping[str, Case] = field(default_factory=dict)
    order: tuple[str, ...] = ()
    findings: tuple[Finding, ...] = ()

    def rank(self) -> dict[str, int]:
        """Return the place of every source, section and terminal in the file, by ID."""
        return {id_: place for place, id_ in enumerate(self.order)}
