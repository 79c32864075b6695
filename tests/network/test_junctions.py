"""Junctions in a run: each leg's coefficient by the published formulas, on both legs of paired sections.

The coefficients are worked out by hand from Crane TP-410 (2009), chapter 2, and Idelchik, section 7, as they stand in
`budget.physics.junctions`; q is the branch's share of the flow, a its area over the combined one, v = q/a.
"""

from __future__ import annotations

import math

import pytest

from budget.network import Budget, RunResult
from tests.network.small import GAS, LIQUID, budget_of, evaluated_of, places

TEE = (
    LIQUID
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 0 }
B1 = { from = "M1", bore = 40, length = 0, takeoff = "straight" }
B2 = { from = "M1", bore = 25, length = 0, takeoff = "branch" }
[terminal]
T1 = { from = "B1", flow = 0.8, drop = 1 }
T2 = { from = "B2", flow = 0.2, drop = 5 }
"""
)
"""q = 0.2, a = 0.25, v = 0.8; the combined leg has 1 L/s in 50 mm."""

COMBINED = 500.0 * (0.001 / (math.pi / 4 * 0.05**2)) ** 2
"""Velocity pressure of 1 L/s in 50 mm, Pa."""


def run_of(budget: Budget, id_: str) -> RunResult:
    return budget.sections[id_].run


def coefficients(budget: Budget, id_: str, pressure: float = COMBINED) -> list[float]:
    """The junction losses of a section's legs over the velocity pressure of the combined flow."""
    return [leg.junction / pressure for leg in run_of(budget, id_).legs]


def test_each_leg_of_a_paired_section_has_the_coefficient_of_its_own_junction() -> None:
    budget = budget_of(TEE)
    # Branch, diverging at 90 degrees: 1 + v^2; converging: 1 + v^2 - 2 (1 - q)^2.
    assert coefficients(budget, "B2") == pytest.approx([1.0 + 0.64, 1.0 + 0.64 - 1.28])
    # Straight, diverging below a = 0.4: 0.4 q^2; converging: 1.55 q - q^2.
    assert coefficients(budget, "B1") == pytest.approx([0.4 * 0.04, 0.31 - 0.04])
    assert coefficients(budget, "M1") == [0.0, 0.0]
    for id_ in ("B1", "B2"):
        whole = math.fsum(leg.junction for leg in run_of(budget, id_).legs)
        assert run_of(budget, id_).junction == pytest.approx(whole)


def test_each_coefficient_is_reported_with_its_source_and_the_velocity_it_is_on() -> None:
    (supply,), (back,) = (leg.joints for leg in run_of(budget_of(TEE), "B2").legs)
    assert (supply.name, back.name) == (
        "branch of a diverging junction, 90 deg",
        "branch of a converging junction, 90 deg",
    )
    assert supply.k == pytest.approx(1.64)
    assert supply.drop == pytest.approx(1.64 * COMBINED)
    assert supply.reference_velocity == pytest.approx(0.001 / (math.pi / 4 * 0.05**2))
    assert supply.reference == "velocity of the combined flow"
    assert supply.method == "tee-crane"
    assert "Crane" in supply.source
    straight = run_of(budget_of(TEE), "B1").legs[0].joints[0]
    assert straight.name.startswith("straight of")


def test_a_drop_is_the_sum_of_its_parts_and_so_is_a_circuit() -> None:
    text = TEE.replace("bore = 25, length = 0", 'bore = 25, length = 3, transition = 40, fittings = { "elbow 90" = 1 }')
    budget, without = budget_of(text), budget_of(text.replace('"branch"', '"none"'))
    run = run_of(budget, "B2")
    assert min(run.friction, run.fittings, run.junction, run.transition) > 0.0
    assert run.drop == pytest.approx(run.friction + run.fittings + run.junction + run.transition + run.items)
    assert run.drop - run_of(without, "B2").drop == pytest.approx(2.0 * COMBINED)
    assert budget.terminals["T2"].circuit - without.terminals["T2"].circuit == pytest.approx(2.0 * COMBINED)
    assert budget.terminals["T1"].circuit == pytest.approx(without.terminals["T1"].circuit)
    assert budget.sources["P1"].spent["distribution"] == pytest.approx(run.drop + run_of(budget, "M1").drop)


