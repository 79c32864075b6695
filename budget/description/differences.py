"""What differs between two texts of a run, table by table, key by key, in the words of the file.

The values are those that the texts state. What changes no value is told too: comments, spelling, the order of keys or
of tables, how lines end. Only blank lines between tables go untold where something else differs as well.
"""

from __future__ import annotations

import difflib
import re
from bisect import bisect_left
from collections import Counter
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from typing import Any, Literal, NamedTuple

from budget.description.finding import Path, dotted
from budget.description.pieces import Cut, Key, cut, line_ends, weave, with_line_ends
from budget.description.stating import Leaf, Node, flat, name_of, spelled, tree

About = Literal["value", "spelling", "place", "comment", "line ends"]
Kind = Literal["added", "removed", "changed", "moved", "comment", "text"]


@dataclass(frozen=True, slots=True)
class Change:
    """One difference: the key, what was stated and what is stated now, None for nothing.

    Besides values: "spelling" is the lines of the table that differ and change no value (both None where they only
    stand in another order or are spaced otherwise), "place" the table that it stood and stands behind ("" at the top).
    Paths count the items of `after`, of `before` for what was removed.
    """

    path: Path
    before: str | None
    after: str | None
    about: About = "value"
    name: str = ""
    """The name of the item that the path leads into or to."""


@dataclass(frozen=True, slots=True)
class TableChanges:
    """What happened to one table of the run; () stands for the keys above all headers and for the file itself.

    A "comment" stands between tables; "text" has the lines that differ, where a text is not TOML.
    """

    table: Path
    kind: Kind
    changes: tuple[Change, ...] = ()
    lines: tuple[str, ...] = ()


def compare(before: str, after: str) -> tuple[TableChanges, ...]:
    """Return what differs, in the order of `after`; what was removed stands where it stood. Nothing is raised."""
    if before == after:
        return ()
    ends = (line_ends(before), line_ends(after))
    old, new = cut(with_line_ends(before, "LF")), cut(with_line_ends(after, "LF"))
    if old is None or new is None:
        return (TableChanges((), "text", lines=tuple(_lines(before, after))),)
    found = list(_tables(old, new))
    if ends[0] != ends[1] and all(ends):
        found.insert(0, TableChanges((), "changed", (Change((), *ends, about="line ends"),)))
    return tuple(found) or (TableChanges((), "changed", (Change((), None, None, "spelling"),)),)


def stated(text: str) -> dict[Path, str]:
    """Return every value that a text states, by its keys; an item goes by its name.

    ("section", "M1", "item Strainer", "drop") leads to the drop of that item.
    """
    found = cut(with_line_ends(text, "LF"))
    if found is None:
        return {}
    values: dict[Path, str] = {}
    for owner in found.owned:
        values |= flat(tree(found, owner), owner)
    return values


def _tables(old: Cut, new: Cut) -> Iterator[TableChanges]:
    wanted = {**old.by_key, **new.by_key}
    moved = _moved(old, new)
    for key in weave(list(new.by_key), [list(old.by_key)], wanted):
        if key.owner is None:
            before, after = (key.words if key in side.by_key else None for side in (old, new))
            if before is None or after is None or key in moved:
                yield TableChanges((), "comment", (Change((), before, after, "comment"),))
        elif key.number == 0:
            owner = key.owner
            if owner not in new.owned:
                yield TableChanges(owner, "removed", _leaves(_compared(tree(old, owner), None, owner, owner)))
            elif owner not in old.owned:
                yield TableChanges(owner, "added", _leaves(_compared(None, tree(new, owner), owner, owner)))
            else:
                place = (moved[key],) if key in moved else ()
                changes = tuple(_changes(old, new, owner))
                if changes or place:
                    yield TableChanges(owner, "changed" if changes else "moved", changes + place)


