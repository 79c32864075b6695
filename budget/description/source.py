"""The bytes of a file as text, as TOML and as an index of where everything stands."""

from __future__ import annotations

import re
import tomllib
from dataclasses import dataclass
from functools import cached_property
from typing import Any

from budget.description.finding import Finding, Path, error
from budget.description.limits import LARGEST_FILE, LONGEST_KEY, Beyond, beyond_as_data, beyond_as_text, too_deep
from budget.description.spans import SpanIndex

__all__ = ["LARGEST_FILE", "Source", "read_bytes", "read_text"]

_PLACE = re.compile(r"\(at line (\d+), column (\d+)\)|\(at end of document\)")


@dataclass(frozen=True)
class Source:
    """A file's text, what TOML makes of it (None where it is not TOML), and why not."""

    text: str
    data: dict[str, Any] | None
    findings: tuple[Finding, ...] = ()
    place: tuple[int, int] = (1, 1)
    """Line and column of the finding, where the text is not TOML."""

    @cached_property
    def spans(self) -> SpanIndex:
        """Where every header, key and value stands."""
        return SpanIndex.of(self.text)

    def locate(self, path: Path, *, key: bool = False) -> tuple[int, int]:
        """Return line and column, from 1, of a value (or of its key), or of what is nearest to it."""
        if self.data is None:
            return self.place
        if key and (span := self.spans.key(path)) is not None:
            return self.spans.line_and_column(span.start)
        return self.spans.locate(path)


def read_bytes(content: bytes) -> Source:
    """Read the bytes of a file; a text that is not TOML has no data and one finding."""
    if len(content) > LARGEST_FILE:
        size = f"{len(content) / 1e6:.1f} MB"
        limit = f"{LARGEST_FILE / 1e6:.1f} MB"
        return _refused("too-large", f"the file has {size}, at most {limit} are read; split the run", "")
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as wrong:
        good = content[: wrong.start].decode("utf-8", "replace")
        message = f"byte {content[wrong.start]:#04x} is not UTF-8; save the file as UTF-8"
        return _refused("encoding", message, "", _line_column(good, len(good)))
    if text.startswith("\ufeff"):
        return _refused("encoding", "the file starts with a byte order mark; save it as UTF-8 without one", "")
    return read_text(text)


def read_text(text: str) -> Source:
    """Read a text; one that is not TOML, or is beyond a limit, has no data and one finding."""
    beyond = beyond_as_text(text)
    if beyond is not None:
        return _stopped(text, beyond)
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as wrong:
        return _syntax(text, str(wrong))
    except RecursionError:
        return _stopped(text, too_deep(text))
    beyond = beyond_as_data(text, data)
    return Source(text, data) if beyond is None else _stopped(text, beyond)


def _syntax(text: str, message: str) -> Source:
    found = _PLACE.search(message)
    place = _line_column(text, len(text))
    if found is not None and found.group(1):
        place = (int(found.group(1)), int(found.group(2)))
    what = _PLACE.sub("", message).strip()
    lines = text.split("\n")
    line = lines[place[0] - 1] if place[0] <= len(lines) else ""
    if "twice" in what or "Cannot overwrite" in what or "immutable" in what:
        place = (place[0], len(line) - len(line.lstrip()) + 1)
        return _refused("duplicate-id", f"{line.strip()[:60]!r} stands twice; rename or remove one", text, place)
    hint = "correct the line"
    if re.search(r"=\s*[0-9.]+,[0-9]", line):
        return _refused("decimal-comma", f"{line.strip()[:60]!r} has a decimal comma; write a point", text, place)
    if re.search(r"=\s*[0-9.]+\s*[A-Za-z%]", line):
        hint = 'write a quantity in quotes: "12.4 m"'
    return _refused("syntax", f"the file is not TOML: {what.lower()}; {hint}", text, place)


def _refused(code: str, message: str, text: str, place: tuple[int, int] = (1, 1)) -> Source:
    return Source(text, None, (error(code, message),), place)


def _stopped(text: str, beyond: Beyond) -> Source:
    code, message, place = beyond
    at = _line_column(text, place) if isinstance(place, int) else _place_of(SpanIndex.of(text), place)
    return _refused(code, message, text, at)


def _place_of(spans: SpanIndex, path: Path) -> tuple[int, int]:
    """Return line and column of a value, of a key that is itself too long where that begins."""
    key = spans.key(path) if path and len(str(path[-1])) > LONGEST_KEY else None
    return spans.locate(path) if key is None else spans.line_and_column(key.start)


def _line_column(text: str, offset: int) -> tuple[int, int]:
    before = text[:offset]
    return before.count("\n") + 1, offset - (before.rfind("\n") + 1) + 1
