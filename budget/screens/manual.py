"""The Manual screen: one page of the manual at a time."""

from __future__ import annotations

from functools import cache
from importlib import resources

from textual.app import ComposeResult
from textual.containers import VerticalScroll
from textual.widgets import Markdown


@cache
def pages() -> tuple[tuple[str, str], ...]:
    """Return the pages of the manual, name and title, in the order of their names; `index` first."""
    folder = resources.files("budget") / "manual"
    if not folder.is_dir():
        return ()
    found = [
        (entry.name, title_of(entry.read_text("utf-8"), entry.name))
        for entry in folder.iterdir()
        if entry.name.endswith(".md")
    ]
    return tuple(sorted(found, key=lambda page: (page[0] != "index.md", page[0])))


def title_of(text: str, name: str) -> str:
    """Return the first heading of a page, or its name."""
    headings = (line.lstrip("# ").strip() for line in text.splitlines() if line.startswith("#"))
    return next(headings, name.removesuffix(".md"))


class ManualScreen(VerticalScroll):
    """A page of the manual."""

    def __init__(self) -> None:
        """Show nothing yet."""
        super().__init__(id="manual")
        self.page = Markdown("", open_links=False)

    def compose(self) -> ComposeResult:
        """One page."""
        yield self.page

    def open(self, name: str) -> None:
        """Show a page from its beginning."""
        text = (resources.files("budget") / "manual" / name).read_text("utf-8")
        self.page.update(text)
        self.scroll_home(animate=False)
