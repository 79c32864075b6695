"""Reading a run's file, looking whether somebody changed it, and saving it whole or not at all."""

from __future__ import annotations

import hashlib
import os
import stat
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from budget.description import read_bytes
from budget.description.source import LARGEST_FILE, Source
from budget.storage import writing

What = Literal["same", "changed", "gone", "there"]
"""What became of a file since it was read; "there": a file stands where none was expected."""


class StorageError(Exception):
    """A file could not be read or written: which, why, and what to do."""


class ChangedOnDisk(StorageError):  # noqa: N818 - named after what happened
    """The file is not what it was when it was read, or a file stands where none was expected."""

    def __init__(self, message: str, what: What) -> None:
        """Say what happened, in a sentence and in a word."""
        super().__init__(message)
        self.what = what


@dataclass(frozen=True, slots=True)
class Stamp:
    """What identifies the bytes that were read or written last."""

    device: int
    inode: int
    size: int
    modified: int
    digest: str


@dataclass(frozen=True, slots=True)
class Look:
    """What is on disk now, beside what was read or written last."""

    what: What
    source: Source | None = None
    """The text there, where it is another one that can be read."""
    stamp: Stamp | None = None
    """That of the bytes there; None where there are none that can be read."""
    why: str = ""
    """Why what is there can't be read, in words that follow the name of the file."""


def load(path: Path) -> tuple[bytes, Stamp]:
    """Read a file's bytes, of one that is too large one more than is allowed.

    Raises StorageError for anything that is not a readable regular file.
    """
    try:
        # O_NONBLOCK: a FIFO must not hang the program.
        handle = os.open(path, os.O_RDONLY | os.O_NONBLOCK)
        try:
            status = os.fstat(handle)
            if not stat.S_ISREG(status.st_mode):
                raise StorageError(f"{path} is not a regular file; name the run's TOML file")
            with os.fdopen(handle, "rb", closefd=False) as stream:
                content = stream.read(LARGEST_FILE + 1)
        finally:
            os.close(handle)
    except OSError as wrong:
        raise StorageError(f"{path} could not be read: {_reason(wrong)}") from wrong
    return content, _stamp(status, content)


def load_text(path: Path) -> tuple[Source, Stamp]:
    """Read a file that is to be edited. Raises StorageError also where it holds no text: too large, or not UTF-8."""
    content, stamp = load(path)
    source = read_bytes(content)
    if source.data is None and not source.text:
        raise StorageError(f"{path} could not be read: {source.findings[0].message}")
    return source, stamp


def look(path: Path, stamp: Stamp | None) -> Look:
    """Look whether a file is still what it was when it was read or written last. Nothing is raised.

    Other times or another place on disk with the same bytes (a touch, a checkout of the same version) are no change.
    """
    try:
        status = path.stat()
    except OSError as wrong:
        if isinstance(wrong, FileNotFoundError | NotADirectoryError):
            return Look("gone" if stamp is not None else "same")
        return Look("changed", why=f"could not be looked at: {_reason(wrong)}")
    if stamp is not None and _outside(status) == (stamp.device, stamp.inode, stamp.size, stamp.modified):
        return Look("same", stamp=stamp)
    try:
        content, found = load(path)
    except StorageError as wrong:
        return Look("changed", why=str(wrong).removeprefix(f"{path} "))
    if stamp is not None and found.digest == stamp.digest:
        return Look("same", stamp=found)
    source = read_bytes(content)
    if source.data is None and not source.text:
        return Look("changed", stamp=found, why=f"could not be read: {source.findings[0].message}")
    return Look("changed" if stamp is not None else "there", source, found)


def save(
    path: Path,
    content: bytes,
    stamp: Stamp | None,
    *,
    over: bool = False,
    keep: Callable[[], object] = lambda: None,
) -> Stamp:
    """Write a file's bytes, so that it holds either the old or the new ones whole. Returns what was written.

    `stamp` is that of the bytes on disk as they were read last, None where there must be no file yet; with `over`
    whatever is there is written over. The bytes must be TOML. `keep` is called when nothing stands in the way of
    writing any more, to put what is written in a safe place as well.

    Raises ChangedOnDisk where other bytes are on disk by now, StorageError where it can't be written; the old file is
    untouched then.
    """
    source = read_bytes(content)
    if source.data is None:
        raise StorageError(f"{path} was not written: {source.findings[0].message}")
    target = _real(path)
    if not over:
        _check_unchanged(target, stamp)
    keep()
    try:
        writing.put(target, content, new=stamp is None and not over)
    except FileExistsError as taken:
        raise _there(target) from taken
    except OSError as wrong:
        raise StorageError(f"{path} could not be written: {_reason(wrong)}") from wrong
    written, found = load(target)
    if written != content:
        raise StorageError(f"{path} does not hold what was written; save it under another name")
    return found


def _stamp(status: os.stat_result, content: bytes) -> Stamp:
    return Stamp(*_outside(status), digest_of(content))


def digest_of(content: bytes) -> str:
    """Return what identifies bytes: their SHA-256."""
    return hashlib.sha256(content).hexdigest()


def _outside(status: os.stat_result) -> tuple[int, int, int, int]:
    return status.st_dev, status.st_ino, status.st_size, status.st_mtime_ns


def _reason(wrong: OSError) -> str:
    return wrong.strerror or str(wrong)


def _real(path: Path) -> Path:
    loop = f"{path} could not be followed: a loop of symbolic links; save under another name"
    try:
        target = path.resolve()
        if target.is_symlink():
            raise StorageError(loop)
        there = target.exists()
        regular = target.is_file()
    except RuntimeError as wrong:
        raise StorageError(loop) from wrong
    except OSError as wrong:  # a folder that is closed, a name that is too long
        raise StorageError(f"{path} could not be written: {_reason(wrong)}") from wrong
    if there and not regular:
        raise StorageError(f"{path} is not a regular file; save under another name")
    if there and not os.access(target, os.W_OK):
        raise StorageError(f"{path} is not writable; save under another name")
    return target


def _check_unchanged(target: Path, stamp: Stamp | None) -> None:
    seen = look(target, stamp)
    if stamp is None and seen.what != "same":
        raise _there(target)
    if seen.what == "gone":
        raise ChangedOnDisk(f"{target} is gone; save under another name, or write it anew", "gone")
    if seen.what == "changed":
        message = f"{target} was changed on disk since it was opened; reload, or save under another name"
        raise ChangedOnDisk(message, "changed")


def _there(target: Path) -> ChangedOnDisk:
    return ChangedOnDisk(f"{target} exists already; save under another name, or write over it", "there")
