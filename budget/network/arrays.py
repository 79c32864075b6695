"""A run laid out for computing: one element a leg, terminal, item or device. SI base units, NaN where unknown."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from budget.description import Description, Device, Finding, Item, Source
from budget.network.forest import Forest
from budget.network.media import Media
from budget.network.topology import Leg, Topology
from budget.physics.arrays import Array, Flags, Indices

Floats = Array
Ints = Indices
Bools = Flags


@dataclass(frozen=True, slots=True, eq=False)
class Loss:
    """So many fittings of one name on a leg: k = constant + per_reynolds / Re + corrected K_Re(Re) for one of them."""

    name: str
    count: int
    constant: float
    per_reynolds: float
    corrected: float
    method: str
    source: str
    known_from: str
    reference: str
    """Which velocity the coefficient refers to."""


@dataclass(frozen=True, slots=True, eq=False)
class Legs:
    """Every leg of the run. A parent's number is always below its child's."""

    parent: Ints
    source: Ints
    zone: Ints
    first: Bools
    outward: Bools
    run_out: Bools
    density: Floats
    viscosity: Floats
    area: Floats
    diameter: Floats
    laminar: Floats
    roughness: Floats
    length: Floats
    stretch: Floats
    constant: Floats
    per_reynolds: Floats
    corrected: Floats
    """Part of the loss coefficient that the Reynolds factor of mitres multiplies."""
    rise: Floats
    diversity: Floats
    losses: tuple[tuple[Loss, ...], ...]

    def __len__(self) -> int:
        """Return the number of legs."""
        return len(self.parent)


@dataclass(frozen=True, slots=True, eq=False)
class Junctions:
    """Every junction whose loss is counted: two legs that meet at the end of a third, by their numbers."""

    branch: Ints
    straight: Ints
    combined: Ints
    branch_counts: Bools
    """Whether the branch's loss is counted; it has stated so."""
    straight_counts: Bools
    family: Ints
    converging: Bools
    angle: Floats
    area_ratio: Floats
    """Branch to combined."""
    unknown: Ints
    """Legs that meet others and whose takeoff could not be read."""

    def __len__(self) -> int:
        """Return the number of junctions."""
        return len(self.combined)


@dataclass(frozen=True, slots=True, eq=False)
class AreaChanges:
    """The change of area at the end of each leg toward its source: coefficient on the smaller area, 0 for none."""

    k: Floats
    area: Floats
    """The smaller area, m2."""


@dataclass(frozen=True, slots=True, eq=False)
class Terminals:
    """Every terminal that hangs on a source."""

    ids: tuple[str, ...]
    source: Ints
    zone: Ints
    out: Ints
    """Last leg outward; AT_SOURCE where it hangs on the source itself or has none."""
    back: Ints
    mass: Floats
    lone: Bools
    """Without a flow of its own: it takes the source's (a gas terminal alone on its side)."""
    discharge: Bools
    density: Floats
    """Of the leg it stands in."""
    drop: Floats
    drop_at: Floats
    exponent: Floats
    static_drop: Floats
    neck: Floats
    """Neck area, m2; NaN where it has none."""
    rise: Floats
    outlet: Floats
    broken: Bools

    def __len__(self) -> int:
        """Return the number of terminals."""
        return len(self.ids)


@dataclass(frozen=True, slots=True, eq=False)
class Items:
    """Every item in line. The carrier is the leg, terminal or source whose flow goes through it, in one numbering:
    legs first, then terminals, then sources."""

    carrier: Ints
    form: Ints
    """0 loss coefficient, 1 Kv, 2 drop, 3 equivalent length."""
    value: Floats
    at: Floats
    """Flow of a stated drop, m3/s at the density of the leg; NaN: the drop is that at design flow."""
    exponent: Floats
    parallel: Floats
    density: Floats
    reference: Ints
    """Leg to whose velocity a coefficient or equivalent length refers; -1 for none."""
    neck: Floats
    heading: Ints
    inside: Bools
    items: tuple[Item, ...]

    def __len__(self) -> int:
        """Return the number of items."""
        return len(self.items)


@dataclass(frozen=True, slots=True, eq=False)
class DeviceUse:
    """A balancing device in its place."""

    device: Device
    carrier: int
    terminal: bool
    number: int
    """Number of the leg or terminal that it stands on."""
    density: float
    reference: int
    neck: float
    least_drop: float
    greatest_drop: float
    least_signal: float
    open_kv: float
    open_k: float
    zone: int
    """Zone behind it where it holds a differential, else -1."""


@dataclass(frozen=True, slots=True, eq=False)
class Zone:
    """A part of the run with a differential of its own: a source, one side of a fan, or what a device holds."""

    source: int
    outer: int
    """Zone outside it; -1 where it is a source's own."""
    device: int
    """Number of the holding device use, or -1."""
    leg: int
    """Leg at whose end the device stands, or -1."""
    back: int
    set_point: float
    """As stated, Pa; NaN: the largest circuit behind."""


@dataclass(frozen=True, slots=True, eq=False)
class Links:
    """What closes rings: legs beside those of the trees, with items of their own."""

    of: dict[str, tuple[int, ...]]
    """By the ID of a link the numbers of its legs."""
    found: tuple[Leg, ...]
    legs: Legs
    first: Ints
    """Leg of the trees at whose far end each begins."""
    second: Ints
    items: Items
    """Carrier and reference are numbers of these legs."""
    ringed: Bools
    """Legs of the trees that are in a ring."""

    def __len__(self) -> int:
        """Return the number of their legs."""
        return len(self.first)


@dataclass(frozen=True, eq=False)
class Layout:
    """Everything that computing needs, as arrays."""

    description: Description
    topology: Topology
    media: tuple[Media, ...]
    legs: Legs
    junctions: Junctions
    area_changes: AreaChanges
    terminals: Terminals
    items: Items
    links: Links
    devices: tuple[DeviceUse, ...]
    zones: tuple[Zone, ...]
    order: Ints
    """Terminal numbers such that those served by a leg stand together."""
    start: Ints
    end: Ints
    """Each leg serves order[start:end]."""
    findings: tuple[Finding, ...]

    @cached_property
    def sources(self) -> tuple[Source, ...]:
        """The sources by their numbers."""
        return tuple(self.description.sources.values())

    @cached_property
    def zone_tree(self) -> Forest:
        """How the zones lie within each other."""
        return Forest.of([zone.outer for zone in self.zones])

    def served(self, leg: int) -> Ints:
        """Return the numbers of the terminals whose path uses a leg."""
        return self.order[self.start[leg] : self.end[leg]]
