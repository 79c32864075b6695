"""Two versions of a run taken together, table by table, against the version that both come from.

A table that one side changed is taken from that side; where both changed it, each in its own way, somebody must pick.
The texts of tables are taken whole, byte for byte. A table whose parts stand in several places is one table: all parts
come from one side. Comments that stand alone need no pick: what a side added stays, what a side took away goes.

Tables stand in the order of `theirs`, or of `ours` where only we moved some; what only the other side has goes behind
the table that it stands behind there. Where lines end otherwise in the three texts, all follow the side that changed
that.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

from budget.description.finding import Path
from budget.description.pieces import END, START, Cut, Key, cut, line_ends, weave, with_line_ends
from budget.description.spelling import show

Side = Literal["ours", "theirs", "base"]
Standing = Literal["ours", "theirs", "same", "both"]


class MergeError(ValueError):
    """Versions that can't be taken together table by table, with the reason; a whole one can still be taken."""


@dataclass(frozen=True, slots=True)
class MergeTable:
    """A table of the run that is not the same everywhere, with its text in each version, None where it isn't there.

    Parts that stand in several places are joined by a blank line. `standing` says who changed it: "same" is both,
    alike; "both" is both, each in its own way. () stands for the keys above all headers.
    """

    table: Path
    standing: Standing
    base: str | None
    ours: str | None
    theirs: str | None


@dataclass(frozen=True)
class Merge:
    """What became of two versions: the tables that differ, in the order of `theirs`, and the merged text."""

    tables: tuple[MergeTable, ...]
    reason: str = ""
    """Why the versions can't be taken together, or ""."""
    sides: Mapping[Side, Cut] = field(default_factory=lambda: MappingProxyType({}), repr=False)
    """The versions as pieces; no base where no common version is known."""

    @property
    def possible(self) -> bool:
        """Whether the versions can be taken together as they stand, with our side where both changed a table."""
        return not self.reason

    def text(self, picks: Mapping[Path, Side] = MappingProxyType({})) -> str:
        """Return the merged text, each table from the side that is picked for it.

        Without a pick, a table is taken from the side that changed it; where both did, from ours. A pick for a table
        that is the same everywhere changes nothing. Raises MergeError where what is picked doesn't go together.
        """
        if not self.sides:
            raise MergeError(self.reason)
        if "base" in picks.values() and "base" not in self.sides:
            raise MergeError("no version that both come from is known; pick one of the two")
        return _merged(self.sides, {one.table: picks.get(one.table, _default(one)) for one in self.tables})


def merge(base: str | None, ours: str, theirs: str) -> Merge:
    """Take two texts together against the one that both come from, None where none is known.

    Without one, every table that differs is "both". Nothing is raised: where versions can't be taken together,
    `possible` is False, and `reason` says why.
    """
    texts = _with_common_ends(base, ours, theirs)
    sides: dict[Side, Cut] = {}
    for side, text in texts.items():
        found = cut(text)
        if found is None:
            return Merge((), f"{_NAMES[side]} is not TOML, so only a whole version can be taken")
        sides[side] = found
    tables = tuple(_tables(sides))
    found_sides = MappingProxyType(sides)
    try:
        _merged(found_sides, {one.table: _default(one) for one in tables})
    except MergeError as error:
        return Merge(tables, str(error), found_sides)
    return Merge(tables, "", found_sides)


_NAMES = {"base": "the version that both come from", "ours": "your version", "theirs": "the version on disk"}


def _default(table: MergeTable) -> Side:
    return "theirs" if table.standing in ("theirs", "same") else "ours"


def _with_common_ends(base: str | None, ours: str, theirs: str) -> dict[Side, str]:
    """Let all three end their lines as the side does that changed it; a text with both kinds stays as it is."""
    texts: dict[Side, str] = {"ours": ours, "theirs": theirs}
    if base is not None:
        texts["base"] = base
    ends = {side: line_ends(text) for side, text in texts.items()}
    common = ends["ours"] if ends["theirs"] in (ends.get("base"), "") else ends["theirs"]
    if common == "" or "mixed" in ends.values():
        return texts
    return {side: with_line_ends(text, common) for side, text in texts.items()}


