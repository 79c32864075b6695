"""What a designer must look at in the results: limits, doubtful regimes, unstated junctions, excess, authority."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np

from budget.description import Description, Finding, Link, Path, Run, Section, Terminal, error, note, warning
from budget.network.arrays import Bools, Floats
from budget.network.computed import Computed
from budget.network.duty import source_result
from budget.network.takeup import adjust
from budget.physics.junctions import in_range
from budget.physics.shapes import FLEXIBLE_COMPRESSION, FLEXIBLE_DIAMETERS

SMALL = 1e-3
"""Pa below which a remaining pressure is rounding."""

SAME_AREA = 0.9
"""Ratio of areas above which two sizes count as the same one in two lines."""
SMALLER = "velocity in the smaller"
"""How the catalogue's changes of area say to which velocity they refer."""

Authorities = dict[int, tuple[float | None, float | None]]


def review(run: Computed, authority: Authorities) -> Iterator[Finding]:
    """Find what is doubtful in a computed run, in the order of the file's tables."""
    yield from _sources(run)
    yield from _zones(run)
    yield from _legs(run)
    yield from _links(run)
    yield from _junctions(run)
    yield from _area_changes(run)
    yield from _flexible(run)
    yield from _terminals(run)
    yield from _devices(run)
    yield from _authorities(run, authority)


def _sources(run: Computed) -> Iterator[Finding]:
    for number, source in enumerate(run.layout.description.sources.values()):
        result = source_result(run, number)
        if result.in_hand is not None and result.in_hand < 0.0:
            yield warning(
                "nothing-in-hand",
                "the duty, {0}, is {1} above what is available",
                (*source.path, "available"),
                (result.duty, "pressure"),
                (-result.in_hand, "pressure"),
            )
        for heading, allowed in result.budget.items():
            over = result.spent[heading] - allowed
            if over > SMALL:
                yield warning(
                    "heading",
                    f"{heading} of {_plain(source.id)} takes {{0}}, {{1}} above its budget",
                    ("budget", heading),
                    (result.spent[heading], "pressure"),
                    (over, "pressure"),
                )
        allowed = source.flow_reserve * result.flow
        if result.leakage is not None and result.leakage > allowed * (1.0 + 1e-9):
            yield warning(
                "leakage",
                "the ducts may leak {0} by their class, the flow reserve covers {1}; raise flow_reserve",
                (*source.path, "flow_reserve"),
                (result.leakage, "flow"),
                (allowed, "flow"),
            )
        if result.kind == "air":
            yield from _air_balance(run, number, source.path)


def _air_balance(run: Computed, source: int, path: Path) -> Iterator[Finding]:
    terminals, legs = run.layout.terminals, run.layout.legs
    flows = []
    for outward in (True, False):
        roots = (legs.parent < 0) & (legs.outward == outward) & (legs.source == source)
        ends = terminals.out if outward else terminals.back
        direct = (ends < 0) & (terminals.discharge == outward) & (terminals.source == source)
        flows.append(float(run.drops.leg_mass[roots].sum() + run.drops.terminal_mass[direct].sum()))
    discharge, suction = flows
    if discharge > 0 and suction > 0 and abs(discharge - suction) > 0.01 * max(discharge, suction):
        text = (
            f"discharge {discharge:.4g} kg/s and suction {suction:.4g} kg/s differ by more than 1 %; "
            "the source takes the discharge side's flow"
        )
        yield warning("air-balance", text, path)


def _zones(run: Computed) -> Iterator[Finding]:
    for number, zone in enumerate(run.layout.zones):
        largest = float(run.circuits.largest[number])
        if zone.device < 0 or math.isnan(zone.set_point) or not zone.set_point < largest * (1.0 - 1e-9):
            continue
        name = run.layout.devices[zone.device].device.name
        yield error(
            "set-point",
            f"the set point of {_quoted(name)}, {{0}}, is below the largest circuit behind it, {{1}}; raise it",
            ("device", name, "set_point"),
            (zone.set_point, "pressure"),
            (largest, "pressure"),
        )


def _owner(run: Computed, leg: int) -> tuple[Section | Terminal, Run]:
    found = run.layout.topology.legs[leg]
    if found.run_out:
        terminal = run.layout.description.terminals[found.owner]
        return terminal, terminal.run or Run()
    section = run.layout.description.sections[found.owner]
    return section, section.run


