"""A line of text that is being written: what the keys make of it, and what part of it a width shows."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from budget.report.plain import plain
from budget.screens.lines import Piece
from budget.screens.safe import fit, width_of

LONGEST = 2000
"""Characters; no value of a run is longer."""


@dataclass(frozen=True, slots=True)
class Field:
    """A text and the place in it where the next letter goes. `fresh`: the first letter replaces the whole text."""

    text: str = ""
    at: int = 0
    fresh: bool = False

    @classmethod
    def holding(cls, text: str) -> Field:
        """Open a field on a text, all of it marked: a letter replaces it, an arrow keeps it."""
        return cls(text, len(text), fresh=bool(text))

    def press(self, key: str, character: str | None) -> Field | None:
        """Return what a key makes of the field; None where the key means nothing to a field."""
        match key:
            case "left" | "ctrl+b":
                return self._move(self.at - 1)
            case "right":
                return self._move(self.at + 1)
            case "home":
                return self._move(0)
            case "end" | "ctrl+e":
                return self._move(len(self.text))
            case "backspace" | "ctrl+h":
                return Field() if self.fresh else self._cut(self.at - 1, self.at)
            case "delete":
                return Field() if self.fresh else self._cut(self.at, self.at + 1)
            case "ctrl+w":
                return self._cut(self._word_before(), self.at)
            case "ctrl+u":
                return self._cut(0, self.at)
            case "ctrl+k":
                return self._cut(self.at, len(self.text))
        if character is not None and character.isprintable():
            return self.insert(character)
        return None

    def insert(self, text: str) -> Field:
        """Return the field with a text put in, as from the clipboard: one line, without control characters."""
        text = plain(text).strip() if len(text) > 1 else plain(text)
        if self.fresh:
            return Field(text[:LONGEST], min(len(text), LONGEST))
        whole = self.text[: self.at] + text + self.text[self.at :]
        if len(whole) > LONGEST:
            return self
        return Field(whole, self.at + len(text))

    def window(self, width: int) -> tuple[str, str, str]:
        """Return what `width` cells show: the part before the place of writing, the letter there, the part after it."""
        letter = self.text[self.at : self.at + 1] or " "
        start = 0
        while start < self.at and width_of(self.text[start : self.at]) + width_of(letter) > width:
            start += 1
        before = self.text[start : self.at]
        room = width - width_of(before) - width_of(letter)
        after = ""
        for c in self.text[self.at + 1 :]:
            if width_of(after + c) > room:
                break
            after += c
        return before, letter, after

    def _move(self, at: int) -> Field:
        return replace(self, at=min(max(at, 0), len(self.text)), fresh=False)

    def _cut(self, start: int, end: int) -> Field:
        start = max(start, 0)
        return Field(self.text[:start] + self.text[end:], start)

    def _word_before(self) -> int:
        kept = self.text[: self.at].rstrip()
        return kept.rfind(" ") + 1


def field_pieces(field: Field, width: int) -> Iterator[Piece]:
    """Spell a field that is written in: its text, and the place of the next letter the other way round."""
    before, letter, after = field.window(width - 1)
    shown = "cursor" if field.fresh else "field"
    yield before, shown
    yield letter, "cursor"
    yield fit(after, width - width_of(before) - width_of(letter)), "field"
