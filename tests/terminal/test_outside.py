"""The user's own editor in the terminal of the app, and the way back."""

from __future__ import annotations

import os
import re
import signal
import sys
import termios
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from tests.terminal.conftest import SMALL, Open
from tests.terminal.session import Session
from tests.terminal.test_terminal import BACK

ctrl_o = "\x0f"

BEGIN = """\
import os, signal, subprocess, sys
modes = {word.strip(";") for word in subprocess.run(["stty", "-a"], capture_output=True, text=True).stdout.split()}
cooked = {"icanon", "echo", "isig", "icrnl", "ixon"} <= modes
print("terminal", "as before" if cooked else sorted(modes), flush=True)
print("called with", sys.argv[1], "pid", os.getpid(), flush=True)
file = sys.argv[2]
"""

Edit = Callable[..., Session]


@pytest.fixture
def edited(opened: Open, tmp_path: Path) -> Edit:
    """Open a run in the app, with an editor of a few lines of Python."""

    def start(code: str, **changes: object) -> Session:
        editor = tmp_path / "vi"
        editor.write_text(f"#!{sys.executable}\n{BEGIN}{code}\n")
        editor.chmod(0o755)
        environment = {"VISUAL": f"'{editor}'", "XDG_STATE_HOME": str(tmp_path / "state")}
        return opened(environment=environment, **changes)

    return start


def modes(session: Session) -> list[object]:
    return list(termios.tcgetattr(session._fd)[:4])


def running(pid: int) -> bool:
    try:
        os.kill(pid, 0)
    except ProcessLookupError:
        return False
    return "\nState:\tZ" not in Path(f"/proc/{pid}/status").read_text()


def test_the_editor_has_the_terminal_and_what_it_writes_is_taken(edited: Edit, tmp_path: Path) -> None:
    session = edited("input('type: ')\nopen(file, 'a').write('# by hand\\n')")
    session.press("down", "down")
    session.send(ctrl_o)
    session.wait_for("type:")
    assert "terminal as before" in session.text
    line = SMALL.split("\n").index("[section.M1]") + 1
    assert f"called with +{line} " in session.text
    assert BACK in session.received
    session.send("some letters", "enter")
    session.wait_for("reloaded")
    assert (tmp_path / "run.toml").read_text() == f"{SMALL}# by hand\n"
    assert "required 20.88" in session.text
    assert any(row.startswith("» M1") for row in session.lines)
    session.press("T", "down", "down")
    session.screen.reset()
    session.send(ctrl_o)
    session.wait_for("type:")
    assert f"called with +{line + 2} " in session.text
    session.send("enter")
    session.wait_for("reloaded")
    session.press("escape", "u")
    session.wait_for("not saved")
    assert not session.ended


def test_after_an_editor_that_changed_nothing_all_is_as_it_was(edited: Edit) -> None:
    session = edited("input('type: ')")
    shown = session.text
    session.send(ctrl_o)
    session.wait_for("type:")
    session.send("enter")
    session.wait_for("required")
    session.settle(0.3)
    assert session.text == shown
    session.send("ctrl+q")
    assert session.wait_for_end() == 0


def test_a_terminal_left_in_a_mess_is_put_right_and_a_bad_end_told(edited: Edit) -> None:
    session = edited(
        "subprocess.run(['stty', 'raw', '-echo'])\n"
        "print('\\033[?1000h\\033[5;10r\\033[?6h', end='', flush=True)\n"
        "sys.exit(3)",
        wait="",
    )
    before = modes(session)
    session.wait_for("required")
    session.send(ctrl_o)
    session.wait_for("vi ended with exit status 3")
    assert session.lines[0].strip()
    assert any(row.startswith("»") for row in session.lines)
    session.press("down")
    session.send("ctrl+q")
    assert session.wait_for_end() == 0
    assert modes(session) == before


def test_an_editor_that_was_killed_is_told(edited: Edit) -> None:
    session = edited("os.kill(os.getpid(), signal.SIGKILL)")
    session.send(ctrl_o)
    session.wait_for("vi was ended by SIGKILL")
    session.press("down")
    assert not session.ended


def test_what_the_keyboard_sends_ends_the_editor_and_not_the_app(edited: Edit) -> None:
    session = edited("try:\n    input('type: ')\nexcept KeyboardInterrupt:\n    sys.exit(4)")
    session.send(ctrl_o)
    session.wait_for("type:")
    session.send("ctrl+c")
    session.wait_for("vi ended with exit status 4")
    assert not session.ended


def test_an_editor_that_is_stopped_gives_the_shell_the_word(edited: Edit) -> None:
    session = edited("os.kill(os.getpid(), signal.SIGSTOP)\ninput('on again: ')")
    session.send(ctrl_o)
    session.wait_for_stop()
    assert "on again" not in session.text
    session.signal(signal.SIGCONT)
    session.wait_for("on again:")
    session.send("enter")
    session.wait_for("required")


def test_a_signal_ends_the_editor_too(edited: Edit) -> None:
    session = edited("print('waiting', flush=True)\nsignal.pause()")
    session.send(ctrl_o)
    session.wait_for("waiting")
    called = re.search(r"called with .* pid ([0-9]+)", session.text)
    assert called is not None
    pid = int(called[1])
    session.signal(signal.SIGTERM)
    assert session.wait_for_end() == 128 + signal.SIGTERM
    until = time.monotonic() + 5.0
    while running(pid) and time.monotonic() < until:
        time.sleep(0.02)
    assert not running(pid)


def test_what_is_not_saved_is_saved_first_where_that_is_wanted(edited: Edit, tmp_path: Path) -> None:
    session = edited(
        "print('note' in open(file).read(), flush=True)\ninput('type: ')\nopen(file, 'a').write('# more\\n')"
    )
    session.press("down", "down", "=", "note = by hand", "enter")
    session.send(ctrl_o)
    session.wait_for("save and edit")
    assert "by hand" not in (tmp_path / "run.toml").read_text()
    session.send("enter")
    session.wait_for("type:")
    assert "True" in session.text
    assert "by hand" in (tmp_path / "run.toml").read_text()
    session.send("enter")
    session.wait_for("reloaded")
    assert "not saved" not in session.text
    assert any(row.startswith("» M1") for row in session.lines)
    assert (tmp_path / "run.toml").read_text().endswith("# more\n")
