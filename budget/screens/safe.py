"""Text from a file, made safe to show: no control characters, no direction marks, nothing that shifts a column."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable
from functools import lru_cache

from rich.cells import get_character_cell_size

from budget.report.plain import UNKNOWN, plain, thinned

_ASCII = str.maketrans({
    "»": ">", "█": "#", "░": "-", "▓": "#", "▒": "=", "▸": ">", "…": "~", "·": ".", "→": ">", "×": "x",
    "−": "-", "±": "~", "²": "2", "³": "3", "°": "o", "µ": "u", "μ": "u", "Δ": "D", UNKNOWN: "?", "\xa0": " ",
    **dict.fromkeys("─━╌╍┄┅═▁▔‾", "-"),
    **dict.fromkeys("│┃║▏▎▍▌▐▕╎┆", "|"),
    **dict.fromkeys("┌┐└┘├┤┬┴┼╭╮╰╯╔╗╚╝╠╣╦╩╬┏┓┗┛┣┫┳┻╋", "+"),
    **dict.fromkeys("▂▃▄▅▆▇▀▊▋▉▆", "#"),
    **dict.fromkeys("‘’‛", "'"),
    **dict.fromkeys("“”„", '"'),
    **dict.fromkeys("‐‑‒–—", "-"),
    **dict.fromkeys("•●◆■", "*"),
})  # fmt: skip


@lru_cache(8192)
def steady(text: str) -> str:
    """Return a text of which every terminal agrees how wide it is: for IDs that stand before other columns.

    Combining marks, joined emoji and the like become `?`; the whole text is shown where nothing follows it.
    """
    if text.isascii() and text.isprintable():
        return text
    return "".join(c if _is_steady(c) else "?" for c in plain(unicodedata.normalize("NFC", text)))


def width_of(text: str) -> int:
    """Return how many cells a text takes."""
    if text.isascii():
        return len(text)
    return sum(_cells(c) for c in text)


def fit(text: str, width: int, *, right: bool = False) -> str:
    """Return a text of exactly so many cells: padded, or clipped with an ellipsis at its end."""
    taken = width_of(text)
    if taken > width:
        text = clip(text, width)
        taken = width_of(text)
    pad = " " * (width - taken)
    return pad + text if right else text + pad


def clip(text: str, width: int) -> str:
    """Return a text of at most so many cells, the last of them an ellipsis where it was longer."""
    if width_of(text) <= width:
        return text
    if width <= 0:
        return ""
    kept, taken = [], 0
    for c in text:
        taken += _cells(c)
        if taken > width - 1:
            break
        kept.append(c)
    return "".join(kept) + "…"


def wrapped(text: str, width: int) -> list[str]:
    """Return a text in lines of at most so many cells, broken at spaces; a longer word stands on a line of its own."""
    return packed(text.split(), width, " ")


def packed(pieces: Iterable[str], width: int, gap: str = "  ") -> list[str]:
    """Return pieces of text in lines of at most so many cells, none of them broken; a longer one has its own line."""
    lines: list[str] = []
    for piece in pieces:
        joined = f"{lines[-1]}{gap}{piece}" if lines else piece
        if lines and width_of(joined) <= width:
            lines[-1] = joined
        elif piece:
            lines.append(piece)
    return lines


@lru_cache(8192)
def harmless(text: str) -> str:
    """Return a piece of a painted line without control characters and piled up marks, as wide as it was counted."""
    if text.isascii() and text.isprintable():
        return text
    return thinned("".join(c if c.isprintable() or _is_space(c) else " " * _cells(c) for c in text))


@lru_cache(8192)
def ascii_only(text: str) -> str:
    """Return a painted piece in ASCII, as wide as it was: marks, boxes and blocks by their likeness, letters bare."""
    if text.isascii():
        return text
    return "".join(_ascii_of(c) for c in text.translate(_ASCII))


def _is_steady(c: str) -> bool:
    if c.isascii():
        return True
    if ord(c) >= 0x1F000 or unicodedata.category(c)[0] in "MC" or 0x1160 <= ord(c) <= 0x11FF:
        return ord(c) >= 0x20000 and unicodedata.east_asian_width(c) == "W"
    return not 0xFE00 <= ord(c) <= 0xFE0F


def _cells(c: str) -> int:
    return get_character_cell_size(c)


def _is_space(c: str) -> bool:
    return unicodedata.category(c) == "Zs"


def _ascii_of(c: str) -> str:
    if c.isascii():
        return c
    width = _cells(c)
    bare = "".join(b for b in unicodedata.normalize("NFKD", c) if b.isascii() and b.isprintable())
    if not bare and width:
        bare = "?"
    return bare[:width].ljust(width)
