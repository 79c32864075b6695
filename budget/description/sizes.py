"""Sizes as the trade writes them: a pipe size of its line, a bore, a round, rectangular or flat oval duct."""

from __future__ import annotations

import re
from typing import Any

from budget.catalogue import is_standard_rectangle, is_standard_round, pipe_line, standard_sizes
from budget.description.finding import Path, note
from budget.description.model import Geometry, Line
from budget.description.values import Reading, nearest
from budget.units import Dimension, UnitError, bare, bare_unit, parse

_BARE = re.compile(r"\s*[0-9]+(\.[0-9]*)?\s*", re.ASCII)
_RECTANGLE = re.compile(r"\s*(oval\s+)?([0-9.]+)\s*[x×X]\s*([0-9.]+)\s*(mm|in|cm|m)?\s*", re.ASCII)


def read_pipe_size(reading: Reading, value: str | float, line: Line, path: Path) -> Geometry | None:
    """Find a size in the pipe's line; an error lists the nearest three where the line lacks it."""
    text = _with_unit(value, reading)
    if line.own_sizes:
        return _own_size(reading, text, line, path)
    listed = pipe_line(line.catalogue) if line.catalogue else None
    if listed is None:
        if not line.catalogue:
            reading.wrong("unknown-size", f"the pipe {line.name!r} lists no sizes; state bore, or give it sizes", path)
        return None
    found = listed.find(text)
    if found is None:
        near = ", ".join(listed.nearest(text, 3))
        reading.wrong("unknown-size", f"{text!r} is not a size of {listed.name}; the nearest are {near}", path)
        return None
    return Geometry("round", found.bore, found.bore, found.nominal, found.written)


def _with_unit(value: str | float, reading: Reading) -> str:
    """Return a size as text; a bare number is in mm, in an IP design a nominal size in inches."""
    text = value if isinstance(value, str) else f"{value:g}"
    if _BARE.fullmatch(text) is None:
        return text
    return f"NPS {text.strip()}" if reading.units == "IP" else f"{text.strip()} mm"


def _own_size(reading: Reading, text: str, line: Line, path: Path) -> Geometry | None:
    wanted = _plain(text)
    for written, bore in line.own_sizes.items():
        if _plain(written) == wanted:
            return Geometry("round", bore, bore, nominal_of(written, bore), written)
    known = nearest(text, line.own_sizes, 3)
    reading.wrong("unknown-size", f"{text!r} is not a size of the pipe {line.name!r}; {known}", path)
    return None


def _plain(text: str) -> str:
    return "".join(text.split()).casefold()


def nominal_of(written: str, bore: float) -> float:
    """Return the nominal size that a written size names (DN40, 54 mm, NPS 1-1/2), or the bore where it names none."""
    text = _plain(written)
    try:
        if text.startswith("dn"):
            return float(text[2:]) / 1000.0
        if text.startswith("nps"):
            whole, _, part = text[3:].rpartition("-")
            top, _, bottom = part.partition("/")
            return (float(whole or 0) + float(top) / float(bottom or 1)) * 0.0254
        return float(parse(text, Dimension.LENGTH).value)
    except (ValueError, ZeroDivisionError):
        return bore


def read_duct_size(reading: Reading, value: Any, path: Path, *, remark: bool = True) -> Geometry | None:
    """Read "250 mm" (round), "600x300" (rectangular) or "oval 800x250"; bare numbers in mm, in an IP design in inch."""
    unit = bare_unit(Dimension.LENGTH, reading.units, gas=reading.gas, small=True)
    geometry = _rectangle_or_oval(value, unit) if isinstance(value, str) else None
    if geometry is None:
        try:
            if isinstance(value, str):
                bore = parse(value, Dimension.LENGTH, default_unit=unit).value
            else:
                bore = bare(value, Dimension.LENGTH, unit).value
        except (UnitError, TypeError, AttributeError):
            reading.wrong("size", f'{value!r} is not a duct size; write "250 mm", "600x300" or "oval 800x250"', path)
            return None
        geometry = Geometry("round", bore, bore, bore, str(value))
    if not (0.0 < geometry.height <= 20.0 and 0.0 < geometry.width <= 20.0):
        reading.wrong("range", f"{value!r} is out of range; each side must be above 0 and at most 20 m", path)
        return None
    if remark and not _standard(geometry, reading):
        near = ", ".join(_nearest_standard(geometry, reading))
        reading.findings.append(
            note("duct-size", f"{value} is off the standard grid; the nearest standard sizes are {near}", path)
        )
    return geometry


def _rectangle_or_oval(value: str, unit: str) -> Geometry | None:
    found = _RECTANGLE.fullmatch(value)
    if found is None:
        return None
    oval, width, height, stated = found.groups()
    try:
        scale = parse(f"1 {stated or unit}", Dimension.LENGTH).value
        wide, high = float(width) * scale, float(height) * scale
    except ValueError:
        return None
    return Geometry("oval" if oval else "rectangular", wide, high, max(wide, high), value.strip())


def _nearest_standard(geometry: Geometry, reading: Reading) -> list[str]:
    """Return the nearest standard sizes as one would write them."""
    unit = bare_unit(Dimension.LENGTH, reading.units, gas=reading.gas, small=True)
    scale = bare(1, Dimension.LENGTH, unit).value

    def near(length: float, sides: tuple[float, ...], count: int) -> list[str]:
        chosen = sorted(sides, key=lambda side: abs(side - length))[:count]
        return [f"{side / scale:g}" for side in sorted(chosen)]

    if geometry.shape == "round":
        return [f"{side} {unit}" for side in near(geometry.width, standard_sizes("round", reading.units).sides, 3)]
    grid = standard_sizes("rectangular", reading.units)
    wide, high = geometry.width >= geometry.height, geometry.width < geometry.height
    widths = near(geometry.width, grid.sides if wide else grid.short_sides, 2)
    heights = near(geometry.height, grid.sides if high else grid.short_sides, 2)
    return list(dict.fromkeys(f"{width}x{height}" for width in widths for height in heights))


def _standard(geometry: Geometry, reading: Reading) -> bool:
    if geometry.shape == "round":
        return is_standard_round(geometry.width, reading.units)
    if geometry.shape == "rectangular":
        return is_standard_rectangle(geometry.width, geometry.height, reading.units)
    return True