def _tables(sides: Mapping[Side, Cut]) -> Iterator[MergeTable]:
    """Run through the tables that differ, in the order of `theirs`; what is not there behind its neighbour."""
    orders = [list(sides[side].by_key) for side in ("theirs", "ours", "base") if side in sides]
    every = {key for order in orders for key in order}
    for key in weave(orders[0], orders[1:], every):
        if key.owner is None or key.number:
            continue
        texts = {side: _texts(found, key.owner) for side, found in sides.items()}
        base, ours, theirs = (texts.get(side) for side in ("base", "ours", "theirs"))
        if ours == theirs and ("base" not in sides or ours == base):
            continue
        standing: Standing = "both"
        if ours == theirs:
            standing = "same"
        elif "base" in sides and base in (ours, theirs):
            standing = "theirs" if ours == base else "ours"
        whole = ("\n\n".join(text) if text else None for text in (base, ours, theirs))
        yield MergeTable(key.owner, standing, *whole)


def _texts(found: Cut, owner: Path) -> tuple[str, ...]:
    return tuple(piece.text for piece in found.owned.get(owner, ()))


def _merged(sides: Mapping[Side, Cut], picks: Mapping[Path, Side]) -> str:
    """Put the pieces together, read the result again and see that each table is as it was picked."""
    ours, theirs = sides["ours"], sides["theirs"]
    base = sides.get("base")
    wanted: dict[Key, str] = {}
    for side, found in sides.items():
        for key, piece in found.by_key.items():
            if key.owner is None:
                stays = base is None or key not in base.by_key or (key in ours.by_key and key in theirs.by_key)
            else:
                stays = picks.get(key.owner, "theirs") == side
            if stays:
                wanted[key] = piece.text
    first, second = (ours, theirs) if _only_we_moved(sides) else (theirs, ours)
    order = weave(list(first.by_key), [list(found.by_key) for found in (second, base) if found is not None], wanted)
    text = _joined(sides, order, wanted)
    again = cut(text)
    if again is None:
        raise MergeError("what would come of it is not TOML, so only a whole version can be taken")
    for owner in dict.fromkeys(owner for found in (again, *sides.values()) for owner in found.owned):
        if _texts(again, owner) != _texts(sides[picks.get(owner, "theirs")], owner):
            raise MergeError(f"{show(owner)} would not be as it was picked, so only a whole version can be taken")
    return text


def _only_we_moved(sides: Mapping[Side, Cut]) -> bool:
    base = sides.get("base")
    if base is None:
        return False

    def has_moved(found: Cut) -> bool:
        there = [key for key in base.by_key if key in found.by_key]
        return there != [key for key in found.by_key if key in base.by_key]

    return has_moved(sides["ours"]) and not has_moved(sides["theirs"])


def _joined(sides: Mapping[Side, Cut], order: list[Key], texts: Mapping[Key, str]) -> str:
    """Join pieces by the gaps that they have in a version, else by one blank line."""
    ends = line_ends(sides["theirs"].source.text) or line_ends(sides["ours"].source.text)
    newline = "\r\n" if ends == "CRLF" else "\n"
    parts: list[str] = []
    left: Key | str = START
    rights: list[Key | str] = [*order, END]
    for right in rights:
        gap = _gap(sides, left, right)
        if gap is None or (gap.count("\n") < 2 and _would_merge(sides, texts, left, right, gap)):
            gap = newline * 2
        parts += [gap, texts[right]] if isinstance(right, Key) else [gap]
        left = right
    return "".join(parts)


def _gap(sides: Mapping[Side, Cut], left: Key | str, right: Key | str) -> str | None:
    """Return the white space between two neighbours: of the side that changed it; of the ends of the text likewise."""
    gaps: dict[Side, str | None] = {}
    for side, found in sides.items():
        if left == START or right == END:
            gaps[side] = found.gaps[0 if left == START else -1]
        else:
            gaps[side] = found.between.get((left, right))
    base, ours, theirs = (gaps.get(side) for side in ("base", "ours", "theirs"))
    if ours is not None and theirs is not None:
        return ours if theirs == base else theirs
    return next((gap for gap in (ours, theirs, base) if gap is not None), None)


def _would_merge(
    sides: Mapping[Side, Cut], texts: Mapping[Key, str], left: Key | str, right: Key | str, gap: str
) -> bool:
    """Say whether a comment at a seam would go over to its neighbour: the seam is that of no version, and too close."""
    if not isinstance(left, Key) or not isinstance(right, Key):
        return False
    last = texts[left].rpartition("\n")[2]
    if not (last.lstrip().startswith("#") or texts[right].startswith("#")):
        return False
    return not any(
        found.between.get((left, right)) == gap
        and found.by_key[left].text == texts[left]
        and found.by_key[right].text == texts[right]
        for found in sides.values()
    )
