"""Lines to read, in two columns: what it is, and what is said of it; broken between figures, never within one."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from budget.description.finding import Path
from budget.screens.chooser import Choice
from budget.screens.safe import clip, packed, width_of, wrapped

WIDEST_LABEL = 34


@dataclass(frozen=True, slots=True)
class Line:
    """One line: what it is, its text, the role of its style, and the keys of the value where it can be edited.

    `pieces` are texts of which none is broken; `source` says where a figure comes from: shortened to a line, or whole.
    """

    label: str
    text: str = ""
    role: str = ""
    path: Path | None = None
    pieces: tuple[str, ...] = ()
    gap: str = "  "
    """What stands between two pieces."""
    source: str = ""
    short: str = ""
    """The source where it has to be shortened, what matters most first."""


def lay_lines(lines: Iterable[Line], width: int, *, whole: bool) -> list[Choice]:
    """Return lines as entries of a list of so many cells; with `whole` no text is shortened."""
    lines = list(lines)
    label = min(WIDEST_LABEL, max((width_of(line.label) for line in lines), default=0)) + 2
    room = max(12, width - 2 - label)
    return [choice for line in lines for choice in _lay(line, room, whole=whole)]


def _lay(line: Line, room: int, *, whole: bool) -> Iterator[Choice]:
    pieces = [part for piece in line.pieces for part in (wrapped(piece, room) if width_of(piece) > room else [piece])]
    texts = packed(pieces, room, line.gap) if pieces else [line.text]
    if line.text and (whole or line.role in ("error", "warning", "note")):
        texts = wrapped(line.text, room)
    for place, text in enumerate(texts):
        yield Choice((line.label if place == 0 else "", text), line.path, line.role)
    short = [clip(line.short or line.source, room)] if line.source else []
    for source in wrapped(line.source, room) if whole else short:
        yield Choice(("", source), line.path, "faint", line.source)
