"""Two sources in one file, a reverse return and a pump at constant pressure: from file to flows as installed."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from budget.commands import main

RUN = """format = 1
[design]
title = "Two pumps"
[fluid]
name = "water"
temperature = "70 degC"
return_temperature = "50 degC"
[defaults]
pipe = "steel"
takeoff = "none"
[limits]
tolerance = "10 %"
[pipe.steel]
catalogue = "steel EN 10255 medium"
[device."LV 20"]
kv = [[0.5, 0.1], [1, 0.4], [2, 1.2], [3, 2.2], [4, 3.5]]
least_drop = "1 kPa"

[source.P1]
title = "Reverse return"
available = "40 kPa"
efficiency = 0.5
[section.A1]
from = "P1"
size = "DN32"
length = "12 m"
[section.A2]
from = "A1"
size = "DN25"
length = "8 m"
[section.A3]
from = "A2"
size = "DN20"
length = "8 m"
[section.B1]
to = "B2"
size = "DN20"
length = "8 m"
[section.B2]
to = "B3"
size = "DN25"
length = "8 m"
[section.B3]
to = "P1"
size = "DN32"
length = "30 m"
[terminal.C1]
from = "A1"
to = "B1"
flow = "0.12 L/s"
drop = "9 kPa"
balance = "LV 20"
[terminal.C2]
from = "A2"
to = "B2"
flow = "0.12 L/s"
drop = "9 kPa"
balance = "LV 20"
[terminal.C3]
from = "A3"
to = "B3"
flow = "0.12 L/s"
drop = "9 kPa"
balance = "LV 20"

[source.P2]
title = "Constant pressure"
controls = "differential"
set_point = "30 kPa"
efficiency = 0.5
[section.D1]
from = "P2"
size = "DN25"
length = "15 m"
paired = true
[section.D2]
from = "D1"
size = "DN20"
length = "10 m"
paired = true
[terminal.R1]
from = "D1"
flow = "0.10 L/s"
drop = "12 kPa"
balance = "LV 20"
[terminal.R2]
from = "D2"
flow = "0.10 L/s"
drop = "12 kPa"
balance = "LV 20"

[case.night]
off = ["R1"]
"""


def printed(capsys: pytest.CaptureFixture[str], *arguments: str) -> Any:
    main([*arguments, "--json"])
    return json.loads(capsys.readouterr().out)


def test_a_reverse_return_and_a_constant_pressure(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    file = tmp_path / "run.toml"
    file.write_text(RUN)

    # The budget: each source by itself, and a reverse return that needs next to no balancing.
    assert main(["check", str(file)]) == 0
    capsys.readouterr()
    budget = printed(capsys, "check", str(file))
    margins = [budget["terminals"][id_]["margin"] for id_ in ("C1", "C2", "C3")]
    assert max(margins) < 0.02 * budget["sources"]["P1"]["required"]
    assert min(margins) == 0.0
    assert budget["terminals"]["C3"]["path"] == ["A1", "A2", "A3", "B3"]
    assert budget["sources"]["P2"]["index"] == ["R2"]

    # The schedule hands over a setting for every terminal, branch by branch, each pump last.
    schedule = printed(capsys, "balance", str(file))
    order = [row["id"] for row in schedule["schedule"]]
    assert order.index("P1") < order.index("R2") < order.index("P2")

    # With the devices set, the reverse return has its design flows; the other pump holds more than its circuit needs.
    flows = printed(capsys, "flows", str(file), "--devices", "set")
    for id_ in ("C1", "C2", "C3"):
        assert flows["terminals"][id_]["share"] == pytest.approx(1.0, abs=1e-3)
        assert flows["terminals"][id_]["within"]
    assert flows["sources"]["P1"]["pressure"] == pytest.approx(budget["sources"]["P1"]["required"], rel=1e-6)
    assert flows["sources"]["P2"]["pressure"] == pytest.approx(30e3, rel=1e-6)
    over = flows["terminals"]["R2"]["share"]
    assert over > 1.3
    assert not flows["terminals"]["R2"]["within"]

    # One terminal off: the pump keeps its pressure, so the other gains only what the main no longer costs.
    night = printed(capsys, "flows", str(file), "--devices", "set", "--case", "night")
    assert night["terminals"]["R1"]["flow"] == pytest.approx(0.0, abs=1e-9)
    assert night["sources"]["P2"]["pressure"] == pytest.approx(30e3, rel=1e-6)
    assert over < night["terminals"]["R2"]["share"] < 1.08 * over
    for id_ in ("C1", "C2", "C3"):
        assert night["terminals"][id_]["flow"] == pytest.approx(flows["terminals"][id_]["flow"], rel=1e-6)

    # Held to what it needs, the second pump too gives its terminals their design flow.
    required = budget["sources"]["P2"]["required"]
    assert main(["set", str(file), "source.P2.set_point", f"{required} Pa"]) == 0
    capsys.readouterr()
    settled = printed(capsys, "flows", str(file), "--devices", "set")
    for id_ in ("R1", "R2"):
        assert settled["terminals"][id_]["share"] == pytest.approx(1.0, abs=1e-3)
