"""One value of the file at a time: from TOML to SI, or a finding that says what would be right."""

from __future__ import annotations

import difflib
import math
import re
import sys
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from itertools import islice, pairwise
from typing import Any

from budget.description.finding import Finding, Path, error
from budget.description.schema import (
    Array,
    Change,
    Choice,
    Flag,
    Inline,
    Measure,
    Names,
    Number,
    Pairs,
    Size,
    Spec,
    Table,
    Text,
)
from budget.units import Dimension, Quantity, UnitError, bare, bare_unit, parse, spell

KEEPS_BASIS = frozenset({Dimension.FLOW, Dimension.PRESSURE, Dimension.VISCOSITY})
"""Dimensions that can be stated on another basis (mass, head, kinematic) and stay quantities until it is known."""

MANY_WORDS = 300
"""Known words that are all compared with a wrong one."""

MOST_WORDS = 2_000
"""Known words among which, where there are more, a few are chosen to compare."""

FEW_WORDS = 30

_NUMERAL = re.compile(r"[+-]?[0-9]{1,20}(\.[0-9]{1,20})?")

_KINDS: dict[type, str] = {
    str: "a text",
    bool: "true or false",
    int: "a whole number",
    float: "a number",
    list: "a list",
    dict: "a table",
}


_INCLUDED_ANGLE = Measure(Dimension.ANGLE, 0.0, 180.0, above=True)


