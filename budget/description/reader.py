"""From the text of a file to the run that it describes, with everything that is wrong with it at once."""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping, Sequence
from typing import Any

from budget.description.finding import Finding, Path, warning
from budget.description.ids import check_ids, file_order, ids_of, kept_apart
from budget.description.libraries import Library, Tables, add_libraries
from budget.description.lines import read_lines
from budget.description.model import Description, Design, Fluid, Limits
from budget.description.parts import read_link, read_section, read_source, read_terminal
from budget.description.schema import CLASSES, SINGLE, TOP
from budget.description.scope import Scope
from budget.description.source import Source
from budget.description.tables import case as read_case
from budget.description.tables import check_format, device, keyed, own_fitting, single
from budget.description.values import Reading, nearest
from budget.units import Dimension, UnitError, parse


def describe(source: Source, libraries: Sequence[Library] = ()) -> Description:
    """Read a run from its text, with the libraries that it names.

    Nothing is raised: what can't be read is None, and a finding says why. A library that the run names and that is not
    among those handed over is a finding too.
    """
    if source.data is None:
        return Description(findings=source.findings)
    data = source.data
    reading = Reading(findings=list(source.findings))
    _check_top(reading, data)
    design, fluid = _design_and_fluid(reading, data)
    own = Tables(
        read_lines(reading, data),
        keyed(reading, data, "fitting", own_fitting),
        keyed(reading, data, "device", device),
    )
    tables = add_libraries(reading, source, own, libraries)
    scope = Scope(
        reading=reading,
        lines=tables.lines,
        own_fittings=tables.fittings,
        devices=tables.devices,
        defaults=single(reading, data, "defaults"),
    )
    scope.check_defaults()
    ids = ids_of(data)
    description = Description(
        design=design,
        display=_display(reading, data),
        fluid=fluid,
        limits=_limits(single(reading, data, "limits")),
        budget=single(reading, data, "budget"),
        lines=tables.lines,
        fittings=tables.fittings,
        devices=tables.devices,
        sources=keyed(reading, data, "source", read_source, scope),
        sections=kept_apart(ids, keyed(reading, data, "section", read_section, scope)),
        terminals=kept_apart(ids, keyed(reading, data, "terminal", read_terminal, scope)),
        links=keyed(reading, data, "link", read_link, scope),
        cases=keyed(reading, data, "case", read_case),
        order=file_order(ids, source),
    )
    check_ids(reading, source, data)
    _check_sensors(reading, description)
    _check_cases(reading, description)
    _read_later(reading, data)
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
    check_format(reading, data)


def _design_and_fluid(reading: Reading, data: Mapping[str, Any]) -> tuple[Design, Fluid]:
    design_values = single(reading, data, "design")
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
    shown = single(reading, data, "display")
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


def _check_sensors(reading: Reading, description: Description) -> None:
    known = {**description.sections, **description.terminals}
    for source in description.sources.values():
        if source.sensor is not None and source.sensor not in known:
            text = f"{source.sensor!r} is neither a section nor a terminal; {nearest(source.sensor, known)}"
            reading.wrong("dangling", text, (*source.path, "sensor"))


def _read_later(reading: Reading, data: Mapping[str, Any]) -> None:
    """Say of the table that is read but not computed yet that it is not."""
    if single(reading, data, "sizing") or "sizing" in data:
        reading.later("sizing", ("sizing",))


def _check_cases(reading: Reading, description: Description) -> None:
    """Find what a case names and the run does not have."""
    order = dict.fromkeys(description.order)
    for case in description.cases.values():
        named: list[tuple[Path, str]] = [(("off", place), name) for place, name in enumerate(case.off)]
        named += [(("share", name), name) for name in case.share]
        named += [(("stroke", name), name) for name in case.stroke]
        named += [(("source", name), name) for name in case.sources]
        for where, name in named:
            among = description.sources if where[0] == "source" else order
            if name not in among:
                hint = nearest(name, among)
                reading.wrong("dangling", f"{name!r} is not an ID of this run; {hint}", (*case.path, *where))
