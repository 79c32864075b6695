"""What a table of the run states, as a tree with each value as it is written: dictionaries, lists of tables, leaves."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import Any

from budget.description.finding import Path
from budget.description.pieces import Cut
from budget.description.spelling import render_key


@dataclass(frozen=True, slots=True)
class Leaf:
    """A value, and where it is written."""

    found: Cut
    path: Path
    value: Any

    @property
    def raw(self) -> str:
        """The value as it is written."""
        span = self.found.source.spans.value(self.path)
        return self.found.source.text[span.start : span.end] if span else repr(self.value)


Node = Any
"""A Leaf, or a dictionary or list of nodes."""


def tree(found: Cut, owner: Path) -> Node:
    """Return what the pieces of one table state; items in `[[...]]` blocks and in brackets look alike."""
    top: dict[str, Node] = {}
    for piece in found.owned[owner]:
        if piece.table is None:
            continue
        inner = _within(top, ("", *piece.table.path[len(owner) :]))
        for _, _, path in piece.table.statements:
            rest = path[len(piece.table.path) :]
            value: Any = found.source.data
            for part in path:
                value = value[part]
            around = _within(inner, rest[:-1]) if len(rest) > 1 else inner
            around[rest[-1]] = _node(found, path, value)
    return top[""]


def _within(node: Node, path: Path) -> Node:
    """Return the node at a path, made where it isn't there."""
    for part, after in zip(path, (*path[1:], ""), strict=True):
        if isinstance(part, int):
            node += ({} for _ in range(len(node), part + 1))
            node = node[part]
        else:
            node = node.setdefault(part, [] if isinstance(after, int) else {})
    return node


def _node(found: Cut, path: Path, value: Any) -> Node:
    if isinstance(value, dict):
        return {key: _node(found, (*path, key), inner) for key, inner in value.items()}
    if isinstance(value, list) and value and all(isinstance(one, dict) for one in value):
        return [_node(found, (*path, number), inner) for number, inner in enumerate(value)]
    return Leaf(found, path, value)


def spelled(node: Node) -> str:
    """Return a node as one value of TOML."""
    if isinstance(node, Leaf):
        return node.raw
    if isinstance(node, list):
        return "[" + ", ".join(map(spelled, node)) + "]"
    inside = ", ".join(f"{render_key(key)} = {spelled(inner)}" for key, inner in node.items())
    return f"{{ {inside} }}" if inside else "{}"


def flat(node: Node, path: Path) -> dict[Path, str]:
    """Return the values below a path by their keys, an item as "item Strainer", a second one "item Strainer (2)"."""
    if isinstance(node, Leaf) or not node:
        return {path: spelled(node)}
    values: dict[Path, str] = {}
    seen: Counter[str] = Counter()
    if isinstance(node, dict):
        for key, inner in node.items():
            values |= flat(inner, (*path, key))
        return values
    for number, inner in enumerate(node, 1):
        label = f"{path[-1]} {name_of(inner) or number}"
        seen[label] += 1
        values |= flat(inner, (*path[:-1], label if seen[label] == 1 else f"{label} ({seen[label]})"))
    return values


def name_of(item: Node) -> str:
    """Return the name of an item, or the kind of a fitting."""
    for key in ("name", "kind"):
        leaf = item.get(key) if isinstance(item, dict) else None
        if isinstance(leaf, Leaf) and isinstance(leaf.value, str) and leaf.value:
            return leaf.value
    return ""
