"""What differs between versions of a run as plain lines: a heading for each table, then a line for each key."""

from __future__ import annotations

import tomllib
import unicodedata
from collections.abc import Iterable, Sequence
from itertools import takewhile
from typing import Any

from budget.description.differences import Change, TableChanges, compare, stated
from budget.description.finding import Path
from budget.description.merging import MergeTable
from budget.report.plain import plain
from budget.report.table import NONE, WIDE, Column, table

_INDENT = "  "
_CUT = "..."
_BECOMES = "->"
_LEAST = 10
"""Columns that a value keeps before its key is cut too."""


def difference_lines(changes: Iterable[TableChanges], width: int = WIDE, most: int | None = None) -> tuple[str, ...]:
    """Return the lines of a comparison: what happened to each table, then key, value before and value after.

    No line is wider than `width` columns. With `most`, there are no more lines than that; the last one says how many
    were left out.
    """
    lines: list[str] = []
    for one in changes:
        lines.append(_heading(one))
        rows = [_row(change, len(one.table)) for change in one.changes]
        if one.kind == "added":
            lines += _columns([(key, after) for key, _, after in rows], width)
        elif one.kind == "removed":
            lines += _columns([(key, before) for key, before, _ in rows], width)
        elif one.kind == "comment":
            texts = dict.fromkeys(text for row in rows for text in row[1:] if text != NONE)
            lines += [_INDENT + text for text in texts]
        else:
            lines += _columns([(key, before, _BECOMES, after) for key, before, after in rows], width)
        lines += [_INDENT + plain(line) for line in one.lines]
    return _fitted(lines, width, most)


def merge_lines(merge_table: MergeTable, width: int = WIDE, most: int | None = None) -> tuple[str, ...]:
    """Return the lines of a table in three versions: who changed it, then key, as it was, yours and on disk.

    Only keys that are not the same everywhere are told. Where no common version has the table, there is no column for
    it. `width` and `most` as in `difference_lines`.
    """
    texts = (merge_table.base, merge_table.ours, merge_table.theirs)
    first = 1 if merge_table.base is None else 0
    values = [stated(text or "") for text in texts]
    rows: list[tuple[str, ...]] = []
    for path in dict.fromkeys(path for one in (*values[1:], values[0]) for path in one):
        raw = [one.get(path) for one in values[first:]]
        if len({_meaning(text) for text in raw}) > 1:
            rows.append((_words(path[len(merge_table.table) :]), *_shown(raw)))
    spelling = _spelling(merge_table)
    if spelling is not None:
        rows.append((_SPELLING, *spelling[first:]))
    titles = ("", *("as it was", "yours", "on disk")[first:])
    lines = [f"{_named(merge_table.table)}: {_standing(merge_table)}", *_columns(rows, width, titles)]
    return _fitted(lines, width, most)


def clipped(text: str, width: int) -> str:
    """Return a text in so many columns, with dots for what was cut off."""
    if _cells(text) <= width:
        return text
    kept, used = "", min(len(_CUT), width)
    for c in text:
        used += _cells(c)
        if used > width:
            break
        kept += c
    return kept + _CUT[: max(width, 0)]


_SPELLING = "comments or spelling"
_OTHERWISE = "ordered or spaced otherwise"


def _heading(one: TableChanges) -> str:
    if one.kind == "text":
        return "the text, line by line, as one version is not TOML: changed"
    if one.kind == "comment":
        is_new = all(change.before is None for change in one.changes)
        is_gone = all(change.after is None for change in one.changes)
        return f"a comment between tables: {'added' if is_new else 'removed' if is_gone else 'moved'}"
    return f"{_named(one.table)}: {one.kind}"


def _named(path: Path) -> str:
    return " ".join(plain(str(part)) for part in path) or "the file"


def _standing(one: MergeTable) -> str:
    """Say who changed a table, and what became of it."""
    if one.base is None and one.standing == "both":
        if one.ours is None or one.theirs is None:
            return "only on disk" if one.ours is None else "only in your version"
        return "not the same in your version and on disk"
    yours, disk = _happened(one.base, one.ours), _happened(one.base, one.theirs)
    if one.standing == "both":
        return f"{yours} by you and on disk" if yours == disk else f"{yours} by you, {disk} on disk"
    if one.standing == "same":
        return f"{yours} by you and on disk alike"
    return f"{yours} by you" if one.standing == "ours" else f"{disk} on disk"


def _happened(before: str | None, after: str | None) -> str:
    return "added" if before is None else "removed" if after is None else "changed"


def _row(change: Change, size: int) -> tuple[str, str, str]:
    """Return the key of a change in words and its two values; the keys of its table are left out."""
    if change.about == "value":
        before, after = _shown([change.before, change.after])
        return _words(change.path[size:], change.name), before, after
    before, after = (plain("; ".join((text or "").split("\n"))) for text in (change.before, change.after))
    if change.about == "place":
        return "place", f"behind {before}" if before else "at the top", f"behind {after}" if after else "at the top"
    if change.about == "spelling":
        return _SPELLING, before or NONE, after or (NONE if before else _OTHERWISE)
    return change.about, before or NONE, after or NONE


