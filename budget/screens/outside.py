"""The run's file in the user's own editor, and back: the terminal is handed over, and the file is looked at then."""

from __future__ import annotations

import contextlib
import os
import re
import shlex
import shutil
import signal
import subprocess
import sys
import termios
from collections.abc import Callable, Iterator, Mapping
from pathlib import Path
from typing import TYPE_CHECKING

from textual.app import SuspendNotSupported

from budget.report.located import Located
from budget.report.plain import plain
from budget.screens import saving
from budget.screens.asking import ask
from budget.screens.writing import index_of

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

STANDARD = "vi"
"""The editor where none is named; every POSIX system has one."""

_PLUS = ("+{line}", "{file}")
_COLON = ("{file}:{line}",)
_GO_TO = ("--goto", "{file}:{line}")
_LINE = ("--line", "{line}", "{file}")

FORMS: Mapping[str, tuple[str, ...]] = {
    **dict.fromkeys(("vi", "vim", "nvim", "view", "rvim", "gvim", "ex", "elvis", "nvi", "vile", "vis", "kak"), _PLUS),
    **dict.fromkeys(("emacs", "emacsclient", "mg", "zile", "jmacs", "jed", "joe", "jstar", "jpico", "ne"), _PLUS),
    **dict.fromkeys(("nano", "rnano", "pico", "mcedit", "micro", "gedit", "pluma", "xed"), _PLUS),
    **dict.fromkeys(("hx", "helix", "subl", "zed"), _COLON),
    **dict.fromkeys(("code", "codium"), _GO_TO),
    **dict.fromkeys(("kate", "kwrite", "geany", "mate"), _LINE),
}
"""By program how it is told a line; one that is not known is told none, as it might take that for a file."""

_VARIANT = re.compile(r"\..*|[0-9]+|-(?:nox|gtk|lucid|tiny|insiders|oss)")
"""What may stand behind the name of a program: vim.basic, emacs29, emacs-nox."""

_QUIET = "\x1b[?1000l\x1b[?1002l\x1b[?1003l\x1b[?1006l\x1b[?2004l\x1b[r\x1b[?6l\x1b[?1l\x1b>\x1b[0m"
"""Undoes what an editor that came to a bad end may have left: reports, a scrolled part of the screen, colours."""


class EditorError(Exception):
    """There is no editor that could be called; the text says why and what to do."""


def editor_command(
    environment: Mapping[str, str],
    path: Path,
    line: int | None = None,
    find: Callable[..., str | None] = shutil.which,
) -> list[str]:
    """Return the words that call the user's editor on a file, at a line: $VISUAL, else $EDITOR, else vi.

    Raises EditorError where there is none, or it can't be understood.
    """
    variable = next((name for name in ("VISUAL", "EDITOR") if environment.get(name, "").strip()), None)
    try:
        words = shlex.split(environment[variable]) if variable is not None else [STANDARD]
    except ValueError as wrong:
        raise EditorError(f"{variable} holds a quote that is not closed; correct it") from wrong
    if not words or not words[0]:
        raise EditorError(f"{variable} names no program; set it to your editor")
    program = os.path.expanduser(words[0])  # noqa: PTH111 - a bare name must stay one
    if find(program, path=environment.get("PATH")) is None:
        if variable is None:
            raise EditorError(f"no editor is named, and there is no {STANDARD}; set VISUAL or EDITOR")
        raise EditorError(f"{program}, which {variable} names, was not found; correct {variable}")
    file = str(path.absolute() if str(path).startswith(("-", "+")) else path)
    form = FORMS.get(_known(Path(program).name), ("{file}",)) if line is not None else ("{file}",)
    return [program, *words[1:], *(word.format(file=file, line=line) for word in form)]


def edit_outside(app: BudgetApp) -> int | None:
    """Edit the run's file at the row under the cursor; return the editor's exit status, None where it did not run yet.

    What is not saved is saved first, if the user wants that.
    """
    return _edit(app, _line(app))


