"""What the pump or fan must deliver: duty = static + (1 + reserve) (N f^2 + H), powers, and the spending by heading."""

from __future__ import annotations

import pytest

from budget.network import SourceResult
from tests.network.small import GAS, LIQUID, budget_of, evaluated_of

RESERVES = 'reserve = "10 %", flow_reserve = "5 %"'
"""f = 1.05, f^2 = 1.1025; (1 + reserve) = 1.1; so N grows by 1.21275 and H by 1.1."""

DEVICES = """
[device.DRV]
kv = [[0, 0.001], [4, 1000]]
least_drop = 1
[device.PIV]
holds = "flow"
least_drop = 5
[device.DPV]
holds = "differential"
least_drop = 2
"""

TREE = (
    LIQUID
    + DEVICES
    + """
[source]
P1 = { RESERVES, SOURCE item = [{ drop = 6 }] }
[section]
M1 = { from = "P1", bore = 40, length = 0, MAIN item = [{ drop = 5 }] }
B1 = { from = "M1", bore = 40, length = 0, BRANCH item = [{ drop = 3 }] }
C1 = { from = "B1", bore = 40, length = 0, item = [{ drop = 2 }] }
[terminal]
T1 = { from = "C1", flow = 0.1, TERMINAL drop = 10, item = [{ drop = 4 }] }
T2 = { from = "M1", flow = 0.1, drop = 1 }
"""
)


def source(
    main: str = "", branch: str = "", terminal: str = "", own: str = "", reserves: str = RESERVES
) -> SourceResult:
    text = TREE.replace("RESERVES", reserves).replace("SOURCE", own).replace("MAIN", main)
    return budget_of(text.replace("BRANCH", branch).replace("TERMINAL", terminal)).sources["P1"]


def test_without_reserves_the_duty_is_the_required_pressure() -> None:
    found = source(reserves="running = 1")
    # 6 + 5 + 3 + 2 + 10 + 4
    assert (found.required, found.duty, found.reserve) == pytest.approx((30_000.0, 30_000.0, 0.0))
    assert (found.flow, found.duty_flow) == pytest.approx((0.0002, 0.0002))


def test_what_grows_with_the_flow_is_raised_by_its_square() -> None:
    found = source()
    assert found.duty == pytest.approx(36_382.5)  # 30 x 1.21275
    assert found.reserve == pytest.approx(6382.5)
    assert found.duty_flow == pytest.approx(0.00021)


def test_a_flow_reserve_alone_leaves_the_pressure_reserve_out() -> None:
    assert source(reserves="flow_reserve = 0.05").duty == pytest.approx(33_075.0)  # 30 x 1.1025
    assert source(reserves="reserve = 0.1").duty == pytest.approx(33_000.0)


def test_an_ordinary_balancing_device_grows_with_the_flow() -> None:
    assert source(terminal='balance = "DRV",').duty == pytest.approx(31_000 * 1.21275)


def test_behind_a_flow_holding_device_nothing_grows() -> None:
    # The terminal with its items and the device: H = 10 + 4 + 5 = 19, N = 6 + 5 + 3 + 2 = 16.
    found = source(terminal='balance = "PIV",')
    assert found.required == pytest.approx(35_000.0)
    assert found.duty == pytest.approx(16_000 * 1.21275 + 19_000 * 1.1)


def test_the_run_out_of_a_flow_holding_terminal_belongs_to_it() -> None:
    found = source(terminal='balance = "PIV", bore = 15, length = 2,')
    assert found.duty == pytest.approx(16_000 * 1.21275 + (found.required - 16_000) * 1.1)


def test_a_flow_holding_device_on_a_section_holds_it_and_all_behind() -> None:
    # H = B1 3 + 5, C1 2, T1 10 + 4 = 24; N = 6 + 5.
    found = source(branch='balance = "PIV",')
    assert found.duty == pytest.approx(11_000 * 1.21275 + 24_000 * 1.1)


