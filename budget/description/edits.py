"""Edits: small values that change the text of a description and nothing else.

An edit cuts the text at the places it concerns and leaves every other byte alone: comments, blank lines, order,
spelling of numbers, line ends. Before a text is handed back it is read again and compared with what the edit means
for the data; where the two differ the edit is refused.
"""

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from budget.description import blocks, effects, entries
from budget.description.blocks import Splice, splice
from budget.description.finding import Path
from budget.description.renames import references
from budget.description.source import read_text
from budget.description.spans import SpanError, SpanIndex
from budget.description.spelling import (
    EditError,
    Literal,
    Toml,
    plain,
    read_path,
    render_key,
    render_value,
    show,
)

__all__ = [
    "AddTable",
    "CopyTable",
    "Edit",
    "EditError",
    "Literal",
    "MoveTable",
    "RemoveTable",
    "RenameKey",
    "SetValue",
    "Several",
    "Unset",
    "apply_to_text",
    "apply_to_value",
    "read_path",
    "rename_everywhere",
    "render_key",
    "render_value",
]

NO_KEY = "a key is needed, nothing was named"

MOST_ADDED = 200
"""Keys that one new value may add to a table with lines of its own: each has its place looked for."""


@dataclass(frozen=True, slots=True)
class SetValue:
    """Give a key or a list element a value; a missing key gets a line, and a missing table a block.

    Position `len` of a list appends to it. A table with lines of its own is changed key by key.
    """

    path: Path
    value: Toml


@dataclass(frozen=True, slots=True)
class Unset:
    """Take away a key with its line, or an element with its comma."""

    path: Path


@dataclass(frozen=True, slots=True)
class AddTable:
    """Add a table with a header, or with `array` one more to a list of tables, behind the blocks of `after`."""

    path: Path
    values: Mapping[str, Toml] = field(default_factory=lambda: MappingProxyType({}))
    after: Path | None = None
    array: bool = False


@dataclass(frozen=True, slots=True)
class RemoveTable:
    """Take away a table with its sub-tables, wherever they stand; an element of a list by its position."""

    path: Path


@dataclass(frozen=True, slots=True)
class MoveTable:
    """Put a table with its sub-tables behind or before the blocks of another, its text as it is."""

    path: Path
    after: Path | None = None
    before: Path | None = None


@dataclass(frozen=True, slots=True)
class CopyTable:
    """Add a copy of a table with its sub-tables and comments; a change to None leaves that key out.

    For an element of a list of tables, `new_path` names the list, or the position that the copy takes in it.
    """

    path: Path
    new_path: Path
    changes: Mapping[str, Toml] = field(default_factory=lambda: MappingProxyType({}))


@dataclass(frozen=True, slots=True)
class RenameKey:
    """Give a key or a table another name, in every header that names it."""

    path: Path
    new_key: str


@dataclass(frozen=True, slots=True)
class Several:
    """Some edits, one after the other, as one step."""

    edits: "tuple[Edit, ...]"


Edit = SetValue | Unset | AddTable | RemoveTable | MoveTable | CopyTable | RenameKey | Several


def apply_to_text(text: str, edit: Edit, *, verify: bool = True, data: Mapping[str, Toml] | None = None) -> str:
    """Return the text after an edit. Raises EditError, with the text as it was, where the edit cannot be made.

    ``data`` is what tomllib made of the text, if it is at hand. Without ``verify`` the result is not read again:
    for a preview only.
    """
    steps = tuple(_flat(edit))
    if not all(step.path for step in steps):
        raise EditError(NO_KEY)
    try:
        if not verify:
            return _Writing(text).after(steps)
        expected = apply_to_value(_read(text) if data is None else data, edit)
        writing = _Writing(text)
        new = writing.after(steps)
    except (SpanError, RecursionError) as error:
        raise EditError(f"the text cannot be edited: {error}") from None
    if not effects.agree(expected, _read(new), frozenset(writing.emptied)):
        raise EditError("the edit would have changed something else as well, so it was not made")
    return new


def apply_to_value(data: Mapping[str, Toml], edit: Edit) -> dict[str, Toml]:
    """Return what an edit makes of the data in a text; the data given stays as it is. Raises EditError."""
    result: Toml = dict(data)
    for step in _flat(edit):
        result = _effect(result, step)
    return dict(result)


