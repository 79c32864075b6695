"""Circuits, the index circuit, margins and differentials, in kilopascals that can be added up in the head."""

from __future__ import annotations

import pytest

from budget.network import Budget
from tests.network.small import GAS, LIQUID, budget_of, errors_of

TREE = (
    LIQUID
    + """
[device.DRV]
kv = [[0, 1], [4, 1000]]
least_drop = 2
[source]
P1 = { item = [{ drop = 6 }] }
[section]
M1 = { from = "P1", bore = 40, length = 0, item = [{ drop = 5 }] }
B1 = { from = "M1", bore = 40, length = 0, item = [{ drop = 3 }], balance = "DRV" }
B2 = { from = "M1", bore = 40, length = 0, item = [{ drop = 4 }] }
[terminal]
T1 = { from = "B1", flow = 0.1, drop = 10, item = [{ drop = 1 }] }
T2 = { from = "B1", flow = 0.1, drop = 6, balance = "DRV" }
T3 = { from = "B2", flow = 0.1, drop = 7 }
"""
)


def kilopascals(budget: Budget, figure: str) -> dict[str, float]:
    return {id_: getattr(terminal, figure) / 1000 for id_, terminal in budget.terminals.items()}


def test_a_circuit_is_the_plain_sum_of_its_path() -> None:
    # T1: 6 + 5 + (3 + 2) + 10 + 1; T2: 6 + 5 + (3 + 2) + 6 + 2; T3: 6 + 5 + 4 + 7
    budget = budget_of(TREE)
    assert kilopascals(budget, "circuit") == pytest.approx({"T1": 27.0, "T2": 24.0, "T3": 22.0})
    assert budget.sources["P1"].required == pytest.approx(27_000.0)
    assert budget.sources["P1"].index == ("T1",)


def test_a_margin_is_what_a_circuit_lies_below_the_required_pressure() -> None:
    budget = budget_of(TREE)
    assert kilopascals(budget, "margin") == pytest.approx({"T1": 0.0, "T2": 3.0, "T3": 5.0})
    margins = {id_: section.margin / 1000 for id_, section in budget.sections.items()}
    # The least of the terminals that it serves.
    assert margins == pytest.approx({"M1": 0.0, "B1": 0.0, "B2": 5.0})


def test_adding_a_section_s_margin_to_it_makes_it_part_of_the_index_circuit() -> None:
    budget = budget_of(TREE.replace("drop = 4", "drop = 9"))
    assert budget.sources["P1"].required == pytest.approx(27_000.0)
    assert budget.sources["P1"].index == ("T1",)
    assert [id_ for id_, terminal in budget.terminals.items() if terminal.index] == ["T1", "T3"]
    assert budget_of(TREE.replace("drop = 4", "drop = 9.001")).sources["P1"].index == ("T3",)


def test_the_index_path_is_marked() -> None:
    budget = budget_of(TREE)
    assert {id_: section.index for id_, section in budget.sections.items()} == {"M1": True, "B1": True, "B2": False}


def test_a_differential_is_what_is_available_where_a_thing_is_connected() -> None:
    budget = budget_of(TREE)
    # M1 at the pump: 27 - 6; B1 and B2: less 5 for M1; T1 and T2: less 5 for B1 with its device; T3: less 4 for B2.
    sections = {id_: (section.differential or 0.0) / 1000 for id_, section in budget.sections.items()}
    assert sections == pytest.approx({"M1": 21.0, "B1": 16.0, "B2": 16.0})
    assert kilopascals(budget, "differential") == pytest.approx({"T1": 11.0, "T2": 11.0, "T3": 12.0})


def test_the_differential_of_a_terminal_is_that_at_the_start_of_its_run_out() -> None:
    text = TREE.replace("T3 = {", "T3 = { bore = 15, length = 2,")
    terminal = budget_of(text).terminals["T3"]
    assert terminal.run_out is not None
    assert terminal.run_out.drop > 100.0
    assert terminal.differential == pytest.approx(12_000.0)
    assert terminal.circuit == pytest.approx(22_000.0 + terminal.run_out.drop)


