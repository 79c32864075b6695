"""How large a file may be in every direction: bounds that no run meets, and where a text first goes beyond one.

A text within them is read in a time that grows with its size alone. What is found is a `Beyond`: which bound, said in
a sentence, and where the text went past it.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from itertools import repeat
from typing import Any, NamedTuple

from budget.description.finding import Path

LARGEST_FILE = 4 * 1024 * 1024
"""Bytes; a run of ten thousand sections takes about two million."""

DEEPEST = 32
"""Levels of nesting; a run has five."""

MOST_TABLES = 100_000
"""Tables and lists in one file."""

MOST_ENTRIES = 100_000
"""Keys of one table, or elements of one list."""

LONGEST_NUMBER = 50
"""Characters of a number or a date; what a float holds has 24."""

LONGEST_ID = 100
"""Characters of an ID; it is read all the same, with a finding."""

LONGEST_KEY = 1_000
"""Characters of any key."""

LONGEST_TEXT = 10_000
"""Characters of a text: a note of four pages."""


class Beyond(NamedTuple):
    """A bound that a text goes past: the finding's code, its sentence, and where: a character, or a path."""

    code: str
    message: str
    place: int | Path


# Patterns for texts that look odd at the first glance are compiled when there is one.
_NAME = r"(?>[\w-]++|\"[^\"\n]*+\"|'[^'\n]*+')"
_DOTTED = rf"(?<![\w-])(?:{_NAME}[ \t]*+\.[ \t]*+){{{DEEPEST + 1}}}{_NAME}"
_OPENERS = re.compile(rf"[\[{{]{{{DEEPEST + 1}}}")
_DIGITS = rf"[0-9][0-9A-Za-z_.:+-]{{{LONGEST_NUMBER},}}+"
_LONG_DIGITS = re.compile(_DIGITS)
_LINES, _LITERAL_LINES = r'"""(?>[^"\\]|\\.|"(?!""))*+"{3,5}', r"'''(?>[^']|'(?!''))*+'{3,5}"
_BASIC, _LITERAL = r'"(?>[^"\\\n]|\\.)*+"', r"'[^'\n]*+'"
_QUOTED = f"{_LINES}|{_LITERAL_LINES}|{_BASIC}|{_LITERAL}"
_NUMBERS = rf"(?s:#[^\n]*+|{_QUOTED}|(?P<number>{_DIGITS})|[A-Za-z_][0-9A-Za-z_-]*+)"
_TABLES = rf"(?s:#[^\n]*+|{_QUOTED}|(?P<table>\[\[|[\[{{]))"
_BRACKETS = rf"(?s:(?P<bracket>[\[{{\]}}])|#[^\n]*+|{_QUOTED})"
_BEFORE_NAME = r"[ \t]*[=.]|[ \t]*\]{1,2}[ \t\r]*(?:#[^\n]*)?(?:\n|\Z)"
_SIGN = "+-"


def beyond_as_text(text: str) -> Beyond | None:
    """Find a bound that can be told before TOML is read: nesting in one place, tables, digits."""
    many_dots = max(map(str.count, text.split("\n"), repeat("."))) > DEEPEST
    if (deep := _OPENERS.search(text) or (re.search(_DOTTED, text) if many_dots else None)) is not None:
        message = f"brackets or dotted keys are nested more than {DEEPEST} deep; a run needs five levels"
        return Beyond("nesting", message, deep.start())
    if text.count("[") + text.count("{") > MOST_TABLES:
        openers = (found.start() for found in re.finditer(_TABLES, text) if found["table"])
        place = next((start for number, start in enumerate(openers) if number == MOST_TABLES), None)
        if place is not None:
            message = f"the file has more than {MOST_TABLES:,} tables and lists; split the run"
            return Beyond("too-many", message, place)
    if _LONG_DIGITS.search(text) is not None:
        place = next(_long_numbers(text), None)
        if place is not None:
            message = f"a number or date has more than {LONGEST_NUMBER} characters; write it with 17 digits at most"
            return Beyond("long-number", message, place)
    return None


def beyond_as_data(text: str, data: dict[str, Any]) -> Beyond | None:
    """Find a bound that shows in what TOML makes of a text: nesting, entries, length of keys and texts."""
    if _within(data):
        return None
    return next(_faults(data, ()), None) or too_deep(text)


def too_deep(text: str) -> Beyond:
    """Say that a text is nested too deep, at its first bracket beyond the bound; without one, where it begins."""
    message = f"tables are nested more than {DEEPEST} deep; a run needs five levels"
    level = 0
    for found in re.finditer(_BRACKETS, text):
        bracket = found["bracket"]
        if bracket is not None:
            level += 1 if bracket in "[{" else -1
            if level > DEEPEST:
                return Beyond("nesting", message, found.start())
    return Beyond("nesting", message, 0)


def _long_numbers(text: str) -> Iterator[int]:
    """Run through the places of numbers that are too long, leaving out names, texts and comments."""
    for found in re.finditer(_NUMBERS, text):
        start = found.start()
        if found["number"] and not _is_name(text, start, found.end()):
            yield start - (start > 0 and text[start - 1] in _SIGN)


def _is_name(text: str, start: int, end: int) -> bool:
    """Whether digits are part of a key or a header: `=` or a point follows, or the line is nothing but a header."""
    follows = re.compile(_BEFORE_NAME).match(text, end)
    if follows is None:
        return False
    if "]" not in follows[0]:
        return True
    return text[text.rfind("\n", 0, start) + 1 : start].lstrip(" \t").startswith("[")


def _within(data: dict[str, Any]) -> bool:
    """Whether data keep all bounds: level by level, for every file is looked through."""
    level: list[Any] = [data]
    for _ in range(DEEPEST):
        inner = []
        for found in level:
            if len(found) > MOST_ENTRIES:
                return False
            if type(found) is dict:
                if found and max(map(len, found)) > LONGEST_KEY:
                    return False
                found = found.values()
            for value in found:
                kind = type(value)
                if kind is dict or kind is list:
                    inner.append(value)
                elif kind is str and len(value) > LONGEST_TEXT:
                    return False
        if not inner:
            return True
        level = inner
    return False


def _faults(value: Any, path: Path) -> Iterator[Beyond]:
    """Run through the places beyond a bound, but for those that are nested too deep."""
    if len(path) > DEEPEST:
        return
    if isinstance(value, str):
        if len(value) > LONGEST_TEXT:
            message = f"a text has {len(value):,} characters, at most {LONGEST_TEXT:,} are read; shorten it"
            yield Beyond("too-long", message, path)
        return
    if not isinstance(value, dict | list):
        return
    if len(value) > MOST_ENTRIES:
        what = "keys" if isinstance(value, dict) else "elements"
        message = f"one place has {len(value):,} {what}, at most {MOST_ENTRIES:,} are read; split the run"
        yield Beyond("too-many", message, path)
    for key, inner in value.items() if isinstance(value, dict) else enumerate(value):
        if isinstance(key, str) and len(key) > LONGEST_KEY:
            message = f"a key has {len(key):,} characters, at most {LONGEST_KEY:,} are read; shorten it"
            yield Beyond("too-long", message, (*path, key))
        yield from _faults(inner, (*path, key))
