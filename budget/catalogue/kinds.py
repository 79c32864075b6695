"""Fittings by kind and geometry: what parameters each takes, and its loss coefficient in a section.

The data stand in pipe-kinds.toml and duct-kinds.toml. Every kind carries its formula and the range in which it holds,
its source and how that is known, and at least one check value that does not come from this program.
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from types import MappingProxyType
from typing import Any, Final

from budget.catalogue.kind_laws import Law, Place, beyond
from budget.catalogue.loader import load

CARRIERS: Final = ("pipe", "duct")
"""What carries a kind."""
SHAPES: Final = ("round", "rectangular", "oval")
"""Cross-sections of sections."""

_IN_SECTION: Final = "velocity in the section"


@dataclass(frozen=True, slots=True)
class Parameter:
    """A parameter of a kind by its key in the file: a number from `low` to `high` in `unit`, or one of `choices`.

    `unit` is "", "deg", "Pa", "m/s" or "kg/m3". `low` and `high` are None where nothing bounds it; `default` is None
    where it must be stated.
    """

    name: str
    meaning: str
    unit: str
    low: float | None
    high: float | None
    default: float | str | None
    choices: tuple[float | str, ...]


@dataclass(frozen=True, slots=True)
class Check:
    """A published coefficient of a kind: at these parameters, in a section of these sides (m), at this Reynolds number.

    `tolerance` is a share of `value`.
    """

    values: Mapping[str, float | str]
    shape: str
    width: float
    height: float
    nominal: float
    reynolds: float
    value: float
    tolerance: float
    source: str
    known_from: str


@dataclass(frozen=True, slots=True)
class Kind:
    """A kind of fitting; `reference` says which velocity its coefficient is on."""

    name: str
    group: str
    carries: str
    shapes: tuple[str, ...]
    parameters: tuple[Parameter, ...]
    formula: str
    validity: str
    reference: str
    source: str
    known_from: str
    confidence: str
    scatter: str | None
    note: str
    checks: tuple[Check, ...]


@dataclass(frozen=True, slots=True)
class KindCoefficient:
    """Loss coefficient K = constant + per_reynolds/Re + reynolds_corrected x K_Re(Re) of one fitting.

    K_Re is `physics.elbows.reynolds_factor`. `in_range` is False where something lay outside the published figures
    and the nearest was taken; `reason` says what.
    """

    constant: float
    per_reynolds: float
    reynolds_corrected: float
    in_range: bool
    reason: str


def kind(name: str) -> Kind | None:
    """The kind of fitting of that catalogue name, or None; case and runs of spaces do not matter."""
    entry = _kinds().get(_fold(name))
    return None if entry is None else entry[0]


def kind_names(carries: str | None = None) -> tuple[str, ...]:
    """Names of all kinds, in catalogue order; with "pipe" or "duct" of those that it carries."""
    return tuple(entry.name for entry, _ in _kinds().values() if carries in (None, entry.carries))


def kind_coefficient(
    name: str, values: Mapping[str, float | str], *, shape: str, width: float, height: float, nominal: float
) -> KindCoefficient:
    """Loss coefficient of a fitting of the kind `name` in a section.

    `values` holds its parameters in the units that they state; what is not there takes its default. The section has
    that shape ("round", "rectangular", "oval"), sides and nominal size in m; a round one has its bore as width and
    height. Numbers out of a parameter's range are taken at its end, and the result says so.

    Raises LookupError for a kind that is not in the catalogue, ValueError for a parameter that is missing, not known,
    not a finite number or none of the choices, for a shape that the kind has no figures for, and for sizes that are
    not positive.
    """
    entry = _kinds().get(_fold(name))
    if entry is None:
        raise LookupError(f"the catalogue had no kind of fitting {name!r}")
    found, row = entry
    if shape not in found.shapes:
        raise ValueError(f"{found.name} had no figures for a {shape} section, only {', '.join(found.shapes)}")
    if not (0.0 < width < math.inf and 0.0 < height < math.inf and 0.0 < nominal < math.inf):
        raise ValueError(f"{found.name} needs positive sizes, not {width} m, {height} m and {nominal} m")
    complete, outside = _complete(found, values)
    loss = _law(found.carries, row["law"])(complete, Place(shape, width, height, nominal), row)
    outside += loss.outside
    return KindCoefficient(loss.constant, loss.per_reynolds, loss.corrected, not outside, "; ".join(outside))


def _complete(found: Kind, values: Mapping[str, float | str]) -> tuple[dict[str, float | str], tuple[str, ...]]:
    """Every parameter with its value within range, and what lay outside."""
    names = [parameter.name for parameter in found.parameters]
    if unknown := [name for name in values if name not in names]:
        known = f"known are {', '.join(names)}" if names else "it takes none"
        raise ValueError(f"{found.name} had no parameter {unknown[0]!r}; {known}")
    complete: dict[str, float | str] = {}
    outside: tuple[str, ...] = ()
    for parameter in found.parameters:
        value = values.get(parameter.name, parameter.default)
        if value is None:
            raise ValueError(f"{found.name} needs {parameter.name}: {parameter.meaning}")
        if parameter.choices:
            if value not in parameter.choices:
                listed = ", ".join(str(choice) for choice in parameter.choices)
                raise ValueError(f"{parameter.name} of {found.name} was {value!r}; it is one of {listed}")
            complete[parameter.name] = value
            continue
        if isinstance(value, str) or not math.isfinite(value):
            raise ValueError(f"{parameter.name} of {found.name} was {value!r}, not a finite number")
        low = -math.inf if parameter.low is None else parameter.low
        high = math.inf if parameter.high is None else parameter.high
        unit = f" {parameter.unit}" if parameter.unit else ""
        outside += beyond(parameter.name, value, low, high, unit)
        complete[parameter.name] = min(max(float(value), low), high)
    return complete, outside


def _law(carries: str, name: str) -> Law:
    """The function that works out a kind's coefficient; read when the first is asked for, as few runs need one."""
    from budget.catalogue import duct_kinds, pipe_kinds  # noqa: PLC0415

    laws = {"pipe": pipe_kinds.LAWS, "duct": duct_kinds.LAWS}
    return laws[carries][name]