def test_an_unpaired_section_of_a_liquid_has_no_differential() -> None:
    text = LIQUID + (
        "[source]\nP1 = {}\n[section]\n"
        'S = { from = "P1", bore = 40, length = 0, paired = false, item = [{ drop = 5 }] }\n'
        'R = { to = "P1", bore = 40, length = 0, item = [{ drop = 2 }] }\n'
        '[terminal]\nT1 = { from = "S", to = "R", flow = 0.1, drop = 3 }\n'
        'T2 = { from = "S", to = "P1", flow = 0.1, drop = 3 }\n'
    )
    budget = budget_of(text)
    assert budget.sections["S"].differential is None
    assert budget.sections["R"].differential is None
    # 10 - 5 on the way out - 2 on the way back, and 10 - 5 alone
    assert kilopascals(budget, "differential") == pytest.approx({"T1": 3.0, "T2": 5.0})


@pytest.mark.parametrize(
    ("less", "tied"),
    [(0.0, True), (1e-5, True), (1e-3, False)],  # Pa; a tie is within 1e-9 of 27 000 Pa, 2.7e-5 Pa
)
def test_circuits_that_come_within_1e_9_are_a_tie_and_all_are_marked(less: float, tied: bool) -> None:
    text = TREE.replace("drop = 7", f'drop = "{12_000.0 - less:.6f} Pa"')
    budget = budget_of(text)
    assert [id_ for id_, terminal in budget.terminals.items() if terminal.index] == ["T1", "T3"] if tied else ["T1"]
    assert budget.sections["B2"].index is tied
    # The first in the order of the file is named.
    assert budget.sources["P1"].index == ("T1",)


def test_of_a_tie_the_first_in_the_file_is_named() -> None:
    lines = TREE.replace("drop = 7", "drop = 12").splitlines()
    first = next(number for number, line in enumerate(lines) if line.startswith("T1"))
    lines.insert(first, lines.pop())
    budget = budget_of("\n".join(lines))
    assert budget.sources["P1"].index == ("T3",)
    assert budget.terminals["T1"].index
    assert budget.terminals["T3"].index


def test_two_sources_have_circuits_of_their_own() -> None:
    text = TREE.replace("[section]", "P2 = {}\n[section]") + 'T4 = { from = "P2", flow = 0.1, drop = 50 }\n'
    budget = budget_of(text)
    assert budget.sources["P1"].required == pytest.approx(27_000.0)
    assert budget.sources["P2"].required == pytest.approx(50_000.0)
    assert budget.sources["P2"].index == ("T4",)
    assert budget.terminals["T4"].source == "P2"


FAN = (
    GAS
    + """
[source]
F1 = { item = [{ drop = 100 }] }
[section]
D1 = { from = "F1", size = "300 mm", length = 0, item = [{ drop = 20 }] }
D2 = { from = "D1", size = "300 mm", length = 0, item = [{ drop = 30 }] }
E1 = { to = "F1", size = "300 mm", length = 0, item = [{ drop = 15 }] }
[terminal]
S1 = { from = "D1", flow = 50, drop = 40 }
S2 = { from = "D2", flow = 50, drop = 25 }
X1 = { to = "E1", flow = 60, drop = 12 }
X2 = { to = "E1", flow = 40, drop = 9 }
"""
)


def test_each_side_of_a_fan_has_its_own_index_circuit() -> None:
    budget = budget_of(FAN)
    source = budget.sources["F1"]
    # Discharge: 20 + 40 = 60 against 20 + 30 + 25 = 75; suction: 15 + 12 = 27 against 24; items 100.
    assert source.discharge_required == pytest.approx(75.0)
    assert source.suction_required == pytest.approx(27.0)
    assert source.required == pytest.approx(202.0)
    assert source.index == ("S2", "X1")
    margins = {id_: terminal.margin for id_, terminal in budget.terminals.items()}
    assert margins == pytest.approx({"S1": 15.0, "S2": 0.0, "X1": 0.0, "X2": 3.0})
    circuits = {id_: terminal.circuit for id_, terminal in budget.terminals.items()}
    assert circuits == pytest.approx({"S1": 60.0, "S2": 75.0, "X1": 27.0, "X2": 24.0})


def test_a_differential_of_a_gas_is_what_its_side_has_left() -> None:
    budget = budget_of(FAN)
    sections = {id_: section.differential for id_, section in budget.sections.items()}
    assert sections == pytest.approx({"D1": 75.0, "D2": 55.0, "E1": 27.0})
    assert budget.terminals["S1"].differential == pytest.approx(55.0)
    assert budget.terminals["X2"].differential == pytest.approx(12.0)


