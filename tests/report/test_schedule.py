"""The commissioning schedule: its rows, its text, its CSV and its JSON."""

from __future__ import annotations

import csv
import io
import json
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.commands.starts import FLUIDS, start
from budget.description import describe, read_text
from budget.description.readings import read_readings
from budget.network import evaluate
from budget.report.figures import Figures
from budget.report.schedule import Schedule, schedule
from budget.report.schedule_text import harmless, schedule_csv, schedule_json, schedule_text
from tests.commands.calls import RUN

READINGS = '[reading.R1]\nflow = "0.0143 L/s"\ndate = 2026-03-31\n[reading."R 2"]\nsignal = "9 kPa"\nsetting = 4\n'


def made(text: str, readings: str | None = None) -> tuple[Schedule, Figures]:
    description = describe(read_text(text))
    figures = Figures(description)
    read = None if readings is None else read_readings(read_text(readings), description)
    return schedule(description, evaluate(description), figures, read), figures


def as_text(text: str, readings: str | None = None) -> str:
    found, figures = made(text, readings)
    return schedule_text(describe(read_text(text)), found, figures, ())


def as_csv(text: str, readings: str | None = None) -> list[list[str]]:
    return list(csv.reader(io.StringIO(schedule_csv(*made(text, readings)), newline="")))


def test_a_row_holds_what_the_run_says_and_what_was_computed() -> None:
    found, _ = made(RUN)
    budget = evaluate(describe(read_text(RUN)))
    assert [row.id for row in found.rows] == ["R 2", "R1", "P1"]
    row = found.rows[1]
    device = budget.terminals["R1"].device
    assert device is not None
    assert (row.order, row.kind, row.branch, row.title, row.device, row.size) == (
        2, "terminal", "P1", "Hall", "LV 15", "15 mm",
    )  # fmt: skip
    assert (row.drop, row.signal, row.design_flow) == (device.drop, device.signal, budget.terminals["R1"].flow)
    assert row.setting == pytest.approx(device.setting)
    assert row.tolerance == 0.1
    assert found.next is None
    source = found.rows[2]
    assert (source.kind, source.device, source.drop) == ("source", "pump", budget.sources["P1"].duty)


def test_remarks_say_what_is_special() -> None:
    text = RUN.replace('[device."LV 15"]', '[device.PIV]\nholds = "flow"\nleast_drop = 1\n[device."LV 15"]')
    remarks = {row.id: "; ".join(row.remarks) for row in made(text)[0].rows}
    assert remarks["R 2"].startswith("reference (index)")
    assert remarks["R1"] == ""
    r1, r2 = 'length = "3.0 m"\nbalance = "LV 15"', 'length = "9.0 m"\nbalance = "LV 15"'
    held = {row.id: "; ".join(row.remarks) for row in made(text.replace(r2, r2.replace("LV 15", "PIV")))[0].rows}
    assert "holds its flow" in held["R 2"]
    assert held["R1"].startswith("reference")
    bare = {row.id: "; ".join(row.remarks) for row in made(text.replace(r1, 'length = "3.0 m"'))[0].rows}
    assert re.search(r"no device; [0-9.]+ kPa is not taken up", bare["R1"])
    stated = made(text.replace(r1, r1 + "\nsetting = 2.5"))[0]
    assert "set on site at 2.5" in stated.rows[1].remarks
    weak = made(text.replace("kv = [[0, 0.08]", 'least_signal = "90 kPa"\nkv = [[0, 0.08]'))[0]
    assert "signal below the least that can be read, 90.00 kPa" in weak.rows[1].remarks
    narrow = made(text.replace("kv = [[0, 0.08], [1, 0.16], [2, 0.35], [3, 0.60], ", "kv = [[3.9, 0.84], "))[0]
    assert "can't be set: outside its setting table" in narrow.rows[1].remarks


def test_the_text_has_room_for_what_is_measured() -> None:
    text = as_text(RUN)
    assert text.startswith("Ferry house\n  number     H-7\n  tolerance  10 %")
    assert text.count("measured flow ________  signal ________  date ________  signed ________") == 3
    assert re.search(r"^    2  R1 +LV 15 +15 mm +0\.029 +[0-9.]+ +[0-9.]+ +[0-9.]+$", text, re.MULTILINE)
    assert "Next step" not in text


@pytest.mark.parametrize("units", ["SI", "IP"])
@pytest.mark.parametrize("kind", FLUIDS)
def test_the_text_is_plain_and_narrow(kind: str, units: str) -> None:
    text = as_text(start(kind, FLUIDS[kind][0], "IP" if units == "IP" else "SI"))
    assert all(line.isprintable() for line in text.splitlines())
    assert not re.search(r"[ \t]$", text, re.MULTILINE)
    assert max(map(len, text.splitlines())) <= 100
    assert "nan" not in text


