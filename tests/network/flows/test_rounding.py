"""Settings as a hand dials them: steps of scales, and what flows then."""

from __future__ import annotations

from pathlib import Path

import pytest

from budget.description import Device
from budget.document import Document
from budget.network.flows import solve_flows
from budget.network.flows.cases import rounded, step_of

EXAMPLE = Path(__file__).parents[3] / "examples" / "three-floor-heating.toml"


@pytest.mark.parametrize(
    ("settings", "step"),
    [
        ((0.5, 1, 2, 4), 0.1),
        ((1, 2, 3, 4), 0.2),
        ((0, 30, 60), 5.0),
        ((0, 10, 20), 2.0),
        ((0, 0.25, 1), 0.05),
        ((3,), 0.0),
    ],
)
def test_the_step_of_a_scale(settings: tuple[float, ...], step: float) -> None:
    device = Device("V", kv=tuple((setting, 1.0 + setting) for setting in settings))
    assert step_of(device) == pytest.approx(step, rel=1e-12)


def test_a_setting_is_rounded_within_its_table() -> None:
    halves = Device("V", kv=((0.5, 1.0), (1.0, 2.0), (4.0, 4.0)))
    assert rounded(halves, 1.234) == pytest.approx(1.2)
    assert rounded(halves, 1.26) == pytest.approx(1.3)
    odd = Device("V", k=((3.0, 1.0), (33.0, 9.0)))
    assert rounded(odd, 33.0) == 33.0
    assert rounded(odd, 3.1) == 5.0
    assert rounded(Device("V", kv=((3.0, 1.0),)), 3.0) == 3.0


def test_rounded_settings_leave_small_deviations_and_report_every_one() -> None:
    run = Document.open(EXAMPLE).snapshot.budget.run
    exact, dialled = solve_flows(run, devices="set"), solve_flows(run, devices="rounded")
    assert dialled.settled
    assert set(dialled.terminals) == set(exact.terminals) == set(run.layout.terminals.ids)
    off = [abs(one.share - 1.0) for one in dialled.terminals.values()]
    assert max(abs(one.share - 1.0) for one in exact.terminals.values()) < 1e-3
    assert 5e-3 < max(off) < 0.1
    assert all(one.within for one in dialled.terminals.values())