def test_a_side_that_carries_nothing_has_no_required_pressure() -> None:
    text = "\n".join(line for line in FAN.splitlines() if not line.startswith(("E1", "X1", "X2")))
    source = budget_of(text).sources["F1"]
    assert source.suction_required is None
    assert source.required == pytest.approx(175.0)
    assert source.index == ("S2",)


HELD = (
    LIQUID
    + """
[device.DPV]
holds = "differential"
least_drop = 2
SET_POINT
[source]
P1 = { item = [{ drop = 6 }] }
[section]
M1 = { from = "P1", bore = 40, length = 0, item = [{ drop = 5 }] }
B1 = { from = "M1", bore = 40, length = 0, item = [{ drop = 3 }], balance = "DPV" }
C1 = { from = "B1", bore = 40, length = 0, item = [{ drop = 1 }] }
[terminal]
T1 = { from = "C1", flow = 0.1, drop = 9 }
T2 = { from = "B1", flow = 0.1, drop = 6 }
T3 = { from = "M1", flow = 0.1, drop = 20 }
"""
)


def held(set_point: str = "", outer: str = "drop = 20") -> Budget:
    text = HELD.replace("SET_POINT", f"set_point = {set_point}" if set_point else "")
    return budget_of(text.replace("drop = 20", outer))


def test_behind_a_holding_device_the_set_point_takes_the_place_of_required() -> None:
    budget = held()
    # Behind: T1 1 + 9 = 10, T2 6; so 10 is held. Outside that counts 6 + 5 + 3 + 2 + 10 = 26; T3 6 + 5 + 20 = 31.
    assert budget.sources["P1"].required == pytest.approx(31_000.0)
    assert kilopascals(budget, "margin") == pytest.approx({"T1": 0.0, "T2": 4.0, "T3": 0.0})
    assert kilopascals(budget, "circuit") == pytest.approx({"T1": 26.0, "T2": 22.0, "T3": 31.0})
    # B1 carries the device: its margin is in the outer system. C1 is behind it.
    margins = {id_: section.margin / 1000 for id_, section in budget.sections.items()}
    assert margins == pytest.approx({"M1": 0.0, "B1": 5.0, "C1": 0.0})
    assert budget.sections["B1"].device is not None
    assert budget.sections["B1"].device.set_point == pytest.approx(10_000.0)


def test_a_stated_set_point_gives_a_margin_behind_and_costs_outside() -> None:
    budget = held("12")
    # Outside: 6 + 5 + 3 + 2 + 12 = 28 of 31.
    assert kilopascals(budget, "margin") == pytest.approx({"T1": 2.0, "T2": 6.0, "T3": 0.0})
    assert kilopascals(budget, "circuit") == pytest.approx({"T1": 26.0, "T2": 22.0, "T3": 31.0})
    assert budget.sections["B1"].margin == pytest.approx(3000.0)
    assert budget.sections["C1"].margin == pytest.approx(2000.0)


def test_a_differential_behind_a_holding_device_is_of_its_set_point() -> None:
    budget = held("12")
    # Outside: M1 31 - 6, B1 less 5; behind: C1 and T2 the set point, T1 less 1.
    sections = {id_: (section.differential or 0.0) / 1000 for id_, section in budget.sections.items()}
    assert sections == pytest.approx({"M1": 25.0, "B1": 20.0, "C1": 12.0})
    assert kilopascals(budget, "differential") == pytest.approx({"T1": 11.0, "T2": 12.0, "T3": 20.0})


def test_the_index_circuit_may_lead_behind_a_holding_device() -> None:
    budget = held("12", "drop = 16")
    # 28 by the set point against 27 of T3; the largest circuit behind is that of T1.
    source = budget.sources["P1"]
    assert source.required == pytest.approx(28_000.0)
    assert source.index == ("T1",)
    assert [id_ for id_, section in budget.sections.items() if section.index] == ["M1", "B1", "C1"]
    assert not budget.terminals["T2"].index
    # Spent adds up to the required pressure: 2 of the set point are taken by what balances behind it.
    assert sum(source.spent.values()) == pytest.approx(28_000.0)
    assert source.spent["balancing"] == pytest.approx(4000.0)