def _legs(run: Computed) -> Iterator[Finding]:
    """Find legs beyond their limits, one finding a section and code, at its worst leg."""
    drops, legs = run.drops, run.layout.legs
    most, steepest, least = _limits(run)
    flowing = drops.leg_mass != 0.0
    with np.errstate(invalid="ignore"):
        checks = (
            ("velocity", drops.velocity > most, drops.velocity, most, "velocity", "above"),
            ("gradient", drops.gradient > steepest, drops.gradient, steepest, "gradient", "above"),
            ("slow", flowing & (drops.velocity < least), drops.velocity, least, "velocity", "below"),
        )
        transitional = flowing & (drops.regime == 1)
    for code, wrong, values, limit, dimension, side in checks:
        for leg in _worst(run, wrong, values if side == "above" else -values):
            owner, _ = _owner(run, leg)
            word = "gradient" if code == "gradient" else "velocity"
            on = "" if run.layout.legs.first[leg] else f" of its {run.layout.topology.legs[leg].side} leg"
            text = f"{word} {{0}}{on} is {side} its limit, {{1}}"
            yield warning(
                code, text, _size_path(owner), (float(values[leg]), dimension), (float(limit[leg]), dimension)
            )
    for leg in _worst(run, transitional, drops.friction):
        owner, _ = _owner(run, leg)
        text = (
            f"Reynolds number {float(drops.reynolds[leg]):.0f} is transitional (2300 to 4000); "
            "no published friction law is reliable there"
        )
        yield warning("transitional", text, _size_path(owner))
    for leg in np.flatnonzero(drops.too_diverse).tolist():
        if legs.first[leg] or not drops.too_diverse[_first_leg(run, leg)]:
            owner, _ = _owner(run, leg)
            yield error(
                "diversity",
                "the diversified flow is less than that of the largest branch; raise the diversity",
                (*owner.path, "diversity"),
            )


def _links(run: Computed) -> Iterator[Finding]:
    """Find rings without a solution, and links beyond their limits."""
    layout, flowing = run.layout, run.drops.links
    if not run.drops.settled:
        text = "the flows of the rings did not settle, and the figures are not to be relied on"
        yield error("not-settled", text, ("link", next(iter(layout.links.of))))
    for id_, numbers in layout.links.of.items():
        link = layout.description.links[id_]
        for code, values, limit in zip(
            ("velocity", "gradient"), (flowing.velocity, flowing.gradient), _limits_of(run, link.run, ""), strict=False
        ):
            worst = float(values[list(numbers)].max())
            if worst > limit:
                text = f"{code} {{0}} is above its limit, {{1}}"
                yield warning(code, text, _size_path(link), (worst, code), (limit, code))


def _size_path(owner: Section | Terminal | Link) -> Path:
    geometry = owner.run.geometry if owner.run else None
    stated = "bore" if geometry is not None and geometry.label.endswith("mm bore") else "size"
    return (*owner.path, stated)


def _first_leg(run: Computed, leg: int) -> int:
    found = run.layout.topology.legs[leg]
    owned = run.layout.topology.run_out_legs if found.run_out else run.layout.topology.section_legs
    return owned[found.owner][0]


def _worst(run: Computed, wrong: Bools, values: Floats) -> list[int]:
    """Return the leg with the largest value of each owner that has a wrong one."""
    best: dict[tuple[bool, str], int] = {}
    for leg in np.flatnonzero(wrong).tolist():
        found = run.layout.topology.legs[leg]
        key = (found.run_out, found.owner)
        if key not in best or values[leg] > values[best[key]]:
            best[key] = leg
    return list(best.values())


def _limits(run: Computed) -> tuple[Floats, Floats, Floats]:
    """Return greatest velocity, greatest gradient and least velocity of each leg.

    A section's own limit comes first, then its class's, then that of its bore, then the general one.
    """
    count = len(run.layout.legs)
    most, steepest, least = (np.full(count, bound) for bound in (np.inf, np.inf, 0.0))
    known: dict[str, tuple[float, float, float]] = {}
    for leg, found in enumerate(run.layout.topology.legs):
        if found.owner not in known:
            _, owner = _owner(run, leg)
            known[found.owner] = _limits_of(run, owner, "run-out" if found.run_out else "")
        most[leg], steepest[leg], least[leg] = known[found.owner]
    return most, steepest, least


