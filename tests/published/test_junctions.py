"""Junctions against printed worked answers, the printed formulas and a general-purpose library."""

import numpy as np
import pytest
from fluids import fittings as library

from budget.physics.junctions import BAND, FAMILIES, junction_coefficients, power_loss
from tests.published.figures import examples, table

AREA_STEPS = (0.35, 0.40, 4.0 / 9.0, 2.0 / 3.0)
FLOW_STEPS = (0.40, 0.50, 0.60)


@pytest.mark.parametrize("name", ["crane-7-35", "crane-7-36"])
def test_worked_answers_of_crane(name: str) -> None:
    """Crane TP-410 (2009), examples 7-35 (converging tee) and 7-36 (diverging wye), equal legs (read)."""
    example = examples()[name]
    given, expected = example["inputs"], example["expected"]
    q = given["Q_branch_m3_s"] / (given["Q_branch_m3_s"] + given["Q_run_m3_s"])
    found = junction_coefficients("tee-crane", name == "crane-7-35", q, 1.0, given["angle_deg"])
    tolerance = example["tolerance_pct"] / 100.0
    np.testing.assert_allclose(found, (expected["K_branch"], expected["K_run"]), rtol=tolerance)


def test_check_values_of_both_families() -> None:
    """Sixty values of the printed formulas (read, in part off a library); at both ends worked out a little inside."""
    rows = table("junctions")
    assert len(rows) == 60
    for row in rows:
        a, angle, q = (float(row[key]) for key in ("area_ratio", "angle_deg", "flow_ratio"))
        q = {0.0: 1e-4, 1.0: 1.0 - 1e-4}.get(q, q)
        branch, straight = junction_coefficients(row["family"], row["converging"] == "1", q, a, angle)
        assert float(branch) == pytest.approx(float(row["k_branch"]), rel=2e-3, abs=6e-4), row
        assert float(straight) == pytest.approx(float(row["k_straight"]), rel=2e-3, abs=6e-4), row


def _clear(value: float, steps: tuple[float, ...]) -> bool:
    return all(abs(value - step) > BAND for step in steps)


@pytest.mark.parametrize("angle", [30.0, 37.0, 45.0, 55.0, 60.0, 70.0, 75.0, 82.0, 90.0])
def test_away_from_the_steps_tee_crane_is_the_library(angle: float) -> None:
    """Crane TP-410 by the fluids library (library): the same but for +-0.02 around each step, which is blended."""
    for a in (0.1, 0.2, 0.3, 0.375, 0.422, 0.5, 0.6, 0.7, 0.85, 1.0):
        for q in (0.0, 0.05, 0.2, 0.35, 0.45, 0.55, 0.65, 0.8, 1.0):
            if not (_clear(a, AREA_STEPS) and _clear(q, FLOW_STEPS)):
                continue
            legs = {"D_run": 0.1, "D_branch": 0.1 * a**0.5, "Q_run": 1.0 - q, "Q_branch": q, "angle": angle}
            for converging, names in (
                (True, ("K_branch_converging_Crane", "K_run_converging_Crane")),
                (False, ("K_branch_diverging_Crane", "K_run_diverging_Crane")),
            ):
                expected = [getattr(library, name)(**legs) for name in names]
                found = junction_coefficients("tee-crane", converging, q, a, angle)
                np.testing.assert_allclose(found, expected, rtol=1e-10, atol=1e-12)


@pytest.mark.parametrize("family", FAMILIES)
@pytest.mark.parametrize("converging", [True, False])
def test_no_junction_makes_power(family: str, converging: bool) -> None:
    """Energy: what the two streams lose together is never negative, whatever one of them gains from the other."""
    q, a, angle = np.meshgrid(
        np.linspace(0.0, 1.0, 501),
        np.linspace(0.02, 1.0, 99),
        [30, 37, 45, 52, 59, 60, 67, 74, 75, 82, 90],
        indexing="ij",
    )
    branch, straight = junction_coefficients(family, converging, q, a, angle)
    assert np.all(power_loss(branch, straight, q) >= -1e-12)
    assert branch.min() < 0.0 or straight.min() < 0.0, "negative coefficients are kept"


@pytest.mark.parametrize(
    ("angle", "branch", "straight"), [(90.0, (-0.92, 1.20), (0.03, 0.62)), (45.0, (-0.92, 0.3515), (0.03, -0.5253))]
)
def test_ends_agree_with_the_measurements_of_gardel(
    angle: float, branch: tuple[float, float], straight: tuple[float, float]
) -> None:
    """Gardel (1957), equal legs converging, no flow and all flow from the branch (from memory): within 0.15."""
    for family in FAMILIES:
        found = junction_coefficients(family, True, [0.0, 1.0], 1.0, angle)
        np.testing.assert_allclose(found, (branch, straight), atol=0.15)
