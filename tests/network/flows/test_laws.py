"""Every law of the flows as installed: its slope is that of a difference, and it is the budget's at design flow."""

import dataclasses

import numpy as np
import pytest

from budget.network.flows import set_up
from budget.network.flows.edges import design_flows, find_edges
from budget.network.flows.graph import Law
from budget.network.flows.installed import install
from budget.network.flows.laws import BEYOND, HOLDING, OPEN, Friction, HeldFlow, JunctionLaw, Power, Quadratic
from budget.network.flows.sources import Curve
from budget.physics.arrays import Array
from tests.network.flows.balanced import balanced


def evaluate(law: Law, flow: Array) -> tuple[Array, Array]:
    drop, slope = np.zeros(len(flow)), np.zeros(len(flow))
    law.add(flow, drop, slope)
    return drop, slope


ALL = np.arange(6)
FLOW = np.array([-2.0, -1e-4, 1e-5, 0.02, 0.7, 3.0])
LAWS = {
    "quadratic": Quadratic(np.linspace(1.0, 6.0, 6)),
    "power": Power(ALL, np.full(6, 100.0), np.full(6, 0.5), np.array([2.0, 1.0, 0.0, 0.5, 1.75, 3.0])),
    "friction": Friction(
        ALL,
        np.array([1.0, 1.0, 1.0, 0.5, 1.0, 2.0]),
        *(np.full(6, value) for value in (1000.0, 1e-3, 5e-4, 0.025, 5e-5, 64.0, 10.0, 800.0, 1.2)),
    ),
    "holding": HeldFlow(
        ALL,
        np.full(6, 0.5),
        np.full(6, 10.0),
        np.full(6, 1e4),
        np.full(6, 1e6),
        np.array([OPEN, OPEN, HOLDING, HOLDING, BEYOND, BEYOND]),
    ),
}


@pytest.mark.parametrize("law", LAWS.values(), ids=LAWS)
def test_a_slope_is_that_of_a_difference(law: Law) -> None:
    _, slope = evaluate(law, FLOW)
    step = 1e-6 * np.abs(FLOW)
    wanted = (evaluate(law, FLOW + step)[0] - evaluate(law, FLOW - step)[0]) / (2.0 * step)
    np.testing.assert_allclose(slope, wanted, rtol=1e-4, atol=1e-7)


@pytest.mark.parametrize("law", [LAWS["quadratic"], LAWS["power"], LAWS["friction"]])
def test_what_flows_back_loses_the_same(law: Law) -> None:
    forward, back = evaluate(law, FLOW), evaluate(law, -FLOW)
    np.testing.assert_allclose(back[0], -forward[0])
    np.testing.assert_allclose(back[1], forward[1])


def junctions(converging: bool) -> JunctionLaw:
    count = 4
    yes = np.ones(count, dtype=np.bool_)
    return JunctionLaw(
        branch=np.arange(count),
        straight=np.arange(count, 2 * count),
        counts=(yes, yes),
        family=np.array([0, 0, 1, 1]),
        converging=np.full(count, converging),
        area_ratio=np.array([0.5, 1.0, 0.7, 0.3]),
        angle=np.array([90.0, 45.0, 90.0, 60.0]),
        scale=np.full(count, 50.0),
    )


@pytest.mark.parametrize("converging", [True, False])
@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_a_junction_has_the_slopes_of_differences_in_both_flows(converging: bool, sign: float) -> None:
    law = junctions(converging)
    flow = sign * np.array([0.1, 0.7, 0.3, 0.55, 0.9, 0.3, 0.7, 0.45])
    _, own = evaluate(law, flow)
    cross = law.cross(flow)
    step = 1e-7
    for part, edges in enumerate(law.pairs):
        other = law.pairs[1 - part]
        for by, wanted in ((edges, own[edges]), (other, cross[part])):
            move = np.zeros(len(flow))
            move[by] = step
            found = (evaluate(law, flow + move)[0] - evaluate(law, flow - move)[0]) / (2.0 * step)
            np.testing.assert_allclose(wanted, found[edges], rtol=1e-4, atol=1e-4)


@pytest.mark.parametrize("converging", [True, False])
def test_a_junction_has_no_step_where_a_flow_turns(converging: bool) -> None:
    law = junctions(converging)
    for still in (0, 4):
        flow = np.full(8, 0.5)
        flow[still : still + 4] = 1e-9
        turned = flow.copy()
        turned[still : still + 4] = -1e-9
        np.testing.assert_allclose(evaluate(law, flow)[0], evaluate(law, turned)[0], atol=1e-6)


@pytest.mark.parametrize("seed", [0, 1, 5, 7, 12, 15, 20])
def test_at_design_flow_every_drop_is_the_budgets(seed: int) -> None:
    run = balanced(seed)
    drops = run.drops
    network = install(run, set_up(run, None, "open")).network
    design = design_flows(find_edges(run.layout), drops)
    found = dataclasses.replace(network, held=None).drops(design)[0]
    count = len(run.layout.legs)
    legs = drops.leg_total.copy()
    for use in run.layout.devices:
        if use.zone >= 0:
            legs[use.number] -= drops.leg_base[use.number]  # an edge of its own
    np.testing.assert_allclose(found[:count], legs, rtol=1e-9, atol=1e-7)
    np.testing.assert_allclose(found[count : count + len(drops.terminal_total)], drops.terminal_total, rtol=1e-9)


def test_a_curve_passes_its_points_and_never_rises_between_falling_ones() -> None:
    flow = np.array([0.0, 400.0, 800.0, 1400.0, 1800.0, 2200.0, 2300.0])
    pressure = np.array([88.0, 86.0, 81.0, 70.0, 60.0, 46.0, 40.0])
    curve = Curve.through(flow, pressure)
    for q, p in zip(flow.tolist(), pressure.tolist(), strict=True):
        assert curve.at(q)[0] == pytest.approx(p)
    at = np.linspace(-100.0, 2600.0, 2000)
    values = np.array([curve.at(q) for q in at.tolist()])
    assert (np.diff(values[:, 0]) < 0.0).all()
    step = 1e-4
    wanted = [(curve.at(q + step)[0] - curve.at(q - step)[0]) / (2 * step) for q in at.tolist()]
    np.testing.assert_allclose(values[:, 1], wanted, atol=1e-6)


def test_a_curve_that_turns_keeps_its_highest_point() -> None:
    curve = Curve.through(np.array([0.0, 1.0, 2.0, 3.0]), np.array([50.0, 60.0, 60.0, 20.0]))
    assert max(curve.at(q)[0] for q in np.linspace(0, 3, 301).tolist()) == pytest.approx(60.0)
    assert curve.at(5.0)[0] < 20.0
