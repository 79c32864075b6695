"""The target `edits`: a text, a zero byte, and bytes that choose edits of it.

An edit is refused, or the text that comes out is what the edit means for the data, within the limits of a file, with
every comment that stands on a line of its own outside what was removed.
"""

from __future__ import annotations

import datetime as dt
import tomllib
from collections import Counter
from typing import Any

from budget.description.edits import (
    AddTable,
    CopyTable,
    Edit,
    EditError,
    Literal,
    MoveTable,
    RemoveTable,
    RenameKey,
    SetValue,
    Several,
    Unset,
    apply_to_text,
    apply_to_value,
    read_path,
    rename_everywhere,
)
from budget.description.finding import Path
from budget.description.source import read_text
from budget.description.spans import SpanIndex
from budget.description.spelling import show
from tests.fuzz.choices import Choices
from tests.fuzz.spans import same

NAMES = ("new", "M1", "a b", "", "é", 'say "x"', "a.b", "0", "item", "\x00", "section", "fitting", "title", "#")
VALUES: tuple[Any, ...] = (
    *("12.4 m", "", "a\nb", "it's", '"""', "\u2028\x1b\x7f", 0, -7, 2**60, 0.5, 1e300, float("inf"), True),
    *(dt.date(2026, 3, 31), dt.time(7, 30), [], {}, [1, "b"], [[1, 2], [3, 4]], {"a": 1, "b c": {"d": []}}),
    *([{"kv": 1.0}, {"kv": 2.0}], (), Literal("0.12"), Literal(" [1, 2] "), Literal('"DN40"'), Literal("{ a = 1 }")),
    *(Literal("1 # note"), Literal("1\ny = 2"), Literal('"""a\nb"""'), Literal("9" * 60), Literal(""), None, b"x"),
)


def edits(data: bytes) -> None:
    """Make an edit of a text and compare the text that comes out with what the edit means."""
    content, _, chosen = data.rpartition(b"\0")
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError:
        return
    source = read_text(text)
    if source.data is None:
        return
    index = SpanIndex.of(text)
    choices = Choices(chosen)
    paths = list(index.paths()) or [("a",)]
    drawn = tuple(_edit(choices, paths, index) for _ in range(1 + choices.number(3)))
    if drawn[0].path[1:] and choices.number(4) == 3:
        drawn = _renaming(text, drawn[0].path, choices.one(NAMES)) or drawn
    edit = drawn[0] if len(drawn) == 1 else Several(drawn)
    for one in drawn:
        _check_path(one.path, source.data)
    new, preview = _applied(text, edit), _applied(text, edit, verify=False)
    if new is None:
        return
    assert preview == new, edit
    expected = apply_to_value(source.data, edit)
    found = tomllib.loads(new)
    assert same(_without_hollow(expected), _without_hollow(found)), (edit, new)
    assert read_text(new).data is not None, (edit, read_text(new).findings)
    assert text == "" or apply_to_text(text, edit, data=source.data) == new, edit
    if all(_keeps_comments(one, index) for one in drawn):
        lost = Counter(_comments(index)) - Counter(_comments(SpanIndex.of(new)))
        assert not lost, (edit, lost)


def _applied(text: str, edit: Edit, *, verify: bool = True) -> str | None:
    """Return the text after an edit, None where it is refused, with its reason."""
    try:
        return apply_to_text(text, edit, verify=verify)
    except EditError as refused:
        said = str(refused)
    assert said.strip(), edit
    return None


def _renaming(text: str, path: Path, new: str) -> tuple[Any, ...]:
    """Return the edits that rename a table of the run and all that refers to it; none where that is refused."""
    try:
        edit = rename_everywhere(text, str(path[0]), str(path[1]), new)
    except EditError:
        return ()
    return edit.edits if isinstance(edit, Several) else (edit,)


def _edit(choices: Choices, paths: list[Path], index: SpanIndex) -> Any:
    kinds = (SetValue, Unset, AddTable, RemoveTable, MoveTable, CopyTable, RenameKey)
    kind = choices.one(kinds)
    path = _path(choices, paths)
    if kind in (RemoveTable, MoveTable, CopyTable) and index.tables() and choices.number(4):
        path = choices.one(index.tables())
    match kind.__name__:
        case "SetValue":
            return SetValue(path, choices.one(VALUES))
        case "AddTable":
            values = {choices.one(NAMES): choices.one(VALUES) for _ in range(choices.number(3))}
            after = _path(choices, paths) if choices.number(2) else None
            return AddTable(path, values, after, array=bool(choices.number(2)))
        case "MoveTable":
            target = choices.one(index.tables() or paths)
            return MoveTable(path, after=target) if choices.number(2) else MoveTable(path, before=target)
        case "CopyTable":
            changes = {choices.one(NAMES): choices.one(VALUES) for _ in range(choices.number(3))}
            return CopyTable(path, _path(choices, paths), changes)
        case "RenameKey":
            return RenameKey(path, choices.one(NAMES))
    return kind(path)


def _path(choices: Choices, paths: list[Path]) -> Path:
    """Choose a path of the text, mostly as it is, else with another end."""
    path = choices.one(paths)
    match choices.number(6):
        case 3:
            return (*path, choices.one(NAMES))
        case 4:
            return (*path[:-1], choices.one(NAMES))
        case 5:
            return (*path[: choices.number(len(path) + 1)], choices.number(4))
    return path


def _check_path(path: Path, data: dict[str, Any]) -> None:
    """Spell a path of the data and read it back, as if it had been typed."""
    node: Any = data
    for part in path:
        known = isinstance(node, dict) and part in node
        if not known and not (isinstance(node, list) and isinstance(part, int) and part < len(node)):
            return
        node = node[part]
    if path:
        assert read_path(show(path), data) == path, show(path)


def _without_hollow(value: Any) -> Any:
    """Leave out tables and lists that hold nothing: an edit that takes away may take their headers too."""
    if isinstance(value, dict):
        kept = {key: _without_hollow(inner) for key, inner in value.items()}
        return {key: inner for key, inner in kept.items() if inner not in ({}, [])}
    if isinstance(value, list):
        kept_elements = [_without_hollow(inner) for inner in value]
        return [inner for inner in kept_elements if inner not in ({}, [])]
    return value


def _keeps_comments(edit: Edit, index: SpanIndex) -> bool:
    """Whether an edit takes nothing away: it sets one value that is not a table, renames, adds, moves or copies."""
    if isinstance(edit, SetValue):
        return index.table(edit.path) is None and not any(
            found[: len(edit.path)] == edit.path for found in (*index.tables(), *index._scan.dotted)
        )
    return isinstance(edit, RenameKey | AddTable | MoveTable)


def _comments(index: SpanIndex) -> list[str]:
    """Return the comments on lines of their own, but for those within a value."""
    inside = [(start, end) for table in index.all_tables() for start, end, _ in table.statements]
    found, offset, place = [], 0, 0
    inside.sort()
    for line in index.text.split("\n"):
        while place < len(inside) and inside[place][1] <= offset:
            place += 1
        within = place < len(inside) and inside[place][0] <= offset
        if line.lstrip(" \t").startswith("#") and not within:
            found.append(line.strip())
        offset += len(line) + 1
    return found
