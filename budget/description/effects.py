"""What an edit means for the data in a text: functions that return new data and leave the old alone."""

from collections.abc import Callable, Mapping
from typing import Any

from budget.description.finding import Path
from budget.description.spelling import EditError, Toml, show


def get(data: Toml, path: Path) -> Toml:
    """Return the value at a path. Raises EditError where there is none."""
    for size, part in enumerate(path):
        if not _has(data, part):
            raise EditError(f"there is no {show(path[: size + 1])}")
        data = data[part]
    return data


def set_value(data: Toml, path: Path, value: Toml) -> Toml:
    """Put a value at a path, with the tables on the way to it; a list may grow by one."""
    return _set(data, path, value, 0)


def unset(data: Toml, path: Path) -> Toml:
    """Take a key or a list element away. Raises EditError where there is none."""
    get(data, path)
    return _change(data, path[:-1], lambda node: _without(node, path[-1]))


def add_table(data: Toml, path: Path, values: Mapping[str, Any], *, array: bool) -> Toml:
    """Add a table, or an element to an array of tables; a table made by its sub-tables alone is completed."""
    found = _find(data, path)
    if array:
        if found is not None and not isinstance(found, list):
            raise EditError(f"{show(path)} is not a list of tables")
        return set_value(data, path, [*(found or []), dict(values)])
    if found is None:
        return set_value(data, path, dict(values))
    if not isinstance(found, dict) or found.keys() & values.keys():
        raise EditError(f"{show(path)} exists already")
    return set_value(data, path, found | dict(values))


def move(data: Toml, path: Path, target: Path, *, behind: bool) -> Toml:
    """Move a list element behind or before another; the order of keys is not part of the data."""
    get(data, path)
    get(data, target)
    position, goal = path[-1], target[-1]
    if path[:-1] != target[:-1] or not isinstance(position, int) or not isinstance(goal, int):
        return data
    return _change(data, path[:-1], lambda node: _reordered(node, position, goal + behind))


def insert(data: Toml, path: Path, value: Toml) -> Toml:
    """Put a value at a key that is free, or into a list at a position: what stands there moves up."""
    position = path[-1]
    if isinstance(position, int):
        found = _find(data, path[:-1])
        found = [] if found is None else found
        if not isinstance(found, list) or not 0 <= position <= len(found):
            raise EditError(f"there is no room for {show(path)}")
        return set_value(data, path[:-1], [*found[:position], value, *found[position:]])
    if _find(data, path) is not None:
        raise EditError(f"{show(path)} exists already")
    return set_value(data, path, value)


def rename(data: Toml, path: Path, new: str) -> Toml:
    """Give a key another name; its place among its neighbours stays."""
    get(data, path)
    old = path[-1]
    if not isinstance(old, str):
        raise EditError(f"{show(path)} has a position in a list, not a name")
    parent = get(data, path[:-1])
    if new in parent and new != old:
        raise EditError(f"{show((*path[:-1], new))} exists already")
    return _change(data, path[:-1], lambda node: {new if k == old else k: v for k, v in node.items()})


def agree(expected: Toml, found: Toml, emptied: frozenset[Path], path: Path = ()) -> bool:
    """Tell whether data is as expected; an empty table may be gone where an edit has taken from it."""
    if expected == found:
        return True
    if isinstance(expected, dict) and isinstance(found, dict):
        for key in expected.keys() | found.keys():
            inner = (*path, key)
            if key not in expected:
                return False
            if key not in found:
                if not _is_hollow(expected[key], emptied, inner):
                    return False
            elif not agree(expected[key], found[key], emptied, inner):
                return False
        return True
    if isinstance(expected, list) and isinstance(found, list):
        return len(expected) == len(found) and all(
            agree(one, other, emptied, (*path, position))
            for position, (one, other) in enumerate(zip(expected, found, strict=True))
        )
    return _is_nan(expected) and _is_nan(found)


def _is_hollow(value: Toml, emptied: frozenset[Path], path: Path) -> bool:
    """Tell whether an edit has left nothing of a table but empty tables."""
    if not isinstance(value, dict | list) or path not in emptied:
        return False
    inner = value.items() if isinstance(value, dict) else enumerate(value)
    return all(_is_hollow(one, emptied, (*path, key)) for key, one in inner)


def _is_nan(value: Toml) -> bool:
    return isinstance(value, float) and value != value  # only nan differs from itself


def _has(node: Toml, part: str | int) -> bool:
    if isinstance(node, dict):
        return part in node
    return isinstance(node, list) and isinstance(part, int) and 0 <= part < len(node)


def _find(data: Toml, path: Path) -> Toml:
    for part in path:
        if not _has(data, part):
            return None
        data = data[part]
    return data


def _change(data: Toml, path: Path, change: Callable[[Toml], Toml]) -> Toml:
    """Replace what is at an existing path; copies are made of what lies on the way only."""
    if not path:
        return change(data)
    copy = data.copy()
    copy[path[0]] = _change(data[path[0]], path[1:], change)
    return copy


def _set(node: Toml, path: Path, value: Toml, size: int) -> Toml:
    if size == len(path):
        return value
    part = path[size]
    if node is None:
        node = [] if isinstance(part, int) else {}
    if isinstance(part, int):
        if not isinstance(node, list):
            raise EditError(f"{show(path[:size])} is not a list")
        if not 0 <= part <= len(node):
            raise EditError(f"{show(path[:size])} has {len(node)} elements, so there is no {show(path[: size + 1])}")
        inner = node[part] if part < len(node) else None
        return [*node[:part], _set(inner, path, value, size + 1), *node[part + 1 :]]
    if not isinstance(node, dict):
        raise EditError(f"{show(path[:size])} is not a table")
    return node | {part: _set(node.get(part), path, value, size + 1)}


def _without(node: Toml, part: str | int) -> Toml:
    if isinstance(node, dict):
        return {key: value for key, value in node.items() if key != part}
    return [value for position, value in enumerate(node) if position != part]


def _reordered(values: list[Any], position: int, goal: int) -> list[Any]:
    rest = [value for at, value in enumerate(values) if at != position]
    goal -= goal > position
    return [*rest[:goal], values[position], *rest[goal:]]
