"""Keeping unsaved work while a run is open: a second after a change, five at the latest, and at once where it must be.

A thread of its own writes, so that no slow disk holds up the keyboard. What is noted is an immutable value put in one
place, so that a signal handler, which may interrupt anything, can write it too.
"""

from __future__ import annotations

import contextlib
import dataclasses
import os
import threading
import time
from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from budget.storage.processes import left_by
from budget.storage.records import Record, new_record, remove_record, tidy, write_record

PAUSE = 1.0
"""Seconds without a change after which what is unsaved is kept."""

LATEST = 4.0
"""Seconds after which it is kept while changes go on; with the time that writing takes, five."""

RETRY = 3.0
"""Seconds after which what could not be kept is tried again."""

_PATIENCE = 1.0
"""Seconds that a signal waits for the thread to finish what it writes."""


@dataclass(frozen=True, slots=True)
class Work:
    """What an open run is at some moment: its file, the bytes known to be there, what is unsaved, the row in hand."""

    path: Path
    base: str | None = None
    text: str | None = None
    """None where nothing is unsaved."""
    cursor: tuple[str | int, ...] = ()


class Keeper:
    """Holds the recovery record of an open run."""

    def __init__(
        self, work: Work, *, folder: Path | None = None, write: Callable[[Record, Path | None], Path] = write_record
    ) -> None:
        """Begin with a run as it was opened; nothing is written before `start`."""
        self._folder, self._write = folder, write
        self._record = new_record(work.path, work.base)
        self._work = dataclasses.replace(work, path=self._record.path)
        self._kept: Work | None = None
        self._noted = self._first = time.monotonic()
        self._wake = threading.Event()
        # Reentrant: a signal may come while the same thread writes.
        self._writing = threading.RLock()
        self._ended = False
        self.problem = ""
        """Why what is unsaved could not be kept; "" where it could."""

    @property
    def id(self) -> str:
        """What the record is called by."""
        return self._record.id

    @property
    def kept(self) -> bool:
        """Whether the record on disk holds what was noted last."""
        return self._kept is self._work

    def start(self) -> None:
        """Keep records in a thread from now on, beginning with a sign that the run is open."""
        threading.Thread(target=self._keep_on, name="keeper", daemon=True).start()

    def note(self, work: Work) -> None:
        """Take down what the run is now; it is kept soon."""
        if self._take(work):
            self._wake.set()

    def keep_now(self, work: Work | None = None) -> bool:
        """Write what the run is now at once, else what was noted last, unless it is kept; return whether it is.

        For signal handlers as well: no lock is taken that the handler may have interrupted.
        """
        if work is not None:
            self._take(work)
        got = self._writing.acquire(timeout=_PATIENCE)
        try:
            return self._keep()
        finally:
            if got:
                self._writing.release()

    def end(self, *, discard: bool = False, left: bool = False) -> None:
        """Stop keeping; the record goes where nothing is unsaved, or where that is not wanted.

        With `left` the process lives on without the run: a record that stays says that it is open nowhere.
        """
        self._ended = True
        self._wake.set()
        if self._work.text is not None and not discard:
            if left:
                with self._writing:
                    self._record = dataclasses.replace(self._record, process=left_by(self._record.process))
                    self._kept = None
            self.keep_now()
            return
        with self._writing:
            self._kept = self._work  # a signal that comes yet must not write it anew
            with contextlib.suppress(OSError):
                remove_record(self._record)

    def _take(self, work: Work) -> bool:
        """Put down what the run is now; return whether it is anything new."""
        if work.path != self._work.path:
            work = dataclasses.replace(work, path=Path(os.path.realpath(work.path)))
        if work == self._work:
            return False
        now = time.monotonic()
        if self.kept:
            self._first = now
        self._noted = now
        self._work = work
        return True

    def _keep(self) -> bool:
        while not self.kept:
            work = self._work
            record = dataclasses.replace(
                self._record,
                path=work.path,
                base=work.base,
                text=work.text,
                cursor=work.cursor,
                time=datetime.now(UTC),
            )
            try:
                file = self._write(record, self._folder)
            except OSError as wrong:
                self.problem = wrong.strerror or str(wrong)
                return False
            self._record = dataclasses.replace(record, file=file)
            self._kept, self.problem = work, ""
        return True

    def _keep_on(self) -> None:
        tidy(self._folder)
        with self._writing:
            self._keep()
        while not self._ended:
            self._wake.wait(RETRY if self.problem else None)
            self._wake.clear()
            while not self._ended and (left := self._left()) > 0.0:
                time.sleep(min(left, 0.2))
            with self._writing:
                if not self._ended:
                    self._keep()

    def _left(self) -> float:
        """Return for how many seconds more a pause in the changes is waited for."""
        return min(self._noted + PAUSE, self._first + LATEST) - time.monotonic()
