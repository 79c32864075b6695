"""Putting bytes on the disk so that a file holds the old ones or the new ones, never a part of each."""

from __future__ import annotations

import contextlib
import errno
import os
import re
import stat
import time
from pathlib import Path

SUFFIX = ".saving"
"""Ends the name of a temporary file of ours; it begins with a dot and the name of the file that is saved."""

STALE = 3600.0
"""Seconds after which a temporary file belongs to nobody any more."""

_ACCESS = "system.posix_acl_access"

_LONGEST = 100
"""Bytes of the file's name in that of its temporary file."""


def put(target: Path, content: bytes, *, new: bool = False) -> None:
    """Write a file's bytes: a new file takes its place, or it is written over where that would lose what it is.

    With `new` there must be no file of that name. Raises OSError; the old file is untouched then.
    """
    if new or not target.exists():
        replace(target, content, new=new)
    elif must_stay(target):
        write_over(target, content)
    else:
        try:
            replace(target, content)
        except _LostRuleError:
            write_over(target, content)


def must_stay(target: Path) -> bool:
    """Whether a file can't be replaced by another one: hard links, a folder not writable, an owner that is lost."""
    status = target.stat()
    keeps_owner = os.geteuid() == 0 or (
        os.geteuid() == status.st_uid and status.st_gid in {os.getegid(), *os.getgroups()}
    )
    return status.st_nlink > 1 or not keeps_owner or not os.access(target.parent, os.W_OK | os.X_OK)


def replace(target: Path, content: bytes, *, new: bool = False, mode: int | None = None) -> None:
    """Write a temporary file in the same folder, then give it the name of the target.

    Mode, owner and extended attributes of a file that is there are kept; a new one has the mode that is given, else
    that which the user's mask leaves.
    """
    handle, name = _temporary(target)
    try:
        try:
            _write(handle, content)
            if os.fstat(handle).st_size != len(content):
                raise OSError(errno.EIO, "the disk took fewer bytes than were written")
            if mode is not None:
                os.fchmod(handle, mode)
            elif not new and target.exists():
                _dress(handle, target)
            else:
                os.fchmod(handle, 0o666 & ~_umask())
            os.fsync(handle)
        finally:
            os.close(handle)
        if new:
            _name_new(name, target)
        else:
            name.replace(target)
    except BaseException:
        name.unlink(missing_ok=True)
        raise
    _sync_folder(target.parent)


def write_over(target: Path, content: bytes) -> None:
    """Write over a file's bytes; where that fails the old ones, which have their space, are put back."""
    handle = os.open(target, os.O_RDWR)
    try:
        with os.fdopen(handle, "rb", closefd=False) as stream:
            old = stream.read()
        try:
            _reserve(handle, len(content))
            _overwrite(handle, content)
        except BaseException:
            _overwrite(handle, old)
            raise
    finally:
        os.close(handle)


def sweep(folder: Path, name: str | None = None) -> None:
    """Remove temporary files of ours that are over an hour old: those of one file, or all in a folder of our own.

    Nothing is raised, and nothing of another user or of another kind is touched.
    """
    start = re.escape(f".{_short(name)}.") if name is not None else r"\..*"
    ours = re.compile(rf"{start}[a-z0-9_]{{8}}{re.escape(SUFFIX)}", re.DOTALL)
    with contextlib.suppress(OSError), os.scandir(folder) as found:
        for entry in found:
            if not ours.fullmatch(entry.name):
                continue
            with contextlib.suppress(OSError):
                status = entry.stat(follow_symlinks=False)
                old = time.time() - status.st_mtime > STALE
                if old and stat.S_ISREG(status.st_mode) and status.st_uid == os.geteuid():
                    Path(entry.path).unlink()


class _LostRuleError(OSError):
    """An access rule of the file can't be given to another one."""


def _temporary(target: Path) -> tuple[int, Path]:
    import tempfile  # noqa: PLC0415 - with all it brings it is for saving alone

    handle, name = tempfile.mkstemp(prefix=f".{_short(target.name)}.", suffix=SUFFIX, dir=target.parent)
    return handle, Path(name)


def _short(name: str) -> str:
    return os.fsdecode(os.fsencode(name)[:_LONGEST])


def _dress(handle: int, target: Path) -> None:
    """Give a file the owner, the access rules and the mode of another one."""
    status, own = target.stat(), os.fstat(handle)
    if (status.st_uid, status.st_gid) != (own.st_uid, own.st_gid):
        os.fchown(handle, status.st_uid, status.st_gid)
    if hasattr(os, "listxattr"):
        _copy_attributes(handle, target)
    os.fchmod(handle, stat.S_IMODE(status.st_mode))


def _copy_attributes(handle: int, target: Path) -> None:
    try:
        names = os.listxattr(target)
    except OSError:
        return  # a file system without them
    for name in names:
        try:
            os.setxattr(handle, name, os.getxattr(target, name))
        except OSError as refused:
            if name == _ACCESS:
                raise _LostRuleError(refused.errno, refused.strerror) from refused
    if _ACCESS not in names and _ACCESS in os.listxattr(handle):  # come from the folder, and not the file's
        os.removexattr(handle, _ACCESS)


def _name_new(name: Path, target: Path) -> None:
    """Give a temporary file a name that nobody has taken in the meantime."""
    try:
        os.link(name, target)
    except FileExistsError:
        raise
    except OSError:  # a file system without links
        if target.exists():
            raise FileExistsError(errno.EEXIST, os.strerror(errno.EEXIST)) from None
        name.replace(target)
    else:
        name.unlink()


def _reserve(handle: int, size: int) -> None:
    """Take the space that a file needs, so that a disk that is full says so before a byte is changed."""
    if hasattr(os, "posix_fallocate") and size:
        try:
            os.posix_fallocate(handle, 0, size)
        except OSError as refused:
            if refused.errno not in (errno.EOPNOTSUPP, errno.EINVAL):  # a file system that reserves nothing
                raise


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
