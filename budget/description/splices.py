"""How an edit changes the text: the places where it is cut, and what is put there.

Every function takes the index of a text and returns splices; none of them reads or writes anything else, so the text
outside the splices stays as it is, byte for byte.
"""

import re
from collections.abc import Iterable, Mapping, Sequence
from typing import NamedTuple

from budget.description.finding import ID_TABLES, Path
from budget.description.scan import line_start
from budget.description.spans import Span, SpanIndex, Table
from budget.description.spelling import (
    EditError,
    Toml,
    plain,
    render_dotted,
    render_key,
    render_value,
    show,
)

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


def set_value(index: SpanIndex, path: Path, value: Toml) -> list[Splice]:
    """Replace a value where it stands, or add the key in the place that is its own."""
    span = index.value(path)
    if span is not None:
        old = index.text[span.start : span.end]
        return [Splice(span.start, span.end, _respelled(old, value, newline_of(index.text)))]
    if blocks_under(index, path) or index.occurrences(path):
        raise EditError(f"{show(path)} is a table; its keys are set one by one")
    around = path[:-1]
    while around and not _exists(index, around):
        around = around[:-1]
    return _add(index, around, path, value)


def remove(index: SpanIndex, path: Path) -> list[Splice]:
    """Cut a key with its line, an element with its comma, or a table with all blocks under it."""
    blocks = blocks_under(index, path)
    removed = {table.number for table in blocks}
    size = len(path)
    lines = [
        (start, end)
        for table in index.all_tables()
        if table.number not in removed
        for start, end, found in table.statements
        if found[:size] == path
    ]
    cuts = [_line_cut(index.text, start, end) for start, end in lines]
    cuts += _block_cuts(index, blocks)
    if not cuts:
        container = path[:-1]
        while container and index.value(container) is None:
            container = container[:-1]
        if not container:
            raise EditError(f"there is no {show(path)}")
        cuts = _cuts_inside(index, container, path)
    return cuts


def rename(index: SpanIndex, path: Path, new: str) -> list[Splice]:
    """Replace a name wherever it stands: its own line, headers and dotted keys."""
    if not path or not isinstance(path[-1], str):
        raise EditError(f"{show(path)} has no name that could be changed")
    found = index.occurrences(path)
    if not found:
        raise EditError(f"there is no {show(path)}")
    return [Splice(span.start, span.end, render_key(new)) for span in found]


def add_table(
    index: SpanIndex, path: Path, values: Mapping[str, Toml], *, after: Path | None = None, array: bool = False
) -> list[Splice]:
    """Add a block with a header: after the blocks of `after`, else after its siblings, one blank line between."""
    newline = newline_of(index.text)
    if array:
        if index.value(path) is not None:
            return set_value(index, (*path, len(index.items(path))), dict(values))
    elif index.table(path) is not None or index.value(path) is not None:
        raise EditError(f"{show(path)} exists already")
    chunk = newline.join(_block_lines(path, values, array=array)) + newline
    return [placed(index.text, _place_for(index, path, after, array=array), chunk)]


def placed(text: str, position: int, chunk: str) -> Splice:
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


def blocks_under(index: SpanIndex, path: Path) -> list[Table]:
    """Return a table and its sub-tables, those that have headers, wherever they stand."""
    size = len(path)
    return [table for table in index.all_tables()[1:] if table.path[:size] == path]


def block_of(index: SpanIndex, table: Table) -> Span:
    """Return the block of a table that is known to have one."""
    block = index.block(table.path)
    if block is None:
        raise EditError(f"there is no {show(table.path)}")
    return block


def end_of_blocks(index: SpanIndex, blocks: Sequence[Table]) -> int:
    """Return the place behind the last of some blocks."""
    return block_of(index, blocks[-1]).end


# Adding a key or an element.


def _exists(index: SpanIndex, path: Path) -> bool:
    return index.value(path) is not None or bool(index.occurrences(path)) or index.table(path) is not None