def test_a_differential_holding_device_is_held_with_its_set_point() -> None:
    # H = 2 + what is behind B1, 2 + 10 + 4 = 16; B1 itself grows: N = 6 + 5 + 3.
    found = source(branch='balance = "DPV",')
    assert found.required == pytest.approx(32_000.0)
    assert found.duty == pytest.approx(14_000 * 1.21275 + 18_000 * 1.1)


def test_a_stated_set_point_is_held_as_a_whole() -> None:
    text = TREE.replace("least_drop = 2", "least_drop = 2\nset_point = 20").replace("RESERVES", RESERVES)
    text = text.replace("BRANCH", 'balance = "DPV",')
    for word in ("SOURCE", "MAIN", "TERMINAL"):
        text = text.replace(word, "")
    found = budget_of(text).sources["P1"]
    assert found.required == pytest.approx(36_000.0)
    assert found.duty == pytest.approx(14_000 * 1.21275 + 22_000 * 1.1)


def test_a_flow_holding_device_behind_a_differential_holding_one_changes_nothing_more() -> None:
    # Behind B1 21 is held: 2 + 10 + 4 + 5.
    found = source(branch='balance = "DPV",', terminal='balance = "PIV",')
    assert found.duty == pytest.approx(14_000 * 1.21275 + 23_000 * 1.1)


def test_a_differential_holding_device_behind_a_flow_holding_one_is_counted_once() -> None:
    # H = M1 5 + 5, B1 3 + 2 and the 16 behind it: everything but the plant.
    found = source(main='balance = "PIV",', branch='balance = "DPV",')
    assert found.required == pytest.approx(37_000.0)
    assert found.duty == pytest.approx(6000 * 1.21275 + 31_000 * 1.1)


def test_devices_off_the_index_circuit_do_not_count() -> None:
    text = TREE.replace("RESERVES", RESERVES).replace("drop = 1 }", 'drop = 1, balance = "PIV" }')
    for word in ("SOURCE", "MAIN", "BRANCH", "TERMINAL"):
        text = text.replace(word, "")
    assert budget_of(text).sources["P1"].duty == pytest.approx(36_382.5)


REVERSE_RETURN = (
    LIQUID
    + DEVICES
    + """
[source]
P1 = { RESERVES }
[section]
S = { from = "P1", bore = 40, length = 0, paired = false, item = [{ drop = 5 }] }
A = { from = "S", bore = 40, length = 0, paired = false, item = [{ drop = 3 }], balance = "PIV" }
B = { to = "R", bore = 40, length = 0, item = [{ drop = 2 }] }
R = { to = "P1", bore = 40, length = 0, item = [{ drop = 1 }] }
[terminal]
T1 = { from = "A", to = "B", flow = 0.1, drop = 10 }
T2 = { from = "S", to = "R", flow = 0.1, drop = 1 }
"""
)


def test_a_return_section_that_carries_the_held_flow_alone_is_held_with_it() -> None:
    # H = A 3 + 5, T1 10, B 2; S and R carry T2 as well: N = 5 + 1.
    found = budget_of(REVERSE_RETURN.replace("RESERVES", RESERVES)).sources["P1"]
    assert found.required == pytest.approx(26_000.0)
    assert found.duty == pytest.approx(6000 * 1.21275 + 20_000 * 1.1)


LIFT = (
    LIQUID.replace("paired = true\n", "")
    + """
[source]
P1 = { open = true, available = "200 kPa", RESERVES, item = [{ drop = 6 }] }
[section]
M1 = { from = "P1", bore = 40, length = 0, rise = 10, item = [{ drop = 4 }] }
[terminal]
T1 = { from = "M1", flow = 1, drop = 10, outlet_pressure = 50, rise = 2 }
T2 = { from = "M1", flow = 1, drop = 50, outlet_pressure = 9 }
"""
)


