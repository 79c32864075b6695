"""When the terminal goes away or somebody ends the program: what must be kept is kept, and the terminal put back."""

from __future__ import annotations

import contextlib
import os
import select
import signal
import sys
import termios
import threading
import time
from collections.abc import Callable
from types import FrameType
from typing import Any

PATIENCE = 2.0
"""Seconds after which the process ends whether or not the app has closed by itself."""

CUT_OFF = "\x18\x1b\\"
"""Ends whatever sequence was half sent when the link stalled."""

_OFF = ("1000", "1003", "1006", "1015", "1016", "2004", "1004", "2048")

RESTORED = f"\x1b[?1049l{''.join(f'{chr(27)}[?{mode}l' for mode in _OFF)}\x1b[<u\x1b[?7h\x1b[?25h"
"""Back from the alternate screen, without reports of mouse, paste, focus and size, with the cursor."""

ENDING = (signal.SIGTERM, signal.SIGHUP, signal.SIGINT, signal.SIGQUIT)
"""Signals that end the app; ctrl+c and ctrl+\\ are keys in it, so that the last two come from elsewhere."""


class Guard:
    """Acts once on a signal or a lost terminal: `keep` first, then `close` asks the app to end."""

    def __init__(self, keep: Callable[[], object], close: Callable[[int], None]) -> None:
        """Take what must be kept and how the app is asked to end with an exit code."""
        self._keep, self._close = keep, close
        self._begun = threading.Lock()
        self._before: list[Any] | None = None
        self._forcing = False
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
            if _in_background():  # the terminal was put back when the app was stopped, and is the shell's
                os._exit(128 + number)
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
        if self._forcing:
            time.sleep(PATIENCE)  # the process is ended by then
        if self.code == 128 + signal.SIGHUP:
            _turn_to_nowhere()

    def _on_signal(self, number: int, _frame: FrameType | None) -> None:
        self.trigger(number)

    def _poll(self) -> None:
        """Wait for the terminal to hang up; a closed window sends no signal to a process that others lead."""
        watch = select.poll()
        watch.register(0, 0)
        if any(event & (select.POLLHUP | select.POLLERR | select.POLLNVAL) for _, event in watch.poll()):
            self.trigger(signal.SIGHUP)

    def _force(self) -> None:
        """Put the terminal back, keep what came since the signal, and end, whatever link or disk hangs."""
        self._forcing = True
        terminal = _take_away()
        threads = [
            threading.Thread(target=restore, args=(self._before, terminal), daemon=True),
            threading.Thread(target=self._keep, daemon=True),
        ]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join(0.4)
        os._exit(self.code or 1)


def keep_before_stops(keep: Callable[[], object]) -> None:
    """Keep what must be kept before a stop that comes from outside, too; to be called when the app has the terminal."""
    stop = signal.getsignal(signal.SIGTSTP)

    def keep_and_stop(number: int, frame: FrameType | None) -> None:
        keep()
        if callable(stop):
            stop(number, frame)

    if callable(stop):
        signal.signal(signal.SIGTSTP, keep_and_stop)


def _in_background() -> bool:
    """Whether the shell, or another of its jobs, has the terminal."""
    try:
        return os.tcgetpgrp(0) != os.getpgrp()
    except OSError:
        return False


def _take_away() -> int:
    """Take the terminal away from the app: what it sends from now on, and what it is at sending, goes nowhere.

    Returns a handle of the terminal. Who waits for a stalled link is woken by a signal, and goes on at nowhere.
    """
    terminal = os.dup(2)
    _turn_to_nowhere()
    for thread in threading.enumerate():
        if thread.ident is not None and thread is not threading.current_thread():
            with contextlib.suppress(OSError):
                signal.pthread_kill(thread.ident, signal.SIGTERM)
    return terminal


def _turn_to_nowhere() -> None:
    nowhere = os.open(os.devnull, os.O_WRONLY)
    for stream in (1, 2):
        os.dup2(nowhere, stream)


def restore(before: list[Any] | None, terminal: int = 2) -> None:
    """Put the terminal back to what it was. What a stalled link has not taken yet is dropped, to make room for that."""
    with contextlib.suppress(ValueError):  # from a thread no signal can be ignored; there it is not needed
        signal.signal(signal.SIGTTOU, signal.SIG_IGN)
    with contextlib.suppress(termios.error, OSError):
        if before is not None:
            termios.tcsetattr(0, termios.TCSANOW, before)
        termios.tcflush(0, termios.TCOFLUSH)
    with contextlib.suppress(OSError):
        if sys.__stderr__ is not None:
            os.write(terminal, f"{CUT_OFF}{RESTORED}".encode())
