"""Tables with a header as blocks of text: where a new one goes, and how blocks are cut, moved and copied.

Nothing is written or read here: a function takes the index of a text and returns splices or a new text. What lies
outside a splice stays as it is, byte for byte.
"""

from collections.abc import Iterable, Mapping, Sequence
from itertools import pairwise
from typing import NamedTuple

from budget.description.finding import Path
from budget.description.spans import Span, SpanIndex, Table
from budget.description.spelling import EditError, Toml, render_dotted, render_key, render_value, show

TOP_ORDER = (
    "design", "display", "fluid", "defaults", "limits", "budget", "pipe", "duct", "fitting", "device", "source",
    "section", "terminal", "case", "link", "sizing",
)  # fmt: skip
"""The order in which a description names its tables; a new one takes its place in it."""

LISTED = frozenset({"item", "fitting"})
"""Keys of a section, terminal or source whose tables stand in `[[...]]` blocks of their own."""


class Splice(NamedTuple):
    """Replace the text from `start` up to `end`."""

    start: int
    end: int
    text: str


def splice(text: str, splices: Iterable[Splice]) -> str:
    """Apply splices, which may come in any order but must not overlap."""
    parts, position = [], 0
    for start, end, new in sorted(splices, key=lambda one: (one.start, one.end)):
        parts += [text[position:start], new]
        position = end
    return "".join(parts) + text[position:]


def newline_of(text: str) -> str:
    """Return how the text ends its lines."""
    found = text.find("\n")
    return "\r\n" if found > 0 and text[found - 1] == "\r" else "\n"


def blocks_under(index: SpanIndex, path: Path) -> list[Table]:
    """Return a table and its sub-tables, those that have headers, wherever they stand."""
    size = len(path)
    return [table for table in index.all_tables()[1:] if table.path[:size] == path]


def add_blocks(
    index: SpanIndex,
    path: Path,
    tables: Sequence[Mapping[str, Toml]],
    *,
    after: Path | None = None,
    array: bool = False,
) -> list[Splice]:
    """Add a block with a header for each table, one blank line between.

    They go after the blocks of `after`, else after their siblings, else where the order of a description has them.
    """
    newline = newline_of(index.text)
    chunks = [newline.join(_block_lines(path, one, array=array)) + newline for one in tables]
    return [_placed(index.text, _place_for(index, path, after, array=array), newline.join(chunks))]


def cut_blocks(index: SpanIndex, blocks: Sequence[Table]) -> list[Splice]:
    """Cut blocks; where the file now ends earlier, the blank lines above go too."""
    text = index.text
    spans: list[Span] = []
    for table in blocks:
        block = _block_of(index, table)
        if spans and spans[-1].end == block.start:
            spans[-1] = Span(spans[-1].start, block.end)
        else:
            spans.append(block)
    if spans and spans[-1].end == len(text):
        kept = text[: spans[-1].start].rstrip(" \t\r\n")
        found = text.find("\n", len(kept), spans[-1].start)
        spans[-1] = Span(found + 1 if kept and found >= 0 else len(kept), len(text))
    return [Splice(span.start, span.end, "") for span in spans]


def move_blocks(index: SpanIndex, path: Path, target: Path, *, behind: bool) -> str:
    """Return the text with a table and its sub-tables behind or before the blocks of another, each as it was."""
    text, moved = index.text, blocks_under(index, path)
    if target[: len(path)] == path:
        return text
    goal = [table for table in blocks_under(index, target) if table not in moved]
    if not moved or not goal:
        raise EditError(f"there is no table {show(target if moved else path)} with a header of its own")
    spans = [_block_of(index, table) for table in moved]
    place = _block_of(index, goal[-1]).end if behind else _block_of(index, goal[0]).start
    together = all(one.end == other.start for one, other in pairwise(spans))
    if together and place in (spans[0].start, spans[-1].end):
        return text
    cuts = cut_blocks(index, moved)
    rest = splice(text, cuts)
    place -= sum(min(place, cut.end) - cut.start for cut in cuts if cut.start < place)
    chunk = _joined([text[span.start : span.end] for span in spans], spans, newline_of(text))
    return splice(rest, [_placed(rest, min(place, len(rest)), chunk)])


