"""The columns of the ledger: which of them a width has room for, and where each stands.

Columns leave by priority, whole: a figure is never cut. Texts of the user's own stand last, except the ID, which is
shown in characters whose width no terminal disputes.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from budget.screens.safe import clip, fit
from budget.units import Dimension

Key = Literal[
    "id", "size", "length", "flow", "velocity", "gradient", "drop", "sum", "differential", "margin",
    "balance", "fittings", "title",
]  # fmt: skip


@dataclass(frozen=True, slots=True)
class Column:
    """One column: its title on wide and on narrow terminals, its width with the sign at its end, what it measures."""

    key: Key
    title: str
    short: str
    width: int
    priority: int
    dimension: Dimension | None = None
    left: bool = False


@dataclass(frozen=True, slots=True)
class Placed:
    """A column where it stands on the line: first cell and number of cells."""

    column: Column
    x: int
    width: int

    @property
    def end(self) -> int:
        """The first cell behind it."""
        return self.x + self.width


COLUMNS: tuple[Column, ...] = (
    Column("id", "section or terminal", "ID", 14, 99, left=True),
    Column("size", "size", "size", 11, 90),
    Column("length", "length", "length", 7, 85, Dimension.LENGTH),
    Column("flow", "flow", "flow", 7, 75, Dimension.FLOW),
    Column("velocity", "velocity", "vel.", 6, 60, Dimension.VELOCITY),
    Column("gradient", "gradient", "grad.", 6, 50, Dimension.GRADIENT),
    Column("drop", "drop", "drop", 7, 98, Dimension.PRESSURE),
    Column("sum", "sum so far", "sum", 7, 65, Dimension.PRESSURE),
    Column("differential", "differential", "diff.", 7, 70, Dimension.PRESSURE),
    Column("margin", "margin", "margin", 7, 95, Dimension.PRESSURE),
    Column("balance", "balance", "balance", 12, 40, left=True),
    Column("fittings", "fittings", "fittings", 20, 30, left=True),
    Column("title", "title", "title", 14, 45, left=True),
)
BY_KEY = {column.key: column for column in COLUMNS}

MARK = 1
"""Cells at the left edge for the sign of the index circuit."""

_WIDEST_ID = 30


def place_columns(width: int) -> tuple[Placed, ...]:
    """Return the columns for which a line of so many cells has room, in order.

    The most needed ones stay longest. What room is left goes to the ID, to whole titles, and to the title of the row.
    """
    room = width - MARK
    widths: dict[str, int] = {}
    for column in sorted(COLUMNS, key=lambda column: -column.priority):
        if column.width > room and widths:
            break
        widths[column.key] = min(column.width, max(room, 0))
        room -= widths[column.key]
    room = max(room, 0)
    for column in COLUMNS:
        if column.key in widths and column.dimension is not None:
            more = max(0, len(column.title) + 1 - widths[column.key])
            if "title" in widths and more <= room:
                widths[column.key] += more
                room -= more
    extra = room if "title" not in widths else min(room, _WIDEST_ID - widths["id"])
    widths["id"] += extra
    if "title" in widths:
        widths["title"] += room - extra
    placed, x = [], MARK
    for column in COLUMNS:
        if column.key in widths:
            placed.append(Placed(column, x, widths[column.key]))
            x += widths[column.key]
    return tuple(placed)


def fit_size(text: str, room: int) -> str:
    """Return a size that fits: the word of a flat oval gives way to its letter before a figure is cut."""
    return text if len(text) <= room else text.replace("oval ", "o ", 1)


def fit_figure(text: str, room: int) -> str:
    """Return a figure that fits: with fewer decimals, in powers of ten, and at last as a row of signs; never cut."""
    if len(text) <= room:
        return text
    try:
        number = float(text)
    except ValueError:
        return "#" * room
    decimals = len(text.partition(".")[2])
    shorter = (f"{number:.{kept}f}" for kept in range(decimals - 1, -1, -1))
    powers = (f"{number:.{kept}e}".replace("e+0", "e").replace("e+", "e") for kept in (2, 1, 0))
    return next((figure for figure in (*shorter, *powers) if len(figure) <= room), "#" * room)


def fitting(text: str, placed: Placed) -> str:
    """Return the text of a cell as its column has room for it."""
    room = placed.width - 1
    if placed.column.dimension is not None:
        return fit_figure(text, room)
    if placed.column.key == "size":
        text = fit_size(text, room)
    return clip(text, room)


def aligned(text: str, placed: Placed, sign: str = " ") -> str:
    """Return the text of a cell as wide as its column, with its sign."""
    return fit(text, placed.width - 1, right=not placed.column.left) + sign
