"""The user's own editor: how it is called, and what comes of it."""

from __future__ import annotations

import contextlib
import os
import shutil
import signal
import sys
from collections.abc import Callable, Iterator, Mapping
from pathlib import Path
from types import SimpleNamespace
from typing import TYPE_CHECKING, cast

import pytest
from textual.app import SuspendNotSupported

from budget.description import Level
from budget.document import Document
from budget.report.located import Located
from budget.screens import outside, saving
from budget.screens.chooser import Choice, Offer
from budget.screens.outside import EditorError, edit_outside, editor_command
from budget.screens.rows import Row, tree
from tests.terminal.conftest import SMALL

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp


def command(environment: Mapping[str, str], path: str = "run.toml", line: int | None = 12) -> list[str]:
    return editor_command(environment, Path(path), line, find=lambda program, **_: str(program))


@pytest.mark.parametrize(
    ("environment", "words"),
    [
        ({}, ["vi", "+12", "run.toml"]),
        ({"EDITOR": "ed"}, ["ed", "run.toml"]),
        ({"EDITOR": "nano", "VISUAL": "vim"}, ["vim", "+12", "run.toml"]),
        ({"EDITOR": "nano", "VISUAL": " "}, ["nano", "+12", "run.toml"]),
        ({"EDITOR": "nano", "VISUAL": ""}, ["nano", "+12", "run.toml"]),
        ({"VISUAL": "/usr/bin/vim.basic -u NONE"}, ["/usr/bin/vim.basic", "-u", "NONE", "+12", "run.toml"]),
        ({"VISUAL": "emacs29 -nw"}, ["emacs29", "-nw", "+12", "run.toml"]),
        ({"VISUAL": "emacs-nox"}, ["emacs-nox", "+12", "run.toml"]),
        ({"VISUAL": "hx"}, ["hx", "run.toml:12"]),
        ({"VISUAL": "code --wait"}, ["code", "--wait", "--goto", "run.toml:12"]),
        ({"VISUAL": "kate --block"}, ["kate", "--block", "--line", "12", "run.toml"]),
        ({"VISUAL": "'/opt/my editor/vi'"}, ["/opt/my editor/vi", "+12", "run.toml"]),
        ({"VISUAL": "mate-terminal -e vi"}, ["mate-terminal", "-e", "vi", "run.toml"]),
        ({"VISUAL": "env LANG=C vi"}, ["env", "LANG=C", "vi", "run.toml"]),
        ({"VISUAL": "vi; rm -rf $HOME `id` | more"},
         ["vi;", "rm", "-rf", "$HOME", "`id`", "|", "more", "run.toml"]),
    ],
)  # fmt: skip
def test_the_words_that_call_an_editor(environment: dict[str, str], words: list[str]) -> None:
    assert command(environment) == words


@pytest.mark.parametrize("environment", [{}, {"EDITOR": "hx"}, {"EDITOR": "code -w"}, {"EDITOR": "kate"}])
def test_without_a_line_there_is_the_file_alone(environment: dict[str, str]) -> None:
    words = environment.get("EDITOR", "vi").split()
    assert command(environment, line=None) == [*words, "run.toml"]


@pytest.mark.parametrize("name", ["-x.toml", "+12", "+x.toml"])
def test_a_file_that_could_be_taken_for_an_option_is_named_whole(name: str) -> None:
    assert command({}, name) == ["vi", "+12", str(Path.cwd() / name)]


def test_an_odd_name_of_a_file_stays_one_word() -> None:
    assert command({"EDITOR": "hx"}, "a b {line} $X.toml") == ["hx", "a b {line} $X.toml:12"]


