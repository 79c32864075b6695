"""From the text of a file to the run that it describes, with everything that is wrong with it at once."""

from __future__ import annotations

import dataclasses
import unicodedata
from collections.abc import Callable, Mapping
from itertools import pairwise
from typing import Any

from budget.catalogue import fitting_names
from budget.description.finding import Finding, Path, dotted, warning
from budget.description.lines import read_lines
from budget.description.model import (
    Description,
    Design,
    Device,
    Fluid,
    Limits,
    OwnFitting,
)
from budget.description.parts import read_section, read_source, read_terminal
from budget.description.schema import CLASSES, FORMAT, KEYED, SINGLE, TOP
from budget.description.scope import Scope
from budget.description.source import Source
from budget.description.values import Reading, nearest, what_is
from budget.physics.fittings import CV_PER_KV
from budget.units import Dimension, UnitError, parse


def describe(source: Source) -> Description:
    """Read a run from its text. Nothing is raised: what can't be read is None, and a finding says why."""
    if source.data is None:
        return Description(findings=source.findings)
    data = source.data
    reading = Reading(findings=list(source.findings))
    _check_top(reading, data)
    design, fluid = _design_and_fluid(reading, data)
    lines = read_lines(reading, data)
    scope = Scope(
        reading=reading,
        lines=lines,
        own_fittings=_keyed(reading, data, "fitting", _own_fitting),
        devices=_keyed(reading, data, "device", _device),
        defaults=_single(reading, data, "defaults"),
    )
    scope.check_defaults()
    description = Description(
        design=design,
        display=_display(reading, data),
        fluid=fluid,
        limits=_limits(_single(reading, data, "limits")),
        budget=_single(reading, data, "budget"),
        lines=lines,
        fittings=scope.own_fittings,
        devices=scope.devices,
        sources=_keyed(reading, data, "source", read_source, scope),
        sections=_keyed(reading, data, "section", read_section, scope),
        terminals=_keyed(reading, data, "terminal", read_terminal, scope),
        order=_order(source, data),
    )
    _check_ids(reading, source, data)
    _check_sensors(reading, description)
    _read_later(reading, data, description)
    if not data.get("source"):
        reading.wrong("missing", "the run has no source; add [source.P1], the pump or fan", ("source",))
    return _with_findings(description, tuple(reading.findings))


def _with_findings(description: Description, findings: tuple[Finding, ...]) -> Description:
    return dataclasses.replace(description, findings=findings)


def _check_top(reading: Reading, data: Mapping[str, Any]) -> None:
    for key in data:
        if key not in TOP:
            code = "unknown-table" if isinstance(data[key], dict | list) else "unknown-key"
            what = "a table of this format" if code == "unknown-table" else "a key that stands before the tables"
            reading.wrong(code, f"{key!r} is not {what}; {nearest(key, TOP)}", (key,))
    stated = data.get("format")
    if stated is None:
        reading.wrong("format", f"the format is not stated; write format = {FORMAT} as the first line", ())
    elif stated != FORMAT or isinstance(stated, bool):
        reading.wrong("format", f"{what_is(stated)} is no format known here; write format = {FORMAT}", ("format",))
    elif next(iter(data)) != "format":
        reading.findings.append(warning("format", "format should be the first line; move it up", ("format",)))


def _single(reading: Reading, data: Mapping[str, Any], table: str) -> dict[str, Any]:
    return reading.table(data[table], SINGLE[table], (table,)) if table in data else {}


def _keyed(
    reading: Reading,
    data: Mapping[str, Any],
    table: str,
    build: Callable[..., Any],
    *context: Any,
) -> dict[str, Any]:
    entries = data.get(table, {})
    if not isinstance(entries, dict):
        reading.wrong("type", f"{table} must hold tables with an ID each; write [{table}.ID]", (table,))
        return {}
    built = {}
    for id_, entry in entries.items():
        path: Path = (table, id_)
        if not isinstance(entry, dict):
            reading.wrong("type", f"{id_!r} must be a table; write [{dotted(path)}], or correct the key", path)
            continue
        values = reading.table(entry, KEYED[table], path)
        built[id_] = build(reading, id_, values, path, *context)
    return built


