"""Proposals: the Kv of a control valve for an authority, and which of the design's devices would do in a place.

A proposal is worked out on the run itself: with another valve or device the margins and what the devices take up are
computed anew, so the figures are those that the run would have.
"""

from __future__ import annotations

import dataclasses
import math
from bisect import bisect_right
from dataclasses import dataclass

import numpy as np

from budget.description import Description, Device
from budget.network.authority import only_its_flow
from budget.network.budget import evaluate
from budget.network.computed import Computed, compute
from budget.network.equipment import KV
from budget.physics.fittings import kv_of_drop

AUTHORITY = 0.5
"""Authority to reach at design flow where none is stated (common practice)."""

_DECADE = (1.0, 1.6, 2.5, 4.0, 6.3)
SERIES = tuple(round(step * 10.0**decade, 3) for decade in range(-2, 4) for step in _DECADE)
"""Kv sizes in which control valves are made, every second step of ten to a decade (common practice)."""

AROUND = 2
"""Sizes that are proposed on either side."""


@dataclass(frozen=True, slots=True)
class KvChoice:
    """A size of a control valve and what follows from it."""

    kv: float
    drop: float
    """Fully open at design flow, Pa."""
    authority: float
    required: float
    """Of its source, Pa."""


@dataclass(frozen=True, slots=True)
class KvProposal:
    """The Kv that reaches an authority, and the sizes around it, the smallest first."""

    id: str
    item: str
    wanted: float
    present: KvChoice
    exact: KvChoice | None
    """None where no Kv reaches it."""
    choices: tuple[KvChoice, ...]


@dataclass(frozen=True, slots=True)
class DeviceChoice:
    """A device of the design in a place: where it would be set, and whether it would do."""

    name: str
    drop: float
    base: float
    setting: float | None
    signal: float | None
    in_table: bool
    readable: bool
    """The signal is at least what can be read; so it is where no least is stated."""
    required: float
    """Of its source, Pa: a device with a larger base drop may raise it."""

    @property
    def suits(self) -> bool:
        """Whether it can be set and read."""
        return self.in_table and self.readable


def propose_kv(run: Computed, id_: str, authority: float = AUTHORITY) -> KvProposal | None:
    """Propose sizes for the control item of a section or terminal.

    None where it has no control item, where a device holds its flow (it has no authority then), or where its circuit
    can't be computed. `authority` is above 0 and below 1.
    """
    trial = _Trial.of(run, id_)
    if trial is None:
        return None
    present = trial.present()
    if not (math.isfinite(present.drop) and present.drop > 0.0 and math.isfinite(present.authority)):
        return None
    exact = _solve(trial, present, authority)
    choices: tuple[KvChoice, ...] = ()
    if exact is not None:
        place = bisect_right(SERIES, exact.kv * (1.0 + 1e-9))
        choices = tuple(trial.at(kv) for kv in SERIES[max(place - AROUND, 0) : place + AROUND])
    return KvProposal(id_, run.layout.items.items[trial.item].name, authority, present, exact, choices)


@dataclass(frozen=True, slots=True)
class _Trial:
    """A control item whose Kv is tried."""

    run: Computed
    carrier: int
    item: int
    three_port: bool
    flow: float
    """Through one of its units, m3/s."""

    @classmethod
    def of(cls, run: Computed, id_: str) -> _Trial | None:
        layout = run.layout
        if layout.topology.section_legs.get(id_):
            carrier = layout.topology.section_legs[id_][0]
            mass = float(run.drops.leg_mass[carrier])
        elif id_ in layout.terminals.ids:
            number = layout.terminals.ids.index(id_)
            carrier = len(layout.legs) + number
            mass = float(run.drops.terminal_mass[number])
        else:
            return None
        if any(use.carrier == carrier and use.device.holds == "flow" for use in layout.devices):
            return None
        for number in np.flatnonzero(layout.items.carrier == carrier).tolist():
            item = layout.items.items[number]
            if item.control:
                units = float(layout.items.parallel[number])
                flow = mass / float(layout.items.density[number]) / units
                return cls(run, carrier, number, item.control == "three-port", flow)
        return None

    def kv_for(self, drop: float) -> float:
        return float(kv_of_drop(self.flow, drop, self.run.layout.items.density[self.item]))

    def present(self) -> KvChoice:
        drop = float(self.run.drops.item_drop[self.item])
        return self._choice(self.run, self.kv_for(drop) if drop > 0.0 else math.nan)

    def at(self, kv: float) -> KvChoice:
        layout = self.run.layout
        form, value = layout.items.form.copy(), layout.items.value.copy()
        form[self.item], value[self.item] = KV, kv
        items = dataclasses.replace(layout.items, form=form, value=value)
        return self._choice(compute(dataclasses.replace(layout, items=items)), kv)

    def _choice(self, run: Computed, kv: float) -> KvChoice:
        drop = float(run.drops.item_drop[self.item])
        whole = only_its_flow(run, self.carrier, self.three_port)
        authority = drop / whole if whole > 0.0 else math.nan
        return KvChoice(kv, drop, authority, run.required_of(_source(run, self.carrier)))


