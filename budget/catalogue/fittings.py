"""Pipe fittings by name: loss coefficients by nominal size, Crane, Darby (3-K) or Hooper (2-K)."""

import math
from bisect import bisect_right
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cache, lru_cache
from typing import Any, Final, NamedTuple

from budget.catalogue.loader import load
from budget.physics.fittings import crane, three_k, two_k

METHODS: Final = ("by size", "crane", "darby", "hooper")
"""Methods that a description may ask for."""
CONSTANT: Final = "constant"
"""Method of entrances and exits: one figure for every size."""
THREADED_TO: Final = 0.050
"""Nominal size in m up to which fittings are taken as threaded; above they are flanged or welded."""

_FALLBACK: Final = ("by size", "crane", "darby", "hooper")
_KEY: Final = {"by size": "by_size", "crane": "crane", "darby": "darby", "hooper": "hooper"}
# Bores of the series differ by a fraction of a per cent from those beside the table of fT.
_END_TOLERANCE: Final = 0.005


@dataclass(frozen=True, slots=True)
class Fitting:
    """A fitting of the catalogue, its figures given by `coefficient`; `scatter` is that of published data."""

    name: str
    methods: tuple[str, ...]
    source: str
    known_from: str
    confidence: str
    scatter: str | None
    note: str


@dataclass(frozen=True, slots=True)
class Coefficient:
    """Loss coefficient K = constant + per_reynolds/Re of one fitting, with the method that was used.

    `in_range` is False where the size lies outside the table and the nearest tabulated figure stands. `note`
    says where another method had to be taken than the one asked for, and what the figure is of.
    """

    constant: float
    per_reynolds: float
    method: str
    source: str
    known_from: str
    confidence: str
    scatter: str | None
    in_range: bool
    note: str


def fitting(name: str) -> Fitting | None:
    """The fitting of that catalogue name, or None; case and runs of spaces do not matter."""
    row = _rows().get(_fold(name))
    if row is None:
        return None
    if "constant" in row:
        methods: tuple[str, ...] = (CONSTANT,)
        origin: Mapping[str, Any] = row
    else:
        methods = tuple(method for method in METHODS if _KEY[method] in row)
        origin = _origin(methods[0], threaded=True)
    return Fitting(
        name=row["name"],
        methods=methods,
        source=origin["source"],
        known_from=origin["known_from"],
        confidence=origin["confidence"],
        scatter=row.get("scatter"),
        note=row.get("note", ""),
    )


def fitting_names() -> tuple[str, ...]:
    """Names of all fittings, in catalogue order."""
    return tuple(row["name"] for row in load("fittings")["fitting"])


@lru_cache(maxsize=4096)
def kinds_by_name() -> tuple[str, ...]:
    """Names of the kinds of fittings that need no parameters, and so may be named like a fitting of this list."""
    return tuple(load("fittings")["kinds_by_name"])


def coefficient(name: str, method: str, nominal: float, bore: float) -> Coefficient | None:
    """Loss coefficient of the fitting `name` by `method` at a nominal size and bore, both in m and positive.

    Where the fitting lacks the method, by size is taken, and where it lacks that, Crane, Darby or Hooper in
    this order; the note says so. None where the catalogue has no such fitting. Raises ValueError for a method
    that is not one of METHODS, or a size that is not positive.
    """
    if method not in METHODS:
        raise ValueError(f"{method!r} was no method for fittings; known are {', '.join(METHODS)}")
    if not (nominal > 0.0 and bore > 0.0):
        raise ValueError(f"a fitting needs a positive size and bore, not {nominal} m and {bore} m")
    row = _rows().get(_fold(name))
    if row is None:
        return None
    if "constant" in row:
        return Coefficient(
            float(row["constant"]), 0.0, CONSTANT, row["source"], row["known_from"], row["confidence"],
            row.get("scatter"), True, row.get("note", ""),
        )  # fmt: skip
    used = next(m for m in (method, *_FALLBACK) if _KEY[m] in row)
    pipe = _Pipe(nominal, bore, threaded=nominal <= THREADED_TO * (1.0 + 1e-9))
    constant, per_reynolds, in_range = _BY_METHOD[used](row[_KEY[used]], pipe)
    notes = [] if used == method else [f'not tabulated for the method "{method}", so "{used}" was taken']
    notes += [text for text in (row[_KEY[used]].get("note"), row.get("note")) if text]
    origin = _origin(used, threaded=pipe.threaded)
    return Coefficient(
        constant, per_reynolds, used, origin["source"], origin["known_from"], origin["confidence"],
        row.get("scatter"), in_range, "; ".join(notes),
    )  # fmt: skip


