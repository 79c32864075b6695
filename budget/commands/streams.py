"""The standard streams of a process of our own: held before any file is, able to take any letter, let go at the end."""

from __future__ import annotations

import codecs
import contextlib
import os
import signal
import sys
import unicodedata
from types import FrameType
from typing import TextIO

SIGNALS = (signal.SIGTERM, signal.SIGHUP)
"""Signals that ask a process to end; that of the keyboard is Python's own KeyboardInterrupt."""

_ERRORS = "budget.likeness"
_HOLDERS = (os.O_WRONLY, os.O_RDONLY, os.O_WRONLY)
"""How a closed stream is held: reading the input and writing the output fail as they would, the errors go nowhere."""


class Ended(BaseException):
    """Somebody asked the process to end by a signal."""

    def __init__(self, number: int) -> None:
        """Take the number of the signal."""
        super().__init__(number)
        self.number = number


def take() -> None:
    """Hold descriptors 0 to 2, so that no file becomes one of them, and clean up before a signal ends the process.

    A stream that was closed takes what is printed to it: it must never go to another one.
    """
    for number, way in enumerate(_HOLDERS):
        try:
            os.fstat(number)
        except OSError:
            os.open(os.devnull, way)
    if sys.stdout is None:
        sys.stdout = open(1, "w", encoding="utf-8", closefd=False)  # noqa: SIM115 - no path, and not ours to close
    if sys.stderr is None:
        sys.stderr = open(2, "w", encoding="utf-8", closefd=False)  # noqa: SIM115
    for asked in SIGNALS:
        if signal.getsignal(asked) is signal.SIG_DFL:  # under nohup it is ignored, and stays so
            signal.signal(asked, _end)


def soften() -> None:
    """Let no letter fail to be written: what an encoding does not have is written by its likeness or its number."""
    codecs.register_error(_ERRORS, _likeness)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors=_ERRORS)


def drop(stream: TextIO | None) -> None:
    """Let nothing be written to a stream any more, so that leaving the interpreter doesn't fail a second time."""
    if stream is None:
        return
    with contextlib.suppress(OSError, ValueError):
        number = stream.fileno()
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, number)
        os.close(nowhere)


def settle(stream: TextIO | None) -> None:
    """Write what is left for a stream, or drop it where that fails."""
    if stream is None:
        return
    try:
        stream.flush()
    except (OSError, ValueError):
        drop(stream)


def _end(number: int, _frame: FrameType | None) -> None:
    raise Ended(number)


def _likeness(wrong: UnicodeError) -> tuple[str, int]:
    """Spell what an encoding lacks: marks by what looks like them, letters by their number, as nothing is lost then."""
    if not isinstance(wrong, UnicodeEncodeError):
        raise wrong
    from budget.screens.safe import ascii_only  # noqa: PLC0415 - few terminals lack a letter

    lacking = wrong.object[wrong.start : wrong.end]
    return "".join(_numbered(c) if unicodedata.category(c)[0] in "LMC" else ascii_only(c) for c in lacking), wrong.end


def _numbered(c: str) -> str:
    return c.encode("ascii", "backslashreplace").decode("ascii")