def test_static_is_of_the_index_circuit_and_takes_no_reserve() -> None:
    found = budget_of(LIFT.replace("RESERVES", RESERVES)).sources["P1"]
    # 12 m: 117.6798 kPa + 50 = 167.6798; N = 6 + 4 + 10 = 20
    assert found.index == ("T1",)
    assert found.static == pytest.approx(167_679.8)
    assert found.required == pytest.approx(187_679.8)
    assert found.duty == pytest.approx(167_679.8 + 20_000 * 1.21275)
    assert found.in_hand == pytest.approx(200_000 - 191_934.8)
    assert found.spent["static"] == pytest.approx(167_679.8)


def test_what_is_available_as_a_head_is_of_the_fluid() -> None:
    found = source(own='available = "5 m",')
    assert found.available == pytest.approx(49_033.25)  # 5 x 1000 x 9.80665
    assert found.in_hand == pytest.approx(49_033.25 - 36_382.5)


def test_powers_use_the_duty_and_the_duty_flow() -> None:
    found = source(own="efficiency = 0.5, motor_efficiency = 0.8,")
    # 36 382.5 Pa x 0.00021 m3/s = 7.640325 W
    assert found.hydraulic_power == pytest.approx(7.640325)
    assert found.shaft_power == pytest.approx(15.28065)
    assert found.electrical_power == pytest.approx(19.1008125)


def test_without_efficiencies_there_is_no_power_but_the_hydraulic() -> None:
    found = source()
    assert (found.shaft_power, found.electrical_power, found.sfp) == (None, None, None)
    assert source(own="motor_efficiency = 0.8,").electrical_power is None


def test_nothing_is_in_hand_where_nothing_is_stated() -> None:
    found = source()
    assert (found.available, found.in_hand) == (None, None)


def test_spending_by_heading_adds_up_to_required() -> None:
    text = (
        LIQUID
        + DEVICES
        + """
[budget]
plant = 8
control = 3
[source]
P1 = { item = [{ drop = 6 }, { drop = 1, heading = "control" }] }
[section]
M1 = { from = "P1", bore = 40, length = 2, fittings = { "entrance flush" = 1 }, item = [{ drop = 5 }], balance = "DRV" }
[terminal]
T1 = { from = "M1", flow = 0.2, drop = 10, bore = 20, length = 2, balance = "DRV", item = [
  { drop = 4, control = "two-port" }, { drop = 2 }, { drop = 3, heading = "plant" } ] }
T2 = { from = "M1", flow = 0.1, drop = 5 }
"""
    )
    budget = budget_of(text)
    found = budget.sources["P1"]
    run, run_out = budget.sections["M1"].run, budget.terminals["T1"].run_out
    assert run_out is not None
    pipes = run.friction + run.fittings + run_out.friction
    assert pipes > 100.0
    assert dict(found.spent) == pytest.approx(
        {
            "plant": 9000.0,
            "distribution": 7000.0 + pipes,
            "terminal": 10_000.0,
            "control": 5000.0,
            "balancing": 2000.0,
            "static": 0.0,
        }
    )
    assert sum(found.spent.values()) == pytest.approx(found.required, rel=1e-12)
    assert dict(found.budget) == pytest.approx({"plant": 8000.0, "control": 3000.0})


FAN = (
    GAS
    + """
[source]
F1 = { FAN item = [{ drop = 100, inside = true }, { drop = 50 }] }
[section]
D1 = { from = "F1", size = "300 mm", length = 0, item = [{ drop = 20, inside = true }] }
E1 = { to = "F1", size = "300 mm", length = 0, item = [{ drop = 15, inside = true }] }
[terminal]
S1 = { from = "D1", flow = 500, drop = 40, item = [{ drop = 7, inside = true }] }
S2 = { from = "D1", flow = 500, drop = 30, item = [{ drop = 9, inside = true }] }
X1 = { to = "E1", drop = 18 }
"""
)


def fan(keys: str = "") -> SourceResult:
    return budget_of(FAN.replace("FAN", keys)).sources["F1"]


