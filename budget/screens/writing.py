"""From a cell to the key that it edits, and from what is typed to the value that goes into the file."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from functools import lru_cache
from typing import Any

from budget.description.finding import Level, Path
from budget.description.limits import LONGEST_NUMBER
from budget.description.schema import (
    KEYED,
    SINGLE,
    Array,
    Choice,
    Flag,
    Inline,
    Measure,
    Number,
    Size,
    Spec,
    Table,
    Text,
)
from budget.description.spans import SpanIndex
from budget.document import Snapshot
from budget.screens.rows import Row

_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")

_KEYS_OF_COLUMNS: Mapping[str, tuple[str, ...]] = {
    "size": ("size", "bore"),
    "length": ("length",),
    "flow": ("flow", "load"),
    "drop": ("drop", "static_drop"),
    "balance": ("balance",),
    "fittings": ("fittings",),
    "title": ("title",),
}
"""By column the keys that it shows, the usual one first."""

_ITEM_KEYS: Mapping[str, tuple[str, ...]] = {
    "id": ("name",),
    "title": ("name",),
    "size": ("kv", "cv", "k"),
    "length": ("equivalent_length",),
    "drop": ("drop", "final", "clean"),
}

_WHERE: Mapping[str, tuple[str, ...]] = {
    "source": ("title",),
    "section": ("size", "length", "balance", "fittings", "title"),
    "terminal": ("size", "length", "flow", "drop", "balance", "fittings", "title"),
}
"""By kind of row the columns that can be edited, besides the ID."""


class WritingError(ValueError):
    """What was typed can't stand there; the text says what would be right."""


def key_of_cell(text: str, row: Row, column: str) -> Path | None:
    """Return the keys of the value that a cell edits; None where the cell is computed.

    The ID of a source, section or terminal is its table itself: editing it is renaming.
    """
    if row.kind == "item":
        keys = _ITEM_KEYS.get(column, ())
        stated = [key for key in keys if is_stated(text, (*row.path, key))]
        only_stated = column in ("size", "length", "drop")
        return (*row.path, (stated or list(keys))[0]) if stated or (keys and not only_stated) else None
    if column == "id":
        return row.path
    if column not in _WHERE[row.kind]:
        return None
    keys = _KEYS_OF_COLUMNS[column]
    return (*row.path, next((key for key in keys if is_stated(text, (*row.path, key))), keys[0]))


def is_stated(text: str, path: Path) -> bool:
    """Whether a value stands in the text, at its own line or as a table."""
    index = index_of(text)
    return index.value(path) is not None or index.header(path) is not None


def written(text: str, path: Path) -> str:
    """Return a value as it is written in the text, a text without its quotes; "" where it is not stated."""
    span = index_of(text).value(path)
    if span is None:
        return ""
    raw = text[span.start : span.end]
    return str(tomllib.loads(f"x = {raw}")["x"]) if raw[:1] in "\"'" else raw


def stated_keys(text: str, table: Path) -> tuple[str, ...]:
    """Return the keys that a table states on lines of its own, in their order."""
    found = index_of(text).by_path.get(table)
    if found is None:
        return ()
    keys = (str(path[len(table)]) for _, _, path in found.statements if len(path) > len(table))
    return tuple(dict.fromkeys(keys))


def copied(text: str, table: Path | None, keys: tuple[str, ...]) -> dict[str, Any]:
    """Return some of the values that a table states, of the kinds that they are written in."""
    if table is None:
        return {}
    index = index_of(text)
    found: dict[str, Any] = {}
    for key in keys:
        span = index.value((*table, key))
        if span is not None:
            found[key] = tomllib.loads(f"x = {text[span.start : span.end]}")["x"]
    return found


def length_of(text: str, array: Path) -> int:
    """Return how many elements a list has, of tables with a header each or written in a line."""
    index = index_of(text)
    tables = {path[len(array)] for path in index.tables() if path[: len(array)] == array and len(path) > len(array)}
    return len(tables) or (len(index.items(array)) if index.value(array) is not None else 0)


def last_table(text: str, table: Path) -> Path:
    """Return the last table that belongs to a part: its own, or the last of its items and fittings."""
    tables = [path for path in index_of(text).tables() if path[:2] == table[:2]]
    return tables[-1] if tables else table


def start_of(text: str, path: Path) -> int:
    """Return where the header of a table begins."""
    header = index_of(text).header(path)
    return header.start if header else 0


def value_of(typed: str, path: Path, before: str) -> Any:
    """Return the value that a typed text means at a key, of the kind that the key takes.

    `before` is the value as it is written now: where it is a number, a typed number becomes one, else a text.
    Raises WritingError where the text can't be such a value.
    """
    spec, text = spec_of(path), typed.strip()
    match spec:
        case Number():
            return _number(text)
        case Measure():
            return _number(text) if _NUMBER.fullmatch(text) else text
        case Size():
            return _number(text) if _NUMBER.fullmatch(text) and _NUMBER.fullmatch(before) else text
        case Flag():
            if text not in ("true", "false"):
                raise WritingError("write true or false")
            return text == "true"
        case Text() | Choice():
            return text
        case None if _NUMBER.fullmatch(text) is None and text[:1] not in "[{\"'" and text not in ("true", "false"):
            return text
    try:
        return tomllib.loads(f"x = {text}")["x"]
    except (ValueError, RecursionError):
        raise WritingError(f"write it as in the file, {_example(spec)}") from None


def spec_of(path: Path) -> Spec | None:
    """Return what may stand at a key, or None where that is not known."""
    if not path:
        return None
    head = str(path[0])
    keys: Mapping[str, Spec] | None = KEYED.get(head)
    rest = path[2:]
    if keys is None:
        keys, rest = SINGLE.get(head), path[1:]
    spec: Spec | None = None
    for part in rest:
        if isinstance(part, int):
            continue
        if isinstance(spec, Inline):
            spec, keys = spec.value, None
            continue
        spec = keys.get(str(part)) if keys else None
        keys = spec.keys if isinstance(spec, Array | Table) else None
    return spec


def objection(before: Snapshot, after: Snapshot, path: Path) -> str:
    """Say what is wrong with a value that was set at a key, "" where it can stand.

    An error at the key itself, or one that was not there before, is an objection.
    """
    known = {(finding.code, finding.path) for finding in before.findings if finding.level is Level.ERROR}
    for finding in after.findings:
        if finding.level is not Level.ERROR:
            continue
        if finding.path[: len(path)] == path:
            return finding.message
    for finding in after.findings:
        if finding.level is Level.ERROR and (finding.code, finding.path) not in known and finding.owner in path:
            return finding.message
    return ""


@lru_cache(4)
def index_of(text: str) -> SpanIndex:
    """Return where everything stands in a text."""
    return SpanIndex.of(text)


def _number(text: str) -> int | float:
    if not _NUMBER.fullmatch(text):
        raise WritingError("write a plain number" if text else "write a number")
    if len(text) > LONGEST_NUMBER:
        raise WritingError(f"write at most {LONGEST_NUMBER} characters")
    return int(text) if re.fullmatch(r"[+-]?[0-9]+", text) else float(text)


def _example(spec: Spec | None) -> str:
    if isinstance(spec, Inline):
        return '{ "elbow 90" = 4 }'
    return "[[1, 2.5], [2, 4.0]]" if spec is not None and not isinstance(spec, Text) else 'true, 4 or "text"'
