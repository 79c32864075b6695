"""Runs that were open of late: a small file in the user's state folder with their paths and when they were opened."""

from __future__ import annotations

import contextlib
import json
import os
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from budget.storage import writing
from budget.storage.folders import read_kept, state_folder

NAME = "recent.json"
FORMAT = 1
MOST = 50
"""Runs that are remembered."""

LARGEST = 2 * 1024 * 1024
"""Bytes that are read; the longest paths there can be, spelled in the longest way, need less."""


@dataclass(frozen=True, slots=True)
class Recent:
    """A run that was open: its file, links followed, and when it was opened last."""

    path: Path
    opened: datetime


def recent_runs(folder: Path | None = None) -> tuple[Recent, ...]:
    """Return the runs that were open of late, the latest first, whether or not they still exist. Nothing is raised."""
    try:
        head = json.loads(read_kept((folder or state_folder()) / NAME, LARGEST))
        listed = head["runs"] if head["budget"] == "recent runs" and head["format"] == FORMAT else []
        return _latest(_entries(listed))
    except (OSError, ValueError, TypeError, KeyError, RecursionError):  # damaged, or another's: as if it were not there
        return ()


def note_recent(path: Path, folder: Path | None = None) -> None:
    """Take down that a run was opened now. Nothing is raised: where it can't be written, it is not remembered.

    What others wrote in the meantime is read first; of two at the very same moment one entry may be lost.
    """
    with contextlib.suppress(OSError, ValueError):
        place = folder or state_folder()
        now = Recent(Path(os.path.realpath(path)), datetime.now(UTC))
        runs = [
            {"path": str(one.path), "opened": one.opened.isoformat(timespec="milliseconds")}
            for one in _latest((now, *recent_runs(place)))
        ]
        content = json.dumps({"budget": "recent runs", "format": FORMAT, "runs": runs}, indent=1).encode("ascii")
        writing.sweep(place, NAME)
        writing.replace(place / NAME, content, mode=0o600)


def _latest(runs: Iterable[Recent]) -> tuple[Recent, ...]:
    """Return each run once, the latest first, and no more than are remembered."""
    found: dict[Path, Recent] = {}
    for one in sorted(runs, key=lambda run: run.opened, reverse=True):
        found.setdefault(one.path, one)
    return tuple(found.values())[:MOST]


def _entries(listed: Any) -> Iterator[Recent]:
    """Read what can be read of the entries; a wrong one takes no other with it."""
    now = datetime.now(UTC)
    for one in listed if isinstance(listed, list) else ():
        with contextlib.suppress(ValueError, TypeError, KeyError):
            path, opened = one["path"], datetime.fromisoformat(one["opened"])
            opened = (opened if opened.tzinfo is not None else opened.replace(tzinfo=UTC)).astimezone(UTC)
            os.fsencode(path)  # a name that no file can have
            if isinstance(path, str) and "\0" not in path and Path(path).is_absolute():
                yield Recent(Path(path), min(opened, now))  # no clock that was wrong keeps a run in front for ever
