"""What is kept of unsaved work, and how it is found again."""

from __future__ import annotations

import dataclasses
import json
import os
import stat
import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.storage import StorageError
from budget.storage.processes import Process, is_alive, this_process
from budget.storage.records import (
    KEPT,
    Record,
    find_records,
    new_record,
    read_record,
    records_folder,
    remove_record,
    tidy,
    write_record,
)


@pytest.fixture(autouse=True)
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    return records_folder()


def gone() -> Process:
    """A process of this machine that has ended."""
    told = subprocess.run(
        [sys.executable, "-c", "import os; print(os.getpid())"], capture_output=True, text=True, check=True
    )
    return dataclasses.replace(this_process(), pid=int(told.stdout), started="1")


def unsaved(path: Path, text: str = "format = 1\n", **changes: object) -> Record:
    record = dataclasses.replace(new_record(path, "0" * 64), text=text, process=gone())
    return dataclasses.replace(record, **changes)  # type: ignore[arg-type]


def test_the_folder_and_the_records_are_for_the_user_s_eyes_alone(folder: Path, tmp_path: Path) -> None:
    file = write_record(unsaved(tmp_path / "run.toml"))
    assert stat.S_IMODE(folder.stat().st_mode) == 0o700
    assert stat.S_IMODE(folder.parent.stat().st_mode) == 0o700
    assert stat.S_IMODE(file.stat().st_mode) == 0o600
    folder.chmod(0o755)
    records_folder()
    assert stat.S_IMODE(folder.stat().st_mode) == 0o700


NAMES = st.binary(min_size=1, max_size=250).map(lambda name: os.fsdecode(name.translate(None, b"\0/") or b"x"))
"""Whatever a file can be called."""


@given(text=st.text(st.characters(codec=None)), name=NAMES)
def test_a_record_is_read_as_it_was_written(text: str, name: str, tmp_path_factory: pytest.TempPathFactory) -> None:
    folder = tmp_path_factory.mktemp("records")
    record = unsaved(Path("/runs") / f"{name}.toml", cursor=("section", "M1", "item", 0))
    record = dataclasses.replace(record, text=text)
    read = read_record(write_record(record, folder))
    assert dataclasses.replace(read, file=None, time=record.time, opened=record.opened) == record
    assert abs(read.time - record.time) < timedelta(milliseconds=1)
    assert [one.id for one in find_records(folder=folder)] == [record.id]


def test_the_header_is_one_line_that_says_whose_it_is(tmp_path: Path) -> None:
    first, _, body = write_record(unsaved(tmp_path / "run.toml", "a = 1\r\n")).read_bytes().partition(b"\n")
    head = json.loads(first)
    assert body == b"a = 1\r\n"
    assert head["length"] == 7
    assert head["path"] == str(tmp_path / "run.toml")
    assert {"base", "host", "boot", "pid", "started", "user", "opened", "time", "sha256", "cursor"} <= set(head)


def test_records_of_a_file_are_found_by_any_of_its_names(tmp_path: Path) -> None:
    (tmp_path / "run.toml").write_text("")
    (tmp_path / "link.toml").symlink_to(tmp_path / "run.toml")
    write_record(unsaved(tmp_path / "link.toml"))
    write_record(unsaved(tmp_path / "other.toml"))
    assert [record.path for record in find_records(tmp_path / "run.toml")] == [tmp_path / "run.toml"]
    assert len(find_records(tmp_path / "link.toml")) == 1
    assert len(find_records()) == 2


def test_the_latest_comes_first(tmp_path: Path) -> None:
    now = datetime.now(UTC)
    ages = {days: unsaved(tmp_path / "run.toml", time=now - timedelta(days=days)) for days in (3, 1, 2)}
    for record in ages.values():
        write_record(record)
    assert [record.id for record in find_records()] == [ages[days].id for days in (1, 2, 3)]