def _add(index: SpanIndex, around: Path, path: Path, value: Toml) -> list[Splice]:
    """Add what is missing of a path, below the nearest table or list that exists."""
    size = len(around)
    owner = path[: 2 if path[0] in ID_TABLES else 1]
    span, rest = index.value(around) if around else None, path[size + 1 :]
    if span is not None:
        nested = _nested(rest, value)
        if index.text[span.start] == "{":
            return _into_inline_table(index, around, path[: size + 1], nested)
        if index.text[span.start] == "[":
            return _into_array(index, around, path[size], nested, span)
        raise EditError(f"{show(around)} is a value, so it has no {show(path[size:])}")
    if index.table((*around, 0)) is not None:
        return _into_tables(index, around, path[size], _nested(rest, value))
    table = index.table(around)
    if size < len(owner) and not (len(path) == 1 and not isinstance(plain(value), Mapping)):
        if len(path) >= len(owner) and (len(path) > len(owner) or isinstance(plain(value), Mapping)):
            return add_table(index, owner, _as_table(_nested(path[len(owner) :], value), owner))
        if table is None or not size:
            return add_table(index, path[:-1], {str(path[-1]): value})
    nested = _nested(rest, value)
    if size == len(owner) and path[0] in ID_TABLES and path[size] in LISTED and table is not None:
        elements = plain(nested)
        if isinstance(elements, list) and elements and all(isinstance(one, dict) for one in elements):
            return _several_tables(index, path[: size + 1], elements)
    if table is not None:
        return _into_body(index, table, _name(path[size]), nested)
    inside = [found for _, found in _statements_under(index, around)]
    if inside:
        return _beside(index, around, path[size], nested)
    return add_table(index, around, {str(path[size]): nested})


def _nested(rest: Path, value: Toml) -> Toml:
    """Wrap a value in the tables and lists that the rest of its path names."""
    for part in reversed(rest):
        if isinstance(part, int) and part != 0:
            raise EditError(f"there is no element {part} in a list that is yet empty")
        value = [value] if isinstance(part, int) else {part: value}
    return value


def _as_table(value: Toml, path: Path) -> Mapping[str, Toml]:
    value = value if isinstance(value, Mapping) else plain(value)
    if not isinstance(value, Mapping):
        raise EditError(f"{show(path)} is a table")
    return value


def _name(part: str | int) -> str:
    if isinstance(part, int):
        raise EditError(f"{part} is a position in a list, and a key was due")
    return part


def _into_body(index: SpanIndex, table: Table, key: str, value: Toml) -> list[Splice]:
    """Add a line after the last key of a table, indented as that one."""
    return [_line_after(index, table, table.statements[-1] if table.statements else None, render_key(key), value)]


def _beside(index: SpanIndex, around: Path, part: str | int, value: Toml) -> list[Splice]:
    """Add a line to a table that only dotted keys make, after the last of them."""
    table, statement = _statements_under(index, around)[-1]
    key = render_dotted((*around[len(table.path) :], _name(part)))
    return [_line_after(index, table, statement, key, value)]


def _statements_under(index: SpanIndex, path: Path) -> list[tuple[Table, tuple[int, int, Path]]]:
    size = len(path)
    return [
        (table, statement)
        for table in index.all_tables()
        for statement in table.statements
        if statement[2][:size] == path
    ]


def _line_after(
    index: SpanIndex, table: Table, statement: tuple[int, int, Path] | None, key: str, value: Toml
) -> Splice:
    text = index.text
    start, end = (table.start, table.line_end) if statement is None else statement[:2]
    newline = "\r\n" if text.endswith("\r\n", 0, end) else newline_of(text)
    line = f"{key} = {_rendered(value, newline)}"
    if statement is None and not table.number:
        return _first_line(index, line, newline)
    line = text[line_start(text, start) : start] + line
    if text.endswith("\n", 0, end):
        return Splice(end, end, line + newline)
    return Splice(end, end, newline + line)


