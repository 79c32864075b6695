"""Unsaved work is kept soon after a change, at once where it must be, and no longer than it is unsaved."""

from __future__ import annotations

import errno
import os
import threading
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from budget.storage import keeping
from budget.storage.keeping import Keeper, Work
from budget.storage.records import Record, find_records, write_record


@pytest.fixture
def work(tmp_path: Path) -> Work:
    return Work(tmp_path / "run.toml", "0" * 64)


@pytest.fixture
def quick(monkeypatch: pytest.MonkeyPatch) -> None:
    for name, seconds in (("PAUSE", 0.2), ("LATEST", 0.8), ("RETRY", 0.1)):
        monkeypatch.setattr(keeping, name, seconds)


def text_in(folder: Path) -> str | None:
    return find_records(folder=folder)[0].text


def wait_for(done: Callable[[], bool], limit: float = 5.0) -> None:
    until = time.monotonic() + limit
    while not done():
        assert time.monotonic() < until, "it did not come"
        time.sleep(0.01)


def changed(work: Work, text: str | None) -> Work:
    return Work(work.path, work.base, text, ("section", "M1"))


@pytest.mark.usefixtures("quick")
def test_an_open_run_leaves_a_sign_and_takes_it_away(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    keeper.start()
    wait_for(lambda: keeper.kept)
    record = find_records(work.path, tmp_path)[0]
    assert record.text is None
    assert record.alive
    keeper.end()
    assert find_records(folder=tmp_path) == ()


@pytest.mark.usefixtures("quick")
def test_a_change_is_kept_after_a_pause_and_in_any_case_after_a_while(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    keeper.start()
    wait_for(lambda: keeper.kept)
    keeper.note(changed(work, "a = 1\n"))
    time.sleep(0.05)
    assert text_in(tmp_path) is None
    wait_for(lambda: text_in(tmp_path) == "a = 1\n", 1.0)
    wait_for(lambda: keeper.kept)

    begun, number = time.monotonic(), 0
    while text_in(tmp_path) == "a = 1\n":  # no pause between the changes
        number += 1
        keeper.note(changed(work, f"a = 1\nb = {number}\n"))
        time.sleep(0.02)
        assert time.monotonic() - begun < 8.0
    assert time.monotonic() - begun > 0.5
    keeper.end(discard=True)


def test_five_seconds_are_kept_to() -> None:
    assert keeping.PAUSE == 1.0
    assert keeping.LATEST < 5.0


def test_it_is_kept_at_once_where_that_is_asked_for(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    keeper.note(changed(work, "a = 1\n"))
    assert keeper.keep_now()
    record = find_records(folder=tmp_path)[0]
    assert (record.text, record.cursor, record.base) == ("a = 1\n", ("section", "M1"), "0" * 64)


def test_what_is_saved_needs_no_text_and_another_name_is_followed(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    keeper.note(changed(work, "a = 1\n"))
    keeper.keep_now()
    keeper.note(Work(tmp_path / "other.toml", "1" * 64))
    keeper.keep_now()
    (record,) = find_records(folder=tmp_path)
    assert (record.path, record.base, record.text) == (tmp_path / "other.toml", "1" * 64, None)


def test_at_the_end_what_is_unsaved_stays_unless_it_is_discarded(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    keeper.note(changed(work, "a = 1\n"))
    keeper.end()
    assert text_in(tmp_path) == "a = 1\n"
    keeper.end(discard=True)
    assert find_records(folder=tmp_path) == ()


def test_what_a_process_that_lives_on_has_left_is_open_nowhere(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    keeper.note(changed(work, "a = 1\n"))
    keeper.keep_now()
    keeper.end(left=True)
    (record,) = find_records(folder=tmp_path)
    assert (record.text, record.alive) == ("a = 1\n", False)
    keeper.keep_now()
    assert find_records(folder=tmp_path) == (record,)


def test_where_that_cant_be_written_what_was_kept_stands(tmp_path: Path, work: Work) -> None:
    full = threading.Event()

    def write(record: Record, folder: Path | None) -> Path:
        if full.is_set():
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        return write_record(record, folder)

    keeper = Keeper(work, folder=tmp_path, write=write)
    keeper.keep_now(changed(work, "a = 1\n"))
    full.set()
    keeper.end(left=True)
    assert text_in(tmp_path) == "a = 1\n"


@pytest.mark.usefixtures("quick")
def test_a_disk_that_takes_nothing_is_told_and_tried_again(tmp_path: Path, work: Work) -> None:
    full = threading.Event()
    full.set()

    def write(record: Record, folder: Path | None) -> Path:
        if full.is_set():
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        return write_record(record, folder)

    keeper = Keeper(work, folder=tmp_path, write=write)
    keeper.start()
    keeper.note(changed(work, "a = 1\n"))
    wait_for(lambda: "No space" in keeper.problem)
    assert not keeper.keep_now()
    full.clear()
    wait_for(lambda: keeper.kept)
    assert keeper.problem == ""
    assert text_in(tmp_path) == "a = 1\n"
    keeper.end(discard=True)


@pytest.mark.usefixtures("quick")
def test_a_signal_does_not_wait_for_a_disk_that_hangs(
    tmp_path: Path, work: Work, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(keeping, "_PATIENCE", 0.1)
    hanging, go_on = threading.Event(), threading.Event()

    def write(record: Record, folder: Path | None) -> Path:
        if threading.current_thread().name == "keeper":
            hanging.set()
            go_on.wait(5.0)
        return write_record(record, folder)

    keeper = Keeper(work, folder=tmp_path, write=write)
    keeper.start()
    assert hanging.wait(5.0)
    keeper.note(changed(work, "a = 1\n"))
    assert keeper.keep_now()
    assert text_in(tmp_path) == "a = 1\n"
    go_on.set()
    # What the thread wrote late is older; it writes once more.
    wait_for(lambda: text_in(tmp_path) == "a = 1\n" and keeper.kept)
    keeper.end(discard=True)


def test_a_signal_in_the_midst_of_keeping_does_not_stand_still(tmp_path: Path, work: Work) -> None:
    calls: list[bool] = []

    def write(record: Record, folder: Path | None) -> Path:
        if not calls:
            calls.append(False)
            calls[0] = keeper.keep_now()  # as a signal handler does, in the same thread
        return write_record(record, folder)

    keeper = Keeper(work, folder=tmp_path, write=write)
    keeper.note(changed(work, "a = 1\n"))
    assert keeper.keep_now()
    assert calls == [True]


def test_what_was_discarded_is_not_written_anew_by_a_late_signal(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    unsaved = changed(work, "a = 1\n")
    keeper.note(unsaved)
    keeper.end(discard=True)
    keeper.keep_now(unsaved)
    assert find_records(folder=tmp_path) == ()


def test_what_a_signal_brings_is_written_though_it_was_never_noted(tmp_path: Path, work: Work) -> None:
    keeper = Keeper(work, folder=tmp_path)
    assert keeper.keep_now(changed(work, "a = 1\n"))
    assert text_in(tmp_path) == "a = 1\n"
