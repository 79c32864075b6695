"""Authority of control items: what they drop of all that carries their flow, and of what they are shut against."""

from __future__ import annotations

import pytest

from budget.network import Budget
from tests.network.small import GAS, LIQUID, budget_of

TREE = (
    LIQUID
    + """
[device.DRV]
kv = [[0, 0.001], [4, 1000]]
least_drop = 1
[device.PIV]
holds = "flow"
least_drop = 5
[device.DPV]
holds = "differential"
least_drop = 2
SET_POINT
[source]
P1 = { SOURCE item = [{ drop = 6 }] }
[section]
M1 = { from = "P1", bore = 40, length = 0, item = [{ drop = 5 }] }
B1 = { from = "M1", bore = 40, length = 0, SECTION item = [{ drop = 3 }] }
[terminal]
T1 = { from = "B1", flow = 0.1, TERMINAL drop = 10, item = [{ drop = 4, control = "two-port" }, { drop = 2 }] }
T2 = { from = "M1", flow = 0.1, drop = 30 }
"""
)


def tree(source: str = "", section: str = "", terminal: str = "", set_point: str = "") -> Budget:
    text = TREE.replace("SOURCE", source).replace("SECTION", section).replace("TERMINAL", terminal)
    return budget_of(text.replace("SET_POINT", set_point))


def authority(budget: Budget, id_: str = "T1") -> tuple[float | None, float | None]:
    owner = budget.sections.get(id_) or budget.terminals[id_]
    return owner.authority, owner.authority_low


def test_authority_counts_all_that_carries_the_item_s_flow_alone() -> None:
    # B1 3, T1 10 + 4 + 2: 4/19. M1 and the plant carry T2 as well. Required: 6 + 5 + 30 = 41.
    assert authority(tree()) == pytest.approx((4 / 19, 4 / 41))


def test_devices_count_at_their_setting() -> None:
    # Circuit 6 + 5 + 3 + 1 + 16 = 31 of 41: the device drops 1 + 10. 4/(19 + 11)
    assert authority(tree(terminal='balance = "DRV",')) == pytest.approx((4 / 30, 4 / 41))
    assert authority(tree(section='balance = "DRV",')) == pytest.approx((4 / 30, 4 / 41))


def test_a_run_out_carries_its_terminal_alone() -> None:
    budget = tree(terminal="bore = 15, length = 2,")
    run_out = budget.terminals["T1"].run_out
    assert run_out is not None
    assert authority(budget)[0] == pytest.approx(4000.0 / (19_000.0 + run_out.drop))


def test_a_section_shared_with_another_terminal_does_not_count() -> None:
    text = TREE.replace('T2 = { from = "M1"', 'T2 = { from = "B1"')
    for word in ("SOURCE", "SECTION", "TERMINAL", "SET_POINT"):
        text = text.replace(word, "")
    # T1 alone: 10 + 4 + 2. Required 6 + 5 + 3 + 30.
    assert authority(budget_of(text)) == pytest.approx((4 / 16, 4 / 44))


def test_a_flow_holding_device_in_its_place_leaves_no_authority() -> None:
    assert authority(tree(terminal='balance = "PIV",')) == (None, None)


def test_a_flow_holding_device_elsewhere_counts_at_its_setting() -> None:
    # Circuit 6 + 5 + (3 + 5) + 16 = 35 of 41: 5 + 6 in B1.
    assert authority(tree(section='balance = "PIV",')) == pytest.approx((4 / 30, 4 / 41))


def test_low_authority_is_against_the_set_point_that_the_source_controls() -> None:
    assert authority(tree('controls = "differential", set_point = 35, sensor = "M1",')) == pytest.approx(
        (4 / 19, 4 / 35)
    )


def test_low_authority_is_against_the_nearest_holding_device() -> None:
    # Behind B1: 16, so that is held.
    assert authority(tree(section='balance = "DPV",')) == pytest.approx((4 / 16, 4 / 16))
    # A source that controls a differential is further away.
    stated = tree(
        'controls = "differential", set_point = 35, sensor = "M1",', 'balance = "DPV",', set_point="set_point = 20"
    )
    assert authority(stated) == pytest.approx((4 / 16, 4 / 20))


def test_the_plant_counts_where_the_whole_flow_goes_through_the_item() -> None:
    text = LIQUID + (
        "[source]\nP1 = { item = [{ drop = 6 }] }\n[terminal]\n"
        'T1 = { from = "P1", flow = 0.1, drop = 10, item = [{ drop = 4, control = "two-port" }] }\n'
    )
    # 4/(6 + 10 + 4), and shut it sees the pump's whole pressure
    assert authority(budget_of(text)) == pytest.approx((0.2, 0.2))


