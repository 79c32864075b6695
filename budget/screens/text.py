"""The Text screen: the file itself in a plain editor."""

from __future__ import annotations

from textual.widgets import TextArea

from budget.screens.rows import Row
from budget.screens.writing import index_of


class TextScreen(TextArea):
    """The text of the run; it goes into the design when one asks for it or leaves the screen."""

    def __init__(self) -> None:
        """Make an empty editor without a blinking cursor."""
        super().__init__(id="text", soft_wrap=False, show_line_numbers=True, tab_behavior="focus")
        self.cursor_blink = False
        self._opened = ""

    def open(self, text: str, row: Row | None) -> None:
        """Show a text, with the cursor on a row's table."""
        self.load_text(text)
        self._opened = self.text
        header = index_of(text).header(row.path) if row is not None else None
        if header is not None:
            self.go_to_line(text.count("\n", 0, header.start) + 1)

    @property
    def changed(self) -> bool:
        """Whether something was written that is not in the design yet."""
        return self.text != self._opened

    def taken(self) -> None:
        """Remember that what is written now is in the design."""
        self._opened = self.text

    def go_to_line(self, line: int) -> None:
        """Put the cursor at the start of a line, counted from 1."""
        self.move_cursor((max(0, line - 1), 0))
        self.scroll_cursor_visible(center=True)
