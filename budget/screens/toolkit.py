"""What the toolkit gets from us: a screen that sends no more than it must, filters for whatever any widget paints,
and the theme for its own widgets.
"""

from __future__ import annotations

from dataclasses import replace

from rich.console import Console
from rich.control import Control
from rich.segment import Segment
from textual._compositor import ChopsUpdate, Compositor
from textual.color import Color
from textual.filter import LineFilter
from textual.screen import Screen
from textual.theme import BUILTIN_THEMES
from textual.theme import Theme as WidgetTheme

from budget.screens.safe import ascii_only, harmless
from budget.screens.themes import Theme, hex_of


class FrugalScreen(Screen[None]):
    """A screen that sends the cells that were asked for and none to their left."""

    def __init__(self) -> None:
        """Make it with its own compositor."""
        super().__init__(id="_default")
        self._compositor = _FrugalCompositor()


class _FrugalCompositor(Compositor):
    def render_partial_update(self) -> ChopsUpdate | None:
        update = super().render_partial_update()
        return _FrugalUpdate(update.chops, update.spans, update.chop_ends) if update is not None else None


class _FrugalUpdate(ChopsUpdate):
    """The toolkit's own update begins each span at the left edge of everything that changed on the screen."""

    def render_segments(self, console: Console) -> str:
        sent: list[str] = []
        for y, first, last in self.spans:
            for end, (x, strip) in zip(self.chop_ends[y], self.chops[y].items(), strict=False):
                if strip is None or x >= last or end <= first:
                    continue
                left = max(x, first)
                sent.append(Control.move_to(left, y).segment.text)
                sent.append(strip.crop(left - x, min(end, last) - x).render(console))
        return "".join(sent)


class SafeFilter(LineFilter):
    """Take control characters, escape sequences and direction marks out of what is painted."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:  # noqa: ARG002
        """Return the segments without them, as wide as they were."""
        return [segment if segment.control else Segment(harmless(segment.text), segment.style) for segment in segments]


class AsciiFilter(LineFilter):
    """Put boxes, blocks, marks and letters in ASCII."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:  # noqa: ARG002
        """Return the segments in ASCII, as wide as they were."""
        return [
            segment if segment.control or segment.text.isascii() else Segment(ascii_only(segment.text), segment.style)
            for segment in segments
        ]


def widget_theme(theme: Theme) -> WidgetTheme:
    """Return the colours of a theme for the widgets of the toolkit: the text editor and the manual."""
    if theme.follows_terminal:
        return replace(BUILTIN_THEMES["ansi-dark"], name=theme.name)
    text, cursor, field, row = (theme.whole(role) for role in ("text", "cursor", "field", "row"))
    return WidgetTheme(
        name=theme.name,
        primary=hex_of(theme.whole("index")),
        secondary=hex_of(theme.whole("title")),
        accent=hex_of(theme.whole("key")),
        warning=hex_of(theme.whole("warning")),
        error=hex_of(theme.whole("error")),
        success=hex_of(theme.whole("good")),
        foreground=hex_of(text),
        background=hex_of(text, back=True),
        surface=hex_of(text, back=True),
        panel=hex_of(row, back=True),
        dark=theme.dark,
        variables={
            "block-cursor-foreground": hex_of(cursor),
            "block-cursor-background": hex_of(cursor, back=True),
            "input-cursor-foreground": hex_of(cursor),
            "input-cursor-background": hex_of(cursor, back=True),
            "input-selection-foreground": hex_of(field),
            "input-selection-background": hex_of(field, back=True),
        },
    )
