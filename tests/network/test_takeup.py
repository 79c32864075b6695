"""Which device takes up how much, and where it is set."""

from __future__ import annotations

import math

import pytest

from budget.network import Budget, DeviceResult
from budget.network.takeup import _setting
from tests.network.small import GAS, LIQUID, budget_of, evaluated_of, findings_of, places

DEVICES = """
[device.DRV]
kv = [[0, 0.001], [4, 1000]]
least_drop = 1
[device.PIV]
holds = "flow"
least_drop = 20
greatest_drop = 25
[device.DPV]
holds = "differential"
least_drop = 2
"""
"""DRV costs 1 kPa fully open; it can take up anything."""


def run(body: str) -> Budget:
    return budget_of(LIQUID + DEVICES + "[source]\nP1 = {}\n" + body)


def device(budget: Budget, id_: str) -> DeviceResult:
    owner = budget.sections.get(id_) or budget.terminals[id_]
    assert owner.device is not None
    return owner.device


def taken(budget: Budget, *ids: str) -> list[float]:
    """What the devices of some sections and terminals take up, kPa."""
    return [device(budget, id_).take_up / 1000 for id_ in ids]


def excess(budget: Budget) -> dict[str, float]:
    return {id_: terminal.excess / 1000 for id_, terminal in budget.terminals.items()}


def test_devices_that_serve_more_terminals_are_taken_first() -> None:
    budget = run(
        '[section]\nA = { from = "P1", bore = 40, length = 0, balance = "DRV" }\n'
        '[terminal]\nT1 = { from = "A", flow = 0.1, drop = 10, balance = "DRV" }\n'
        'T2 = { from = "A", flow = 0.1, drop = 6, balance = "DRV" }\nT3 = { from = "P1", flow = 0.1, drop = 20 }\n'
    )
    # Circuits 12, 8 and 20: margins 8, 12 and 0. A takes 8 from both, what is left of T2 is 4.
    assert taken(budget, "A", "T1", "T2") == pytest.approx([8.0, 0.0, 4.0])
    assert device(budget, "A").drop == pytest.approx(9000.0)
    assert excess(budget) == pytest.approx({"T1": 0.0, "T2": 0.0, "T3": 0.0})


def test_a_section_with_one_terminal_is_taken_before_the_terminal() -> None:
    budget = run(
        '[section]\nA = { from = "P1", bore = 40, length = 0, balance = "DRV" }\n'
        '[terminal]\nT1 = { from = "A", flow = 0.1, drop = 10, balance = "DRV" }\n'
        'T3 = { from = "P1", flow = 0.1, drop = 20 }\n'
    )
    assert taken(budget, "A", "T1") == pytest.approx([8.0, 0.0])


LOOP = (
    "[section]\n{first}\n{second}\n[terminal]\n"
    'T1 = {{ from = "S", to = "R", flow = 0.1, drop = 10 }}\nT3 = {{ from = "P1", flow = 0.1, drop = 20 }}\n'
)
SUPPLY = 'S = { from = "P1", bore = 40, length = 0, paired = false, balance = "DRV" }'
RETURN = 'R = { to = "P1", bore = 40, length = 0, balance = "DRV" }'


@pytest.mark.parametrize(("first", "second"), [(SUPPLY, RETURN), (RETURN, SUPPLY)])
def test_of_equals_the_supply_is_taken_before_the_return(first: str, second: str) -> None:
    budget = run(LOOP.format(first=first, second=second))
    assert taken(budget, "S", "R") == pytest.approx([8.0, 0.0])


NEAR = 'A = { from = "P1", bore = 40, length = 0, balance = "DRV" }'
FAR = 'B = { from = "A", bore = 40, length = 0, balance = "DRV" }'


@pytest.mark.parametrize(("first", "second", "expected"), [(NEAR, FAR, [8.0, 0.0]), (FAR, NEAR, [0.0, 8.0])])
def test_of_equals_on_one_side_the_first_in_the_file_is_taken_first(
    first: str, second: str, expected: list[float]
) -> None:
    budget = run(
        f"[section]\n{first}\n{second}\n[terminal]\n"
        'T1 = { from = "B", flow = 0.1, drop = 10 }\nT3 = { from = "P1", flow = 0.1, drop = 20 }\n'
    )
    assert taken(budget, "A", "B") == pytest.approx(expected)