def _design_and_fluid(reading: Reading, data: Mapping[str, Any]) -> tuple[Design, Fluid]:
    design_values = _single(reading, data, "design")
    design = Design(**design_values)
    reading.units = design.units
    fluid_data = data.get("fluid")
    if not isinstance(fluid_data, dict):
        reading.wrong("missing", 'the fluid is not stated; add [fluid] with name = "water" or "air"', ("fluid",))
        fluid_data = {}
    # Bare numbers in the fluid table have the same units for a liquid and a gas, so it can be read first.
    values = reading.table(fluid_data, SINGLE["fluid"], ("fluid",))
    fluid = Fluid(**values)
    reading.gas = fluid.gas
    if fluid_data:
        _check_fluid(reading, fluid, fluid_data)
    return design, fluid


def _check_fluid(reading: Reading, fluid: Fluid, stated: Mapping[str, Any]) -> None:
    def need(key: str, remedy: str) -> None:
        if key not in stated:
            reading.wrong("missing", f"{key} is not stated; {remedy}", ("fluid", key))

    def idle(key: str, who: str) -> None:
        if key in stated:
            reading.findings.append(warning("unused-key", f"{key} is read for {who} only; remove it", ("fluid", key)))

    need("name", 'write name = "water", "air" or another of the fluids')
    glycol = fluid.name in ("propylene glycol", "ethylene glycol")
    if glycol:
        need("concentration", 'write concentration = "30 %"')
        need("concentration_by", 'write concentration_by = "mass" or "volume"')
    elif fluid.name:
        idle("concentration", "glycols")
        idle("concentration_by", "glycols")
    if fluid.name == "custom":
        need("density", 'write density = "998 kg/m3"')
        need("viscosity", 'write viscosity = "1.0 mPa s"')
    elif fluid.name:
        need("temperature", 'write temperature = "70 degC"')
        for key in ("density", "viscosity", "specific_heat"):
            idle(key, "a custom fluid")
    if fluid.name and fluid.name != "air":
        idle("humidity", "air")
        idle("altitude", "air")


def _display(reading: Reading, data: Mapping[str, Any]) -> dict[str, str]:
    shown = _single(reading, data, "display")
    good = {}
    for key, unit in shown.items():
        try:
            parse(f"1 {unit}", Dimension(key))
        except UnitError as refused:
            reading.wrong(refused.code, f"{unit!r} is not a unit for {key}; {refused.remedy}", ("display", key))
        else:
            good[key] = unit
    return good


def _limits(values: dict[str, Any]) -> Limits:
    classes: dict[str, dict[str, float]] = {name: values.pop(name) for name in CLASSES if name in values}
    return Limits(classes=classes, **values)


def _own_fitting(reading: Reading, id_: str, values: dict[str, Any], path: Path) -> OwnFitting:
    if "k" not in values and not reading.faulty((*path, "k")):
        reading.wrong("missing", f"the fitting {id_!r} has no loss coefficient; write k = 0.75", path)
    if id_ in fitting_names():
        reading.wrong(
            "contradiction", f"{id_!r} is a fitting of the catalogue too; give one's own another name", path
        )
    return OwnFitting(id_, values.get("k", float("nan")), values.get("source", ""))


def _device(reading: Reading, id_: str, values: dict[str, Any], path: Path) -> Device:
    tables = [key for key in ("kv", "cv", "k") if key in values]
    if len(tables) > 1:
        reading.wrong("contradiction", f"{' and '.join(tables)} are both stated; keep one", (*path, tables[1]))
    kv = values.get("kv", ())
    if "cv" in values:
        kv = tuple((setting, cv / CV_PER_KV) for setting, cv in values["cv"])
    holds = values.get("holds")
    if not tables and holds is None and not any(reading.faulty((*path, key)) for key in ("kv", "cv", "k", "holds")):
        reading.wrong("missing", f"the device {id_!r} has no setting table; write kv, cv, k or holds", path)
    if holds is not None and "least_drop" not in values and not tables and not reading.faulty(path):
        reading.findings.append(
            warning("no-drop", f"the device {id_!r} has no least_drop; its base drop counts as nothing", path)
        )
    for key, owner in (("greatest_drop", "flow"), ("set_point", "differential")):
        if key in values and holds != owner and not reading.faulty((*path, "holds")):
            reading.wrong("contradiction", f'{key} belongs to holds = "{owner}"; remove it', (*path, key))
    least, greatest = values.get("least_drop"), values.get("greatest_drop")
    if least and greatest and least.basis is greatest.basis and greatest.value < least.value:
        reading.wrong("contradiction", "greatest_drop is below least_drop; correct one", (*path, "greatest_drop"))
    for key in tables:
        curve = [second for _, second in values[key]]
        steps = [later - earlier for earlier, later in pairwise(curve)]
        if steps and not (all(step > 0 for step in steps) or all(step < 0 for step in steps)):
            reading.wrong("order", f"{key} must rise or fall all the way; correct the table", (*path, key))
    return Device(
        name=id_,
        kv=kv,
        k=values.get("k", ()) if not kv else (),
        **{
            key: values[key]
            for key in ("signal_kv", "least_signal", "least_drop", "greatest_drop", "holds", "set_point")
            if key in values
        },
    )


