"""Text from a file as plain text: one line, nothing that a terminal, a pager or a screen reader would obey."""

from __future__ import annotations

import unicodedata

UNKNOWN = "\N{REPLACEMENT CHARACTER}"


def plain(text: str) -> str:
    """Return a text as one line; control, format and direction characters are replaced by a sign, breaks by a space."""
    if text.isascii() and text.isprintable():
        return text
    return "".join(_shown(c) for c in text)


def _shown(c: str) -> str:
    if c.isprintable():
        return c
    if c in "\n\r\t\v\f" or unicodedata.category(c) in ("Zs", "Zl", "Zp"):
        return " "
    return UNKNOWN
