"""budget recover: what was kept of unsaved work, without the app."""

from __future__ import annotations

import dataclasses
import io
import json
import os
import re
import subprocess
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from budget.commands.completion import gather
from budget.storage.files import digest_of
from budget.storage.processes import Process, this_process, user_name
from budget.storage.records import Record, find_records, new_record, records_folder, write_record
from tests.commands.calls import RUN, Caller

NEWER = RUN.replace('title = "Hall"', 'title = "Hall, north"')
ELSEWHERE = dataclasses.replace(this_process(), host="plant-2")


@pytest.fixture(autouse=True)
def folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    monkeypatch.setenv("TZ", "UTC")
    monkeypatch.setenv("COLUMNS", "200")
    return records_folder()


def gone() -> Process:
    """A process of this machine that has ended: one that began at another time had this number."""
    return dataclasses.replace(this_process(), started="1")


def keep(path: Path, text: str | None = NEWER, **changes: object) -> Record:
    base = digest_of(path.read_bytes()) if path.exists() else None
    record = dataclasses.replace(new_record(path, base), text=text, process=gone())
    record = dataclasses.replace(record, **changes)  # type: ignore[arg-type]
    return dataclasses.replace(record, file=write_record(record))


def at_a_terminal(monkeypatch: pytest.MonkeyPatch, answer: str) -> None:
    class Keyboard(io.StringIO):
        def isatty(self) -> bool:
            return True

    monkeypatch.setattr(sys, "stdin", Keyboard(answer))


# The list


def test_where_nothing_is_kept_it_says_so(call: Caller, run_file: Path) -> None:
    assert call("recover") == (0, "nothing is kept\n", "")
    assert call("recover", run_file) == (0, f"nothing is kept of {run_file}\n", "")


def test_the_list_says_what_is_kept_of_which_file_the_latest_first(call: Caller, run_file: Path) -> None:
    now = datetime(2026, 3, 4, 5, 6, 7, tzinfo=UTC)
    older = keep(run_file, time=now - timedelta(days=2))
    newer = keep(run_file, time=now)
    status, out, err = call("recover")
    assert (status, err) == (0, "")
    titles, first, second, _, hint = out.splitlines()
    assert titles.split() == ["ID", "kept", "open", "state", "file"]
    assert first == f"{newer.id}  2026-03-04 05:06:07  no    differs from the file  {run_file}"
    assert second.startswith(f"{older.id}  2026-03-02 05:06:07")
    assert "budget recover ID --to FILE" in hint


