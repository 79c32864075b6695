"""Reading a run for a command: from its file, or from standard input where the name is a dash."""

from __future__ import annotations

import sys
from dataclasses import dataclass
from pathlib import Path

from budget.commands.dispatch import OK, REFUSED, WARNINGS
from budget.description import Level, SourceText, read_bytes
from budget.description.source import LARGEST_FILE
from budget.document import Snapshot, take
from budget.report.located import Located
from budget.storage import Stamp, StorageError, load, read_libraries

STDIN = "-"


@dataclass(frozen=True, slots=True)
class Opened:
    """A run that was read: the name it was called by, what follows from it, and its findings."""

    name: str
    findings: tuple[Located, ...]
    snapshot: Snapshot | None = None
    """None where the file can't be read or is not TOML; the findings say why."""
    stamp: Stamp | None = None

    @property
    def status(self) -> int:
        """The exit status that its findings ask for."""
        levels = {finding.level for finding in self.findings}
        if Level.ERROR in levels:
            return REFUSED
        return WARNINGS if Level.WARNING in levels else OK


def open_run(name: str) -> Opened:
    """Read a run and compute it. Nothing is raised: a file that can't be read has a finding that says why."""
    try:
        content, stamp = _content(name)
    except StorageError as refused:
        return Opened(name, (_unreadable(str(refused)),))
    except ValueError:
        return Opened(name, (_unreadable("the name holds a character that no file name can have; correct it"),))
    return opened(name, read_bytes(content), stamp)


def opened(name: str, source: SourceText, stamp: Stamp | None = None) -> Opened:
    """Compute a run from its text, with the libraries that it names beside its file."""
    snapshot = take(source, libraries=read_libraries(source, None if name == STDIN else Path(name)))
    return Opened(name, snapshot.findings, snapshot if snapshot.readable else None, stamp)


def _content(name: str) -> tuple[bytes, Stamp | None]:
    if name != STDIN:
        return load(Path(name))
    if sys.stdin is None:
        raise StorageError("there is no standard input; name a file")
    try:
        return sys.stdin.buffer.read(LARGEST_FILE + 1), None
    except OSError as wrong:
        raise StorageError(f"standard input could not be read: {wrong.strerror}") from wrong


def _unreadable(message: str) -> Located:
    return Located(Level.ERROR, "unreadable", message, (), "", "", "", 1, 1)
