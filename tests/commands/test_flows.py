"""budget flows: what it prints, its JSON, and its exit status."""

import json
import subprocess
import sys
from pathlib import Path

import pytest

from tests.commands.calls import RUN, Caller

CASE = RUN + '\n[case.night]\noff = ["R1"]\n[case.slow]\nsource = { P1 = { speed = 0.5 } }\n'


@pytest.fixture
def file(tmp_path: Path) -> Path:
    path = tmp_path / "cases.toml"
    path.write_text(CASE)
    return path


def test_json_has_sources_sections_and_terminals_in_si(call: Caller, run_file: Path) -> None:
    status, out, err = call("flows", run_file, "--json", "--devices", "set")
    assert (status, err) == (0, "")
    found = json.loads(out)
    assert set(found) == {"sources", "sections", "terminals", "findings"}
    assert set(found["sources"]["P1"]) == {"flow", "pressure", "speed", "power"}
    assert found["sections"]["M1"]["flow"] == pytest.approx(found["sections"]["M1"]["return_flow"], rel=1e-9)
    for terminal in found["terminals"].values():
        assert set(terminal) == {"flow", "design_flow", "share", "within"}
        assert terminal["share"] == pytest.approx(1.0, abs=1e-3)
        assert terminal["flow"] == pytest.approx(terminal["design_flow"], rel=1e-3)
        assert terminal["within"] is True
    assert found["findings"] == []


def test_with_devices_open_one_terminal_is_over_supplied_and_the_status_is_1(call: Caller, run_file: Path) -> None:
    text = run_file.read_text().replace('length = "9.0 m"', 'length = "40.0 m"')
    run_file.write_text(text)
    status, out, _ = call("flows", run_file, "--devices", "open")
    assert status == 1
    line = next(number for number, line in enumerate(text.splitlines(), 1) if line.startswith("[terminal.R1]"))
    assert "warning flow-tolerance: it gets 1" in out
    assert f"{run_file}:{line}:" in out
    assert " over" in out
    assert "L/s" in out


def test_a_table_lines_up_and_ends_without_spaces(call: Caller, run_file: Path) -> None:
    _, out, _ = call("flows", run_file)
    assert out.startswith("Sources\n")
    assert "\nSections\n" in out
    assert "\nTerminals\n" in out
    assert not any(line != line.rstrip() for line in out.splitlines())


def test_a_case_is_named(call: Caller, file: Path) -> None:
    status, out, _ = call("flows", file, "--case", "night", "--json")
    found = json.loads(out)["terminals"]
    assert status == 1  # the other one gets more, as nothing holds its flow
    assert found["R1"]["share"] == 0.0
    assert found["R1"]["within"] is True
    assert found["R 2"]["share"] > 1.1
    _, out, _ = call("flows", file, "--case", "night")
    assert "R1" in out
    assert "off" in out


def test_a_case_that_is_not_there_is_refused_with_the_nearest(call: Caller, file: Path, run_file: Path) -> None:
    status, out, err = call("flows", file, "--case", "nigth")
    assert (status, out) == (2, "")
    assert "did you mean 'night'?" in err
    status, _, err = call("flows", run_file, "--case", "night")
    assert status == 2
    assert "it has none" in err


def test_a_file_with_an_error_is_status_2_and_says_so(call: Caller, tmp_path: Path) -> None:
    path = tmp_path / "wrong.toml"
    path.write_text(RUN.replace('length = "7.5 m"', 'length = "long"'))
    status, out, _ = call("flows", path, "--json")
    found = json.loads(out)
    assert status == 2
    assert found["sources"] == {}
    assert [finding["code"] for finding in found["findings"]] == ["not-a-quantity"]


def test_a_file_that_is_not_there_is_status_2(call: Caller, tmp_path: Path) -> None:
    status, out, _ = call("flows", tmp_path / "none.toml", "--json")
    assert status == 2
    assert set(json.loads(out)) == {"findings"}
    assert "unreadable" in call("flows", tmp_path / "none.toml").out


def test_scipy_is_imported_when_it_is_asked_for(run_file: Path) -> None:
    code = (
        "import sys; from budget.commands import main; import budget.network.flows, budget.commands.flows\n"
        "before = 'scipy' in sys.modules; main(['flows', sys.argv[1]]); print(before, 'scipy' in sys.modules)"
    )
    run = subprocess.run([sys.executable, "-c", code, str(run_file)], capture_output=True, text=True, check=True)
    assert run.stdout.splitlines()[-1] == "False True"


RING = """format = 1
[design]
title = "Ring"
[fluid]
name = "water"
temperature = "60 degC"
[defaults]
pipe = "steel"
paired = true
takeoff = "none"
[pipe.steel]
catalogue = "steel EN 10255 medium"
[source.P1]
[section.A]
from = "P1"
size = "DN40"
length = "40 m"
[section.B]
from = "P1"
size = "DN40"
length = "25 m"
[link.TIE]
from = "B"
to = "A"
size = "DN40"
length = "15 m"
[terminal.T]
from = "A"
flow = "0.8 L/s"
drop = "15 kPa"
"""


def test_links_are_edges_and_are_listed(call: Caller, tmp_path: Path) -> None:
    file = tmp_path / "ring.toml"
    file.write_text(RING)
    status, out, _ = call("flows", file, "--json")
    found = json.loads(out)
    assert status == 0
    assert found["links"]["TIE"]["flow"] == pytest.approx(0.4e-3, rel=1e-4)
    assert found["links"]["TIE"]["return_flow"] == pytest.approx(0.4e-3, rel=1e-4)
    assert found["sections"]["A"]["flow"] == pytest.approx(0.4e-3, rel=1e-4)
    _, out, _ = call("flows", file)
    part = out.partition("\nLinks\n")[2].partition("\n\n")[0]
    assert part.splitlines()[-1].split() == ["TIE", "0.400", "0.400"]
    _, out, _ = call("check", file, "--json")
    assert json.loads(out)["links"]["TIE"]["flow"] == pytest.approx(0.4e-3, rel=1e-6)


def test_rounded_settings_are_a_way_to_set_devices(call: Caller, run_file: Path) -> None:
    _, out, _ = call("flows", run_file, "--json", "--devices", "rounded")
    for terminal in json.loads(out)["terminals"].values():
        assert terminal["share"] == pytest.approx(1.0, abs=0.1)


@pytest.mark.parametrize("wrong", ['load = "much"', 'flow = "1 furlong"'])
def test_a_run_whose_flows_are_not_known_has_findings_alone(wrong: str, call: Caller, run_file: Path) -> None:
    curve = 'curve = [["0 L/s", "30 kPa"], ["0.2 L/s", "20 kPa"]]\n'
    text = run_file.read_text().replace('title = "Boiler pump"\n', f'title = "Boiler pump"\n{curve}')
    run_file.write_text(text.replace('load = "2.4 kW"', wrong))
    status, out, err = call("flows", run_file)
    assert (status, err) == (2, "")
    assert [line.partition(":")[0] for line in out.splitlines()] == [str(run_file)] * len(out.splitlines())
    assert ": error " in out
