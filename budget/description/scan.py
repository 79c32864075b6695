"""One pass over a TOML text that notes where its tables, keys and values stand.

A line of the usual kind is one match of one expression; everything else goes name by name and value by value.
What stands in flat brackets is looked into when somebody asks.
"""

import re
import tomllib
from dataclasses import dataclass, field

from budget.description.finding import Path

DEEPEST = 64
"""Levels of nested arrays and inline tables that are followed."""

Entry = tuple[int, int, int, int]
"""Start and end of a key, start and end of its value; an element of an array has -1 for the key."""


class SpanError(ValueError):
    """A text that is no TOML, or is nested too deeply."""


@dataclass(slots=True)
class Table:
    """A table with a header of its own; with an empty path, the keys of the file above the first header."""

    path: Path
    number: int  # in file order; 0 for the keys above the first header
    start: int  # of the bracket
    end: int  # after the closing bracket
    line_end: int  # after the newline of the header
    floor: int  # after the line of the statement before it: its comments stand between
    statements: list[tuple[int, int, Path]]  # start of the key, end after the newline, path

    @property
    def body_end(self) -> int:
        """Where the line of its last key ends, or that of its header."""
        return self.statements[-1][1] if self.statements else self.line_end


@dataclass(slots=True)
class Scan:
    """What one pass has found, by path."""

    tables: list[Table] = field(default_factory=list)
    entries: dict[Path, Entry] = field(default_factory=dict)
    dotted: dict[Path, list[tuple[int, int]]] = field(default_factory=dict)  # names in dotted keys, but the last
    starts: dict[Path, int] = field(default_factory=dict)  # where a dotted key begins, by the path of its value
    unread: dict[Path, int] = field(default_factory=dict)  # values in brackets not looked into yet


def scan(text: str) -> Scan:
    """Note where everything stands in a text that tomllib has accepted. Raises SpanError."""
    found = Scan()
    _Reader(text, found).read()
    return found


def look_into(text: str, found: Scan, path: Path) -> None:
    """Note what stands inside the brackets of a value, unless that has been done."""
    start = found.unread.pop(path, None)
    if start is not None:
        _Reader(text, found).read_value(start, path, 0)


def look_into_around(text: str, found: Scan, path: Path) -> None:
    """Note what stands inside the brackets around a path."""
    if found.unread:
        for size in range(1, len(path)):
            look_into(text, found, path[:size])


def read_names(text: str, table: Table) -> list[tuple[int, int]]:
    """Return the places of the names in a table's header."""
    inside = table.start + (2 if text.startswith("[[", table.start) else 1)
    return _Reader(text, Scan()).read_key(inside)[1]


def line_start(text: str, offset: int) -> int:
    """Return where the line of a character begins."""
    return text.rfind("\n", 0, offset) + 1


def line_and_column(text: str, offset: int) -> tuple[int, int]:
    """Return line and column of a character, both from 1."""
    return text.count("\n", 0, offset) + 1, offset - line_start(text, offset) + 1


COMMENT_LINES = re.compile(r"(?:[ \t]*#[^\n]*(?:\n|\Z))*")
BLANK_LINES = re.compile(r"(?:[ \t]*\r?\n)*")

_BARE = r"[A-Za-z0-9_-]+"
_END = r"[ \t]*+(?:#[^\n]*)?(?:\r?\n|\Z)"
_BASIC, _LITERAL = r'"(?!"")[^"\\\n]*"', r"'(?!'')[^'\n]*'"
_FLAT = rf"(?>[^\"'{{}}\[\]#\n]++|{_BASIC}|{_LITERAL})*"  # nothing nested, no escape, on one line
_GAP = re.compile(r"(?>(?:[ \t\r]*+(?:#[^\n]*)?\n)*)[ \t]*+(?:#[^\n]*+)?")  # up to the next statement
_USUAL = re.compile(
    r"(?>(?:[ \t\r]*+(?:#[^\n]*)?\n)*)[ \t]*+(?:"
    rf"({_BARE})[ \t]*+=[ \t]*+"
    rf"(?:({_BASIC}|{_LITERAL}|[A-Za-z0-9+\-_.:]++)|(\{{{_FLAT}\}}|\[{_FLAT}\])){_END}"
    rf"|\[(\[?)({_BARE}(?:\.{_BARE})*)\]\]?{_END})"
)
_SPACE = re.compile(r"[ \t]*")
_INSIDE_ARRAY = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_REST_OF_LINE = re.compile(_END)
_NAME = re.compile(rf"({_BARE})|\"[^\"\\\n]*(?:\\.[^\"\\\n]*)*\"|'[^'\n]*'")
_SCALAR = re.compile(
    r'"""(?:"{0,2}(?:[^"\\]|\\[\s\S]))*"{3,5}'
    r"|'''(?:'{0,2}[^'])*'{3,5}"
    r'|"[^"\\\n]*(?:\\.[^"\\\n]*)*"'
    r"|'[^'\n]*'"
    r"|[0-9]{4}-[0-9]{2}-[0-9]{2} [0-9]{2}:[0-9:.]+(?:[Zz]|[+-][0-9:]+)?"
    r"|[A-Za-z0-9+\-_.:]+"
)