@dataclass(slots=True)
class Reading:
    """What reading one file needs to know, and what it has found wrong so far."""

    units: Any = "SI"
    gas: bool = False
    findings: list[Finding] = field(default_factory=list)
    _faulty: set[Path] = field(default_factory=set)
    """Where errors stand, and what stands around them."""
    _later: set[Path] = field(default_factory=set)

    def table(
        self, data: Any, keys: Mapping[str, Spec], path: Path, kind: str = "", *, open_: bool = False
    ) -> dict[str, Any]:
        """Read a table with known keys; a key that could not be read is left out, of an open one it stays as it is."""
        if not isinstance(data, dict):
            self.wrong("type", f"{what_is(data)} where a table was due; write [{'.'.join(map(str, path))}]", path)
            return {}
        values: dict[str, Any] = {}
        for key, value in data.items():
            spec = keys.get(key)
            if spec is None and open_:
                values[key] = value
                continue
            if spec is None:
                self.unknown_key(key, keys, path, kind)
                continue
            found = self.value(value, spec, (*path, key))
            if found is not None:
                values[key] = found
        return values

    def value(self, value: Any, spec: Spec, path: Path) -> Any:
        """Read one value: SI numbers as float, words as text; None with a finding where it can't be read."""
        match spec:
            case Text():
                return self._typed(value, str, path)
            case Flag():
                return self._typed(value, bool, path)
            case Choice(words):
                return self._choice(value, words, path)
            case Number():
                return self._number(value, spec, path)
            case Measure():
                return self._measure(value, spec, path)
            case Pairs():
                return self._pairs(value, spec, path)
            case Names():
                return self._names(value, path)
            case Inline(inner):
                return self._inline(value, inner, path)
            case Table(keys):
                return self.table(value, keys, path, ".".join(map(str, path)))
            case Array():
                return self._array(value, spec, path)
            case Change():
                return value if value == "abrupt" else self._measure(value, _INCLUDED_ANGLE, path)
            case Size():
                return self._size(value, path)

    def wrong(self, code: str, message: str, path: Path) -> None:
        """Keep an error."""
        self.findings.append(error(code, message, path))
        self._faulty.update(path[:size] for size in range(1, len(path) + 1))

    def faulty(self, path: Path) -> bool:
        """Whether an error has been found at a place, or within it."""
        return path in self._faulty

    def later(self, what: str, path: Path) -> None:
        """Say once of each place that what stands there is read, but not computed yet."""
        if path not in self._later:
            self._later.add(path)
            self.findings.append(error("later", f"{what} can't be computed yet; remove it for now", path))

    def unknown_key(self, key: str, known: Iterable[str], path: Path, kind: str = "") -> None:
        """Say that a key is not known here, and which known one is nearest."""
        where = kind or (str(path[0]) if path else "the file")
        self.wrong("unknown-key", f"{key!r} is not a key of {where}; {nearest(key, known)}", (*path, key))

    def _typed(self, value: Any, kind: type, path: Path) -> Any:
        if type(value) is kind:
            return value
        self.wrong("type", f"{what_is(value)} where {_KINDS[kind]} was due; write {_example(kind, value)}", path)
        return None

    def _size(self, value: Any, path: Path) -> str | int | float | None:
        if isinstance(value, str) or (isinstance(value, int | float) and not isinstance(value, bool)):
            if not _huge(value):
                return value
            self.wrong("range", f"{what_is(value)} is no size; write the size itself", path)
            return None
        self.wrong("type", f'{what_is(value)} where a size was due; write a text such as "DN40" or "600x300"', path)
        return None

    def _choice(self, value: Any, words: tuple[str, ...], path: Path) -> str | None:
        text = self._typed(value, str, path)
        if text is None or text in words:
            return text if text is None else str(text)
        self.wrong("choice", f"{text!r} is not one of the choices; {nearest(text, words)}", path)
        return None

    def _number(self, value: Any, spec: Number, path: Path) -> float | int | None:
        if isinstance(value, bool) or not isinstance(value, int | float):
            kind, example = ("a whole number", "2") if spec.whole else ("a plain number", "2.5")
            text = isinstance(value, str) and _NUMERAL.fullmatch(value) is not None
            remedy = f"write {value} without quotes" if text else f"write one such as {example}"
            self.wrong("type", f"{what_is(value)} where {kind} was due; {remedy}", path)
            return None
        if _huge(value):
            self.wrong("range", f"{what_is(value)} is out of range; {_bounds(spec, _plain)}", path)
            return None
        if not math.isfinite(value):
            self.wrong("not-finite", f"{value} is not a finite number; write the number itself", path)
            return None
        if spec.whole and value != int(value):
            self.wrong("type", f"{value} where a whole number was due; write {round(value)}", path)
            return None
        if self._outside(float(value), spec):
            self.wrong("range", f"{value:g} is out of range; {_bounds(spec, _plain)}", path)
            return None
        return int(value) if spec.whole else float(value)

    def _measure(self, value: Any, spec: Measure, path: Path) -> Quantity | float | None:
        unit = bare_unit(spec.dimension, self.units, gas=self.gas, small=spec.small)
        try:
            if _huge(value):
                self.wrong("range", f"{what_is(value)} is out of range; write the quantity itself", path)
                return None
            if isinstance(value, str):
                quantity = parse(value, spec.dimension, default_unit=unit)
            elif isinstance(value, int | float) and not isinstance(value, bool):
                quantity = bare(value, spec.dimension, unit)
            else:
                example = f"1 {unit}".rstrip()
                self.wrong("type", f'{what_is(value)} where a quantity was due; write such as "{example}"', path)
                return None
        except UnitError as refused:
            self.wrong(refused.code, str(refused), path)
            return None
        if self._outside(quantity.value, spec):
            bounds = _bounds(spec, lambda bound: spell(bound, unit, spec.dimension, 6))
            self.wrong("range", f"{value} is out of range; {bounds}", path)
            return None
        return quantity if spec.dimension in KEEPS_BASIS else quantity.value

    def _pairs(self, value: Any, spec: Pairs, path: Path) -> tuple[tuple[Any, Any], ...] | None:
        if value == [] or not isinstance(value, list):
            self.wrong("type", f"{what_is(value)} where a list of pairs was due; write [[1, 2], [3, 4]]", path)
            return None
        pairs = []
        for place, pair in enumerate(value):
            if not isinstance(pair, list) or len(pair) != 2:
                self.wrong("type", f"{what_is(pair)} where a pair was due; write [1, 2]", (*path, place))
                return None
            first = self.value(pair[0], spec.first, (*path, place, 0))
            second = self.value(pair[1], spec.second, (*path, place, 1))
            if first is None or second is None:
                return None
            pairs.append((first, second))
        keys = [getattr(first, "value", first) for first, _ in pairs]
        if any(later <= earlier for earlier, later in pairwise(keys)):
            self.wrong("order", "the first of each pair must grow from pair to pair; sort the pairs", path)
            return None
        return tuple(pairs)

    def _names(self, value: Any, path: Path) -> tuple[str, ...] | None:
        if not isinstance(value, list) or not all(isinstance(name, str) for name in value):
            self.wrong("type", f'{what_is(value)} where a list of IDs was due; write ["A", "B"]', path)
            return None
        return tuple(value)

    def _inline(self, value: Any, spec: Spec, path: Path) -> dict[str, Any] | None:
        if not isinstance(value, dict):
            self.wrong("type", f"{what_is(value)} where a table was due; write {{ name = value }}", path)
            return None
        found = {key: self.value(inner, spec, (*path, key)) for key, inner in value.items()}
        return {key: inner for key, inner in found.items() if inner is not None}

    def _array(self, value: Any, spec: Array, path: Path) -> tuple[dict[str, Any], ...] | None:
        if not isinstance(value, list):
            self.wrong("type", f"{what_is(value)} where tables were due; write [[{'.'.join(map(str, path))}]]", path)
            return None
        read = (self.table(e, spec.keys, (*path, n), str(path[-1]), open_=spec.open) for n, e in enumerate(value))
        return tuple(read)

    @staticmethod
    def _outside(value: float, spec: Number | Measure) -> bool:
        low = value <= spec.low if spec.above else value < spec.low
        return low or value > spec.high


