"""Where a pump or fan works: its curve and the system's meet there, and the drawing shows it."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from budget.document import Document
from budget.network.flows import solve_flows
from budget.report.operating import Operating, draw_operating, limits, operating

FOLDER = Path(__file__).parents[1] / "screens"
WATER = (FOLDER / "cottage.toml").read_text()
PUMP = 'curve = [["0 L/s", "34 kPa"], ["0.1 L/s", "30 kPa"], ["0.2 L/s", "18 kPa"]]'
CURVED = WATER.replace("efficiency = 0.35", f"efficiency = 0.35\n{PUMP}")
HELD = CURVED.replace(PUMP, f'{PUMP}\ncontrols = "differential"\nset_point = "15 kPa"')


def found(text: str) -> Operating:
    """The operating point of the one source of a run."""
    run = Document.of(text).snapshot.budget.run
    one = operating(run, solve_flows(run), next(iter(run.layout.description.sources)))
    assert one is not None
    return one


@pytest.mark.parametrize("text", [WATER, CURVED, HELD, (FOLDER / "loft.toml").read_text()])
def test_both_curves_pass_through_the_operating_point(text: str) -> None:
    one = found(text)
    for curve in (one.pump, one.system):
        flows, pressures = np.array(curve).T
        assert (np.diff(flows) > 0.0).all()
        assert np.interp(one.flow, flows, pressures) == pytest.approx(one.pressure, rel=2e-3)


def test_the_curve_of_a_closed_system_is_nearly_a_parabola() -> None:
    one = found(WATER)
    exponents = np.diff(np.log([p for _, p in one.system])) / np.diff(np.log([f for f, _ in one.system]))
    # Between laminar and fully rough flow (1 to 2), and with losses at the square of the flow.
    assert ((exponents > 1.4) & (exponents < 2.01)).all()


def test_a_pump_that_controls_is_drawn_at_the_speed_it_runs_at() -> None:
    run = Document.of(HELD).snapshot.budget.run
    speed = solve_flows(run).sources["P1"].speed
    assert speed is not None
    assert speed < 1.0
    assert found(HELD).pump[0][1] == pytest.approx(34e3 * speed**2, rel=1e-6)


def test_the_drawing_has_the_point_where_it_belongs() -> None:
    one = found(CURVED)
    lines = draw_operating(one, 60, 20, ("35.0", "kPa", "0", "0.2 L/s"))
    assert len(lines) == 20
    assert max(map(len, lines)) <= 60
    place = next((row, line.index("o")) for row, line in enumerate(lines[:18]) if "o" in line[5:])
    most, highest = limits(one)
    assert place[0] == pytest.approx((1.0 - one.pressure / highest) * 17, abs=0.51)
    assert place[1] - 5 == pytest.approx(one.flow / most * 54, abs=0.51)
    assert draw_operating(one, 12, 4, ("35.0", "kPa", "0", "1")) == []