def test_a_fan_s_duty_takes_both_sides_and_its_items() -> None:
    found = fan(RESERVES + ",")
    # 100 + 50, discharge 20 + 40 + 7, suction 15 + 18
    assert (found.discharge_required, found.suction_required) == pytest.approx((67.0, 33.0))
    assert found.required == pytest.approx(250.0)
    assert found.duty == pytest.approx(250 * 1.21275)
    assert found.index == ("S1", "X1")
    assert (found.flow, found.mass_flow, found.duty_flow) == pytest.approx((1.0, 1.2, 1.05))


def test_external_pressure_is_without_what_stands_inside() -> None:
    found = fan('outlet = "500x400",')
    # Inside on the fan and along both index circuits: 100 + 20 + 15 + 7 = 142 of 250.
    assert found.external_total == pytest.approx(108.0)
    # 1 m3/s through 0.2 m2: 5 m/s, 15 Pa
    assert found.external_static == pytest.approx(93.0)
    assert found.static_pressure == pytest.approx(235.0)


def test_the_velocity_pressure_at_the_outlet_is_at_duty_flow() -> None:
    found = fan(RESERVES + ', outlet = "500x400",')
    # 5.25 m/s: 16.5375 Pa; 250 x 1.21275 = 303.1875
    assert found.static_pressure == pytest.approx(286.65)
    assert found.external_total == pytest.approx(161.1875)
    assert found.external_static == pytest.approx(144.65)


def test_without_an_outlet_there_is_no_static_pressure() -> None:
    found = fan()
    assert (found.static_pressure, found.external_static) == (None, None)
    assert found.external_total == pytest.approx(108.0)


def test_a_pump_has_no_external_pressure_and_no_sides() -> None:
    found = source()
    assert (found.external_total, found.external_static, found.static_pressure) == (None, None, None)
    assert (found.discharge_required, found.suction_required) == (None, None)


def test_specific_fan_power_is_electrical_power_over_flow() -> None:
    found = fan('efficiency = "60 %", motor_efficiency = 0.8,')
    # 250 W hydraulic, 416.667 W at the shaft, 520.833 W electrical, 1 m3/s
    assert found.shaft_power == pytest.approx(416.6667, rel=1e-6)
    assert found.sfp == pytest.approx(520.8333, rel=1e-6)


def test_a_gas_spends_along_both_of_its_index_circuits() -> None:
    found = fan()
    assert dict(found.spent) == pytest.approx(
        {"plant": 150.0, "distribution": 42.0, "terminal": 58.0, "control": 0.0, "balancing": 0.0, "static": 0.0}
    )


def test_a_flow_holding_terminal_on_one_side_of_a_fan_leaves_the_other_to_grow() -> None:
    text = FAN.replace("FAN", RESERVES + ",").replace(
        "[source]", '[device.VAV]\nholds = "flow"\nleast_drop = 20\n[source]'
    )
    text = text.replace("S1 = {", 'S1 = { balance = "VAV",')
    found = budget_of(text).sources["F1"]
    # H = 40 + 7 + 20; N = 150 + 20 + 33
    assert found.required == pytest.approx(270.0)
    assert found.duty == pytest.approx(203 * 1.21275 + 67 * 1.1)


def test_a_source_without_terminals_has_no_duty() -> None:
    budget = evaluated_of(LIQUID + "[source]\nP1 = { available = 10 }\n")
    found = budget.sources["P1"]
    assert found.index == ()
    assert found.duty != found.duty
    assert found.flow == 0.0


def test_what_is_spent_follows_the_index_terminal_that_is_named() -> None:
    text = LIQUID + (
        "[source]\nP1 = {}\n[section]\n"
        'M1 = { from = "P1", bore = 40, length = 0, item = [{ drop = 5 }] }\n'
        'M2 = { from = "P1", bore = 40, length = 0, item = [{ drop = 9, heading = "control" }] }\n'
        '[terminal]\nT1 = { from = "M1", flow = 0.1, drop = 12 }\nT2 = { from = "M2", flow = 0.1, drop = 8 }\n'
    )
    found = budget_of(text).sources["P1"]
    # A tie at 17: the first is named, and its path is what is spent.
    assert found.index == ("T1",)
    assert (found.spent["distribution"], found.spent["control"], found.spent["terminal"]) == (5000.0, 0.0, 12_000.0)


