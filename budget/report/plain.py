"""Text from a file as plain text: one line, nothing that a terminal, a pager or a screen reader would obey."""

from __future__ import annotations

import unicodedata

UNKNOWN = "\N{REPLACEMENT CHARACTER}"

MOST_MARKS = 4
"""Marks that one letter may carry, which no script exceeds; more of them would cover the lines around it."""


def plain(text: str) -> str:
    """Return a text as one line; control, format and direction characters are replaced by a sign, breaks by a space.

    Of marks piled upon a letter those too many are left out.
    """
    if text.isascii() and text.isprintable():
        return text
    return thinned("".join(_shown(c) for c in text))


def thinned(text: str) -> str:
    """Return a text without the marks that are too many on their letter; none of them takes room of its own."""
    kept: list[str] = []
    piled = 0
    for c in text:
        piled = piled + 1 if unicodedata.category(c) in ("Mn", "Me") else 0
        if piled <= MOST_MARKS:
            kept.append(c)
    return "".join(kept)


def _shown(c: str) -> str:
    if c.isprintable():
        return c
    if c in "\n\r\t\v\f" or unicodedata.category(c) in ("Zs", "Zl", "Zp"):
        return " "
    return UNKNOWN
