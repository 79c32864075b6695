"""Leakage of ducts by class: surface, mean static pressure, and the reserve that must cover it."""

from __future__ import annotations

import pytest

from budget.description import describe, read_text
from budget.network import evaluate

RUN = """format = 1
[fluid]
name = "custom"
density = "1.2 kg/m3"
viscosity = "0.018 mPa s"
[defaults]
duct = "sheet"
[duct.sheet]
roughness = "0.09 mm"
[source.F1]
flow_reserve = "FLOW"
[section.D1]
KEY = "F1"
size = "500x400"
length = "20 m"
leakage = "ATC 3"
[terminal.T1]
KEY = "D1"
flow = "1 m3/s"
drop = "200 Pa"
"""


def leaking(key: str, reserve: str = "5 %") -> tuple[float, float, set[str]]:
    budget = evaluate(describe(read_text(RUN.replace("KEY", key).replace("FLOW", reserve))))
    section, source = budget.sections["D1"].run.leakage, budget.sources["F1"].leakage
    assert section is not None
    assert source is not None
    return section, source, {finding.code for finding in budget.findings}


def test_a_discharge_duct_leaks_at_its_mean_static_pressure() -> None:
    # Velocity 1/(0.5 x 0.4) = 5 m/s, velocity pressure 0.6 x 25 = 15 Pa; surface 2 (0.5 + 0.4) 20 = 36 m2.
    section, source, _ = leaking("from")
    drop = evaluate(describe(read_text(RUN.replace("KEY", "from").replace("FLOW", "0 %")))).sections["D1"].run.drop
    static = 200.0 + drop / 2 - 15.0
    assert section == pytest.approx(0.003e-3 * static**0.65 * 36.0, rel=1e-9)
    assert source == section


def test_a_suction_duct_is_further_below_the_room_by_its_velocity_pressure() -> None:
    section, _, _ = leaking("to")
    drop = evaluate(describe(read_text(RUN.replace("KEY", "to").replace("FLOW", "0 %")))).sections["D1"].run.drop
    assert section == pytest.approx(0.003e-3 * (200.0 + drop / 2 + 15.0) ** 0.65 * 36.0, rel=1e-9)


def test_the_flow_reserve_must_cover_it() -> None:
    # 0.003 x 190^0.65 x 36 = 3.3 L/s of 1000.
    assert "leakage" not in leaking("from", "1 %")[2]
    assert "leakage" in leaking("from", "0.1 %")[2]


def test_a_pipe_has_no_class() -> None:
    text = RUN.replace("KEY", "from").replace("FLOW", "0 %").replace('duct = "sheet"', 'pipe = "sheet"')
    text = text.replace("[duct.sheet]", "[pipe.sheet]").replace('size = "500x400"', 'bore = "300 mm"')
    assert ("contradiction", "leakage") in {(f.code, f.path[-1]) for f in describe(read_text(text)).findings if f.path}
