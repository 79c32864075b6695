"""Reading between the rows of a table."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics.tables import across, across_log, along, along_log

XS, YS = [0.0, 1.0, 3.0], [1.0, 2.0]
TABLE = [[1.0, 2.0], [3.0, 5.0], [4.0, 10.0]]


def test_the_nodes_are_the_table() -> None:
    np.testing.assert_allclose(across(np.array(XS)[:, None], YS, XS, YS, TABLE), TABLE)
    np.testing.assert_allclose(across_log(np.array(XS)[:, None], YS, XS, YS, TABLE), TABLE)
    np.testing.assert_allclose(along(XS, XS, [1.0, 3.0, 4.0]), [1.0, 3.0, 4.0])


def test_between_the_nodes_by_hand() -> None:
    assert float(across(2.0, 1.5, XS, YS, TABLE)) == pytest.approx((3.0 + 5.0 + 4.0 + 10.0) / 4.0)
    assert float(across_log(2.0, 1.0, XS, YS, TABLE)) == pytest.approx(np.sqrt(12.0))
    assert float(along_log(0.5, [0.0, 1.0], [1.0, 100.0])) == pytest.approx(10.0)


@given(st.floats(-10, 10), st.floats(-10, 10))
def test_beyond_the_edges_the_edge_is_held(x: float, y: float) -> None:
    held = across(np.clip(x, 0.0, 3.0), np.clip(y, 1.0, 2.0), XS, YS, TABLE)
    assert float(across(x, y, XS, YS, TABLE)) == pytest.approx(float(held))
    assert 1.0 <= float(across(x, y, XS, YS, TABLE)) <= 10.0


def test_what_is_not_known_stays_unknown() -> None:
    assert np.isnan(across(np.nan, 1.5, XS, YS, TABLE))
