"""Files that nobody would write: refused in a line that says what to do, or shown as plain text, and soon."""

from __future__ import annotations

import contextlib
import io
import json
import os
import resource
import shutil
import signal
import socket
import stat
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from types import FrameType
from typing import NamedTuple

import pytest

from budget.commands import main
from tests.commands.calls import RUN, Caller
from tests.hostile.payloads import MESS, PAYLOADS, obeyed
from tests.hostile.test_screens import POINTER, RAW
from tests.storage.test_files import as_nobody
from tests.terminal.session import Session

SOON = 8.0
"""Seconds in which every call must end, on a busy machine."""

MEMORY = 700 * 2**20
"""Bytes of address space that a process gets where it might be made to fill it."""

LIBRARY = 'format = 1\nlibrary = ["{0}"]\n'


class Case(NamedTuple):
    """A file: how it is made in a folder, and what is said of it; "" where it is read."""

    make: Callable[[Path], Path]
    said: str = ""


def written(content: bytes | str, name: str = "run.toml") -> Callable[[Path], Path]:
    """Return what writes a file."""

    def make(folder: Path) -> Path:
        path = folder / name
        path.write_bytes(content.encode() if isinstance(content, str) else content)
        return path

    return make


def titled(title: str) -> str:
    """Return a run with a title as it stands, not escaped."""
    return RUN.replace("Ferry house", title)


def fifo(folder: Path, name: str = "run.toml") -> Path:
    os.mkfifo(folder / name)
    return folder / name


def bound(folder: Path) -> Path:
    """Make a socket in a folder; its address must be short."""
    path = folder / "run.toml"
    with contextlib.chdir(folder), socket.socket(socket.AF_UNIX) as one:
        one.bind("run.toml")
    return path


def linked(target: str, name: str = "run.toml") -> Callable[[Path], Path]:
    """Return what makes a symbolic link."""

    def make(folder: Path) -> Path:
        (folder / name).symlink_to(target)
        return folder / name

    return make


def with_library(path: str, make: Callable[[Path], object] | None = None) -> Callable[[Path], Path]:
    """Return what makes a run that names a library, and the library."""

    def both(folder: Path) -> Path:
        if make is not None:
            make(folder)
        return written(RUN.replace("format = 1\n", LIBRARY.replace("{0}", path)))(folder)

    return both


def tables(count: int) -> str:
    return RUN + "".join(f"[section.S{n}]\n" for n in range(count))


