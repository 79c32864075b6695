"""A small form in the ledger's place: a line to fill in for each value, and what the values lead to as one types."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass

from budget.screens.field import Field, field_pieces
from budget.screens.lines import Lines, Piece
from budget.screens.safe import clip, fit, width_of, wrapped
from budget.screens.themes import Theme

HEAD = 3
"""Lines above the blanks: what is asked, what the values lead to, the headings."""

LEAST_BENEATH = 3
FIELD = 22


@dataclass(frozen=True, slots=True)
class Blank:
    """One value to fill in: its key, what may stand there, what it means, and its words where it is one of a few."""

    key: str
    may_be: str
    meaning: str
    words: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Told:
    """What the values lead to, with the role of its style; `doubt` is a warning that goes with it."""

    text: str
    role: str = "title"
    doubt: str = ""


@dataclass(frozen=True, slots=True)
class Sheet:
    """What a form asks for, as it stands now, and what is done with it.

    `attempt` tells what the values lead to; `accept` enters them; `leave` goes back to where the form was asked for.
    """

    title: str
    blanks: tuple[Blank, ...]
    texts: tuple[str, ...]
    about: tuple[str, ...]
    attempt: Callable[[Mapping[str, str]], Told]
    accept: Callable[[Mapping[str, str]], None]
    leave: Callable[[], None]
    start: int = 0


class Form(Lines):
    """The form on the screen: its fields, and which of them is written in."""

    def __init__(self, theme: Theme) -> None:
        """Ask for nothing yet."""
        super().__init__(theme, id="form")
        self.sheet: Sheet | None = None
        self.fields: list[Field] = []
        self.place = 0
        self.told = Told("")

    def present(self, sheet: Sheet, told: Told) -> None:
        """Ask for the values of a sheet."""
        self.sheet, self.told, self.place = sheet, told, sheet.start
        self.fields = [Field.holding(text) for text in sheet.texts]
        self.repaint()

    @property
    def texts(self) -> dict[str, str]:
        """What is written, by key."""
        blanks = self.sheet.blanks if self.sheet is not None else ()
        return {blank.key: field.text.strip() for blank, field in zip(blanks, self.fields, strict=True)}

    @property
    def blank(self) -> Blank | None:
        """The value that is written now."""
        return self.sheet.blanks[self.place] if self.sheet is not None else None

    def go(self, step: int) -> None:
        """Go to another value, round at the ends."""
        if self.sheet is not None:
            self.fields[self.place] = Field.holding(self.fields[self.place].text)
            self.place = (self.place + step) % len(self.fields)
            self.repaint()

    def press(self, key: str, character: str | None) -> bool:
        """Take a key for the value that is written; return whether that changed it."""
        if self.blank is None:
            return False
        old = self.fields[self.place]
        words = self.blank.words
        if words and key in ("left", "right", "space"):
            return self.put(Field.holding(_next(words, old.text, -1 if key == "left" else 1)))
        return self.put(old.press(key, character) or old)

    def put(self, field: Field) -> bool:
        """Put another field in the place of the one that is written in; return whether its text differs."""
        old, self.fields[self.place] = self.fields[self.place], field
        self.repaint()
        return field.text != old.text

    def tell(self, told: Told) -> None:
        """Show what the values lead to."""
        self.told = told
        self.repaint()

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell the title, what the values lead to, the headings, a value, or what is said of them."""
        if self.sheet is None:
            return ()
        if y == 0:
            return ((clip(f" {self.sheet.title}", width), "title"),)
        if y == 1:
            return ((clip(f" {self.told.text}", width), self.told.role),)
        keys = max(width_of(blank.key) for blank in self.sheet.blanks) + 2
        if y == 2:
            return ((f" {fit('', keys)}{fit('value', FIELD)}may be", "heading"),)
        room = self._room
        place = self._first + y - HEAD
        if y < HEAD + room:
            return self._blank(place, keys, width) if place < len(self.sheet.blanks) else ()
        return self._about(y - HEAD - room, width)

    @property
    def _room(self) -> int:
        count = len(self.sheet.blanks) if self.sheet is not None else 0
        return max(1, min(count, self.size.height - HEAD - LEAST_BENEATH))

    @property
    def _first(self) -> int:
        return max(0, self.place - self._room + 1)

    def _blank(self, place: int, keys: int, width: int) -> Iterator[Piece]:
        assert self.sheet is not None  # noqa: S101 - nothing is painted without one
        blank, field = self.sheet.blanks[place], self.fields[place]
        yield f" {fit(blank.key, keys)}", "row" if place == self.place else ""
        if place == self.place:
            yield from field_pieces(field, FIELD - 2)
        else:
            yield fit(clip(field.text, FIELD - 2), FIELD - 2), ""
        yield clip(f"  {blank.may_be}", max(0, width - 1 - keys - FIELD + 2)), "faint"

    def _about(self, y: int, width: int) -> Iterator[Piece]:
        assert self.sheet is not None and self.blank is not None  # noqa: S101, PT018 - as above
        said: list[tuple[str, str]] = [("", "")]
        said += [(line, "") for line in wrapped(f"{self.blank.key}: {self.blank.meaning}", width - 2)]
        said += [(line, "warning") for line in wrapped(self.told.doubt, width - 2)]
        said.append(("", ""))
        said += [(line, "faint") for text in self.sheet.about for line in wrapped(text, width - 2)]
        if y < len(said):
            yield clip(f" {said[y][0]}", width), said[y][1]


def _next(words: tuple[str, ...], now: str, step: int) -> str:
    if now not in words:
        return words[0] if step > 0 else words[-1]
    return words[(words.index(now) + step) % len(words)]