def test_a_three_port_valve_is_measured_against_its_terminal() -> None:
    text = TREE.replace('"two-port"', '"three-port"')
    for word in ("SOURCE", "SECTION", "TERMINAL", "SET_POINT"):
        text = text.replace(word, "")
    assert authority(budget_of(text))[0] == pytest.approx(4 / 14)


SECTION_VALVE = (
    LIQUID
    + """
[device.DPV]
holds = "differential"
least_drop = 2
[source]
P1 = { item = [{ drop = 6 }] }
[section]
B1 = { from = "P1", bore = 40, length = 0, item = [{ drop = 3 }, { drop = 4, control = "two-port" }] BALANCE }
C1 = { from = "B1", bore = 40, length = 0, item = [{ drop = 1 }] }
[terminal]
T1 = { from = "C1", flow = 0.1, drop = 10 }
T2 = { from = "B1", flow = 0.1, drop = 7 }
T3 = { from = "P1", flow = 0.1, drop = 20 }
"""
)


def test_a_control_item_on_a_section_is_reported_there() -> None:
    budget = budget_of(SECTION_VALVE.replace("BALANCE", ""))
    # The largest circuit behind is C1 1 + T1 10: 4/(3 + 4 + 1 + 10); required is 6 + 20 of T3.
    assert authority(budget, "B1") == pytest.approx((4 / 18, 4 / 26))
    assert authority(budget, "C1") == (None, None)


def test_behind_a_section_s_holding_device_its_set_point_counts() -> None:
    budget = budget_of(SECTION_VALVE.replace("BALANCE", ', balance = "DPV"'))
    # 3 + 4 + device 2 + held 11 = 20 of the 20 that T3 has: nothing is taken up.
    assert authority(budget, "B1") == pytest.approx((4 / 20, 4 / 26))


FAN = (
    GAS
    + """
[source]
F1 = { item = [{ drop = 100 }] }
[section]
D1 = { from = "F1", size = "300 mm", length = 0, item = [{ drop = 20 }, { drop = 10, control = "damper" }] }
E1 = { to = "F1", size = "300 mm", length = 0, item = [{ drop = 15 }] }
[terminal]
S1 = { from = "D1", flow = 50, drop = 40, item = [{ drop = 30, control = "damper" }] }
S2 = { from = "D1", flow = 50, drop = 45 }
X1 = { to = "E1", flow = 100, drop = 12 }
"""
)


def test_a_damper_s_authority_is_that_of_a_valve() -> None:
    budget = budget_of(FAN)
    # 30/(30 + 40); required is 100 + (20 + 10 + 70) + (15 + 12).
    assert authority(budget, "S1") == pytest.approx((30 / 70, 30 / 227))


def test_a_damper_in_the_main_carries_the_fan_s_whole_flow() -> None:
    assert authority(budget_of(FAN), "D1") == pytest.approx((10 / 227, 10 / 227))


def test_a_damper_in_one_of_two_mains_does_not() -> None:
    text = FAN + 'S3 = { from = "F1", flow = 10, drop = 5 }\n'
    text = text.replace('X1 = { to = "E1", flow = 100', 'X1 = { to = "E1", flow = 110')
    assert authority(budget_of(text), "D1")[0] == pytest.approx(10 / 100)


def test_a_thing_without_a_control_item_has_no_authority() -> None:
    assert authority(tree(), "T2") == (None, None)
    assert authority(tree(), "M1") == (None, None)


def test_static_parts_do_not_count() -> None:
    text = LIQUID.replace("paired = true\n", "") + (
        "[source]\nP1 = { open = true }\n[section]\n"
        'M1 = { from = "P1", bore = 40, length = 0, rise = 5, item = [{ drop = 3 }] }\n[terminal]\n'
        'T1 = { from = "M1", flow = 0.1, drop = 10, rise = 2, outlet_pressure = 9, '
        'item = [{ drop = 4, control = "two-port" }] }\n'
        'T2 = { from = "P1", flow = 0.1, drop = 90, rise = 5, outlet_pressure = 9 }\n'
    )
    # 4/(3 + 10 + 4); T2 needs 90 + 9 + 5 x 9.80665.
    assert authority(budget_of(text)) == pytest.approx((4 / 17, 4 / 148.03325))
