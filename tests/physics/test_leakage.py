"""Leakage by class against figures derived from EN 1507 and EN 16798-3."""

from __future__ import annotations

import pytest

from budget.physics.leakage import LEAKAGE_CLASSES, leakage_flow


@pytest.mark.parametrize(
    ("name", "pressure", "litres"),
    [
        # Former classes A, B, C, D at their test pressures, L/(s m2): derived from f = c p^0.65 (EN 1507, EN 12237).
        ("ATC 5", 400.0, 1.327),
        ("ATC 4", 400.0, 0.442),
        ("ATC 3", 400.0, 0.147),
        ("ATC 2", 400.0, 0.0491),
        ("ATC 3", 1000.0, 0.2675),
    ],
)
def test_a_class_leaks_what_its_standard_allows(name: str, pressure: float, litres: float) -> None:
    found = float(leakage_flow(LEAKAGE_CLASSES[name], pressure, 1.0)) * 1e3
    assert found == pytest.approx(litres, rel=3e-3)  # in printed digits


def test_suction_leaks_as_much_as_pressure() -> None:
    assert float(leakage_flow(0.003, -250.0, 4.0)) == float(leakage_flow(0.003, 250.0, 4.0))