def _limits_of(run: Computed, owner: Run, usual: str) -> tuple[float, float, float]:
    limits = run.layout.description.limits
    by_class = limits.classes.get(owner.class_ or usual, {})
    return (
        _first(owner.limit_velocity, by_class.get("velocity"), _by_bore(run, owner), limits.velocity, math.inf),
        _first(owner.limit_gradient, by_class.get("gradient"), limits.gradient, math.inf),
        _first(by_class.get("least_velocity"), limits.least_velocity, 0.0),
    )


def _first(*values: float | None) -> float:
    return next(value for value in values if value is not None)


def _by_bore(run: Computed, owner: Run) -> float | None:
    bore = owner.geometry.bore if owner.geometry else None
    if bore is None:
        return None
    table = run.layout.description.limits.velocity_by_bore
    return next((velocity for up_to, velocity in table if bore <= up_to * (1.0 + 1e-9)), None)


def _junctions(run: Computed) -> Iterator[Finding]:
    """Find junctions outside what their family was published for, and gains on the index circuit."""
    junctions = run.layout.junctions
    within = in_range(
        junctions.family, junctions.converging, np.zeros(len(junctions)), junctions.area_ratio, junctions.angle
    )
    known = ~np.isnan(junctions.area_ratio) & ~np.isnan(junctions.angle)
    # Both legs of a paired section have the same ratio.
    beyond = {_owner(run, int(junctions.branch[n]))[0].path: n for n in np.flatnonzero(known & ~within).tolist()}
    for path, number in beyond.items():
        text = (
            f"area ratio {float(junctions.area_ratio[number]):.2f} of branch to combined is outside what the junction "
            "was published for, up to 1; the nearest is used"
        )
        yield warning("junction-range", text, (*path, "takeoff"))
    gaining = (run.drops.junction < 0.0) & run.circuits.leg_index
    for leg in np.flatnonzero(gaining).tolist():
        owner, _ = _owner(run, leg)
        text = (
            f"the junction coefficient of its {run.layout.topology.legs[leg].side} leg is "
            f"{float(run.drops.junction_k[leg]):.3f}: the other flow draws this one along, "
            "a gain of {0} that the index circuit counts"
        )
        yield note("junction-gain", text, (*owner.path, "takeoff"), (-float(run.drops.junction[leg]), "pressure"))


def _area_changes(run: Computed) -> Iterator[Finding]:
    """Offer a transition where a section goes straight on in another size and nothing counts the change.

    A reducer or transition among the fittings counts it, and a branch has its area in its junction.
    """
    layout, legs = run.layout, run.layout.legs
    used = layout.end > layout.start
    meeting = np.bincount(legs.parent[(legs.parent >= 0) & used], minlength=len(legs))
    for ends in (layout.terminals.out, layout.terminals.back):
        sizeless = [end for end in ends.tolist() if end >= 0 and not legs.run_out[end]]
        meeting += np.bincount(np.array(sizeless, dtype=np.int64), minlength=len(legs))
    straight_on = (legs.parent >= 0) & (meeting[legs.parent] == 1) if len(legs) else legs.first
    straight_on[layout.junctions.straight[layout.junctions.straight_counts]] = True
    for leg in np.flatnonzero(straight_on & legs.first & used).tolist():
        owner, built = _owner(run, leg)
        parent = int(legs.parent[leg])
        own, other = float(legs.area[leg]), float(legs.area[parent])
        counted = any(loss.reference.startswith(SMALLER) for loss in (*legs.losses[leg], *legs.losses[parent]))
        if built.transition is None and not counted and min(own, other) < SAME_AREA * max(own, other):
            toward = layout.topology.legs[parent].owner
            text = (
                f"its size differs from that of {_plain(repr(toward))} and no transition is stated, its loss is not "
                'counted; state transition = "abrupt", or its included angle'
            )
            yield note("area-change", text, (*owner.path, "transition"))


def _flexible(run: Computed) -> Iterator[Finding]:
    low, high = FLEXIBLE_DIAMETERS
    for leg in range(len(run.layout.legs)):
        owner, built = _owner(run, leg)
        diameter = float(run.layout.legs.diameter[leg])
        if math.isnan(diameter) or built.line is None or not built.line.flexible:
            continue
        if not low - 1e-9 <= diameter <= high + 1e-9 or built.compression > FLEXIBLE_COMPRESSION[1] + 1e-9:
            text = "flexible duct was measured from 150 to 250 mm and up to 30 % compression; this is extrapolated"
            yield warning("flexible", text, (*owner.path, "size"))


