"""Keys, values and list elements in a text: how they are set, removed and renamed, one line or less at a time.

Every function takes the index of a text and returns splices; what lies outside them stays as it is, byte for byte.
"""

import re
from collections.abc import Mapping, Sequence
from collections.abc import Set as AbstractSet

from budget.description.blocks import LISTED, Splice, add_blocks, blocks_under, cut_blocks, newline_of
from budget.description.finding import ID_TABLES, Path
from budget.description.scan import line_start
from budget.description.spans import Span, SpanIndex, Table
from budget.description.spelling import EditError, Toml, plain, render_dotted, render_key, render_value, show


def set_value(index: SpanIndex, path: Path, value: Toml) -> list[Splice]:
    """Replace a value where it stands, or add the key in the place that is its own."""
    span = index.value(path)
    if span is not None:
        old = index.text[span.start : span.end]
        return [Splice(span.start, span.end, _respelled(old, value, newline_of(index.text)))]
    if blocks_under(index, path) or index.occurrences(path):
        raise EditError(f"{show(path)} is a table; its keys are set one by one")
    around = path[:-1]
    while around and not exists(index, around):
        around = around[:-1]
    return _add(index, around, path, value)


def remove(index: SpanIndex, path: Path) -> list[Splice]:
    """Cut a key with its line, an element with its comma, or a table with all blocks under it."""
    if not path:
        raise EditError("a key is needed, nothing was named")
    cuts, _ = _cuts(index, {path}, len(path))
    if not cuts:
        container = _container(index, path[:-1])
        if container is None:
            raise EditError(f"there is no {show(path)}")
        cuts = _cuts_inside(index, container, path)
    return cuts


def remove_all(index: SpanIndex, paths: Sequence[Path]) -> list[Splice] | None:
    """Cut several keys of one table, or elements of one list; None where one of them has no lines or blocks."""
    gone = set(paths)
    cuts, found = _cuts(index, gone, len(paths[0]))
    return cuts if found == gone else None


def rename(index: SpanIndex, path: Path, new: str) -> list[Splice]:
    """Replace a name wherever it stands: its own line, headers and dotted keys."""
    if not path or not isinstance(path[-1], str):
        raise EditError(f"{show(path)} has no name that could be changed")
    found = index.occurrences(path)
    if not found:
        raise EditError(f"there is no {show(path)}")
    return [Splice(span.start, span.end, render_key(new)) for span in found]


# Adding a key or an element.


def exists(index: SpanIndex, path: Path) -> bool:
    """Tell whether a text has a key, an element or a table."""
    return index.value(path) is not None or bool(index.occurrences(path)) or index.table(path) is not None


def _container(index: SpanIndex, path: Path) -> Path | None:
    """Return the nearest value in brackets that a path leads into."""
    for size in range(len(path), 0, -1):
        if index.value(path[:size]) is not None:
            return path[:size]
    return None


def _add(index: SpanIndex, around: Path, path: Path, value: Toml) -> list[Splice]:
    """Add what is missing of a path, below the nearest table or list that exists."""
    size = len(around)
    container = _container(index, around)
    if container is not None:
        return _into_brackets(index, container, path[: size + 1], _nested(path[size + 1 :], value))
    if index.table((*around, 0)) is not None:
        return _into_tables(index, around, path[size], _nested(path[size + 1 :], value))
    owner = path[: 2 if path[0] in ID_TABLES else 1]
    is_table = isinstance(plain(value), Mapping)
    if size < len(owner) <= len(path) and (len(path) > len(owner) or is_table):
        return add_blocks(index, owner, [_as_table(_nested(path[len(owner) :], value), owner)])
    key, nested = _name(path[size]), _nested(path[size + 1 :], value)
    table = index.table(around)
    if table is not None:
        if size == len(owner) and path[0] in ID_TABLES and key in LISTED and _is_tables(nested):
            return add_blocks(index, path[: size + 1], plain(nested), array=True)
        return [_line_after(index, table, table.statements[-1] if table.statements else None, (key,), nested)]
    beside = [
        (table, statement)
        for table in index.all_tables()
        for statement in table.statements
        if len(table.path) < size and statement[2][:size] == around
    ]
    if beside:  # in a table that only dotted keys make
        table, statement = beside[-1]
        return [_line_after(index, table, statement, (*around[len(table.path) :], key), nested)]
    return add_blocks(index, around, [{key: nested}])


