"""One record a section and terminal, read from the arrays."""

from __future__ import annotations

import math

import numpy as np

from budget.description import Geometry
from budget.network.arrays import DeviceUse, Floats
from budget.network.circuits import path_sums
from budget.network.computed import Computed
from budget.network.link_records import losses_at
from budget.network.results import DeviceResult, LegResult, LossResult, RunResult, SectionResult, TerminalResult
from budget.network.takeup import adjust
from budget.physics.friction import REGIMES
from budget.physics.junctions import FAMILIES

FAMILY_SOURCES = {
    "tee-crane": ("Crane Technical Paper 410 (2009) chapter 2, as in the fluids library", "read+library"),
    "tee-idelchik": ("Idelchik, Handbook of Hydraulic Resistance, section 7", "read"),
}
IN_SMALLER = "velocity in the smaller area"
CHANGE_SOURCE = ("Borda-Carnot; Idelchik, diagrams 4-1, 5-1 and 5-23", "read+memory")


class Records:
    """Reads section and terminal results from a computed run, each when it is asked for."""

    def __init__(self, run: Computed, authority: dict[int, tuple[float | None, float | None]]) -> None:
        """Prepare what several records share."""
        self._run = run
        self._authority = authority
        self._devices = {use.carrier: number for number, use in enumerate(run.layout.devices)}
        self._numbers = {id_: number for number, id_ in enumerate(run.layout.terminals.ids)}
        self._leakage = run.leakage
        junctions = run.layout.junctions
        self._junctions: dict[int, int] = {}
        for legs, counts in (
            (junctions.branch, junctions.branch_counts),
            (junctions.straight, junctions.straight_counts),
        ):
            self._junctions |= {int(leg): number for number, leg in enumerate(legs) if counts[number]}
        self._sources = tuple(run.layout.description.sources)
        self._cumulative = _cumulative(run)

    def section(self, id_: str) -> SectionResult:
        """Return the result of one section."""
        run, layout = self._run, self._run.layout
        legs = layout.topology.section_legs[id_]
        first = legs[0]
        section = layout.description.sections[id_]
        served = sorted({int(t) for leg in legs for t in layout.served(leg)})
        margin = min((float(run.circuits.leg_margin[leg]) for leg in legs), default=math.nan)
        authority, low = self._authority.get(first, (None, None))
        return SectionResult(
            id=id_,
            source=self._sources[int(layout.legs.source[first])],
            run=self._run_result(legs, section.run.geometry, float(run.drops.leg_items[first])),
            cumulative=float(self._cumulative[first]),
            differential=self._section_differential(legs),
            margin=margin if math.isfinite(margin) else math.nan,
            index=any(bool(run.circuits.leg_index[leg]) for leg in legs),
            serves=tuple(layout.terminals.ids[number] for number in served),
            authority=authority,
            authority_low=low,
            device=self._device(first),
            items=run.item_results(first),
        )

    def terminal(self, id_: str) -> TerminalResult:
        """Return the result of one terminal."""
        run, layout = self._run, self._run.layout
        number = self._numbers[id_]
        carrier = len(layout.legs) + number
        terminal = layout.description.terminals[id_]
        mass = float(run.drops.terminal_mass[number])
        source = int(layout.terminals.source[number])
        run_out = layout.topology.run_out_legs.get(id_)
        authority, low = self._authority.get(carrier, (None, None))
        return TerminalResult(
            id=id_,
            source=self._sources[source],
            flow=mass / layout.media[source].supply.density,
            mass_flow=mass,
            circuit=float(run.circuits.circuit[number]),
            drop=float(run.drops.terminal_drop[number]),
            items_drop=float(run.drops.terminal_items[number]),
            static=float(run.drops.terminal_static[number]),
            run_out=self._run_result(run_out, terminal.run.geometry, 0.0) if run_out and terminal.run else None,
            differential=_or_none(float(run.circuits.differential[number])),
            margin=float(run.circuits.margin[number]),
            excess=float(run.take_up.excess[number]),
            index=bool(run.circuits.index[number]),
            path=self._path(number),
            authority=authority,
            authority_low=low,
            device=self._device(carrier),
            items=run.item_results(carrier),
        )

    def _run_result(self, legs: tuple[int, ...], geometry: Geometry | None, items: float) -> RunResult:
        drops, arrays = self._run.drops, self._run.layout.legs
        first, both = legs[0], list(legs)
        mass = float(drops.leg_mass[first])
        supply = self._run.layout.media[int(arrays.source[first])].supply
        friction, fittings = math.fsum(drops.friction[both]), math.fsum(drops.fittings[both])
        junction, transition = math.fsum(drops.junction[both]), math.fsum(drops.transition[both])
        return RunResult(
            flow=mass / supply.density,
            mass_flow=mass,
            bore=geometry.bore if geometry else None,
            width=geometry.width if geometry and geometry.shape != "round" else None,
            height=geometry.height if geometry and geometry.shape != "round" else None,
            hydraulic_diameter=float(arrays.diameter[first]),
            area=float(arrays.area[first]),
            k_total=self._k_total(first),
            friction=friction,
            fittings=fittings,
            junction=junction,
            transition=transition,
            items=items,
            static=math.fsum(drops.leg_static[both]),
            drop=friction + fittings + junction + transition + items,
            leakage=_or_none(float(np.sum(self._leakage[both]))),
            legs=tuple(self._leg(leg) for leg in legs),
        )

    def _k_total(self, leg: int) -> float:
        if math.isnan(self._run.layout.legs.constant[leg]):
            return math.nan  # one of the fittings could not be read
        return math.fsum(loss.count * loss.k for loss in self._losses(leg))

    def _leg(self, leg: int) -> LegResult:
        drops = self._run.drops
        return LegResult(
            leg=self._run.layout.topology.legs[leg].side,
            mass_flow=float(drops.leg_mass[leg]),
            velocity=float(drops.velocity[leg]),
            velocity_pressure=float(drops.velocity_pressure[leg]),
            reynolds=float(drops.reynolds[leg]),
            regime=REGIMES[drops.regime[leg]],
            friction_factor=float(drops.factor[leg]),
            gradient=float(drops.gradient[leg]),
            friction=float(drops.friction[leg]),
            junction=float(drops.junction[leg]),
            losses=self._losses(leg),
            joints=self._joints(leg),
        )

    def _losses(self, leg: int) -> tuple[LossResult, ...]:
        drops = self._run.drops
        re, pv = float(drops.reynolds[leg]), float(drops.velocity_pressure[leg])
        sign = -1.0 if drops.leg_mass[leg] < 0.0 else 1.0
        return losses_at(self._run.layout.legs.losses[leg], re, sign * pv, float(drops.velocity[leg]))

    def _joints(self, leg: int) -> tuple[LossResult, ...]:
        """Return the leg's part of the junction that it hangs on, and the change of area there."""
        drops, layout = self._run.drops, self._run.layout
        legs, found = layout.legs, []
        if (number := self._junctions.get(leg)) is not None:
            junctions = layout.junctions
            role = "branch" if int(junctions.branch[number]) == leg else "straight"
            family = FAMILIES[int(junctions.family[number])]
            combined = int(junctions.combined[number])
            whole = float(
                drops.leg_mass[int(junctions.branch[number])] + drops.leg_mass[int(junctions.straight[number])]
            )
            velocity = whole / float(legs.density[combined] * legs.area[combined])
            flow = "converging" if junctions.converging[number] else "diverging"
            name = f"{role} of a {flow} junction, {float(junctions.angle[number]):g} deg"
            k, drop = float(drops.junction_k[leg]), float(drops.junction[leg])
            source, known_from = FAMILY_SOURCES[family]
            found.append(
                LossResult(name, 1, k, drop, family, source, known_from, "velocity of the combined flow", velocity)
            )
        k, area = float(layout.area_changes.k[leg]), float(layout.area_changes.area[leg])
        if k:
            velocity = abs(float(drops.leg_mass[leg])) / (float(legs.density[leg]) * area)
            drop = float(drops.transition[leg])
            source, known_from = CHANGE_SOURCE
            found.append(
                LossResult(
                    "change of area",
                    1,
                    k,
                    drop,
                    "by angle",
                    source,
                    known_from,
                    IN_SMALLER,
                    velocity,
                )
            )
        return tuple(found)

    def _section_differential(self, legs: tuple[int, ...]) -> float | None:
        run, layout = self._run, self._run.layout
        zone = int(layout.legs.zone[legs[0]])
        source = layout.zones[zone].source
        air = layout.topology.kinds[source] == "air"
        if not air and len(legs) < 2:
            return None
        items = 0.0 if air or layout.zones[zone].outer >= 0 else float(run.drops.source_items[source])
        outside = math.fsum(run.circuits.leg_outside[list(legs)])
        return _or_none(float(run.circuits.required[zone]) - items - outside)

    def _path(self, number: int) -> tuple[str, ...]:
        topology = self._run.layout.topology
        terminals = self._run.layout.terminals
        out = topology.chain(int(terminals.out[number]))[::-1]
        back = topology.chain(int(terminals.back[number]))
        return tuple(topology.legs[leg].owner for leg in out + back if not topology.legs[leg].run_out)

    def _device(self, carrier: int) -> DeviceResult | None:
        number = self._devices.get(carrier)
        if number is None:
            return None
        run = self._run
        use: DeviceUse = run.layout.devices[number]
        base, taken = float(run.drops.device_base[number]), float(run.take_up.taken[number])
        adjusted = adjust(run.layout, run.drops, number, base + taken)
        return DeviceResult(
            name=use.device.name,
            base=base,
            take_up=taken,
            drop=base + taken,
            kv=adjusted.kv,
            k=adjusted.k,
            setting=adjusted.setting,
            signal=adjusted.signal,
            holds=use.device.holds,
            set_point=float(run.circuits.required[use.zone]) if use.zone >= 0 else None,
            origin=use.device.origin,
        )