def _source(run: Computed, carrier: int) -> int:
    legs = run.layout.legs
    return int(legs.source[carrier] if carrier < len(legs) else run.layout.terminals.source[carrier - len(legs)])


def _solve(trial: _Trial, present: KvChoice, authority: float) -> KvChoice | None:
    """Return the largest Kv that reaches an authority, which falls as the Kv grows: bracketed, then bisected.

    Each step takes the drop that would do if all else stayed; the bracket keeps it safe where take-ups give way.
    """
    if not 0.0 < authority < 1.0:
        raise ValueError("an authority is above 0 and below 1")
    low = high = present.kv
    found = present
    for _ in range(60):
        if found.authority < authority:
            high = found.kv
            if low < high:
                break
            low /= 2.0
            found = trial.at(low)
        else:
            low = found.kv
            if low < high:
                break
            high *= 2.0
            found = trial.at(high)
    else:
        return None
    for _ in range(60):
        rest = found.drop * (1.0 / found.authority - 1.0)
        kv = trial.kv_for(rest * authority / (1.0 - authority)) if rest > 0.0 else math.nan
        if not low < kv < high:
            kv = math.sqrt(low * high)
        found = trial.at(kv)
        if abs(found.authority - authority) <= 1e-6 or high <= low * (1.0 + 1e-9):
            return found
        low, high = (low, kv) if found.authority < authority else (kv, high)
    return found


def propose_devices(run: Computed, id_: str) -> tuple[DeviceChoice, ...]:
    """Return what each setting device of the design would do on a section or terminal, the best one first.

    First those that can be set and read, then the one with the least required pressure, then the one with the most
    drop fully open: its setting lies furthest open. Valves are tried on a liquid and dampers on a gas, or what the
    present device is. Devices that hold flow or differential are left out: they are chosen by what they hold.
    """
    description = run.layout.description
    part = description.sections.get(id_) or description.terminals.get(id_)
    if part is None:
        return ()
    present = description.devices.get(part.balance or "")
    valve = bool(present.kv) if present is not None and (present.kv or present.k) else not description.fluid.gas
    found = [
        choice
        for device in description.devices.values()
        if device.holds is None and (device.kv if valve else device.k)
        for choice in (_with_device(description, id_, device),)
        if choice is not None
    ]
    return tuple(sorted(found, key=lambda one: (not one.suits, round(one.required, 6), -one.base)))


def _with_device(description: Description, id_: str, device: Device) -> DeviceChoice | None:
    if id_ in description.sections:
        section = dataclasses.replace(description.sections[id_], balance=device.name)
        changed = dataclasses.replace(description, sections={**description.sections, id_: section})
    else:
        terminal = dataclasses.replace(description.terminals[id_], balance=device.name)
        changed = dataclasses.replace(description, terminals={**description.terminals, id_: terminal})
    budget = evaluate(changed)
    result = budget.sections.get(id_) or budget.terminals.get(id_)
    if result is None or result.device is None or math.isnan(result.device.drop):
        return None
    one = result.device
    least = next(use.least_signal for use in budget.run.layout.devices if use.device.name == device.name)
    readable = one.signal is None or not one.signal < least * (1.0 - 1e-9)
    required = budget.sources[result.source].required
    return DeviceChoice(
        device.name, one.drop, one.base, one.setting, one.signal, one.setting is not None, readable, required
    )