def test_a_device_takes_the_least_that_remains_among_its_terminals() -> None:
    budget = run(
        '[section]\nA = { from = "P1", bore = 40, length = 0, balance = "DRV" }\n'
        '[terminal]\nT1 = { from = "A", flow = 0.1, drop = 10 }\nT2 = { from = "A", flow = 0.1, drop = 6 }\n'
        'T3 = { from = "P1", flow = 0.1, drop = 20 }\n'
    )
    # Margins 9 and 13: 9 from both; the rest of T2 has no device.
    assert taken(budget, "A") == pytest.approx([9.0])
    assert excess(budget) == pytest.approx({"T1": 0.0, "T2": 4.0, "T3": 0.0})


def test_a_device_on_the_index_circuit_takes_nothing() -> None:
    budget = run(
        '[section]\nA = { from = "P1", bore = 40, length = 0, balance = "DRV" }\n'
        '[terminal]\nT1 = { from = "A", flow = 0.1, drop = 10, balance = "DRV" }\n'
        'T2 = { from = "A", flow = 0.1, drop = 6 }\n'
    )
    assert taken(budget, "A", "T1") == [0.0, 0.0]


def test_a_flow_holding_device_takes_up_to_its_greatest_drop() -> None:
    budget = run(
        '[terminal]\nT1 = { from = "P1", flow = 0.1, drop = 10, balance = "PIV" }\n'
        'T2 = { from = "P1", flow = 0.1, drop = 6, balance = "PIV" }\nT3 = { from = "P1", flow = 0.1, drop = 33 }\n'
    )
    # Margins 3 and 7; from 20 to 25 it can take 5.
    assert taken(budget, "T1", "T2") == pytest.approx([3.0, 5.0])
    assert excess(budget) == pytest.approx({"T1": 0.0, "T2": 2.0, "T3": 0.0})
    found = device(budget, "T2")
    assert found.drop == pytest.approx(25_000.0)
    assert (found.setting, found.kv, found.holds) == (None, None, "flow")


def test_a_flow_holding_device_without_a_greatest_drop_takes_everything() -> None:
    text = LIQUID + DEVICES.replace("greatest_drop = 25\n", "") + "[source]\nP1 = {}\n"
    budget = budget_of(
        text + '[terminal]\nT1 = { from = "P1", flow = 0.1, drop = 1, balance = "PIV" }\n'
        'T3 = { from = "P1", flow = 0.1, drop = 900 }\n'
    )
    assert taken(budget, "T1") == pytest.approx([879.0])


def test_a_flow_holding_device_that_is_full_leaves_the_rest_to_the_next() -> None:
    budget = run(
        '[section]\nA = { from = "P1", bore = 40, length = 0, balance = "PIV" }\n'
        '[terminal]\nT1 = { from = "A", flow = 0.1, drop = 1, balance = "DRV" }\n'
        'T3 = { from = "P1", flow = 0.1, drop = 33 }\n'
    )
    # Circuit 20 + 1 + 1: of the margin 11 the first takes 5, the second 6.
    assert taken(budget, "A", "T1") == pytest.approx([5.0, 6.0])


HELD = (
    '[section]\nA = {{ from = "P1", bore = 40, length = 0{outer} }}\n'
    'B = {{ from = "A", bore = 40, length = 0, balance = "DPV" }}\n'
    'C = {{ from = "B", bore = 40, length = 0, balance = "DRV" }}\n'
    '[terminal]\nT1 = {{ from = "C", flow = 0.1, drop = 9 }}\n'
    'T2 = {{ from = "C", flow = 0.1, drop = 5, balance = "DRV" }}\n'
    'T4 = {{ from = "B", flow = 0.1, drop = 12 }}\nT3 = {{ from = "P1", flow = 0.1, drop = 20 }}\n'
)


def test_a_differential_holding_device_takes_all_that_remains_of_what_is_behind() -> None:
    budget = run(HELD.format(outer=""))
    # Behind: 1 + 9 = 10, 1 + 5 + 1 = 7, 12; held 12. Outside: 2 + 12 = 14 of 20.
    assert taken(budget, "B") == pytest.approx([6.0])
    assert device(budget, "B").drop == pytest.approx(8000.0)
    # Behind, 12 can be spent: C takes the least of 2 and 5, T2 the rest of its own.
    assert taken(budget, "C", "T2") == pytest.approx([2.0, 3.0])
    assert excess(budget) == pytest.approx({"T1": 0.0, "T2": 0.0, "T3": 0.0, "T4": 0.0})


