"""Tees and wyes: continuity over the steps, arrays, ranges, families."""

import time

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.junctions import BAND, FAMILIES, in_range, junction_coefficients, power_loss

AREA_STEPS = (0.35, 0.40, 4.0 / 9.0, 2.0 / 3.0)
FLOW_STEPS = (0.40, 0.50, 0.60)


def near(steps: tuple[float, ...], low: float) -> st.SearchStrategy[float]:
    """Any ratio, with stress on the steps and on both ends of their bands."""
    edges = [step + side * BAND for step in steps for side in (-1.0, 0.0, 1.0)]
    return st.floats(low, 1.0) | st.sampled_from(edges)


@given(
    st.sampled_from(FAMILIES),
    st.booleans(),
    near(FLOW_STEPS, 0.0),
    near(AREA_STEPS, 0.1),
    st.floats(30.0, 90.0),
    st.sampled_from([(1, 0), (0, 1), (1, 1), (1, -1)]),
)
def test_coefficients_are_continuous_in_flow_and_area(
    family: str, converging: bool, q: float, a: float, angle: float, way: tuple[int, int]
) -> None:
    step = 1e-8
    q_pair, a_pair = (x + np.array([-step, step]) * w for x, w in zip((q, a), way, strict=True))
    for k in junction_coefficients(family, converging, q_pair, a_pair, angle):
        assert abs(k[1] - k[0]) < 1e-3


@given(st.sampled_from(FAMILIES), st.booleans(), st.floats(0.1, 1.0), st.floats(30.0, 90.0))
def test_idelchik_branch_is_continuous_where_its_velocity_passes_0_8(
    family: str, converging: bool, a: float, angle: float
) -> None:
    q = 0.8 * a + np.array([-1e-9, 1e-9])
    branch, _ = junction_coefficients(family, converging, q, a, angle)
    assert abs(branch[1] - branch[0]) < 1e-6


@given(st.sampled_from(FAMILIES), st.booleans(), st.floats(0.0, 1.0), st.floats(0.02, 1.0), st.floats(30.0, 90.0))
def test_no_junction_makes_power(family: str, converging: bool, q: float, a: float, angle: float) -> None:
    branch, straight = junction_coefficients(family, converging, q, a, angle)
    assert float(power_loss(branch, straight, q)) >= -1e-12


@given(st.lists(st.tuples(st.integers(0, 1), st.booleans(), st.floats(0, 1), st.floats(0.05, 1), st.floats(30, 90))))
def test_an_array_holds_what_each_junction_has_alone(legs: list[tuple[int, bool, float, float, float]]) -> None:
    family, converging, q, a, angle = (np.array([leg[i] for leg in legs]) for i in range(5))
    branch, straight = junction_coefficients(family.astype(int), converging.astype(bool), q, a, angle)
    assert branch.shape == straight.shape == (len(legs),)
    for i, (place, joins, *ratios) in enumerate(legs):
        alone = junction_coefficients(FAMILIES[place], joins, *ratios)
        np.testing.assert_allclose((branch[i], straight[i]), alone, rtol=1e-12)


def test_arguments_broadcast() -> None:
    branch, straight = junction_coefficients("tee-crane", [[True], [False]], [0.1, 0.5, 0.9], 0.5, 90.0)
    assert branch.shape == straight.shape == (2, 3)


def test_converging_tee_by_hand() -> None:
    """At a quarter of the flow from an equal 90 degree branch: 0.9 x 0.75 x (1 + 1/16 - 2 x 9/16) and 1.55/4 - 1/16."""
    branch, straight = junction_coefficients("tee-crane", True, 0.25, 1.0, 90.0)
    assert float(branch) == pytest.approx(0.675 * (1.0 + 1 / 16 - 9 / 8))
    assert float(straight) == pytest.approx(0.3875 - 0.0625)


def test_half_way_through_a_step_is_the_mean_of_both_sides() -> None:
    low, step, high = junction_coefficients("tee-crane", True, 0.5, [0.35 - 2e-2, 0.35, 0.35 + 2e-2], 90.0)[0]
    bracket = 1.0 + (0.5 / np.array([0.33, 0.35, 0.37])) ** 2 - 0.5
    assert low == pytest.approx(bracket[0])
    assert step == pytest.approx(bracket[1] * (1.0 + 0.55) / 2.0)
    assert high == pytest.approx(bracket[2] * 0.55)


def test_ratios_out_of_range_are_taken_at_the_end_and_flagged() -> None:
    for family in FAMILIES:
        for converging in (True, False):
            inside = junction_coefficients(family, converging, 1.0, 1.0, 90.0)
            assert junction_coefficients(family, converging, 1.2, 1.4, 90.0) == inside
            assert in_range(family, converging, [0.0, 1.0, 1.2, 0.5], [1.0, 0.1, 1.0, 1.4], 60.0).tolist() == [
                True, True, False, False,
            ]  # fmt: skip
            assert in_range(family, converging, 0.5, 0.5, [29.0, 30.0, 90.0, 91.0]).tolist() == [
                False, True, True, False,
            ]  # fmt: skip
    assert not in_range("tee-crane", True, 0.5, 0.0, 90.0)
    assert np.all(np.isfinite(junction_coefficients("tee-crane", True, 0.5, 0.0, 90.0)))


def test_a_ratio_that_is_not_known_gives_no_figure() -> None:
    branch, straight = junction_coefficients(0, [True, False], np.nan, 0.5, 90.0)
    assert np.isnan(branch).all()
    assert np.isnan(straight).all()
    assert not in_range(0, True, np.nan, 0.5, 90.0)


@pytest.mark.parametrize("family", ["tee", 2, -1, 0.5, [0, 3]])
def test_a_family_that_is_not_known_is_refused(family: str | float | list[int]) -> None:
    with pytest.raises(ValueError, match="famil"):
        junction_coefficients(family, True, 0.5, 0.5, 90.0)


def test_ten_thousand_junctions_take_about_a_millisecond() -> None:
    """The bound is ten times what it takes, for busy machines; the best of several counts."""
    rng = np.random.default_rng(3)
    n = 10_000
    legs = (rng.integers(0, 2, n), rng.random(n) < 0.5, rng.random(n), rng.random(n), rng.uniform(30.0, 90.0, n))
    best = float("inf")
    for _ in range(20):
        begun = time.perf_counter()
        junction_coefficients(*legs)
        best = min(best, time.perf_counter() - begun)
    assert best < 0.01
