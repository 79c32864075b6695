"""Small systems as installed: what devices hold, what a case changes, and how pumps run."""

from __future__ import annotations

import math

import pytest

from budget.network.flows import Flows, solve_flows
from budget.network.flows.cases import Devices
from tests.network.small import GAS, LIQUID, budget_of

TWO = (
    LIQUID
    + """
[device.V]
kv = [[0, 0.1], [1, 1.0], [2, 10.0]]
[device.PIV]
holds = "flow"
least_drop = "10 kPa"
greatest_drop = "60 kPa"
[device.DPV]
holds = "differential"
least_drop = "5 kPa"
set_point = "20 kPa"
[source.P1]
{source}
[section.M]
from = "P1"
bore = 40
length = 0
[[section.M.item]]
drop = 5
[terminal.A]
from = "M"
flow = 0.1
drop = 10
{a}
[terminal.B]
from = "M"
flow = 0.1
drop = 30
{b}
"""
)


def solved(text: str, case: str | None = None, devices: Devices = "given") -> Flows:
    budget = budget_of(text)
    description = budget.run.layout.description
    return solve_flows(budget.run, None if case is None else description.cases[case], devices)


def two(source: str = "", a: str = "", b: str = "", more: str = "") -> str:
    return TWO.format(source=source, a=a, b=b) + more


def shares(flows: Flows) -> dict[str, float]:
    assert flows.settled
    return {id_: one.share for id_, one in flows.terminals.items()}


def codes(flows: Flows) -> list[str]:
    return [finding.code for finding in flows.findings]


def test_two_parallel_terminals_share_by_the_root_of_their_resistance() -> None:
    """Required 35 kPa; at flows x and y: 5 ((x + y)/2)^2 + 10 x^2 = 35 and 10 x^2 = 30 y^2."""
    found = shares(solved(two()))
    y = math.sqrt(35.0 / (5.0 * ((math.sqrt(3.0) + 1.0) / 2.0) ** 2 + 30.0))
    assert found["B"] == pytest.approx(y, rel=1e-6)
    assert found["A"] == pytest.approx(y * math.sqrt(3.0), rel=1e-6)


def test_a_valve_is_set_where_the_budget_proposes_stated_or_open() -> None:
    text = two(a='balance = "V"')
    assert shares(solved(text)) == pytest.approx({"A": 1.0, "B": 1.0}, rel=1e-6)
    opened = shares(solved(text, devices="open"))
    assert opened["A"] > 1.6
    stated = two(a='balance = "V"\nsetting = 0')  # Kv 0.1: 360 L/h through it take 12.96 bar
    at_0 = shares(solved(stated))
    assert at_0["A"] < 0.2
    assert shares(solved(stated, devices="set"))["A"] == pytest.approx(1.0, rel=1e-6)


def test_a_flow_holding_device_holds_between_its_drops() -> None:
    """A needs 10 + 10 at design, has 30: it holds. Its share of a case is held too, and no more."""
    text = two(a='balance = "PIV"', more="[case.half]\nshare = { A = 0.5 }\n")
    assert shares(solved(text)) == pytest.approx({"A": 1.0, "B": 1.0}, rel=1e-5)
    half = solved(text, "half")
    assert shares(half)["A"] == pytest.approx(0.5, rel=1e-5)
    assert half.terminals["A"].wanted == 0.5
    assert half.terminals["A"].within
    assert shares(half)["B"] > 1.0


def test_a_flow_holding_device_without_pressure_is_fully_open() -> None:
    """At 15 kPa across the source: 5 ((x + y)/2)^2 + 20 x^2 = 15 and 20 x^2 = 30 y^2."""
    weak = 'controls = "differential"\nset_point = 15'
    found = shares(solved(two(weak, a='balance = "PIV"')))
    y = math.sqrt(15.0 / (5.0 * ((math.sqrt(1.5) + 1.0) / 2.0) ** 2 + 30.0))
    assert found["B"] == pytest.approx(y, rel=1e-5)
    assert found["A"] == pytest.approx(y * math.sqrt(1.5), rel=1e-5)


def test_a_flow_holding_device_leaves_what_remains_above_its_greatest_drop() -> None:
    """200 kPa: the device stays as it is at 60 kPa, so 70 kPa at design flow in all."""
    strong = 'controls = "differential"\nset_point = 200'
    flows = solved(two(strong, a='balance = "PIV"'))
    a, b = shares(flows)["A"], shares(flows)["B"]
    assert 70.0 * a * a == pytest.approx(30.0 * b * b, rel=1e-5)
    assert 5.0 * ((a + b) / 2.0) ** 2 + 70.0 * a * a == pytest.approx(200.0, rel=1e-5)
    assert "flow-tolerance" in codes(flows)