def test_times_are_those_of_the_place(call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    import time

    keep(run_file, time=datetime(2026, 3, 4, 23, 6, 7, tzinfo=UTC))
    monkeypatch.setenv("TZ", "XYZ-2")
    time.tzset()
    try:
        assert "2026-03-05 01:06:07" in call("recover").out
    finally:
        monkeypatch.undo()
        time.tzset()


def test_it_says_how_the_text_stands_to_the_file(call: Caller, tmp_path: Path) -> None:
    states = {
        "same": "the same as the file",
        "differs": "differs from the file",
        "changed": "differs, and the file was changed since",
        "gone": "there is no such file",
        "unreadable": "the file can't be read",
    }
    for name in states:
        (tmp_path / f"{name}.toml").write_text(RUN)
        keep(tmp_path / f"{name}.toml")
    (tmp_path / "same.toml").write_text(NEWER)
    (tmp_path / "changed.toml").write_text(f"{RUN}\n# by hand\n")
    (tmp_path / "gone.toml").unlink()
    (tmp_path / "unreadable.toml").unlink()
    (tmp_path / "unreadable.toml").mkdir()
    lines = call("recover").out.splitlines()
    for name, state in states.items():
        assert any(re.search(rf"  {state}  +{tmp_path}/{name}\.toml$", line) for line in lines), name
    objects = json.loads(call("recover", "--json").out)["records"]
    assert {Path(one["file"]).stem: one["state"] for one in objects} == {name: name for name in states}


def test_a_new_file_that_was_never_saved_is_not_there(call: Caller, tmp_path: Path) -> None:
    keep(tmp_path / "new.toml")
    assert "there is no such file" in call("recover").out


def test_it_says_whether_it_is_open_still_and_whose_it_is(call: Caller, run_file: Path) -> None:
    keep(run_file, process=this_process())
    keep(run_file, process=ELSEWHERE)
    keep(run_file, user="quill")
    out = call("recover").out
    assert f"  yes, process {os.getpid()}  " in out
    assert re.search(rf"  {re.escape(user_name())} on plant-2  perhaps  ", out)
    assert re.search(r"  quill +no  ", out)


def test_only_those_of_a_file_are_listed_by_any_of_its_names(
    call: Caller, run_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    mine, other = keep(run_file), keep(tmp_path / "other.toml")
    (tmp_path / "link.toml").symlink_to(run_file)
    monkeypatch.chdir(tmp_path)
    for name in (run_file, "run.toml", tmp_path / "link.toml", mine.id, mine.id[:5]):
        out = call("recover", name).out
        assert mine.id in out
        assert other.id not in out


def test_runs_with_nothing_unsaved_are_listed_on_request(call: Caller, run_file: Path) -> None:
    sign = keep(run_file, text=None, process=this_process())
    assert call("recover").out == "nothing is kept\n"
    out = call("recover", "--all").out
    assert re.search(rf"^{sign.id} .*  nothing unsaved  {run_file}$", out, re.MULTILINE)
    (one,) = json.loads(call("recover", "--all", "--json").out)["records"]
    assert (one["unsaved"], one["state"], one["open"], one["pid"]) == (False, None, True, os.getpid())


def test_as_json_everything_is_told(call: Caller, run_file: Path) -> None:
    record = keep(run_file, process=ELSEWHERE, time=datetime(2026, 3, 4, 5, 6, 7, tzinfo=UTC))
    status, out, err = call("recover", "--json")
    (one,) = json.loads(out)["records"]
    assert (status, err) == (0, "")
    assert one == {
        "id": record.id,
        "file": str(run_file),
        "kept": "2026-03-04T05:06:07+00:00",
        "opened": one["opened"],
        "user": user_name(),
        "host": "plant-2",
        "pid": os.getpid(),
        "open": None,
        "unsaved": True,
        "state": "differs",
        "damaged": False,
        "record": str(record.file),
    }
    assert json.loads(call("recover", "other.toml", "--json").out) == {"records": [], "unreadable": []}


def test_a_damaged_record_is_listed_as_that(call: Caller, run_file: Path, folder: Path, tmp_path: Path) -> None:
    record = keep(run_file)
    assert record.file is not None
    record.file.write_bytes(record.file.read_bytes()[:-20])
    (folder / "odd.record").write_bytes(b"{}\n")
    status, out, err = call("recover")
    assert status == 0
    assert "; damaged, its end may be missing" in out
    assert err == f"budget: {folder}/odd.record is damaged at its beginning; look at it with a text editor\n"
    told = json.loads(call("recover", "--json").out)
    assert told["records"][0]["damaged"] is True
    assert told["unreadable"] == [str(folder / "odd.record")]
    status, _, err = call("recover", record.id, "--to", tmp_path / "left.toml")
    assert status == 1
    assert "may be cut off" in err
    assert (tmp_path / "left.toml").read_text() == NEWER[:-20]


@pytest.mark.parametrize(
    "odd",
    [
        {"time": "0001-01-01T00:00:00+14:00", "opened": "9999-12-31T23:59:59-14:00"},
        {"path": "/runs/\0.toml"},
        {"path": "/dev/zero"},
        {"path": ""},
        {"pid": 10**30},
        {"host": "\x1b[2J", "user": "\ud800"},
        {"base": "\x1b"},
    ],
)
def test_a_record_that_says_odd_things_is_dealt_with_all_the_same(
    call: Caller, run_file: Path, tmp_path: Path, odd: dict[str, object]
) -> None:
    record = keep(run_file, process=ELSEWHERE)
    assert record.file is not None
    head, _, body = record.file.read_bytes().partition(b"\n")
    record.file.write_bytes(json.dumps({**json.loads(head), **odd}).encode() + b"\n" + body)
    status, out, err = call("recover")
    assert (status, err) == (0, "")
    assert record.id in out
    assert out.replace("\n", "").isprintable()
    assert json.loads(call("recover", "--json").out)["records"][0]["id"] == record.id
    assert call("recover", record.id, "--differences").status in (0, 2)
    assert call("recover", record.id, "--to", tmp_path / "out.toml").status == 0
    assert (tmp_path / "out.toml").read_text() == NEWER
    assert call("recover", record.id, "--delete", "--yes").status == 0
    assert find_records() == ()


def test_names_that_a_terminal_would_obey_are_shown_plain(call: Caller, tmp_path: Path) -> None:
    path = Path(os.fsdecode(os.fsencode(tmp_path) + b"/\xe9\x1b[2J run.toml"))
    path.write_text(RUN)
    record = keep(path, user="kim\x1b[31m", process=dataclasses.replace(ELSEWHERE, host="plant\u202e"))
    out = call("recover").out
    assert out.replace("\n", "").isprintable()
    assert "\N{REPLACEMENT CHARACTER}[2J run.toml" in out
    assert record.id in call("recover", path).out
    (one,) = json.loads(call("recover", "--json").out)["records"]
    assert one["file"] == str(path)
    assert one["state"] == "differs"
    assert call("recover", record.id, "--to", tmp_path / "out.toml").status == 0


# Writing out


@pytest.mark.parametrize("text", [NEWER, NEWER.replace("\n", "\r\n"), "no TOML [", "", "a\ud800b", 'x = "Süd"\r\ny'])
def test_the_text_is_written_byte_by_byte(call: Caller, run_file: Path, tmp_path: Path, text: str) -> None:
    record = keep(run_file, text)
    target = tmp_path / "out.toml"
    status, out, err = call("recover", record.id, "--to", target)
    assert (status, err) == (0, "")
    assert f"budget edit {target}" in out
    assert f"budget recover {record.id} --delete" in out
    assert target.read_bytes() == text.encode("utf-8", "surrogatepass")
    assert run_file.read_text() == RUN
    assert len(find_records()) == 1


def test_a_dash_prints_the_text_and_nothing_else(run_file: Path, tmp_path: Path) -> None:
    record = keep(run_file, "a = 1\r\nb\ud800")
    command = [sys.executable, "-m", "budget", "recover", record.id, "--to", "-"]
    ended = subprocess.run(command, capture_output=True, check=True, cwd=tmp_path)
    assert ended.stdout == "a = 1\r\nb\ud800".encode("utf-8", "surrogatepass")
    assert ended.stderr == b""


def test_at_a_terminal_the_text_is_shown_plain(call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    record = keep(run_file, "a = 1\n\x1b[2J\n")
    monkeypatch.setattr(sys.stdout, "isatty", lambda: True, raising=False)
    assert call("recover", record.id, "--to", "-").out == "a = 1\n\N{REPLACEMENT CHARACTER}[2J\n"


def test_no_file_is_written_over(call: Caller, run_file: Path, tmp_path: Path) -> None:
    record = keep(run_file)
    (tmp_path / "other.toml").write_text("mine")
    (tmp_path / "nowhere.toml").symlink_to(tmp_path / "none" / "x.toml")
    for target, said in (
        (run_file, "is the run's own file"),
        (tmp_path / "other.toml", "exists already"),
        (tmp_path / "nowhere.toml", "exists already"),
        (tmp_path, "exists already"),
        (tmp_path / "none" / "x.toml", "could not be written"),
    ):
        status, out, err = call("recover", record.id, "--to", target)
        assert (status, out) == (2, "")
        assert said in err
        assert err.count("\n") == 1
    assert run_file.read_text() == RUN
    assert (tmp_path / "other.toml").read_text() == "mine"


def test_a_file_that_was_removed_is_written_anew(call: Caller, run_file: Path) -> None:
    record = keep(run_file)
    run_file.unlink()
    assert call("recover", record.id, "--to", run_file).status == 0
    assert run_file.read_text() == NEWER


# Which one


def test_the_beginning_of_an_id_is_enough_where_it_is_the_only_one(call: Caller, run_file: Path) -> None:
    for id_ in ("abc10000", "abc20000", "abc2"):
        keep(run_file, id_ + "\n", id=id_)
    assert call("recover", "abc1", "--to", "-").out == "abc10000\n"
    assert call("recover", "abc2", "--to", "-").out == "abc2\n"
    status, out, err = call("recover", "abc", "--to", "-")
    assert (status, out) == (2, "")
    for id_ in ("abc10000", "abc20000", "abc2"):
        assert id_ in err


def test_a_file_stands_for_what_alone_is_kept_of_it(call: Caller, run_file: Path) -> None:
    first = keep(run_file, "first")
    keep(run_file, None, process=this_process())
    assert call("recover", run_file, "--to", "-").out == "first"
    second = keep(run_file, "second")
    status, _, err = call("recover", run_file, "--to", "-")
    assert status == 2
    assert first.id in err
    assert second.id in err


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("ffff", "--to", "-"), "there is no record 'ffff'"),
        (("", "--delete", "--yes"), "there is no record ''"),
        (("--to", "x.toml"), "say which record"),
        (("--delete",), "say which record"),
        (("ffff", "--differences", "--json"), "leave them out"),
        (("--yes",), "--delete"),
        (("a", "b"), "b"),
        (("a", "--to", "x", "--delete"), "not allowed with"),
    ],
)
def test_what_can_t_be_done_is_refused(call: Caller, run_file: Path, arguments: tuple[str, ...], said: str) -> None:
    keep(run_file, id="abc10000")
    status, out, err = call("recover", *arguments)
    assert (status, out) == (2, "")
    assert said in err
    assert len(find_records()) == 1


