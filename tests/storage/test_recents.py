"""Runs that were open of late: what is remembered of them, and what becomes of a file that is damaged or another's."""

from __future__ import annotations

import json
import os
import stat
import threading
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from budget.storage import writing
from budget.storage.recents import LARGEST, MOST, NAME, note_recent, recent_runs


def names(folder: Path) -> list[str]:
    return [one.path.name for one in recent_runs(folder)]


def written(folder: Path, *runs: object, **head: object) -> None:
    """Write the file as some other program, or an earlier time, left it."""
    whole = {"budget": "recent runs", "format": 1, "runs": list(runs), **head}
    (folder / NAME).write_text(json.dumps(whole))


def entry(path: object, opened: object = "2026-01-02T03:04:05+00:00") -> dict[str, object]:
    return {"path": path, "opened": opened}


def test_the_latest_comes_first_and_each_once(tmp_path: Path) -> None:
    before = datetime.now(UTC) - timedelta(seconds=1)
    for name in ("a.toml", "b.toml", "a.toml"):
        note_recent(tmp_path / name, tmp_path)
    assert names(tmp_path) == ["a.toml", "b.toml"]
    assert all(before < one.opened <= datetime.now(UTC) for one in recent_runs(tmp_path))


def test_no_more_than_fifty_are_remembered(tmp_path: Path) -> None:
    start = datetime(2026, 1, 1, tzinfo=UTC)
    runs = [entry(f"/w/{number}.toml", (start + timedelta(days=number)).isoformat()) for number in range(MOST)]
    written(tmp_path, *runs)
    note_recent(Path("/w/new.toml"), tmp_path)
    assert len(names(tmp_path)) == MOST
    assert names(tmp_path)[0] == "new.toml"
    assert "0.toml" not in names(tmp_path)
    assert "1.toml" in names(tmp_path)


def test_the_real_path_is_remembered_for_ones_own_eyes(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    (tmp_path / "run.toml").write_text("format = 1\n")
    (tmp_path / "link.toml").symlink_to("run.toml")
    note_recent(tmp_path / "link.toml")
    (one,) = recent_runs()
    assert one.path == tmp_path / "run.toml"
    file = tmp_path / "state" / "budget" / NAME
    assert stat.S_IMODE(file.stat().st_mode) == 0o600
    assert stat.S_IMODE(file.parent.stat().st_mode) == 0o700
    assert [path.name for path in file.parent.iterdir()] == [NAME]


def test_a_name_that_is_no_text_is_remembered(tmp_path: Path) -> None:
    path = Path(os.fsdecode(b"/w/\xff\x1b[31m.toml"))
    note_recent(path, tmp_path)
    assert recent_runs(tmp_path)[0].path == path
    assert (tmp_path / NAME).read_bytes().isascii()


@pytest.mark.parametrize(
    "content",
    [
        b"", b"{", b"\xff\xfe", b"[" * 100_000, b"[]", b"null", b'{"runs": []}', b'"recent runs"',
        b'{"budget": "recent runs", "format": 2, "runs": [{"path": "/w/a.toml", "opened": "2026-01-01"}]}',
        b'{"budget": "recovery record", "format": 1, "runs": []}', b'{"budget": "recent runs", "format": 1, "runs": 7}',
        b'{"budget": "recent runs", "format": 1, "runs": [' + b"9" * 5000 + b"]}",
    ],
)  # fmt: skip
def test_what_is_damaged_or_anothers_is_ignored_and_replaced(tmp_path: Path, content: bytes) -> None:
    (tmp_path / NAME).write_bytes(content)
    assert recent_runs(tmp_path) == ()
    note_recent(Path("/w/a.toml"), tmp_path)
    assert names(tmp_path) == ["a.toml"]


def test_what_is_too_large_is_not_read(tmp_path: Path) -> None:
    written(tmp_path, entry("/w/a.toml"), more=" " * LARGEST)
    assert recent_runs(tmp_path) == ()


@pytest.mark.parametrize(
    "wrong",
    [
        7, None, "x", [], {}, entry("b.toml"), entry(""), entry("/w/\0"), entry("/w/\ud800"), entry(["/w/b.toml"]),
        entry("/w/b.toml", "soon"), entry("/w/b.toml", 3), {"path": "/w/b.toml"},
    ],
)  # fmt: skip
def test_a_wrong_entry_takes_no_other_with_it(tmp_path: Path, wrong: object) -> None:
    written(tmp_path, wrong, entry("/w/a.toml"))
    assert names(tmp_path) == ["a.toml"]


def test_a_clock_that_was_wrong_keeps_no_run_in_front(tmp_path: Path) -> None:
    written(tmp_path, entry("/w/future.toml", "8000-01-01T00:00:00"))
    note_recent(Path("/w/now.toml"), tmp_path)
    note_recent(Path("/w/later.toml"), tmp_path)
    assert names(tmp_path)[0] == "later.toml"


def test_no_fifo_and_no_link_is_followed(tmp_path: Path) -> None:
    victim = tmp_path / "victim.json"
    written(tmp_path, entry("/w/a.toml"))
    (tmp_path / NAME).rename(victim)
    (tmp_path / NAME).symlink_to(victim)
    assert recent_runs(tmp_path) == ()
    note_recent(Path("/w/b.toml"), tmp_path)
    assert "b.toml" not in victim.read_text()
    (tmp_path / NAME).unlink()
    os.mkfifo(tmp_path / NAME)
    assert recent_runs(tmp_path) == ()
    note_recent(Path("/w/c.toml"), tmp_path)
    assert names(tmp_path) == ["c.toml"]


def test_where_it_cant_be_written_nothing_is_said(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / NAME).mkdir()
    note_recent(Path("/w/a.toml"), tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == [NAME]
    (tmp_path / "file").write_text("")
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    note_recent(Path("/w/a.toml"))
    assert recent_runs() == ()


def test_of_two_at_a_time_one_entry_is_lost_at_most(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    for name in "abcdef":
        note_recent(Path(f"/w/{name}.toml"), tmp_path)
    both, replace = threading.Barrier(2), writing.replace

    def together(target: Path, content: bytes, *, mode: int) -> None:
        both.wait(10.0)
        replace(target, content, mode=mode)

    monkeypatch.setattr(writing, "replace", together)
    threads = [threading.Thread(target=note_recent, args=(Path(f"/w/{name}.toml"), tmp_path)) for name in "xy"]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join(10.0)
    found = set(names(tmp_path))
    assert {f"{name}.toml" for name in "abcdef"} < found
    assert len(found & {"x.toml", "y.toml"}) >= 1