def test_holding_devices_may_stand_one_behind_the_other() -> None:
    text = HELD.replace("SET_POINT", "").replace(
        'M1 = { from = "P1", bore = 40, length = 0, item = [{ drop = 5 }] }',
        'M1 = { from = "P1", bore = 40, length = 0, item = [{ drop = 5 }], balance = "DPV" }',
    )
    budget = budget_of(text)
    # Behind M1: the inner system as one terminal 3 + 2 + 10 = 15, T3 20; so 20 is held there, 6 + 5 + 2 + 20 outside.
    assert budget.sources["P1"].required == pytest.approx(33_000.0)
    assert kilopascals(budget, "margin") == pytest.approx({"T1": 0.0, "T2": 4.0, "T3": 0.0})
    margins = {id_: section.margin / 1000 for id_, section in budget.sections.items()}
    assert margins == pytest.approx({"M1": 0.0, "B1": 5.0, "C1": 0.0})
    assert kilopascals(budget, "circuit") == pytest.approx({"T1": 28.0, "T2": 24.0, "T3": 33.0})
    sections = {id_: (section.differential or 0.0) / 1000 for id_, section in budget.sections.items()}
    assert sections == pytest.approx({"M1": 27.0, "B1": 20.0, "C1": 10.0})


def test_a_section_outside_nested_holding_devices_takes_its_margin_outside() -> None:
    text = (
        HELD.replace("SET_POINT", "")
        .replace("C1 = {", 'A1 = { from = "P1", bore = 40, length = 0 }\nC1 = {')
        .replace('M1 = { from = "P1"', 'M1 = { from = "A1"')
        .replace(
            'from = "A1", bore = 40, length = 0, item = [{ drop = 5 }] }',
            'from = "A1", bore = 40, length = 0, item = [{ drop = 5 }], balance = "DPV" }',
        )
        + 'T4 = { from = "P1", flow = 0.1, drop = 40 }\n'
    )
    budget = budget_of(text)
    # 6 + 40 = 46 against 33 of all that hangs on A1.
    assert budget.sections["A1"].margin == pytest.approx(13_000.0)
    assert budget.sections["M1"].margin == pytest.approx(13_000.0)
    assert budget.sections["B1"].margin == pytest.approx(5000.0)


def test_all_behind_a_holding_device_must_return_by_its_paired_leg() -> None:
    text = HELD.replace("SET_POINT", "").replace('T2 = { from = "B1",', 'T2 = { from = "B1", to = "M1",')
    assert errors_of(text) == [("held-differently", "section.B1.balance")]


def test_what_joins_the_return_of_a_holding_section_from_elsewhere_is_refused() -> None:
    text = HELD.replace("SET_POINT", "").replace('T3 = { from = "M1",', 'T3 = { from = "M1", to = "B1",')
    assert errors_of(text) == [("held-differently", "section.B1.balance")]


def test_a_set_point_below_the_largest_circuit_behind_is_an_error() -> None:
    assert errors_of(HELD.replace("SET_POINT", "set_point = 9.999")) == [("set-point", "device.DPV.set_point")]
    assert errors_of(HELD.replace("SET_POINT", "set_point = 10")) == []


def test_a_falling_run_may_need_less_than_nothing() -> None:
    text = LIQUID.replace("paired = true\n", "") + (
        "[source]\nP1 = { open = true }\n[section]\n"
        'M1 = { from = "P1", bore = 40, length = 0, rise = -5, item = [{ drop = 1 }] }\n'
        '[terminal]\nT1 = { from = "M1", flow = 0.1, outlet_pressure = 3 }\n'
        'T2 = { from = "M1", flow = 0.1, outlet_pressure = 2 }\n'
    )
    budget = budget_of(text)
    # 1 + 3 - 5 x 9.80665
    assert budget.sources["P1"].required == pytest.approx(-45_033.25)
    assert budget.sources["P1"].index == ("T1",)
    assert kilopascals(budget, "margin") == pytest.approx({"T1": 0.0, "T2": 1.0})


