"""Flows and drops of legs, items, devices and terminals, against sums done by hand."""

from __future__ import annotations

import math

import pytest

from budget.network import SectionResult, TerminalResult
from tests.network.small import GAS, LIQUID, budget_of, errors_of

SECTION = (
    LIQUID
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", SECTION }
[terminal]
T1 = { from = "M1", FLOW, drop = 1 }
"""
)
DUCT = (
    GAS
    + """
[source]
F1 = {}
[section]
D1 = { from = "F1", SECTION }
[terminal]
S1 = { from = "D1", FLOW, drop = 1 }
"""
)


def section(keys: str, flow: str = "flow = 1") -> SectionResult:
    return budget_of(SECTION.replace("SECTION", keys).replace("FLOW", flow)).sections["M1"]


def duct(keys: str, flow: str) -> SectionResult:
    return budget_of(DUCT.replace("SECTION", keys).replace("FLOW", flow)).sections["D1"]


def item_drop(item: str, flow: str = "flow = 1", keys: str = "bore = 40, length = 0") -> float:
    return section(f"{keys}, item = [{{ {item} }}]", flow).run.items


def test_a_laminar_pipe_follows_hagen_poiseuille() -> None:
    text = SECTION.replace("viscosity = 1\n", "viscosity = 10\n").replace("FLOW", "flow = 0.1")
    found = budget_of(text.replace("SECTION", "bore = 20, length = 10")).sections["M1"].run
    leg = found.legs[0]
    # 128 mu Q/(pi D^4) = 128 x 0.01 x 1e-4/(pi x 1.6e-7) = 254.648 Pa/m; two legs of 10 m
    assert leg.gradient == pytest.approx(254.648, rel=1e-5)
    assert found.friction == pytest.approx(5092.96, rel=1e-5)
    # v = 1e-4/(pi/4 x 4e-4) = 0.318310 m/s; Re = 1000 x 0.31831 x 0.02/0.01 = 636.62; f = 64/Re
    assert leg.velocity == pytest.approx(0.318310, rel=1e-5)
    assert leg.reynolds == pytest.approx(636.620, rel=1e-5)
    assert leg.friction_factor == pytest.approx(0.100531, rel=1e-5)
    assert leg.regime == "laminar"


def test_a_turbulent_pipe_follows_colebrook_white() -> None:
    # v = 2 m/s in 50 mm takes pi/4 x 0.0025 x 2 = 3.926991 L/s; Re = 1e5; roughness 0.05/50 = 0.001
    found = section("bore = 50, length = 10", "flow = 3.926990817").run
    leg = found.legs[0]
    assert leg.reynolds == pytest.approx(1e5, rel=1e-8)
    # f = 0.0221745 solves 1/sqrt f = -2 lg(0.001/3.7 + 2.51/(1e5 sqrt f)): 6.71543 on both sides
    assert leg.friction_factor == pytest.approx(0.0221745359, rel=1e-8)
    # 0.0221745/0.05 x 1000 x 2^2/2 = 886.981 Pa/m; two legs of 10 m
    assert found.friction == pytest.approx(17739.63, rel=1e-6)
    assert leg.regime == "turbulent"


def test_pairing_doubles_friction_and_fittings_but_no_item() -> None:
    keys = 'bore = 40, length = 3, fittings = { "entrance flush" = 2 }, item = [{ drop = 5 }], paired = '
    text = SECTION.replace('[terminal]\nT1 = { from = "M1",', '[terminal]\nT1 = { from = "M1", to = "P1",')
    single = budget_of(text.replace("SECTION", keys + "false").replace("FLOW", "flow = 1")).sections["M1"].run
    paired = section(keys + "true").run
    assert paired.friction == pytest.approx(2 * single.friction)
    assert paired.fittings == pytest.approx(2 * single.fittings)
    assert paired.items == single.items == pytest.approx(5000.0)
    assert paired.drop == pytest.approx(paired.friction + paired.fittings + 5000.0)


def test_each_leg_has_its_own_temperature() -> None:
    text = SECTION.replace('name = "custom"\ndensity = 1000\nviscosity = 1\nspecific_heat = 4\n', 'name = "water"\n')
    found = budget_of(text.replace("SECTION", "bore = 40, length = 3").replace("FLOW", 'flow = "1 kg/s"'))
    supply, back = found.sections["M1"].run.legs
    fluid = found.sources["P1"].fluid
    area = math.pi / 4 * 0.04**2
    assert supply.mass_flow == back.mass_flow == pytest.approx(1.0)
    assert supply.velocity == pytest.approx(1.0 / (fluid.density * area))
    assert back.velocity == pytest.approx(1.0 / (fluid.return_density * area))
    assert back.reynolds == pytest.approx(4.0 / (math.pi * 0.04 * fluid.return_viscosity))


def test_fittings_lose_at_the_velocity_pressure_of_the_leg() -> None:
    # v = 1 m/s in 40 mm takes 1.256637 L/s: 500 Pa. K of a flush entrance is 0.5: 3 x 0.5 x 500 Pa on both legs
    found = section('bore = 40, length = 0, fittings = { "entrance flush" = 3 }', "flow = 1.256637061").run
    assert found.fittings == pytest.approx(1500.0)
    assert found.k_total == pytest.approx(1.5)


V1 = "flow = 1.256637061"  # 1 m/s, so 500 Pa, in 40 mm


@pytest.mark.parametrize(
    ("item", "flow", "drop"),
    [
        ("k = 3", V1, 1500.0),  # 3 x 500
        ("k = 3, parallel = 2", V1, 375.0),  # half the velocity through each: a quarter
        ("kv = 1.6", 'flow = "1.6 m3/h"', 100_000.0),  # 1 bar by definition
        ("kv = 1.6, parallel = 2", 'flow = "1.6 m3/h"', 25_000.0),  # 0.8 m3/h each: 0.25 bar
        ("cv = 1.8496", 'flow = "1.6 m3/h"', 100_000.0),  # Kv = 1.8496/1.156 = 1.6
        ("drop = 5", "flow = 1", 5000.0),
        ('drop = "50 mbar"', "flow = 3", 5000.0),  # without at it is the drop at design flow
        ("drop = 5, at = 2", "flow = 1", 1250.0),  # (1/2)^2
        ("drop = 5, at = 2, exponent = 1", "flow = 1", 2500.0),
        ("drop = 5, at = 2, exponent = 1.75", "flow = 1", 1486.509),  # 0.5^1.75 = 0.297302
        ('drop = 5, at = "2 kg/s"', "flow = 1", 1250.0),  # 2 kg/s are 2 L/s of 1000 kg/m3
        ("drop = 5, at = 2, parallel = 2", "flow = 4", 5000.0),  # each has its 2 L/s
        ('drop = "2 m"', "flow = 1", 19_613.3),  # 2 m of the fluid: 1000 x 9.80665 x 2
        ("drop = 5, tested_density = 800", "flow = 1", 6250.0),  # x 1000/800
        ("drop = 5, at = 2, tested_density = 800", "flow = 1", 1562.5),
        ('clean = "1 kPa", final = "3 kPa"', "flow = 1", 2000.0),
        ('clean = "1 kPa", final = "3 kPa", state = "clean"', "flow = 1", 1000.0),
        ('clean = "1 kPa", final = "3 kPa", state = "final"', "flow = 1", 3000.0),
        ('clean = "1 kPa", final = "3 kPa", at = 2', "flow = 1", 500.0),
    ],
)
def test_an_item_drops_as_its_form_says(item: str, flow: str, drop: float) -> None:
    assert item_drop(item, flow) == pytest.approx(drop, rel=1e-6)


def test_an_equivalent_length_drops_as_so_much_of_its_pipe() -> None:
    found = section("bore = 40, length = 4, item = [{ equivalent_length = 1.5 }]").run
    # friction is that of 4 m on each of two legs; 1.5 m of the supply leg
    assert found.items == pytest.approx(1.5 / 8.0 * found.friction)


def test_an_item_on_a_return_section_has_the_density_of_the_return() -> None:
    text = LIQUID.replace('name = "custom"\ndensity = 1000\nviscosity = 1\nspecific_heat = 4\n', 'name = "water"\n') + (
        "[source]\nP1 = {}\n[section]\n"
        'S = { from = "P1", bore = 40, length = 0, paired = false, item = [{ kv = 5 }] }\n'
        'R = { to = "P1", bore = 40, length = 0, item = [{ kv = 5 }] }\n'
        '[terminal]\nT1 = { from = "S", to = "R", flow = "1 kg/s", drop = 1 }\n'
    )
    budget = budget_of(text)
    fluid = budget.sources["P1"].fluid
    # dp = (3600 m/(rho Kv))^2 rho/1000 bar = (720)^2/(1000 rho) bar at 1 kg/s: 0.5184e8/rho Pa x 1e3
    assert budget.sections["S"].run.items == pytest.approx(720.0**2 * 100 / fluid.density)
    assert budget.sections["R"].run.items == pytest.approx(720.0**2 * 100 / fluid.return_density)


def test_items_of_a_source_take_its_whole_flow() -> None:
    text = SECTION.replace("P1 = {}", 'P1 = { item = [{ kv = 1.6 }, { drop = 7, at = "3.2 m3/h" }] }')
    source = budget_of(text.replace("SECTION", "bore = 40, length = 0").replace("FLOW", 'flow = "1.6 m3/h"')).sources
    # 1 bar, and a quarter of 7 kPa
    assert [item.drop for item in source["P1"].items] == pytest.approx([100_000.0, 1750.0])
    assert source["P1"].items_drop == pytest.approx(101_750.0)


def test_a_rectangular_duct_has_the_mean_velocity_and_the_hydraulic_diameter() -> None:
    found = duct('size = "400x200", length = 5', 'flow = "400 L/s"').run
    # 0.4/(0.4 x 0.2) = 5 m/s; 4 x 0.08/1.2 = 0.266667 m; Re = 1.2 x 5 x 0.266667/18e-6 = 88 889
    assert found.legs[0].velocity == pytest.approx(5.0)
    assert found.hydraulic_diameter == pytest.approx(0.2666667)
    assert found.legs[0].reynolds == pytest.approx(88_888.9, rel=1e-5)
    assert (found.width, found.height, found.bore) == (0.4, 0.2, None)
    assert found.friction == pytest.approx(found.legs[0].friction_factor / 0.2666667 * 15.0 * 5.0, rel=1e-6)


def test_a_compressed_flexible_duct_costs_more_than_a_stretched_one() -> None:
    stretched = duct('duct = "flex", size = "200 mm", length = 3', "flow = 100").run.friction
    found = duct('duct = "flex", size = "200 mm", length = 3, compression = "10 %"', "flow = 100").run
    # 1 + 0.58 x 10 x exp(-0.00496 x 200) = 1 + 5.8 x 0.370834
    assert found.friction == pytest.approx(3.150837 * stretched, rel=1e-5)
    assert found.legs[0].gradient == pytest.approx(found.friction / 3)


AIR_END = (
    GAS
    + """
[source]
F1 = {}
[section]
D1 = { SIDE = "F1", size = "300 mm", length = 0 }
[terminal]
S1 = { SIDE = "D1", flow = "0.0942477796 m3/s", neck = "200 mm", TERMINAL }
"""
)


def air_terminal(side: str, keys: str) -> TerminalResult:
    return budget_of(AIR_END.replace("SIDE", side).replace("TERMINAL", keys)).terminals["S1"]


@pytest.mark.parametrize(
    ("side", "keys", "drop"),
    [
        # pi/4 x 0.2^2 m2 at 0.0942478 m3/s: 3 m/s, so 1.2 x 9/2 = 5.4 Pa in the neck
        ("from", 'static_drop = "28 Pa"', 33.4),
        ("to", 'static_drop = "28 Pa"', 22.6),
        ("to", 'static_drop = "-28 Pa"', 22.6),
        # Measured at twice the flow: a quarter of the static part, the neck at design flow.
        ("from", 'static_drop = "28 Pa", at = "0.1884955592 m3/s"', 12.4),
        ("from", 'static_drop = "28 Pa", at = "0.1884955592 m3/s", exponent = 1', 19.4),
        ("to", 'static_drop = "28 Pa", at = "0.1884955592 m3/s"', 1.6),
        ("from", "drop = 20", 20.0),
        ("from", 'drop = 20, at = "0.1884955592 m3/s"', 5.0),
    ],
)
def test_an_air_terminal_s_static_drop_becomes_a_total_one(side: str, keys: str, drop: float) -> None:
    assert air_terminal(side, keys).drop == pytest.approx(drop, rel=1e-6)


def test_a_coefficient_on_a_terminal_refers_to_its_neck() -> None:
    assert air_terminal("from", "drop = 1, item = [{ k = 2 }]").items_drop == pytest.approx(10.8, rel=1e-6)


def test_a_coefficient_on_a_terminal_without_a_neck_refers_to_its_run_out_or_its_section() -> None:
    text = SECTION.replace("drop = 1 }", "drop = 1, item = [{ k = 2 }] KEYS }")
    text = text.replace("SECTION", "bore = 40, length = 0").replace("FLOW", V1)
    assert budget_of(text.replace("KEYS", "")).terminals["T1"].items_drop == pytest.approx(1000.0, rel=1e-6)
    # 20 mm is a quarter of the area: four times the velocity, sixteen times the pressure
    run_out = budget_of(text.replace("KEYS", ", bore = 20, length = 0")).terminals["T1"]
    assert run_out.items_drop == pytest.approx(16_000.0, rel=1e-6)


def test_a_coefficient_with_nothing_to_refer_to_is_an_error() -> None:
    text = LIQUID + '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", flow = 1, item = [ITEM] }\n'
    assert errors_of(text.replace("ITEM", "{ k = 2 }")) == [("no-reference", "terminal.T1.item.0.k")]
    assert errors_of(text.replace("ITEM", "{ equivalent_length = 2 }")) == [
        ("no-reference", "terminal.T1.item.0.equivalent_length")
    ]
    assert errors_of(text.replace("ITEM", "{ kv = 2 }")) == []


BALANCED = """
[device."DRV 20"]
kv = [[0, 0.5], [4, 3.6]]
least_drop = 3
[device.PIV]
holds = "flow"
least_drop = 20
[device.CVD]
cv = [[0, 0.5], [4, 4.1616]]
"""


@pytest.mark.parametrize(
    ("device", "flow", "base"),
    [
        ("DRV 20", 1.0, 100_000.0),  # 3.6 m3/h through Kv 3.6: 1 bar
        ("DRV 20", 0.1, 3000.0),  # 1 kPa fully open, but 3 kPa at least
        ("PIV", 1.0, 20_000.0),
        ("CVD", 1.0, 100_000.0),  # Cv 4.1616 is Kv 3.6
    ],
)
def test_the_base_drop_of_a_device_is_the_larger_of_fully_open_and_least(device: str, flow: float, base: float) -> None:
    text = SECTION.replace("[source]", BALANCED + "[source]").replace(
        "drop = 1 }", f'drop = 1, balance = "{device}" }}'
    )
    found = budget_of(text.replace("SECTION", "bore = 40, length = 0").replace("FLOW", f"flow = {flow}"))
    device_result = found.terminals["T1"].device
    assert device_result is not None
    assert device_result.base == pytest.approx(base)
    assert found.terminals["T1"].circuit == pytest.approx(base + 1000.0)


def test_the_base_drop_of_a_damper_is_at_its_least_coefficient() -> None:
    text = DUCT.replace("[source]", "[device.VD]\nk = [[0, 0.2], [60, 40]]\n[source]").replace(
        "SECTION", 'size = "200 mm", length = 0, balance = "VD"'
    )
    found = budget_of(text.replace("FLOW", 'flow = "0.0942477796 m3/s"')).sections["D1"].device
    assert found is not None
    assert found.base == pytest.approx(0.2 * 5.4, rel=1e-6)  # 3 m/s: 5.4 Pa


def test_a_damper_with_no_duct_to_refer_to_is_an_error() -> None:
    text = GAS + (
        "[device.VD]\nk = [[0, 0.2], [60, 40]]\n[source]\nF1 = {}\n[terminal]\n"
        'S1 = { from = "F1", flow = 90, drop = 5, balance = "VD" KEYS }\n'
    )
    assert errors_of(text.replace("KEYS", "")) == [("no-reference", "terminal.S1.balance")]
    assert errors_of(text.replace("KEYS", ', neck = "200 mm"')) == []


FAN = (
    GAS
    + """
[source]
F1 = {}
[section]
D1 = { from = "F1", size = "300 mm", length = 0 }
E1 = { to = "F1", size = "300 mm", length = 0 }
[terminal]
S1 = { from = "D1", flow = 60, drop = 10 }
S2 = { from = "D1", flow = 40, drop = 10 }
X1 = { to = "E1", LONE drop = 8 }
"""
)


def test_a_terminal_alone_on_its_side_takes_the_flow_of_the_other() -> None:
    budget = budget_of(FAN.replace("LONE", ""))
    assert budget.terminals["X1"].mass_flow == pytest.approx(0.12)  # 100 L/s x 1.2 kg/m3
    assert budget.sections["E1"].run.flow == pytest.approx(0.1)
    assert budget.sources["F1"].mass_flow == pytest.approx(0.12)


def test_a_terminal_alone_on_its_side_may_still_state_its_flow() -> None:
    budget = budget_of(FAN.replace("LONE", "flow = 90,"))
    assert budget.terminals["X1"].flow == pytest.approx(0.09)
    # The source takes the discharge side.
    assert budget.sources["F1"].flow == pytest.approx(0.1)


def test_of_two_terminals_on_a_side_none_may_omit_its_flow() -> None:
    text = FAN.replace("LONE", "") + 'X2 = { to = "E1", flow = 20, drop = 8 }\n'
    assert errors_of(text) == [("no-flow", "terminal.X1")]


def test_two_terminals_alone_on_their_sides_can_t_both_omit_their_flow() -> None:
    text = (
        FAN.replace("LONE", "").replace('S2 = { from = "D1", flow = 40, drop = 10 }\n', "").replace("flow = 60, ", "")
    )
    assert errors_of(text) == [("no-flow", "terminal.S1"), ("no-flow", "terminal.X1")]


def test_a_fan_s_lone_terminal_with_nothing_on_the_other_side_needs_its_flow() -> None:
    text = DUCT.replace("SECTION", 'size = "300 mm", length = 0').replace("FLOW, ", "")
    assert errors_of(text) == [("no-flow", "terminal.S1")]


def test_a_lone_supply_terminal_takes_the_flow_of_the_extract() -> None:
    text = GAS + (
        '[source]\nF1 = {}\n[terminal]\nS1 = { from = "F1", drop = 10 }\n'
        'X1 = { to = "F1", flow = 30, drop = 8 }\nX2 = { to = "F1", flow = 20, drop = 8 }\n'
    )
    budget = budget_of(text)
    assert budget.terminals["S1"].flow == pytest.approx(0.05)
    assert budget.sources["F1"].flow == pytest.approx(0.05)


def test_a_fan_with_a_suction_side_alone_takes_its_flow() -> None:
    text = GAS + '[source]\nF1 = {}\n[terminal]\nX1 = { to = "F1", flow = 30, drop = 8 }\n'
    assert budget_of(text).sources["F1"].flow == pytest.approx(0.03)


DIVERSE = (
    LIQUID
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 0, MAIN }
B1 = { from = "M1", bore = 40, length = 0, BRANCH }
[terminal]
T1 = { from = "B1", flow = 0.5, drop = 1 }
T2 = { from = "B1", flow = 0.3, drop = 1 }
T3 = { from = "M1", flow = 0.2, drop = 1 }
"""
)