@pytest.mark.parametrize(("first", "second"), [("none", "branch"), ("straight", "none"), ("none", "none")])
def test_only_what_is_stated_counts(first: str, second: str) -> None:
    budget = budget_of(TEE.replace('"straight"', f'"{first}"').replace('"branch"', f'"{second}"'))
    whole = budget_of(TEE)
    for id_, stated in (("B1", first), ("B2", second)):
        expected = coefficients(whole, id_) if stated != "none" else [0.0, 0.0]
        assert coefficients(budget, id_) == pytest.approx(expected)


TRUNK = (
    LIQUID.replace('"none"', '"straight"')
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 0 }
M2 = { from = "M1", bore = 44, length = 0, transition = "abrupt" }
M3 = { from = "M2", bore = 40, length = 0, transition = "abrupt" }
B = { from = "M1", bore = 25, length = 0, takeoff = "branch" }
[terminal]
T1 = { from = "M3", flow = 0.8, drop = 1 }
T2 = { from = "B", flow = 0.2, drop = 5 }
"""
)
"""A trunk that goes straight on by default, with a branch at its first joint."""


def test_moving_a_takeoff_changes_the_loss_of_both_legs() -> None:
    near, far = budget_of(TRUNK), budget_of(TRUNK.replace('B = { from = "M1"', 'B = { from = "M2"'))
    pressure = COMBINED * (50 / 44) ** 4
    assert coefficients(near, "B") == pytest.approx([1.64, 0.36])
    v = 0.2 / (25 / 44) ** 2
    assert coefficients(far, "B", pressure) == pytest.approx([1.0 + v * v, 1.0 + v * v - 1.28])
    # M2 goes straight on where the branch leaves at M1, M3 where it leaves at M2; the other has no junction there.
    assert coefficients(near, "M2") == pytest.approx([0.016, 0.27])
    assert coefficients(near, "M3") == [0.0, 0.0]
    assert coefficients(far, "M2") == [0.0, 0.0]
    assert coefficients(far, "M3", pressure) == pytest.approx([0.016, 0.27])
    assert {finding.code for finding in (*near.findings, *far.findings)} == {"excess"}


@pytest.mark.parametrize("bore", [20, 32, 45])
def test_the_size_of_a_branch_changes_the_loss_of_both_legs(bore: int) -> None:
    before, after = budget_of(TEE), budget_of(TEE.replace("bore = 25", f"bore = {bore}"))
    assert coefficients(after, "B2") != pytest.approx(coefficients(before, "B2"), rel=1e-3)
    a, q = (bore / 50) ** 2, 0.2
    v = q / a
    steep = 0.3 if a > 4 / 9 else 1.0
    expected = (1.0 + steep * v * v) * (1.0 + 0.3 * q * q if a > 2 / 3 else 1.0)
    assert coefficients(after, "B2")[0] == pytest.approx(expected, rel=1e-2 if bore == 32 else 1e-9)
    straight = 0.4 * q * q if a < 0.38 else 2 * (2 * q - 1) * q * q
    if not 0.38 < a < 0.42:
        assert coefficients(after, "B1")[0] == pytest.approx(straight)
    assert (coefficients(after, "B1") == pytest.approx(coefficients(before, "B1"))) is (a < 0.38)


def test_an_oblique_branch_loses_less() -> None:
    budget = budget_of(TEE.replace('takeoff = "branch"', 'takeoff = "branch", angle = "45 deg"'))
    cos45 = math.sqrt(0.5)
    # Crane, below a = 0.35 and q = 0.4: (1.1 - 0.7 q) (1 + v^2 - 2 v cos 45); converging C = 1, F = 1.41.
    branch = (1.1 - 0.14) * (1.0 + 0.64 - 2 * 0.8 * cos45)
    assert coefficients(budget, "B2") == pytest.approx([branch, 1.0 + 0.64 - 1.28 - 1.41 * 0.2 * 0.8])
    assert coefficients(budget, "B1") == pytest.approx([0.4 * 0.04, 1.0 - 0.64 - 1.41 * 0.2 * 0.8])
    joint = run_of(budget, "B1").legs[0].joints[0]
    assert joint.name == "straight of a diverging junction, 45 deg"


def test_the_family_is_that_of_the_branch_of_the_straight_leg_or_of_the_defaults() -> None:
    more = TEE.replace("flow = 0.2", "flow = 0.3").replace("flow = 0.8", "flow = 0.7")  # v = 1.2
    crane = 1.0 + 1.44
    idelchik = 0.9 * (1.0 + 1.44)  # the factor above v = 0.8 is from memory
    assert coefficients(budget_of(more), "B2")[0] == pytest.approx(crane)
    texts = (
        more.replace('"branch"', '"branch", junction = "tee-idelchik"'),
        more.replace('"straight"', '"straight", junction = "tee-idelchik"'),
        more.replace('takeoff = "none"\n', 'takeoff = "none"\njunction = "tee-idelchik"\n'),
    )
    for text in texts:
        budget = budget_of(text)
        assert coefficients(budget, "B2")[0] == pytest.approx(idelchik)
        assert run_of(budget, "B2").legs[0].joints[0].method == "tee-idelchik"
    both = texts[2].replace('"branch"', '"branch", junction = "tee-crane"')
    assert coefficients(budget_of(both), "B2")[0] == pytest.approx(crane)


def test_ratios_are_those_of_the_legs_whatever_the_diversity_of_the_main() -> None:
    budget = budget_of(TEE.replace('M1 = { from = "P1",', 'M1 = { diversity = 0.9, from = "P1",'))
    assert run_of(budget, "M1").flow == pytest.approx(0.0009)
    assert coefficients(budget, "B2") == pytest.approx([1.64, 0.36])


REVERSE = (
    LIQUID.replace("paired = true\n", "")
    + """