def _terminals(run: Computed) -> Iterator[Finding]:
    terminals, drops = run.layout.terminals, run.drops
    required = run.circuits.required[terminals.zone]
    with np.errstate(invalid="ignore"):
        left = np.flatnonzero(run.take_up.excess > SMALL + 1e-9 * required).tolist()
        gaining = np.flatnonzero(drops.terminal_drop < 0.0).tolist()
    balanced = {use.number for use in run.layout.devices if use.terminal}
    for number in left:
        terminal = run.layout.description.terminals[terminals.ids[number]]
        what = "its device can't take it up" if number in balanced else "no device takes it up"
        path: Path = (*terminal.path, "balance")
        figure = (float(run.take_up.excess[number]), "pressure")
        yield warning("excess", f"{{0}} remains and {what}; the terminal is over-supplied", path, figure)
    for number in gaining:
        terminal = run.layout.description.terminals[terminals.ids[number]]
        yield warning(
            "extract-gain",
            "the static drop is less than the velocity pressure in the neck; check both",
            (*terminal.path, "static_drop"),
        )


def _devices(run: Computed) -> Iterator[Finding]:
    layout = run.layout
    for number, use in enumerate(layout.devices):
        path: Path = (*_device_owner(run, number), "balance")
        drop = float(run.drops.device_base[number] + run.take_up.taken[number])
        adjusted = adjust(layout, run.drops, number, drop)
        table = use.device.kv or use.device.k
        if table and use.device.holds is None and adjusted.setting is None and not math.isnan(drop):
            yield warning(
                "device-range",
                f"{_quoted(use.device.name)} can't be set to drop {{0}}: outside its setting table; take another size",
                path,
                (drop, "pressure"),
            )
        if adjusted.signal is not None and adjusted.signal < use.least_signal * (1.0 - 1e-9):
            yield warning(
                "signal",
                "the measuring signal, {0}, is below the least that can be read, {1}",
                path,
                (adjusted.signal, "pressure"),
                (use.least_signal, "pressure"),
            )
    if layout.devices:
        for section in layout.description.sections.values():
            if section.run.diversity is not None and section.run.diversity < 1.0:
                text = "settings hold for the diversified flow, not for all terminals at once"
                yield note("settings-diversified", text, (*section.path, "diversity"))


def _device_owner(run: Computed, number: int) -> Path:
    use, description = run.layout.devices[number], run.layout.description
    if use.terminal:
        return description.terminals[run.layout.terminals.ids[use.number]].path
    return description.sections[run.layout.topology.legs[use.number].owner].path


def _authorities(run: Computed, authority: Authorities) -> Iterator[Finding]:
    limits, items = run.layout.description.limits, run.layout.items
    for number, item in enumerate(items.items):
        value, _ = authority.get(int(items.carrier[number]), (None, None))
        if not item.control or value is None:
            continue
        path: Path = (*item.path, "control")
        if value < limits.authority:
            text = f"authority {value:.2f} is below {limits.authority:g} (common practice); a smaller Kv raises it"
            yield warning("authority", text, path)
        elif value < limits.authority_note:
            text = f"authority {value:.2f} is below {limits.authority_note:g}, the value to aim for (common practice)"
            yield note("authority-low", text, path)


def accept(findings: tuple[Finding, ...], description: Description) -> tuple[Finding, ...]:
    """Turn warnings that a section or terminal accepts into notes with the reason; note what was accepted in vain."""
    accepted = {
        (owner.path, code): reason
        for owners in (description.sections, description.terminals, description.links)
        for owner in owners.values()
        for code, reason in owner.accept.items()
    }
    if not accepted:
        return findings
    used: set[tuple[Path, str]] = set()
    settled = []
    for finding in findings:
        key = (finding.path[:2], finding.code)
        if finding.level != "error" and key in accepted:
            used.add(key)
            reason = _plain(accepted[key]) if finding.figures else accepted[key]
            message = f"{finding.message} (accepted: {reason})"
            finding = note(finding.code, message, finding.path, *finding.figures)
        settled.append(finding)
    for path, code in (key for key in accepted if key not in used):
        settled.append(note("accept-unused", f"{code!r} was accepted here and does not occur", (*path, "accept", code)))
    return tuple(settled)


def _quoted(name: str) -> str:
    return _plain(repr(name))


def _plain(text: str) -> str:
    """Return a text of the file's own as a part of a sentence with figures."""
    return text.replace("{", "{{").replace("}", "}}")
