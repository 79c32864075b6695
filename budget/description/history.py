"""The texts that a description has had, one step after the other."""

from dataclasses import dataclass
from typing import NamedTuple, Self


class Step(NamedTuple):
    """A text, what led to it, and the place it was made at, which means something to whoever gave it."""

    text: str
    label: str
    mark: object


@dataclass(frozen=True, slots=True)
class History:
    """All texts since the file was opened, without limit; a value, so each change gives a new one."""

    steps: tuple[Step, ...]
    position: int = 0

    @classmethod
    def of(cls, text: str, mark: object = None) -> Self:
        """Begin with the text as opened."""
        return cls((Step(text, "", mark),))

    @property
    def text(self) -> str:
        """The text now."""
        return self.steps[self.position].text

    @property
    def label(self) -> str:
        """What led to the text now: what an undo would take back; "" where there is nothing to undo."""
        return self.steps[self.position].label

    @property
    def redo_label(self) -> str:
        """What a redo would bring back; "" where there is nothing to redo."""
        return self.steps[self.position + 1].label if self.can_redo else ""

    @property
    def mark(self) -> object:
        """The place of the step that led to the text now."""
        return self.steps[self.position].mark

    @property
    def can_undo(self) -> bool:
        """Whether there is an earlier text."""
        return self.position > 0

    @property
    def can_redo(self) -> bool:
        """Whether there is a later text."""
        return self.position + 1 < len(self.steps)

    def push(self, text: str, label: str, mark: object = None) -> Self:
        """Add a text; what had been undone is dropped. The same text again is no step."""
        if text == self.text:
            return self
        steps = (*self.steps[: self.position + 1], Step(text, label, mark))
        return type(self)(steps, self.position + 1)

    def undo(self) -> Self:
        """Go one step back, where there is one."""
        return type(self)(self.steps, self.position - 1) if self.can_undo else self

    def redo(self) -> Self:
        """Go one step forward, where there is one."""
        return type(self)(self.steps, self.position + 1) if self.can_redo else self