HELD = (
    LIQUID
    + """
[device.DPV]
holds = "differential"
least_drop = "5 kPa"
set_point = "20 kPa"
[source.P1]
{source}
[section.M]
from = "P1"
bore = 40
length = 0
balance = "DPV"
[terminal.A]
from = "M"
flow = 0.1
drop = 20
[terminal.B]
from = "P1"
flow = 0.1
drop = 60
[case.off]
off = ["B"]
"""
)


def test_a_differential_holding_device_keeps_its_set_point_while_it_can() -> None:
    at = HELD.format(source="")
    assert shares(solved(at)) == pytest.approx({"A": 1.0, "B": 1.0}, rel=1e-5)
    strong = HELD.format(source='controls = "differential"\nset_point = 90')
    assert shares(solved(strong)) == pytest.approx({"A": 1.0, "B": math.sqrt(1.5)}, rel=1e-5)
    weak = HELD.format(source='controls = "differential"\nset_point = 16')  # 5 + 20 at design flow is too much
    assert shares(solved(weak))["A"] == pytest.approx(math.sqrt(16.0 / 25.0), rel=1e-5)


def test_what_is_off_gets_nothing_and_is_no_finding() -> None:
    flows = solved(HELD.format(source=""), "off")
    assert shares(flows) == pytest.approx({"A": 1.0, "B": 0.0}, rel=1e-5)
    assert flows.terminals["B"].within
    assert codes(flows) == []


def test_a_whole_source_can_be_off() -> None:
    flows = solved(two(more='[case.off]\noff = ["P1"]\n'), "off")
    assert shares(flows) == pytest.approx({"A": 0.0, "B": 0.0}, abs=1e-6)
    assert flows.sources["P1"].pressure == 0.0


CONTROL = """
[[terminal.A.item]]
name = "Valve"
kv = 1.138419957661
control = "{kind}"
{characteristic}
[case.part]
stroke = {{ A = 0.5 }}
[case.shut]
stroke = {{ A = 0 }}
[case.idle]
stroke = {{ B = 0.5 }}
share = {{ B = 0.5 }}
"""


@pytest.mark.parametrize(
    ("characteristic", "opening"),
    [
        ("", 50.0**-0.5),
        ('characteristic = "equal percentage"\nrangeability = 30', 30.0**-0.5),
        ('characteristic = "linear"', 0.02 + 0.98 * 0.5),
    ],
)
def test_a_part_open_valve_loses_by_the_square_of_its_opening(characteristic: str, opening: float) -> None:
    """Kv 1.138 drops 10 kPa at 0.1 L/s; required 35 kPa."""
    text = two(more=CONTROL.format(kind="two-port", characteristic=characteristic))
    a, b = shares(solved(text, "part")).values()
    assert (10.0 + 10.0 / opening**2) * a * a == pytest.approx(30.0 * b * b, rel=1e-5)
    assert 5.0 * ((a + b) / 2.0) ** 2 + 30.0 * b * b == pytest.approx(35.0, rel=1e-5)
    assert shares(solved(text, "shut"))["A"] == 0.0


def test_what_a_case_asks_in_vain_is_found() -> None:
    text = two(more=CONTROL.format(kind="three-port", characteristic=""))
    assert codes(solved(text, "part")).count("case-idle") == 1
    assert codes(solved(text, "idle")).count("case-idle") == 2
    assert shares(solved(text, "part"))["A"] == shares(solved(text))["A"]


CURVE = 'efficiency = 0.5\ncurve = [["0 L/s", "60 kPa"], ["0.2 L/s", "50 kPa"], ["0.4 L/s", "20 kPa"]]'


def test_a_pump_works_where_its_curve_meets_the_system() -> None:
    flows = solved(two(CURVE))
    pump = flows.sources["P1"]
    a, b = shares(flows).values()
    assert pump.flow == pytest.approx(1e-4 * (a + b), rel=1e-6)
    assert pump.pressure == pytest.approx(5e3 * ((a + b) / 2.0) ** 2 + 3e4 * b * b, rel=1e-6)
    assert 20e3 < pump.pressure < 50e3
    assert pump.speed == 1.0
    assert pump.power == pytest.approx(pump.flow * pump.pressure / 0.5)


CASES = """
[case.slow]
source = { P1 = { speed = 0.5 } }
[case.both]
source = { P1 = { running = 2 } }
[case.none]
source = { P1 = { running = 0 } }
[case.fast]
source = { P1 = { speed = 3 } }
[case.held]
source = { P1 = { set_point = 20 } }
[case.high]
source = { P1 = { set_point = 80 } }
"""


