"""Which runs there are to be opened beside the one that is open: those of late, and those in the same folder."""

from __future__ import annotations

import os
import stat
import time
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from budget.description import read_bytes
from budget.description.libraries import TABLES
from budget.storage.files import StorageError, load
from budget.storage.recents import Recent

MOST = 200
"""Files of the folder that are listed: those that were changed last."""

LARGEST_READ = 128 * 1024
"""Bytes of a file that is read for its title; what that takes of the time of the machine must not be felt."""

PATIENCE = 2.0
"""Seconds after which no further file is read for its title."""

_MOST_LOOKED_AT = 20_000
"""Names of the folder that are looked at."""


@dataclass(frozen=True, slots=True)
class Found:
    """A run that could be opened: its file, its title where that was read, when it was open last, or else changed."""

    path: Path
    title: str
    time: datetime
    recent: bool


def is_same(one: Path, other: Path) -> bool:
    """Whether two paths lead to one file; where one of them leads to none, whether they would."""
    try:
        return one.samefile(other)
    except (OSError, ValueError):
        return os.path.realpath(one) == os.path.realpath(other)


def runs_at_hand(present: Path, recents: Iterable[Recent], libraries: Iterable[str] = ()) -> tuple[Found, ...]:
    """Return the runs that can be opened: the recent ones that still exist, the latest first, then those beside it.

    `libraries` are paths as the present run writes them. Neither the present run, nor a library, nor a file of readings
    is listed, and no file twice. Nothing is raised.
    """
    folder = Path(os.path.realpath(present)).parent
    taken = {key for path in (present, *(folder / name for name in libraries)) if (key := _key(path)) is not None}
    until = time.monotonic() + PATIENCE
    found: list[Found] = []
    candidates = [
        *((one.path, one.opened) for one in recents),
        *((path, None) for path in _beside(present.absolute().parent)),
    ]
    for path, opened in candidates:
        status = _regular(path)
        if status is None or (status.st_dev, status.st_ino) in taken:
            continue
        taken.add((status.st_dev, status.st_ino))
        title = _title(path) if status.st_size <= LARGEST_READ and time.monotonic() < until else ""
        if title is not None or opened is not None:
            changed = datetime.fromtimestamp(max(0.0, min(status.st_mtime, time.time())), UTC)
            found.append(Found(path, title or "", opened or changed, opened is not None))
    return tuple(found)


def latest_of(recents: Iterable[Recent]) -> Recent | None:
    """Return the latest of recent runs that is still there."""
    return next((one for one in recents if _regular(one.path) is not None), None)


def _beside(folder: Path) -> list[Path]:
    """Return what may be a run in a folder, by name."""
    changed: list[tuple[float, str]] = []
    try:
        with os.scandir(folder) as entries:
            for _, entry in zip(range(_MOST_LOOKED_AT), entries, strict=False):
                if entry.name.endswith(".toml") and not entry.name.endswith(".readings.toml") and entry.name[0] != ".":
                    changed.extend(_changed(entry))
    except OSError:
        pass  # a folder that is closed to us: what is known of it by now
    latest = sorted(changed, reverse=True)[:MOST]
    return [folder / name for name in sorted((name for _, name in latest), key=str.casefold)]


def _changed(entry: os.DirEntry[str]) -> Iterator[tuple[float, str]]:
    try:
        status = entry.stat()
    except OSError:
        return
    if stat.S_ISREG(status.st_mode):
        yield status.st_mtime, entry.name


def _title(path: Path) -> str | None:
    """Return the title of a run, "" where it states none or can't be read; None for what is no run."""
    try:
        content, _ = load(path)
    except StorageError:
        return ""
    data = read_bytes(content).data
    if data is None:
        return ""
    if "format" not in data or (data.keys() & set(TABLES) and data.keys() <= {"format", "design", *TABLES}):
        return None
    design = data.get("design")
    title = design.get("title") if isinstance(design, dict) else None
    return title if isinstance(title, str) else ""


def _regular(path: Path) -> os.stat_result | None:
    try:
        status = path.stat()
    except (OSError, ValueError):
        return None
    return status if stat.S_ISREG(status.st_mode) else None


def _key(path: Path) -> tuple[int, int] | None:
    status = _regular(path)
    return (status.st_dev, status.st_ino) if status is not None else None