def test_long_and_odd_names_are_cut_and_plain() -> None:
    text = as_text(RUN.replace("terminal.R1", f'terminal."{"R" * 90}"').replace("LV 15", "LV\\u001b15" + "x" * 80))
    assert max(map(len, text.splitlines())) <= 120
    assert "\x1b" not in text


def test_readings_stand_in_the_text_with_the_next_step() -> None:
    text = as_text(RUN, READINGS)
    # 2.4 kW over 20 K at 4.18 kJ/(kg K) and 978 kg/m3 is 0.0293 L/s.
    assert "measured flow 0.014 L/s  49 %, low  date 2026-03-31  signed ________" in text
    # Kv 0.85 at setting 4: 0.85 sqrt(0.09) = 0.255 m3/h of water at 70 degC, a little more for its density.
    assert re.search(r"measured flow 0\.07\d L/s  2\d\d %, high  signal 9\.00 kPa  date ________", text)
    assert "Next step\n  Adjust R 2 on P1 from 2" in text
    assert "the share of R1" in text


def test_the_findings_of_measured_flows_stand_at_the_reading() -> None:
    found, _ = made(RUN, READINGS)
    assert [(one.code, one.path) for one in found.findings] == [
        ("measured-flow", ("reading", "R1", "flow")),
        ("measured-flow", ("reading", "R 2", "signal")),
    ]


def test_the_csv_is_that_of_rfc_4180() -> None:
    text = schedule_csv(*made(RUN.replace('"Hall"', "'Hall, \"north\"'"), READINGS))
    assert text.endswith("\r\n")
    assert text.replace("\r\n", "").count("\n") == 0
    assert '"Hall, ""north"""' in text
    rows = as_csv(RUN, READINGS)
    assert {len(row) for row in rows} == {19}
    head, r2, r1, p1 = (dict(zip(rows[0], row, strict=True)) for row in rows)
    assert head["design flow [L/s]"] == "design flow [L/s]"
    assert (r2["order"], r2["ID"], r2["branch"], r2["tolerance [%]"]) == ("1", "R 2", "P1", "10")
    assert (r1["measured flow [L/s]"], r1["verdict"], r1["date"], r1["signed"]) == ("0.014", "low", "2026-03-31", "")
    assert (p1["setting"], p1["measured flow [L/s]"], p1["percent of design"]) == ("", "", "")


@pytest.mark.parametrize("sign", ["=", "+", "-", "@", "\t=", " =", "\n@", "\uff1d"])
def test_no_cell_begins_a_formula(sign: str) -> None:
    title = json.dumps(f"{sign}1+1")
    rows = as_csv(RUN.replace('title = "Hall"', f"title = {title}"))
    assert rows[2][4].startswith("'")
    assert rows[2][4].endswith("1+1")


@given(st.text())
def test_any_text_becomes_a_harmless_cell(text: str) -> None:
    cell = harmless(text)
    for split in (cell, *cell.split(";")):
        assert not split.lstrip().startswith(("=", "+", "-", "@", "\uff1d", "\uff0b", "\uff0d", "\uff20"))
    assert cell.isprintable()


def test_json_is_in_si_and_has_no_figure_that_is_none() -> None:
    description = describe(read_text(RUN))
    found, _ = made(RUN, READINGS)
    whole = json.loads(json.dumps(schedule_json("0", "run.toml", description, found, (), ("site.toml", ()))))
    assert whole["readings"] == {"file": "site.toml", "findings": []}
    row = whole["schedule"][1]
    assert row["design_flow"] == pytest.approx(2.9e-5, rel=0.02)
    assert row["measured"]["share"] == pytest.approx(1.43e-5 / row["design_flow"])
    assert (row["measured"]["verdict"], row["measured"]["date"]) == ("low", "2026-03-31")
    assert whole["next"]["action"] == "adjust"
    assert whole["schedule"][2]["measured"] is None
    broken = RUN.replace('size = "22 mm"', 'size = "23 mm"')
    text = json.dumps(schedule_json("0", "f", describe(read_text(broken)), made(broken)[0], ()), allow_nan=False)
    assert [row["setting"] for row in json.loads(text)["schedule"]] == [None, None, None]


def test_a_run_with_errors_has_a_schedule_as_far_as_it_goes() -> None:
    text = as_text(RUN.replace('size = "22 mm"', 'size = "23 mm"'))
    assert "nan" not in text
    assert re.search(r"^    1  R1 +LV 15 +15 mm +0.029 +-( +-)+$", text, re.MULTILINE)
    assert "its margin is not known" in text
    assert as_text("format = 1\n").startswith("Untitled run\n")