def _order(source: Source, data: Mapping[str, Any]) -> tuple[str, ...]:
    places: list[tuple[int, int, str]] = []
    for table in ("source", "section", "terminal"):
        entries = data.get(table, {})
        for id_ in entries if isinstance(entries, dict) else ():
            span = source.spans.key((table, id_))
            places.append((span.start if span else 0, len(places), id_))
    return tuple(dict.fromkeys(id_ for _, _, id_ in sorted(places)))


def _check_ids(reading: Reading, source: Source, data: Mapping[str, Any]) -> None:
    seen: dict[str, Path] = {}
    for table in KEYED:
        entries = data.get(table, {})
        for id_ in entries if isinstance(entries, dict) else ():
            path: Path = (table, id_)
            if not id_.strip() or len(id_) > 100:
                reading.wrong("id", "an ID has 1 to 100 characters, not all blank; rename it", path)
            if any(unicodedata.category(c) in ("Cc", "Cf", "Cs", "Zl", "Zp") for c in id_):
                reading.wrong("control-character", "the ID has a control character; rename it without", path)
            if table not in ("source", "section", "terminal"):
                continue
            if id_ in seen:
                line, _ = source.locate(seen[id_])
                reading.wrong("duplicate-id", f"{id_!r} is already the {seen[id_][0]} in line {line}; rename one", path)
            seen.setdefault(id_, path)


def _check_sensors(reading: Reading, description: Description) -> None:
    known = [*description.sections, *description.terminals]
    for source in description.sources.values():
        if source.sensor is not None and source.sensor not in known:
            text = f"{source.sensor!r} is neither a section nor a terminal; {nearest(source.sensor, known)}"
            reading.wrong("dangling", text, (*source.path, "sensor"))


def _read_later(reading: Reading, data: Mapping[str, Any], description: Description) -> None:
    """Say of every table that is read but not computed yet that it is not."""

    if "library" in data:
        library = data["library"]
        if not isinstance(library, list) or not all(isinstance(name, str) for name in library):
            reading.wrong("type", 'library must be a list of paths; write ["../office/valves.toml"]', ("library",))
        reading.later("a library", ("library",))
    sizing = _single(reading, data, "sizing")
    if sizing or "sizing" in data:
        reading.later("sizing", ("sizing",))
    known = dict.fromkeys(description.order)
    for id_, link in _keyed(reading, data, "link", lambda _r, _i, values, _p: values).items():
        for key in ("from", "to"):
            if key not in link:
                reading.wrong("missing", f"{key} is not stated; name the section that the link joins", ("link", id_))
            elif link[key] not in description.sections:
                hint = nearest(link[key], description.sections)
                reading.wrong("dangling", f"{link[key]!r} is not a section; {hint}", ("link", id_, key))
        reading.later("a link", ("link", id_))
    for id_, case in _keyed(reading, data, "case", lambda _r, _i, values, _p: values).items():
        named = [(("off", place), name) for place, name in enumerate(case.get("off", ()))]
        named += [((key, name), name) for key in ("share", "stroke", "source") for name in case.get(key, {})]
        for where, name in named:
            among = description.sources if where[0] == "source" else known
            if name not in among:
                hint = nearest(name, among)
                reading.wrong("dangling", f"{name!r} is not an ID of this run; {hint}", ("case", id_, *where))
        reading.later("a case", ("case", id_))
