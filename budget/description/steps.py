"""The edits as small values: what they name and what they mean, before any text is touched."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from budget.description import effects
from budget.description.finding import Path
from budget.description.spelling import EditError, Toml, plain, show

NO_KEY = "a key is needed, nothing was named"


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

Step = SetValue | Unset | AddTable | RemoveTable | MoveTable | CopyTable | RenameKey
"""An edit that is not made of others."""


def flat(edit: Edit) -> Iterator[Step]:
    """Run through the steps of an edit in their order."""
    if isinstance(edit, Several):
        for inner in edit.edits:
            yield from flat(inner)
    else:
        yield edit


def effect(data: Toml, step: Step) -> Toml:
    """Return what a step makes of the data in a text. Raises EditError."""
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
            target, behind = target_of(step)
            return effects.move(data, path, target, behind=behind)
        case CopyTable(path, new_path, changes):
            copy = effects.get(data, path)
            if not isinstance(copy, dict) and (changes or not _is_table(copy)):
                raise EditError(f"{show(path)} is not one table")
            if changes:
                copy = {k: v for k, v in (copy | plain(changes)).items() if v is not None}
            return effects.insert(data, place_of_copy(data, path, new_path), copy)
        case RenameKey(path, new_key):
            return effects.rename(data, path, new_key)


def target_of(step: MoveTable) -> tuple[Path, bool]:
    """Return the table that another moves to, and whether behind it. Raises EditError."""
    if (step.after is None) == (step.before is None):
        raise EditError("a table moves either behind another or before one")
    return (step.after, True) if step.after is not None else (step.before or (), False)


def place_of_copy(data: Toml, path: Path, new: Path) -> Path:
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


def _is_table(value: Toml) -> bool:
    return isinstance(value, dict) or (
        isinstance(value, list) and bool(value) and all(isinstance(one, dict) for one in value)
    )
