"""Powers, fan pressures, classes and affinity; air terminals; the blend of two laws."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.power import (
    affinity,
    electrical_power,
    fan_laws,
    fan_static_pressure,
    hydraulic_power,
    sfp_class,
    shaft_power,
    specific_fan_power,
    velocity_pressure,
)
from budget.physics.smooth import smooth_step
from budget.physics.terminals import extract_total, supply_total


def test_powers_in_a_row() -> None:
    hydraulic = hydraulic_power(2e-3, 50e3)
    shaft = shaft_power(hydraulic, 0.5)
    assert (float(hydraulic), float(shaft), float(electrical_power(shaft, 0.8))) == pytest.approx((100, 200, 250))


def test_shaft_power_in_trade_units() -> None:
    """P[kW] = Q[m3/h] H[m] s/(366.6 eta), Hydraulic Institute (read); 366.6 is rounded."""
    q, h, eta = 100.0, 20.0, 0.7
    ours = shaft_power(hydraulic_power(q / 3600, 1000 * 9.80665 * h), eta)
    assert float(ours) / 1000 == pytest.approx(q * h / (366.6 * eta), rel=2e-3)


def test_specific_fan_power_and_class() -> None:
    """1000 Pa at an overall efficiency of 0.6 is 1667 W/(m3/s), class SFP 4 (EN 16798-3, read)."""
    sfp = float(specific_fan_power(electrical_power(shaft_power(hydraulic_power(2.0, 1000.0), 0.75), 0.8), 2.0))
    assert sfp == pytest.approx(1667, abs=0.5)
    assert sfp_class(sfp) == "SFP 4"


@pytest.mark.parametrize(
    ("sfp", "name"),
    [(0, "SFP 0"), (300, "SFP 0"), (300.1, "SFP 1"), (750, "SFP 2"), (1250, "SFP 3"), (2000, "SFP 4"),
     (3000, "SFP 5"), (4500, "SFP 6"), (4500.1, "SFP 7")],
)  # fmt: skip
def test_classes_end_where_the_standard_says(sfp: float, name: str) -> None:
    assert sfp_class(sfp) == name


def test_fan_static_pressure() -> None:
    assert float(fan_static_pressure(500.0, velocity_pressure(1.2, 10.0))) == pytest.approx(440.0)


def test_affinity_of_a_pump_from_1740_to_1566_rpm() -> None:
    """Hydraulic Institute, Engineering Data Book (read): printed to the nearest gpm and foot."""
    flow, head, _ = affinity([200, 400, 0], [213, 206, 198], 1.0, 1566 / 1740)
    np.testing.assert_allclose(flow, [180, 360, 0])
    np.testing.assert_allclose(head, [173, 167, 160], atol=0.6)


def test_trim_of_an_impeller() -> None:
    """10.625 in for 80 ft; 67 ft needs 9.72 in (Hydraulic Institute, read)."""
    assert float(affinity(1.0, 80.0, 1.0, 9.72 / 10.625)[1]) == pytest.approx(67.0, abs=0.1)


@given(st.floats(0.2, 2.0), st.floats(0.5, 1.5))
def test_fan_laws_agree_with_affinity_and_power_stays_flow_times_pressure(speed: float, density: float) -> None:
    q, p, w = fan_laws(2.0, 300.0, 600.0, speed=speed)
    assert (float(q), float(p), float(w)) == pytest.approx(tuple(float(x) for x in affinity(2.0, 300.0, 600.0, speed)))
    q, p, w = fan_laws(2.0, 300.0, 600.0, speed=speed, diameter=1.3, density=density)
    assert float(q * p) == pytest.approx(float(w))


def test_air_terminals() -> None:
    neck = float(velocity_pressure(1.2, 3.0))
    assert neck == pytest.approx(5.4)
    assert float(supply_total(28.0, neck)) == pytest.approx(33.4)
    assert float(extract_total(-28.0, neck)) == float(extract_total(28.0, neck)) == pytest.approx(22.6)
    assert float(extract_total(3.0, neck)) < 0


def test_smooth_step_meets_its_ends_with_no_slope() -> None:
    x = np.array([-1.0, 0.0, 1e-6, 0.5, 1 - 1e-6, 1.0, 2.0])
    w = smooth_step(x * 2 + 3, 3.0, 5.0)
    np.testing.assert_allclose(w, [0, 0, 3e-12, 0.5, 1 - 3e-12, 1, 1], rtol=1e-5)
    assert np.all(np.diff(smooth_step(np.linspace(0, 1, 200), 0.0, 1.0)) > 0)
