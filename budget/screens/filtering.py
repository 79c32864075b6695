"""Which rows a filter leaves: those that have every one of its words, and the rows on which they hang."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass

from budget.description.finding import Path
from budget.description.model import Description, Section, Source, Terminal
from budget.report.plain import plain
from budget.screens.rows import EMPTY, Row, View, find_item

_WORD = re.compile(r'(?<!\S)"([^"]*)(?:"|$)|(\S+)')
"""A word, or what stands in quotes; the quote that ends may be yet to come."""


@dataclass(frozen=True, slots=True)
class Filter:
    """What a row must have to be shown; a filter that asks for nothing is False."""

    text: str = ""
    """As it was written."""
    words: tuple[str, ...] = ()
    """What the row says, each somewhere in one of its texts."""
    traits: tuple[str, ...] = ()
    """What the row is: on the index circuit, over a limit, with a device."""

    def __bool__(self) -> bool:
        """Whether it asks for anything."""
        return bool(self.words or self.traits)


NO_FILTER = Filter()


@dataclass(frozen=True, slots=True)
class Sifted:
    """What a filter leaves of the rows: those to be shown, and which of them only lead to others."""

    rows: tuple[Row, ...]
    leading: frozenset[Path]
    matching: int


def read_filter(text: str) -> Filter:
    """Read the words of a filter: those with a meaning of their own, those that are sought, and texts in quotes."""
    words, traits = [], []
    for quoted, bare in _WORD.findall(text):
        word = folded(bare or quoted).strip()
        if bare and word in TRAITS:
            traits.append(word)
        elif word:
            words.append(word)
    return Filter(plain(text).strip(), tuple(words), tuple(traits))


def sought(text: str) -> Filter:
    """Read the words of a search: each is sought as it is written, none has a meaning of its own."""
    return Filter(plain(text).strip(), tuple(folded(text).split()))


def sift(view: View, rows: Sequence[Row], wanted: Filter, held: Path = ()) -> Sifted:
    """Return what a filter leaves, in order; the row with the keys `held` stays whether it matches or not."""
    kept: list[Row] = []
    leading: set[Path] = set()
    matching = 0
    depth = 0  # of the row that was kept last, going up; what that hangs on is the next that is less deep
    for row in reversed(rows):
        if matches(view, row, wanted):
            matching += 1
        elif row.path != held:
            if not kept or row.depth >= depth:
                continue
            leading.add(row.path)
        kept.append(row)
        depth = row.depth
    return Sifted(tuple(reversed(kept)), frozenset(leading), matching)


def matches(view: View, row: Row, wanted: Filter) -> bool:
    """Whether a row has every word of a filter."""
    if not all(TRAITS[trait](view, row) for trait in wanted.traits):
        return False
    if not wanted.words:
        return True
    text = text_of(view, row)
    return all(word in text for word in wanted.words)


def text_of(view: View, row: Row) -> str:
    """Return all that a row says of itself, to be sought in: a line for each text, kept with the view."""
    text = view.texts.get(row.path)
    if text is None:
        text = view.texts[row.path] = folded("\n".join(plain(one) for one in _texts(view, row) if one))
    return text


def folded(text: str) -> str:
    """Return a text in which capitals and ways of writing the same letter make no difference."""
    return (text if text.isascii() else unicodedata.normalize("NFC", text)).casefold()


def told(sifted: Sifted, wanted: Filter, whole: int) -> str:
    """Say how many of all rows match and how many are shown, so that nobody takes the part for the whole."""
    return f"{sifted.matching} of {whole} rows match, {len(sifted.rows)} shown: {wanted.text}"


def nearest(rows: Sequence[Row], shown: Sequence[Row], path: Path, *, above: bool = False) -> int | None:
    """Return the place among the rows shown that is closest to a row of the run; None where either is missing.

    Of two as close it is that above; `above` takes the one above in any case.
    """
    places = {row.path: place for place, row in enumerate(rows)}
    here = places.get(path)
    if here is None or not shown:
        return None

    def far(place: int) -> tuple[bool, int, int]:
        there = places[shown[place].path]
        return above and there > here, abs(there - here), there

    return min(range(len(shown)), key=far)


def _texts(view: View, row: Row) -> Iterator[str]:
    if row.kind == "item":
        yield find_item(view.snapshot, row)[0].name
        yield view.cells(row).get("size", EMPTY).text
        return
    part = _part(view.snapshot.description, row)
    yield from (part.id, part.title, part.location, part.note)
    if isinstance(part, Source):
        return
    yield part.balance or ""
    if part.run is not None:
        yield part.run.geometry.label if part.run.geometry is not None else ""
        yield from (use.name for use in part.run.fittings)


def _part(description: Description, row: Row) -> Source | Section | Terminal:
    parts: Mapping[str, Source | Section | Terminal]
    if row.kind == "source":
        parts = description.sources
    else:
        parts = description.sections if row.kind == "section" else description.terminals
    return parts[row.id]


def _on_index(view: View, row: Row) -> bool:
    """Whether a row is on the index circuit; an item is where its row is, and so is a source, which bears it."""
    source = view.snapshot.budget.sources.get(row.id)
    return bool(source.index) if source is not None else view.on_index(row)


def _over(view: View, row: Row) -> bool:
    return view.level(row) is not None


def _with_device(view: View, row: Row) -> bool:
    if row.kind not in ("section", "terminal"):
        return False
    part = _part(view.snapshot.description, row)
    return not isinstance(part, Source) and bool(part.balance)


TRAITS: Mapping[str, Callable[[View, Row], bool]] = {"index": _on_index, "over": _over, "device": _with_device}
"""Words with a meaning of their own: on the index circuit, with a warning or an error, with a balancing device."""