CASES = {
    "actions": Case(written(titled("[@click=app.quit]x[/] [/] [bold]"))),
    "clipboard": Case(written(titled(PAYLOADS["clipboard"])), "not TOML"),
    "escapes": Case(written(titled(json.dumps(PAYLOADS["clipboard"] + PAYLOADS["clear"])[1:-1]))),
    "c1": Case(written(titled(PAYLOADS["c1"]))),
    "directions": Case(written(titled(PAYLOADS["override"] + PAYLOADS["isolate"] + PAYLOADS["tags"]))),
    "storm": Case(written(titled(PAYLOADS["storm"] * 20))),
    "digits": Case(written(RUN + "x = " + "9" * 5000), "a number"),
    "exponent": Case(written(RUN.replace('"7.5 m"', "1e9999")), "finite"),
    "arrays": Case(written(RUN + "x = " + "[" * 50_000 + "]" * 50_000), "nested"),
    "inline tables": Case(written(RUN + "x = " + "{a=" * 50_000 + "1" + "}" * 50_000), "nested"),
    "dotted keys": Case(written(RUN + ".".join("a" * 5000) + " = 1"), "nested"),
    "a table of many parts": Case(written(RUN + "[" + ".".join("a" * 5000) + "]"), "nested"),
    "fifo": Case(fifo, "not a regular file"),
    "zeros": Case(linked("/dev/zero"), "not a regular file"),
    "noise": Case(linked("/dev/random"), "not a regular file"),
    "folder": Case(lambda folder: folder, "not a regular file"),
    "socket": Case(bound, "No such device or address|not a regular file"),
    "loop": Case(linked("run.toml"), "symbolic links"),
    "dangling": Case(linked("nowhere/at/all"), "No such file"),
    "library outside": Case(with_library("out.toml", linked("/etc/passwd", "out.toml")), "lies outside"),
    "library above": Case(with_library("../../../../../../etc/passwd"), "lies outside"),
    "library fifo": Case(with_library("lib.toml", lambda folder: fifo(folder, "lib.toml")), "not a regular file"),
    "library zeros": Case(with_library("lib.toml", linked("/dev/zero", "lib.toml")), "lies outside"),
    "library absolute": Case(with_library("/etc/passwd"), "absolute path"),
    "library loop": Case(with_library("lib.toml", linked("lib.toml", "lib.toml")), "could not be read"),
    "library of noise": Case(with_library("lib.toml", written(MESS, "lib.toml")), "not TOML"),
    "five megabytes": Case(written(RUN + "# " + "x" * 5_000_000), "too-large"),
    "a hundred thousand tables": Case(written(tables(100_000)), "too-many|tables"),
    "three thousand tables": Case(written(tables(3_000)), "missing"),
    "a million keys": Case(written(RUN + "".join(f"{n:x}=1\n" for n in range(1_000_000))), "too-large|too-many"),
    "a hundred thousand keys": Case(written("".join(f"{n:x}=1\n" for n in range(100_001))), "error"),
    "one line": Case(written(titled("x" * 4_100_000)), "error|too-long"),
    "utf-16": Case(written(RUN.encode("utf-16")), "not UTF-8"),
    "byte order mark": Case(written(b"\xef\xbb\xbf" + RUN.encode()), "byte order mark"),
    "latin-1": Case(written(titled("K\u00fcche").encode("latin-1")), "not UTF-8"),
    "nul": Case(written(RUN.replace("# measured", "# \0 measured")), "not TOML"),
    "nuls": Case(written(b"\0" * 4096), "not TOML"),
    "lone carriage returns": Case(written(RUN.replace("\n", "\r")), "not TOML"),
    "mixed line ends": Case(written(RUN.replace("[section", "\r\n[section").replace("]\n", "]\r\n"))),
    "empty": Case(written(""), "error"),
    "a name with sequences": Case(written(RUN, "\x1b[2J\u202e\x9b.toml")),
}  # fmt: skip


@pytest.fixture
def soon() -> Iterator[None]:
    """Fail where it takes longer."""

    def late(_number: int, _frame: FrameType | None) -> None:
        raise TimeoutError("it took too long")

    before = signal.signal(signal.SIGALRM, late)
    signal.setitimer(signal.ITIMER_REAL, SOON)
    yield
    signal.setitimer(signal.ITIMER_REAL, 0.0)
    signal.signal(signal.SIGALRM, before)


@pytest.mark.usefixtures("soon")
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_it_is_refused_in_a_line_or_printed_plain(case: Case, call: Caller, tmp_path: Path) -> None:
    path = case.make(tmp_path)
    before = path.read_bytes() if path.is_file() else b""
    status, out, err = call("check", path)
    assert obeyed(out) | obeyed(err) == set()
    assert (status, err) == (2 if case.said else 0, "")
    if case.said:
        assert [word for word in case.said.split("|") if word in out], out[:500]
        errors = [line for line in out.splitlines() if ": error " in line]
        assert errors
        assert max(map(len, errors)) < 1000
        assert all(";" in line or "," in line or "unreadable" in line for line in errors)
    found = json.loads(call("check", path, "--json").out)
    assert found["file"] == str(path)
    status, out, err = call("set", path, "design.revision", MESS.replace("\0", ""))
    assert obeyed(out) | obeyed(err) == set()
    after = path.read_bytes() if path.is_file() else b""
    if status == 2:
        assert after == before
        assert err.startswith(("budget: ", str(path)[:1]))
        assert "Traceback" not in err
    else:
        assert after != before


def test_each_kind_of_refusal_is_one_line(call: Caller, tmp_path: Path) -> None:
    """A file that can't be read at all has one finding; nothing else of it is told."""
    for name in ("fifo", "zeros", "folder", "loop", "five megabytes", "utf-16", "nul", "arrays", "dotted keys"):
        folder = tmp_path / name
        folder.mkdir()
        status, out, _ = call("check", CASES[name].make(folder))
        assert (status, out.count("\n")) == (2, 1), name


def limited() -> None:
    """Give this process little memory and processor time."""
    resource.setrlimit(resource.RLIMIT_AS, (MEMORY, MEMORY))
    resource.setrlimit(resource.RLIMIT_CPU, (20, 20))


