"""Which balancing device takes up how much, and where it is set."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from budget.network.arrays import DeviceUse, Floats, Ints, Layout
from budget.network.circuits import Circuits, margins_within
from budget.network.hydraulics import Hydraulics
from budget.physics.fittings import kv_of_drop, valve_drop
from budget.physics.power import velocity_pressure

EDGE = 1e-9
"""A setting within this fraction of an end of its table is inside it."""


@dataclass(frozen=True, slots=True, eq=False)
class TakeUp:
    """What each device takes up, and what remains at each terminal, Pa."""

    taken: Floats
    excess: Floats


@dataclass(frozen=True, slots=True, eq=False)
class Adjusted:
    """A device at its drop: the Kv or loss coefficient that it needs there, its setting, its measuring signal."""

    kv: float | None
    k: float | None
    setting: float | None
    signal: float | None


def take_up(layout: Layout, drops: Hydraulics, circuits: Circuits) -> TakeUp:
    """Share each margin among the devices in its path.

    Devices are taken by the number of terminals served, most first; ties by supply before return, then file order;
    terminals last. Each takes the least that remains among the terminals that it serves, never less than nothing; a
    flow-holding one at most up to its greatest drop. What hangs behind a differential-holding device counts as one
    terminal outside it, and has its set point to spend inside.
    """
    remaining = circuits.margin.copy()
    taken = np.zeros(len(layout.devices))
    zone_remaining = circuits.zone_margin.copy()
    on_legs = [number for number, use in enumerate(layout.devices) if not use.terminal]
    held = any(zone.outer >= 0 for zone in layout.zones)
    rank = layout.description.rank() if on_legs else {}
    for number in sorted(on_legs, key=lambda n: _turn(layout, layout.devices[n], rank)):
        use = layout.devices[number]
        zone = int(layout.legs.zone[use.number])
        if use.zone >= 0:
            least = float(zone_remaining[use.zone])
            taken[number] = _bounded(least, use, drops.device_base[number])
            zone_remaining[use.zone] -= taken[number]
            continue
        served = layout.served(use.number)
        seen = (margins_within(layout, zone, remaining, zone_remaining) if held else remaining)[served]
        if not np.isfinite(seen).any():
            continue
        taken[number] = _bounded(float(np.nanmin(seen)), use, drops.device_base[number])
        direct = served[layout.terminals.zone[served] == zone]
        remaining[direct] -= taken[number]
        zone_remaining[_zones_directly_in(layout, zone, served)] -= taken[number]
    for number, use in enumerate(layout.devices):
        if use.terminal:
            taken[number] = _bounded(float(remaining[use.number]), use, drops.device_base[number])
            remaining[use.number] -= taken[number]
    return TakeUp(taken, np.maximum(remaining, 0.0))


def _bounded(remaining: float, use: DeviceUse, base: float) -> float:
    if math.isnan(remaining) or math.isnan(base):
        return 0.0
    most = max(use.greatest_drop - base, 0.0) if use.device.holds == "flow" else math.inf
    return min(max(remaining, 0.0), most)


def _turn(layout: Layout, use: DeviceUse, rank: dict[str, int]) -> tuple[int, bool, int]:
    leg = layout.topology.legs[use.number]
    zone = int(layout.legs.zone[use.number])
    served = layout.served(use.number)
    direct = int(np.count_nonzero(layout.terminals.zone[served] == zone))
    count = direct + len(_zones_directly_in(layout, zone, served))
    return -count, not leg.outward, rank.get(leg.owner, 0)


def _zones_directly_in(layout: Layout, zone: int, served: Ints) -> Ints:
    """Return the held zones just inside a zone that hold any of the served terminals."""
    towards = layout.zone_tree.child_towards(zone, layout.terminals.zone[served])
    return np.array(sorted(set(towards[towards >= 0].tolist())), dtype=np.int64)  # np.unique loads masked arrays


def adjust(layout: Layout, drops: Hydraulics, number: int, drop: float) -> Adjusted:
    """Return how a device is set for a drop: Kv interpolated on log Kv, a damper on log k.

    The setting is None outside the table. A device that holds flow or differential has no setting, and a signal only
    across a measuring orifice.
    """
    use = layout.devices[number]
    carried = (drops.leg_mass, drops.terminal_mass)[use.terminal][use.number]
    flow = float(carried) / use.density
    device = use.device
    signal = None
    if device.signal_kv is not None:
        signal = float(valve_drop(flow, device.signal_kv, use.density))
    elif not device.k and not device.holds:
        signal = drop
    if device.holds:
        return Adjusted(None, None, None, signal)
    if device.kv and not math.isnan(drop):
        kv = float(kv_of_drop(flow, drop, use.density)) if drop > 0 else math.inf
        return Adjusted(kv, None, _setting(device.kv, kv), signal)
    if device.k and not math.isnan(drop):
        if math.isnan(use.neck):
            pv = float(drops.velocity_pressure[use.reference]) if use.reference >= 0 else math.nan
        else:
            pv = float(velocity_pressure(use.density, flow / use.neck))
        k = drop / pv if pv > 0 else math.nan
        return Adjusted(None, k, _setting(device.k, k), None)
    return Adjusted(None, None, None, signal)


def _setting(table: tuple[tuple[float, float], ...], wanted: float) -> float | None:
    points = sorted((math.log(value), setting) for setting, value in table)
    low, high = points[0][0], points[-1][0]
    if not math.isfinite(wanted) or wanted <= 0.0:
        return None
    at = math.log(wanted)
    if at < low and at > low - EDGE:
        at = low
    if at > high and at < high + EDGE:
        at = high
    if not low <= at <= high:
        return None
    return float(np.interp(at, [value for value, _ in points], [setting for _, setting in points]))
