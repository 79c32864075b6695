"""budget check: what it prints, and how its exit status says how a run stands."""

import io
import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

from budget.storage.folders import state_folder
from tests.commands.calls import RUN, Caller

OVER = RUN.replace("[device", '[limits]\nvelocity = "0.1 m/s"\n\n[device')
WRONG = RUN.replace('from = "M1"\nload = "2.4 kW"', 'from = "M9"\nload = "1.4 kW"')


def write(folder: Path, name: str, text: str) -> Path:
    path = folder / name
    path.write_text(text)
    return path


def test_a_run_in_order_has_a_line_a_source_and_status_0(call: Caller, run_file: Path) -> None:
    status, out, err = call("check", run_file)
    assert (status, err) == (0, "")
    assert out.startswith(f"{run_file}: P1: required ")
    for word in ("required", "duty", "available 25.00 kPa", "in hand", "index R 2"):
        assert word in out
    assert len(out.splitlines()) == 1


def test_a_warning_is_status_1_and_stands_at_its_place(call: Caller, tmp_path: Path) -> None:
    path = write(tmp_path, "over.toml", OVER)
    status, out, _ = call("check", path)
    line = next(number for number, line in enumerate(OVER.splitlines(), 1) if line.startswith('size = "22'))
    assert status == 1
    assert f"{path}:{line}:8: warning velocity: velocity 0." in out
    assert f"{path}: P1: required" in out


def test_an_error_is_status_2_and_what_can_be_computed_is_printed(call: Caller, tmp_path: Path) -> None:
    path = write(tmp_path, "wrong.toml", WRONG)
    status, out, _ = call("check", path)
    assert status == 2
    assert ": error dangling: 'M9'" in out
    assert f"{path}: P1: required" in out


def test_of_several_files_the_highest_status_counts(call: Caller, run_file: Path, tmp_path: Path) -> None:
    over, wrong = write(tmp_path, "over.toml", OVER), write(tmp_path, "wrong.toml", WRONG)
    assert call("check", run_file, over).status == 1
    assert call("check", over, wrong, run_file).status == 2


def test_json_is_one_object_and_agrees_with_the_status(call: Caller, run_file: Path) -> None:
    status, out, _ = call("check", run_file, "--json")
    found = json.loads(out)
    assert status == 0
    assert found["format"] == 1
    assert found["file"] == str(run_file)
    assert found["program"].keys() == {"version", "catalogue"}
    assert found["sources"]["P1"]["index"] == ["R 2"]
    assert found["sources"]["P1"]["available"] == 25_000.0
    assert found["sections"]["M1"]["serves"] == ["R1", "R 2"]
    assert found["findings"] == []


def test_json_of_several_files_lists_them_in_order(call: Caller, run_file: Path, tmp_path: Path) -> None:
    wrong = write(tmp_path, "wrong.toml", WRONG)
    status, out, _ = call("check", "--json", wrong, run_file)
    found = json.loads(out)
    assert status == 2
    assert found.keys() == {"files"}
    assert [one["file"] for one in found["files"]] == [str(wrong), str(run_file)]
    assert "error" in {finding["level"] for finding in found["files"][0]["findings"]}
    assert found["files"][0]["sources"]["P1"]["required"] > 0


@pytest.mark.parametrize(
    ("content", "code"),
    [
        (b"\xff\xfe", "encoding"),
        (b"\xef\xbb\xbf" + RUN.encode(), "encoding"),
        (b"a = [", "syntax"),
        (b"a = " + b"[" * 1000, "nesting"),
        (b"# \n" * 2_000_000, "too-large"),
    ],
)
def test_what_is_not_toml_gives_file_and_findings_alone(
    call: Caller, tmp_path: Path, content: bytes, code: str
) -> None:
    path = tmp_path / "broken.toml"
    path.write_bytes(content)
    status, out, _ = call("check", path, "--json")
    found = json.loads(out)
    assert status == 2
    assert found.keys() == {"format", "program", "file", "findings"}
    assert [finding["code"] for finding in found["findings"]] == [code]
    assert f": error {code}: " in call("check", path).out


