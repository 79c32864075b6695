"""The app in a real pseudo-terminal: what is sent to it, what comes back, and what stands on the screen then."""

from __future__ import annotations

import fcntl
import os
import pty
import select
import signal
import struct
import sys
import termios
import time
from collections.abc import Callable, Mapping
from pathlib import Path
from types import TracebackType
from typing import Self

import pyte

KEYS = {
    "up": "\x1b[A", "down": "\x1b[B", "right": "\x1b[C", "left": "\x1b[D", "enter": "\r", "escape": "\x1b",
    "tab": "\t", "backspace": "\x7f", "delete": "\x1b[3~", "home": "\x1b[H", "end": "\x1b[F", "pageup": "\x1b[5~",
    "pagedown": "\x1b[6~", "space": " ", "shift+tab": "\x1b[Z", "ctrl+s": "\x13", "ctrl+q": "\x11", "ctrl+c": "\x03",
    "ctrl+e": "\x05", "ctrl+r": "\x12", "ctrl+z": "\x1a", "ctrl+t": "\x14", "ctrl+u": "\x15", "f2": "\x1bOQ",
}  # fmt: skip

RUN = "import sys; from pathlib import Path; from budget.screens import run; sys.exit(run(Path(sys.argv[1])))"

ENVIRONMENT = {"TERM": "xterm-256color", "LC_ALL": "C.UTF-8", "LANG": "C.UTF-8", "ESCDELAY": "20"}

ANSWER, QUIET = 0.4, 0.06
"""Seconds in which the first byte of an answer comes, and after which nothing more of it does."""


class Session:
    """One run of the app in a pseudo-terminal of its own."""

    def __init__(
        self,
        file: Path,
        *,
        config: Path,
        size: tuple[int, int] = (80, 24),
        environment: Mapping[str, str] | None = None,
        code: str = RUN,
    ) -> None:
        """Start the app on a file, with its config in a folder, and wait for nothing yet."""
        self.columns, self.rows = size
        self.screen = pyte.Screen(self.columns, self.rows)
        self._stream = pyte.ByteStream(self.screen)
        self.received = b""
        self.code: int | None = None
        keep = {name: value for name, value in os.environ.items() if name in ("PATH", "HOME", "VIRTUAL_ENV")}
        folders = {"XDG_CONFIG_HOME": str(config), "XDG_STATE_HOME": str(config / "state")}
        whole = {**keep, **ENVIRONMENT, **folders, **(environment or {})}
        self.pid, self._fd = pty.fork()
        if self.pid == 0:
            os.execve(sys.executable, [sys.executable, "-c", code, str(file)], whole)
        fcntl.ioctl(self._fd, termios.TIOCSWINSZ, struct.pack("HHHH", self.rows, self.columns, 0, 0))

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def resize(self, columns: int, rows: int) -> None:
        """Give the terminal another size."""
        self.columns, self.rows = columns, rows
        self.screen.resize(rows, columns)
        fcntl.ioctl(self._fd, termios.TIOCSWINSZ, struct.pack("HHHH", rows, columns, 0, 0))

    def send(self, *keys: str) -> None:
        """Send keys by name, or letters."""
        for key in keys:
            os.write(self._fd, KEYS.get(key, key).encode())

    def settle(self, quiet: float = QUIET, limit: float = 8.0) -> int:
        """Read until nothing comes for a while; return how many bytes came."""
        before, until = len(self.received), time.monotonic() + limit
        while time.monotonic() < until and self.read(quiet):
            pass
        return len(self.received) - before

    def wait_for(self, text: str, limit: float = 10.0) -> None:
        """Read until a text stands on the screen; fail with the screen where it does not come."""
        self.wait_until(lambda: text in self.text, repr(text), limit)

    def wait_until(self, holds: Callable[[], bool], what: str, limit: float = 10.0) -> None:
        """Read until something holds of the screen; fail with the screen where it never does."""
        until = time.monotonic() + limit
        while not holds():
            if time.monotonic() > until or (not self.read(0.2) and self.ended):
                raise AssertionError(f"{what} did not come; the screen was\n{self.text}")
        self.settle()

    def press(self, *keys: str) -> int:
        """Send keys one after the other, waiting for what each brings; return how many bytes came back."""
        before = len(self.received)
        for key in keys:
            self.send(key)
            if self.read(ANSWER):
                self.settle()
        return len(self.received) - before

    @property
    def lines(self) -> list[str]:
        """What stands on the screen."""
        return [line.rstrip() for line in self.screen.display]

    @property
    def text(self) -> str:
        """What stands on the screen, as one text."""
        return "\n".join(self.lines)

    @property
    def ended(self) -> bool:
        """Whether the app has ended; its exit code is in `code` then."""
        if self.code is None:
            pid, status = os.waitpid(self.pid, os.WNOHANG)
            if pid:
                self.code = os.waitstatus_to_exitcode(status)
        return self.code is not None

    def wait_for_end(self, limit: float = 8.0) -> int:
        """Read until the app has ended; return its exit code."""
        until = time.monotonic() + limit
        while not self.ended and time.monotonic() < until:
            self.read(0.02)
        while self.read(0.0):
            pass
        assert self.code is not None, "the app did not end"
        return self.code

    def wait_for_stop(self, limit: float = 8.0) -> None:
        """Read until the app has stopped itself, as a shell sees it."""
        until = time.monotonic() + limit
        while time.monotonic() < until:
            self.read(0.05)
            pid, status = os.waitpid(self.pid, os.WUNTRACED | os.WNOHANG)
            if pid and os.WIFSTOPPED(status):
                self.settle()
                return
        raise AssertionError("the app did not stop")

    def signal(self, number: int) -> None:
        """Send the app a signal."""
        os.kill(self.pid, number)

    def close(self) -> None:
        """End the app if it is still there."""
        if not self.ended:
            os.kill(self.pid, signal.SIGKILL)
            os.waitpid(self.pid, 0)
            self.code = -signal.SIGKILL
        if self._fd >= 0:
            os.close(self._fd)
            self._fd = -1

    def hang_up(self) -> None:
        """Close the terminal's other end."""
        os.close(self._fd)
        self._fd = -1

    def read(self, timeout: float) -> bool:
        """Read what comes within a time; return whether anything did."""
        if self._fd < 0:
            return False
        ready, _, _ = select.select([self._fd], [], [], timeout)
        if not ready:
            return False
        try:
            data = os.read(self._fd, 65536)
        except OSError:
            return False
        self.received += data
        self._stream.feed(data)
        return bool(data)