def rename_everywhere(text: str, kind: str, old: str, new: str) -> Edit:
    """Return the edit that renames a table of a kind and everything that refers to it.

    ``kind`` is source, section, terminal, pipe, duct, fitting, device, link or case. Raises EditError where the
    old name does not exist or the new one is taken or cannot be a name.
    """
    keys, values = references(_read(text), kind, old, new)
    return Several((*(SetValue(path, new) for path in values), *(RenameKey(path, new) for path in keys)))


def _read(text: str) -> dict[str, Toml]:
    source = read_text(text)
    if source.data is None:
        raise EditError(f"the text cannot be read: {source.findings[0].message}")
    return source.data


def _flat(edit: Edit) -> "Iterator[_Step]":
    if isinstance(edit, Several):
        for inner in edit.edits:
            yield from _flat(inner)
    else:
        yield edit


_Step = SetValue | Unset | AddTable | RemoveTable | MoveTable | CopyTable | RenameKey


def _effect(data: Toml, step: _Step) -> Toml:
    if not step.path:
        raise EditError(NO_KEY)
    match step:
        case SetValue(path, value):
            return effects.set_value(data, path, plain(value))
        case Unset(path):
            return effects.unset(data, path)
        case RemoveTable(path):
            if not _is_table(effects.get(data, path)):
                raise EditError(f"{show(path)} is a value, not a table")
            return effects.unset(data, path)
        case AddTable(path, values, after, array):
            if array and after is not None and after[:-1] == path and isinstance(after[-1], int):
                effects.get(data, after)
                return effects.insert(data, (*path, after[-1] + 1), plain(values))
            return effects.add_table(data, path, plain(values), array=array)
        case MoveTable(path):
            target, behind = _target(step)
            return effects.move(data, path, target, behind=behind)
        case CopyTable(path, new_path, changes):
            copy = effects.get(data, path)
            if not isinstance(copy, dict) and (changes or not _is_table(copy)):
                raise EditError(f"{show(path)} is not one table")
            if changes:
                copy = {k: v for k, v in (copy | plain(changes)).items() if v is not None}
            return effects.insert(data, _place_of_copy(data, path, new_path), copy)
        case RenameKey(path, new_key):
            return effects.rename(data, path, new_key)


def _is_table(value: Toml) -> bool:
    return isinstance(value, dict) or (
        isinstance(value, list) and bool(value) and all(isinstance(one, dict) for one in value)
    )


def _target(step: MoveTable) -> tuple[Path, bool]:
    if (step.after is None) == (step.before is None):
        raise EditError("a table moves either behind another or before one")
    return (step.after, True) if step.after is not None else (step.before or (), False)


def _place_of_copy(data: Toml, path: Path, new: Path) -> Path:
    """Return where a copy goes; one of a list element to the end of a list that is named without a position."""
    if not new or not isinstance(new[0], str):
        raise EditError("a key is needed for the copy, none was named")
    if isinstance(path[-1], int) and not isinstance(new[-1], int):
        try:
            found = effects.get(data, new)
        except EditError:
            return (*new, 0)
        if not isinstance(found, list):
            raise EditError(f"{show(new)} is not a list")
        return (*new, len(found))
    return new


