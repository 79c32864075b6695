"""The app on real terminals: where it refuses to run, how it ends, and what it never lets through."""

from __future__ import annotations

import signal
import subprocess
import sys
from pathlib import Path

import pytest

from budget.screens.terminal import objection, prepare
from tests.terminal.conftest import SMALL, Open
from tests.terminal.session import RUN, Session

BACK = b"\x1b[?1049l"
CURSOR = b"\x1b[?25h"


@pytest.mark.parametrize(
    ("environment", "terminals", "encoding", "told"),
    [
        ({"TERM": "xterm"}, False, "UTF-8", "needs a terminal"),
        ({"TERM": "dumb"}, True, "UTF-8", 'TERM is "dumb"'),
        ({}, True, "UTF-8", 'TERM is ""'),
        ({"TERM": "xterm"}, True, "ANSI_X3.4-1968", "not UTF-8"),
    ],
)
def test_it_refuses_with_one_line(environment: dict[str, str], terminals: bool, encoding: str, told: str) -> None:
    refused = objection(environment, terminals=terminals, encoding=encoding, ascii_only=False)
    assert told in refused
    assert "\n" not in refused


def test_ascii_needs_no_utf_8() -> None:
    assert objection({"TERM": "vt100"}, terminals=True, encoding="ANSI_X3.4-1968", ascii_only=True) == ""


def test_a_wrong_colour_system_is_mended_before_it_can_crash() -> None:
    environment = {"TERM": "linux", "TEXTUAL_COLOR_SYSTEM": "plaid"}
    prepare(environment)
    assert environment["TEXTUAL_COLOR_SYSTEM"] == "auto"
    assert environment["TEXTUAL_DISABLE_KITTY_KEY"] == "1"


def test_in_a_pipe_it_ends_at_once(tmp_path: Path) -> None:
    file = tmp_path / "run.toml"
    file.write_text(SMALL)
    command = [sys.executable, "-c", RUN, str(file)]
    ended = subprocess.run(command, capture_output=True, text=True, timeout=20, check=False)
    assert ended.returncode == 2
    assert ended.stderr.count("\n") == 1
    assert "needs a terminal" in ended.stderr


def test_a_file_that_is_not_there_is_told_in_one_line(tmp_path: Path) -> None:
    with Session(tmp_path / "none.toml", config=tmp_path) as session:
        assert session.wait_for_end() == 2
        assert "could not be read" in session.text
        assert BACK not in session.received


def test_a_signal_ends_it_with_the_terminal_put_back_and_a_closed_terminal_ends_it(opened: Open) -> None:
    numbers = (signal.SIGTERM, signal.SIGHUP)
    *told, left = (opened(wait="") for _ in range(3))
    for session in (*told, left):
        session.wait_for("required")
    for session, number in zip(told, numbers, strict=True):
        session.signal(number)
    left.hang_up()
    for session, number in zip(told, numbers, strict=True):
        assert session.wait_for_end() == 128 + number
        assert BACK in session.received
        assert CURSOR in session.received
    assert left.wait_for_end() == 128 + signal.SIGHUP


def test_after_a_stop_everything_is_painted_again(opened: Open) -> None:
    session = opened()
    session.send("ctrl+z")
    session.wait_for_stop()
    assert BACK in session.received
    session.received = b""
    session.screen.reset()
    session.signal(signal.SIGCONT)
    session.wait_for("required")
    session.press("down", "enter")
    assert "computed" in session.text or "Escape leave" in session.text


def test_ascii_mode_sends_nothing_else(opened: Open) -> None:
    session = opened(
        SMALL.replace("Boiler pump", "Kesselpumpe für Süd, Ø 18"),
        environment={"LC_ALL": "C", "LANG": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"},
        config="ascii = true",
    )
    session.press("down", "v", "escape", "s", "escape")
    assert "fur Sud" in session.text
    assert any(line.startswith(">") for line in session.lines)
    assert session.received.isascii()


def test_it_is_readable_on_any_terminal(opened: Open) -> None:
    environments = ({"TERM": "screen"}, {"TERM": "vt220"}, {"NO_COLOR": "1"}, {"COLORTERM": "truecolor"})
    sessions = [opened(environment=environment, wait="") for environment in environments]
    for session in sessions:
        session.wait_for("required")
        session.press("down", "down")
        assert "required 20.88" in session.text
        assert "0.49" in session.text
        row = next(y for y, line in enumerate(session.lines) if line.startswith("» M1"))
        cells = session.screen.buffer[row]
        x = session.lines[row].index("7.5")
        assert cells[x].reverse
        assert not cells[x + 12].reverse


def test_a_theme_paints_no_text_in_its_own_background_on_a_console_of_16_colours(opened: Open) -> None:
    session = opened(config='theme = "light"', environment={"TERM": "linux"})
    for keys in (("down", "down", "enter", "9"), ("escape", "v"), ("escape", "T"), ("escape", "?", "Units", "enter")):
        session.press(*keys)
        for y, line in enumerate(session.lines):
            for x, letter in enumerate(line):
                cell = session.screen.buffer[y][x]
                if letter not in " ▊▎▔▁░":
                    assert cell.fg != cell.bg or cell.fg == "default", (keys, y, x, line)


def test_a_terminal_of_another_size_is_filled_and_put_back_at_the_end(opened: Open) -> None:
    session = opened()
    session.press("down", "down")
    session.resize(130, 40)
    session.wait_for("Row detail")
    assert "sum so far" in session.text or "sum" in session.text
    session.resize(60, 15)
    session.settle(0.2)
    assert "Row detail" not in session.text
    assert "M1" in session.text
    assert len(session.lines) == 15
    session.send("ctrl+q")
    assert session.wait_for_end() == 0
    assert BACK in session.received
    assert CURSOR in session.received
