"""Tables as plain text: columns aligned by spaces, no trailing ones, the same text for the same figures."""

from __future__ import annotations

import textwrap
import unicodedata
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

NONE = "-"
WIDE = 100
"""Columns of text that a report keeps to where it can."""


@dataclass(frozen=True, slots=True)
class Column:
    """One column: its title, the unit below it, whether its cells are texts, and whether it may be left out."""

    title: str
    unit: str = ""
    left: bool = False
    optional: bool = False
    """It is left out where no row has anything to say in it."""


def table(columns: Sequence[Column], rows: Iterable[Sequence[str]], indent: str = "  ") -> list[str]:
    """Return the lines of a table: titles, units, rows. An empty cell stays empty."""
    found = [tuple(row) for row in rows]
    kept = [
        place
        for place, column in enumerate(columns)
        if not column.optional or any(row[place] not in ("", NONE) for row in found)
    ]
    shown = [columns[place] for place in kept]
    lines = [[column.title for column in shown]]
    if any(column.unit for column in shown):
        lines.append([column.unit for column in shown])
    lines += [[row[place] for place in kept] for row in found]
    widths = [max(_width(line[place]) for line in lines) for place in range(len(kept))]
    return [indent + _joined(line, shown, widths) for line in lines]


def labelled(pairs: Iterable[tuple[str, str]], indent: str = "  ") -> list[str]:
    """Return lines of a label and what it says, aligned; a text that is too long goes on below itself."""
    kept = [(label, text) for label, text in pairs if text]
    width = max((_width(label) for label, _ in kept), default=0) + 2
    lines = []
    for label, text in kept:
        lines += wrapped(text, indent + label + " " * (width - _width(label)), indent + " " * width)
    return lines


def wrapped(text: str, first: str = "", rest: str = "") -> list[str]:
    """Return a text in lines of at most WIDE columns; a word that is longer stays whole."""
    lines = textwrap.wrap(
        text,
        WIDE,
        initial_indent=first,
        subsequent_indent=rest,
        break_long_words=False,
        break_on_hyphens=False,
    )
    return [line.rstrip() for line in lines] or [first.rstrip()]


def _joined(cells: Sequence[str], columns: Sequence[Column], widths: Sequence[int]) -> str:
    padded = []
    for cell, column, width in zip(cells, columns, widths, strict=True):
        space = " " * (width - _width(cell))
        padded.append(cell + space if column.left else space + cell)
    return "  ".join(padded).rstrip()


def _width(text: str) -> int:
    if text.isascii():
        return len(text)
    return sum(_cells(c) for c in text)


def _cells(c: str) -> int:
    if unicodedata.combining(c):
        return 0
    return 2 if unicodedata.east_asian_width(c) in "WF" else 1
