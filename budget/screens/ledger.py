"""The ledger: the run as an indented tree with a column for each figure, and a cursor on one cell."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from budget.description.finding import Path
from budget.screens.columns import MARK, Placed, aligned, fitting, place_columns
from budget.screens.field import Field, field_pieces
from budget.screens.filtering import NO_FILTER, Filter, Sifted, nearest, sift, told
from budget.screens.lines import Lines, Piece, scrolled
from budget.screens.rows import DEEPEST_INDENT, EMPTY, FOLDED_SIGN, INDEX_SIGN, Row, View, bearing, tree, visible
from budget.screens.safe import clip, fit, width_of
from budget.screens.themes import Theme

HEAD = 2
"""Lines above the rows: titles and units of the columns."""


@dataclass(frozen=True, slots=True)
class Mark:
    """Where the cursor is, so that it can be found after a change: the row's keys, its place, the column."""

    path: Path
    place: int = 0
    column: str = "length"


class Ledger(Lines):
    """The home screen. It holds cursor, scroll, fold state and filter, and nothing else."""

    def __init__(self, theme: Theme, view: View) -> None:
        """Show a view, with the cursor on the first row."""
        super().__init__(theme, id="ledger")
        self.view = view
        self.rows = tree(view.snapshot.description)
        self.folded: frozenset[str] = frozenset()
        self.filter: Filter = NO_FILTER
        self.sifted: Sifted | None = None
        """What the filter leaves, while one stands; the folds wait for its end."""
        self.shown: tuple[Row, ...] = self.rows
        self.cursor = 0
        self.column = "length"
        self.top = 0
        self.field: Field | None = None
        self.problem = ""
        self._held: Path = ()
        self._placed: tuple[Placed, ...] = ()
        self._placed_for = -1

    # What is shown

    def show(self, view: View) -> None:
        """Show another view of the run; the cursor stays on its row, wherever that is now.

        A filter stays, but one that would leave nothing; the row under the cursor is not taken away under the hand.
        """
        mark = self.mark
        if view is not self.view:
            if view.snapshot.description is not self.view.snapshot.description:
                self.rows = tree(view.snapshot.description)
            self.view = view
            self._renew(mark.path)
            if not self.shown:
                self.filter = NO_FILTER
                self._renew()
            self._find(mark)
        self.repaint()

    @property
    def row(self) -> Row | None:
        """The row under the cursor."""
        return self.shown[self.cursor] if self.cursor < len(self.shown) else None

    @property
    def mark(self) -> Mark:
        """Where the cursor is."""
        row = self.row
        return Mark(row.path if row else (), self.cursor, self.column)

    @property
    def source(self) -> str:
        """The source on which the row under the cursor hangs, or the first one."""
        for row in reversed(self.shown[: self.cursor + 1]):
            if row.kind == "source":
                return row.id
        return next(iter(self.view.snapshot.description.sources), "")

    # Moving

    def go(self, place: int) -> None:
        """Move the cursor to a row by its place; one that no longer matches the filter goes when the cursor left it."""
        self.cursor = min(max(place, 0), max(len(self.shown) - 1, 0))
        if self._held and self.row is not None and self.row.path != self._held:
            mark = self.mark
            self._renew()
            self._find(mark)
        self.keep_in_view()
        self.repaint()

    def go_to(self, path: Path, column: str | None = None) -> bool:
        """Move the cursor to a row by its keys, unfolding what hides it; False where there is none.

        A row that the filter leaves out is shown as long as the cursor is on it.
        """
        target = next((row for row in self.rows if row.path == path), None)
        if target is None:
            return False
        if target not in self.shown:
            if not self.filter:
                self.folded -= bearing(self.rows, target)
            self._renew(path)
        if column is not None and column in {placed.column.key for placed in self.placed}:
            self.column = column
        self.go(self.shown.index(target))
        return True

    def return_to(self, mark: Mark) -> None:
        """Move the cursor to a mark that was kept, or near it where the row is gone."""
        if mark.path and self.go_to(mark.path, mark.column):
            return
        self._find(mark)
        self.repaint()

    def point(self, x: int, y: int) -> None:
        """Move the cursor to the cell at a place of the widget."""
        if y < self.head:
            return
        self.column = next((placed.column.key for placed in self.placed if placed.x <= x < placed.end), self.column)
        self.go(self.top + y - self.head)

    def move_column(self, step: int) -> None:
        """Move the cursor to a neighbouring column that is shown."""
        keys = [placed.column.key for placed in self.placed]
        place = keys.index(self.column) if self.column in keys else 0
        self.column = keys[min(max(place + step, 0), len(keys) - 1)]
        self.repaint()

    @property
    def head(self) -> int:
        """Lines above the rows; while a filter stands, the first says so."""
        return HEAD + (self.sifted is not None)

    @property
    def page(self) -> int:
        """Rows on a page."""
        return max(1, self.size.height - self.head)

    def fold(self, ids: frozenset[str]) -> None:
        """Fold exactly these branches."""
        self.folded = ids
        self.keep_only(self.filter)

    def keep_only(self, wanted: Filter, mark: Mark | None = None) -> None:
        """Show only the rows that a filter leaves; the cursor goes to a mark, or to the row closest to it."""
        mark = mark or self.mark
        self.filter = wanted
        self._renew()
        self._find(mark)
        self.repaint()

    # Painting

    @property
    def placed(self) -> tuple[Placed, ...]:
        """The columns for which there is room."""
        width = self.size.width or 80
        if width != self._placed_for:
            self._placed, self._placed_for = place_columns(width), width
            if self.column not in {placed.column.key for placed in self._placed}:
                self.column = self._placed[-1].column.key
        return self._placed

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell the headings, or a row."""
        if self.sifted is not None:
            if y == 0:
                return ((clip(f" {told(self.sifted, self.filter, len(self.rows))}", width), "warning"),)
            y -= 1
        if y == 0:
            return self._titles()
        if y == 1:
            return self._units()
        place = self.top + y - HEAD
        if place >= len(self.shown):
            return ()
        if place == self.cursor and self.field is not None:
            return self._written_in(self.shown[place], self.field, width)
        return self._row(self.shown[place], current=place == self.cursor)

    def _titles(self) -> Iterator[Piece]:
        yield " " * MARK, "heading"
        for placed in self.placed:
            column = placed.column
            text = column.title if len(column.title) < placed.width else column.short
            yield aligned(clip(text, placed.width - 1), placed), "heading"

    def _units(self) -> Iterator[Piece]:
        figures = self.view.figures
        yield " " * MARK, "faint"
        for placed in self.placed:
            dimension = placed.column.dimension
            unit = figures.unit(dimension) if dimension is not None else ""
            if placed.column.key == "id":
                nothing = "no row" if self.rows else "nothing yet"
                unit = f"{self.cursor + 1} of {len(self.shown)}" if self.shown else nothing
            yield aligned(clip(unit, placed.width - 1), placed), "faint"

    def _row(self, row: Row, *, current: bool) -> Iterator[Piece]:
        yield (INDEX_SIGN if self._on_index(row) else " "), "index"
        cells = self.view.cells(row)
        leading = self.sifted is not None and row.path in self.sifted.leading
        for placed in self.placed:
            key = placed.column.key
            cell = cells.get(key, EMPTY)
            role = "faint" if leading else cell.role
            text = self._indented(row, cell.text, placed.width - 1) if key == "id" else cell.text
            spelled = aligned(fitting(text, placed), placed, cell.sign or " ")
            if current and key == self.column:
                yield spelled, f"{role} cursor"
            elif current and key == "id":
                yield spelled.rstrip(), f"{role} row"
                yield spelled[len(spelled.rstrip()) :], role
            else:
                yield spelled, role

    def _indented(self, row: Row, text: str, width: int) -> str:
        indent = " " * min(row.depth, DEEPEST_INDENT)
        folded = row.branch and row.kind != "item" and row.id in self.folded and not self.filter
        fold = FOLDED_SIGN if folded else ""
        return clip(indent + fold + text, width)

    def _on_index(self, row: Row) -> bool:
        return row.kind in ("section", "terminal") and self.view.on_index(row)

    def _written_in(self, row: Row, field: Field, width: int) -> Iterator[Piece]:
        """Spell the row of the cursor with the field in its cell, and what is wrong with it beside."""
        place = next((placed for placed in self.placed if placed.column.key == self.column), self.placed[0])
        need = min(max(place.width, width_of(field.text) + 2), width - MARK)
        start = max(MARK, min(place.end - need if not place.column.left else place.x, width - need))
        pieces = list(self._row(row, current=True))
        left, x = [], 0
        for text, roles in pieces:
            if x + width_of(text) > start:
                break
            left.append((text, roles))
            x += width_of(text)
        yield from left
        yield " " * (start - x), ""
        yield from field_pieces(field, need)
        x = start + need
        if self.problem:
            yield fit(f" {self.problem}", max(0, width - x)), "error"
            return
        for text, roles in _behind(pieces, x):
            yield text, roles

    # Keeping the cursor

    def _renew(self, held: Path = ()) -> None:
        """Take anew what is shown, with one row that the filter must leave."""
        self._held = held if self.filter else ()
        self.sifted = sift(self.view, self.rows, self.filter, held) if self.filter else None
        if self.sifted is not None:
            self.shown = self.sifted.rows
        else:
            self.shown = tuple(visible(self.rows, self.folded)) if self.folded else self.rows

    def _find(self, mark: Mark) -> None:
        place = self._place_of(mark.path)
        self.cursor = min(max(mark.place if place is None else place, 0), max(len(self.shown) - 1, 0))
        self.keep_in_view()

    def _place_of(self, path: Path) -> int | None:
        if self.cursor < len(self.shown) and self.shown[self.cursor].path == path:
            return self.cursor
        for size in range(len(path), 1, -2):
            for place, row in enumerate(self.shown):
                if row.path == path[:size]:
                    return place
        return nearest(self.rows, self.shown, path, above=not self.filter)

    def keep_in_view(self) -> None:
        """Scroll to the row under the cursor; of a widget that is not in front, when it is."""
        if self.size:
            self.top = scrolled(self.top, self.cursor, self.page, len(self.shown))


def _behind(pieces: list[Piece], start: int) -> Iterator[Piece]:
    """Yield the pieces that begin at or after a cell, with the gap before the first."""
    x, begun = 0, False
    for text, roles in pieces:
        if x >= start:
            if not begun:
                yield " " * (x - start), ""
                begun = True
            yield text, roles
        x += width_of(text)
