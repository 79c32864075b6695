"""Random networks with loops converge from anywhere, and balance in energy and mass by a second reckoning."""

import dataclasses

import numpy as np
import pytest

from budget.network.flows.graph import Network
from budget.network.flows.laws import Constant, Power, Quadratic
from budget.network.flows.solve import Solution, solve, solve_switching
from tests.network.flows.networks import network_of, spread, worst_of

STARTS = (0.0, 3.0, -3.0)


def check(seed: int) -> None:
    network, pipes = network_of(*spread(seed), seed)
    flows = []
    for start in STARTS:
        found = solve(network, start * network.typical)
        assert found.converged, (seed, start)
        energy, mass = worst_of(network, pipes, found)
        assert energy < 1e-8, (seed, start)
        assert mass < 1e-9, (seed, start)
        flows.append(found.flow)
    scale = np.abs(flows[0]).max()
    for flow in flows[1:]:
        np.testing.assert_allclose(flow, flows[0], atol=1e-7 * scale)


@pytest.mark.parametrize("seed", range(12))
def test_a_random_network_converges_from_anywhere(seed: int) -> None:
    check(seed)


@pytest.mark.long
@pytest.mark.parametrize("seed", range(12, 200))
def test_two_hundred_random_networks_converge_from_anywhere(seed: int) -> None:
    check(seed)


def test_every_loop_balances() -> None:
    network, pipes = network_of(300, 0.2, 5)
    found = solve(network)
    # A tree spans the network; each pipe beside it closes a loop along the tree.
    up: dict[int, tuple[int, float]] = {0: (-1, 0.0)}
    waiting, beside = [0], []
    touching: dict[int, list[int]] = {}
    for number, pipe in enumerate(pipes):
        touching.setdefault(pipe.start, []).append(number)
        touching.setdefault(pipe.end, []).append(number)
    used = set()
    while waiting:
        node = waiting.pop()
        for number in touching[node]:
            pipe = pipes[number]
            other = pipe.end if pipe.start == node else pipe.start
            if network.open[number] and number not in used and other not in up:
                used.add(number)
                sign = 1.0 if pipe.start == node else -1.0
                up[other] = (node, sign * float(found.drop[number]))
                waiting.append(other)
    heights = {0: 0.0}

    def below(node: int) -> float:
        trail = []
        while node not in heights:
            trail.append(node)
            node = up[node][0]
        for at in reversed(trail):
            heights[at] = heights[up[at][0]] + up[at][1]
        return heights[trail[0]] if trail else heights[node]

    beside = [number for number in range(len(pipes)) if network.open[number] and number not in used]
    assert len(beside) >= 50
    largest = float(np.abs(found.drop).max())
    for number in beside:
        pipe = pipes[number]
        around = below(pipe.start) + float(found.drop[number]) - below(pipe.end)
        assert abs(around) < 1e-7 * largest


def test_the_order_of_edges_and_nodes_changes_nothing() -> None:
    network, _ = network_of(200, 0.2, 3)
    assert network.inflow is not None
    rng = np.random.default_rng(3)
    order = rng.permutation(len(network.start))
    name = rng.permutation(network.nodes)
    first = solve(network).flow
    quadratic, friction = network.laws
    inverse = np.argsort(order)
    moved_friction = dataclasses.replace(friction, edge=inverse[friction.edge])  # type: ignore[type-var, attr-defined]
    moved = dataclasses.replace(
        network,
        start=name[network.start[order]],
        end=name[network.end[order]],
        laws=(Quadratic(quadratic.coefficient[order]), moved_friction),  # type: ignore[attr-defined]
        typical=network.typical[order],
        inflow=network.inflow[np.argsort(name)],
        shut=network.open[order] ^ True,
    )
    np.testing.assert_allclose(solve(moved).flow, first[order], atol=1e-9 * np.abs(first).max())


def test_parts_that_are_cut_off_stand_still() -> None:
    """A pump drives a ring; a spare leg and a part behind a shut valve carry nothing."""
    network = Network(
        nodes=5,
        start=np.array([0, 1, 1, 3, 3]),
        end=np.array([1, 0, 2, 4, 4]),
        laws=(Constant(np.array([-1000.0, 0, 0, 0, 0])), Quadratic(np.array([0.0, 10.0, 5.0, 5.0, 5.0]))),
        typical=np.ones(5),
    )
    found = solve(network)
    assert found.converged
    np.testing.assert_allclose(found.flow, [10.0, 10.0, 0.0, 0.0, 0.0], atol=1e-6)


def test_what_has_no_solution_is_said_to_have_none_and_keeps_flows() -> None:
    """Ten units enter a part of the network that nothing can leave."""
    network = Network(
        nodes=2,
        start=np.array([0]),
        end=np.array([1]),
        laws=(Quadratic(np.array([np.nan])),),
        typical=np.ones(1),
    )
    found = solve(network)
    assert not found.converged
    assert np.isfinite(found.flow).all()


def test_a_solve_can_be_watched_and_stopped() -> None:
    network, _ = network_of(100, 0.1, 1)
    seen: list[int] = []

    def watch(step: int, _: float) -> None:
        seen.append(step)
        if step == 2:
            raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        solve(network, watch=watch)
    assert seen == [1, 2]


@pytest.mark.parametrize("seed", [0, 1, 5, 8, 12])
def test_steep_and_flat_laws_converge_by_shorter_steps(seed: int) -> None:
    """Whole steps go round in circles where a drop hardly grows with its flow: exponents of 0.1 to 4 on a third."""
    network, _ = network_of(60, 0.3, seed)
    rng = np.random.default_rng(seed)
    edge = rng.permutation(len(network.start))[: len(network.start) // 3]
    power = Power(
        edge,
        10.0 ** rng.uniform(1.0, 5.0, len(edge)),
        0.3 * network.typical[edge],
        rng.choice([0.1, 0.3, 0.5, 3.0, 4.0], len(edge)),
    )
    network = dataclasses.replace(network, laws=(*network.laws, power))
    flows = []
    for start in (0.0, 1.0, 3.0, -3.0):
        found = solve(network, start * network.typical)
        assert found.converged
        flows.append(found.flow)
    for flow in flows[1:]:
        np.testing.assert_allclose(flow, flows[0], atol=1e-6 * np.abs(flows[0]).max())


def test_devices_that_chase_each_other_are_switched_one_by_one_and_given_up_in_the_end() -> None:
    network, _ = network_of(10, 0.2, 1)
    asked: list[bool] = []

    def switch(_: Solution, given: Network, alone: bool) -> Network:
        asked.append(alone)
        return given

    found, _, settled = solve_switching(network, network.typical, switch, passes=6)
    assert found.converged
    assert not settled
    assert asked == [False, False, False, True, True, True]