def copy_blocks(index: SpanIndex, path: Path, new: Path) -> list[Splice]:
    """Add a copy of a table and its sub-tables, comments included, under another name.

    It goes behind the original; an element of an array of tables to the position that the new path names, else to
    the end of the array.
    """
    text, blocks = index.text, blocks_under(index, path)
    if not blocks:
        raise EditError(f"there is no table {show(path)}")
    spans = [_block_of(index, table) for table in blocks]
    last = sum(isinstance(part, str) for part in path) - 1
    chunks = []
    for table, span in zip(blocks, spans, strict=True):
        names = index.names(table)
        head, tail = text[span.start : names[0].start], text[names[last].end : span.end]
        chunks.append(head + render_dotted(new) + tail)
    array = isinstance(path[-1], int)
    if array and isinstance(new[-1], int) and index.table(new) is not None:
        place = _block_of(index, blocks_under(index, new)[0]).start
    elif array or path[:-1] != new[:-1]:
        place = _place_for(index, new[:-1] if isinstance(new[-1], int) else new, None, array=True)
    else:
        place = spans[-1].end
    return [_placed(text, place, _joined(chunks, spans, newline_of(text)))]


def _block_of(index: SpanIndex, table: Table) -> Span:
    block = index.block(table.path)
    if block is None:
        raise EditError(f"there is no table {show(table.path)}")
    return block


def _joined(chunks: Sequence[str], spans: Sequence[Span], newline: str) -> str:
    """Join the texts of blocks: as they were where they stood together, else with one blank line between."""
    text = ""
    for position, chunk in enumerate(chunks):
        if position and spans[position - 1].end != spans[position].start:
            text = _ended(text, newline) + newline
        text += chunk
    return _ended(text, newline)


def _ended(text: str, newline: str) -> str:
    """Return a text with one newline at its end and no blank lines."""
    lines = text.split("\n")
    while len(lines) > 1 and not lines[-1].strip(" \t\r"):
        lines.pop()
    return "\n".join(lines) + ("\n" if lines[-1].endswith("\r") else newline)


def _placed(text: str, position: int, chunk: str) -> Splice:
    """Put a block at a place between blocks, with one blank line before and behind."""
    newline = newline_of(text) if "\n" in text else newline_of(chunk)
    before = text[:position]
    tail = before[len(before.rstrip(" \t\r\n")) :]
    if not before.strip():
        opening = "" if not before or before.endswith("\n") else newline
    else:
        opening = newline * max(0, 2 - tail.count("\n"))
    if position < len(text):
        chunk += newline
    elif text and not text.endswith("\n"):
        chunk = chunk.removesuffix("\n").removesuffix("\r")
    return Splice(position, position, opening + chunk)


def _block_lines(path: Path, values: Mapping[str, Toml], *, array: bool) -> list[str]:
    """Spell a block; lists of tables under the keys that are written so get blocks of their own."""
    header = render_dotted(path)
    lines, below = [f"[[{header}]]" if array else f"[{header}]"], []
    for key, value in values.items():
        tables = isinstance(value, list) and value and all(isinstance(one, Mapping) for one in value)
        if tables and key in LISTED and not array:
            for one in value:
                below += ["", *_block_lines((*path, key), one, array=True)]
        else:
            lines.append(f"{render_key(key)} = {render_value(value)}")
    return lines + below


def _place_for(index: SpanIndex, path: Path, after: Path | None, *, array: bool) -> int:
    """Choose the place of a new block."""
    if after is not None:
        blocks = blocks_under(index, after)
        if not blocks:
            raise EditError(f"there is no table {show(after)}")
        return _block_of(index, blocks[-1]).end
    own = blocks_under(index, path)
    if own and not array:
        return _block_of(index, own[0]).start  # above the sub-tables that were there before it
    for size in range(len(path), 0, -1):
        blocks = blocks_under(index, path[:size])
        if blocks:
            return _block_of(index, blocks[-1]).end
    rank = _rank(path)
    tables = index.all_tables()[1:]
    before = [table for table in tables if _rank(table.path) <= rank]
    if before:
        return _block_of(index, before[-1]).end
    return _block_of(index, tables[0]).start if tables else len(index.text)


def _rank(path: Path) -> int:
    return TOP_ORDER.index(path[0]) if path[0] in TOP_ORDER else len(TOP_ORDER)