def _first_line(index: SpanIndex, line: str, newline: str) -> Splice:
    """Put the first key of the file itself above the first header and its comment."""
    text, tables = index.text, index.all_tables()
    if len(tables) == 1:
        opening = newline if text and not text.endswith("\n") else ""
        return Splice(len(text), len(text), opening + line + newline)
    start = index.block_start(tables[1])
    return Splice(start, start, line + newline + newline)


def _into_inline_table(index: SpanIndex, around: Path, path: Path, value: Toml) -> list[Splice]:
    """Add an entry behind the last one; `path` may lie in a table that dotted keys make in there."""
    rendered = _rendered(value, newline_of(index.text))
    items = index.items(around)
    if not items:
        span = index.value(around)
        if span is None:
            raise EditError(f"there is no {show(around)}")
        return [Splice(span.start, span.end, f"{{ {render_dotted(path[len(around) :])} = {rendered} }}")]
    end = _end_of(index, items[-1])
    return [Splice(end, end, f", {render_dotted(path[len(around) :])} = {rendered}")]


def _into_array(index: SpanIndex, around: Path, part: str | int, value: Toml, span: Span) -> list[Splice]:
    """Add an element behind the last one: on a line of its own where the last one has a line of its own."""
    text, items = index.text, index.items(around)
    if part != len(items):
        raise EditError(f"{show(around)} has {len(items)} elements, so there is no {show((*around, part))}")
    newline = newline_of(text)
    rendered = _rendered(value, newline)
    if not items:
        if text[span.start + 1 : span.end - 1].strip():
            return [Splice(span.start + 1, span.start + 1, rendered)]
        return [Splice(span.start, span.end, f"[{rendered}]")]
    last = index.value(items[-1])
    if last is None:
        raise EditError(f"there is no {show(items[-1])}")
    line = _line_of_its_own(text, last)
    if line is None:
        return [Splice(last.end, last.end, f", {rendered}")]
    comma = _COMMA.match(text, last.end)
    indent = text[line.start : last.start]
    if comma is not None:
        return [Splice(line.end, line.end, f"{indent}{rendered},{newline}")]
    return [Splice(last.end, last.end, ","), Splice(line.end, line.end, f"{indent}{rendered}{newline}")]


def _into_tables(index: SpanIndex, around: Path, part: str | int, value: Toml) -> list[Splice]:
    """Add a `[[...]]` block behind the last of an array of tables."""
    count = sum(table.path[:-1] == around for table in index.all_tables()[1:])
    if part != count:
        raise EditError(f"{show(around)} has {count} elements, so there is no {show((*around, part))}")
    return add_table(index, around, _as_table(value, (*around, part)), array=True)


def _several_tables(index: SpanIndex, path: Path, elements: Sequence[Mapping[str, Toml]]) -> list[Splice]:
    newline = newline_of(index.text)
    chunks = [newline.join(_block_lines(path, one, array=True)) + newline for one in elements]
    return [placed(index.text, _place_for(index, path, None, array=True), newline.join(chunks))]


def _rendered(value: Toml, newline: str) -> str:
    return re.sub(r"\r?\n", newline, render_value(value))


def _respelled(old: str, value: Toml, newline: str) -> str:
    """Spell a new value, a plain text in the quotes that the old one has."""
    literal = old.startswith("'") and not old.startswith("'''")
    if literal and isinstance(value, str) and value.isprintable() and "'" not in value:
        return f"'{value}'"
    return _rendered(value, newline)


