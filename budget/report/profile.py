"""The pressure profile: what is left of the pressure along a circuit, as points and as a drawing in characters."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

from budget.network import Budget, Computed
from budget.network.duty import path_legs


@dataclass(frozen=True, slots=True)
class Point:
    """A place along a circuit, in the direction of flow."""

    distance: float
    """m of pipe or duct from the start."""
    total: float
    """Pa: of a liquid above the source's inlet, of a gas total pressure above the room's."""
    static: float | None
    """Of a gas, total less velocity pressure; None for a liquid."""
    id: str
    """The source, section or terminal that ends here, or that what stands here belongs to."""
    what: str
    """What the pressure was spent on since the point before: "supply", "junction", an item's or device's name."""


@dataclass(frozen=True, slots=True)
class Profile:
    """The points of one circuit, in the direction of flow; two at one distance are a step."""

    source: str
    terminal: str
    points: tuple[Point, ...]

    @property
    def length(self) -> float:
        """Length of the circuit, m."""
        return self.points[-1].distance - self.points[0].distance if self.points else 0.0


def terminal_profile(budget: Budget, terminal: str) -> Profile:
    """Return the profile of a terminal's circuit with its devices set. Raises KeyError for an ID that is none.

    A liquid starts at the source's outlet with the required pressure and comes back to the source's inlet with the
    terminal's excess, 0 on the index circuit; heights that are gained are spent like losses. A gas on the discharge
    side starts at the fan's outlet and ends with the excess in the room; on the suction side it starts in the room with
    0 and ends at the fan's inlet.
    """
    result = budget.terminals[terminal]
    run = budget.run
    number = run.layout.terminals.ids.index(terminal)
    source = list(run.layout.description.sources).index(result.source)
    air = run.layout.topology.kinds[source] == "air"
    walk = _Walk(run, air=air)
    path = path_legs(run, number)
    outward = [leg for leg in path if run.layout.legs.outward[leg]]
    back = [leg for leg in path if not run.layout.legs.outward[leg]]
    if air:
        discharge = bool(run.layout.terminals.discharge[number])
        start = float(run.circuits.required[_outermost(run, number)]) if discharge else 0.0
    else:
        start = budget.sources[result.source].required
    first = outward[0] if air and outward else None
    walk.start(start, result.source if outward or not back else terminal, first)
    if not air:
        walk.items(len(run.layout.legs) + len(run.layout.terminals) + source, result.source)
    for leg in outward:
        walk.leg(leg)
    walk.terminal(number, back[0] if air and back else None)
    for leg in back:
        walk.leg(leg)
    return Profile(result.source, terminal, tuple(walk.points))


def index_profile(budget: Budget, source: str) -> tuple[Profile, ...]:
    """Return the profiles of a source's index circuit: one, or one a side of a fan, suction first.

    Raises KeyError for an ID that is no source. Empty where no circuit can be computed.
    """
    index = budget.sources[source].index
    description = budget.run.layout.description
    profiles = [terminal_profile(budget, terminal) for terminal in index]
    return tuple(sorted(profiles, key=lambda one: description.terminals[one.terminal].from_ is not None))


def _outermost(run: Computed, terminal: int) -> int:
    zone = int(run.layout.terminals.zone[terminal])
    while run.layout.zones[zone].outer >= 0:
        zone = run.layout.zones[zone].outer
    return zone


class _Walk:
    """Goes along a circuit and spends pressure."""

    def __init__(self, run: Computed, *, air: bool) -> None:
        self.run, self.air = run, air
        self.points: list[Point] = []
        self._distance = self._total = 0.0
        self._velocity_pressure = 0.0
        self._devices = {use.carrier: number for number, use in enumerate(run.layout.devices)}

    def start(self, total: float, id_: str, leg: int | None) -> None:
        """Begin with a pressure, in a leg of a gas or in the room."""
        self._total = total
        self._velocity_pressure = 0.0 if leg is None else float(self.run.drops.velocity_pressure[leg])
        self._mark(id_, "start")

    def leg(self, leg: int) -> None:
        """Go along a leg: what stands at its beginning, its length, what stands at its end."""
        run, drops = self.run, self.run.drops
        found = run.layout.topology.legs[leg]
        outward = bool(run.layout.legs.outward[leg])
        joint = float(drops.junction[leg] + drops.transition[leg])
        self._velocity_pressure = float(drops.velocity_pressure[leg])
        if outward:
            self._step(joint, found.owner, "junction")
        self._distance += _known(float(run.layout.legs.length[leg]))
        along = float(drops.friction[leg] + drops.fittings[leg] + drops.leg_static[leg])
        self._total -= along
        self._mark(found.owner, "run-out" if found.run_out else found.side)
        self.items(leg, found.owner)
        self._device(leg, found.owner)
        if not outward:
            self._step(joint, found.owner, "junction")

    def terminal(self, number: int, into: int | None) -> None:
        """Pass a terminal: its device and items, then itself; `into` is the leg of a gas behind it."""
        run, drops = self.run, self.run.drops
        id_ = run.layout.terminals.ids[number]
        carrier = len(run.layout.legs) + number
        self._device(carrier, id_)
        self.items(carrier, id_)
        self._total -= float(drops.terminal_drop[number] + drops.terminal_static[number])
        self._velocity_pressure = 0.0 if into is None else float(drops.velocity_pressure[into])
        self._mark(id_, "terminal")

    def items(self, carrier: int, id_: str) -> None:
        """Pass what stands in line on a leg, terminal or source."""
        for item in self.run.item_results(carrier):
            self._step(item.drop, id_, item.name)

    def _device(self, carrier: int, id_: str) -> None:
        number = self._devices.get(carrier)
        if number is not None:
            drop = float(self.run.drops.device_base[number] + self.run.take_up.taken[number])
            self._step(drop, id_, self.run.layout.devices[number].device.name)

    def _step(self, drop: float, id_: str, what: str) -> None:
        if drop != 0.0:
            self._total -= drop
            self._mark(id_, what)

    def _mark(self, id_: str, what: str) -> None:
        static = self._total - self._velocity_pressure if self.air else None
        self.points.append(Point(self._distance, self._total, static, id_, what))


def _known(length: float) -> float:
    return length if math.isfinite(length) else 0.0


@dataclass(frozen=True, slots=True)
class Marks:
    """The characters of a drawing."""

    total: str = "*"
    static: str = "."
    other: str = "o"
    level: str = "-"
    side: str = "|"
    corner: str = "+"


ASCII = Marks()
BLOCKS = Marks("█", "░", "▒", "─", "│", "┼")


def draw(
    profiles: Sequence[Profile],
    width: int,
    height: int,
    labels: tuple[str, str, str, str],
    marks: Marks = ASCII,
) -> list[str]:
    """Return pressure over distance as `height` lines of at most `width` columns; [] where there is no room or curve.

    The first profile is drawn with the mark of totals, its static pressures below with their own, all further profiles
    with the mark of others. `labels` are the texts at the highest and the lowest pressure, at the start and the end of
    the axis of distance, as whoever draws spells figures; `bounds` returns what they stand for.
    """
    low, high, length = bounds(profiles)
    room = max(len(labels[0]), len(labels[1]))
    columns, rows = width - room - 1, height - 2
    if columns < 8 or rows < 3 or not high > low:
        return []
    grid = [[" "] * columns for _ in range(rows)]

    def row_of(value: float) -> int:
        return round((high - value) / (high - low) * (rows - 1))

    if low <= 0.0 <= high:
        grid[row_of(0.0)] = [marks.level] * columns
    for profile in profiles[1:]:
        _plot(grid, [(p.distance, p.total) for p in profile.points], length, row_of, marks.other)
    for profile in profiles[:1]:
        static = [(p.distance, p.static) for p in profile.points if p.static is not None]
        _plot(grid, static, length, row_of, marks.static)
        _plot(grid, [(p.distance, p.total) for p in profile.points], length, row_of, marks.total)
    lines = []
    for place, cells in enumerate(grid):
        label = labels[0] if place == 0 else labels[1] if place == rows - 1 else ""
        lines.append(f"{label:>{room}}{marks.side}{''.join(cells)}".rstrip())
    lines.append(f"{'':>{room}}{marks.corner}{marks.level * columns}")
    gap = max(columns - len(labels[2]) - len(labels[3]), 1)
    lines.append((" " * (room + 1) + labels[2] + " " * gap + labels[3])[:width].rstrip())
    return lines


def bounds(profiles: Sequence[Profile]) -> tuple[float, float, float]:
    """Return the lowest and the highest pressure, Pa, and the greatest length, m, of a drawing; 0 is always in it."""
    values = [0.0]
    for place, profile in enumerate(profiles):
        values += [point.total for point in profile.points]
        values += [point.static for point in profile.points if point.static is not None and place == 0]
    known = [value for value in values if math.isfinite(value)]
    low, high = min(known), max(known)
    rounding = 1e-9 * (high - low)
    low, high = (0.0 if abs(value) < rounding else value for value in (low, high))
    return low, high, max((profile.length for profile in profiles), default=0.0)


def _plot(
    grid: list[list[str]],
    curve: Sequence[tuple[float, float]],
    length: float,
    row_of: Callable[[float], int],
    mark: str,
) -> None:
    """Draw a curve of straight pieces, each column filled from the highest to the lowest value that it has there."""
    columns = len(grid[0])
    for (x0, y0), (x1, y1) in pairwise(curve):
        if not all(map(math.isfinite, (y0, y1))):
            continue
        first, last = (min(int(x / length * columns), columns - 1) if length > 0.0 else 0 for x in (x0, x1))
        for column in range(first, last + 1):
            ends = []
            for edge in (column, column + 1):
                x = min(max(edge * length / columns, x0), x1)
                ends.append(y0 + (y1 - y0) * (x - x0) / (x1 - x0) if x1 > x0 else (y0, y1)[edge > column])
            for row in range(row_of(max(ends)), row_of(min(ends)) + 1):
                grid[row][column] = mark
