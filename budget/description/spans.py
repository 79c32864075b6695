"""Where everything stands in a TOML text: the place of every header, key and value.

The text has been read by tomllib before; the index adds nothing but offsets. They count characters of the
text as it is in the file, CRLF included, so a splice at a span changes nothing else and a message can name a
line and a column.
"""

import re
from bisect import bisect_right
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import Self

from budget.description.finding import Path
from budget.description.scan import (
    BLANK_LINES,
    COMMENT_LINES,
    Entry,
    Scan,
    SpanError,
    Table,
    line_start,
    look_into,
    look_into_around,
    read_names,
    scan,
)

__all__ = ["Path", "Span", "SpanError", "SpanIndex", "Table"]


@dataclass(frozen=True, slots=True)
class Span:
    """A part of the text: from `start` up to, not including, `end`."""

    start: int
    end: int


class SpanIndex:
    """The places of all tables, keys and values of one text."""

    def __init__(self, text: str) -> None:
        """Read the text; `of` is the same thing by a name that reads well."""
        self.text = text
        self._scan: Scan = scan(text)

    @classmethod
    def of(cls, text: str) -> Self:
        """Index a text that tomllib has accepted. Raises SpanError where it is nested too deeply."""
        return cls(text)

    def value(self, path: Path) -> Span | None:
        """Return where a value stands; None for a table with a header or one that only dotted keys make."""
        entry = self._entry(path)
        return None if entry is None else Span(entry[2], entry[3])

    def key(self, path: Path) -> Span | None:
        """Return where the key stands, the first time; for a table, the last name in its header."""
        table = self.by_path.get(path)
        if table is not None and table.number:
            return self.names(table)[-1]
        found = self.occurrences(path)
        return found[0] if found else None

    def occurrences(self, path: Path) -> tuple[Span, ...]:
        """Return every place that names a key: its own line, each header and each dotted key through it."""
        entry = self._entry(path)
        found = [(entry[0], entry[1])] if entry is not None and entry[0] >= 0 else []
        found += self._scan.dotted.get(path, ())
        return (*(Span(*place) for place in found), *self._in_headers.get(path, ()))

    def entry(self, path: Path) -> Span | None:
        """Return a key with its value, a dotted key from its first letter; None for what has no value."""
        entry = self._entry(path)
        if entry is None:
            return None
        start = self._scan.starts.get(path, entry[0] if entry[0] >= 0 else entry[2])
        return Span(start, entry[3])

    def header(self, path: Path) -> Span | None:
        """Return the bracketed part of a table's header line."""
        table = self.by_path.get(path)
        return None if table is None or not path else Span(table.start, table.end)

    def names(self, table: Table) -> tuple[Span, ...]:
        """Return the places of the names in a table's header."""
        return tuple(Span(*place) for place in read_names(self.text, table))

    def table(self, path: Path) -> Table | None:
        """Return the table with a header at this path; the keys above the first header for the empty path."""
        return self.by_path.get(path)

    def all_tables(self) -> list[Table]:
        """Return the tables in file order; the first one holds the keys above the first header."""
        return self._scan.tables

    def tables(self) -> list[Path]:
        """Return the tables that have a header, in file order."""
        return [table.path for table in self._scan.tables[1:]]

    def block(self, path: Path) -> Span | None:
        """Return a table with what belongs to it: comment directly above, header, keys, blank lines below.

        A comment after a blank line speaks of what comes next and belongs to no block, unless a key of the
        table follows. Sub-tables are blocks of their own.
        """
        table = self.by_path.get(path)
        if table is None:
            return None
        end = table.body_end
        last = table.number + 1 == len(self._scan.tables)
        ceiling = len(self.text) if last else self.block_start(self._scan.tables[table.number + 1])
        for lines in (COMMENT_LINES, BLANK_LINES):
            found = lines.match(self.text, end, ceiling)
            end = found.end() if found else end
        return Span(self.block_start(table), end)

    def block_start(self, table: Table) -> int:
        """Return where the comment directly above a header begins, or the header's line."""
        text, start = self.text, line_start(self.text, table.start)
        while start > table.floor:
            above = line_start(text, start - 1)
            if above < table.floor or not text[above:start].lstrip(" \t").startswith("#"):
                break
            start = above
        return start

    def locate(self, path: Path) -> tuple[int, int]:
        """Return line and column, from 1, of a value, else its key, else the nearest table around it."""
        for size in range(len(path), 0, -1):
            found = self.value(path[:size]) or self.key(path[:size])
            if found is not None:
                return self.line_and_column(found.start)
        return 1, 1

    def line_and_column(self, offset: int) -> tuple[int, int]:
        """Return line and column, from 1, of a character."""
        line = bisect_right(self._line_starts, offset)
        return line, offset - self._line_starts[line - 1] + 1

    @cached_property
    def _line_starts(self) -> list[int]:
        return [0, *(found.end() for found in re.finditer("\n", self.text))]

    def path_at(self, offset: int) -> Path:
        """Return the path of what stands at a character: a value, a key, else the table around it."""
        starts = [self.block_start(table) for table in self._scan.tables[1:]]
        table = self._scan.tables[bisect_right(starts, offset)]
        for start, end, path in table.statements:
            end -= self.text.endswith("\n", 0, end)  # the newline still belongs to its line
            if line_start(self.text, start) <= offset <= end:
                return self._deepest(path, offset)
        return table.path

    def items(self, path: Path) -> list[Path]:
        """Return what stands directly between the brackets of a value, in order; dotted keys in full."""
        look_into_around(self.text, self._scan, path)
        look_into(self.text, self._scan, path)
        size = len(path)
        inside = [found for found in self._scan.entries if len(found) > size and found[:size] == path]
        items, end = [], -1
        for found in sorted(inside, key=lambda inner: self._scan.entries[inner][2]):
            if self._scan.entries[found][2] >= end:
                items.append(found)
                end = self._scan.entries[found][3]
        return items

    def paths(self) -> Iterator[Path]:
        """Run through every path once: each key of each table and each element of each array."""
        for path in tuple(self._scan.unread):
            look_into(self.text, self._scan, path)
        found = (*self._scan.entries, *self._scan.dotted, *self._in_headers, *self.tables())
        yield from dict.fromkeys(found)

    @cached_property
    def by_path(self) -> dict[Path, Table]:
        """The tables by their path."""
        return {table.path: table for table in self._scan.tables}

    @cached_property
    def _in_headers(self) -> dict[Path, list[Span]]:
        """Every place in a header that names a table, by the table's path; an array by its path alone."""
        found: dict[Path, list[Span]] = {}
        for table in self._scan.tables[1:]:
            names = self.names(table)
            sizes = [size for size, part in enumerate(table.path, 1) if isinstance(part, str)]
            for size, span in zip(sizes, names, strict=True):
                found.setdefault(table.path[:size], []).append(span)
        return found

    def _entry(self, path: Path) -> Entry | None:
        """Return the spans of key and value, looking first into the brackets around them."""
        look_into_around(self.text, self._scan, path)
        return self._scan.entries.get(path)

    def _deepest(self, path: Path, offset: int) -> Path:
        """Descend from a statement into its value, as far as the character is still inside."""
        look_into_around(self.text, self._scan, path)
        look_into(self.text, self._scan, path)
        found, size = path, len(path)
        for inner, (key_start, _, value_start, end) in self._scan.entries.items():
            if offset < end and len(inner) > len(found) and inner[:size] == path:
                start = self._scan.starts.get(inner, key_start if key_start >= 0 else value_start)
                if start <= offset:
                    found = inner
        return found