def _changes(old: Cut, new: Cut, owner: Path) -> Iterator[Change]:
    """Compare a table that both texts have: its values, then what else is written otherwise."""
    if [piece.text for piece in old.owned[owner]] == [piece.text for piece in new.owned[owner]]:
        return
    values = list(_compared(tree(old, owner), tree(new, owner), owner, owner))
    yield from _leaves(values)
    before = _rest(old, owner, {one.was for one in values})
    after = _rest(new, owner, {one.now for one in values})
    if before != after or not values:
        gone, come = Counter(before) - Counter(after), Counter(after) - Counter(before)
        yield Change(owner, "\n".join(gone) or None, "\n".join(come) or None, "spelling")


class _Found(NamedTuple):
    """A change with the keys that lead to it in the text before and in that after, () for an item that isn't there."""

    was: Path
    now: Path
    change: Change


def _leaves(found: Iterable[_Found]) -> tuple[Change, ...]:
    return tuple(one.change for one in found)


def _compared(old: Node | None, new: Node | None, was: Path, now: Path, name: str = "") -> Iterator[_Found]:
    """Run through the changes between two nodes, None for one that is not there."""
    listed = [node for node in (old, new) if isinstance(node, list)]
    if listed and all(isinstance(node, list) or node is None or _is_empty_list(node) for node in (old, new)):
        yield from _items(old if isinstance(old, list) else [], new if isinstance(new, list) else [], was, now)
    elif all(isinstance(node, dict) or node is None for node in (old, new)) and (old or new):
        before, after = old or {}, new or {}
        for key in (*after, *(key for key in before if key not in after)):
            yield from _compared(before.get(key), after.get(key), (*was, key), (*now, key), name)
    elif not _alike(old, new):
        change = Change(now, None if old is None else spelled(old), None if new is None else spelled(new), name=name)
        yield _Found(was, now, change)


def _items(old: list[Node], new: list[Node], was: Path, now: Path) -> Iterator[_Found]:
    """Run through the changes between two lists of tables: one for an item that comes or goes, else key by key."""
    for one, other in _pairs(old, new):
        if one is None and other is not None:
            path = (*now, other)
            yield _Found((), path, Change(path, None, spelled(new[other]), name=name_of(new[other])))
        elif other is None and one is not None:
            path = (*was, one)
            yield _Found(path, (), Change(path, spelled(old[one]), None, name=name_of(old[one])))
        elif one is not None and other is not None:
            yield from _compared(old[one], new[other], (*was, one), (*now, other), name_of(new[other]))


def _is_empty_list(node: Node) -> bool:
    return isinstance(node, Leaf) and node.value == []


def _alike(old: Node | None, new: Node | None) -> bool:
    if isinstance(old, Leaf) and isinstance(new, Leaf):
        return _mean_alike(old.value, new.value)
    return bool(old == new)


def _mean_alike(old: Any, new: Any) -> bool:
    """Say whether two values are one; 1, 1.0 and true are not."""
    if type(old) is not type(new):
        return False
    if isinstance(old, list):
        return len(old) == len(new) and all(map(_mean_alike, old, new))
    if isinstance(old, dict):
        return list(old) == list(new) and all(_mean_alike(old[key], new[key]) for key in old)
    return bool(old == new) or (old != old and new != new)


_MOST_PAIRS = 1_000_000
"""Pairs of items or lines that are weighed against one another; longer lists go by position."""


def _pairs(old: Sequence[Node], new: Sequence[Node]) -> Iterator[tuple[int | None, int | None]]:
    """Pair the items of two lists: those written alike, then those of one name, then as many as stand face to face."""
    for tag, a, b, c, d in _matched([spelled(one) for one in old], [spelled(one) for one in new]):
        if tag == "equal":
            yield from zip(range(a, b), range(c, d), strict=True)
            continue
        for inner, e, f, g, h in _matched([name_of(one) for one in old[a:b]], [name_of(one) for one in new[c:d]]):
            if inner == "equal" or f - e == h - g:
                yield from zip(range(a + e, a + f), range(c + g, c + h), strict=True)
            else:
                yield from ((number, None) for number in range(a + e, a + f))
                yield from ((None, number) for number in range(c + g, c + h))


