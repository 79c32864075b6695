"""Proposed control valves and devices, by hand and by working the run out again with them."""

from __future__ import annotations

import pytest

from budget.network.proposals import SERIES, propose_devices, propose_kv
from tests.network.small import GAS, LIQUID, budget_of

# 3.6 m3/h = 1 L/s: a valve of Kv 3.6 drops 1 bar.
CONTROL = """
[device.DRV]
kv = [[0, 0.001], [4, 1000]]
[source]
P1 = {}
[terminal.T1]
from = "P1"
flow = 1
drop = 20
BALANCE
[[terminal.T1.item]]
name = "valve"
kv = KV
control = "two-port"
[terminal.T2]
from = "P1"
flow = 1
drop = OTHER
"""


def control(kv: float, other: float, balance: str = "") -> str:
    text = CONTROL.replace("KV", str(kv)).replace("OTHER", str(other))
    return LIQUID + text.replace("BALANCE", f'balance = "{balance}"' if balance else "")


def test_the_series_has_five_sizes_to_a_decade() -> None:
    assert [kv for kv in SERIES if 0.4 <= kv <= 25] == [0.4, 0.63, 1.0, 1.6, 2.5, 4.0, 6.3, 10.0, 16.0, 25.0]


def test_on_the_index_circuit_a_valve_of_authority_a_half_drops_as_much_as_the_rest() -> None:
    found = propose_kv(budget_of(control(10, 5)).run, "T1")
    assert found is not None
    assert found.present.drop == pytest.approx(12_960.0)  # (3.6/10)^2 bar
    assert found.present.authority == pytest.approx(12.96 / 32.96)
    assert found.exact is not None
    assert found.exact.drop == pytest.approx(20_000.0, rel=1e-5)
    assert found.exact.kv == pytest.approx(3.6 / 0.2**0.5, rel=1e-5)  # 8.05
    assert [one.kv for one in found.choices] == [4.0, 6.3, 10.0, 16.0]
    six = found.choices[1]
    drop = (3.6 / 6.3) ** 2 * 1e5
    assert (six.drop, six.authority) == pytest.approx((drop, drop / (drop + 20_000.0)))
    assert six.required == pytest.approx(drop + 20_000.0)


def test_off_the_index_circuit_the_balancing_device_gives_way() -> None:
    # 100 kPa at the source: valve, terminal 20 and device together always take 100, less the device of nothing open.
    found = propose_kv(budget_of(control(10, 100, "DRV")).run, "T1", 0.4)
    assert found is not None
    assert found.exact is not None
    assert found.exact.drop == pytest.approx(40_000.0, rel=1e-5)
    assert found.exact.required == pytest.approx(100_000.0)


def test_every_choice_is_what_the_run_would_have_with_it() -> None:
    found = propose_kv(budget_of(control(10, 40, "DRV")).run, "T1", 0.3)
    assert found is not None
    for choice in found.choices:
        budget = budget_of(control(choice.kv, 40, "DRV"))
        assert budget.terminals["T1"].authority == pytest.approx(choice.authority)
        assert budget.sources["P1"].required == pytest.approx(choice.required)


@pytest.mark.parametrize("authority", [0.0, 1.0, -0.1])
def test_an_authority_lies_between_nothing_and_the_whole(authority: float) -> None:
    with pytest.raises(ValueError, match="above 0"):
        propose_kv(budget_of(control(10, 5)).run, "T1", authority)


def test_without_a_control_item_or_where_the_flow_is_held_there_is_none() -> None:
    held = control(10, 5, "PIV").replace("[device.DRV]", '[device.PIV]\nholds = "flow"\nleast_drop = 5\n[device.DRV]')
    assert propose_kv(budget_of(held).run, "T1") is None
    run = budget_of(control(10, 5)).run
    assert propose_kv(run, "T2") is None
    assert propose_kv(run, "nowhere") is None


VALVES = """
[device.SMALL]
kv = [[0, 0.1], [4, 3.6]]
[device.RIGHT]
kv = [[0, 1], [4, 36]]
[device.UNREAD]
kv = [[0, 0.36], [4, 36]]
signal_kv = 36
least_signal = 2
[device.LARGE]
kv = [[0, 30], [4, 360]]
[device.DAMPER]
k = [[0, 1], [60, 100]]
[device.PIV]
holds = "flow"
least_drop = 1
[source]
P1 = {}
[terminal]
T1 = { from = "P1", flow = 1, drop = 20 }
T2 = { from = "P1", flow = 1, drop = 60 }
"""


def test_devices_are_tried_in_their_place_and_the_best_comes_first() -> None:
    found = propose_devices(budget_of(LIQUID + VALVES).run, "T1")
    # 40 kPa to take up. SMALL costs 1 bar fully open and becomes the index, UNREAD's orifice shows 1 kPa of the 2 due.
    assert [(one.name, one.suits) for one in found] == [
        ("RIGHT", True), ("SMALL", True), ("UNREAD", False), ("LARGE", False),
    ]  # fmt: skip
    right, small, unread, large = found
    assert (right.drop, right.required) == pytest.approx((40_000.0, 60_000.0))
    assert (small.drop, small.required) == pytest.approx((100_000.0, 120_000.0))
    assert (unread.in_table, unread.readable) == (True, False)
    assert unread.signal == pytest.approx(1000.0)
    assert (large.in_table, large.setting) == (False, None)


def test_a_gas_is_offered_dampers() -> None:
    text = GAS + VALVES.replace("flow = 1, drop = 20", 'flow = "100 L/s", drop = 20, neck = "200 mm"')
    assert [one.name for one in propose_devices(budget_of(text).run, "T1")] == ["DAMPER"]
    assert propose_devices(budget_of(text).run, "P1") == ()