@cache
def _kinds() -> Mapping[str, tuple[Kind, Mapping[str, Any]]]:
    """Kinds with their rows by folded name, pipe fittings first."""
    rows = [(carries, row) for carries in CARRIERS for row in load(f"{carries}-kinds")["kind"]]
    return {_fold(row["name"]): (_build(carries, row), row) for carries, row in rows}


def _build(carries: str, row: Mapping[str, Any]) -> Kind:
    shapes = row.get("shapes", SHAPES if carries == "duct" else SHAPES[:1])
    return Kind(
        name=row["name"],
        group=row["group"],
        carries=carries,
        shapes=tuple(shapes),
        parameters=tuple(_parameter(parameter) for parameter in row["parameters"]),
        formula=row["formula"],
        validity=row["validity"],
        reference=row.get("reference", _IN_SECTION),
        source=row["source"],
        known_from=row["known_from"],
        confidence=row["confidence"],
        scatter=row.get("scatter"),
        note=row.get("note", ""),
        checks=tuple(_check(check, shapes[0]) for check in row["checks"]),
    )


def _parameter(row: Mapping[str, Any]) -> Parameter:
    return Parameter(
        name=row["name"],
        meaning=row["meaning"],
        unit=row.get("unit", ""),
        low=row.get("low"),
        high=row.get("high"),
        default=row.get("default"),
        choices=tuple(row.get("choices", ())),
    )


def _check(row: Mapping[str, Any], shape: str) -> Check:
    width = row["bore"] if "bore" in row else row["width"]
    return Check(
        values=MappingProxyType(row.get("with", {})),
        shape=row.get("shape", shape),
        width=width / 1000.0,
        height=row.get("height", width) / 1000.0,
        nominal=row.get("nominal", width) / 1000.0,
        reynolds=row.get("reynolds", 1e6),
        value=row["k"],
        tolerance=row["tolerance"],
        source=row["source"],
        known_from=row["known_from"],
    )


def _fold(name: str) -> str:
    return " ".join(name.lower().split())
