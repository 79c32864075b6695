"""Reading a run's file, and saving it whole or not at all."""

from __future__ import annotations

import hashlib
import os
import stat
from dataclasses import dataclass
from pathlib import Path

from budget.description import read_bytes
from budget.description.source import LARGEST_FILE, Source


class StorageError(Exception):
    """A file could not be read or written: which, why, and what to do."""


class ChangedOnDisk(StorageError):  # noqa: N818 - named after what happened
    """The file was changed by somebody else since it was read."""


@dataclass(frozen=True, slots=True)
class Stamp:
    """What identifies the bytes that were read or written last."""

    device: int
    inode: int
    size: int
    modified: int
    digest: str


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


def save(path: Path, content: bytes, stamp: Stamp | None) -> Stamp:
    """Write a file's bytes, so that it holds either the old or the new ones whole. Returns what was written.

    `stamp` is that of the bytes on disk as they were read last, None for a new file or to write over whatever is there.
    The bytes must be TOML. Raises ChangedOnDisk where other bytes are on disk by now, StorageError where it can't be
    written; the old file is untouched then.
    """
    source = read_bytes(content)
    if source.data is None:
        raise StorageError(f"{path} was not written: {source.findings[0].message}")
    target = _real(path)
    if stamp is not None:
        _check_unchanged(target, stamp)
    try:
        if _must_stay(target):
            _write_in_place(target, content)
        else:
            _replace(target, content)
    except OSError as wrong:
        raise StorageError(f"{path} could not be written: {_reason(wrong)}") from wrong
    written, found = load(target)
    if written != content:
        raise StorageError(f"{path} does not hold what was written; save it under another name")
    return found


def _stamp(status: os.stat_result, content: bytes) -> Stamp:
    digest = hashlib.sha256(content).hexdigest()
    return Stamp(status.st_dev, status.st_ino, status.st_size, status.st_mtime_ns, digest)


def _reason(wrong: OSError) -> str:
    return wrong.strerror or str(wrong)


def _real(path: Path) -> Path:
    try:
        target = path.resolve()
    except (OSError, RuntimeError) as wrong:
        raise StorageError(f"{path} could not be followed: a loop of symbolic links") from wrong
    if target.is_symlink():
        raise StorageError(f"{path} could not be followed: a loop of symbolic links")
    if target.exists() and not target.is_file():
        raise StorageError(f"{path} is not a regular file; save under another name")
    if target.exists() and not os.access(target, os.W_OK):
        raise StorageError(f"{path} is not writable; save under another name")
    return target


def _check_unchanged(target: Path, stamp: Stamp) -> None:
    try:
        status = target.stat()
    except OSError as wrong:
        raise ChangedOnDisk(f"{target} is gone; save under another name, or write it anew") from wrong
    if (status.st_dev, status.st_ino, status.st_size, status.st_mtime_ns) == (
        stamp.device,
        stamp.inode,
        stamp.size,
        stamp.modified,
    ):
        return
    _, found = load(target)
    if found.digest != stamp.digest:
        raise ChangedOnDisk(f"{target} was changed on disk since it was opened; reload, or save under another name")


def _must_stay(target: Path) -> bool:
    """Whether the file can't be replaced by another one: hard links, a folder not writable, an owner that is lost."""
    if not target.exists():
        return False
    status = target.stat()
    keeps_owner = os.geteuid() == 0 or (
        os.geteuid() == status.st_uid and status.st_gid in {os.getegid(), *os.getgroups()}
    )
    return status.st_nlink > 1 or not keeps_owner or not os.access(target.parent, os.W_OK | os.X_OK)


def _replace(target: Path, content: bytes) -> None:
    import tempfile  # noqa: PLC0415 - with all it brings it is for saving alone

    handle, name = tempfile.mkstemp(prefix=f".{target.name[:100]}.", suffix=".saving", dir=target.parent)
    try:
        try:
            _write(handle, content)
            if target.exists():
                status, own = target.stat(), os.fstat(handle)
                if (status.st_uid, status.st_gid) != (own.st_uid, own.st_gid):
                    os.fchown(handle, status.st_uid, status.st_gid)
                os.fchmod(handle, stat.S_IMODE(status.st_mode))
            else:
                os.fchmod(handle, 0o666 & ~_umask())
            os.fsync(handle)
        finally:
            os.close(handle)
        Path(name).replace(target)
    except BaseException:
        Path(name).unlink(missing_ok=True)
        raise
    _sync_folder(target.parent)


def _write_in_place(target: Path, content: bytes) -> None:
    """Write over a file's bytes; where that fails the old ones, which have their space, are put back."""
    handle = os.open(target, os.O_RDWR)
    try:
        with os.fdopen(handle, "rb", closefd=False) as stream:
            old = stream.read()
        try:
            if hasattr(os, "posix_fallocate") and content:
                os.posix_fallocate(handle, 0, len(content))
            _overwrite(handle, content)
        except BaseException:
            _overwrite(handle, old)
            raise
    finally:
        os.close(handle)


def _overwrite(handle: int, content: bytes) -> None:
    os.lseek(handle, 0, os.SEEK_SET)
    _write(handle, content)
    os.ftruncate(handle, len(content))
    os.fsync(handle)


def _write(handle: int, content: bytes) -> None:
    left = memoryview(content)
    while left:
        left = left[os.write(handle, left) :]


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


def _sync_folder(folder: Path) -> None:
    try:
        handle = os.open(folder, os.O_RDONLY)
    except OSError:
        return
    try:
        os.fsync(handle)
    except OSError:
        pass  # some file systems can't sync a folder; the file itself is on disk
    finally:
        os.close(handle)
