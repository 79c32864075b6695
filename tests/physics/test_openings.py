"""Entries, exits, screens and rated equipment: limits and monotony."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.physics import openings


def test_sharp_edges_are_where_the_tables_begin() -> None:
    assert float(openings.rounded_entry(0.0)) == openings.FLUSH
    assert float(openings.rounded_entry_crane(0.0)) == openings.FLUSH
    assert float(openings.bevelled_entry(0.0, 60.0)) == openings.FLUSH
    assert float(openings.plain_entry(0.0, 0.0)) == openings.FLUSH
    assert float(openings.bellmouth(0.0)) == float(openings.plain_entry(0.0, 0.5)) == 1.0


@given(st.floats(0.0, 0.3), st.floats(0.0, 0.3))
def test_a_rounder_edge_loses_less(radius: float, more: float) -> None:
    for entry in (openings.rounded_entry, openings.rounded_entry_crane, openings.bellmouth):
        assert float(entry(radius + more)) <= float(entry(radius))


@given(st.floats(0.0, 0.1), st.floats(0.0, 1.0), st.floats(0.0, 0.1))
def test_a_plain_end_loses_more_thin_and_far_out(thickness: float, length: float, more: float) -> None:
    assert 0.5 <= float(openings.plain_entry(thickness, length)) <= 1.0
    assert float(openings.plain_entry(thickness + more, length)) <= float(openings.plain_entry(thickness, length))
    assert float(openings.plain_entry(thickness, length)) <= float(openings.plain_entry(thickness, length + more))


@given(st.floats(0.0, 0.7), st.floats(0.0, 180.0))
def test_a_bevel_never_harms(length: float, angle: float) -> None:
    assert 0.1 < float(openings.bevelled_entry(length, angle)) <= openings.FLUSH + 1e-12


@given(st.floats(0.05, 1.0), st.floats(0.0, 1.0))
def test_a_more_open_screen_loses_less_and_an_open_one_nothing(free: float, share: float) -> None:
    more = free + share * (1.0 - free)
    for loss in (openings.wire_screen, openings.perforated_plate):
        assert 0.0 <= float(loss(more)) <= float(loss(free))
        assert float(loss(1.0)) == 0.0


def test_hoods_and_exits() -> None:
    np.testing.assert_allclose(openings.hood([60.0, 60.0], [False, True]), [0.09, 0.16])
    assert float(openings.conical_exit(0.5, 90.0)) == openings.OUTLET
    assert float(openings.inclined_entry(90.0)) == pytest.approx(0.57)


@given(st.floats(1.0, 500.0), st.floats(0.5, 10.0), st.floats(0.3, 3.0), st.floats(0.8, 1.3))
def test_a_rated_coefficient_gives_the_rated_drop_back(drop: float, face: float, ratio: float, density: float) -> None:
    """At the rated face velocity the duct runs at face velocity x face area/duct area."""
    k = float(openings.rated_coefficient(drop, face, ratio, density))
    assert k * 0.5 * density * (face * ratio) ** 2 == pytest.approx(drop)