def test_all_behind_a_holding_device_counts_as_one_terminal_outside() -> None:
    # A serves T5 and what B holds: two, so it comes before B and before the terminal.
    text = HELD.format(outer=', balance = "DRV"') + 'T5 = { from = "A", flow = 0.1, drop = 15, balance = "DRV" }\n'
    budget = run(text)
    # Outside: held 1 + 2 + 12 = 15, T5 1 + 15 + 1 = 17, T3 20: margins 5 and 3.
    assert taken(budget, "A", "B", "T5") == pytest.approx([3.0, 2.0, 0.0])


def test_a_device_before_a_holding_one_is_taken_in_the_order_of_the_file() -> None:
    budget = run(HELD.format(outer=', balance = "DRV"'))
    # Each serves one as seen outside: A stands first in the file. 20 - (1 + 2 + 12) = 5
    assert taken(budget, "A", "B") == pytest.approx([5.0, 0.0])
    lines = HELD.format(outer=', balance = "DRV"').splitlines()
    lines[1], lines[2] = lines[2], lines[1]
    assert taken(run("\n".join(lines)), "A", "B") == pytest.approx([0.0, 5.0])


def test_a_stated_set_point_is_spent_behind_and_not_outside() -> None:
    text = LIQUID + DEVICES.replace('"differential"\n', '"differential"\nset_point = 15\n') + "[source]\nP1 = {}\n"
    budget = budget_of(text + HELD.format(outer=""))
    # Outside 2 + 15 = 17 of 20; behind 15 - 10, 15 - 7, 15 - 12.
    assert taken(budget, "B", "C", "T2") == pytest.approx([3.0, 5.0, 3.0])
    assert excess(budget) == pytest.approx({"T1": 0.0, "T2": 0.0, "T3": 0.0, "T4": 3.0})


def test_two_terminals_behind_a_branch_device_each_spend_their_set_point_once() -> None:
    budget = run(HELD.format(outer=""))
    for id_, behind in {"T1": ["C"], "T2": ["C", "T2"], "T4": []}.items():
        terminal = budget.terminals[id_]
        spent = sum(device(budget, other).take_up for other in behind)
        assert spent + terminal.excess == pytest.approx(terminal.margin)


VALVES = """
[device.LOG]
kv = [[1, 1], [3, 4]]
[device.CVS]
cv = [[1, 1.156], [3, 4.624]]
[device.ORF]
kv = [[1, 1], [3, 4]]
signal_kv = 4
[source]
P1 = {}
[terminal]
"""


def set_valve(name: str, drop: float) -> DeviceResult:
    """A valve at 2 m3/h that has to drop so many kPa."""
    text = f'T1 = {{ from = "P1", flow = "2 m3/h", drop = 0, balance = "{name}" }}\n'
    other = f'T3 = {{ from = "P1", flow = 0.1, drop = "{drop:.9f} kPa" }}\n'
    return device(budget_of(LIQUID + VALVES + text + other), "T1")


@pytest.mark.parametrize("name", ["LOG", "CVS"])
def test_a_setting_is_interpolated_on_the_logarithm_of_kv(name: str) -> None:
    found = set_valve(name, 100.0)
    # Fully open (2/4)^2 = 0.25 bar; at 1 bar it needs Kv 2, which is half-way from 1 to 4 on a logarithm.
    assert found.base == pytest.approx(25_000.0)
    assert found.take_up == pytest.approx(75_000.0)
    assert found.kv == pytest.approx(2.0)
    assert found.setting == pytest.approx(2.0)


def test_fully_open_and_closed_to_the_end_are_settings_too() -> None:
    opened, shut = set_valve("LOG", 25.0), set_valve("LOG", 400.0)
    assert opened.setting == pytest.approx(3.0)
    assert shut.setting == pytest.approx(1.0)  # Kv 1: (2/1)^2 = 4 bar


def test_a_drop_outside_the_table_has_no_setting() -> None:
    found = set_valve("LOG", 400.01)
    assert found.setting is None
    assert found.kv == pytest.approx(0.9999875, rel=1e-7)  # 2/sqrt 4.0001


