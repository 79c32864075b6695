"""budget explain: a code with its remedy, or a row's figures as calculations."""

from __future__ import annotations

import io
import sys
from pathlib import Path

import pytest

from budget.description import CODES
from budget.description.remedies import REMEDIES
from tests.commands.calls import RUN, Caller


def test_every_code_has_a_remedy_in_one_line() -> None:
    assert set(REMEDIES) == set(CODES)
    for code, remedy in REMEDIES.items():
        assert remedy.endswith("."), code
        assert "\n" not in remedy
        assert remedy[0].isupper(), code


def test_a_code_says_its_level_its_meaning_and_what_to_do(call: Caller) -> None:
    status, out, _ = call("explain", "unpaired")
    assert status == 0
    level, meaning = CODES["unpaired"]
    assert out.splitlines() == [f"unpaired ({level}): {meaning}", f"What to do: {REMEDIES['unpaired']}"]


def test_without_a_code_all_are_listed(call: Caller) -> None:
    out = call("explain").out
    assert [line.split()[0] for line in out.splitlines()] == list(CODES)


@pytest.mark.parametrize("id_", ["P1", "M1", "R1", "R 2"])
def test_a_row_of_a_file_is_explained(call: Caller, run_file: Path, id_: str) -> None:
    status, out, err = call("explain", run_file, id_)
    assert (status, err) == (0, "")
    assert out.split("\n")[0].endswith(id_) or f" {id_}: " in out.split("\n")[0]
    assert " = " in out


def test_standard_input_is_explained_too(call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(RUN.encode())))
    assert call("explain", "-", "M1").out == call("explain", run_file, "M1").out


def test_an_id_that_is_not_there_names_the_nearest(call: Caller, run_file: Path) -> None:
    status, out, err = call("explain", run_file, "R3")
    assert (status, out) == (2, "")
    assert err == f"budget: {run_file} has no 'R3'; did you mean 'R1'?\n"


def test_an_id_whose_table_could_not_be_read_is_not_there(call: Caller, run_file: Path) -> None:
    run_file.write_text(RUN.replace("[section.M1]", "[section]\nB0 = 3\n\n[section.M1]"))
    assert call("explain", run_file, "B0").status == 2
    assert call("explain", run_file, "M1").status == 0


def test_a_file_without_an_id_asks_for_one(call: Caller, run_file: Path) -> None:
    for name in (str(run_file), "-"):
        status, out, err = call("explain", name)
        assert (status, out) == (2, "")
        assert f"name a source, section or terminal too: budget explain {name} ID" in err


def test_a_file_that_can_not_be_read_is_refused(call: Caller, run_file: Path, tmp_path: Path) -> None:
    status, out, err = call("explain", tmp_path / "none.toml", "M1")
    assert (status, out) == (2, "")
    assert "unreadable" in err
    run_file.write_text("format = 1\n[")
    status, out, err = call("explain", run_file, "M1")
    assert (status, out) == (2, "")
    assert "syntax" in err


def test_more_than_a_file_and_an_id_is_a_wrong_call(call: Caller, run_file: Path) -> None:
    assert call("explain", run_file, "M1", "R1").status == 2


def test_a_run_with_errors_is_explained_as_far_as_it_goes(call: Caller, run_file: Path) -> None:
    run_file.write_text(RUN.replace('"7.5 m"', '"7.5 kg"'))
    status, out, _ = call("explain", run_file, "M1")
    assert status == 0
    assert "can't be computed: a finding says why" in out
