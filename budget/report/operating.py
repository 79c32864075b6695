"""The operating point of a pump or fan: its own curve, the curve of the system, and both drawn in characters."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

from budget.description import Case, Description, SourceCase
from budget.network import Computed
from budget.network.flows import Devices, Flows, solve_flows

SPEEDS = (0.25, 0.5, 0.75, 1.1, 1.25)
"""Shares of its speed at which a source is run to trace the curve of the system, besides its own."""

STEPS = 48
"""Pieces in which a pump's curve is drawn."""

MARKS = "*.o|-+"
"""Pump, system, operating point, side, level, corner of a drawing."""

Curve = tuple[tuple[float, float], ...]
"""Points of flow (m3/s at the supply density) and pressure (Pa), by rising flow."""


@dataclass(frozen=True, slots=True)
class Operating:
    """What meets at the operating point of a source."""

    source: str
    flow: float
    pressure: float
    pump: Curve
    """What it gives at its speed; of a source that controls a differential, at the speed that it runs at."""
    system: Curve
    """What the system takes, its controls at work at every flow; it passes through the operating point."""


def operating(
    run: Computed,
    flows: Flows,
    source: str,
    case: Case | None = None,
    devices: Devices = "given",
    watch: Callable[[int, float], None] | None = None,
) -> Operating | None:
    """Return the operating point of a source with the curves that meet there; None where it can't be computed.

    The system's curve is traced by running the source at other speeds, each solved as the network is: `watch` as for
    `solve_flows`. Solutions that did not settle are left out.
    """
    found = flows.sources.get(source)
    if found is None or not (math.isfinite(found.flow) and math.isfinite(found.pressure)):
        return None
    free = _uncontrolled(run, source)
    speed = 1.0 if found.speed is None else found.speed
    points = [(found.flow, found.pressure)]
    start = flows.solution.flow
    for share in SPEEDS:
        at = solve_flows(free, _at_speed(case, source, speed * share), devices, start=start * share, watch=watch)
        one = at.sources.get(source)
        if one is not None and at.settled and one.flow >= 0.0:
            points.append((one.flow, one.pressure))
    system = tuple(sorted(points))
    most = max(flow for flow, _ in system) * 1.05
    return Operating(source, found.flow, found.pressure, _pump(run, flows, source, speed, most), system)


def _uncontrolled(run: Computed, source: str) -> Computed:
    """Return a run whose source runs at a speed and controls nothing."""
    description: Description = run.layout.description
    one = dataclasses.replace(description.sources[source], controls="fixed", set_point=None)
    changed = dataclasses.replace(description, sources={**description.sources, source: one})
    return dataclasses.replace(run, layout=dataclasses.replace(run.layout, description=changed))


def _at_speed(case: Case | None, source: str, speed: float) -> Case:
    stated = Case("", ("case", "")) if case is None else case
    one = dataclasses.replace(stated.sources.get(source, SourceCase()), speed=speed, set_point=None)
    return dataclasses.replace(stated, sources={**stated.sources, source: one})


def _pump(run: Computed, flows: Flows, source: str, speed: float, most: float) -> Curve:
    """Return what a source gives at a speed, from no flow to `most`, m3/s."""
    number = list(run.layout.description.sources).index(source)
    running, density = flows.installed.sources[number], run.layout.media[number].supply.density
    if running.curve is not None:
        running = dataclasses.replace(running, speed=speed)
    along = [most * step / STEPS for step in range(STEPS + 1)]
    curve = [(flow, running.gain(flow * density)[0]) for flow in along] if most > 0.0 else []
    return tuple(point for point in curve if point[1] >= 0.0)


def draw_operating(
    found: Operating, width: int, height: int, labels: tuple[str, str, str, str], marks: str = MARKS
) -> list[str]:
    """Return pressure over flow as `height` lines of at most `width` columns; [] where there is no room.

    `marks` are the characters of the pump's curve, the system's, the operating point, and of the frame: side, level,
    corner. `labels` stand at the greatest and at no pressure, at no flow and at the greatest flow.
    """
    pump, system, point, side, level, corner = tuple(marks)
    most, highest = limits(found)
    room = max(len(labels[0]), len(labels[1]))
    columns, rows = width - room - 1, height - 2
    if columns < 8 or rows < 3 or not (most > 0.0 and highest > 0.0):
        return []
    grid = [[" "] * columns for _ in range(rows)]

    def place(flow: float, pressure: float) -> tuple[int, int]:
        column, row = round(flow / most * (columns - 1)), round((1.0 - pressure / highest) * (rows - 1))
        return min(max(column, 0), columns - 1), min(max(row, 0), rows - 1)

    for curve, mark in ((found.system, system), (found.pump, pump)):
        for column, row in _cells(curve, place):
            grid[row][column] = mark
    column, row = place(found.flow, found.pressure)
    grid[row][column] = point
    lines = []
    for number, cells in enumerate(grid):
        label = labels[0] if number == 0 else labels[1] if number == rows - 1 else ""
        lines.append(f"{label:>{room}}{side}{''.join(cells)}".rstrip())
    lines.append(f"{'':>{room}}{corner}{level * columns}")
    gap = max(columns - len(labels[2]) - len(labels[3]), 1)
    lines.append((" " * (room + 1) + labels[2] + " " * gap + labels[3])[:width])
    return lines


def limits(found: Operating) -> tuple[float, float]:
    """Return the greatest flow, m3/s, and pressure, Pa, of a drawing."""
    points = [*found.pump, *found.system]
    return max(flow for flow, _ in points), max(pressure for _, pressure in points)


def _cells(
    curve: Sequence[tuple[float, float]], place: Callable[[float, float], tuple[int, int]]
) -> list[tuple[int, int]]:
    """Return the cells of a curve of straight pieces, without gaps."""
    cells = [place(*curve[0])] if curve else []
    for before, after in pairwise(curve):
        (x0, y0), (x1, y1) = place(*before), place(*after)
        steps = max(abs(x1 - x0), abs(y1 - y0), 1)
        cells += [(round(x0 + (x1 - x0) * n / steps), round(y0 + (y1 - y0) * n / steps)) for n in range(1, steps + 1)]
    return cells