@pytest.mark.parametrize(
    ("kv", "setting"),
    [
        (4.0 * (1 + 0.9e-9), 3.0),
        (4.0 * (1 + 1.1e-9), None),
        (1.0 * (1 - 0.9e-9), 1.0),
        (1.0 * (1 - 1.1e-9), None),
        (math.inf, None),
        (0.0, None),
        (math.nan, None),
    ],
)
def test_within_1e_9_of_an_end_of_the_table_is_inside(kv: float, setting: float | None) -> None:
    assert _setting(((1.0, 1.0), (3.0, 4.0)), kv) == (None if setting is None else pytest.approx(setting))


def test_a_table_may_fall() -> None:
    assert _setting(((1.0, 4.0), (3.0, 1.0)), 2.0) == pytest.approx(2.0)


def test_the_signal_is_that_across_the_valve_or_its_orifice() -> None:
    assert set_valve("LOG", 100.0).signal == pytest.approx(100_000.0)
    assert set_valve("ORF", 100.0).signal == pytest.approx(25_000.0)  # 2 m3/h through Kv 4


def test_a_device_is_set_for_its_least_drop_where_that_is_more_than_fully_open() -> None:
    text = LIQUID + VALVES.replace("[3, 4]]", "[3, 4]]\nleast_drop = 100", 1)
    budget = budget_of(text + 'T1 = { from = "P1", flow = "2 m3/h", drop = 0, balance = "LOG" }\n')
    found = device(budget, "T1")
    assert (found.base, found.take_up) == pytest.approx((100_000.0, 0.0))
    assert found.setting == pytest.approx(2.0)


DAMPERS = (
    GAS
    + """
[device.VD]
k = [[0, 1], [60, 100]]
[source]
F1 = {}
[section]
D1 = { from = "F1", size = "200 mm", length = 0, balance = "VD" }
[terminal]
S1 = { from = "D1", flow = "0.1570796327 m3/s", drop = 0 }
S2 = { from = "F1", flow = 10, drop = DROP }
"""
)


def test_a_damper_is_set_on_the_logarithm_of_its_coefficient() -> None:
    # 5 m/s in 200 mm: 15 Pa. Fully open k 1: 15 Pa. At 150 Pa k is 10, half-way from 1 to 100.
    found = device(budget_of(DAMPERS.replace("DROP", "150")), "D1")
    assert found.base == pytest.approx(15.0, rel=1e-6)
    assert found.take_up == pytest.approx(135.0, rel=1e-6)
    assert found.k == pytest.approx(10.0, rel=1e-6)
    assert found.setting == pytest.approx(30.0, rel=1e-6)
    assert (found.kv, found.signal) == (None, None)


def test_a_damper_on_a_terminal_refers_to_its_neck() -> None:
    text = (
        DAMPERS.replace("DROP", "150")
        .replace(', balance = "VD" }', " }")
        .replace("drop = 0 }", 'drop = 0, neck = "100 mm", balance = "VD" }')
    )
    # 20 m/s in the neck: 240 Pa fully open, more than the 150 of the other.
    found = device(budget_of(text), "S1")
    assert found.base == pytest.approx(240.0, rel=1e-6)
    assert found.k == pytest.approx(1.0, rel=1e-6)
    assert found.setting == pytest.approx(0.0, abs=1e-6)


def test_a_setting_outside_its_table_is_a_warning_and_excess_is_another() -> None:
    text = (
        LIQUID
        + VALVES
        + (
            'T1 = { from = "P1", flow = "2 m3/h", drop = 0, balance = "LOG" }\n'
            'T2 = { from = "P1", flow = 0.1, drop = 399 }\nT3 = { from = "P1", flow = 0.1, drop = 401 }\n'
        )
    )
    assert places(findings_of(text), "warning") == [
        ("excess", "terminal.T2.balance"),
        ("device-range", "terminal.T1.balance"),
    ]


def test_a_device_whose_circuit_can_t_be_computed_takes_nothing() -> None:
    text = (
        LIQUID
        + DEVICES
        + (
            '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", flow = 0.1, drop = "much", balance = "DRV" }\n'
            'T2 = { from = "P1", flow = 0.1, drop = 6, balance = "DRV" }\n'
        )
    )
    budget = evaluated_of(text)
    assert device(budget, "T1").take_up == 0.0
    assert math.isnan(budget.terminals["T1"].excess)
    assert budget.terminals["T2"].excess == 0.0