[source]
P1 = {}
[section]
S1 = { from = "P1", bore = 50, length = 0 }
S2 = { from = "S1", bore = 40, length = 0, takeoff = "straight" }
R1 = { to = "R2", bore = 40, length = 0, takeoff = "straight" }
R2 = { to = "P1", bore = 50, length = 0 }
[terminal]
T1 = { from = "S1", to = "R1", flow = 0.2, drop = 5, paired = true, bore = 25, length = 0, takeoff = "branch" }
T2 = { from = "S2", to = "R2", flow = 0.8, drop = 5, paired = true, bore = 25, length = 0, takeoff = "branch" }
"""
)


def test_a_run_out_of_a_reverse_return_is_a_branch_on_the_side_where_others_meet_it() -> None:
    budget = budget_of(REVERSE)
    first, last = budget.terminals["T1"].run_out, budget.terminals["T2"].run_out
    assert first is not None
    assert last is not None
    # First supplied: a branch of S1. It is where the return begins: nothing meets it there.
    assert [leg.junction / COMBINED for leg in first.legs] == pytest.approx([1.64, 0.0])
    # Last supplied: S2 goes on as its run-out. Of R2 it is the branch, with q = 0.8 and v = 3.2.
    assert [leg.junction / COMBINED for leg in last.legs] == pytest.approx([0.0, 1.0 + 3.2**2 - 2 * 0.2**2])
    assert coefficients(budget, "S2") == pytest.approx([0.4 * 0.04])
    assert coefficients(budget, "R1") == pytest.approx([1.55 * 0.8 - 0.64])


DUCTS = (
    GAS
    + """
