"""A widget made of lines of text, of which only the cells that differ are painted again."""

from __future__ import annotations

from collections.abc import Iterable

from rich.cells import cell_len
from rich.segment import Segment
from rich.style import Style
from textual.geometry import Region
from textual.strip import Strip
from textual.widget import Widget

from budget.screens.safe import fit
from budget.screens.themes import Theme

Piece = tuple[str, str]
"""A text and the role of its style; roles are joined by a space, the later one wins."""


GAP = 6
"""Cells between two changes that are sent rather than skipped."""


class Lines(Widget):
    """Lines of text that a subclass spells in `line`; `repaint` sends what differs from what is on the screen."""

    BLANK = False
    can_focus = False

    def __init__(self, theme: Theme, *, id: str) -> None:  # noqa: A002
        """Take the theme whose styles the roles name."""
        super().__init__(id=id, markup=False)
        self.colours = theme
        self._painted: dict[int, Strip] = {}
        self._styles: dict[str, Style] = {}

    def line(self, y: int, width: int) -> Iterable[Piece]:
        """Return what stands on the line `y` of the widget, as pieces of text with their roles."""
        raise NotImplementedError

    def render_line(self, y: int) -> Strip:
        """Return a line as it was last spelled."""
        strip = self._painted.get(y)
        if strip is None or strip.cell_length != self.size.width:
            strip = self._painted[y] = self._spell(y)
        return strip

    def repaint(self) -> None:
        """Spell every line again and send the cells that differ from what is on the screen.

        Of a widget that is not in front, what stood there is forgotten: it would be shown again for a moment.
        """
        if not self.is_mounted:
            return
        if not self.size:
            self._painted.clear()
            return
        for y in range(self.size.height):
            new = self._spell(y)
            old = self._painted.get(y)
            if old == new:
                continue
            self._painted[y] = new
            spans = [(0, self.size.width)]
            if old is not None and old.cell_length == new.cell_length:
                spans = differing(old, new)
            self.refresh(*(Region(first, y, last - first, 1) for first, last in spans))

    def keep_in_view(self) -> None:
        """Scroll to the cursor, where there is one; called when the widget has another size."""

    def on_resize(self) -> None:
        """Keep what is under the cursor in view."""
        # It has just been painted whole; the toolkit would do so again with the next key.
        self._exchange_repaint_regions()
        self.keep_in_view()
        self.repaint()

    def style_of(self, roles: str) -> Style:
        """Return the style of a role, or of several joined, on the background of the text."""
        style = self._styles.get(roles)
        if style is None:
            style = self.colours.styles["text"]
            for role in roles.split():
                style += self.colours.styles[role]
            self._styles[roles] = style
        return style

    def _spell(self, y: int) -> Strip:
        width = self.size.width
        segments: list[Segment] = []
        for text, roles in self.line(y, width):
            style = self.style_of(roles)
            if segments and segments[-1].style == style:
                segments[-1] = Segment(segments[-1].text + text, style)
            elif text:
                segments.append(Segment(text, style))
        return Strip(segments).adjust_cell_length(width, self.style_of(""))


def scrolled(top: int, cursor: int, page: int, count: int) -> int:
    """Return the first row to show of so many, with the cursor in view.

    It moves by a third of a page at a time: on a narrow link a whole page of rows is dear.
    """
    if cursor < top or cursor >= top + page:
        step = page // 3
        top = cursor - step if cursor < top else cursor - page + 1 + step
    return min(max(top, 0), max(0, count - page))


def differing(old: Strip, new: Strip) -> list[tuple[int, int]]:
    """Return the spans of cells in which two lines of one length differ: first cell, and the one behind the last.

    Spans that almost touch are one: to place the cursor costs as much as a few cells do.
    """
    before, after = _cells(old), _cells(new)
    spans: list[tuple[int, int]] = []
    for x in range(len(after)):
        if x < len(before) and before[x] == after[x]:
            continue
        first, last = x, x + 1
        while first > 0 and not after[first][0]:
            first -= 1
        while last < len(after) and not after[last][0]:
            last += 1
        if spans and first - spans[-1][1] <= GAP:
            spans[-1] = (spans[-1][0], max(last, spans[-1][1]))
        else:
            spans.append((first, last))
    return spans


def _cells(strip: Strip) -> list[tuple[str, Style | None]]:
    """Return the cells of a line: a character and its style; an empty text for the second half of a wide one."""
    cells: list[tuple[str, Style | None]] = []
    for text, style, _ in strip:
        if text.isascii():
            cells += [(c, style) for c in text]
            continue
        for c in text:
            width = cell_len(c)
            if width == 0 and cells:
                cells[-1] = (cells[-1][0] + c, style)
            elif width:
                cells += [(c, style), *[("", style)] * (width - 1)]
    return cells


def spread(left: str, right: str, width: int) -> tuple[str, str]:
    """Return two texts for the two ends of a line, the left one clipped where they would meet."""
    room = max(0, width - len(right))
    return fit(left, room), right[:width]