def test_a_holding_device_s_section_costs_both_its_legs_outside() -> None:
    text = HELD.replace("SET_POINT", "").replace(
        'B1 = { from = "M1", bore = 40, length = 0', 'B1 = { from = "M1", bore = 20, length = 8'
    )
    budget = budget_of(text.replace("drop = 20", "drop = 90"))
    run = budget.sections["B1"].run
    assert len(run.legs) == 2
    assert run.friction > 100.0
    # Outside: 6 + 5 + 3 + 2 + 10 and the friction of B1, of 6 + 5 + 90.
    assert budget.sections["B1"].margin == pytest.approx(75_000.0 - run.friction)
    assert budget.terminals["T1"].circuit == pytest.approx(26_000.0 + run.friction)
    # Behind, nothing of it counts.
    assert kilopascals(budget, "margin") == pytest.approx({"T1": 0.0, "T2": 4.0, "T3": 0.0})


def test_two_holding_devices_side_by_side_have_systems_of_their_own() -> None:
    text = HELD.replace("SET_POINT", "").replace(
        "[terminal]", 'B2 = { from = "M1", bore = 40, length = 0, balance = "DPV" }\n[terminal]'
    )
    budget = budget_of(
        text + 'T4 = { from = "B2", flow = 0.1, drop = 8 }\nT5 = { from = "B2", flow = 0.1, drop = 5 }\n'
    )
    assert kilopascals(budget, "margin") == pytest.approx({"T1": 0.0, "T2": 4.0, "T3": 0.0, "T4": 0.0, "T5": 3.0})
    # B2: 6 + 5 + 2 + 8 = 21 of 31
    margins = {id_: section.margin / 1000 for id_, section in budget.sections.items()}
    assert margins == pytest.approx({"M1": 0.0, "B1": 5.0, "C1": 0.0, "B2": 10.0})


def test_three_holding_devices_one_behind_the_other() -> None:
    text = (
        LIQUID
        + """
[device.DPV]
holds = "differential"
least_drop = 2
[source]
P1 = {}
[section]
A = { from = "P1", bore = 40, length = 0, balance = "DPV" }
B = { from = "A", bore = 40, length = 0, balance = "DPV" }
C = { from = "B", bore = 40, length = 0, balance = "DPV" }
[terminal]
T1 = { from = "C", flow = 0.1, drop = 4 }
T2 = { from = "B", flow = 0.1, drop = 9 }
T3 = { from = "A", flow = 0.1, drop = 16 }
T4 = { from = "P1", flow = 0.1, drop = 25 }
"""
    )
    budget = budget_of(text)
    # Held behind C 4, behind B max(2 + 4, 9), behind A max(2 + 9, 16); outside max(2 + 16, 25).
    margins = {id_: section.margin / 1000 for id_, section in budget.sections.items()}
    assert margins == pytest.approx({"A": 7.0, "B": 5.0, "C": 3.0})
    taken = {id_: section.device.take_up / 1000 for id_, section in budget.sections.items() if section.device}
    assert taken == pytest.approx({"A": 7.0, "B": 5.0, "C": 3.0})
    assert kilopascals(budget, "circuit") == pytest.approx({"T1": 10.0, "T2": 13.0, "T3": 18.0, "T4": 25.0})
    assert budget.sources["P1"].index == ("T4",)


def test_a_holding_device_with_nothing_behind_it_but_another_has_its_margin() -> None:
    text = (
        LIQUID
        + """
[device.DPV]
holds = "differential"
least_drop = 2
[source]
P1 = {}
[section]
M = { from = "P1", bore = 40, length = 0 }
A = { from = "M", bore = 40, length = 0, balance = "DPV" }
B = { from = "A", bore = 40, length = 0, balance = "DPV" }
[terminal]
T1 = { from = "B", flow = 0.1, drop = 4 }
T4 = { from = "P1", flow = 0.1, drop = 25 }
"""
    )
    budget = budget_of(text)
    # Behind A 2 + 4 are held, and 2 + 6 outside: M and A have 17 of 25 left, B nothing of the 6.
    margins = {id_: section.margin / 1000 for id_, section in budget.sections.items()}
    assert margins == pytest.approx({"M": 17.0, "A": 17.0, "B": 0.0})
    taken = {id_: section.device.take_up / 1000 for id_, section in budget.sections.items() if section.device}
    assert taken == pytest.approx({"A": 17.0, "B": 0.0})