def test_the_items_of_an_index_terminal_count_wherever_it_stands_in_the_file() -> None:
    text = LIQUID + (
        '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", flow = 0.1, drop = 1 }\n'
        'T2 = { from = "P1", flow = 0.1, drop = 2, item = [{ drop = 1, heading = "control" }] }\n'
        'T3 = { from = "P1", flow = 0.1, drop = 8, item = [{ drop = 3, heading = "plant" }] }\n'
    )
    found = budget_of(text).sources["P1"]
    assert (found.spent["plant"], found.spent["terminal"], found.spent["control"]) == (3000.0, 8000.0, 0.0)
    # The same for what stands inside an air handling unit.
    lines = [line for line in FAN.replace("FAN", "").splitlines() if not line.startswith("S1")]
    fan_source = budget_of(
        "\n".join([*lines, 'S1 = { from = "D1", flow = 500, drop = 40, item = [{ drop = 7, inside = true }] }'])
    )
    assert fan_source.sources["F1"].external_total == pytest.approx(108.0)


def test_a_flow_holding_terminal_in_an_open_circuit_leaves_static_to_static() -> None:
    text = LIFT.replace("RESERVES", RESERVES).replace("[source]", DEVICES + "[source]")
    found = budget_of(text.replace("T1 = {", 'T1 = { balance = "PIV",')).sources["P1"]
    # Static 167.6798; H = 10 + 5; N = 6 + 4.
    assert found.static == pytest.approx(167_679.8)
    assert found.duty == pytest.approx(167_679.8 + 10_000 * 1.21275 + 15_000 * 1.1)


def test_a_flow_holding_section_in_an_open_circuit_leaves_static_to_static() -> None:
    text = LIFT.replace("RESERVES", RESERVES).replace("[source]", DEVICES + "[source]")
    found = budget_of(text.replace("M1 = {", 'M1 = { balance = "PIV",')).sources["P1"]
    # H = 4 + 5 + 10; N = 6.
    assert found.duty == pytest.approx(167_679.8 + 6000 * 1.21275 + 19_000 * 1.1)


def test_the_return_legs_behind_a_flow_holding_device_are_held_too() -> None:
    text = TREE.replace("RESERVES", RESERVES).replace("BRANCH", 'balance = "PIV",')
    text = text.replace('B1 = { from = "M1", bore = 40, length = 0', 'B1 = { from = "M1", bore = 15, length = 2')
    text = text.replace('C1 = { from = "B1", bore = 40, length = 0', 'C1 = { from = "B1", bore = 15, length = 3')
    for word in ("SOURCE", "MAIN", "TERMINAL"):
        text = text.replace(word, "")
    budget = budget_of(text)
    found = budget.sources["P1"]
    pipes = budget.sections["B1"].run.friction + budget.sections["C1"].run.friction
    assert pipes > 1000.0
    assert found.required == pytest.approx(35_000.0 + pipes)
    assert found.duty == pytest.approx(11_000 * 1.21275 + (24_000 + pipes) * 1.1)


def test_the_return_legs_before_a_flow_holding_device_grow() -> None:
    text = TREE.replace("RESERVES", RESERVES).replace("BRANCH", 'balance = "PIV",')
    text = text.replace('M1 = { from = "P1", bore = 40, length = 0', 'M1 = { from = "P1", bore = 15, length = 2')
    for word in ("SOURCE", "MAIN", "TERMINAL"):
        text = text.replace(word, "")
    budget = budget_of(text)
    pipes = budget.sections["M1"].run.friction
    assert pipes > 1000.0
    assert budget.sources["P1"].duty == pytest.approx((11_000 + pipes) * 1.21275 + 24_000 * 1.1)
