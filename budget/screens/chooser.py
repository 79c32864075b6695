"""A list to pick from, in columns, which filters as one types."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass

from textual.timer import Timer

from budget.screens.field import Field, field_pieces
from budget.screens.lines import Lines, Piece
from budget.screens.safe import clip, fit, width_of, wrapped
from budget.screens.themes import Theme
from budget.screens.trials import BREATH, PAUSE, Pace

HEAD = 2
"""Lines above the entries: what the list is and the filter, and the headings."""

BENEATH = 5
"""Lines under the entries that tell more of the marked one, where a list has them: more under a short list, fewer on a
low terminal."""

LEAST_FIELD = 8
"""Cells for the filter."""

_WIDEST = 34
_SEEN_WHOLE = 300
"""Entries of which all are looked at for the widths of the columns; of a longer list, those in view."""
_FIGURE = re.compile(r"-|-?[0-9.]+(e[+-]?[0-9]+)?!?|")


@dataclass(frozen=True, slots=True)
class Choice:
    """One entry: its safe texts by column, what it stands for, the role of its style, further words to find it by."""

    cells: tuple[str, ...]
    value: object = None
    role: str = ""
    words: str = ""


@dataclass(frozen=True, slots=True)
class Offer:
    """A list to pick from: its title, the headings, the entries, and what is done with one.

    `more` computes further cells of the entries in view: all at once, one by one between the keys, or of the marked
    one alone when no key comes, by the `pace`; `beneath` tells more of the marked entry in paragraphs under the list;
    `write` makes an entry of what was typed, where that is allowed; `step` says what left and right do with an entry;
    `leave` is done where the list is left without taking one.
    """

    title: str
    heads: tuple[str, ...]
    choices: Sequence[Choice]
    take: Callable[[object], None]
    filters: bool = True
    more: Callable[[object], tuple[str, ...]] | None = None
    pace: Pace = "at once"
    beneath: Callable[[object], tuple[str, ...]] | None = None
    write: Callable[[str], Choice | None] | None = None
    step: Callable[[object, int], None] | None = None
    leave: Callable[[], None] | None = None
    start: int = 0
    empty: str = "nothing is left; take letters away"


class Chooser(Lines):
    """The list on the screen: the filter, the entries that pass it, and the cursor on one of them."""

    def __init__(self, theme: Theme, id: str, *, passive: bool = False) -> None:  # noqa: A002
        """Show nothing yet; a passive one has no cursor."""
        super().__init__(theme, id=id)
        self.passive = passive
        self.offer = Offer("", (), (), lambda _: None)
        self.field = Field()
        self.kept: list[Choice] = []
        self.cursor = 0
        self.top = 0
        # With the entry itself, so that no other is given its number.
        self._more: dict[int, tuple[Choice, tuple[str, ...]]] = {}
        self._waiting: Timer | None = None
        self._shaped: tuple[list[int], list[bool]] | None = None

    def present(self, offer: Offer, *, keep: bool = False) -> None:
        """Show a list; with `keep` cursor and filter stay, as for the same list after a change."""
        cursor = self.cursor if keep else offer.start
        self.offer = offer
        if not keep:
            self.field, self.top = Field(), 0
        self._more.clear()
        self._filter()
        self.cursor = min(cursor, max(0, len(self.kept) - 1))
        self.keep_in_view()
        self.repaint()

    @property
    def marked(self) -> Choice | None:
        """The entry under the cursor."""
        return self.kept[self.cursor] if self.cursor < len(self.kept) else None

    @property
    def page(self) -> int:
        """Entries on a page."""
        return max(1, self.size.height - HEAD - self._tail)

    @property
    def looking(self) -> bool:
        """Whether further cells are still to be computed."""
        return self._waiting is not None

    @property
    def _tail(self) -> int:
        if self.offer.beneath is None:
            return 0
        return max(min(BENEATH, self.size.height // 4), self.size.height - HEAD - 1 - len(self.kept))

    def go(self, place: int) -> None:
        """Move the cursor to an entry by its place."""
        self.cursor = min(max(place, 0), max(len(self.kept) - 1, 0))
        self.keep_in_view()
        self.repaint()

    def turn(self, pages: int) -> None:
        """Move cursor and list by pages."""
        self.top = min(max(self.top + pages * self.page, 0), max(0, len(self.kept) - self.page))
        self.go(self.cursor + pages * self.page)

    def point(self, _x: int, y: int) -> None:
        """Move the cursor to the entry at a place of the widget."""
        if y >= HEAD:
            self.go(self.top + y - HEAD)

    def write(self, field: Field) -> None:
        """Filter by what is written."""
        if not self.offer.filters or field == self.field:
            return
        self.field = field
        self.cursor = self.top = 0
        self._filter()
        self.repaint()

    def repaint(self) -> None:
        """Spell every line again, in columns as wide as what they hold by now."""
        self._shaped = None
        super().repaint()

    def refresh_more(self) -> None:
        """Compute the further cells of the entries again."""
        self._more.clear()
        self.repaint()

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell the title, the headings, or an entry."""
        if y == 0:
            return self._title(width)
        if self._shaped is None:
            self._shaped = self._shape(width)
        widths, right = self._shaped
        if y == 1:
            return self._cells(self.offer.heads, widths, right, "heading")
        if y >= HEAD + self.page and self._tail:
            return self._told(y - HEAD - self.page, width)
        place = self.top + y - HEAD
        if place >= len(self.kept):
            return ((f" {self.offer.empty}", "faint"),) if place == 0 else ()
        choice = self.kept[place]
        roles = f"{choice.role} cursor" if place == self.cursor and not self.passive else choice.role
        return self._cells(self._all_cells(choice), widths, right, roles)

    def _title(self, width: int) -> Iterator[Piece]:
        count = f"  {min(self.cursor + 1, len(self.kept))} of {len(self.kept)}" if not self.passive else ""
        title = clip(f" {self.offer.title}  ", width - len(count) - (LEAST_FIELD if self.offer.filters else 0))
        yield title, "title"
        if self.offer.filters:
            yield from field_pieces(self.field, max(LEAST_FIELD, min(30, width - width_of(title) - len(count))))
        yield count, "faint"

    def _told(self, y: int, width: int) -> Iterator[Piece]:
        """Spell a line of what is told of the marked entry; where there is more, the last line ends in an ellipsis."""
        if self.offer.beneath is None or self.marked is None:
            return
        room = width - 2
        lines = [
            line
            for text in self.offer.beneath(self.marked.value)
            for line in ([text] if width_of(text) <= room else wrapped(text, room))
        ]
        if y < len(lines):
            more = y == self._tail - 1 and len(lines) > self._tail
            yield f" {clip(lines[y] + '  ' + lines[y + 1], room) if more else lines[y]}", "faint"

    @staticmethod
    def _cells(cells: Sequence[str], widths: Sequence[int], right: Sequence[bool], roles: str) -> Iterator[Piece]:
        yield " ", roles
        for place, (text, width, ranged_right) in enumerate(zip(cells, widths, right, strict=False)):
            gap = "  " if place + 1 < len(widths) else " "
            yield fit(clip(text, max(0, width - len(gap))), width - len(gap), right=ranged_right) + gap, roles

    def _shape(self, width: int) -> tuple[list[int], list[bool]]:
        """Return the width of each column, that of its widest text in view, and whether it holds figures.

        The last takes what remains.
        """
        few = self.offer.more is None and len(self.offer.choices) <= _SEEN_WHOLE
        seen = self.offer.choices if few else self.kept[self.top : self.top + self.page]
        view = [self.offer.heads, *(self._all_cells(choice) for choice in seen)]
        columns = max((len(cells) for cells in view), default=1)
        widths = [
            min(_WIDEST, max((width_of(cells[column]) for cells in view if column < len(cells)), default=0)) + 2
            for column in range(columns)
        ]
        widths[-1:] = [max(8, width - 1 - sum(widths[:-1]))]
        right = [
            column + 1 < columns and all(_FIGURE.fullmatch(cells[column]) for cells in view[1:] if column < len(cells))
            for column in range(columns)
        ]
        return widths, right

    def _all_cells(self, choice: Choice) -> tuple[str, ...]:
        if self.offer.more is None:
            return choice.cells
        known = self._more.get(id(choice))
        found = known[1] if known is not None else None
        if found is None and self.offer.pace == "at once":
            found = self.offer.more(choice.value)
            self._more[id(choice)] = (choice, found)
        elif found is None:
            found = ("",) * (len(self.offer.heads) - len(choice.cells))
            if choice is self.marked or self.offer.pace == "one by one":
                self._look_later(BREATH if self.offer.pace == "one by one" else PAUSE)
        return (*choice.cells[:1], *found, *choice.cells[1:])

    def _look_later(self, pause: float) -> None:
        if self._waiting is not None:
            self._waiting.stop()
        self._waiting = self.set_timer(pause, self._look)

    def _look(self) -> None:
        """Compute the further cells of one entry, the marked one first, and go on with the next if there is time."""
        self._waiting = None
        more, view = self.offer.more, self.kept[self.top : self.top + self.page]
        one_by_one = self.offer.pace == "one by one"
        wanted = [c for c in (self.marked, *(view if one_by_one else ())) if c is not None and id(c) not in self._more]
        if not self.display or more is None or not wanted:
            return
        self._more[id(wanted[0])] = (wanted[0], more(wanted[0].value))
        self.repaint()
        if one_by_one and wanted[1:]:
            self._look_later(BREATH)

    def _filter(self) -> None:
        words = self.field.text.casefold().split()
        self.kept = [
            choice
            for choice in self.offer.choices
            if all(any(word in cell.casefold() for cell in (*choice.cells, choice.words)) for word in words)
        ]
        text = self.field.text.strip()
        if text:
            self.kept.sort(key=lambda choice: not choice.cells[0].casefold().startswith(text.casefold()))
        if text and self.offer.write is not None:
            written = self.offer.write(text)
            if written is not None and all(choice.value != written.value for choice in self.kept):
                self.kept.append(written)

    def keep_in_view(self) -> None:
        """Scroll to the entry under the cursor; of a list that is not in front, when it is."""
        if not self.size:
            return
        if self.cursor < self.top:
            self.top = self.cursor
        elif self.cursor >= self.top + self.page:
            self.top = self.cursor - self.page + 1
        self.top = min(max(self.top, 0), max(0, len(self.kept) - self.page))
