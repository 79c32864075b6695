"""What is wrong or doubtful about a run, and where it stands in the file."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

Path = tuple[str | int, ...]
"""The keys that lead to a value, list indices as integers: ("section", "M1", "item", 0, "kv")."""

ID_TABLES = frozenset({"source", "section", "terminal", "pipe", "duct", "fitting", "device", "link", "case", "reading"})
"""Tables whose entries have an ID of their own: a finding names `section.M1`, not `section`."""


class Level(StrEnum):
    """How much a finding matters: an error stops a figure, a warning doubts it, a note explains it."""

    ERROR = "error"
    WARNING = "warning"
    NOTE = "note"


Figure = tuple[float, str]
"""A value in SI and what it measures: (1.83, "velocity")."""


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing that is wrong or doubtful: a stable code, a sentence, and the keys that lead to its place.

    A sentence with figures holds {0}, {1}, ... in their places; figures are in SI and are written in the design's units
    by whoever shows the sentence.
    """

    level: Level
    code: str
    message: str
    path: Path = ()
    figures: tuple[Figure, ...] = ()
    within: Path = ()
    """The keys within the library that the path names, of what stands there."""

    @property
    def owner(self) -> str:
        """The ID of the source, section, terminal or catalogue entry that it concerns, or ""."""
        return str(self.path[1]) if len(self.path) > 1 and self.path[0] in ID_TABLES else ""

    @property
    def table(self) -> str:
        """The table it stands in, as a dotted key: `section.M1`, `limits`, or "" for the file itself."""
        size = 2 if self.path and self.path[0] in ID_TABLES else 1
        return dotted(self.path[:size])

    @property
    def key(self) -> str:
        """The key within its table, dotted: `length`, `item.0.kv`, or ""."""
        size = 2 if self.path and self.path[0] in ID_TABLES else 1
        return dotted(self.path[size:])


def error(code: str, message: str, path: Path = (), *figures: Figure) -> Finding:
    """Return an error: a figure can't be computed, or would be wrong, until it is mended."""
    return Finding(Level.ERROR, code, message, path, figures)


def warning(code: str, message: str, path: Path = (), *figures: Figure) -> Finding:
    """Return a warning: the figure stands, but a designer must look."""
    return Finding(Level.WARNING, code, message, path, figures)


def note(code: str, message: str, path: Path = (), *figures: Figure) -> Finding:
    """Return a note: worth knowing, nothing to do."""
    return Finding(Level.NOTE, code, message, path, figures)


def dotted(path: Path) -> str:
    """Spell a path as a dotted key, quoting what TOML would quote: `section."FCU 1".length`."""
    return ".".join(_spelled(part) for part in path)


def _spelled(part: str | int) -> str:
    text = str(part)
    plain = text.isascii() and text.replace("-", "").replace("_", "").isalnum()
    if plain:
        return text
    escaped = text.replace("\\", "\\\\").replace('"', '\\"')
    return '"' + "".join(c if c.isprintable() else f"\\u{ord(c):04X}" for c in escaped) + '"'