@pytest.mark.parametrize(
    ("name", "source", "said"),
    [
        ("-", "/dev/zero", "too-large"),
        ("/dev/stdin", "/dev/zero", "not a regular file"),
        ("/dev/fd/0", "/dev/zero", "not a regular file"),
        ("-", "/dev/null", "missing"),
        ("/proc/self/mem", "/dev/null", "could not be read"),
        ("/proc/self/maps", "/dev/null", "not TOML"),
    ],
)
def test_an_endless_input_ends_at_the_limit(name: str, source: str, said: str) -> None:
    handle = os.open(source, os.O_RDONLY)
    try:
        ended = subprocess.run(
            [sys.executable, "-m", "budget", "check", name], stdin=handle, capture_output=True, text=True,
            timeout=20, check=False, preexec_fn=limited, env={**os.environ, "OPENBLAS_NUM_THREADS": "1"},
        )  # fmt: skip
    finally:
        os.close(handle)
    assert ended.returncode == 2, ended.stderr
    assert said in ended.stdout
    assert ended.stderr == ""


def test_a_pipe_that_is_read_as_a_file_is_refused_and_as_input_read() -> None:
    for name, status in (("-", 0), ("/dev/stdin", 2)):
        command = [sys.executable, "-m", "budget", "check", name]
        ended = subprocess.run(command, input=RUN, capture_output=True, text=True, timeout=20, check=False)
        assert (ended.returncode, ended.stderr) == (status, "")


@pytest.mark.parametrize("kind", ["fifo", "zeros", "folder", "noise"])
def test_readings_that_are_no_file_are_refused(kind: str, call: Caller, run_file: Path, tmp_path: Path) -> None:
    folder = tmp_path / "readings"
    folder.mkdir()
    status, _, err = call("balance", run_file, "--readings", CASES[kind].make(folder))
    assert status == 2
    assert "not a regular file" in err
    assert err.count("\n") == 1


def test_a_file_that_nobody_may_read_is_refused() -> None:
    folder = Path(tempfile.mkdtemp())
    try:
        folder.chmod(0o755)
        path = written(RUN)(folder)
        path.chmod(0)

        def act() -> None:
            for arguments in (["check"], ["report"], ["balance"], ["flows"]):
                with contextlib.redirect_stdout(io.StringIO()) as out:
                    assert main([*arguments, str(path)]) == 2
                assert ": error unreadable: " in out.getvalue()
                assert "Permission denied" in out.getvalue()
            with contextlib.redirect_stderr(io.StringIO()) as err:
                assert main(["set", str(path), "design.title", "x"]) == 2
                assert main(["new", str(folder / "new.toml")]) == 2
            assert err.getvalue().count("Permission denied") == 2

        as_nobody(act)
        assert stat.S_IMODE(path.stat().st_mode) == 0
    finally:
        shutil.rmtree(folder)


def edited(case: Case, folder: Path) -> None:
    """Open a file in the app: it refuses, or shows plain text and ends when it is asked to."""
    home = folder / "home"
    home.mkdir()
    (folder / "files").mkdir()
    with Session(case.make(folder / "files"), config=home, size=(100, 30)) as session:
        until = time.monotonic() + 20.0
        while not session.ended and "commands" not in session.text and time.monotonic() < until:
            session.read(0.1)
        session.settle()
        if not session.ended:
            session.press("down", "v", "escape", "F", "escape", "T", "escape")
        if not session.ended:
            session.send("ctrl+q")
        code = session.wait_for_end(limit=20.0)
        told = session.received.replace(POINTER, b"")
    assert code in (0, 2)
    assert b"Traceback" not in told
    for wrong in RAW:
        assert wrong not in told, wrong
    assert not {c for c in told.decode() if 0x7F <= ord(c) < 0xA0 or c in "\u202e\u2066\u200b\ufeff\u2028\U000e0041"}
    if code == 2:
        assert told.count(b"\n") == 1


@pytest.mark.parametrize("name", ["c1", "fifo"])
def test_the_app_refuses_it_or_shows_it_plain(name: str, tmp_path: Path) -> None:
    edited(CASES[name], tmp_path)


@pytest.mark.long
@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_the_app_refuses_each_or_shows_it_plain(case: Case, tmp_path: Path) -> None:
    edited(case, tmp_path)
