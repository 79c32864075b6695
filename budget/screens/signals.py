"""When the terminal goes away or somebody ends the program: what must be kept is kept, and the terminal put back."""

from __future__ import annotations

import contextlib
import os
import select
import signal
import sys
import threading
from collections.abc import Callable
from types import FrameType

PATIENCE = 2.0
"""Seconds after which the process ends whether or not the app has closed by itself."""

RESTORED = "\x1b[?1049l\x1b[?1000l\x1b[?1003l\x1b[?2004l\x1b[?1004l\x1b[<u\x1b[?7h\x1b[?25h"
"""Back from the alternate screen, without mouse, paste and focus reports, with the cursor."""


class Guard:
    """Acts once on SIGTERM, SIGHUP or a lost terminal: `keep` first, then `close` asks the app to end."""

    def __init__(self, keep: Callable[[], None], close: Callable[[int], None]) -> None:
        """Take what must be kept and how the app is asked to end with an exit code."""
        self._keep, self._close = keep, close
        self._begun = threading.Event()
        self.code: int | None = None

    def watch(self) -> None:
        """Watch from now on."""
        for number in (signal.SIGTERM, signal.SIGHUP):
            signal.signal(number, self._on_signal)
        threading.Thread(target=self._poll, name="terminal-watch", daemon=True).start()

    def trigger(self, number: int) -> None:
        """Keep what must be kept and end, with 128 + the number of the signal as exit code."""
        if self._begun.is_set():
            return
        self._begun.set()
        self.code = 128 + number
        timer = threading.Timer(PATIENCE, self._force)
        timer.daemon = True
        timer.start()
        try:
            self._keep()
        finally:
            self._close(self.code)

    def let_go(self) -> None:
        """Turn the outputs to nowhere after a hang-up: flushing them at the end would fail and change the exit code."""
        if self.code == 128 + signal.SIGHUP:
            nowhere = os.open(os.devnull, os.O_WRONLY)
            for stream in (1, 2):
                os.dup2(nowhere, stream)

    def _on_signal(self, number: int, _frame: FrameType | None) -> None:
        self.trigger(number)

    def _poll(self) -> None:
        """Wait for the terminal to hang up; a closed window sends no signal to a process that others lead."""
        watch = select.poll()
        watch.register(0, 0)
        if any(event & (select.POLLHUP | select.POLLERR | select.POLLNVAL) for _, event in watch.poll()):
            self.trigger(signal.SIGHUP)

    def _force(self) -> None:
        if sys.__stderr__ is not None:
            threading.Thread(target=_restore, daemon=True).start()
            threading.Event().wait(0.1)
        os._exit(self.code or 1)


def _restore() -> None:
    """Put the terminal back, in a thread of its own: a stalled link would block here."""
    with contextlib.suppress(OSError):
        os.write(2, RESTORED.encode())
