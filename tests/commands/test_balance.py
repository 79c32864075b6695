"""budget balance: its forms, its readings, its proposals, its exit statuses."""

from __future__ import annotations

import csv
import io
import json
from pathlib import Path

import pytest

from tests.commands.calls import RUN, Caller

CONTROLLED = RUN + '\n[[terminal."R 2".item]]\nname = "Zone valve"\nkv = 1.0\ncontrol = "two-port"\n'


def test_the_schedule_is_printed_with_the_status_of_the_run(call: Caller, run_file: Path) -> None:
    checked = call("check", run_file).status
    status, out, err = call("balance", run_file)
    assert (status, err) == (checked, "")
    assert out.startswith("Ferry house\n")
    run_file.write_text(RUN.replace('size = "22 mm"', 'size = "23 mm"'))
    assert call("balance", run_file).status == 2


def test_csv_and_json_hold_the_same_rows(call: Caller, run_file: Path) -> None:
    rows = list(csv.DictReader(io.StringIO(call("balance", run_file, "--csv").out)))
    whole = json.loads(call("balance", "--json", run_file).out)
    assert [row["ID"] for row in rows] == [row["id"] for row in whole["schedule"]] == ["R 2", "R1", "P1"]
    assert whole["format"] == 1
    assert whole["readings"] is None
    assert call("balance", run_file, "--csv", "--json").status == 2


def test_readings_count_for_the_status(call: Caller, run_file: Path, tmp_path: Path) -> None:
    site = tmp_path / "site.toml"
    site.write_text('[reading.R1]\nflow = "0.029 L/s"\n')
    checked = call("check", run_file).status
    status, out, err = call("balance", run_file, "--readings", site)
    assert (status, err) == (checked, "")
    assert "Next step\n  Measure R 2: " in out
    site.write_text('[reading.R1]\nflow = "0.02 L/s"\n')
    status, out, err = call("balance", run_file, "--readings", site)
    assert status == 1
    assert err.startswith(f"{site}:2:8: warning measured-flow: the measured flow, 0.020 L/s, is ")
    site.write_text('[reading.R7]\nflow = "0.02 L/s"\n')
    status, _, err = call("balance", run_file, "--csv", "--readings", site)
    assert status == 2
    assert f"{site}:1:10: error dangling: 'R7' is not an ID of the run; did you mean 'R1'?" in err
    whole = json.loads(call("balance", run_file, "--json", "--readings", site).out)
    assert [one["code"] for one in whole["readings"]["findings"]] == ["dangling"]
    site.unlink()
    status, out, err = call("balance", run_file, "--readings", site)
    assert status == 2
    assert "unreadable" in err
    assert "R1" in out


@pytest.mark.parametrize("form", ["--csv", "--json", None])
def test_a_file_that_can_t_be_read_is_status_2(call: Caller, tmp_path: Path, form: str | None) -> None:
    status, out, err = call("balance", tmp_path / "none.toml", *([form] if form else []))
    assert status == 2
    assert "unreadable" in (err if form == "--csv" else out)


def test_valves_and_devices_are_proposed(call: Caller, run_file: Path) -> None:
    run_file.write_text(CONTROLLED)
    status, out, _ = call("balance", run_file, "--propose", "R 2")
    assert status == call("check", run_file).status
    assert "Zone valve" in out
    assert "for 0.5 " in out
    assert "LV 15" in out
    whole = json.loads(call("balance", run_file, "--propose", "R 2", "--authority", "0.3", "--json").out)
    assert whole["control"]["exact"]["authority"] == pytest.approx(0.3, abs=1e-5)
    assert [one["name"] for one in whole["devices"]] == ["LV 15"]
    assert "No control item" in call("balance", run_file, "--propose", "R1").out


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("--propose", "R3"), "did you mean"),
        (("--propose", "R1", "--csv"), "leave them out"),
        (("--authority", "1"), "above 0 and below 1"),
        (("--authority", "half"), "is not an authority"),
    ],
)
def test_a_proposal_that_can_t_be_made_is_status_2(
    call: Caller, run_file: Path, arguments: tuple[str, ...], said: str
) -> None:
    status, out, err = call("balance", run_file, *arguments)
    assert (status, out) == (2, "")
    assert said in err
