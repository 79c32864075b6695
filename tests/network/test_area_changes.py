"""Changes of area between a section and its neighbour toward the source."""

from __future__ import annotations

import math

import pytest

from budget.network import Budget
from budget.physics.area_changes import contraction, enlargement
from tests.network.small import GAS, LIQUID, budget_of, errors_of, evaluated_of, findings_of

STEP = (
    LIQUID
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 0 }
B1 = { from = "M1", bore = 40, length = 0, transition = "abrupt" }
[terminal]
T1 = { from = "B1", flow = 1, drop = 5 }
"""
)
SMALLER = 500.0 * (0.001 / (math.pi / 4 * 0.04**2)) ** 2
"""Velocity pressure of 1 L/s in 40 mm, Pa."""
RATIO = (40 / 50) ** 2


def drops(budget: Budget, id_: str) -> list[float]:
    """Change of area of each leg, by what is reported of it."""
    found = budget.sections[id_].run
    legs = [math.fsum(joint.drop for joint in leg.joints if joint.name == "change of area") for leg in found.legs]
    assert found.transition == pytest.approx(math.fsum(legs))
    return legs


def test_the_return_leg_of_a_paired_section_has_the_reverse_change() -> None:
    budget = budget_of(STEP)
    contracting, widening = 0.5 * (1.0 - RATIO) ** 0.75, (1.0 - RATIO) ** 2  # Idelchik 4-9, Borda-Carnot
    assert drops(budget, "B1") == pytest.approx([contracting * SMALLER, widening * SMALLER])
    # Stated where the pipe grows, the other way round; always on the velocity in the smaller area.
    grown = budget_of(STEP.replace("bore = 50", "bore = 32"))
    smaller, ratio = SMALLER * (40 / 32) ** 4, (32 / 40) ** 2
    assert drops(grown, "B1") == pytest.approx([(1.0 - ratio) ** 2 * smaller, 0.5 * (1.0 - ratio) ** 0.75 * smaller])


def test_a_change_is_a_part_of_the_drop_and_of_the_circuit() -> None:
    budget, without = budget_of(STEP), budget_of(STEP.replace(', transition = "abrupt"', ""))
    change = math.fsum(drops(budget, "B1"))
    assert budget.sections["B1"].run.drop == pytest.approx(change)
    assert without.sections["B1"].run.transition == 0.0
    assert budget.terminals["T1"].circuit - without.terminals["T1"].circuit == pytest.approx(change)


def test_a_change_is_reported_with_the_velocity_it_is_on_and_its_source() -> None:
    (joint,) = budget_of(STEP).sections["B1"].run.legs[0].joints
    assert joint.reference == "velocity in the smaller area"
    assert joint.reference_velocity == pytest.approx(0.001 / (math.pi / 4 * 0.04**2))
    assert joint.drop == pytest.approx(joint.k * SMALLER)
    assert "Idelchik" in joint.source


@pytest.mark.parametrize("angle", [8, 30, 60, 180])
def test_a_gradual_change_is_taken_by_its_included_angle(angle: int) -> None:
    for stated in (f"{angle}", f'"{angle} deg"'):
        budget = budget_of(STEP.replace('"abrupt"', stated))
        expected = [float(contraction(RATIO, angle)) * SMALLER, float(enlargement(RATIO, angle)) * SMALLER]
        assert drops(budget, "B1") == pytest.approx(expected)
    assert math.fsum(drops(budget, "B1")) <= math.fsum(drops(budget_of(STEP), "B1")) + 1e-9


def test_equal_areas_lose_nothing() -> None:
    budget = budget_of(STEP.replace("bore = 50", "bore = 40"))
    assert budget.sections["B1"].run.transition == 0.0
    assert budget.sections["B1"].run.legs[0].joints == ()


def test_sections_that_lead_back_have_the_change_at_their_downstream_end() -> None:
    text = STEP.replace('from = "P1", bore = 50', 'from = "P1", paired = false, bore = 50').replace(
        '[terminal]\nT1 = { from = "B1"',
        'R1 = { to = "R2", bore = 40, length = 0, transition = 30 }\n'
        'R2 = { to = "P1", bore = 50, length = 0 }\n[terminal]\nT1 = { from = "B1", to = "R1"',
    )
    text = text.replace('bore = 40, length = 0, transition = "abrupt"', "bore = 40, length = 0, paired = false")
    assert drops(budget_of(text), "R1") == pytest.approx([float(enlargement(RATIO, 30)) * SMALLER])


def test_a_run_out_states_its_own_change() -> None:
    text = STEP.replace('T1 = { from = "B1",', 'T1 = { from = "B1", bore = 20, length = 0, transition = "abrupt",')
    run_out = budget_of(text).terminals["T1"].run_out
    assert run_out is not None
    ratio, smaller = (20 / 40) ** 2, SMALLER * 16
    assert run_out.transition == pytest.approx((0.5 * (1.0 - ratio) ** 0.75 + (1.0 - ratio) ** 2) * smaller)


def test_ducts_change_by_area_whatever_their_shape() -> None:
    text = GAS + (
        "[source]\nF1 = {}\n[section]\n"
        'D1 = { from = "F1", size = "400x250", length = 0 }\n'
        'D2 = { from = "D1", size = "200x250", length = 0, transition = "abrupt" }\n'
        '[terminal]\nS = { from = "D2", flow = 500, drop = 10 }\n'
    )
    assert drops(budget_of(text), "D2") == pytest.approx([0.5 * 0.5**0.75 * 0.6 * (0.5 / 0.05) ** 2])


def test_a_change_follows_the_straight_leg_of_a_junction() -> None:
    text = STEP.replace('transition = "abrupt"', 'transition = "abrupt", takeoff = "straight"').replace(
        "[terminal]",
        'B2 = { from = "M1", bore = 25, length = 0, takeoff = "branch" }\n'
        '[terminal]\nT2 = { from = "B2", flow = 0.25, drop = 5 }',
    )
    run = budget_of(text).sections["B1"].run
    names = [[joint.name for joint in leg.joints] for leg in run.legs]
    assert names == [
        ["straight of a diverging junction, 90 deg", "change of area"],
        ["straight of a converging junction, 90 deg", "change of area"],
    ]
    assert run.drop == pytest.approx(run.junction + run.transition)
    # The change has the flow of the section alone, the junction that of both.
    assert run.transition == pytest.approx(math.fsum(drops(budget_of(STEP), "B1")))


def test_at_a_source_there_is_nothing_to_change_from() -> None:
    assert errors_of(STEP.replace('from = "P1", bore', 'from = "P1", transition = 30, bore')) == [
        ("takeoff", "section.M1.transition")
    ]
    assert errors_of(STEP.replace("flow = 1", 'transition = "abrupt", flow = 1')) == [
        ("missing", "terminal.T1.transition")
    ]


@pytest.mark.parametrize("old", ['transition = "abrupt"', "bore = 40", "bore = 50"])
def test_what_can_t_be_read_takes_the_changes_that_rest_on_it(old: str) -> None:
    budget = evaluated_of(STEP.replace(old, f'{old.partition(" ")[0]} = "sharp"'))
    assert math.isnan(budget.sections["B1"].run.transition)
    assert math.isnan(budget.sections["B1"].run.drop)
    assert math.isnan(budget.terminals["T1"].circuit)


def noted(text: str) -> list[str]:
    found = findings_of(text)
    assert all(f.level == "note" for f in found if f.code == "area-change")
    return [".".join(map(str, f.path)) for f in found if f.code == "area-change"]


PLAIN = STEP.replace(', transition = "abrupt"', "")
BRANCHING = PLAIN.replace(
    "[terminal]",
    'B2 = { from = "M1", bore = 25, length = 0, takeoff = "branch" }\n'
    '[terminal]\nT2 = { from = "B2", flow = 0.25, drop = 5 }',
)


def test_a_step_that_nothing_counts_is_noted_once() -> None:
    assert noted(PLAIN) == ["section.B1.transition"]
    assert noted(BRANCHING.replace("B1 = {", 'B1 = { takeoff = "straight",')) == ["section.B1.transition"]


@pytest.mark.parametrize(
    "text",
    [
        STEP,
        PLAIN.replace("bore = 50", "bore = 41"),  # the same size in another line
        PLAIN.replace("B1 = {", 'B1 = { fitting = [{ kind = "reducer", bore_ratio = 0.8 }],'),
        PLAIN.replace("bore = 50", "bore = 32").replace(
            "M1 = {", 'M1 = { fitting = [{ kind = "enlarger", bore_ratio = 0.8 }],'
        ),
        BRANCHING,  # "none" by default: the designer wants nothing counted there
        BRANCHING.replace("B1 = {", 'B1 = { takeoff = "none",'),
        BRANCHING.replace('takeoff = "none"', "angle = 90"),  # it has a warning already
        BRANCHING.replace("B1 = {", 'B1 = { fittings = { "tee straight" = 1 },'),
    ],
)
def test_where_nothing_is_doubtful_nothing_is_noted(text: str) -> None:
    assert noted(text) == []


def test_a_trunk_by_default_is_not_noted_where_it_makes_no_junction() -> None:
    three = BRANCHING.replace('takeoff = "none"', 'takeoff = "straight"').replace(', takeoff = "branch"', "")
    assert noted(three) == []  # both go straight on by default: what is lacking is the junction
    assert noted(three.replace("B2 = {", 'B2 = { takeoff = "branch",')) == ["section.B1.transition"]
