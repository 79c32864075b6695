"""Situations of a disk, made for real: mounts of our own that go with a child process, full file systems, and a run in
them that is not saved.
"""

from __future__ import annotations

import contextlib
import ctypes
import errno
import os
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from budget.document import Document
from budget.screens.unsaved import work_of
from budget.storage import StorageError
from budget.storage.keeping import Keeper
from budget.storage.records import find_records
from tests.storage.contents import NEW, leftovers
from tests.storage.forking import in_child

_NEW_MOUNTS, _NEW_USERS = 0x00020000, 0x10000000

LONG = NEW + b"# a good many words\n" * 2000
"""What is to be saved: some pages of it."""


def with_own_mounts(act: Callable[[], None]) -> None:
    """Run an act in a child process that may mount what it likes; what it mounts is gone with it.

    The test is skipped where the machine allows that to nobody.
    """
    if sys.platform != "linux":
        pytest.skip("there are mounts of one's own on Linux alone")
    done, message = in_child(_take_own_mounts, act)
    if done == 0:
        pytest.skip(f"the machine lets nobody mount anything: {message.splitlines()[-1]}")
    assert done == 2, message


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
            if full.errno != errno.ENOSPC:
                raise
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


class Editing:
    """A run that is open with a change that is not saved, and the record of it."""

    def __init__(self, path: Path, state: Path, text: bytes = LONG) -> None:
        self.path, self.state, self.text = path, state, text.decode()
        self.document = Document.open(path)
        self.keeper = Keeper(work_of(self.document), folder=state)
        self.document.replace_text(self.text, "edit")
        self.keeper.note(work_of(self.document))

    def save(self, path: Path | None = None, *, over: bool = False) -> None:
        """Save as the app does, the record first."""
        saving = self.document.prepare(path, over=over)
        self.document.saved(saving, saving.write(self.keeper.keep_now), ())
        self.keeper.note(work_of(self.document))

    def refused(self, *, over: bool = False) -> str:
        """Save, which must fail and leave the run unsaved; return what was said."""
        with pytest.raises(StorageError) as refused:
            self.save(over=over)
        assert self.document.dirty
        assert self.document.snapshot.text == self.text
        return str(refused.value).replace(str(self.path), self.path.name)

    @property
    def kept(self) -> str | None:
        """What the record holds."""
        found = find_records(self.path, self.state)
        return found[0].text if found else None

    def works(self) -> None:
        """Save once more, now that the cause is gone."""
        self.save()
        assert self.path.read_bytes() == self.text.encode()
        assert not self.document.dirty
        assert leftovers(self.path.parent) == []


def opened(place: Path, text: bytes = LONG) -> Editing:
    return Editing(place / "work" / "run.toml", place / "state", text)
