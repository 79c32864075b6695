"""The app with a log of what it was made to hold and to save, and a shell above it as a user has one."""

from __future__ import annotations

import contextlib
import json
import os
import re
import select
import subprocess
import sys
import termios
import time
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from budget.storage import StorageError
from budget.storage.records import Record, read_record
from tests.terminal.session import Session

SMALL = (Path(__file__).parents[1] / "screens" / "cottage.toml").read_text()

NAMED = "Boiler pump"
"""What stands at the head of the screen of `SMALL`."""

APP = """
import json, os, sys, time
from pathlib import Path
from budget.document import Document
from budget.screens.terminal import prepare
prepare(os.environ)
from budget.screens.app import BudgetApp

log = os.open(os.environ["TRACE"], os.O_WRONLY | os.O_APPEND | os.O_CREAT, 0o600)

def tell(what, text):
    os.write(log, (json.dumps([time.monotonic(), what, text]) + "\\n").encode())

def traced(owner, name, what, text):
    real = getattr(owner, name)
    def method(self, *given, **named):
        result = real(self, *given, **named)
        tell(what, text(self, result))
        return result
    setattr(owner, name, method)

traced(Document, "_show", "committed", lambda self, _: self.snapshot.text)
traced(Document, "prepare", "saving", lambda _, saving: saving.text)
traced(Document, "saved", "saved", lambda self, _: self.saved_text)
written = BudgetApp.on_text_area_changed

def on_text_area_changed(self):
    written(self)
    tell("committed", self.written or self.document.snapshot.text)

BudgetApp.on_text_area_changed = on_text_area_changed

if slow := float(os.environ.get("SLOW", 0)):
    fsync = os.fsync
    os.fsync = lambda handle: (time.sleep(slow), fsync(handle))[1]
exec(os.environ.get("FAULT", ""))
from budget.screens import run
tell("begun", os.ttyname(0) if os.isatty(0) else "")
sys.exit(run(Path(sys.argv[1])))
"""
"""Notes the time of each change right after it, before the app can do anything about keeping it."""

SHELL = """
import json, os, signal, subprocess, sys
signal.alarm(300)
for number in (signal.SIGHUP, signal.SIGTTOU):
    signal.signal(number, signal.SIG_IGN)
told = os.environ["TOLD"]

def tell(**what):
    with open(told + ".new", "w") as file:
        json.dump(what, file)
    os.replace(told + ".new", told)

def lead():
    os.setpgid(0, 0)
    os.tcsetpgrp(0, os.getpid())
    for number in (signal.SIGHUP, signal.SIGTTOU):
        signal.signal(number, signal.SIG_DFL)

before = subprocess.run(["stty", "-a"], capture_output=True, text=True).stdout
app = subprocess.Popen([sys.executable, "-c", os.environ["CODE"], *sys.argv[1:]], preexec_fn=lead)
tell(pid=app.pid, before=before, status=None)
status = app.wait()
tell(pid=app.pid, before=before, status=status)
signal.pause()
"""
"""Leads the terminal's session, as a shell does: a hang-up reaches it and not the app."""


@dataclass(frozen=True, slots=True)
class Note:
    """What the app did at some time of the machine's clock."""

    time: float
    what: str
    text: str