def test_by_the_affinity_laws_a_quadratic_system_follows_the_speed() -> None:
    text = two(CURVE, more=CASES)
    full, half = solved(text), solved(text, "slow")
    assert half.sources["P1"].flow == pytest.approx(0.5 * full.sources["P1"].flow, rel=1e-5)
    assert half.sources["P1"].pressure == pytest.approx(0.25 * full.sources["P1"].pressure, rel=1e-5)
    assert half.sources["P1"].power == pytest.approx(0.125 * (full.sources["P1"].power or 0.0), rel=1e-5)


def test_units_in_parallel_share_the_flow() -> None:
    text = two(CURVE, more=CASES)
    one, both, none = solved(text), solved(text, "both"), solved(text, "none")
    assert both.sources["P1"].flow > 1.05 * one.sources["P1"].flow
    doubled = two(CURVE.replace('"0.2 ', '"0.4 ').replace('["0.4 L/s", "20', '["0.8 L/s", "20'))
    assert both.sources["P1"].flow == pytest.approx(solved(doubled).sources["P1"].flow, rel=1e-6)
    assert none.sources["P1"].flow == 0.0


def test_a_pump_beyond_its_curve_is_found() -> None:
    weak = CURVE.replace("0.2 L/s", "0.02 L/s").replace("0.4 L/s", "0.04 L/s").replace("20 kPa", "49 kPa")
    assert "off-curve" in codes(solved(two(weak)))
    assert "off-curve" not in codes(solved(two(CURVE)))


def test_a_pump_that_controls_a_differential_slows_down_to_it() -> None:
    text = two(CURVE, more=CASES)
    held = solved(text, "held")
    pump = held.sources["P1"]
    assert pump.pressure == pytest.approx(20e3, rel=1e-6)
    assert pump.speed is not None
    assert 0.0 < pump.speed < 1.0
    high = solved(text, "high")
    assert "set-point-missed" in codes(high)
    assert high.sources["P1"].pressure < 80e3


def test_a_sensor_at_a_terminal_holds_the_differential_there() -> None:
    """B sees 30 kPa whatever A does, so it has its design flow with A off too."""
    source = 'controls = "differential"\nset_point = 30\nsensor = "B"'
    text = two(source, more='[case.off]\noff = ["A"]\n')
    assert shares(solved(text))["B"] == pytest.approx(1.0, rel=1e-5)
    off = solved(text, "off")
    assert shares(off) == pytest.approx({"A": 0.0, "B": 1.0}, abs=1e-5)
    assert off.sources["P1"].pressure == pytest.approx(30e3 + 5e3 / 4.0, rel=1e-5)


BRANCH = (
    LIQUID
    + """
[source.P1]
controls = "differential"
set_point = 20
sensor = "{sensor}"
[section.M]
from = "P1"
bore = 40
length = 0
[[section.M.item]]
drop = 5
[section.N]
from = "M"
bore = 40
length = 0
[[section.N.item]]
drop = 4
[terminal.A]
from = "M"
flow = 0.1
drop = 18
[terminal.B]
from = "N"
flow = 0.1
drop = 12
bore = 25
length = 0
[[terminal.B.item]]
drop = 4
"""
)


@pytest.mark.parametrize(
    ("sensor", "a", "b"),
    [
        ("M", None, None),
        ("N", math.sqrt(20 / 18), 1.0),
        ("A", math.sqrt(20 / 18), 1.0),
        ("B", None, math.sqrt(20 / 16)),
    ],
)
def test_a_sensor_is_where_its_section_or_run_out_begins(sensor: str, a: float | None, b: float | None) -> None:
    flows = solved(BRANCH.format(sensor=sensor))
    found = shares(flows)
    if a is not None:
        assert found["A"] == pytest.approx(a, rel=1e-5)
    if b is not None:
        assert found["B"] == pytest.approx(b, rel=1e-5)
    if sensor == "M":
        assert flows.sources["P1"].pressure == pytest.approx(20e3, rel=1e-6)


def test_a_sensor_on_another_source_is_an_error_and_the_pump_senses_at_itself() -> None:
    text = BRANCH.format(sensor="C") + '[source.P2]\n[terminal.C]\nfrom = "P2"\nflow = 0.3\ndrop = 12\n'
    flows = solved(text)
    assert "wrong-connection" in codes(flows)
    assert flows.settled
    assert flows.sources["P1"].pressure == pytest.approx(20e3, rel=1e-6)