def _matched(old: Sequence[str], new: Sequence[str]) -> list[tuple[str, int, int, int, int]]:
    """Return which stretches of two lists are equal and which are not, equal ends first set aside."""
    least = min(len(old), len(new))
    head = next((i for i in range(least) if old[i] != new[i]), least)
    tail = next((i for i in range(least - head) if old[-1 - i] != new[-1 - i]), least - head)
    end = ("equal", len(old) - tail, len(old), len(new) - tail, len(new))
    one, other = old[head : len(old) - tail], new[head : len(new) - tail]
    if len(one) * len(other) > _MOST_PAIRS:
        return [("equal", 0, head, 0, head), ("replace", head, len(old) - tail, head, len(new) - tail), end]
    found = [("equal", 0, head, 0, head)]
    for tag, a, b, c, d in difflib.SequenceMatcher(None, one, other, autojunk=False).get_opcodes():
        found.append((tag, a + head, b + head, c + head, d + head))
    return [*found, end]


# What is left of a table without the values that changed, and where tables stand.

_COMMENTS = re.compile(r'"""[\s\S]*?"""|\'\'\'[\s\S]*?\'\'\'|"(?:\\.|[^"\\\n])*"|\'[^\'\n]*\'|(?P<comment>#[^\n]*)')


def _rest(found: Cut, owner: Path, changed: set[Path]) -> list[str]:
    """Return the lines of a table without the keys and values that changed and the items that come or go."""
    through = {path[:size] for path in changed for size in range(1, len(path) + 1)}
    lines: list[str] = []

    def is_changed(path: Path) -> bool:
        return path in through or any(path[:size] in changed for size in range(len(owner) + 1, len(path)))

    for piece in found.owned[owner]:
        table = piece.table
        if table is None or any(table.path[:size] in changed for size in range(len(owner) + 1, len(table.path) + 1)):
            continue
        cuts = [(start, path) for start, _, path in table.statements if is_changed(path)]
        spans = [(start, span.end) for start, path in cuts if (span := found.source.spans.value(path)) is not None]
        if table.number and changed and len(spans) == len(table.statements):
            spans.insert(0, (table.start, table.end))
        kept, position = [], piece.start
        for start, end in spans:
            kept.append(found.source.text[position:start])
            inside = found.source.text[start:end]
            kept += [f"\n{one['comment']}\n" for one in _COMMENTS.finditer(inside) if one["comment"]]
            position = end
        kept.append(found.source.text[position : piece.start + len(piece.text)])
        lines += [line.strip() for line in "".join(kept).split("\n") if line.strip()]
    return lines


def _moved(old: Cut, new: Cut) -> dict[Key, Change]:
    """Return the tables and comments that stand in another order: as few as explain it."""
    behind = [_behind(side) for side in (old, new)]
    common = [key for key in behind[1] if key in behind[0]]
    places = {key: place for place, key in enumerate(behind[0])}
    ends: list[int] = []  # the least end of a rising row of each length
    last: list[int] = []
    for key in common:
        length = bisect_left(ends, places[key])
        ends[length : length + 1] = [places[key]]
        last.append(length)
    staying, length = set(), len(ends) - 1
    for key, reached in zip(reversed(common), reversed(last), strict=True):
        if reached == length:
            staying.add(key)
            length -= 1
    return {
        key: Change(key.owner or (), behind[0][key], behind[1][key], "place") for key in common if key not in staying
    }


def _behind(side: Cut) -> dict[Key, str]:
    """Return the table that each table and comment stands behind."""
    found, above = {}, ""
    for key in side.by_key:
        if key.owner is None or key.number == 0:
            found[key] = above
        if key.owner is not None:
            above = dotted(key.owner)
    return found


def _lines(before: str, after: str) -> Iterator[str]:
    """Run through the lines that differ, each stretch below the number of its first line."""
    old, new = before.splitlines(), after.splitlines()
    if old == new:
        yield "the lines end otherwise"
    for tag, a, b, c, d in _matched(old, new):
        if tag != "equal":
            yield f"line {(a if b > a else c) + 1}"
            yield from (f"- {line}" for line in old[a:b])
            yield from (f"+ {line}" for line in new[c:d])
