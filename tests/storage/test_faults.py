"""Whatever goes wrong while a file is saved, it is whole: the old one or the new one."""

from __future__ import annotations

import errno
import os
import stat
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from budget.storage import StorageError, load, save
from tests.storage.contents import NEW, OLD, SHORT, leftovers


class Fault:
    """Makes the n-th call of a function fail with an error of the disk, and passes the others on."""

    def __init__(self, real: Callable[..., Any], number: int = 1, code: int = errno.ENOSPC) -> None:
        self.real, self.number, self.code, self.calls = real, number, code, 0

    def __call__(self, *arguments: Any, **named: Any) -> Any:
        self.calls += 1
        if self.calls == self.number:
            raise OSError(self.code, os.strerror(self.code))
        return self.real(*arguments, **named)


STEPS = ["open", "write", "fsync", "fchmod", "close"]


@pytest.mark.parametrize("step", STEPS)
@pytest.mark.parametrize("code", [errno.ENOSPC, errno.EIO, errno.EDQUOT])
def test_a_fault_before_the_rename_leaves_the_old_file(
    file: Path, monkeypatch: pytest.MonkeyPatch, step: str, code: int
) -> None:
    _, stamp = load(file)
    inode = file.stat().st_ino
    with monkeypatch.context() as faulty:
        faulty.setattr(os, step, Fault(getattr(os, step), code=code))
        with pytest.raises(StorageError, match=f"could not be written: {os.strerror(code)}"):
            save(file, NEW, stamp)
    assert file.read_bytes() == OLD
    assert file.stat().st_ino == inode
    assert leftovers(file.parent) == []
    save(file, NEW, stamp)
    assert file.read_bytes() == NEW


def test_a_rename_that_fails_leaves_the_old_file(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    _, stamp = load(file)
    monkeypatch.setattr(Path, "replace", Fault(Path.replace, code=errno.EXDEV))
    with pytest.raises(StorageError, match="could not be written"):
        save(file, NEW, stamp)
    assert file.read_bytes() == OLD
    assert leftovers(file.parent) == []


def test_a_write_that_takes_a_few_bytes_at_a_time_is_gone_on_with(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    real = os.write
    monkeypatch.setattr(os, "write", lambda handle, data: real(handle, bytes(data)[:7]))
    save(file, NEW, load(file)[1])
    assert file.read_bytes() == NEW


def test_a_disk_that_is_full_half_way_leaves_the_old_file(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    real = os.write
    written: list[int] = []

    def half(handle: int, data: bytes) -> int:
        if written:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        written.append(real(handle, bytes(data)[:20]))
        return written[0]

    _, stamp = load(file)
    monkeypatch.setattr(os, "write", half)
    with pytest.raises(StorageError, match="No space left"):
        save(file, NEW, stamp)
    assert file.read_bytes() == OLD


def test_a_folder_that_can_t_be_synced_is_no_fault(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    # The first sync is that of the file, the second that of its folder.
    fault = Fault(os.fsync, number=2, code=errno.EINVAL)
    monkeypatch.setattr(os, "fsync", fault)
    save(file, NEW, load(file)[1])
    assert fault.calls == 2
    assert file.read_bytes() == NEW


def test_the_file_is_on_disk_before_it_takes_the_old_one_s_place(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    steps: list[str] = []
    sync, replace = os.fsync, Path.replace

    def synced(handle: int) -> None:
        steps.append("folder" if stat.S_ISDIR(os.fstat(handle).st_mode) else f"file of {os.fstat(handle).st_size}")
        sync(handle)

    def replaced(path: Path, target: Path) -> Path:
        steps.append("rename")
        return replace(path, target)

    monkeypatch.setattr(os, "fsync", synced)
    monkeypatch.setattr(Path, "replace", replaced)
    save(file, NEW, load(file)[1])
    assert steps == [f"file of {len(NEW)}", "rename", "folder"]


def test_a_save_that_is_interrupted_leaves_the_old_file(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def interrupted(_handle: int) -> None:
        raise KeyboardInterrupt

    _, stamp = load(file)
    monkeypatch.setattr(os, "fsync", interrupted)
    with pytest.raises(KeyboardInterrupt):
        save(file, NEW, stamp)
    assert file.read_bytes() == OLD
    assert leftovers(file.parent) == []


IN_PLACE = ["open", "write", "fsync", "ftruncate"] + (["posix_fallocate"] if hasattr(os, "posix_fallocate") else [])


@pytest.mark.parametrize("step", IN_PLACE)
@pytest.mark.parametrize("content", [NEW, SHORT])
def test_a_fault_while_writing_in_place_puts_the_old_bytes_back(
    file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, step: str, content: bytes
) -> None:
    (tmp_path / "other.toml").hardlink_to(file)
    _, stamp = load(file)
    with monkeypatch.context() as faulty:
        faulty.setattr(os, step, Fault(getattr(os, step)))
        with pytest.raises(StorageError, match="could not be written: No space left"):
            save(file, content, stamp)
    assert file.read_bytes() == OLD
    assert (tmp_path / "other.toml").read_bytes() == OLD


def test_a_disk_that_breaks_off_while_writing_in_place_puts_the_old_bytes_back(
    file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "other.toml").hardlink_to(file)
    _, stamp = load(file)
    real, calls = os.write, []

    def broken(handle: int, data: bytes) -> int:
        calls.append(len(data))
        if len(calls) == 2:
            raise OSError(errno.EIO, os.strerror(errno.EIO))
        return real(handle, bytes(data)[:20]) if len(calls) == 1 else real(handle, data)

    monkeypatch.setattr(os, "write", broken)
    with pytest.raises(StorageError, match="Input/output error"):
        save(file, NEW, stamp)
    assert file.read_bytes() == OLD


def test_what_does_not_hold_what_was_written_is_told(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    # A disk that says that it wrote and did not.
    real = Path.replace

    def forgetful(path: Path, target: Path) -> Path:
        path.write_bytes(SHORT)
        return real(path, target)

    monkeypatch.setattr(Path, "replace", forgetful)
    with pytest.raises(StorageError, match="does not hold what was written"):
        save(file, NEW, load(file)[1])