@pytest.mark.parametrize(("sensor", "share"), [("D", 0.5), ("S", 0.5), ("E1", 0.5**0.5)])
def test_a_fan_holds_the_pressure_in_a_duct_against_the_room(sensor: str, share: float) -> None:
    source = f'controls = "differential"\nset_point = 10\nsensor = "{sensor}"'
    assert shares(solved(FAN.format(source=source)))["S"] == pytest.approx(share, rel=1e-5)


FAN = (
    GAS
    + """
[source.F]
{source}
[[source.F.item]]
drop = 100
[section.D]
from = "F"
size = "300"
length = 0
[terminal.S]
from = "D"
flow = 100
drop = 40
[terminal.E1]
to = "F"
flow = 60
drop = 20
[terminal.E2]
to = "F"
flow = 40
drop = 20
"""
)


def test_both_sides_of_a_fan_are_in_series() -> None:
    flows = solved(FAN.format(source=""))
    assert shares(flows) == pytest.approx({"S": 1.0, "E1": 1.0, "E2": 1.0}, rel=1e-6)
    assert flows.sources["F"].pressure == pytest.approx(160.0, rel=1e-6)
    curve = 'curve = [["0 L/s", "800 Pa"], ["200 L/s", "640 Pa"]]'
    flows = solved(FAN.format(source=curve))
    share = flows.terminals["S"].share
    assert shares(flows) == pytest.approx(dict.fromkeys(("S", "E1", "E2"), share), rel=1e-6)
    assert 160.0 * share**2 == pytest.approx(800.0 - 80.0 * share, rel=1e-6)
    assert flows.sources["F"].pressure == pytest.approx(160.0 * share**2, rel=1e-6)


def test_a_static_fan_curve_gains_the_velocity_pressure_at_the_outlet() -> None:
    curve = 'curve = [["0 L/s", "800 Pa"], ["200 L/s", "640 Pa"]]\noutlet = "100x100"\ncurve_is = "static"'
    flows = solved(FAN.format(source=curve))
    share = flows.terminals["S"].share
    velocity = 0.1 * share / 0.01
    assert flows.sources["F"].pressure == pytest.approx(160.0 * share**2, rel=1e-6)
    assert 160.0 * share**2 == pytest.approx(800.0 - 80.0 * share + 0.6 * velocity**2, rel=1e-6)


def test_sources_do_not_know_of_each_other() -> None:
    both = two(CURVE) + '[source.P2]\n[terminal.C]\nfrom = "P2"\nflow = 0.3\ndrop = 12\n'
    flows = solved(both)
    assert flows.terminals["C"].share == pytest.approx(1.0, rel=1e-6)
    assert flows.sources["P1"].flow == pytest.approx(solved(two(CURVE)).sources["P1"].flow, rel=1e-6)


def test_flow_runs_backward_where_a_static_head_drives_it() -> None:
    """A weak pump lifts to A, and from the higher B water comes back."""
    text = (
        LIQUID.replace("paired = true", "")
        + """
[source.P]
open = true
controls = "differential"
set_point = "70 kPa"
[section.M]
from = "P"
bore = 40
length = 0
[[section.M.item]]
drop = 5
[section.N]
from = "M"
bore = 40
length = 0
[terminal.A]
from = "M"
flow = 0.1
drop = 10
rise = 2
[terminal.B]
from = "N"
flow = 0.1
drop = 10
rise = 12
"""
    )
    flows = solved(text)
    assert flows.settled
    assert flows.terminals["B"].share < 0.0
    assert flows.sections["N"].flow < 0.0
    assert "backward" in codes(flows)
    assert flows.sections["M"].flow == pytest.approx(flows.terminals["A"].flow + flows.terminals["B"].flow)


def test_a_source_that_can_not_be_computed_is_left_out_and_the_others_stand() -> None:
    from tests.network.small import evaluated_of

    text = two() + '[source.P2]\n[terminal.C]\nfrom = "P2"\nflow = "a lot"\ndrop = 12\n'
    flows = solve_flows(evaluated_of(text).run)
    assert set(flows.sources) == {"P1"}
    assert set(flows.terminals) == {"A", "B"}
    assert flows.settled


def test_what_does_not_settle_says_where_and_keeps_flows(monkeypatch: pytest.MonkeyPatch) -> None:
    import importlib

    monkeypatch.setattr(importlib.import_module("budget.network.flows.solve"), "STEPS", 1)
    flows = solved(two())
    assert not flows.settled
    found = [finding for finding in flows.findings if finding.code == "not-settled"]
    assert len(found) == 1
    assert found[0].level == "error"
    assert found[0].path[0] in ("source", "section", "terminal")
    assert all(math.isfinite(terminal.flow) for terminal in flows.terminals.values())
