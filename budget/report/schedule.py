"""The commissioning schedule: what is set where, in which order, to which signal, and room for what is measured."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterator
from dataclasses import dataclass

from budget.description import Description, Finding, Section, Source, Terminal
from budget.description.readings import Measured, Readings
from budget.network import Budget, DeviceResult
from budget.network.commissioning import Judged, Kind, Next, Step, judge, next_step, order_of_work
from budget.network.media import pascals
from budget.report.figures import Figures, plain_number

SMALL = 1.0
"""Pa below which what remains at a terminal is not worth a remark."""


@dataclass(frozen=True, slots=True)
class Row:
    """One stop of the order of work; SI, None where there is nothing to set or to say."""

    order: int
    id: str
    kind: Kind
    source: str
    branch: str
    location: str
    title: str
    design_flow: float
    mass_flow: float
    density: float
    """Of the source's supply, in which heads are spelled."""
    device: str
    size: str
    setting: float | None
    drop: float | None
    signal: float | None
    tolerance: float
    remarks: tuple[str, ...]
    reading: Measured | None = None
    judged: Judged | None = None

    @property
    def measured_signal(self) -> float | None:
        """The signal as it was read, Pa."""
        signal = self.reading.signal if self.reading is not None else None
        return None if signal is None else pascals(signal, self.density)


@dataclass(frozen=True, slots=True)
class Schedule:
    """The rows in the order of work, and what to do next where something was measured."""

    rows: tuple[Row, ...]
    next: Next | None = None
    findings: tuple[Finding, ...] = ()
    """What the measured flows say; their paths are those of the readings file."""


def schedule(description: Description, budget: Budget, figures: Figures, readings: Readings | None = None) -> Schedule:
    """Return the schedule of a run, with the readings beside it where there are any."""
    steps = order_of_work(budget)
    tolerance = description.limits.tolerance
    place = _Place(description, budget, figures, _least_signals(budget))
    if readings is None:
        return Schedule(tuple(_row(place, number, step, None, None) for number, step in enumerate(steps, 1)))
    judged, findings = judge(budget, readings, tolerance)
    rows = tuple(
        _row(place, number, step, readings.measured.get(step.id), judged.get(step.id))
        for number, step in enumerate(steps, 1)
    )
    return Schedule(rows, next_step(budget, steps, judged, tolerance), findings)


@dataclass(frozen=True, slots=True)
class _Place:
    """What every row is read from."""

    description: Description
    budget: Budget
    figures: Figures
    least_signals: dict[str, float]

    def pressure(self, value: float, density: float) -> str:
        return self.figures.pressure(value, density, unit=True)


def _row(place: _Place, number: int, step: Step, reading: Measured | None, judged: Judged | None) -> Row:
    description, budget = place.description, place.budget
    part: Source | Section | Terminal
    device: DeviceResult | None = None
    drop: float | None
    if step.kind == "source":
        part, source = description.sources[step.id], budget.sources[step.id]
        flow, mass, name, size = source.flow, source.mass_flow, _pump(description), ""
        remarks = list(_remarks_of_source(place, step.id))
        owner, drop = source, source.duty
    else:
        result = budget.terminals.get(step.id) or budget.sections[step.id]
        part = description.terminals[step.id] if step.kind == "terminal" else description.sections[step.id]
        owner, device = budget.sources[result.source], result.device
        if device is not None and math.isnan(result.margin):  # what it must take up is not known
            device = dataclasses.replace(device, drop=math.nan, setting=None, signal=None)
        run = budget.sections[step.id].run if step.kind == "section" else budget.terminals[step.id]
        flow, mass = run.flow, run.mass_flow
        size = part.run.geometry.label if part.run is not None and part.run.geometry is not None else ""
        name, drop = (device.name, device.drop) if device is not None else ("", None)
        remarks = list(_remarks(place, step, device, part.setting, owner.fluid.density))
    return Row(
        order=number,
        id=step.id,
        kind=step.kind,
        source=owner.id,
        branch=step.branch,
        location=part.location,
        title=part.title,
        design_flow=flow,
        mass_flow=mass,
        density=owner.fluid.density,
        device=name,
        size=size,
        setting=_setting(device),
        drop=drop,
        signal=device.signal if device is not None else None,
        tolerance=description.limits.tolerance,
        remarks=tuple(remarks),
        reading=reading,
        judged=judged,
    )


def _setting(device: DeviceResult | None) -> float | None:
    """Return the setting without what rounding left beside a 0."""
    return None if device is None or device.setting is None else round(device.setting, 9)


def _pump(description: Description) -> str:
    return "fan" if description.fluid.gas else "pump"


def _remarks_of_source(place: _Place, id_: str) -> Iterator[str]:
    source = place.budget.sources[id_]
    flow = place.figures.flow(source.duty_flow, source.mass_flow * _ratio(source.duty_flow, source.flow), unit=True)
    yield f"last: duty {place.pressure(source.duty, source.fluid.density)} at {flow}"
    if source.reserve:
        yield f"reserve {place.pressure(source.reserve, source.fluid.density)} is in the duty; set it by measured flow"


def _ratio(part: float, whole: float) -> float:
    return part / whole if whole else 1.0


def _remarks(
    place: _Place, step: Step, device: DeviceResult | None, stated: float | None, density: float
) -> Iterator[str]:
    budget, description = place.budget, place.description
    terminal = budget.terminals.get(step.id)
    section = budget.sections.get(step.id)
    result = terminal or section
    if step.reference:
        index = "index" if result is not None and result.index else "least margin of its branch"
        yield f"reference ({index}): measured first, stays at its setting"
    if device is None:
        yield "no device"
    elif device.holds == "flow":
        yield "holds its flow: set the flow, check that the differential is within its range"
    elif device.holds == "differential":
        if device.set_point is not None:
            yield f"holds a differential: set point {place.pressure(device.set_point, density)}"
    elif math.isnan(device.drop):
        yield "can't be set: its margin is not known, see the findings"
    elif device.setting is None:
        yield "can't be set: outside its setting table"
    if terminal is not None and terminal.excess > SMALL:
        yield f"{place.pressure(terminal.excess, density)} is not taken up: over-supplied"
    least = place.least_signals.get(step.id, 0.0)
    if device is not None and device.signal is not None and device.signal < least * (1.0 - 1e-9):
        yield f"signal below the least that can be read, {place.pressure(least, density)}"
    if stated is not None:
        yield f"set on site at {plain_number(stated, 4)}"
    if step.id in description.sections and (description.sections[step.id].run.diversity or 1.0) < 1.0:
        yield "diversified flow: not all terminals at once"


def _least_signals(budget: Budget) -> dict[str, float]:
    layout = budget.run.layout
    return {
        layout.terminals.ids[use.number] if use.terminal else layout.topology.legs[use.number].owner: use.least_signal
        for use in layout.devices
    }
