"""Which runs are listed to be opened: what is at hand, and nothing that is no run."""

from __future__ import annotations

import os
from datetime import UTC, datetime
from pathlib import Path

import pytest

from budget.storage import runs
from budget.storage.recents import Recent
from budget.storage.runs import MOST, is_same, latest_of, runs_at_hand

RUN = 'format = 1\n[design]\ntitle = "{}"\n[source.P1]\n'
NOW = datetime.now(UTC)


@pytest.fixture
def present(tmp_path: Path) -> Path:
    path = tmp_path / "present.toml"
    path.write_text(RUN.format("The present one"))
    return path


def listed(present: Path, *recent: Path, libraries: tuple[str, ...] = ()) -> list[tuple[str, str, bool]]:
    found = runs_at_hand(present, [Recent(path, NOW) for path in recent], libraries)
    return [(one.path.name, one.title, one.recent) for one in found]


def test_recent_runs_come_first_and_then_those_of_the_folder_by_name(present: Path, tmp_path: Path) -> None:
    for name in ("c", "B", "a"):
        (tmp_path / f"{name}.toml").write_text(RUN.format(f"Run {name}"))
    (tmp_path / "far").mkdir()
    (tmp_path / "far" / "d.toml").write_text(RUN.format("Run d"))
    found = listed(present, tmp_path / "far" / "d.toml", present, tmp_path / "c.toml", tmp_path / "gone.toml")
    assert found == [
        ("d.toml", "Run d", True), ("c.toml", "Run c", True), ("a.toml", "Run a", False), ("B.toml", "Run B", False),
    ]  # fmt: skip


def test_what_is_no_run_is_not_listed(present: Path, tmp_path: Path) -> None:
    (tmp_path / "lib.toml").write_text('format = 1\n[device."V 15"]\nkv = [[1, 2.0]]\n')
    (tmp_path / "named.toml").write_text("x" * (runs.LARGEST_READ + 1))
    (tmp_path / "present.readings.toml").write_text("format = 1\n")
    (tmp_path / "pyproject.toml").write_text("[project]\n")
    (tmp_path / ".hidden.toml").write_text(RUN.format(""))
    (tmp_path / "note.txt").write_text(RUN.format(""))
    (tmp_path / "folder.toml").mkdir()
    (tmp_path / "again.toml").symlink_to(present)
    (tmp_path / "loop.toml").symlink_to("loop.toml")
    os.mkfifo(tmp_path / "pipe.toml")
    assert listed(present, tmp_path / "again.toml", tmp_path / "pipe.toml", libraries=("named.toml",)) == []


def test_what_cant_be_read_has_no_title_and_can_be_chosen_all_the_same(present: Path, tmp_path: Path) -> None:
    (tmp_path / "broken.toml").write_text("format = \n")
    (tmp_path / "large.toml").write_text(RUN.format("Large") + "#" * runs.LARGEST_READ)
    (tmp_path / "untitled.toml").write_text("format = 1\n[design]\ntitle = 7\n[source.P1]\n")
    (tmp_path / "bytes.toml").write_bytes(b"\xff")
    names = ("broken.toml", "bytes.toml", "large.toml", "untitled.toml")
    assert listed(present) == [(name, "", False) for name in names]


def test_titles_are_read_for_a_while_only(present: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "a.toml").write_text(RUN.format("Run a"))
    monkeypatch.setattr(runs, "PATIENCE", -1.0)
    assert listed(present) == [("a.toml", "", False)]


def test_of_a_full_folder_the_latest_are_listed(present: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert MOST == 200
    monkeypatch.setattr(runs, "MOST", 3)
    for number in range(6):
        path = tmp_path / f"{number}.toml"
        path.write_text(RUN.format(""))
        os.utime(path, (4e9 + number, 4e9 + number))
    assert [name for name, _, _ in listed(present)] == ["3.toml", "4.toml", "5.toml"]
    assert all(one.time <= datetime.now(UTC) for one in runs_at_hand(present, ()))


def test_a_folder_that_is_gone_has_none(tmp_path: Path) -> None:
    assert listed(tmp_path / "gone" / "run.toml") == []


def test_one_file_is_known_by_every_name(present: Path, tmp_path: Path) -> None:
    (tmp_path / "link.toml").symlink_to(present)
    os.link(present, tmp_path / "hard.toml")
    assert is_same(tmp_path / "link.toml", present)
    assert is_same(tmp_path / "hard.toml", present)
    assert is_same(tmp_path / "gone.toml", tmp_path / "x" / ".." / "gone.toml")
    assert not is_same(tmp_path / "gone.toml", present)


def test_the_latest_that_is_there_still_is_found(present: Path, tmp_path: Path) -> None:
    gone, there = Recent(tmp_path / "gone.toml", NOW), Recent(present, NOW)
    assert latest_of((gone, Recent(tmp_path, NOW), there)) == there
    assert latest_of((gone,)) is None
