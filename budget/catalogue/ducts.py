"""Duct lines with their roughness, and the standard sizes of ductwork."""

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any, Final, Literal

from budget.catalogue.loader import load

System = Literal["SI", "IP"]
"""Which standard sizes: metric (EN 1505, EN 1506) or inch."""

_UNIT: Final = {"mm": 0.001, "in": 0.0254}
# A size typed in the other system, or rounded in a drawing, is still the standard one.
_TOLERANCE: Final = 0.0005


@dataclass(frozen=True, slots=True)
class DuctLine:
    """A kind of duct: absolute roughness in m (of flexible duct: fully stretched), with its source."""

    name: str
    flexible: bool
    roughness: float
    roughness_range: tuple[float, float]
    note: str
    source: str
    known_from: str
    confidence: str


@dataclass(frozen=True, slots=True)
class StandardSizes:
    """A standard grid of sizes, m. Round: `sides` are diameters and `short_sides` is empty."""

    sides: tuple[float, ...]
    short_sides: tuple[float, ...]
    greatest_aspect: float | None
    note: str
    source: str
    known_from: str
    confidence: str


def duct_line(name: str) -> DuctLine | None:
    """The duct of that catalogue name, or None; case and runs of spaces do not matter."""
    return _lines().get(" ".join(name.lower().split()))


def duct_names() -> tuple[str, ...]:
    """Names of all duct lines, in catalogue order."""
    return tuple(line.name for line in _lines().values())


@cache
def standard_sizes(shape: Literal["round", "rectangular"], system: System) -> StandardSizes:
    """The standard grid of round or rectangular duct; of flat oval there is none in the catalogue."""
    row = load("ducts")[shape][system]
    if shape == "round":
        sides, short = sorted(row["preferred"] + row["additional"]), []
    elif "even" in row:
        sides = short = list(range(row["even"]["least"], row["even"]["greatest"] + 1, row["even"]["step"]))
    else:
        sides, short = row["long_side"], row["short_side"]
    unit = _UNIT[row["unit"]]
    return StandardSizes(
        sides=tuple(side * unit for side in sides),
        short_sides=tuple(side * unit for side in short),
        greatest_aspect=row.get("greatest_aspect"),
        note=row.get("note", ""),
        source=row["source"],
        known_from=row["known_from"],
        confidence=row["confidence"],
    )


def is_standard_round(diameter: float, system: System = "SI") -> bool:
    """Whether `diameter` in m is a standard round size (within 0.5 mm)."""
    return _among(diameter, standard_sizes("round", system).sides)


def is_standard_rectangle(width: float, height: float, system: System = "SI") -> bool:
    """Whether sides in m, either way round, stand on the standard grid (each within 0.5 mm)."""
    grid = standard_sizes("rectangular", system)
    short, long = min(width, height), max(width, height)
    if not (_among(long, grid.sides) and _among(short, grid.short_sides)):
        return False
    return grid.greatest_aspect is None or long <= grid.greatest_aspect * short + _TOLERANCE


def nearest_round(diameter: float, system: System = "SI", count: int = 3) -> list[float]:
    """The `count` standard round sizes nearest to `diameter`, ascending; all in m."""
    sides = standard_sizes("round", system).sides
    return sorted(sorted(sides, key=lambda side: abs(side - diameter))[:count])


@cache
def _lines() -> Mapping[str, DuctLine]:
    return {row["name"].lower(): _build(row) for row in load("ducts")["line"]}


def _build(row: Mapping[str, Any]) -> DuctLine:
    low, high = row["roughness_range"]
    return DuctLine(
        name=row["name"],
        flexible=row.get("flexible", False),
        roughness=round(row["roughness"] / 1000.0, 7),
        roughness_range=(low / 1000.0, high / 1000.0),
        note=row.get("note", ""),
        source=row["source"],
        known_from=row["known_from"],
        confidence=row["confidence"],
    )


def _among(value: float, sizes: tuple[float, ...]) -> bool:
    return any(abs(value - size) <= _TOLERANCE for size in sizes)