def _spelling(one: MergeTable) -> tuple[str, str, str] | None:
    """Return what each version changed besides values, where all that matter have the table."""
    before = one.base if one.base is not None else one.ours
    told: list[tuple[str, str] | None] = []
    for after in (one.ours, one.theirs):
        rows = [
            _row(change, 0)[1:]
            for found in (compare(before, after) if before is not None and after is not None else ())
            for change in found.changes
            if change.about in ("spelling", "comment")
        ]
        texts = ("; ".join(dict.fromkeys(was for was, _ in rows)), "; ".join(now for _, now in rows))
        told.append(texts if rows else None)
    if not any(told):
        return None
    base = "; ".join(dict.fromkeys(texts[0] for texts in told if texts))
    yours, disk = (texts[1] if texts else base for texts in told)
    return base, yours, disk


def _words(path: Path, name: str = "") -> str:
    """Return the keys below a table in words: "item 1 Strainer, drop"; "stated" for the table itself."""
    words: list[str] = []
    last = max((place for place, part in enumerate(path) if isinstance(part, int)), default=None)
    for place, part in enumerate(path):
        if isinstance(part, str):
            words.append(plain(part))
        else:
            number = f"{words.pop() if words else 'number'} {part + 1}"
            words.append(f"{number} {plain(name)}" if name and place == last else number)
    return ", ".join(words) or "stated"


def _shown(raw: Sequence[str | None]) -> list[str]:
    """Return values as they read in the file, without quotes unless these are what differs."""
    texts = [NONE if one is None else plain(_read(one)) for one in raw]
    if len(set(texts)) == len(set(raw)):
        return texts
    return [NONE if one is None else plain(" ".join(one.split())) for one in raw]


def _meaning(raw: str | None) -> str:
    """Return what tells a value from others, however it is spelled."""
    try:
        return "" if raw is None else repr(tomllib.loads(f"x = {raw}")["x"])
    except (tomllib.TOMLDecodeError, RecursionError, ValueError):
        return raw or ""


def _read(raw: str) -> str:
    """Return a value without the quotes of its texts: "elbow 90: 4, tee branch: 1"."""
    if raw[:1] not in ("'", '"', "{", "["):
        return raw
    try:
        return _said(tomllib.loads(f"x = {raw}", parse_float=str)["x"], top=True)
    except (tomllib.TOMLDecodeError, RecursionError, ValueError):
        return raw


def _said(value: Any, *, top: bool = False) -> str:
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, list):
        return "[" + ", ".join(_said(one) for one in value) + "]"
    if isinstance(value, dict):
        inside = ", ".join(f"{key}: {_said(one)}" for key, one in value.items())
        return inside if top and inside else f"{{{inside}}}"
    return str(value)


def _columns(rows: Sequence[Sequence[str]], width: int, titles: Sequence[str] = ()) -> list[str]:
    """Return rows in columns no wider than `width` in all; the widest values are cut first, then keys."""
    if not rows:
        return []
    every = [*rows, titles] if titles else list(rows)
    widths = [min(width, max(_cells(row[place]) for row in every)) for place in range(len(rows[0]))]
    room = max(width - len(_INDENT) - 2 * (len(widths) - 1), len(widths))
    while sum(widths) > room:
        values = [place for place in range(1, len(widths)) if widths[place] > _LEAST]
        widths[max(values or range(len(widths)), key=widths.__getitem__)] -= 1
    cut = [[clipped(cell, most) for cell, most in zip(_telling(row, widths), widths, strict=True)] for row in rows]
    columns = [Column(title, left=True) for title in titles or [""] * len(widths)]
    lines = table(columns, cut, _INDENT)
    return [line.rstrip() for line in lines[0 if titles else 1 :]]


def _telling(row: Sequence[str], widths: Sequence[int]) -> Sequence[str]:
    """Leave out how the values of a row begin alike, where they would be cut before they differ."""
    values = {cell for cell in row[1:] if cell not in (NONE, _BECOMES)}
    alike = sum(1 for _ in takewhile(lambda signs: len(set(signs)) == 1, zip(*values, strict=False))) - len(_CUT)
    if len(values) < 2 or all(_cells(cell) <= width for cell, width in zip(row[1:], widths[1:], strict=True)):
        return row
    if alike <= len(_CUT):
        return row
    return [row[0], *(_CUT + cell[alike:] if cell in values else cell for cell in row[1:])]


def _cells(text: str) -> int:
    """Return how many columns a text takes."""
    if text.isascii():
        return len(text)
    return sum(0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in text)


def _fitted(lines: Sequence[str], width: int, most: int | None) -> tuple[str, ...]:
    kept = list(lines)
    if most is not None and len(kept) > most:
        kept = [*kept[: max(most - 1, 0)], f"and {len(kept) - max(most - 1, 0)} more"]
    return tuple(clipped(line, width) for line in kept)
