"""Bends, mitres and reduced-bore valves by Crane's n fT."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics import valves

FT = st.floats(0.012, 0.03)


@given(FT, st.floats(1.0, 20.0), st.floats(45.0, 3600.0), st.floats(0.0, 1.0))
def test_a_bend_loses_more_the_more_it_turns(ft: float, radius: float, angle: float, share: float) -> None:
    less = 45.0 + share * (angle - 45.0)
    assert 0.0 < float(valves.bend(ft, radius, less)) <= float(valves.bend(ft, radius, angle)) * (1.0 + 1e-12)


def test_a_right_angle_is_n_ft() -> None:
    np.testing.assert_allclose(valves.bend(0.02, [1.0, 1.5, 2.5, 20.0]), np.array([20, 14, 12, 50]) * 0.02)
    np.testing.assert_allclose(valves.mitre(0.02, [0.0, 52.5, 90.0]), np.array([2, 20, 60]) * 0.02)


@given(FT, st.floats(0.4, 1.0), st.floats(0.0, 1.0), st.floats(0.0, 180.0))
def test_a_narrower_bore_loses_more(ft: float, bore: float, share: float, angle: float) -> None:
    wider = bore + share * (1.0 - bore)
    for loss in (valves.tapered_bore, valves.abrupt_bore):
        assert float(loss(8.0 * ft, wider, angle)) <= float(loss(8.0 * ft, bore, angle)) * (1.0 + 1e-12)
        assert float(loss(8.0 * ft, 1.0, angle)) == pytest.approx(8.0 * ft)