class _Pipe(NamedTuple):
    """What a coefficient may depend on: nominal size and bore in m, and whether fittings are threaded."""

    nominal: float
    bore: float
    threaded: bool


def _by_size(row: Mapping[str, Any], pipe: _Pipe) -> tuple[float, float, bool]:
    """Linear in the logarithm of the nominal size; outside the tabulated sizes the nearest figure."""
    join = "threaded" if pipe.threaded else "flanged"
    table = load("fittings")["by_size"][join]
    points = [(size, k) for size, k in zip(table["size"], table[row[join]], strict=True) if k >= 0.0]
    value, inside = _interpolate(pipe.nominal * 1000.0, [size for size, _ in points], [k for _, k in points])
    return value, 0.0, inside


def _crane(row: Mapping[str, Any], pipe: _Pipe) -> tuple[float, float, bool]:
    """K = n fT, n by band of nominal size for the fittings that have bands, fT by bore."""
    n, in_band = (row["n"], True) if "n" in row else _band(row["bands"], pipe.nominal * 1000.0)
    rows = load("fittings")["crane"]["ft"]
    ft, inside = _interpolate(pipe.bore, [bore for _, bore, _ in rows], [ft for _, _, ft in rows])
    constant, per_reynolds = crane(n, ft)
    return float(constant), float(per_reynolds), inside and in_band


def _darby(row: Mapping[str, Any], pipe: _Pipe) -> tuple[float, float, bool]:
    km, ki, kd = row["k"][0 if pipe.threaded else -1]
    constant, per_reynolds = three_k(km, ki, kd, pipe.nominal)
    return float(constant), float(per_reynolds), True


def _hooper(row: Mapping[str, Any], pipe: _Pipe) -> tuple[float, float, bool]:
    k1, k_infinity = row["k"][0 if pipe.threaded else -1]
    constant, per_reynolds = two_k(k1, k_infinity, pipe.bore)
    return float(constant), float(per_reynolds), True


_BY_METHOD: Final = {"by size": _by_size, "crane": _crane, "darby": _darby, "hooper": _hooper}


def _band(bands: Sequence[Sequence[float]], size: float) -> tuple[float, bool]:
    """Figure of the band [from, to, figure] that holds `size`; between two bands that of the smaller one."""
    n = next((figure for low, _, figure in reversed(bands) if low <= size + 1e-6), bands[0][2])
    return n, bands[0][0] - 1e-6 <= size <= bands[-1][1] + 1e-6


def _interpolate(x: float, xs: Sequence[float], ys: Sequence[float]) -> tuple[float, bool]:
    """Value at `x`, linear in log x and held at the ends, and whether `x` lies in the table."""
    inside = xs[0] * (1.0 - _END_TOLERANCE) <= x <= xs[-1] * (1.0 + _END_TOLERANCE)
    if x <= xs[0]:
        return float(ys[0]), inside
    if x >= xs[-1]:
        return float(ys[-1]), inside
    i = bisect_right(xs, x)
    share = math.log(x / xs[i - 1]) / math.log(xs[i] / xs[i - 1])
    return ys[i - 1] + share * (ys[i] - ys[i - 1]), inside


def _origin(method: str, *, threaded: bool) -> Mapping[str, Any]:
    tables: Mapping[str, Any] = load("fittings")
    if method == "by size":
        tables = tables["by_size"]
        method = "threaded" if threaded else "flanged"
    origin: Mapping[str, Any] = tables[method]
    return origin


@cache
def _rows() -> Mapping[str, Mapping[str, Any]]:
    return {_fold(row["name"]): row for row in load("fittings")["fitting"]}


def _fold(name: str) -> str:
    return " ".join(name.lower().split())
