"""When the terminal goes away or somebody ends the program: what must be kept is kept, and the terminal put back."""

from __future__ import annotations

import contextlib
import os
import select
import signal
import sys
import termios
import threading
from collections.abc import Callable
from types import FrameType
from typing import Any

PATIENCE = 2.0
"""Seconds after which the process ends whether or not the app has closed by itself."""

CUT_OFF = "\x18\x1b\\"
"""Ends whatever sequence was half sent when the link stalled."""

RESTORED = "\x1b[?1049l\x1b[?1000l\x1b[?1003l\x1b[?2004l\x1b[?1004l\x1b[<u\x1b[?7h\x1b[?25h"
"""Back from the alternate screen, without mouse, paste and focus reports, with the cursor."""

ENDING = (signal.SIGTERM, signal.SIGHUP, signal.SIGINT, signal.SIGQUIT)
"""Signals that end the app; ctrl+c and ctrl+\\ are keys in it, so that the last two come from elsewhere."""


class Guard:
    """Acts once on a signal or a lost terminal: `keep` first, then `close` asks the app to end."""

    def __init__(self, keep: Callable[[], object], close: Callable[[int], None]) -> None:
        """Take what must be kept and how the app is asked to end with an exit code."""
        self._keep, self._close = keep, close
        self._begun = threading.Lock()
        self._before: list[Any] | None = None
        self.code: int | None = None

    def watch(self) -> None:
        """Watch from now on; the terminal is put back to what it is now."""
        with contextlib.suppress(termios.error, OSError):
            self._before = termios.tcgetattr(0)
        for number in ENDING:
            signal.signal(number, self._on_signal)
        threading.Thread(target=self._poll, name="terminal-watch", daemon=True).start()

    def trigger(self, number: int) -> None:
        """Keep what must be kept and end, with 128 + the number of the signal as exit code."""
        if not self._begun.acquire(blocking=False):  # never released: one end is enough
            return
        self.hurry(128 + number)
        try:
            self._keep()
        finally:
            self._close(128 + number)

    def hurry(self, code: int) -> None:
        """End the process with a code in a while, should the app not have closed by itself."""
        self.code = code
        timer = threading.Timer(PATIENCE, self._force)
        timer.daemon = True
        timer.start()

    def put_back(self) -> None:
        """Put the terminal back where the app could not do so itself."""
        restore(self._before)

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
        """Put the terminal back as far as that goes, in a thread of its own: a stalled link may block, and end."""
        restoring = threading.Thread(target=restore, args=(self._before,), daemon=True)
        restoring.start()
        restoring.join(0.3)
        os._exit(self.code or 1)


def restore(before: list[Any] | None) -> None:
    """Put the terminal back to what it was. What a stalled link has not taken yet is dropped, to make room for that."""
    with contextlib.suppress(ValueError):  # from a thread no signal can be ignored; there it is not needed
        signal.signal(signal.SIGTTOU, signal.SIG_IGN)
    with contextlib.suppress(termios.error, OSError):
        if before is not None:
            termios.tcsetattr(0, termios.TCSANOW, before)
        termios.tcflush(0, termios.TCOFLUSH)
    with contextlib.suppress(OSError):
        if sys.__stderr__ is not None:
            os.write(2, f"{CUT_OFF}{RESTORED}".encode())