def _edit(app: BudgetApp, line: int | None) -> int | None:
    path = app.document.path
    try:
        command = editor_command(os.environ, path or Path(), line)
    except EditorError as wrong:
        app.say(plain(str(wrong)), "error")
        return None
    if path is None or app.document.dirty:
        question = "The run is not saved, and the editor works on its file"
        ask(app, question, (("save and edit", lambda: saving.save(app, then=lambda: _edit(app, line))),))
        return None
    app.keep_now()
    try:
        with app.suspend():
            outcome = _call(app, command)
    except SuspendNotSupported:
        app.say("this terminal can't be handed over to an editor", "error")
        return None
    said = _told(plain(Path(command[0]).name), outcome)
    if said:
        app.say(said, "error")
    app.look_again()
    return outcome if isinstance(outcome, int) else None


def _known(name: str) -> str:
    """Return what a program is known by: its name without what tells variants apart."""
    bare = re.match(r"[a-z]+", name)
    return bare[0] if bare is not None and _VARIANT.fullmatch(name, bare.end()) else name


def _line(app: BudgetApp) -> int | None:
    """Return the line in hand: of the cursor in the text, of a finding, or of the table of the row."""
    if app.at == "text":
        return int(app.text.cursor_location[0]) + 1
    if app.at == "findings":
        marked = app.choosers["findings"].marked
        if marked is not None and isinstance(marked.value, Located):
            return marked.value.line
    if app.ledger.row is None:
        return None
    text, path = app.document.snapshot.text, app.ledger.row.path
    index = index_of(text)
    header = index.header(path) or index.header(path[:2])
    return text.count("\n", 0, header.start) + 1 if header is not None else None


def _call(app: BudgetApp, command: list[str]) -> int | OSError:
    """Run the editor in the terminal and wait for it; return its exit status, or why it could not be started."""
    with _deaf(), _as_it_is() as quiet:
        try:
            # The editor is the user's own choice, and its words are handed over as they are.
            app.child = subprocess.Popen(command, stdout=None if os.isatty(1) else 2)  # noqa: S603
        except OSError as wrong:
            return wrong
        try:
            status = _wait(app.child)
        finally:
            app.child = None
        if status != 0:
            quiet()
        return status


def _wait(child: subprocess.Popen[bytes]) -> int:
    """Wait for the editor to end. Where it is stopped from the keyboard, the app stops too: the shell has the word."""
    while True:
        told = os.waitid(os.P_PID, child.pid, os.WEXITED | os.WSTOPPED | os.WNOWAIT)
        if told is None or told.si_code != os.CLD_STOPPED:
            return child.wait()
        os.kill(os.getpid(), signal.SIGSTOP)
        with contextlib.suppress(ProcessLookupError):
            child.send_signal(signal.SIGCONT)


@contextlib.contextmanager
def _deaf() -> Iterator[None]:
    """Let keys that send signals be the editor's alone; it has them as they were, as a handler ends where it begins."""
    keys = (signal.SIGINT, signal.SIGQUIT, signal.SIGTSTP)
    before = {number: signal.signal(number, lambda *_: None) for number in keys}
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, signal.SIG_DFL if handler is None else handler)


@contextlib.contextmanager
def _as_it_is() -> Iterator[Callable[[], None]]:
    """Give the terminal back as it was, without what was typed or answered for the editor."""
    try:
        before = termios.tcgetattr(0)
    except (termios.error, OSError):
        before = None

    def quiet() -> None:
        with contextlib.suppress(OSError):
            if sys.__stderr__ is not None:
                os.write(sys.__stderr__.fileno(), _QUIET.encode())

    try:
        yield quiet
    finally:
        if before is not None:
            with contextlib.suppress(termios.error, OSError):
                termios.tcsetattr(0, termios.TCSADRAIN, before)
                termios.tcflush(0, termios.TCIFLUSH)


def _told(name: str, outcome: int | OSError) -> str:
    """Say how the editor ended, where that was not well."""
    if isinstance(outcome, OSError):
        return f"{name} could not be started: {outcome.strerror or outcome}"
    if outcome < 0:
        with contextlib.suppress(ValueError):
            return f"{name} was ended by {signal.Signals(-outcome).name}"
    return f"{name} ended with exit status {outcome}" if outcome else ""
