"""The log of errors of the program itself: what went wrong and where, for the user's eyes alone.

It stands in the user's state folder and names modules, lines and functions. No value of a variable, no environment, no
home folder and no word of the command line goes into it.
"""

from __future__ import annotations

import os
import platform
import stat
import sysconfig
import traceback
from collections.abc import Iterator
from datetime import UTC, datetime
from functools import cache
from importlib import metadata
from pathlib import Path

import budget
from budget.storage.folders import state_folder

LARGEST = 256 * 1024
"""Bytes of the log; what would make it larger begins a new one, and the old one is kept beside it."""

LONGEST_MESSAGE = 2000
"""Letters of the message of one error."""

_FIRST, _LAST = 20, 60
"""Lines of a long traceback that are kept: of where it began, and of where it ended."""

_MOST_ERRORS = 20
"""Errors of one chain or group that are told."""


def record_fault(error: BaseException, what: str) -> Path | None:
    """Append an error to the log, with what was done then; return where the log is. Nothing is raised.

    None where it can't be written.
    """
    try:
        entry = "\n".join(_entry(error, what)).encode("utf-8", "replace")[: LARGEST // 2] + b"\n\n"
        log = state_folder("log") / "faults.log"
        _append(log, entry)
    except Exception:  # noqa: BLE001 - what goes wrong here must not hide what went wrong before
        return None
    return log


def _append(log: Path, entry: bytes) -> None:
    try:
        status = log.lstat()
    except FileNotFoundError:
        pass
    else:
        if status.st_size + len(entry) > LARGEST:
            log.replace(log.with_name("faults.1.log"))
    # O_NONBLOCK: a FIFO must not hang the program.
    handle = os.open(log, os.O_WRONLY | os.O_APPEND | os.O_CREAT | os.O_NOFOLLOW | os.O_NONBLOCK, 0o600)
    try:
        if not stat.S_ISREG(os.fstat(handle).st_mode):
            raise OSError("the log is not a regular file")
        os.fchmod(handle, 0o600)
        os.write(handle, entry)
    finally:
        os.close(handle)


def _entry(error: BaseException, what: str) -> Iterator[str]:
    time = datetime.now(UTC).isoformat(sep=" ", timespec="seconds")
    yield f"{time}  {_line(what)}"
    yield f"  budget {budget.__version__}, Python {platform.python_version()}, textual {_version('textual')}"
    told: set[int] = set()
    yield from _lines(error, "  ", told)


def _lines(error: BaseException, indent: str, told: set[int]) -> Iterator[str]:
    """Tell an error after those that it came from, and those of a group one by one."""
    if id(error) in told or len(told) >= _MOST_ERRORS:
        yield f"{indent}(told above, or one too many)"
        return
    told.add(id(error))
    cause = error.__cause__ or (None if error.__suppress_context__ else error.__context__)
    if cause is not None:
        yield from _lines(cause, indent, told)
        yield f"{indent}which led to" if error.__cause__ is not None else f"{indent}while that was dealt with"
    yield from (f"{indent}  {place}" for place in _places(error))
    yield f"{indent}{type(error).__qualname__}: {_said(error)}"
    yield from (f"{indent}  {_clean(note)}" for note in getattr(error, "__notes__", ()))
    if isinstance(error, BaseExceptionGroup):
        for number, one in enumerate(error.exceptions, 1):
            yield f"{indent}  {number} of {len(error.exceptions)}"
            yield from _lines(one, f"{indent}    ", told)


def _places(error: BaseException) -> list[str]:
    """Return where an error passed through: module, line, function."""
    places = []
    for frame, line in traceback.walk_tb(error.__traceback__):
        code = frame.f_code
        places.append(_line(f"{_module(code.co_filename)}:{line} {code.co_qualname}"))
    if len(places) > _FIRST + _LAST:
        left_out = len(places) - _FIRST - _LAST
        places[_FIRST:-_LAST] = [f"({left_out} more)"]
    return places


@cache
def _module(filename: str) -> str:
    """Return the path of a module within its package; of any other file no more than its name."""
    path = Path(filename)
    ours = Path(budget.__file__).parents[1]
    roots = (ours / "budget", *(Path(sysconfig.get_path(name)) for name in ("purelib", "platlib", "stdlib")))
    for root in roots:
        if path.is_relative_to(root):
            return str(path.relative_to(ours if root == roots[0] else root))
    return path.name


def _said(error: BaseException) -> str:
    try:
        text = str(error)
    except Exception:  # noqa: BLE001 - an error that can't be told is told as that
        return "(it has no message that can be printed)"
    return _clean(text)


def _clean(text: object) -> str:
    """Return a message as one line without the user's home folder."""
    said = str(text)
    for home in _homes():
        said = said.replace(home, "~")
    said = _line(said)
    return said if len(said) <= LONGEST_MESSAGE else said[: LONGEST_MESSAGE - 1] + "…"


def _line(text: str) -> str:
    """Return a text as one line that no terminal would obey."""
    return "".join(c if c.isprintable() else "\N{REPLACEMENT CHARACTER}" for c in text)


def _homes() -> list[str]:
    """Return what the user's home folder is called, the longest name first."""
    try:
        home = Path.home()
    except RuntimeError:
        return []
    names = {str(home), os.path.realpath(home)}
    return sorted((name for name in names if len(name) > 1), key=len, reverse=True)


def _version(name: str) -> str:
    try:
        return metadata.version(name)
    except metadata.PackageNotFoundError:
        return "unknown"