def test_a_sign_that_a_run_is_open_holds_no_text(call: Caller, run_file: Path) -> None:
    sign = keep(run_file, text=None)
    status, _, err = call("recover", sign.id, "--to", "-")
    assert status == 2
    assert "nothing was unsaved" in err


# Differences


def test_the_differences_to_the_file_are_printed(call: Caller, run_file: Path) -> None:
    record = keep(run_file)
    status, out, err = call("recover", record.id, "--differences")
    assert (status, err) == (0, "")
    assert "Hall" in out
    assert "Hall, north" in out
    assert "LV 15" not in out
    run_file.write_text(NEWER)
    assert call("recover", record.id, "--differences").out == f"the kept text is the same as {run_file}\n"


def test_without_a_file_there_are_no_differences(call: Caller, run_file: Path) -> None:
    record = keep(run_file)
    run_file.unlink()
    status, out, err = call("recover", record.id, "--differences")
    assert (status, out) == (2, "")
    assert "could not be read" in err
    assert "--to" in err


# Removing


def test_a_record_is_removed_without_a_question_where_that_is_said(call: Caller, run_file: Path) -> None:
    record, other = keep(run_file), keep(run_file)
    status, out, _ = call("recover", record.id, "--delete", "--yes")
    assert status == 0
    assert "was deleted" in out
    assert [one.id for one in find_records()] == [other.id]