[source]
F1 = {}
[section]
D1 = { from = "F1", size = "400x250", length = 0 }
D2 = { from = "D1", size = "400x200", length = 0, takeoff = "straight" }
X1 = { to = "F1", size = "400x250", length = 0 }
X2 = { to = "X1", size = "400x200", length = 0, takeoff = "straight" }
[terminal]
S1 = { from = "D1", flow = 100, drop = 10, size = "200x125", length = 0, takeoff = "branch" }
S2 = { from = "D2", flow = 400, drop = 10 }
E1 = { to = "X1", flow = 100, drop = 10, size = "200x125", length = 0, takeoff = "branch" }
E2 = { to = "X2", flow = 400, drop = 10 }
"""
)


def test_of_a_gas_flow_divides_on_the_discharge_side_and_joins_on_the_suction_side() -> None:
    budget = budget_of(DUCTS)
    pressure = 0.6 * (0.5 / 0.1) ** 2  # 1.2 kg/m3, 5 m/s
    supply, extract = (budget.terminals[id_].run_out for id_ in ("S1", "E1"))
    assert supply is not None
    assert extract is not None
    # a = 0.25 as before, by area and not by side.
    assert [supply.junction / pressure, extract.junction / pressure] == pytest.approx([1.64, 0.36])
    assert coefficients(budget, "D2", pressure) == pytest.approx([0.4 * 0.04])
    assert coefficients(budget, "X2", pressure) == pytest.approx([0.27])


def test_a_gain_is_kept_and_noted_where_the_index_circuit_counts_it() -> None:
    # a = 0.64, q = 0.2: the straight leg has 2 (2 q - 1) q^2 = -0.048, the branch joins with 0.9 (1 - q) (...) below 0.
    text = TEE.replace("bore = 25", "bore = 40")
    joining = 0.9 * 0.8 * (1.0 + 0.3125**2 - 1.28)
    budget = budget_of(text)
    assert coefficients(budget, "B1")[0] == pytest.approx(-0.048)
    assert coefficients(budget, "B2")[1] == pytest.approx(joining)
    assert joining < 0.0
    # T2 needs most: only its branch is on the index circuit.
    gains = [finding for finding in budget.findings if finding.code == "junction-gain"]
    assert [(finding.path, finding.level) for finding in gains] == [(("section", "B2", "takeoff"), "note")]
    assert gains[0].message.startswith(f"the junction coefficient of its return leg is {joining:.3f}")
    assert gains[0].figures[0][0] == pytest.approx(-joining * COMBINED)
    circuit = budget.terminals["T2"].circuit
    assert circuit == pytest.approx(5000.0 + (1.0 + 0.3 * 0.3125**2 + joining) * COMBINED)
    other = budget_of(text.replace("drop = 1 }", "drop = 9 }"))
    assert [f.path for f in other.findings if f.code == "junction-gain"] == [("section", "B1", "takeoff")]
    assert other.sources["P1"].required == pytest.approx(9000.0 + (-0.048 + 0.27) * COMBINED)


def test_a_branch_larger_than_the_combined_leg_takes_the_nearest_figure() -> None:
    budget = budget_of(TEE.replace("bore = 25", "bore = 65"))
    assert coefficients(budget, "B2")[0] == pytest.approx((1.0 + 0.3 * 0.04) * (1.0 + 0.3 * 0.04))  # as of a = 1
    beyond = [finding for finding in budget.findings if finding.code == "junction-range"]
    assert [(finding.level, finding.path) for finding in beyond] == [("warning", ("section", "B2", "takeoff"))]
    assert "area ratio 1.69" in beyond[0].message


@pytest.mark.parametrize(
    ("old", "new", "lost", "kept"),
    [
        ('takeoff = "branch"', 'takeoff = "bench"', {"B2"}, {"B1"}),
        ('takeoff = "straight"', 'takeoff = "strait"', {"B1"}, {"B2"}),
        ('takeoff = "branch"', 'takeoff = "branch", angle = "flat"', {"B1", "B2"}, set()),
        ('takeoff = "branch"', 'takeoff = "branch", junction = "tee"', {"B1", "B2"}, set()),
        ("bore = 25", 'bore = "slim"', {"B1", "B2"}, set()),
        ('takeoff = "none"\n', 'takeoff = "none"\nangle = 7\n', {"B1", "B2"}, set()),
    ],
)
def test_what_can_t_be_read_takes_the_junctions_that_rest_on_it(
    old: str, new: str, lost: set[str], kept: set[str]
) -> None:
    assert TEE.count(old) == 1
    budget = evaluated_of(TEE.replace(old, new))
    assert {id_ for id_ in ("B1", "B2") if math.isnan(run_of(budget, id_).junction)} == lost
    for id_ in kept:
        assert coefficients(budget, id_) == pytest.approx(coefficients(budget_of(TEE), id_))
    # One finding where it stands, none of what follows from it.
    assert len(places(budget.findings)) == 1
    assert not [finding for finding in budget.findings if finding.code in ("junction", "takeoff")]
