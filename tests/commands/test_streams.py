"""Standard streams as a shell may hand them over: closed, full, gone, of another encoding; and how a signal ends it."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from itertools import product
from pathlib import Path

import pytest

from budget.commands import streams
from tests.commands.calls import RUN, Caller

PROGRAM = (sys.executable, "-m", "budget")
PLAIN = {name: value for name, value in os.environ.items() if not name.startswith(("LC_", "LANG", "PYTHON"))}
TITLE = "K\u00fcche \u00b0C \u03a9 \u0416 \u7d66"


def shell(line: str, *, environment: dict[str, str] | None = None) -> subprocess.CompletedProcess[bytes]:
    """Run a line of shell, in which $budget stands for the program."""
    return subprocess.run(
        ["bash", "-c", line],
        env={**os.environ, "budget": " ".join(PROGRAM), **(environment or {})},
        capture_output=True,
        timeout=60,
        check=False,
    )


LONG = pytest.mark.long
CLOSED = [
    pytest.param(which, id="".join(str(n) for n in range(3) if which[n]), marks=() if which.count(True) == 1 else LONG)
    for which in product((False, True), repeat=3)
    if any(which)
]


@pytest.mark.parametrize("closed", CLOSED)
def test_closed_streams_become_no_file_and_nothing_goes_to_another_one(
    closed: tuple[bool, ...], run_file: Path
) -> None:
    ways = [text for text, shut in zip(("<&-", ">&-", "2>&-"), closed, strict=True) if shut]
    calls = [
        f"set '{run_file}' design.revision C {' '.join(ways)}",
        f"check '{run_file}.none' {' '.join(ways)}",
        f"edit '{run_file}' {' '.join(ways)}",
        f"check {' '.join(ways)}",
    ]
    said = [shell(f"$budget {one} ; echo status $?") for one in calls]
    status = [int(one.stdout.split()[-1]) for one in said]
    printed = [one.stdout.rpartition(b"status")[0].decode() for one in said]
    assert status == [2 if closed[1] else 0, 2, 2, 2]
    assert run_file.read_text() == RUN.replace('number = "H-7"', 'number = "H-7"\nrevision = "C"')
    assert [bool(text) for text in printed] == [not closed[1]] * 2 + [False] * 2
    assert [one.stderr == b"" for one in said[2:]] == [closed[2]] * 2
    for one in said:
        assert b"Traceback" not in one.stderr
        assert b"Exception" not in one.stderr


def test_an_output_that_was_closed_is_told_and_nothing_is_written_to_a_file(run_file: Path) -> None:
    ended = shell(f"$budget check '{run_file}' >&-; echo $?")
    assert ended.stdout == b"2\n"
    assert ended.stderr == b"budget: the output could not be read or written: Bad file descriptor\n"


FULL = ("check RUN", "--help", "check --help", "set RUN design.title x")
MORE = (
    "check RUN --json", "manual file", "--version", "explain", "explain RUN M1", "list units", "completion zsh",
    "config --path", "balance RUN --csv", "report RUN",
)  # fmt: skip


@pytest.mark.parametrize("call", [*FULL, *(pytest.param(call, marks=LONG) for call in MORE)])
def test_a_full_disk_is_told_with_status_2(call: str, run_file: Path) -> None:
    ended = shell(f"$budget {call.replace('RUN', str(run_file))} > /dev/full; echo $?")
    assert ended.stdout == b"2\n"
    assert ended.stderr == b"budget: the output could not be read or written: No space left on device\n"


@pytest.mark.parametrize("call", ["check none.toml", "nothing", "check", "set none.toml a b", "balance --what"])
def test_errors_that_can_not_be_written_leave_the_status(call: str) -> None:
    for way in ("2>/dev/full", ">/dev/full 2>/dev/full", "2>&-"):
        ended = shell(f"$budget {call} {way}; echo $?")
        assert (ended.stdout.split()[-1], ended.stderr) == (b"2", b""), way


def test_a_closed_pipe_is_status_141(run_file: Path) -> None:
    for call in ("check --help", f"report '{run_file}'"):
        ended = shell(f"{{ sleep 0.05; $budget {call}; echo $? >&2; }} | true")
        assert ended.stderr == b"141\n", call
    ended = shell("$budget nothing 2> >(true); echo $?")
    assert ended.stdout in (b"2\n", b"141\n")


@pytest.mark.parametrize(("number", "status"), [("SIGINT", 130), ("SIGTERM", 143), ("SIGHUP", 129)])
def test_a_signal_ends_it_with_a_status_of_its_own(number: str, status: int) -> None:
    script = (
        "import signal, sys, time, budget.commands.check as check; from budget.commands import main; "
        "signal.signal(signal.SIGINT, signal.default_int_handler); signal.signal(signal.SIGHUP, signal.SIG_DFL); "
        "check.open_run = lambda name: (print('.', file=sys.stderr, flush=True), time.sleep(30)); "
        "sys.argv[1:] = ['check', 'x']; sys.exit(main())"
    )
    with subprocess.Popen([sys.executable, "-c", script], stdout=subprocess.PIPE, stderr=subprocess.PIPE) as process:
        assert process.stderr is not None
        assert process.stderr.readline() == b".\n"
        process.send_signal(getattr(signal, number))
        out, err = process.communicate(timeout=20)
    assert (process.returncode, out, err) == (status, b"", b"")


def test_a_signal_in_the_midst_of_saving_leaves_the_file_whole(run_file: Path) -> None:
    script = (
        "import os, signal, sys; from budget.commands import main; "
        "os.fsync = lambda handle: os.kill(os.getpid(), signal.SIGTERM); "
        "sys.argv[1:] = ['set', sys.argv[1], 'design.title', 'x']; sys.exit(main())"
    )
    ended = subprocess.run([sys.executable, "-c", script, run_file], capture_output=True, timeout=20, check=False)
    assert (ended.returncode, ended.stdout, ended.stderr) == (143, b"", b"")
    assert run_file.read_text() == RUN
    assert [path.name for path in run_file.parent.iterdir()] == [run_file.name]


def test_a_signal_that_is_ignored_stays_so(run_file: Path) -> None:
    script = (
        "import os, signal, sys; from budget.commands import main; sys.argv[1:] = ['check', sys.argv[1]]; "
        "status = main(); os.kill(os.getpid(), signal.SIGHUP); sys.exit(status)"
    )
    ended = shell(f"trap '' HUP; exec '{sys.executable}' -c \"{script}\" '{run_file}'")
    assert (ended.returncode, ended.stderr) == (0, b"")


@pytest.mark.parametrize(
    ("environment", "encoding"),
    [
        ({"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"}, "ascii"),
        ({"PYTHONIOENCODING": "latin-1"}, "latin-1"),
        pytest.param({"LC_ALL": "C"}, "utf-8", marks=LONG),
        pytest.param({"PYTHONIOENCODING": "ascii"}, "ascii", marks=LONG),
        pytest.param({"PYTHONIOENCODING": "ascii:strict"}, "ascii", marks=LONG),
        pytest.param({"LC_ALL": "POSIX", "PYTHONIOENCODING": "cp437"}, "cp437", marks=LONG),
    ],
)
def test_every_encoding_takes_every_letter(environment: dict[str, str], encoding: str, tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_text(RUN.replace("Ferry house", f"{TITLE} \\u001b"), encoding="utf-8")
    for call in ("report", "balance --csv", "check --json"):
        name, *options = call.split()
        command = [*PROGRAM, name, str(path), *options]
        ended = subprocess.run(command, env={**PLAIN, **environment}, capture_output=True, timeout=30, check=False)
        assert (ended.returncode, ended.stderr) == (0, b""), call
        said = ended.stdout.decode(encoding)
        if call == "report":
            for letter in "\u00fc\u0416":
                shown = letter if _has(encoding, letter) else letter.encode("ascii", "backslashreplace").decode()
                assert shown in said
            assert ("\u00b0C" if _has(encoding, "\u00b0") else "oC") in said
            assert ("\ufffd" if encoding == "utf-8" else " ?") in said
        if call == "check --json":
            assert json.loads(said)["design"]["title"] == f"{TITLE} \x1b"


def _has(encoding: str, letter: str) -> bool:
    try:
        letter.encode(encoding)
    except UnicodeEncodeError:
        return False
    return True


@pytest.mark.parametrize("environment", [{"LC_ALL": "C.UTF-8"}, {"LC_ALL": "C", "PYTHONCOERCECLOCALE": "0"}])
def test_a_name_that_is_not_utf_8_is_read_and_told(environment: dict[str, str], tmp_path: Path) -> None:
    name = os.fsencode(tmp_path) + b"/K\xfcche\x1b.toml"
    Path(os.fsdecode(name)).write_text(RUN, encoding="utf-8")
    for arguments, status in (
        ([b"check"], 0), ([b"check", b"--json"], 0), ([b"new"], 2),
    ):  # fmt: skip
        command = [*map(os.fsencode, PROGRAM), arguments[0], name, *arguments[1:]]
        ended = subprocess.run(command, env={**PLAIN, **environment}, capture_output=True, timeout=30, check=False)
        assert ended.returncode == status, ended.stderr
        assert not {byte for byte in ended.stdout + ended.stderr if byte < 32} - {10, 13}
        assert b"\x1b" not in ended.stdout + ended.stderr
        if b"--json" in arguments:
            assert os.fsencode(json.loads(ended.stdout)["file"]) == name
    command = [*map(os.fsencode, PROGRAM), b"set", name, b"design.title", b"K\xfcche"]
    ended = subprocess.run(command, env={**PLAIN, **environment}, capture_output=True, timeout=30, check=False)
    assert ended.returncode == 2
    assert ended.stderr.count(b"\n") == 1
    assert Path(os.fsdecode(name)).read_text("utf-8") == RUN


def test_an_internal_error_is_one_line_whatever_it_says(
    call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(_name: str) -> None:
        raise MemoryError("\x1b[2J\none\u202e\udcff")

    monkeypatch.setattr("budget.commands.check.open_run", fail)
    monkeypatch.delenv("BUDGET_DEBUG", raising=False)
    status, out, err = call("check", run_file)
    assert (status, out, err.count("\n")) == (70, "", 1)
    assert err.rstrip("\n").isprintable()


def test_marks_are_written_by_their_likeness_and_letters_by_their_number() -> None:
    streams.soften()
    shown = "\u00b0 \u2026 \u2500 \ufffd \u00fc \u0416 \udcff".encode("ascii", "budget.likeness")
    assert shown == rb"o ~ - ? \xfc \u0416 \udcff"