class _Reader:
    """Fills an index in one pass over its text."""

    def __init__(self, text: str, found: Scan) -> None:
        self.text = text
        self.found = found
        self.lengths: dict[Path, int] = {}  # of the arrays of tables so far

    def read(self) -> None:
        text, tables, size = self.text, self.found.tables, len(self.text)
        entries, unread = self.found.entries, self.found.unread
        table = Table((), 0, 0, 0, 0, 0, [])
        tables.append(table)
        path, statements = table.path, table.statements
        position = 0
        usual_at = _USUAL.match
        while True:
            usual = usual_at(text, position)
            if usual is None:
                start = self.after(_GAP, position)
                if start == size:
                    return
                if text[start] != "[":
                    position = self.read_statement(start, table)
                    continue
                table = self.read_header(start, position)
            elif usual.lastindex == 5:
                start, end = usual.start(4) - 1, usual.end(5) + (2 if usual[4] else 1)
                names = usual[5].split(".")
                header = self.table_path(names, is_array=bool(usual[4]))
                table = Table(header, len(tables), start, end, usual.end(), position, [])
            else:
                start, key_end = usual.span(1)
                value = usual.lastindex or 0
                inner = (*path, usual[1])
                value_start, value_end = usual.span(value)
                entries[inner] = (start, key_end, value_start, value_end)
                if value == 3:
                    unread[inner] = value_start
                position = usual.end()
                statements.append((start, position, inner))
                continue
            tables.append(table)
            path, statements, position = table.path, table.statements, table.line_end

    def table_path(self, names: list[str], *, is_array: bool) -> Path:
        """Return the path that a header means: of an array on the way, the last table so far."""
        path: Path = ()
        lengths = self.lengths
        for name in names:
            if path in lengths:
                path = (*path, lengths[path] - 1)
            path = (*path, name)
        if is_array:
            count = lengths.get(path, 0)
            lengths[path] = count + 1
            path = (*path, count)
        return path

    def read_header(self, start: int, floor: int) -> Table:
        is_array = self.text.startswith("[[", start)
        brackets = 2 if is_array else 1
        names, _, position = self.read_key(start + brackets)
        self.expect("]" * brackets, position)
        end = position + brackets
        path = self.table_path(names, is_array=is_array)
        return Table(path, len(self.found.tables), start, end, self.end_of_line(end), floor, [])

    def read_statement(self, start: int, table: Table) -> int:
        path, position = self.read_entry(start, table.path, 0)
        end = self.end_of_line(position)
        table.statements.append((start, end, path))
        return end

    def read_entry(self, start: int, parent: Path, depth: int) -> tuple[Path, int]:
        """Read a key, the sign and the value; return the path and the end of the value."""
        names, spans, position = self.read_key(start)
        path = parent
        for name, span in zip(names[:-1], spans, strict=False):
            path = (*path, name)
            self.found.dotted.setdefault(path, []).append(span)
        path = (*path, names[-1])
        if len(names) > 1:
            self.found.starts[path] = start
        self.expect("=", position)
        position = self.after(_SPACE, position + 1)
        end = self.read_value(position, path, depth)
        self.found.entries[path] = (*spans[-1], position, end)
        return path, end

    def read_key(self, position: int) -> tuple[list[str], list[tuple[int, int]], int]:
        """Read a dotted key; return its names, their spans and the place after it and the space behind it."""
        names, spans = [], []
        while True:
            position = self.after(_SPACE, position)
            found = _NAME.match(self.text, position)
            if found is None:
                raise self.error("a key was due", position)
            names.append(found[0] if found[1] else _unquoted(found[0]))
            spans.append(found.span())
            position = self.after(_SPACE, found.end())
            if not self.text.startswith(".", position):
                return names, spans, position
            position += 1

    def read_value(self, start: int, path: Path, depth: int) -> int:
        """Read a value and what is inside it; return its end."""
        if depth > DEEPEST:
            raise self.error(f"values are nested more than {DEEPEST} levels deep", start)
        opening = self.text[start : start + 1]
        if opening == "[":
            return self.read_array(start, path, depth)
        if opening == "{":
            return self.read_inline_table(start, path, depth)
        end = self.after(_SCALAR, start)
        if end == start:
            raise self.error("a value was due", start)
        return end

    def read_array(self, start: int, path: Path, depth: int) -> int:
        text, position, count = self.text, start + 1, 0
        while True:
            position = self.after(_INSIDE_ARRAY, position)
            if text.startswith("]", position):
                return position + 1
            element = (*path, count)
            end = self.read_value(position, element, depth + 1)
            self.found.entries[element] = (-1, -1, position, end)
            count += 1
            position = self.after(_INSIDE_ARRAY, end)
            if text.startswith(",", position):
                position += 1
            else:
                self.expect("]", position)

    def read_inline_table(self, start: int, path: Path, depth: int) -> int:
        text, position = self.text, self.after(_SPACE, start + 1)
        if text.startswith("}", position):
            return position + 1
        while True:
            _, position = self.read_entry(position, path, depth + 1)
            position = self.after(_SPACE, position)
            if not text.startswith(",", position):
                self.expect("}", position)
                return position + 1
            position = self.after(_SPACE, position + 1)

    def after(self, pattern: re.Pattern[str], position: int) -> int:
        """Return the end of what a pattern matches here, or here."""
        found = pattern.match(self.text, position)
        return position if found is None else found.end()

    def end_of_line(self, position: int) -> int:
        found = _REST_OF_LINE.match(self.text, position)
        if found is None:
            raise self.error("the end of the line was due", position)
        return found.end()

    def expect(self, sign: str, position: int) -> None:
        if not self.text.startswith(sign, position):
            raise self.error(f'"{sign}" was due', position)

    def error(self, message: str, position: int) -> SpanError:
        line, column = line_and_column(self.text, position)
        return SpanError(f"line {line}, column {column}: {message}")


def _unquoted(name: str) -> str:
    if "\\" not in name:
        return name[1:-1]
    try:
        return str(tomllib.loads(f"x = {name}")["x"])
    except tomllib.TOMLDecodeError as error:
        raise SpanError(f"the key {name} cannot be read: {error}") from None