# Adding a block.


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
        return end_of_blocks(index, blocks)
    own = blocks_under(index, path)
    if own and not array:
        return block_of(index, own[0]).start  # above the sub-tables that were there before it
    for size in range(len(path), 0, -1):
        blocks = blocks_under(index, path[:size])
        if blocks:
            return end_of_blocks(index, blocks)
    rank = _rank(path)
    tables = index.all_tables()[1:]
    before = [table for table in tables if _rank(table.path) <= rank]
    if before:
        return end_of_blocks(index, before)
    return block_of(index, tables[0]).start if tables else len(index.text)


def _rank(path: Path) -> int:
    return TOP_ORDER.index(path[0]) if path[0] in TOP_ORDER else len(TOP_ORDER)


# Cutting.

_COMMA = re.compile(r"[ \t]*,")
_COMMA_BEHIND = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*,")
_REST = re.compile(r"[ \t]*,?[ \t]*(?:#[^\n]*)?\n")


def _end_of(index: SpanIndex, path: Path) -> int:
    span = index.value(path)
    return 0 if span is None else span.end


def _line_of_its_own(text: str, span: Span) -> Span | None:
    """Return the lines of an array element where nothing else stands on them but a comma and a comment."""
    start = line_start(text, span.start)
    rest = _REST.match(text, span.end)
    if rest is None or text[start : span.start].strip():
        return None
    return Span(start, rest.end())


def _line_cut(text: str, start: int, end: int) -> Splice:
    start = line_start(text, start)
    if start and not text.endswith("\n", 0, end):  # the last line, without a newline: the file stays without
        start -= 2 if text.endswith("\r\n", 0, start) else 1
    return Splice(start, end, "")


def _block_cuts(index: SpanIndex, blocks: Sequence[Table]) -> list[Splice]:
    """Cut blocks; where the file now ends earlier, the blank lines above go too."""
    text = index.text
    spans: list[Span] = []
    for table in blocks:
        block = block_of(index, table)
        if spans and spans[-1].end == block.start:
            spans[-1] = Span(spans[-1].start, block.end)
        else:
            spans.append(block)
    if spans and spans[-1].end == len(text):
        kept = text[: spans[-1].start].rstrip(" \t\r\n")
        found = text.find("\n", len(kept), spans[-1].start)
        spans[-1] = Span(found + 1 if kept and found >= 0 else len(kept), len(text))
    return [Splice(span.start, span.end, "") for span in spans]


def _cuts_inside(index: SpanIndex, container: Path, path: Path) -> list[Splice]:
    """Cut entries of an inline table, or an element of an array, with one comma each."""
    text, items, size = index.text, index.items(container), len(path)
    gone = [item[:size] == path for item in items]
    span = index.value(container)
    if span is None or not any(gone):
        raise EditError(f"there is no {show(path)}")
    entries = [entry for entry in map(index.entry, items) if entry is not None]
    if all(gone):
        behind = _COMMA_BEHIND.match(text, entries[-1].end)
        end = behind.end() if behind else entries[-1].end
        if text[span.start + 1 : entries[0].start].strip() or text[end : span.end - 1].strip():
            return [Splice(entries[0].start, end, "")]
        return [Splice(span.start + 1, span.end - 1, "")]
    cuts = []
    for position, entry in enumerate(entries):
        if not gone[position]:
            continue
        line = _line_of_its_own(text, entry)
        if line is not None:
            cuts.append(Splice(line.start, line.end, ""))
        elif not all(gone[position:]):
            cuts.append(Splice(entry.start, entries[position + 1].start, ""))
        else:
            cuts.append(_last_cut(text, entries[position - 1], entry, in_table=text[span.start] == "{"))
    return cuts


def _last_cut(text: str, before: Span, entry: Span, *, in_table: bool) -> Splice:
    """Cut an entry that nothing follows: with the comma before it, unless a comment stands between."""
    if in_table or not text[before.end : entry.start].strip(" \t,"):
        return Splice(before.end, entry.end, "")
    behind = _COMMA_BEHIND.match(text, entry.end)
    return Splice(entry.start, behind.end() if behind else entry.end, "")
