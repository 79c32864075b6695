"""The record of each section and terminal, as it is read from the arrays."""

from __future__ import annotations

import math
from collections.abc import Mapping

import pytest

from budget.network import lay_out
from tests.network.small import GAS, LIQUID, budget_of, description_of, evaluated_of

WATER = LIQUID.replace('name = "custom"\ndensity = 1000\nviscosity = 1\nspecific_heat = 4\n', 'name = "water"\n')

TREE = """
[fitting.bend]
k = 0.5
[device.DRV]
kv = [[0, 0.001], [4, 1000]]
least_drop = 1
[source]
P1 = { item = [{ drop = 6 }] }
[section]
M1 = { from = "P1", bore = 40, length = 0, item = [{ name = "Filter", drop = 5 }], balance = "DRV" }
B1 = { from = "M1", bore = 40, length = 0, item = [{ drop = 3 }] }
B2 = { from = "M1", bore = 40, length = 0, item = [{ drop = 4 }] }
[terminal]
T1 = { from = "B1", flow = 0.1, drop = 10 }
T2 = { from = "B2", flow = 0.2, drop = 6, balance = "DRV" }
"""


def test_records_stand_in_the_order_of_the_file() -> None:
    budget = budget_of(LIQUID + TREE)
    assert list(budget.sources) == ["P1"]
    assert list(budget.sections) == ["M1", "B1", "B2"]
    assert list(budget.terminals) == ["T1", "T2"]
    assert len(budget.sections) == 3


def test_records_are_a_mapping_made_once() -> None:
    sections = budget_of(LIQUID + TREE).sections
    assert isinstance(sections, Mapping)
    assert sections["M1"] is sections["M1"]
    assert "M1" in sections
    with pytest.raises(KeyError):
        sections["M9"]


def test_a_drop_is_friction_fittings_and_items_but_not_the_device() -> None:
    text = (LIQUID + TREE).replace(
        'M1 = { from = "P1", bore = 40, length = 0', 'M1 = { from = "P1", bore = 40, length = 3'
    )
    found = budget_of(text.replace("balance", "fittings = { bend = 4 }, balance", 1)).sections["M1"]
    run = found.run
    assert run.fittings > 0.0
    assert run.drop == pytest.approx(run.friction + run.fittings + 5000.0)
    assert found.device is not None
    assert found.device.base == pytest.approx(1000.0)
    assert run.k_total == pytest.approx(2.0)
    assert [(loss.name, loss.count, loss.k, loss.method) for loss in run.legs[0].losses] == [("bend", 4, 0.5, "own")]
    assert math.fsum(loss.drop for leg in run.legs for loss in leg.losses) == pytest.approx(run.fittings)


def test_cumulative_runs_from_the_source_s_outlet_to_the_end_of_each_section() -> None:
    # Plant is before the outlet. M1 5 + 1, B1 + 3, B2 + 4.
    sections = budget_of(LIQUID + TREE).sections
    found = {id_: section.cumulative / 1000 for id_, section in sections.items()}
    assert found == pytest.approx({"M1": 6.0, "B1": 9.0, "B2": 10.0})


def test_cumulative_counts_both_legs_of_paired_sections() -> None:
    text = (LIQUID + TREE).replace("length = 0", "length = 2")
    sections = budget_of(text).sections
    assert sections["B1"].cumulative == pytest.approx(sections["M1"].run.drop + 1000 + sections["B1"].run.drop)


RING = (
    LIQUID
    + """
[source]
P1 = { item = [{ drop = 6 }] }
[section]
S1 = { from = "P1", bore = 40, length = 0, paired = false, item = [{ drop = 5 }] }
S2 = { from = "S1", bore = 40, length = 0, paired = false, item = [{ drop = 1 }] }
R1 = { to = "R2", bore = 40, length = 0, item = [{ drop = 3 }] }
R2 = { to = "P1", bore = 40, length = 0, item = [{ drop = 2 }] }
[terminal]
T1 = { from = "S1", to = "R1", flow = 0.1, drop = 10 }
T2 = { from = "S2", to = "R2", flow = 0.1, drop = 7 }
"""
)


def test_on_the_way_back_cumulative_follows_the_largest_circuit_through_the_section() -> None:
    sections = budget_of(RING).sections
    # S1 5, S2 6. T1: 5 + 10 + 3 + 2 = 20; at the end of R1 18, of R2 20.
    found = {id_: section.cumulative / 1000 for id_, section in sections.items()}
    assert found == pytest.approx({"S1": 5.0, "S2": 6.0, "R1": 18.0, "R2": 20.0})


def test_flows_are_at_the_supply_s_density() -> None:
    text = (WATER + TREE).replace("flow = 0.1", 'flow = "0.1 kg/s"').replace("flow = 0.2", 'flow = "0.2 kg/s"')
    budget = budget_of(text)
    supply = budget.sources["P1"].fluid.density
    assert budget.sections["M1"].run.flow == pytest.approx(0.3 / supply)
    assert budget.sections["M1"].run.mass_flow == pytest.approx(0.3)
    assert budget.terminals["T1"].flow == pytest.approx(0.1 / supply)
    assert budget.sources["P1"].duty_flow == pytest.approx(0.3 / supply)
    assert [leg.leg for leg in budget.sections["M1"].run.legs] == ["supply", "return"]


def test_a_volume_flow_is_stated_at_the_supply_temperature() -> None:
    budget = budget_of(WATER + TREE)
    supply = budget.sources["P1"].fluid.density
    assert budget.terminals["T1"].mass_flow == pytest.approx(0.0001 * supply)


