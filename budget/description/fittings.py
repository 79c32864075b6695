"""The fittings of a run: counted by name, or of a kind with parameters; and what it is at the junction it hangs on."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from budget.catalogue import Kind, Parameter, kind, kind_names
from budget.description.finding import Path
from budget.description.model import FittingCount, FittingUse, Line
from budget.description.schema import FITTING_USE, Choice, Measure, Number, Spec
from budget.description.scope import Scope
from budget.description.values import nearest
from budget.units import Basis, Dimension, Quantity

_DIMENSIONS = {
    "deg": Dimension.ANGLE,
    "Pa": Dimension.PRESSURE,
    "m/s": Dimension.VELOCITY,
    "kg/m3": Dimension.DENSITY,
    "m": Dimension.LENGTH,
}
"""What a parameter of a kind measures, by the unit that the kind states."""


def read_fittings(
    scope: Scope, values: Mapping[str, Any], line: Line | None, path: Path
) -> tuple[tuple[FittingCount, ...], tuple[FittingUse, ...]]:
    """Read `fittings` and `[[..fitting]]`. A kind that takes no parameters may stand in either."""
    counts, uses = [], []
    for name, count in values.get("fittings", {}).items():
        place: Path = (*path, "fittings", name)
        if scope.known_fitting(name):
            counts.append(FittingCount(name, count, place))
        elif (found := kind(name)) is not None:
            if _complete(scope, found, {}, place) and _fits(scope, found, line, place):
                uses.append(FittingUse(found.name, count, {}, place))
        else:
            hint = scope.nearest_fitting(name, kind_names())
            scope.reading.wrong("unknown-fitting", f"{name!r} is not a fitting known here; {hint}", place)
    for number, entry in enumerate(values.get("fitting", ())):
        where: Path = (*path, "fitting", number)
        name = entry.get("kind")
        if name is None:
            if not scope.reading.faulty((*where, "kind")):
                scope.reading.wrong("missing", 'the fitting has no kind; write kind = "..."', where)
            continue
        count = entry.get("count", 1)
        found = kind(name) if name not in scope.own_fittings else None
        if found is not None:
            parameters = _parameters(scope, found, entry, where)
            if parameters is not None and _fits(scope, found, line, (*where, "kind")):
                uses.append(FittingUse(found.name, count, parameters, (*where, "kind")))
        elif scope.known_fitting(name):
            scope.reading.table(entry, FITTING_USE, where, "a fitting without parameters")
            counts.append(FittingCount(name, count, (*where, "kind")))
        else:
            hint = scope.nearest_fitting(name, kind_names())
            scope.reading.wrong("unknown-fitting", f"{name!r} is not a kind of fitting; {hint}", (*where, "kind"))
    return tuple(counts), tuple(uses)


def _parameters(scope: Scope, found: Kind, entry: Mapping[str, Any], path: Path) -> dict[str, float | str] | None:
    """Read the parameters of a fitting by those that its kind takes; None with a finding where one is wrong."""
    specs = {parameter.name: _spec(parameter) for parameter in found.parameters}
    given = {key: value for key, value in entry.items() if key not in FITTING_USE}
    read = scope.reading.table(given, specs, path, f"the fitting {found.name!r}")
    for parameter in found.parameters:
        value = read.get(parameter.name)
        if parameter.choices and value is not None and value not in parameter.choices:
            listed = ", ".join(f"{choice:g}" for choice in parameter.choices if not isinstance(choice, str))
            text = f"{parameter.name} {value:g} is not one of the choices; known are {listed}"
            scope.reading.wrong("choice", text, (*path, parameter.name))
            read.pop(parameter.name)
        if isinstance(value, Quantity) and value.basis is not Basis.PLAIN:
            text = f"{parameter.name} is a head, of which liquid is not known; write a pressure such as 30 Pa"
            scope.reading.wrong("wrong-dimension", text, (*path, parameter.name))
            read.pop(parameter.name)
    if len(read) < len(given) or not _complete(scope, found, given, path):
        return None
    return {key: value.value if isinstance(value, Quantity) else value for key, value in read.items()}


def _spec(parameter: Parameter) -> Spec:
    words = tuple(choice for choice in parameter.choices if isinstance(choice, str))
    if words:
        return Choice(words)
    dimension = _DIMENSIONS.get(parameter.unit)
    # Beyond its published range a parameter is a finding of its own, not an error.
    return Number() if dimension is None else Measure(dimension)


def _complete(scope: Scope, found: Kind, given: Mapping[str, Any], path: Path) -> bool:
    lacking = [p for p in found.parameters if p.default is None and p.name not in given]
    for parameter in lacking:
        text = f"the fitting {found.name!r} needs {parameter.name}: {parameter.meaning}; state it in [[..fitting]]"
        scope.reading.wrong("missing", text, path)
    return not lacking


def _fits(scope: Scope, found: Kind, line: Line | None, path: Path) -> bool:
    if line is None or line.kind == found.carries:
        return True
    others = nearest(found.name, kind_names(line.kind), 3)
    text = f"{found.name!r} is a fitting of a {found.carries}, this is a {line.kind}; {others}"
    scope.reading.wrong("unknown-fitting", text, path)
    return False


def check_leakage(scope: Scope, values: Mapping[str, Any], line: Line | None, path: Path) -> str | None:
    """Return the tightness class of a duct; an error where a pipe states one."""
    if "leakage" in values and line is not None and line.kind != "duct":
        scope.reading.wrong("contradiction", "leakage belongs to ducts; remove it", (*path, "leakage"))
        return None
    found: str | None = values.get("leakage")
    return found


def check_takeoff(scope: Scope, values: Mapping[str, Any], path: Path) -> None:
    """Find a junction that would be counted twice: by `takeoff` and by a tee among the fittings."""
    takeoff = values.get("takeoff", scope.defaults.get("takeoff"))
    if takeoff not in ("straight", "branch"):
        return
    remedy = "keep one" if "takeoff" in values else 'remove it, or state takeoff = "none" here'
    places: list[tuple[str, Path]] = [(name, ("fittings", name)) for name in values.get("fittings", {})]
    entries = enumerate(values.get("fitting", ()))
    places += [(entry.get("kind", ""), ("fitting", number, "kind")) for number, entry in entries]
    for name, place in places:
        if name.startswith("tee "):
            text = f"takeoff {takeoff!r} and the fitting {name!r} would count the junction twice; {remedy}"
            scope.reading.wrong("contradiction", text, (*path, *place))
            return
