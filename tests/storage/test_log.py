"""The log of errors of the program itself: what it holds, and what it must never hold."""

from __future__ import annotations

import getpass
import os
import re
import stat
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from budget.storage.faults import LARGEST, LONGEST_MESSAGE, record_fault

SECRET = "a value that stays where it is"
HOME = "/home/quillfeather"


@pytest.fixture(autouse=True)
def state(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path))
    monkeypatch.setenv("HOME", HOME)
    monkeypatch.setenv("OF_THE_ENVIRONMENT", SECRET)
    monkeypatch.setattr(sys, "argv", ["budget", "edit", f"{SECRET}.toml"])
    return tmp_path


def raised(make: Callable[[], object]) -> Exception:
    try:
        make()
    except Exception as wrong:  # noqa: BLE001 - whatever it is, it is what is wanted
        return wrong
    raise AssertionError("nothing was raised")


def logged(error: BaseException, what: str = "budget edit") -> str:
    log = record_fault(error, what)
    assert log is not None
    return log.read_text("utf-8")


def fail(message: str = "no such flow") -> None:
    local = SECRET
    if local:
        raise ValueError(message)


def fail_in_turn() -> None:
    try:
        fail("the first")
    except ValueError as first:
        raise KeyError("the second") from first


def fail_while_failing() -> None:
    try:
        fail("the first")
    except ValueError:
        raise KeyError("the second")  # noqa: B904 - that it has no cause is the point


def test_it_says_when_what_and_where() -> None:
    text = logged(raised(fail))
    assert re.match(r"\d{4}-\d\d-\d\d \d\d:\d\d:\d\d\+00:00  budget edit\n  budget [\d.]+, Python 3\.\d+", text)
    assert re.search(r"^ +test_log\.py:\d+ fail$", text, re.MULTILINE)
    assert "\n  ValueError: no such flow\n" in text


def test_a_module_of_a_package_is_named_from_the_package_on() -> None:
    import json

    from budget.description import read_bytes

    text = logged(raised(lambda: json.loads("{")))
    assert re.search(r"^ +json/decoder\.py:\d+ JSONDecoder\.decode$", text, re.MULTILINE)
    text = logged(raised(lambda: read_bytes(3)))  # type: ignore[arg-type]
    assert re.search(r"^ +budget/description/source\.py:\d+ \w+$", text, re.MULTILINE)


def test_it_holds_nothing_that_is_not_the_program_s() -> None:
    wrong = raised(lambda: fail(f"{HOME}/work/run.toml is odd\x1b[2J\nand so on"))
    text = logged(wrong)
    assert "ValueError: ~/work/run.toml is odd\N{REPLACEMENT CHARACTER}[2J\N{REPLACEMENT CHARACTER}and so on" in text
    for hidden in (SECRET, HOME, "quillfeather", os.uname().nodename, str(Path(__file__).parent), "\x1b"):
        assert hidden not in text
    assert getpass.getuser() not in re.findall(r"\w+", text)


def test_the_home_folder_is_taken_out_by_its_real_name_too(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "real").mkdir()
    (tmp_path / "link").symlink_to(tmp_path / "real")
    monkeypatch.setenv("HOME", str(tmp_path / "link"))
    text = logged(raised(lambda: fail(f"{tmp_path}/real/run.toml and {tmp_path}/link/run.toml")))
    assert "ValueError: ~/run.toml and ~/run.toml" in text


def test_a_root_folder_as_home_is_left_alone(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("HOME", "/")
    assert "ValueError: a/b" in logged(raised(lambda: fail("a/b")))


def test_what_an_error_came_from_is_told_before_it() -> None:
    text = logged(raised(fail_in_turn))
    assert re.search(r"ValueError: the first\n  which led to\n(    .*\n)+  KeyError: 'the second'\n", text)
    text = logged(raised(fail_while_failing))
    assert re.search(r"ValueError: the first\n  while that was dealt with\n(    .*\n)+  KeyError", text)


def test_every_error_of_a_group_is_told() -> None:
    inner = ExceptionGroup("two valves", [raised(fail), OSError(5, "stuck")])
    wrong = raised(lambda: (_ for _ in ()).throw(ExceptionGroup("all", [inner, raised(fail_in_turn)])))
    wrong.add_note(f"see {HOME}/notes")
    text = logged(wrong)
    for said in ("two valves (2 sub", "1 of 2", "[Errno 5] stuck", "the second", "  see ~/notes"):
        assert said in text
    assert text.count("test_log.py") >= 4


def test_a_circle_of_errors_comes_to_an_end() -> None:
    first, second = ValueError("a"), ValueError("b")
    first.__cause__, second.__cause__ = second, first
    text = logged(first)
    assert text.count("ValueError: a") == 1
    assert text.count("ValueError: b") == 1
    deep: BaseException = ValueError("0")
    for number in range(500):
        deep, deep.__context__ = ValueError(str(number)), deep
    assert record_fault(deep, "budget edit") is not None


def test_a_long_way_down_and_a_long_message_are_cut_short() -> None:
    def fall(depth: int) -> None:
        if depth == 0:
            raise RuntimeError("x" * 3 * LONGEST_MESSAGE)
        fall(depth - 1)

    text = logged(raised(lambda: fall(300)))
    assert 0 < text.count("fall") < 100
    assert re.search(r"\(\d+ more\)", text)
    assert text.count("x") <= LONGEST_MESSAGE + 100
    assert text.rstrip().endswith("…")


def test_an_error_without_a_message_that_can_be_printed_is_told_as_that() -> None:
    class OddError(Exception):
        def __str__(self) -> str:
            raise ValueError("no")

    assert re.search(r"OddError: \(it has no message", logged(OddError()))
    assert "\\udc" not in logged(ValueError("run\udce9.toml"))


def test_it_is_for_the_user_s_eyes_alone(state: Path) -> None:
    log = record_fault(raised(fail), "budget edit")
    assert log == state / "budget" / "log" / "faults.log"
    assert stat.S_IMODE(log.stat().st_mode) == 0o600
    assert stat.S_IMODE(log.parent.stat().st_mode) == 0o700


def test_it_grows_and_is_kept_small(state: Path) -> None:
    folder = state / "budget" / "log"
    record_fault(raised(fail), "the oldest")
    record_fault(raised(fail), "the next")
    assert (folder / "faults.log").read_text().count("ValueError") == 2
    for number in range(400):
        record_fault(raised(lambda: fail("y" * LONGEST_MESSAGE)), f"call {number}")
    assert sorted(path.name for path in folder.iterdir()) == ["faults.1.log", "faults.log"]
    assert all(path.stat().st_size <= LARGEST for path in folder.iterdir())
    assert "call 399" in (folder / "faults.log").read_text()
    kept = "".join(path.read_text() for path in folder.iterdir())
    assert "the oldest" not in kept
    assert kept.count("ValueError") > 100


@pytest.mark.parametrize("in_the_way", ["folder", "link", "pipe"])
def test_what_stands_in_its_way_is_left_alone(state: Path, tmp_path: Path, in_the_way: str) -> None:
    folder = state / "budget" / "log"
    folder.mkdir(parents=True)
    log, other = folder / "faults.log", tmp_path / "other"
    other.touch()
    if in_the_way == "folder":
        log.mkdir()
    elif in_the_way == "link":
        log.symlink_to(other)
    else:
        os.mkfifo(log)
    assert record_fault(raised(fail), "budget edit") is None
    assert other.read_bytes() == b""


def test_without_a_place_for_it_nothing_is_raised(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    (tmp_path / "file").touch()
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
    assert record_fault(raised(fail), "budget edit") is None
