"""However the app ends, what was committed is kept, the terminal is as it was, and the process is gone soon."""

from __future__ import annotations

import contextlib
import json
import os
import signal
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.terminal.endings import ENDINGS, LIMIT, MORE, RESTORED, WORKS, end, several, table
from tests.terminal.parallel import many
from tests.terminal.session import Session
from tests.terminal.traced import APP, SMALL, Run, cooked, sizeless, stty

FAULT = """
from budget.screens import turning
def broken(app):
    raise ZeroDivisionError("a fault\\x1b[31m of the program")
from budget.screens import doing
doing.DOINGS["fold"] = broken
"""
"""The space bar meets an error that nobody expected."""


@pytest.fixture
def run(tmp_path: Path) -> Iterator[Run]:
    """The app under a shell, with an edit that is not saved."""
    opened = Run(tmp_path, shell=True)
    opened.session.press("down", "down")
    yield opened
    opened.close()


def edit(run: Run, value: str = "8.25") -> str:
    before = run.edit(value)
    assert run.wait_for_commit(before + 1)
    assert f'length = "{value} m"' in run.committed
    return run.committed


def wait_for_state(pid: int, *states: str, limit: float = 8.0) -> None:
    """Wait until a process is stopped, or sleeps."""
    until = time.monotonic() + limit
    while Path(f"/proc/{pid}/stat").read_text().rpartition(") ")[2][0] not in states:
        assert time.monotonic() < until, "it did not come to that"
        time.sleep(0.005)


def ended(run: Run, number: int, *, read: bool = True) -> None:
    assert 0.0 <= run.wait_for_end(read=read) <= LIMIT
    assert run.status in (128 + number, -number)


# Signals and lost terminals


def test_an_ending_keeps_what_was_committed_and_puts_the_terminal_back() -> None:
    works = (("SIGTERM", "cells at once"), ("SIGTERM stalled", "text"), ("closed stalled", "save"))
    outcomes = many([(end, (ending, work, 7)) for ending, work in works], at_once=3)
    assert [(one.ending, one.work, one.problems) for one in outcomes if one.problems] == []


@pytest.mark.long
@pytest.mark.parametrize("ending", [*ENDINGS, *MORE])
def test_every_ending_does_so_at_any_moment(ending: str) -> None:
    outcomes = several(ending, 30, at_once=4)
    assert {one.work for one in outcomes} == set(WORKS)
    assert [(one.work, one.seed, one.problems) for one in outcomes if one.problems] == [], "\n".join(table(outcomes))


@pytest.mark.long
def test_a_second_signal_changes_nothing(run: Run) -> None:
    kept = edit(run)
    os.kill(run.pid, signal.SIGTERM)
    time.sleep(0.05)
    for number in (signal.SIGHUP, signal.SIGTERM, signal.SIGINT):
        os.kill(run.pid, number)
    ended(run, signal.SIGTERM)
    assert run.kept == [kept]


# Suspending


@pytest.mark.parametrize("outside", [False, pytest.param(True, marks=pytest.mark.long)])
def test_before_it_stops_it_keeps_what_is_unsaved_and_it_paints_again_after_it(run: Run, outside: bool) -> None:
    slave = run.open_slave()
    kept = edit(run)
    if outside:
        os.kill(run.pid, signal.SIGTSTP)
    else:
        run.session.send("ctrl+z")
    wait_for_state(run.pid, "T")
    assert run.kept == [kept]
    run.session.settle()
    assert cooked(slave)
    assert sizeless(stty(slave)) == sizeless(str(run.told["before"]))
    for mode in RESTORED:
        assert mode in run.session.received
    run.session.screen.reset()
    os.kill(run.pid, signal.SIGCONT)
    run.session.wait_for("required")
    run.session.wait_for("8.2")
    assert not cooked(slave)
    more = edit(run, "9.75")
    os.kill(run.pid, signal.SIGTERM)
    ended(run, signal.SIGTERM)
    assert sizeless(stty(slave)) == sizeless(str(run.told["before"]))
    assert run.kept == [more]
    os.close(slave)


@pytest.mark.long
@pytest.mark.parametrize("number", [signal.SIGTERM, signal.SIGHUP])
def test_a_signal_ends_it_while_it_is_stopped(run: Run, number: int) -> None:
    slave = run.open_slave()
    kept = edit(run)
    run.session.send("ctrl+z")
    wait_for_state(run.pid, "T")
    os.kill(run.pid, number)
    assert run.kept == [kept]
    os.kill(run.pid, signal.SIGCONT)
    ended(run, number)
    assert run.kept == [kept]
    assert sizeless(stty(slave)) == sizeless(str(run.told["before"]))
    os.close(slave)


@contextlib.contextmanager
def stopped_job(folder: Path) -> Iterator[Session]:
    """A shell with the app as a job that was stopped, after an edit."""
    file = folder / "run.toml"
    file.write_text(SMALL)
    environment = {"APP": APP, "TRACE": str(folder / "trace"), "PS1": "> "}
    code = "import os; os.execvp('bash', ['bash', '--norc', '--noprofile', '-i'])"
    with Session(file, config=folder, environment=environment, code=code) as session:
        session.wait_for(">")
        session.send(f'{sys.executable} -c "$APP" {file}', "enter")
        session.wait_for("required")
        session.press("down", "down", "=", "length = 8.25 m", "enter")
        session.send("ctrl+z")
        session.wait_for("Stopped")
        yield session