@pytest.mark.parametrize("left", [0, 5, 17])
def test_a_record_that_was_cut_off_says_so_and_keeps_what_is_left(tmp_path: Path, left: int) -> None:
    file = write_record(unsaved(tmp_path / "run.toml", 'title = "Süd"\nb = 2\n'))
    head, _, body = file.read_bytes().partition(b"\n")
    file.write_bytes(head + b"\n" + body[:left])
    record = read_record(file)
    assert "damaged" in record.fault
    assert record.text == body[:left].decode("utf-8", "replace")


def test_changed_bytes_are_noticed(tmp_path: Path) -> None:
    file = write_record(unsaved(tmp_path / "run.toml", "a = 1\n"))
    file.write_bytes(file.read_bytes().replace(b"a = 1", b"a = 2"))
    assert read_record(file).fault


@pytest.mark.parametrize(
    "content", [b"", b"format = 1\n", b"{}\n", b"[" * 9999, b'{"budget": "recovery record"}\n', b"\xff"]
)
def test_what_is_no_record_is_passed_over(folder: Path, content: bytes) -> None:
    (folder / "odd.record").write_bytes(content)
    with pytest.raises(StorageError, match="no recovery record"):
        read_record(folder / "odd.record")
    assert find_records() == ()
    tidy()
    assert (folder / "odd.record").exists()


def test_a_link_or_a_pipe_in_the_folder_is_not_followed(folder: Path, tmp_path: Path) -> None:
    real = write_record(unsaved(tmp_path / "run.toml"), tmp_path)
    (folder / "link.record").symlink_to(real)
    os.mkfifo(folder / "pipe.record")
    assert find_records() == ()


def test_this_process_is_alive_and_one_that_ended_is_not() -> None:
    here = this_process()
    assert is_alive(here) is True
    assert is_alive(gone()) is False
    assert is_alive(dataclasses.replace(here, started="1")) is False
    assert is_alive(dataclasses.replace(here, boot="another start")) is False
    assert is_alive(dataclasses.replace(here, host="another machine")) is None
    assert is_alive(dataclasses.replace(here, space="pid:[1]")) is None


def test_a_sign_of_a_process_that_is_gone_is_tidied_away(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    sign = write_record(unsaved(path, text=None))  # type: ignore[arg-type]
    here = write_record(new_record(path, None))
    elsewhere = dataclasses.replace(this_process(), host="another machine")
    there = write_record(dataclasses.replace(new_record(path, None), process=elsewhere))
    tidy()
    assert not sign.exists()
    assert here.exists()
    assert there.exists()


def test_unsaved_work_is_not_tidied_away_for_ninety_days(tmp_path: Path) -> None:
    now = datetime.now(UTC)
    young = write_record(unsaved(tmp_path / "a.toml", time=now - KEPT + timedelta(hours=1)))
    old = write_record(unsaved(tmp_path / "b.toml", time=now - KEPT - timedelta(hours=1)))
    broken = write_record(unsaved(tmp_path / "c.toml", time=now - KEPT - timedelta(hours=1)))
    broken.write_bytes(broken.read_bytes()[:-3])
    tidy()
    assert timedelta(days=7) < KEPT
    assert young.exists()
    assert not old.exists()
    assert broken.exists()


def test_old_temporary_files_are_swept_and_young_ones_stay(folder: Path) -> None:
    old, young, other = (folder / name for name in (".a.record.abcd1234.saving", ".b.record.abcd1234.saving", "notes"))
    for file in (old, young, other):
        file.touch()
    for file in (old, other):
        os.utime(file, (0, 0))
    tidy()
    assert not old.exists()
    assert young.exists()
    assert other.exists()


def test_a_record_can_be_removed_twice(tmp_path: Path) -> None:
    record = read_record(write_record(unsaved(tmp_path / "run.toml")))
    remove_record(record)
    remove_record(record)
    assert find_records() == ()


def test_without_a_home_there_is_an_error_and_no_record(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    (tmp_path / "file").touch()
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    with pytest.raises(OSError, match="file"):
        records_folder()
    assert find_records() == ()
    tidy()