class _Writing:
    """A text while edits are applied to it, and the paths that may have been emptied."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.emptied: set[Path] = set()
        self.index = SpanIndex.of(text)
        self.splices: list[Splice] = []  # not yet in the text
        self.touched: set[Path] = set()  # by those splices
        self.around: set[Path] = set()  # what is touched, and what it lies in

    def after(self, steps: Iterable[_Step]) -> str:
        """Apply all steps; those that only replace what is there share one index of the text."""
        for step in steps:
            self.apply(step)
        return splice(self.text, self.splices)

    def apply(self, step: _Step) -> None:
        match step:
            case SetValue(path, value):
                self.settle_around(path)
                if self.index.value(path) is not None:
                    self.splices += entries.set_value(self.index, path, value)
                    self.touch(path)
                    return
                self.settle()
                if path and (blocks.blocks_under(self.index, path) or self.index.occurrences(path)):
                    self.rewrite(path, plain(value))
                else:
                    self.write(entries.set_value(self.index, path, value))
            case RenameKey(path, new_key):
                self.settle_around(path)
                self.splices += entries.rename(self.index, path, new_key)
                self.touch(path)
                self.touch((*path[:-1], new_key))
            case _:
                self.settle()
                self.rearrange(step)

    def rearrange(self, step: Unset | RemoveTable | AddTable | MoveTable | CopyTable) -> None:
        match step:
            case Unset(path) | RemoveTable(path):
                self.emptied |= {path[:size] for size in range(1, len(path))}
                self.write(entries.remove(self.index, path))
            case AddTable(path, values, after, array):
                self.add(path, values, after, array=array)
            case MoveTable(path):
                target, behind = _target(step)
                self.replace(blocks.move_blocks(self.index, path, target, behind=behind))
            case CopyTable(path, new_path, changes):
                self.copy(path, new_path, changes)

    def settle_around(self, path: Path) -> None:
        """Bring the text up to date where a path leads through one that is being changed, or around it."""
        through = any(path[:size] in self.touched for size in range(1, len(path) + 1))
        if through or path in self.around:
            self.settle()

    def touch(self, path: Path) -> None:
        self.touched.add(path)
        self.around.update(path[:size] for size in range(len(path) + 1))

    def settle(self) -> None:
        if self.splices:
            self.write(self.splices)

    def write(self, splices: Iterable[Splice]) -> None:
        self.replace(splice(self.text, splices))

    def replace(self, text: str) -> None:
        self.text = text
        self.index = SpanIndex.of(text)
        self.splices, self.touched, self.around = [], set(), set()

    def rewrite(self, path: Path, value: Toml) -> None:
        """Turn a table, or a list of tables, into another one by changing what differs and nothing else."""
        found = effects.get(_read(self.text), path)
        if type(found) is not type(value):
            raise EditError(f"{show(path)} is a table; its keys are set one by one")
        steps = list(_differences(path, found, value))
        if sum(not entries.exists(self.index, step.path) for step in steps) > MOST_ADDED:
            raise EditError(f"more than {MOST_ADDED} keys would be added to {show(path)} at once; add some at a time")
        gone = [step.path for step in steps if isinstance(step, Unset)]
        cuts = entries.remove_all(self.index, gone) if gone else None
        if cuts is not None:
            self.emptied |= {one[:size] for one in gone for size in range(1, len(one))}
            self.write(cuts)
            steps = steps[len(gone) :]
        for step in steps:
            self.apply(step)
        self.settle()

    def add(self, path: Path, values: Mapping[str, Toml], after: Path | None, *, array: bool) -> None:
        index = self.index
        if array and index.value(path) is not None:
            self.write(entries.set_value(index, (*path, len(index.items(path))), dict(values)))
            return
        if not array and (index.table(path) is not None or index.value(path) is not None):
            raise EditError(f"{show(path)} exists already")
        self.write(blocks.add_blocks(index, path, [values], after=after, array=array))

    def copy(self, path: Path, new: Path, changes: Mapping[str, Toml]) -> None:
        data = _read(self.text)
        original = effects.get(data, path)
        if changes and not isinstance(original, dict):
            raise EditError(f"{show(path)} is not one table")
        place = _place_of_copy(data, path, new)
        span = self.index.value(path)
        if blocks.blocks_under(self.index, path):
            self.write(blocks.copy_blocks(self.index, path, new))
        else:
            self.apply(SetValue(place, original if span is None else Literal(self.text[span.start : span.end])))
        for key, value in changes.items():
            if value is not None:
                self.apply(SetValue((*place, key), value))
            elif key in original:
                self.apply(Unset((*place, key)))


def _differences(path: Path, old: Toml, new: Toml) -> Iterator[_Step]:
    """Run through the edits that make a new table, or list of tables, out of an old one."""
    if isinstance(old, dict):
        for key in old:
            if key not in new:
                yield Unset((*path, key))
        for key, value in new.items():
            if key not in old or type(old[key]) is not type(value) or old[key] != value:
                yield SetValue((*path, key), value)
        return
    for position in range(len(old) - 1, len(new) - 1, -1):
        yield Unset((*path, position))
    for position, value in enumerate(new):
        if position >= len(old) or old[position] != value:
            yield SetValue((*path, position), value)
