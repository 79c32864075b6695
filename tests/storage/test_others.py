"""What others do to a file while it is open is told and not written over; any name will do; and who is gone is gone."""

from __future__ import annotations

import dataclasses
import os
from collections.abc import Callable
from pathlib import Path

import pytest

from budget.storage import ChangedOnDisk, StorageError, processes
from budget.storage.processes import is_alive, this_process
from budget.storage.records import find_records
from tests.storage.contents import leftovers
from tests.storage.situations import LONG, Editing, opened
from tests.storage.test_files import as_nobody

# What others did


Change = Callable[[Path], None]


def changed(path: Path) -> None:
    path.write_bytes(b"format = 1 # theirs\n")


def deleted(path: Path) -> None:
    path.unlink()


def renamed(path: Path) -> None:
    path.rename(path.with_name("renamed.toml"))


def another_in_its_place(path: Path) -> None:
    path.with_name("new").write_bytes(b"format = 1 # theirs\n")
    path.with_name("new").replace(path)


def a_folder(path: Path) -> None:
    path.unlink()
    path.mkdir()


def a_pipe(path: Path) -> None:
    path.unlink()
    os.mkfifo(path)


def its_folder_removed(path: Path) -> None:
    path.unlink()
    path.parent.rmdir()


def its_folder_renamed(path: Path) -> None:
    path.parent.rename(path.parent.with_name("moved"))


def its_folder_a_file(path: Path) -> None:
    its_folder_removed(path)
    path.parent.write_bytes(b"")


@pytest.mark.parametrize(
    ("change", "told", "over"),
    [
        (changed, "was changed on disk since it was opened; reload, or save under another name", ""),
        (another_in_its_place, "was changed on disk since it was opened; reload, or save under another name", ""),
        (deleted, "is gone; save under another name, or write it anew", ""),
        (renamed, "is gone; save under another name, or write it anew", ""),
        (a_folder, "is not a regular file; save under another name", "is not a regular file"),
        (a_pipe, "is not a regular file; save under another name", "is not a regular file"),
        (its_folder_removed, "is gone; save under another name, or write it anew", "No such file or directory"),
        (its_folder_renamed, "is gone; save under another name, or write it anew", "No such file or directory"),
        (its_folder_a_file, "is gone; save under another name, or write it anew", "Not a directory"),
    ],
)
def test_what_others_did_is_told_and_not_written_over(place: Path, change: Change, told: str, over: str) -> None:
    def act() -> None:
        run = opened(place)
        change(run.path)
        theirs = run.path.read_bytes() if run.path.is_file() else None
        assert run.refused() == f"run.toml {told}"
        assert theirs == (run.path.read_bytes() if run.path.is_file() else None)
        if over:
            assert over in run.refused(over=True)
            assert not run.path.is_file()
            run.save(place / "elsewhere.toml")
            assert (place / "elsewhere.toml").read_bytes() == LONG
        else:
            run.save(over=True)
            assert run.path.read_bytes() == LONG
        assert run.kept == run.text or not run.document.dirty

    as_nobody(act)


def test_what_comes_into_being_in_the_last_moment_is_not_written_over(place: Path) -> None:
    target = place / "work" / "new.toml"

    def act() -> None:
        run = opened(place)
        saving = run.document.prepare(target)
        with pytest.raises(ChangedOnDisk, match="exists already"):
            saving.write(lambda: target.write_bytes(b"format = 1 # theirs\n"))
        assert target.read_bytes() == b"format = 1 # theirs\n"
        assert leftovers(place / "work") == []

    as_nobody(act)


# Names


@pytest.mark.parametrize(
    "name",
    [b"n" * 250 + b".toml", "ü".encode() * 125 + b".toml", b"B\xfcro \xff\xfe.toml", b"two\nlines.toml", b" .toml"],
)
def test_any_name_that_a_file_can_have(place: Path, name: bytes) -> None:
    path = place / "work" / os.fsdecode(name)
    (place / "work" / "run.toml").rename(path)

    def act() -> None:
        run = Editing(path, place / "state")
        assert run.keeper.keep_now()
        assert run.kept == run.text
        assert find_records(path, place / "state")[0].path == path.resolve()
        run.works()
        run.path.unlink()
        run.save(over=True)
        assert [os.fsencode(file) for file in os.listdir(place / "work")] == [name]  # noqa: PTH208 - names as they are

    as_nobody(act)


def test_a_name_that_no_file_can_have_is_told(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        for name in ("n" * 256, "ü" * 128, "/".join(["n" * 200] * 30)):
            with pytest.raises(StorageError, match="File name too long"):
                run.save(place / "work" / name)
        assert run.document.path == run.path
        run.works()

    as_nobody(act)


# Processes


def test_a_process_that_has_ended_is_gone_though_nobody_asked_how() -> None:
    read, write = os.pipe()
    child = os.fork()
    if child == 0:
        os.read(read, 1)
        os._exit(0)
    process = dataclasses.replace(this_process(), pid=child, started=processes._started(child) or "")
    try:
        assert is_alive(process)
        os.write(write, b".")
        os.waitid(os.P_PID, child, os.WEXITED | os.WNOWAIT)
        assert is_alive(process) is False
    finally:
        os.waitpid(child, 0)
        os.close(read)
        os.close(write)
    assert is_alive(process) is False