def _or_none(value: float) -> float | None:
    return None if math.isnan(value) else value


def _cumulative(run: Computed) -> Floats:
    """Return for the first leg of each section the sum from the source's outlet to the section's downstream end.

    Outward that is everything on the path so far, both legs of paired sections. On the way back it is the largest
    circuit through the section, less the sections that follow it toward the source.
    """
    layout, legs = run.layout, run.layout.legs
    whole = np.where(legs.first & legs.outward, run.drops.leg_total, 0.0)
    for pair in layout.topology.section_legs.values():
        if len(pair) == 2:
            whole[pair[0]] += run.drops.leg_total[pair[1]]
    outward = path_sums(whole, legs.parent)
    leading_back = np.where(legs.first & ~legs.outward, run.drops.leg_total, 0.0)
    along = path_sums(leading_back, legs.parent)
    after = np.where(legs.parent >= 0, along[legs.parent], 0.0) if len(along) else along
    from_source = run.circuits.circuit - np.array(
        [
            0.0 if layout.topology.kinds[source] == "air" else run.drops.source_items[source]
            for source in layout.terminals.source.tolist()
        ]
    )
    largest = np.full(len(legs), np.nan)
    for leg in np.flatnonzero(legs.first & ~legs.outward & ~legs.run_out).tolist():
        served = from_source[layout.served(leg)]
        if len(served) and not np.isnan(served).all():
            largest[leg] = np.nanmax(served)
    return np.where(legs.outward, outward, largest - after)