def test_geometry_is_reported_as_it_was_stated() -> None:
    text = GAS + (
        "[source]\nF1 = {}\n[section]\n"
        'R = { from = "F1", size = "250 mm", length = 1 }\nQ = { from = "F1", size = "400x200", length = 1 }\n'
        'O = { from = "F1", size = "oval 500x250", length = 1 }\n[terminal]\n'
        'S1 = { from = "R", flow = 90, drop = 5 }\nS2 = { from = "Q", flow = 90, drop = 5 }\n'
        'S3 = { from = "O", flow = 90, drop = 5 }\n'
    )
    sections = budget_of(text).sections
    found = {id_: (s.run.bore, s.run.width, s.run.height) for id_, s in sections.items()}
    assert found == {"R": (0.25, None, None), "Q": (None, 0.4, 0.2), "O": (None, 0.5, 0.25)}
    # pi/4 x 0.0625; 0.08; pi/4 x 0.0625 + 0.25 x 0.25
    assert [s.run.area for s in sections.values()] == pytest.approx([0.0490874, 0.08, 0.1115874], rel=1e-6)
    # 4A/P: 0.25; 0.32/1.2; 0.4463495/(0.25 pi + 0.5)
    assert [s.run.hydraulic_diameter for s in sections.values()] == pytest.approx(
        [0.25, 0.2666667, 0.3472461], rel=1e-6
    )


def test_items_are_reported_with_their_headings() -> None:
    text = (LIQUID + TREE).replace(
        "drop = 10 }",
        'drop = 10, item = [{ name = "Valve", drop = 2, control = "two-port" }, { drop = 1, heading = "static" }] }',
    )
    budget = budget_of(text)
    assert [(item.name, item.drop, item.heading) for item in budget.sections["M1"].items] == [
        ("Filter", 5000.0, "distribution")
    ]
    assert [(item.name, item.heading, item.control) for item in budget.terminals["T1"].items] == [
        ("Valve", "control", "two-port"),
        ("item", "static", None),
    ]
    assert [item.heading for item in budget.sources["P1"].items] == ["plant"]
    assert budget.terminals["T1"].items_drop == pytest.approx(3000.0)
    assert budget.sections["B1"].run.items == pytest.approx(3000.0)


def test_a_run_out_is_a_part_of_its_terminal() -> None:
    text = (LIQUID + TREE).replace("T1 = {", "T1 = { bore = 15, length = 1,")
    budget = budget_of(text)
    terminal = budget.terminals["T1"]
    assert terminal.run_out is not None
    assert terminal.run_out.bore == pytest.approx(0.015)
    assert terminal.run_out.items == 0.0
    # 6 + 5 + 1 + 3 + 10 and the run-out
    assert terminal.circuit == pytest.approx(25_000.0 + terminal.run_out.drop)
    assert terminal.path == ("M1", "B1", "B1", "M1")
    assert budget.terminals["T2"].run_out is None


def test_a_source_names_its_fluid_on_both_legs() -> None:
    budget = budget_of((WATER + TREE).replace("P1 = {", 'P1 = { temperature = "60 degC", '))
    fluid = budget.sources["P1"].fluid
    assert fluid.name == "water"
    assert fluid.density == pytest.approx(983.2, rel=1e-3)  # IAPWS at 60 degC
    assert fluid.return_density == pytest.approx(988.0, rel=1e-3)  # 50 degC


def test_a_section_without_terminals_has_no_margin() -> None:
    text = (LIQUID + TREE).replace("[terminal]", 'B3 = { from = "M1", bore = 40, length = 1 }\n[terminal]')
    section = evaluated_of(text).sections["B3"]
    assert section.serves == ()
    assert math.isnan(section.margin)
    assert section.run.flow == 0.0
    assert section.run.drop == 0.0


@pytest.mark.parametrize(("flow", "regime"), [(0.05, "laminar"), (0.1, "transitional"), (0.5, "turbulent")])
def test_the_regime_is_named(flow: float, regime: str) -> None:
    # Re = 4 m/(pi D mu) = 1592, 3183 and 15 915 in 40 mm
    text = LIQUID + (
        '[source]\nP1 = {}\n[section]\nM1 = { from = "P1", bore = 40, length = 1 }\n'
        f'[terminal]\nT1 = {{ from = "M1", flow = {flow}, drop = 1 }}\n'
    )
    assert {leg.regime for leg in budget_of(text).sections["M1"].run.legs} == {regime}


def test_findings_are_those_of_reading_connecting_and_computing() -> None:
    text = (
        (LIQUID + TREE)
        .replace('B2 = { from = "M1"', 'B2 = { from = "M7", colour = "red"')
        .replace("[source]", "[limits]\nvelocity = 0.01\n[source]")
        .replace("flow = 0.1", "flow = 1")
    )
    codes = [finding.code for finding in evaluated_of(text).findings]
    assert codes[0] == "unknown-key"
    assert "dangling" in codes
    assert codes[-1] == "velocity"


def test_laying_out_twice_gives_the_same() -> None:
    description = description_of(LIQUID + TREE)
    first, second = lay_out(description), lay_out(description)
    assert first.legs.parent.tolist() == second.legs.parent.tolist()
    assert first.order.tolist() == second.order.tolist()


def test_cumulative_does_not_hang_on_the_order_of_the_file() -> None:
    lines = RING.splitlines()
    first = lines.index("[section]") + 1
    lines[first : first + 4] = reversed(lines[first : first + 4])
    sections = budget_of("\n".join(lines)).sections
    assert list(sections) == ["R2", "R1", "S2", "S1"]
    found = {id_: section.cumulative / 1000 for id_, section in sections.items()}
    assert found == pytest.approx({"S1": 5.0, "S2": 6.0, "R1": 18.0, "R2": 20.0})
