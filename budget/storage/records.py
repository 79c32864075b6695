"""Recovery records: what is unsaved of an open run, kept in the user's state folder until it is saved or discarded.

A record is one line of JSON and behind it the text. One without a text says no more than that a run is open. A record
is written whole or not at all, for the user's eyes alone.
"""

from __future__ import annotations

import contextlib
import dataclasses
import hashlib
import itertools
import json
import os
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any

from budget.description.source import LARGEST_FILE
from budget.storage import writing
from budget.storage.files import StorageError, digest_of
from budget.storage.folders import read_kept, state_folder
from budget.storage.processes import Process, is_alive, this_process, user_name

FORMAT = 1
SUFFIX = ".record"
KEPT = timedelta(days=90)
"""For how long unsaved work of a process that is gone is kept at least."""

LARGEST = 4 * LARGEST_FILE
"""Bytes of a record; a text may be larger than a file that can be read, and is kept all the same."""

_FIRST_YEAR, _LAST_YEAR = 1970, 9000
_LONGEST_HEADER = 64 * 1024
_numbers = itertools.count()


@dataclass(frozen=True, slots=True)
class Record:
    """What is kept of a run that is, or was, open in some process."""

    id: str
    """What it is called by."""
    path: Path
    """The run's file, its links followed."""
    base: str | None
    """The SHA-256 of the file as it was read or saved last; None where it had none."""
    process: Process
    user: str
    opened: datetime
    """Since when the run was open."""
    time: datetime
    """When the text was kept."""
    text: str | None = None
    """The unsaved text; None where nothing was unsaved."""
    cursor: tuple[str | int, ...] = ()
    """The row on which the cursor stood."""
    fault: str = ""
    """What is wrong with the record itself; its text is what is left of it then."""
    file: Path | None = None
    """Where it was read from."""

    @property
    def alive(self) -> bool | None:
        """Whether the process that wrote it is still there; None where that can't be told."""
        return is_alive(self.process)


def new_record(path: Path, base: str | None) -> Record:
    """Return the record of a run that this process has just opened, with nothing unsaved."""
    process, now = this_process(), datetime.now(UTC)
    key = "\0".join(map(str, (*dataclasses.astuple(process), path, now.isoformat(), next(_numbers))))
    id_ = hashlib.sha256(key.encode("utf-8", "surrogateescape")).hexdigest()[:8]
    return Record(id_, Path(os.path.realpath(path)), base, process, user_name(), now, now)


def write_record(record: Record, folder: Path | None = None) -> Path:
    """Write a record in place of the one of the same ID; return where it is. Raises OSError."""
    target = (folder or records_folder()) / f"{record.id}{SUFFIX}"
    body = b"" if record.text is None else record.text.encode("utf-8", "surrogatepass")
    head = {
        "budget": "recovery record",
        "format": FORMAT,
        "path": str(record.path),
        "base": record.base,
        **dataclasses.asdict(record.process),
        "user": record.user,
        "opened": record.opened.isoformat(timespec="milliseconds"),
        "time": record.time.isoformat(timespec="milliseconds"),
        "cursor": list(record.cursor),
        "length": None if record.text is None else len(body),
        "sha256": digest_of(body),
    }
    writing.replace(target, json.dumps(head).encode("ascii") + b"\n" + body, mode=0o600)
    return target


def find_records(path: Path | None = None, folder: Path | None = None) -> tuple[Record, ...]:
    """Return the records there are, those of one file or all, the latest first. Nothing is raised."""
    real = None if path is None else Path(os.path.realpath(path))
    found = [record for record in _records(folder) if real is None or record.path == real]
    return tuple(sorted(found, key=lambda record: record.time, reverse=True))


def read_record(file: Path) -> Record:
    """Read a record; one that is damaged says so, with what is left of its text.

    Raises StorageError for a file that is no record.
    """
    try:
        content = read_kept(file, _LONGEST_HEADER + LARGEST)
    except OSError as wrong:
        raise StorageError(f"{file} could not be read: {wrong.strerror or wrong}") from wrong
    line, _, body = content[: _LONGEST_HEADER + LARGEST].partition(b"\n")
    try:
        head = json.loads(line)
        record = _record(head, file)
    except (ValueError, TypeError, KeyError, AttributeError, RecursionError) as wrong:
        raise StorageError(f"{file} is no recovery record; look at it with a text editor") from wrong
    if head["length"] is None:
        return record
    text = body.decode("utf-8", "surrogatepass" if len(body) == head["length"] else "replace")
    whole = len(body) == head["length"] and digest_of(body) == head["sha256"]
    return dataclasses.replace(
        record, text=text, fault="" if whole else "the record is damaged; its text may be cut off"
    )


def remove_record(record: Record) -> None:
    """Remove a record: what it holds was saved, or is not wanted. Raises OSError where it can't be removed."""
    if record.file is not None:
        record.file.unlink(missing_ok=True)


def tidy(folder: Path | None = None) -> None:
    """Remove what nobody needs: signs of processes that are gone, and unsaved work that has lain for 90 days.

    Nothing is raised.
    """
    now = datetime.now(UTC)
    for record in _records(folder):
        stale = record.text is None or now - record.time > KEPT
        if stale and not record.fault and record.alive is False:
            with contextlib.suppress(OSError):
                remove_record(record)
    with contextlib.suppress(OSError):
        writing.sweep(folder or records_folder())


def records_folder() -> Path:
    """Return the folder that records are kept in. Raises OSError where it can't be had."""
    return state_folder("unsaved")


def _records(folder: Path | None) -> Iterator[Record]:
    try:
        files = sorted((folder or records_folder()).glob(f"*{SUFFIX}"))
    except OSError:
        return
    for file in files:
        with contextlib.suppress(StorageError):
            yield read_record(file)


def _record(head: Mapping[str, Any], file: Path) -> Record:
    if head["budget"] != "recovery record" or head["format"] != FORMAT:
        raise ValueError("another kind of file")
    if not (isinstance(head["sha256"], str) and isinstance(head["length"], int | None)):
        raise TypeError("wrong kinds")
    host, boot, space, started = (str(head[name]) for name in ("host", "boot", "space", "started"))
    process = Process(host, boot, space, int(head["pid"]), started)
    return Record(
        id=file.name.removesuffix(SUFFIX),
        path=Path(str(head["path"])),
        base=None if head["base"] is None else str(head["base"]),
        process=process,
        user=str(head["user"]),
        opened=_time(head["opened"]),
        time=_time(head["time"]),
        cursor=tuple(part for part in head["cursor"] if isinstance(part, str | int)),
        file=file,
    )


def _time(text: str) -> datetime:
    time = datetime.fromisoformat(text)
    if not _FIRST_YEAR <= time.year < _LAST_YEAR:
        return datetime.now(UTC)  # no clock said that; the text counts, and is not to be tidied away for its age
    return time if time.tzinfo is not None else time.replace(tzinfo=UTC)
