"""A text cut into the tables of the run: each header with its keys and comments, what lies between, nothing lost.

A comment directly above a header, or directly below the last key, belongs to that table. One with blank lines around it
is a piece of its own. White space between pieces is a gap; `Cut.text` puts all together again, byte for byte.
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import NamedTuple

from budget.description.finding import Path
from budget.description.scan import COMMENT_LINES, SpanError, Table
from budget.description.schema import KEYED
from budget.description.source import Source, read_text
from budget.description.spans import SpanIndex

START, END = "start", "end"

_PARAGRAPH = re.compile(r"#[^\n]*(?:\n[ \t]*#[^\n]*)*")
_SPACE = " \t\r\n"


class Key(NamedTuple):
    """What a piece is known by in every version: its table and which of its headers, or the words of a comment."""

    owner: Path | None
    """The table of the run: ("section", "M1"), ("limits",), () for the keys above all headers; None: a comment."""
    words: str
    number: int


@dataclass(frozen=True, slots=True)
class Piece:
    """A header with its keys and comments, or a comment that stands alone; without the white space around it."""

    key: Key
    text: str
    start: int
    table: Table | None = None


@dataclass(frozen=True)
class Cut:
    """A text as pieces with a gap before, between and behind them."""

    source: Source
    pieces: tuple[Piece, ...]
    gaps: tuple[str, ...]

    @property
    def text(self) -> str:
        """The whole text."""
        return self.gaps[0] + "".join(piece.text + gap for piece, gap in zip(self.pieces, self.gaps[1:], strict=True))

    @cached_property
    def by_key(self) -> dict[Key, Piece]:
        """The pieces by what they are known by, in the order of the text."""
        return {piece.key: piece for piece in self.pieces}

    @cached_property
    def owned(self) -> dict[Path, tuple[Piece, ...]]:
        """The pieces of each table of the run, wherever they stand, by the place of the first."""
        found: dict[Path, list[Piece]] = {}
        for piece in self.pieces:
            if piece.key.owner is not None:
                found.setdefault(piece.key.owner, []).append(piece)
        return {owner: tuple(pieces) for owner, pieces in found.items()}

    @cached_property
    def between(self) -> dict[tuple[Key | str, Key | str], str]:
        """The gap between two neighbours; START and END stand for the ends of the text."""
        keys: list[Key | str] = [START, *(piece.key for piece in self.pieces), END]
        return dict(zip(pairwise(keys), self.gaps, strict=True))


def owner_of(path: Path) -> Path:
    """Return the table of the run that a header belongs to: its ID and what it is, else its first name."""
    size = 2 if len(path) > 1 and path[0] in KEYED and isinstance(path[1], str) else 1
    return path[:size]


def cut(text: str) -> Cut | None:
    """Cut a text; None where it is not TOML."""
    source = read_text(text)
    if source.data is None:
        return None
    try:
        index = source.spans
    except (SpanError, RecursionError):
        return None
    pieces: list[Piece] = []
    gaps: list[str] = []
    counts: dict[tuple[Path | None, str], int] = {}
    last = 0

    def add(owner: Path | None, start: int, end: int, table: Table | None = None) -> None:
        nonlocal last
        inside = text[start:end]
        start += len(inside) - len(inside.lstrip(_SPACE))
        inside = inside.strip(_SPACE)
        words = inside if owner is None else ""
        number = counts.get((owner, words), 0)
        counts[owner, words] = number + 1
        gaps.append(text[last:start])
        pieces.append(Piece(Key(owner, words, number), inside, start, table))
        last = start + len(inside)

    for table, start, end in _extents(index):
        for comment in _PARAGRAPH.finditer(text, last, start):
            add(None, *comment.span())
        if table is not None:
            add(owner_of(table.path), start, end, table)
    return Cut(source, tuple(pieces), (*gaps, text[last:]))


def weave(frame: Sequence[Key], others: Iterable[Sequence[Key]], wanted: Collection[Key]) -> list[Key]:
    """Return the wanted keys in the order of the frame; what only others have goes behind its neighbour there."""
    followers: dict[Key | str, list[Key]] = {}
    placed = {key for key in frame if key in wanted}
    for other in others:
        neighbour: Key | str = START
        new: dict[Key | str, list[Key]] = {}
        for key in other:
            if key in wanted:
                if key not in placed:
                    placed.add(key)
                    new.setdefault(neighbour, []).append(key)
                neighbour = key
        for neighbour, keys in new.items():
            followers[neighbour] = keys + followers.get(neighbour, [])
    woven: list[Key] = []
    roots: list[Key | str] = [START, *(key for key in frame if key in wanted)]
    for root in roots:
        pending = [root]
        while pending:
            one = pending.pop()
            if isinstance(one, Key):
                woven.append(one)
            pending += reversed(followers.get(one, ()))
    return sorted(woven, key=lambda key: key.owner != ())  # keys above all headers can't stand elsewhere


def line_ends(text: str) -> str:
    """Return how a text ends its lines: LF, CRLF, mixed, or "" for a text of one line."""
    total, both = text.count("\n"), text.count("\r\n")
    if not total:
        return ""
    return "mixed" if 0 < both < total else "CRLF" if both else "LF"


def with_line_ends(text: str, ends: str) -> str:
    """Return a text with all its lines ended by LF or CRLF."""
    lines = text.replace("\r\n", "\n")
    return lines.replace("\n", "\r\n") if ends == "CRLF" else lines


def _extents(index: SpanIndex) -> Iterable[tuple[Table | None, int, int]]:
    """Run through the tables with where each begins and ends; at last the end of the text, with none."""
    text, tables = index.text, index.all_tables()
    starts = [0, *(index.block_start(table) for table in tables[1:]), len(text)]
    for table, start, ceiling in zip(tables, starts, starts[1:], strict=False):
        if table.number or table.statements:
            below = COMMENT_LINES.match(text, table.body_end, ceiling)
            yield table, start, below.end() if below else table.body_end
    yield None, len(text), len(text)