class Run:
    """One run of the traced app in a pseudo-terminal, in a folder of its own."""

    def __init__(
        self,
        folder: Path,
        *,
        shell: bool,
        slow: float = 0.0,
        fault: str = "",
        wait: str = "required",
        first: str = "",
        environment: Mapping[str, str] | None = None,
    ) -> None:
        """Start it on a file, for the first time or once more, and wait until it shows the run.

        With `first` it is started on another run with that text, and goes on to the file from there.
        """
        self.folder, self.shell = folder, shell
        self.file, self._trace, self._told = folder / "run.toml", folder / "trace", folder / "told"
        if not self.file.exists():
            self.file.write_text(SMALL, encoding="utf-8", newline="")
        for old in (self._trace, self._told):
            old.unlink(missing_ok=True)
        whole = {
            **(environment or {}),
            "CODE": APP, "TRACE": str(self._trace), "TOLD": str(self._told), "SLOW": str(slow), "FAULT": fault,
            "PYTHONPATH": str(Path(__file__).parents[2]),
        }  # fmt: skip
        start = folder / "first.toml" if first else self.file
        if first:
            start.write_text(first, encoding="utf-8")
        self.session = Session(start, config=folder, environment=whole, code=SHELL if shell else APP)
        try:
            if wait:
                self.session.wait_for(wait, 30.0)
            if first:
                self._go_on()
        except BaseException:
            self.session.close()
            raise

    def _go_on(self) -> None:
        self.session.send("ctrl+t")
        self.session.wait_for("Open another run", 30.0)
        self.session.send(*self.file.name)
        self.session.wait_for("1 of 1", 30.0)  # as it is written, or once the list is there, as it was found
        self.session.send("enter")
        self.session.wait_for(NAMED, 30.0)

    @property
    def notes(self) -> list[Note]:
        """What the app did so far."""
        try:
            lines = self._trace.read_text().split("\n")
        except FileNotFoundError:
            return []
        return [Note(*json.loads(line)) for line in lines[:-1]]

    def texts(self, *kinds: str) -> list[Note]:
        """What it was made to hold, or to save."""
        return [note for note in self.notes if note.what in kinds]

    @property
    def committed(self) -> str:
        """The text of the last edit."""
        found = self.texts("committed")
        return found[-1].text if found else SMALL

    def wait_for_commit(self, number: int, limit: float = 5.0) -> bool:
        """Read until so many edits are committed; return whether they are."""
        until = time.monotonic() + limit
        while len(self.texts("committed")) < number:
            if time.monotonic() > until:
                return False
            self.session.read(0.002)
        return True

    def edit(self, value: str) -> int:
        """Send all keys of an edit of the row in hand at once; return how many edits were committed before."""
        before = len(self.texts("committed"))
        self.session.send("=", f"length = {value} m", "enter")
        return before

    # The process

    @property
    def told(self) -> dict[str, object]:
        """What the shell knows of the app."""
        try:
            told: dict[str, object] = json.loads(self._told.read_text())
        except FileNotFoundError:
            return {}
        return told

    @property
    def pid(self) -> int:
        """The app's process."""
        return int(str(self.told["pid"])) if self.shell else self.session.pid

    @property
    def status(self) -> int | None:
        """How the app ended: its exit status, or the signal as a negative number; None while it runs."""
        if not self.shell:
            return self.session.code if self.session.ended else None
        status = self.told.get("status")
        return None if status is None else int(str(status))

    def wait_for_end(self, *, read: bool, limit: float = 10.0) -> float:
        """Wait until the app has ended; return after how many seconds, negative where it did not."""
        begun = time.monotonic()
        while self.status is None:
            if time.monotonic() - begun > limit:
                return -1.0
            if not (read and self.session.read(0.005)):
                time.sleep(0.005)
        return time.monotonic() - begun

    def close(self) -> None:
        """End everything that is left."""
        if self.shell and self.status is None and self.told:
            with contextlib.suppress(ProcessLookupError):
                os.kill(self.pid, 9)
        self.session.close()

    # The terminal

    def open_slave(self) -> int:
        """Open the app's side of the terminal."""
        return os.open(self.texts("begun")[0].text, os.O_RDWR | os.O_NOCTTY)

    def stall(self, slave: int, *, deep: bool) -> bool:
        """Read nothing more and have much painted until the link takes no more; return whether it came to that.

        Deep is a stall in which the app itself waits, and not only what sends for it.
        """
        full_since, sizes = None, ((200, 50), (80, 24), (132, 43))
        begun = time.monotonic()
        for step in range(400):
            self.session.resize(*sizes[step % 3])
            time.sleep(0.02)
            _, room, _ = select.select([], [slave], [], 0)
            now = time.monotonic()
            full_since = None if room else full_since or now
            if full_since is not None and now - full_since > (1.5 if deep else 0.25):
                return True
            if now - begun > 8.0:
                break
        return False

    # What is left

    @property
    def records(self) -> list[Record | str]:
        """The records there are, or what is wrong with one."""
        found: list[Record | str] = []
        for file in sorted((self.folder / "state" / "budget" / "unsaved").glob("*.record")):
            try:
                record = read_record(file)
            except StorageError as wrong:
                found.append(str(wrong))
            else:
                found.append(f"{file.name}: {record.fault}" if record.fault else record)
        return found

    @property
    def kept(self) -> list[str]:
        """The texts of the records."""
        return [record.text for record in self.records if isinstance(record, Record) and record.text is not None]

    @property
    def environment(self) -> dict[str, str]:
        """That of a command that is to find the records."""
        folders = {"XDG_STATE_HOME": str(self.folder / "state"), "XDG_CONFIG_HOME": str(self.folder)}
        return {**os.environ, **folders, "LC_ALL": "C.UTF-8"}


def budget(run: Run, *words: str) -> subprocess.CompletedProcess[str]:
    """Call the command line."""
    code = "import sys; from budget.commands import main; sys.exit(main(sys.argv[1:]))"
    return subprocess.run(
        [sys.executable, "-c", code, *words],
        env=run.environment,
        capture_output=True,
        text=True,
        timeout=60,
        check=False,
    )


def stty(handle: int) -> str:
    """Return what stty says of a terminal."""
    return subprocess.run(["stty", "-a"], stdin=handle, capture_output=True, text=True, check=False).stdout


def sizeless(modes: str) -> str:
    """Return what stty said without the size of the window."""
    return re.sub(r"rows [0-9]+; columns [0-9]+;", "", modes).strip()


def cooked(handle: int) -> bool:
    """Whether a terminal takes lines and shows what is typed."""
    flags = termios.tcgetattr(handle)[3]
    return bool(flags & termios.ICANON and flags & termios.ECHO and flags & termios.ISIG)