def _is_tables(value: Toml) -> bool:
    value = plain(value)
    return isinstance(value, list) and bool(value) and all(isinstance(one, dict) for one in value)


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


def _line_after(
    index: SpanIndex, table: Table, statement: tuple[int, int, Path] | None, key: Path, value: Toml
) -> Splice:
    """Add a line behind a key, indented as that one, else behind the header."""
    text = index.text
    start, end = (table.start, table.line_end) if statement is None else statement[:2]
    newline = "\r\n" if text.endswith("\r\n", 0, end) else newline_of(text)
    line = f"{render_dotted(key)} = {_rendered(value, newline)}"
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
        without = bool(text) and not text.endswith("\n")
        return Splice(len(text), len(text), newline + line if without else line + newline)
    start = index.block_start(tables[1])
    return Splice(start, start, line + newline + newline)


def _into_brackets(index: SpanIndex, container: Path, path: Path, value: Toml) -> list[Splice]:
    """Add an entry to an inline table, or an element to an array."""
    span, size = index.value(container), len(container)
    opening = "" if span is None else index.text[span.start]
    if span is None or opening not in "[{":
        raise EditError(f"{show(container)} is a value, so there is no {show(path)}")
    if opening == "[":
        return _into_array(index, container, path[size], value, span)
    entry = f"{render_dotted((*path[size:-1], _name(path[-1])))} = {_rendered(value, newline_of(index.text))}"
    items = index.items(container)
    if not items:
        return [Splice(span.start, span.end, f"{{ {entry} }}")]
    end = _end_of(index, items[-1])
    return [Splice(end, end, f", {entry}")]


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
    line = _line_of_its_own(text, last, is_last=True)
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
    return add_blocks(index, around, [_as_table(value, (*around, part))], array=True)


def _rendered(value: Toml, newline: str) -> str:
    return re.sub(r"\r?\n", newline, render_value(value))


def _respelled(old: str, value: Toml, newline: str) -> str:
    """Spell a new value, a plain text in the quotes that the old one has."""
    literal = old.startswith("'") and not old.startswith("'''")
    if literal and isinstance(value, str) and value.isprintable() and "'" not in value:
        return f"'{value}'"
    return _rendered(value, newline)


# Cutting.


def _cuts(index: SpanIndex, gone: AbstractSet[Path], size: int) -> tuple[list[Splice], set[Path]]:
    """Return the cuts of the lines and blocks of paths of one length, and the paths that have such."""
    blocks = [table for table in index.all_tables()[1:] if table.path[:size] in gone]
    removed = {table.number for table in blocks}
    found = {table.path[:size] for table in blocks}
    cuts = []
    for table in index.all_tables():
        if table.number in removed:
            continue
        for start, end, path in table.statements:
            if path[:size] in gone:
                cuts.append(_line_cut(index.text, start, end))
                found.add(path[:size])
    return cuts + cut_blocks(index, blocks), found


_COMMA = re.compile(r"[ \t]*,")
_COMMA_BEHIND = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*,")
_REST = re.compile(r"[ \t]*(,?)[ \t]*(?:#[^\n]*)?\r?\n")


def _end_of(index: SpanIndex, path: Path) -> int:
    span = index.value(path)
    return 0 if span is None else span.end


def _line_of_its_own(text: str, span: Span, *, is_last: bool) -> Span | None:
    """Return the lines of an array element where nothing else stands on them but a comma and a comment."""
    start = line_start(text, span.start)
    rest = _REST.match(text, span.end)
    if rest is None or text[start : span.start].strip() or not (rest[1] or is_last):
        return None
    return Span(start, rest.end())


def _line_cut(text: str, start: int, end: int) -> Splice:
    start = line_start(text, start)
    if start and not text.endswith("\n", 0, end):  # the last line, without a newline: the file stays without
        start -= 2 if text.endswith("\r\n", 0, start) else 1
    return Splice(start, end, "")


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
        line = _line_of_its_own(text, entry, is_last=position + 1 == len(entries))
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