@pytest.mark.parametrize(
    ("main", "branch", "flows"),
    [
        ("keep = true", "keep = true", (1.0, 0.8)),
        ("diversity = 0.9", "keep = true", (0.9, 0.8)),
        # The main is the sum of what hangs on it: 0.7 x 0.8 + 0.2
        ("keep = true", "diversity = 0.7", (0.76, 0.56)),
        # Its own diversity is of all terminals undiversified: 0.6 x 1.0
        ("diversity = 0.6", 'diversity = "70 %"', (0.6, 0.56)),
    ],
)
def test_diversity_is_of_the_undiversified_flow_of_all_terminals(
    main: str, branch: str, flows: tuple[float, float]
) -> None:
    budget = budget_of(DIVERSE.replace("MAIN", main).replace("BRANCH", branch))
    found = [[leg.mass_flow for leg in budget.sections[id_].run.legs] for id_ in ("M1", "B1")]
    assert found == [pytest.approx([flow, flow]) for flow in flows]
    assert budget.sources["P1"].mass_flow == pytest.approx(flows[0])
    assert budget.terminals["T1"].mass_flow == pytest.approx(0.5)


def test_a_diversified_flow_below_the_largest_branch_is_an_error() -> None:
    low = DIVERSE.replace("MAIN", "diversity = 0.79").replace("BRANCH", "keep = true")
    assert errors_of(low) == [("diversity", "section.M1.diversity")]
    equal = DIVERSE.replace("MAIN", "diversity = 0.8").replace("BRANCH", "keep = true")
    assert errors_of(equal) == []
    # A terminal is a branch too: 0.6 x 0.8 is less than the 0.5 of T1.
    terminal = DIVERSE.replace("MAIN", "keep = true").replace("BRANCH", "diversity = 0.6")
    assert errors_of(terminal) == [("diversity", "section.B1.diversity")]


