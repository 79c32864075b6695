"""The two lines at the foot: what the program has to say, or a field to write in, and the keys that work here."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from budget.screens.actions import BY_ID, FOOTER, Place
from budget.screens.field import Field, field_pieces
from budget.screens.keymap import Keymap
from budget.screens.lines import Lines, Piece
from budget.screens.safe import clip, width_of
from budget.screens.themes import Theme

HEIGHT = 2

READ: tuple[Place, ...] = ("findings", "detail", "explain")
"""Places where what is marked is told whole, on both lines where it needs them."""


class Foot(Lines):
    """A message stands until the next key; without one, the row under the cursor is told."""

    def __init__(self, theme: Theme, keymap: Keymap) -> None:
        """Show the keys of the ledger."""
        super().__init__(theme, id="foot")
        self.keymap = keymap
        self.place: Place = "ledger"
        self.message = ""
        self.role = ""
        self.about: tuple[str, str] = ("", "")
        self.label = ""
        self.field: Field | None = None

    def say(self, message: str, role: str = "") -> None:
        """Say something in a style; "" says nothing."""
        self.message, self.role = message, role
        self.repaint()

    def tell(self, place: Place, about: tuple[str, str]) -> None:
        """Tell where the hands are and, with its role, what is under the cursor."""
        self.place, self.about = place, about
        self.repaint()

    def ask(self, label: str, field: Field | None) -> None:
        """Show a field to write in behind its label; None takes it away."""
        self.label, self.field = label, field
        self.repaint()

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Spell the message or the field, and below it the keys, or what is wrong with what was written."""
        if y == 0:
            return self._first(width)
        if self.field is not None and self.message:
            return ((clip(f" {self.message}", width), self.role),)
        text, role = self._told
        rest = broken(text, width - 2)[1] if self.field is None and (self.message or self.place in READ) else ""
        return ((clip(f" {rest}", width), role),) if rest else self._keys(width)

    @property
    def _told(self) -> tuple[str, str]:
        return (self.message, self.role) if self.message else self.about

    def _first(self, width: int) -> Iterator[Piece]:
        if self.field is None:
            text, role = self._told
            whole = not self.message and self.place not in READ
            yield clip(f" {text if whole else broken(text, width - 2)[0]}", width), role
            return
        label = clip(f" {self.label} ", width // 2)
        yield label, "heading"
        yield from field_pieces(self.field, width - width_of(label))

    def _keys(self, width: int) -> Iterator[Piece]:
        taken = 0
        for action in FOOTER[self.place]:
            key = self.keymap.shown(action, place=self.place)
            text = BY_ID[action].short or BY_ID[action].title.lower()
            need = width_of(key) + width_of(text) + 4
            if not key or taken + need > width:
                continue
            taken += need
            yield f" {key}", "key"
            yield f" {text}  ", "faint"


def broken(text: str, width: int) -> tuple[str, str]:
    """Return a text in two lines, broken at a space where that can be; the second is empty for a short one."""
    if width_of(text) <= width:
        return text, ""
    cut = next((end for end in range(len(text), 0, -1) if width_of(text[:end]) <= width), 1)
    space = text.rfind(" ", 0, cut + 1)
    cut = space if space > 0 else cut
    return text[:cut], text[cut:].strip()
