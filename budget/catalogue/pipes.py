"""Pipe lines: the sizes of a standard series, their bores and their roughness."""

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from typing import Any, Final

from budget.catalogue.loader import load

# NPS 3/8 to 12 with the DN number beside each (ISO 6708; 5/8 has none, the metric size stands for it).
_DN_OF_NPS: Final = {
    "3/8": 10, "1/2": 15, "5/8": 16, "3/4": 20, "1": 25, "1-1/4": 32, "1-1/2": 40, "2": 50, "2-1/2": 65,
    "3": 80, "3-1/2": 90, "4": 100, "5": 125, "6": 150, "8": 200, "10": 250, "12": 300,
}  # fmt: skip
_SIZE: Final = re.compile(r"(dn|nps)?([0-9]+(?:\.[0-9]+)?(?:(?:-[0-9])?/[1-9][0-9]?)?)(mm)?")


@dataclass(frozen=True, slots=True)
class PipeSize:
    """One size of a line: as written, other ways to write it, nominal size, bore and outside diameter in m.

    The nominal size is the DN number where the line is sold by DN or NPS, else the outside diameter.
    """

    written: str
    other: tuple[str, ...]
    nominal: float
    bore: float
    outside: float


@dataclass(frozen=True, slots=True)
class PipeLine:
    """A line of pipe: sizes in ascending order and the roughness of new pipe in m, both with their source."""

    name: str
    material: str
    roughness: float
    sizes: tuple[PipeSize, ...]
    source: str
    known_from: str
    confidence: str
    roughness_range: tuple[float, float] | None = None
    roughness_source: str = ""
    roughness_known_from: str = ""
    roughness_confidence: str = ""
    note: str = ""

    def find(self, written: str) -> PipeSize | None:
        """The size that `written` names, or None; case and spaces do not matter ("dn 40", "28mm")."""
        wanted = _key(written)
        return next((s for s in self.sizes if any(_key(w) == wanted for w in (s.written, *s.other))), None)

    def nearest(self, written: str, count: int = 3) -> list[str]:
        """The `count` sizes nearest to `written`, ascending; the smallest where it names no size."""
        metres = _nominal(written)
        if metres is None:
            return [size.written for size in self.sizes[:count]]
        by_distance = sorted(self.sizes, key=lambda size: abs(math.log(size.nominal / metres)))
        chosen = by_distance[:count]
        return [size.written for size in self.sizes if size in chosen]


def pipe_line(name: str) -> PipeLine | None:
    """The line of that catalogue name, or None; case and runs of spaces do not matter."""
    row = _rows().get(_fold(name))
    return None if row is None else _build(row["name"])


def pipe_names() -> tuple[str, ...]:
    """Names of all lines, in catalogue order."""
    return tuple(row["name"] for row in load("pipes")["line"])


@cache
def _rows() -> Mapping[str, Mapping[str, Any]]:
    return {_fold(row["name"]): row for row in load("pipes")["line"]}


@cache
def _build(name: str) -> PipeLine:
    row = _rows()[_fold(name)]
    limits = row.get("roughness_range")
    return PipeLine(
        name=row["name"],
        material=row["material"],
        roughness=_metres(row["roughness"]),
        sizes=tuple(
            PipeSize(written, tuple(other), _metres(nominal), _metres(bore), _metres(outside))
            for written, nominal, outside, _, bore, *other in row["sizes"]
        ),
        source=row["source"],
        known_from=row["known_from"],
        confidence=row["confidence"],
        roughness_range=None if limits is None else (_metres(limits[0]), _metres(limits[1])),
        roughness_source=row["roughness_source"],
        roughness_known_from=row["roughness_known_from"],
        roughness_confidence=row["roughness_confidence"],
        note=row.get("note", ""),
    )


def _metres(millimetres: float) -> float:
    """In m, to the nearest 0.1 micrometre, so that 48.3 mm is 0.0483 m to the last bit."""
    return round(millimetres / 1000.0, 7)


def _fold(name: str) -> str:
    return " ".join(name.lower().split())


def _key(written: str) -> tuple[str, str] | str:
    """What makes two spellings of a size the same: system and number; text that is no size stays as it is."""
    text = re.sub(r"(?<=\d)\s+(?=\d+/\d)", "-", written.strip().lower())  # NPS 1 1/2
    text = "".join(text.split())
    match = _SIZE.fullmatch(text)
    if match is None or (match[1] and match[3]) or not (match[1] or match[3]):
        return text
    number = match[2]
    if "/" not in number:
        number = f"{float(number):g}"
    return match[1] or "mm", number


def _nominal(written: str) -> float | None:
    """Nominal size in m of a written size: DN and mm as they stand, NPS by its DN, else by its inches."""
    key = _key(written)
    if isinstance(key, str):
        return None
    system, number = key
    if system == "nps":
        if number in _DN_OF_NPS:
            return _DN_OF_NPS[number] / 1000.0
        whole, _, fraction = number.rpartition("-") if "/" in number else (number, "", "0/1")
        upper, _, lower = fraction.partition("/")
        inches = (float(whole) if whole else 0.0) + float(upper) / float(lower)
        return inches * 0.0254 if inches > 0 else None
    metres = float(number) / 1000.0 if "/" not in number else 0.0
    return metres if metres > 0 else None