def test_static_is_the_weight_of_the_column_and_the_pressure_needed_at_the_outlet() -> None:
    text = LIQUID.replace("paired = true\n", "") + (
        "[source]\nP1 = { open = true }\n[section]\n"
        'I1 = { to = "P1", bore = 50, length = 0, rise = -2 }\nM1 = { from = "P1", bore = 50, length = 0, rise = 10 }\n'
        '[terminal]\nT1 = { from = "M1", to = "I1", flow = 1, rise = 1, outlet_pressure = 30 }\n'
    )
    budget = budget_of(text)
    # 1000 x 9.80665 x 10 = 98 066.5 Pa; -2 m: -19 613.3 Pa; 1 m + 30 kPa
    assert budget.sections["M1"].run.static == pytest.approx(98_066.5)
    assert budget.sections["I1"].run.static == pytest.approx(-19_613.3)
    assert budget.terminals["T1"].static == pytest.approx(39_806.65)
    assert budget.sources["P1"].required == pytest.approx(118_259.85)
    assert budget.sources["P1"].static == pytest.approx(118_259.85)
    # Static is no part of a section's drop.
    assert budget.sections["M1"].run.drop == 0.0


def test_items_of_a_paired_section_stand_in_its_supply_leg() -> None:
    text = LIQUID.replace('name = "custom"\ndensity = 1000\nviscosity = 1\nspecific_heat = 4\n', 'name = "water"\n') + (
        "[source]\nP1 = {}\n[section]\n"
        'M1 = { from = "P1", bore = 40, length = 0, item = [{ kv = 5 }, { k = 2 }] }\n[terminal]\n'
        'T1 = { from = "M1", flow = "1 kg/s", bore = 20, length = 0, item = [{ k = 2 }, { kv = 5 }] }\n'
    )
    budget = budget_of(text)
    density = budget.sources["P1"].fluid.density
    # (3600/(rho Kv))^2 rho/1000 bar at 1 kg/s; k by 8 m^2/(pi^2 rho D^4)
    valve = 720.0**2 * 100 / density
    assert [item.drop for item in budget.sections["M1"].items] == pytest.approx(
        [valve, 2 * 8 / (math.pi**2 * density * 0.04**4)]
    )
    assert [item.drop for item in budget.terminals["T1"].items] == pytest.approx(
        [2 * 8 / (math.pi**2 * density * 0.02**4), valve]
    )