def test_what_is_no_readable_file_is_a_finding(call: Caller, tmp_path: Path, run_file: Path) -> None:
    fifo = tmp_path / "fifo"
    os.mkfifo(fifo)
    loop = tmp_path / "loop"
    loop.symlink_to(loop)
    for path in (tmp_path / "none.toml", tmp_path, fifo, loop, Path("\0")):
        status, out, err = call("check", path)
        assert status == 2
        assert ":1:1: error unreadable: " in out
        assert len(out.splitlines()) == 1
        assert err == ""
    found = json.loads(call("check", "--json", run_file, tmp_path).out)
    assert found["files"][0]["sources"]
    assert found["files"][1].keys() == {"format", "program", "file", "findings"}


def test_a_dash_reads_standard_input(call: Caller, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(RUN.encode())))
    status, out, _ = call("check", "-")
    assert status == 0
    assert out.startswith("-: P1: required")
    monkeypatch.setattr(sys, "stdin", None)
    assert ": error unreadable: " in call("check", "-").out


def test_control_characters_of_a_file_are_not_printed(call: Caller, tmp_path: Path) -> None:
    text = OVER.replace("[section.M1]", '[section.M1]\naccept = { velocity = "\\u001b[31mred\\u009b\\u202e" }')
    path = write(tmp_path, "over.toml", text)
    for out in (call("check", path).out, call("check", path, "--json").out, call("report", path).out):
        assert "red" in out
        assert not set(out) & set("\x1b\x9b\u202e")


def test_an_internal_error_is_one_line_and_status_70(
    call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(_name: str) -> None:
        raise ZeroDivisionError("nothing\nto divide by")

    monkeypatch.setattr("budget.commands.check.open_run", fail)
    monkeypatch.delenv("BUDGET_DEBUG", raising=False)
    status, out, err = call("check", run_file)
    assert (status, out) == (70, "")
    log = state_folder("log") / "faults.log"
    told = f"ZeroDivisionError: nothing to divide by; the log is {log}; set BUDGET_DEBUG=1 to see where"
    assert err == f"budget: internal error: {told}\n"
    assert "  budget check\n" in log.read_text()
    monkeypatch.setenv("BUDGET_DEBUG", "1")
    with pytest.raises(ZeroDivisionError):
        call("check", run_file)


def test_a_reader_that_goes_away_is_no_error(run_file: Path) -> None:
    lines = " ".join(["check", *[f"'{run_file}'"] * 3, "--json"])
    ended = subprocess.run(
        ["bash", "-c", f"'{sys.executable}' -m budget {lines} | true; echo ${{PIPESTATUS[0]}}"],
        capture_output=True, text=True, check=True,
    )  # fmt: skip
    assert ended.stderr == ""
    assert ended.stdout in ("141\n", "0\n")


def test_output_that_can_not_be_written_is_told(run_file: Path) -> None:
    with Path("/dev/full").open("w") as full:
        command = [sys.executable, "-m", "budget", "check", str(run_file)]
        ended = subprocess.run(command, stdout=full, stderr=subprocess.PIPE, text=True, check=False)
    assert ended.returncode == 2
    assert ended.stderr.startswith("budget: the output could not be read or written: ")
    assert len(ended.stderr.splitlines()) == 1


def test_a_check_reads_nothing_that_it_does_not_need(run_file: Path) -> None:
    script = (
        "import sys; from budget.commands import main; "
        f"assert main(['check', {str(run_file)!r}]) == 0; "
        "loaded = {name.partition('.')[0] for name in sys.modules}; "
        "print(sorted(loaded & {'textual', 'rich', 'scipy', 'pint', 'platformdirs', 'tomli_w', 'difflib'}))"
    )
    ended = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    loaded = set(ended.stdout.splitlines()[-1].strip("[]").replace("'", "").split(", ")) - {""}
    assert loaded <= {"difflib"}
