"""The Manual screen: one page of the manual at a time."""

from __future__ import annotations

from textual.app import ComposeResult
from textual.containers import VerticalScroll
from textual.widgets import Markdown

from budget.manual import page


class ManualScreen(VerticalScroll):
    """A page of the manual."""

    def __init__(self) -> None:
        """Show nothing yet."""
        super().__init__(id="manual")
        self.page = Markdown("", open_links=False)

    def compose(self) -> ComposeResult:
        """One page."""
        yield self.page

    def open(self, topic: str) -> None:
        """Show a page from its beginning."""
        self.page.update(page(topic))
        self.scroll_home(animate=False)