def record_in(folder: Path) -> str:
    (record,) = (folder / "state" / "budget" / "unsaved").glob("*.record")
    return record.read_text()


def test_a_stopped_job_that_the_shell_ends_in_the_background_is_gone(tmp_path: Path) -> None:
    with stopped_job(tmp_path) as session:
        session.send("kill %1; sleep 1; echo on${x}ward", "enter")
        session.wait_for("onward")
        assert f"Exit {128 + signal.SIGTERM}" in session.text
        session.send("stty -a; exit", "enter")
        session.settle(0.3)
        assert "isig icanon" in session.text
    assert 'length = "8.25 m"' in record_in(tmp_path)


@pytest.mark.long
def test_a_stopped_job_whose_terminal_is_closed_is_gone(tmp_path: Path) -> None:
    with stopped_job(tmp_path) as session:
        pid = json.loads(record_in(tmp_path).split("\n")[0])["pid"]
        session.hang_up()
        until = time.monotonic() + LIMIT
        while Path(f"/proc/{pid}").exists() and time.monotonic() < until:
            time.sleep(0.01)
        assert not Path(f"/proc/{pid}").exists()
    assert 'length = "8.25 m"' in record_in(tmp_path)


@pytest.mark.long
@pytest.mark.parametrize("keys", [("\x10",), ("escape",)])
def test_what_is_written_on_the_text_screen_is_kept_while_a_list_is_in_front(run: Run, keys: tuple[str, ...]) -> None:
    run.session.press("T", "x", "y", *keys)
    assert "xy" in run.committed
    assert "xy" not in run.session.text
    os.kill(run.pid, signal.SIGTERM)
    ended(run, signal.SIGTERM)
    assert any("xy[section.M1]" in text for text in run.kept)


# The editor


def test_a_signal_while_the_editor_has_the_terminal_ends_both(tmp_path: Path) -> None:
    editor = tmp_path / "slowly"
    editor.write_text('#!/bin/sh\nstty raw -echo\necho $$ > "$0.pid"\nexec sleep 60\n')
    editor.chmod(0o755)
    run = Run(tmp_path, shell=True, environment={"VISUAL": str(editor)})
    slave = run.open_slave()
    run.session.send("\x0f")
    pid = tmp_path / "slowly.pid"
    until = time.monotonic() + 8.0
    while not (pid.exists() and pid.read_text().strip()):
        assert time.monotonic() < until
        run.session.read(0.01)
    os.kill(run.pid, signal.SIGTERM)
    ended(run, signal.SIGTERM)
    assert sizeless(stty(slave)) == sizeless(str(run.told["before"]))
    assert not Path(f"/proc/{pid.read_text().strip()}").exists()
    assert run.file.read_text() == SMALL
    os.close(slave)
    run.close()


# No terminal


@pytest.mark.parametrize(
    "redirection",
    ["<&-", *(pytest.param(one, marks=pytest.mark.long) for one in ("< /dev/null", "2> /dev/null", "2>&-"))],
)
def test_without_a_terminal_for_input_or_output_it_does_not_begin(tmp_path: Path, redirection: str) -> None:
    file = tmp_path / "run.toml"
    file.write_text(SMALL)
    code = (
        "import os, subprocess, sys; done = subprocess.run("
        "['sh', '-c', '\"$0\" -c \"$APP\" \"$1\" ' + os.environ['REDIRECTION'], sys.executable, sys.argv[1]])\n"
        "print('status', done.returncode)"
    )
    environment = {"APP": APP, "TRACE": str(tmp_path / "trace"), "REDIRECTION": redirection}
    with Session(file, config=tmp_path, environment=environment, code=code) as session:
        session.wait_for("status")
        assert "status 2" in session.text
        assert session.text.count("needs a terminal") == (redirection != "2> /dev/null")
        assert b"\x1b" not in session.received


# Errors of the program


def test_an_unexpected_error_is_one_message_and_loses_nothing(tmp_path: Path) -> None:
    run = Run(tmp_path, shell=True, fault=FAULT)
    slave = run.open_slave()
    run.session.press("down", "down")
    kept = edit(run)
    run.session.received = b""
    run.session.send("space")
    assert 0.0 <= run.wait_for_end(read=True) <= LIMIT
    run.session.settle()
    assert run.status == 70
    assert run.kept == [kept]
    assert sizeless(stty(slave)) == sizeless(str(run.told["before"]))
    for mode in RESTORED:
        assert mode in run.session.received
    after = run.session.received.rpartition(b"\x1b[?1004l")[2].decode()
    assert after.count("\n") == 1
    assert "internal error: ZeroDivisionError" in after
    assert "unsaved changes were kept" in after
    assert "Traceback" not in after
    assert "\x1b" not in after
    log = tmp_path / "state" / "budget" / "log" / "faults.log"
    assert str(log) in after
    assert "ZeroDivisionError" in log.read_text()
    os.close(slave)
    run.close()


@pytest.mark.long
def test_a_full_disk_at_the_end_is_told(tmp_path: Path) -> None:
    fault = """
import errno
from budget.storage import keeping
def full(record, folder):
    raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
keeping.Keeper.__init__.__kwdefaults__["write"] = full
"""
    run = Run(tmp_path, shell=True, fault=fault)
    run.session.press("down", "down")
    edit(run)
    run.session.wait_for("not kept for recovery")
    os.kill(run.pid, signal.SIGTERM)
    ended(run, signal.SIGTERM)
    run.session.settle()
    assert "unsaved changes were NOT kept: No space left on device" in run.session.text.replace("\n", "")
    run.close()