def nearest(word: str, known: Iterable[str], count: int = 1) -> str:
    """Return "did you mean ...?" with the nearest known words, or the list of them where none is near.

    Of very many words only some are looked at, so that a run where everything is wrong is told so in good time.
    """
    words = list(islice(known, MOST_WORDS))
    close = difflib.get_close_matches(word, _likely(word, words), n=count, cutoff=0.5)
    if close:
        return "did you mean " + " or ".join(map(repr, close)) + "?"
    if not words:
        return "none is known yet"
    shown = ", ".join(words[:12]) + (", ..." if len(words) > 12 else "")
    return f"known are {shown}"


def _likely(word: str, words: list[str]) -> list[str]:
    """Return the words that are worth a closer look: of many those with the same beginning or end, and length."""
    if len(words) <= MANY_WORDS:
        return words
    start, end = word[:2], word[-2:]
    alike = [other for other in words if other.startswith(start) or other.endswith(end)]
    return sorted(alike, key=lambda other: abs(len(other) - len(word)))[:FEW_WORDS]


def _huge(value: Any) -> bool:
    """Whether a whole number is too large to be a float."""
    return isinstance(value, int) and abs(value) > sys.float_info.max


def _plain(number: float) -> str:
    return f"{number:g}"


def _bounds(spec: Number | Measure, spelled: Callable[[float], str]) -> str:
    parts = []
    if math.isfinite(spec.low):
        parts.append(("above " if spec.above else "at least ") + spelled(spec.low))
    if math.isfinite(spec.high):
        parts.append("at most " + spelled(spec.high))
    return "it must be " + " and ".join(parts)


def what_is(value: Any) -> str:
    """Name a value of the file in a message."""
    if isinstance(value, str):
        return f"the text {value[:40]!r}" + ("..." if len(value) > 40 else "")
    if isinstance(value, bool):
        return str(value).lower()
    if _huge(value):
        return "a number of hundreds of digits"
    if isinstance(value, int | float):
        return f"the number {value}"
    if value == []:
        return "an empty list"
    return _KINDS.get(type(value), "a date or time")


def _example(kind: type, value: Any) -> str:
    if kind is bool:
        return "true or false without quotes"
    number = isinstance(value, int | float) and not _huge(value)
    return f'"{value}" in quotes' if number else 'a text in quotes: "..."'
