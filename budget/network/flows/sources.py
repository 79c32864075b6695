"""Pumps and fans as they run: their curve at a speed, several in parallel, or a pressure that is held."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from budget.description import Basis, Source, SourceCase
from budget.network.computed import Computed
from budget.network.layout import neck_area
from budget.network.media import pascals, volume
from budget.physics.arrays import Array
from budget.physics.power import velocity_pressure

_FALL = 1e-3  # of the curve's pressure over its flow: the least by which a curve counts as falling beyond its ends


@dataclass(frozen=True, slots=True, eq=False)
class Curve:
    """A curve of flow (kg/s) and pressure (Pa), smooth between its points and straight beyond them.

    Between points it is a cubic that neither overshoots nor turns: Fritsch and Carlson (1980), Monotone piecewise cubic
    interpolation.
    """

    flow: Array
    pressure: Array
    slope: Array
    ends: tuple[float, float]
    """Slopes beyond the first and the last point."""

    @classmethod
    def through(cls, flow: Array, pressure: Array) -> Curve:
        """Return the curve through points of rising flow."""
        top, most = max(float(pressure.max()), 1e-12), max(float(flow.max()), 1e-12)
        if len(flow) == 1:
            return cls(flow, pressure, np.zeros(1), (-_FALL * top / most, -_FALL * top / most))
        secant = np.diff(pressure) / np.diff(flow)
        slope = np.concatenate([secant[:1], 0.5 * (secant[:-1] + secant[1:]), secant[-1:]])
        slope[1:-1][secant[:-1] * secant[1:] <= 0.0] = 0.0
        for place, chord in enumerate(secant.tolist()):
            if chord == 0.0:
                slope[place : place + 2] = 0.0
                continue
            size = float(np.hypot(slope[place] / chord, slope[place + 1] / chord))
            if size > 3.0:
                slope[place : place + 2] *= 3.0 / size
        least = -_FALL * top / most
        return cls(flow, pressure, slope, (min(float(slope[0]), least), min(float(slope[-1]), least)))

    def at(self, flow: float) -> tuple[float, float]:
        """Return pressure and slope at a flow; no pressure where the flow is NaN."""
        x, y = self.flow, self.pressure
        if flow < x[0]:
            return float(y[0] + self.ends[0] * (flow - x[0])), self.ends[0]
        if not flow < x[-1]:  # so too where the flow is not known
            return float(y[-1] + self.ends[1] * (flow - x[-1])), self.ends[1]
        place = int(np.searchsorted(x, flow, side="right")) - 1
        width = float(x[place + 1] - x[place])
        s = (flow - float(x[place])) / width
        rise, one, two = float(y[place + 1] - y[place]), float(self.slope[place]), float(self.slope[place + 1])
        a, b = width * one - rise, rise - width * two
        value = float(y[place]) + s * rise + s * (1.0 - s) * (a * (1.0 - s) + b * s)
        bend = (rise + (1.0 - 2.0 * s) * (a * (1.0 - s) + b * s) + s * (1.0 - s) * (b - a)) / width
        return value, bend


@dataclass(frozen=True, slots=True, eq=False)
class Running:
    """One source as it runs: a curve at a speed with so many units, or a pressure that is held."""

    edge: int
    units: int
    speed: float
    curve: Curve | None
    outlet: float
    """Velocity pressure at the outlet of one unit over the square of its flow in kg/s, where the curve is static."""
    held: float
    """Pressure across the source, Pa, where it has no curve."""
    set_point: float | None
    """Differential that it controls, Pa; None where it controls none."""

    def gain(self, flow: float) -> tuple[float, float]:
        """Return the pressure that it gives at a flow in kg/s, and its slope by the flow."""
        if self.curve is None:
            return self.held * self.speed**2, 0.0
        if self.speed <= 0.0 or self.units < 1:
            return 0.0, 0.0
        pressure, slope = self.curve.at(flow / (self.units * self.speed))
        each = max(flow / self.units, 0.0)
        total = pressure * self.speed**2 + self.outlet * each**2
        return total, (slope * self.speed + 2.0 * self.outlet * each) / self.units

    def off_curve(self, flow: float) -> bool:
        """Whether a flow lies beyond the points of the curve."""
        if self.curve is None or self.speed <= 0.0 or self.units < 1:
            return False
        each = flow / (self.units * self.speed)
        slack = 1e-9 * float(self.curve.flow[-1])
        return not self.curve.flow[0] - slack <= each <= self.curve.flow[-1] + slack

    def speed_at(self, flow: float, pressure: float) -> float | None:
        """Return the speed at which the curve gives a pressure at a flow, over that of the curve; None without."""
        if self.curve is None or self.units < 1:
            return None
        low, high = 0.0, 1.0
        each = max(flow / self.units, 0.0)

        def gives(speed: float) -> float:
            if self.curve is None or speed <= 0.0:
                return 0.0
            return self.curve.at(each / speed)[0] * speed**2 + self.outlet * each**2

        while gives(high) < pressure and high < 1e3:
            high *= 2.0
        for _ in range(60):
            middle = 0.5 * (low + high)
            low, high = (middle, high) if gives(middle) < pressure else (low, middle)
        return high


@dataclass(frozen=True, slots=True, eq=False)
class Gains:
    """What all sources give, as a law: a drop below nothing. Their items are in other laws."""

    sources: tuple[Running, ...]

    def add(self, flow: Array, drop: Array, slope: Array) -> None:
        """Take off what each source gives."""
        for source in self.sources:
            pressure, bend = source.gain(float(flow[source.edge]))
            drop[source.edge] -= pressure
            slope[source.edge] -= bend


def running(run: Computed, number: int, edge: int, stated: SourceCase) -> Running:
    """Return how a source runs: its description, with what a case says otherwise."""
    source = run.layout.sources[number]
    medium = run.layout.media[number].supply
    curve = _curve(source, medium.density) if source.curve else None
    point = stated.set_point
    if point is None and source.controls == "differential":
        point = source.set_point
    return Running(
        edge=edge,
        units=source.running if stated.running is None else stated.running,
        speed=1.0 if stated.speed is None else stated.speed,
        curve=curve,
        outlet=_outlet(source, medium.density),
        held=run.required_of(number),
        set_point=None if point is None else pascals(point, medium.density),
    )


def _curve(source: Source, density: float) -> Curve:
    """Return a source's curve by mass flow, for the density that it moves."""
    tested = density if source.curve_density is None else source.curve_density
    volumes = np.array(
        [flow.value / tested if flow.basis is Basis.MASS else volume(flow, density) for flow, _ in source.curve]
    )
    pressures = np.array([pascals(pressure, tested) for _, pressure in source.curve])
    return Curve.through(volumes * density, pressures * density / tested)


def _outlet(source: Source, density: float) -> float:
    """Return what makes a fan's static curve one of total pressure; nothing without the size of its outlet."""
    if source.curve_is != "static" or source.outlet is None:
        return 0.0
    return float(velocity_pressure(density, 1.0 / (density * neck_area(source.outlet))))
