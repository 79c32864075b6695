"""How values, keys and paths are spelled in TOML, on one line, and how a path typed by hand is read."""

import datetime as dt
import math
import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from budget.description.finding import Path
from budget.description.limits import DEEPEST, beyond_as_text
from budget.description.spans import SpanError, SpanIndex

Toml = Any
"""What tomllib gives: a string, a number, a truth value, a date or time, a list or a dictionary of such."""


class EditError(ValueError):
    """An edit that cannot be made, with the reason; the text stays as it was."""


@dataclass(frozen=True, slots=True)
class Literal:
    """A value as somebody typed it, in TOML's own spelling: `0.12`, `"12.4 m"`, `[1, 2]`."""

    text: str

    def value(self) -> Toml:
        """Read the value. Raises EditError where the text is not exactly one value."""
        line = f"x = {self.text.strip()}"
        beyond = beyond_as_text(line)
        if beyond is not None:
            raise EditError(f"{_shortened(self.text)} is not a TOML value that is read: {beyond.message}")
        try:
            data = tomllib.loads(line)
            span = SpanIndex.of(line).value(("x",))
        except (tomllib.TOMLDecodeError, SpanError, RecursionError) as error:
            raise EditError(f"{_shortened(self.text)} is not a TOML value: {error}") from None
        if list(data) != ["x"] or span is None or span.end != len(line):
            raise EditError(f"{_shortened(self.text)} is more than one TOML value")
        return data["x"]


def render_value(value: Toml) -> str:
    """Spell a value on one line; a Literal is kept as typed. Raises EditError for what TOML cannot hold."""
    return _render(value, 0)


def render_key(name: str) -> str:
    """Spell a key, in quotes only where it needs them."""
    return name if _BARE.fullmatch(name) else _render_string(name)


def render_dotted(path: Path) -> str:
    """Spell the names of a path as a dotted key, as in a header; list positions have no name."""
    return ".".join(render_key(part) for part in path if isinstance(part, str))


def plain(value: Toml) -> Toml:
    """Give a value as tomllib would read it back: literals read, tuples as lists."""
    if isinstance(value, Literal):
        return value.value()
    if isinstance(value, Mapping):
        return {key: plain(inner) for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [plain(inner) for inner in value]
    return value


def show(path: Path) -> str:
    """Name a path in a message."""
    return ".".join(str(part) if isinstance(part, int) else render_key(part) for part in path) or "the file"


def read_path(text: str, data: Mapping[str, Any] | None = None) -> Path:
    """Read a key typed by hand: `section.M1.length`, `terminal."FCU 1".item[0].kv`, `section.M1.item.0.kv`.

    A position in a list is `[0]` or a bare number. With ``data`` a bare number is a position where there is a
    list and a name where there is a table; without it, it is a name in the first two places and after a key
    whose table has IDs for keys. Raises EditError with the place of what is wrong.
    """
    path: list[str | int] = []
    node: Toml = data
    position, size = 0, len(text)
    while True:
        found = _PART.match(text, position)
        if found is None or (found["index"] and not path):
            raise EditError(f"{_shortened(text)}: at character {position + 1} a key was due")
        part = _part(found, path, node if data is not None else None, known=data is not None)
        path.append(part)
        node = _inner(node, part)
        position = found.end()
        if position == size:
            return tuple(path)
        if text[position] == ".":
            position += 1
        elif text[position] != "[":
            raise EditError(f'{_shortened(text)}: at character {position + 1} a "." was due')


_BARE = re.compile(r"[A-Za-z0-9_-]+")
_PART = re.compile(
    r"\[(?P<index>[0-9]{1,9})\]"
    r"|(?P<bare>[A-Za-z0-9_-]+)"
    r'|(?P<basic>"[^"\\\n]*(?:\\.[^"\\\n]*)*")'
    r"|'(?P<literal>[^'\n]*)'"
)
_NAMED_BY_ID = frozenset({"share", "stroke", "source", "fittings", "sizes", "accept", "branch"})
_ESCAPES = {"\b": "\\b", "\t": "\\t", "\n": "\\n", "\f": "\\f", "\r": "\\r", '"': '\\"', "\\": "\\\\"}


def _part(found: re.Match[str], path: list[str | int], node: Toml, *, known: bool) -> str | int:
    if found["index"]:
        return int(found["index"])
    if found["basic"]:
        name = Literal(found["basic"]).value()
        return str(name)
    if found["literal"] is not None:
        return found["literal"]
    bare = found["bare"]
    if bare.isdigit() and len(bare) < 10 and (bare == "0" or bare[0] != "0"):  # "007" is a name, never a position
        in_list = isinstance(node, list)
        if not known or node is None:
            in_list = len(path) >= 2 and path[-1] not in _NAMED_BY_ID
        if in_list:
            return int(bare)
    return bare


def _inner(node: Toml, part: str | int) -> Toml:
    if isinstance(node, Mapping):
        return node.get(part)
    if isinstance(node, list) and isinstance(part, int) and part < len(node):
        return node[part]
    return None


def _render(value: Toml, depth: int) -> str:
    if depth > DEEPEST:
        raise EditError(f"the value is nested more than {DEEPEST} levels deep")
    if isinstance(value, Literal):
        value.value()
        return value.text.strip()
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return _render_string(value)
    if isinstance(value, int):
        return str(value)
    if isinstance(value, float):
        if math.isnan(value):
            raise EditError("nan is not a value of a description")
        return repr(float(value))
    if isinstance(value, dt.datetime | dt.date | dt.time):
        return value.isoformat()
    if isinstance(value, list | tuple):
        return "[" + ", ".join(_render(inner, depth + 1) for inner in value) + "]"
    if isinstance(value, Mapping):
        if not value:
            return "{}"
        items = (f"{render_key(_name(key))} = {_render(inner, depth + 1)}" for key, inner in value.items())
        return "{ " + ", ".join(items) + " }"
    raise EditError(f"a value of type {type(value).__name__} cannot be written to the file")


def _name(key: Toml) -> str:
    if not isinstance(key, str):
        raise EditError(f"{key!r} is no key: a key is a text")
    return key


def _render_string(text: str) -> str:
    return '"' + "".join(c if c.isprintable() and c not in '"\\' else _escaped(c) for c in text) + '"'


def _escaped(character: str) -> str:
    code = ord(character)
    if 0xD800 <= code <= 0xDFFF:
        raise EditError("half a surrogate pair is no character")
    return _ESCAPES.get(character) or (f"\\u{code:04X}" if code < 0x10000 else f"\\U{code:08X}")


def _shortened(text: str) -> str:
    shown = text if len(text) <= 64 else text[:61] + "..."
    return '"' + "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in shown) + '"'