def test_a_tilde_is_the_home_folder(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("HOME", "/home/quill")
    assert command({"EDITOR": "~/bin/vi"})[0] == "/home/quill/bin/vi"


@pytest.mark.parametrize(
    ("environment", "said"),
    [
        ({}, "set VISUAL or EDITOR"),
        ({"VISUAL": "vi 'x"}, "VISUAL holds a quote"),
        ({"EDITOR": 'vi "x', "VISUAL": ""}, "EDITOR holds a quote"),
        ({"EDITOR": "no-such-editor -x"}, "no-such-editor, which EDITOR names, was not found"),
        ({"VISUAL": "/no/such/editor", "EDITOR": "vi"}, "/no/such/editor, which VISUAL names"),
        ({"VISUAL": "''"}, "VISUAL names no program"),
        ({"VISUAL": "# vi"}, "VISUAL"),
    ],
)
def test_without_an_editor_it_says_what_to_do(environment: dict[str, str], said: str, tmp_path: Path) -> None:
    with pytest.raises(EditorError, match=said):
        editor_command({**environment, "PATH": str(tmp_path)}, Path("run.toml"), 1)


def test_the_path_of_the_environment_is_searched(tmp_path: Path) -> None:
    editor = tmp_path / "scribble"
    editor.write_text("#!/bin/sh\n")
    editor.chmod(0o755)
    environment = {"PATH": str(tmp_path), "EDITOR": "scribble"}
    assert editor_command(environment, Path("run.toml"), 1) == ["scribble", "run.toml"]


# What comes of it


class Desk:
    """What stands for the app: a document, a cursor, and what was asked for."""

    def __init__(self, document: Document, row: Row | None) -> None:
        self.document, self.ledger, self.at = document, SimpleNamespace(row=row), "ledger"
        self.choosers: dict[str, object] = {}
        self.done: list[str] = []
        self.said: list[str] = []
        self.offered: Offer | None = None
        self.child: object = None
        self.hands_over = True
        self.saving = None

    def say(self, message: str, role: str = "") -> None:
        self.said.append(f"{role}: {message}" if role else message)

    def keep_now(self) -> bool:
        self.done.append("keep")
        return True

    def look_again(self) -> None:
        self.done.append("look")

    def offer(self, offer: Offer) -> None:
        self.offered = offer

    @contextlib.contextmanager
    def suspend(self) -> Iterator[None]:
        if not self.hands_over:
            raise SuspendNotSupported("no")
        self.done.append("suspend")
        yield
        self.done.append("resume")

    def edit(self) -> int | None:
        return edit_outside(cast("BudgetApp", self))


@pytest.fixture
def desk(tmp_path: Path) -> Desk:
    path = tmp_path / "run.toml"
    path.write_text(SMALL)
    document = Document.open(path)
    row = next(row for row in tree(document.snapshot.description) if row.id == "M1" and row.kind == "section")
    return Desk(document, row)


Script = Callable[[str], Path]


@pytest.fixture
def script(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Script:
    """Make an editor of a few lines of Python, under a name that takes a line as vi does."""

    def make(code: str) -> Path:
        editor = tmp_path / "bin" / "vi"
        editor.parent.mkdir(exist_ok=True)
        editor.write_text(f"#!{sys.executable}\nimport os, signal, sys\n{code}\n")
        editor.chmod(0o755)
        monkeypatch.setenv("VISUAL", str(editor))
        return editor

    return make


def test_it_works_on_the_file_at_the_row_between_keeping_and_looking(
    desk: Desk, script: Script, tmp_path: Path
) -> None:
    script("open(sys.argv[2], 'a').write('# ' + sys.argv[1])")
    line = SMALL.split("\n").index("[section.M1]") + 1
    assert desk.edit() == 0
    assert (tmp_path / "run.toml").read_text() == f"{SMALL}# +{line}"
    assert desk.done == ["keep", "suspend", "resume", "look"]
    assert desk.said == []
    assert desk.child is None


def test_the_line_is_that_of_the_text_or_the_finding_in_front(desk: Desk, script: Script, tmp_path: Path) -> None:
    script("open(sys.argv[2] + '.line', 'w').write(sys.argv[1])")
    told = tmp_path / "run.toml.line"
    desk.at, desk.text = "text", SimpleNamespace(cursor_location=(3, 5))  # type: ignore[attr-defined]
    desk.edit()
    assert told.read_text() == "+4"
    finding = Located(Level.WARNING, "velocity", "it is fast", (), "", "", "", 17, 1)
    desk.at, desk.choosers = "findings", {"findings": SimpleNamespace(marked=Choice(("",), finding))}
    desk.edit()
    assert told.read_text() == "+17"


def test_without_a_row_it_opens_the_file(desk: Desk, script: Script, tmp_path: Path) -> None:
    script("open(sys.argv[-1] + '.words', 'w').write(repr(sys.argv[1:]))")
    desk.ledger.row = None
    assert desk.edit() == 0
    assert (tmp_path / "run.toml.words").read_text() == repr([str(tmp_path / "run.toml")])


@pytest.mark.parametrize(
    ("code", "status", "said"),
    [
        ("sys.exit(3)", 3, "error: vi ended with exit status 3"),
        ("os.kill(os.getpid(), signal.SIGKILL)", -9, "error: vi was ended by SIGKILL"),
    ],
)
def test_a_bad_end_is_told_and_the_file_is_looked_at_all_the_same(
    desk: Desk, script: Script, code: str, status: int, said: str
) -> None:
    script(code)
    assert desk.edit() == status
    assert desk.said == [said]
    assert desk.done[-1] == "look"


def test_keys_that_send_signals_reach_the_editor_alone(desk: Desk, script: Script, tmp_path: Path) -> None:
    script(
        "open(sys.argv[2] + '.kinds', 'w').write(repr([signal.getsignal(n) for n in (2, 3, 20)]))\n"
        "os.kill(os.getppid(), signal.SIGINT); os.kill(os.getppid(), signal.SIGQUIT)\n"
        "os.kill(os.getpid(), signal.SIGQUIT)"
    )
    before = [signal.getsignal(number) for number in (signal.SIGINT, signal.SIGQUIT, signal.SIGTSTP)]
    assert desk.edit() == -signal.SIGQUIT
    told = (tmp_path / "run.toml.kinds").read_text()
    assert "SIG_IGN" not in told
    assert told.count("SIG_DFL") == 2
    assert "default_int_handler" in told
    assert [signal.getsignal(number) for number in (signal.SIGINT, signal.SIGQUIT, signal.SIGTSTP)] == before


def test_the_editor_can_be_reached_while_it_runs(desk: Desk, script: Script, monkeypatch: pytest.MonkeyPatch) -> None:
    script("signal.pause()")
    wait = outside._wait

    def end(child: object) -> int:
        assert desk.child is child
        child.terminate()  # type: ignore[attr-defined]
        return wait(child)  # type: ignore[arg-type]

    monkeypatch.setattr(outside, "_wait", end)
    assert desk.edit() == -signal.SIGTERM
    assert desk.child is None


def test_what_can_t_be_started_is_told(desk: Desk, script: Script) -> None:
    script("").write_bytes(b"\x7fELF, or so it says")
    assert desk.edit() is None
    assert desk.said[0].startswith("error: vi could not be started: ")
    assert desk.done == ["keep", "suspend", "resume", "look"]


def test_without_an_editor_the_terminal_is_not_handed_over(desk: Desk, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("VISUAL", "no-such-editor")
    assert desk.edit() is None
    assert "was not found" in desk.said[0]
    assert desk.done == []


def test_a_terminal_that_can_t_be_handed_over_is_told(desk: Desk, script: Script) -> None:
    script("")
    desk.hands_over = False
    assert desk.edit() is None
    assert "can't be handed over" in desk.said[0]


def test_what_is_not_saved_is_asked_about_first(
    desk: Desk, script: Script, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    script("open(sys.argv[2] + '.seen', 'wb').write(open(sys.argv[2], 'rb').read())")

    def save(_: object, then: Callable[[], object]) -> None:
        desk.document.save()
        then()

    monkeypatch.setattr(saving, "save", save)
    desk.document.replace_text(f"{SMALL}# mine\n", "write")
    assert desk.edit() is None
    assert desk.done == []
    assert desk.offered is not None
    assert [choice.cells[0] for choice in desk.offered.choices] == ["save and edit", "stay"]
    desk.offered.take(desk.offered.choices[1].value)
    assert desk.done == []
    desk.offered.take(desk.offered.choices[0].value)
    assert desk.done == ["keep", "suspend", "resume", "look"]
    assert (tmp_path / "run.toml.seen").read_text() == f"{SMALL}# mine\n"


def test_a_run_without_a_file_is_asked_about_too(desk: Desk, script: Script) -> None:
    script("")
    desk.document = Document.of(SMALL)
    assert desk.edit() is None
    assert desk.offered is not None
    assert desk.done == []


@pytest.mark.skipif(shutil.which("vi") is None, reason="vi is not installed")
def test_the_usual_editor_takes_the_line(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_text("a\nb\nc\n")
    words = editor_command(os.environ | {"VISUAL": "", "EDITOR": ""}, path, 2)
    assert words == ["vi", "+2", str(path)]