@pytest.mark.parametrize(("answer", "left"), [("yes\n", 0), ("Y\n", 0), ("n\n", 1), ("\n", 1), ("", 1)])
def test_it_asks_first(call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch, answer: str, left: int) -> None:
    record = keep(run_file)
    at_a_terminal(monkeypatch, answer)
    status, _, err = call("recover", record.id, "--delete")
    assert status == 0
    assert str(run_file) in err
    assert len(find_records()) == left


def test_where_nobody_can_be_asked_nothing_is_removed(call: Caller, run_file: Path) -> None:
    record = keep(run_file)
    status, _, err = call("recover", record.id, "--delete")
    assert status == 2
    assert "--yes" in err
    assert len(find_records()) == 1


def test_the_record_of_a_process_that_runs_is_not_removed(call: Caller, run_file: Path) -> None:
    record = keep(run_file, process=this_process())
    status, _, err = call("recover", record.id, "--delete", "--yes")
    assert status == 2
    assert str(os.getpid()) in err
    assert len(find_records()) == 1


def test_one_that_may_be_open_elsewhere_is_asked_about_as_that(
    call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    record = keep(run_file, process=ELSEWHERE)
    at_a_terminal(monkeypatch, "yes\n")
    _, _, err = call("recover", record.id, "--delete")
    assert "may be open still on plant-2" in err
    assert find_records() == ()


def test_a_folder_that_can_t_be_used_is_told(call: Caller, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "file").touch()
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    status, out, err = call("recover")
    assert (status, out) == (2, "")
    assert "could not be used" in err


# Around it


def test_its_options_are_completed_and_files_too() -> None:
    one = gather()["recover"]
    assert {"--to", "--differences", "--delete", "--yes", "--all", "--json"} <= set(one.options)
    assert one.words == ()


def test_it_needs_no_app(tmp_path: Path) -> None:
    code = (
        "import sys; from budget.commands import main; main(['recover']);"
        "print([name for name in ('textual', 'rich', 'scipy') if name in sys.modules])"
    )
    ended = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=tmp_path)
    assert ended.stdout == "nothing is kept\n[]\n"
