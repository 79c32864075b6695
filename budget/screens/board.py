"""A board: a screen of its own with rows in columns under a cursor, painted like the ledger."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

from budget.document import Snapshot
from budget.report.figures import Figures
from budget.screens.columns import MARK, fit_figure
from budget.screens.lines import Lines, Piece, scrolled
from budget.screens.rows import Cell
from budget.screens.safe import clip, fit, width_of
from budget.screens.themes import Theme


@dataclass(frozen=True, slots=True)
class Head:
    """A column of a board: its key, its title, its width with the sign at its end; a large priority stays long."""

    key: str
    title: str
    width: int
    priority: int
    unit: str = ""
    left: bool = False


def place_heads(heads: Sequence[Head], width: int) -> list[tuple[Head, int]]:
    """Return the columns for which a line has room, whole, with their widths; a text at the end takes what is left."""
    room, kept = width - MARK, set()
    for head in sorted(heads, key=lambda head: -head.priority):
        if head.width > room:
            break
        kept.add(head.key)
        room -= head.width
    placed = [(head, head.width) for head in heads if head.key in kept]
    if placed and placed[-1][0].left:
        placed[-1] = (placed[-1][0], placed[-1][1] + room)
    return placed


class Board(Lines):
    """Rows under a cursor between a head and a tail; a subclass spells them."""

    def __init__(self, theme: Theme, snapshot: Snapshot, *, id: str) -> None:  # noqa: A002
        """Show a run, with the cursor on its first row."""
        super().__init__(theme, id=id)
        self.snapshot = snapshot
        self.figures = Figures(snapshot.description)
        self.cursor = 0
        self.top = 0
        self._wanted: str | None = None

    # For subclasses

    @property
    def ids(self) -> Sequence[str]:
        """The ID of every row."""
        return ()

    @property
    def head(self) -> int:
        """Lines above the rows."""
        return 3

    @property
    def tail(self) -> int:
        """Lines beneath the rows."""
        return 0

    @property
    def about(self) -> tuple[str, str]:
        """What is told at the foot, with the role of its style."""
        return "", ""

    def prepare(self) -> None:
        """Take what is to be shown from the snapshot."""

    # Showing and moving

    @property
    def marked(self) -> str | None:
        """The ID of the row under the cursor."""
        return self.ids[self.cursor] if self.cursor < len(self.ids) else None

    @property
    def in_hand(self) -> str | None:
        """The ID under the cursor; before there are rows, the one that the cursor is to go to."""
        return self.marked or self._wanted

    def show(self, snapshot: Snapshot) -> None:
        """Show a snapshot; the cursor stays on its row, wherever that is now."""
        if snapshot is not self.snapshot:
            self.snapshot, self.figures = snapshot, Figures(snapshot.description)
        self.renew()

    def renew(self) -> None:
        """Take what is shown anew, and paint what differs."""
        marked = self.marked
        self.prepare()
        if marked is not None and marked in self.ids:
            self.cursor = list(self.ids).index(marked)
        self.go(self.cursor)

    def go(self, place: int) -> None:
        """Move the cursor to a row by its place."""
        self.cursor = min(max(place, 0), max(len(self.ids) - 1, 0))
        self.keep_in_view()
        self.repaint()

    def go_to(self, id_: str) -> bool:
        """Move the cursor to a row by its ID; False where there is none, or not yet: then it goes there later."""
        self._wanted = id_
        if id_ not in self.ids:
            return False
        self.go(list(self.ids).index(id_))
        return True

    def move_column(self, step: int) -> None:
        """Move to the left or right, where that means something."""

    def point(self, _x: int, y: int) -> None:
        """Move the cursor to the row at a place of the widget."""
        if self.head <= y < self.head + self.page:
            self.go(self.top + y - self.head)

    @property
    def page(self) -> int:
        """Rows on a page."""
        return max(1, self.size.height - self.head - self.tail)

    def keep_in_view(self) -> None:
        """Scroll to the row under the cursor; of a widget that is not in front, when it is."""
        if self.size:
            self.top = scrolled(self.top, self.cursor, self.page, len(self.ids))

    # Spelling

    def titled(self, title: str, said: Iterable[str], width: int, role: str = "faint") -> Iterator[Piece]:
        """Spell the first line: the title, the place of the cursor, and what else is to be said."""
        place = f"{self.cursor + 1} of {len(self.ids)}" if self.ids else "nothing to show"
        text = f" {title}  "
        yield text, "title"
        yield clip("  ".join((place, *(one for one in said if one))), max(0, width - width_of(text))), role


def spell_heads(placed: Sequence[tuple[Head, int]], *, units: bool) -> Iterator[Piece]:
    """Spell the titles of columns, or their units."""
    yield " " * MARK, "heading"
    for head, width in placed:
        text = clip(head.unit if units else head.title, width - 1)
        yield fit(text, width - 1, right=not head.left) + " ", "faint" if units else "heading"


def spell_row(
    placed: Sequence[tuple[Head, int]], sign: str, cells: dict[str, Cell], *, current: bool
) -> Iterator[Piece]:
    """Spell a row: its sign, then its cells, each with the sign behind it."""
    yield sign or " ", "index"
    for head, width in placed:
        cell = cells.get(head.key, Cell())
        text = clip(cell.text, width - 1) if head.left else fit_figure(cell.text, width - 1)
        text = fit(text, width - 1, right=not head.left) + (cell.sign or " ")
        # The ID alone bears the cursor: on a narrow link a whole row is dear.
        yield text, f"{cell.role} cursor" if current and head.key == "id" else cell.role
