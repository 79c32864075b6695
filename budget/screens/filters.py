"""Line filters of the whole app: what any widget paints is made harmless, and in ASCII where that is asked for."""

from __future__ import annotations

from rich.segment import Segment
from textual.color import Color
from textual.filter import LineFilter

from budget.screens.safe import ascii_only, harmless


class SafeFilter(LineFilter):
    """Take control characters, escape sequences and direction marks out of what is painted."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:  # noqa: ARG002
        """Return the segments without them, as wide as they were."""
        return [
            segment if segment.control or segment.text.isprintable() else Segment(harmless(segment.text), segment.style)
            for segment in segments
        ]


class AsciiFilter(LineFilter):
    """Put boxes, blocks, marks and letters in ASCII."""

    def apply(self, segments: list[Segment], background: Color) -> list[Segment]:  # noqa: ARG002
        """Return the segments in ASCII, as wide as they were."""
        return [
            segment if segment.control or segment.text.isascii() else Segment(ascii_only(segment.text), segment.style)
            for segment in segments
        ]
