"""Situations of a disk, made for real: mounts of our own that go with a child process, and full file systems."""

from __future__ import annotations

import contextlib
import ctypes
import errno
import os
import subprocess
import sys
import traceback
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

_NEW_MOUNTS, _NEW_USERS = 0x00020000, 0x10000000
_CANNOT = 77


def with_own_mounts(act: Callable[[], None]) -> None:
    """Run an act in a child process that may mount what it likes; what it mounts is gone with it.

    The test is skipped where the machine allows that to nobody.
    """
    if sys.platform != "linux":
        pytest.skip("there are mounts of one's own on Linux alone")
    read, write = os.pipe()
    sys.stdout.flush()
    child = os.fork()
    if child == 0:
        status = 1
        try:
            os.close(read)
            status = _CANNOT
            _take_own_mounts()
            status = 1
            act()
            status = 0
        except BaseException:  # noqa: BLE001 - what went wrong is told to the parent
            os.write(write, traceback.format_exc()[-6000:].encode())
        finally:
            os._exit(status)
    os.close(write)
    with os.fdopen(read, "rb") as said:
        message = said.read().decode(errors="replace")
    status = os.waitstatus_to_exitcode(os.waitpid(child, 0)[1])
    if status == _CANNOT:
        pytest.skip(f"the machine lets nobody mount anything: {message.splitlines()[-1]}")
    assert status == 0, message


def _take_own_mounts() -> None:
    user, group, root = os.geteuid(), os.getegid(), os.geteuid() == 0
    unshare = ctypes.CDLL(None, use_errno=True).unshare
    if unshare(_NEW_MOUNTS | (0 if root else _NEW_USERS)):
        raise OSError(ctypes.get_errno(), os.strerror(ctypes.get_errno()))
    if not root:
        Path("/proc/self/setgroups").write_text("deny")
        Path("/proc/self/uid_map").write_text(f"0 {user} 1")
        Path("/proc/self/gid_map").write_text(f"0 {group} 1")
    mount("--make-rprivate", "/")


def mount(*words: str) -> None:
    subprocess.run(["mount", *words], check=True, capture_output=True)


def small_disk(at: Path, options: str = "size=256k") -> Path:
    """Mount a file system in memory that is soon full; return where it is."""
    at.mkdir(exist_ok=True)
    mount("-t", "tmpfs", "-o", options, "tmpfs", str(at))
    return at


def fill(folder: Path, leave: int = 0) -> Path:
    """Fill a file system but for some bytes; return the file that fills it."""
    filler = folder / "filler"
    with filler.open("wb", buffering=0) as stream:
        try:
            while True:
                stream.write(b"\0" * 4096)
        except OSError as full:
            assert full.errno == errno.ENOSPC
        if leave:
            stream.truncate(max(0, stream.tell() - leave))
    return filler


@contextlib.contextmanager
def mode_of(path: Path, mode: int) -> Iterator[None]:
    """Give a file or folder another mode for a while."""
    before = path.stat().st_mode
    path.chmod(mode)
    try:
        yield
    finally:
        path.chmod(before)


def acl_of(*users: int) -> bytes:
    """Return an access rule as the system keeps it: read and write for the owner and for some users."""
    entries = [(1, 6, -1), *((2, 6, user) for user in users), (4, 4, -1), (0x10, 6, -1), (0x20, 4, -1)]
    parts = (tag.to_bytes(2, "little") + may.to_bytes(2, "little") + (user & 0xFFFFFFFF).to_bytes(4, "little")
             for tag, may, user in entries)  # fmt: skip
    return (2).to_bytes(4, "little") + b"".join(parts)
