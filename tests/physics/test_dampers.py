"""Dampers and part-open valves: shutting always costs more; opposed blades more than parallel ones."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics import dampers

SHARE = st.floats(0.0, 1.0)


@given(st.floats(0.0, 60.0), SHARE)
def test_shutting_a_blade_never_loses_less(angle: float, share: float) -> None:
    for loss in (dampers.round_blade, dampers.cock, dampers.butterfly, dampers.round_blade_closed_form):
        assert float(loss(angle * share)) <= float(loss(angle)) * (1.0 + 1e-12)
    for aspect in (0.1, 0.5, 2.0):
        less, more = dampers.rectangular_blade([angle * share, angle], aspect)
        assert less <= more * (1.0 + 1e-12)


@given(st.floats(0.0, 80.0), SHARE, st.floats(0.3, 1.5))
def test_multi_blade_dampers(angle: float, share: float, ratio: float) -> None:
    opposed, parallel = dampers.opposed_blades(angle, ratio), dampers.parallel_blades(angle, ratio)
    assert float(opposed) >= float(parallel) * (1.0 - 1e-12)
    assert float(dampers.opposed_blades(angle * share, ratio)) <= float(opposed) * (1.0 + 1e-12)
    assert float(dampers.parallel_blades(angle * share, ratio)) <= float(parallel) * (1.0 + 1e-12)


@given(st.floats(0.125, 0.875), SHARE)
def test_opening_a_gate_loses_less(opening: float, share: float) -> None:
    more = opening + share * (0.875 - opening)
    assert float(dampers.gate(more)) <= float(dampers.gate(opening)) * (1.0 + 1e-12)


def test_between_the_angles_the_logarithm_is_interpolated() -> None:
    assert float(dampers.round_blade(45.0)) == pytest.approx(np.sqrt(11.2 * 32.0))


def test_blade_ratio_by_hand() -> None:
    """Four blades across 600 mm in a duct 600x400: 2400 mm over 2000 mm."""
    assert float(dampers.blade_ratio(4, 0.6, 0.4)) == pytest.approx(1.2)


def test_aspect_classes_of_a_single_blade() -> None:
    np.testing.assert_allclose(dampers.rectangular_blade(0.0, [0.2, 0.25, 1.0, 1.1]), [0.04, 0.08, 0.08, 0.13])
