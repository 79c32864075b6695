"""Published networks, built as graphs: three loops, three reservoirs, the operating point of a pump."""

from __future__ import annotations

from math import pi

import numpy as np
import pytest

from budget.network.flows.graph import Network
from budget.network.flows.laws import Friction, Quadratic
from budget.network.flows.solve import Solution, solve
from budget.network.flows.sources import Curve, Gains, Running
from budget.physics.arrays import Array
from tests.published.figures import examples

G = 9.80665
FOOT = 0.3048
GPM = 3.785411784e-3 / 60


def three_loops() -> tuple[Network, Array]:
    """Ten pipes in three loops, flows in m3/s and heads in m.

    The loops are listed clockwise, so pipes 1 to 5 run round nodes 0 to 4, pipes 6 to 8 on from node 3 to node 4, and 9
    and 10 from node 2 to node 5. What enters each node follows from the balanced flows that the source starts with.
    """
    inputs = examples()["net-3loop-fixed-f"]["inputs"]
    start = np.array([0, 1, 2, 3, 4, 3, 5, 6, 2, 7])
    end = np.array([1, 2, 3, 4, 0, 5, 6, 4, 7, 5])
    pipes = inputs["pipe"]
    k = [8.0 * pipe["f"] * pipe["L_m"] / (pi**2 * G * pipe["D_m"] ** 5) for pipe in pipes]
    first = np.zeros(10)
    for loop, flows in zip(reversed(inputs["loops"]), reversed(inputs["initial_flows_clockwise"]), strict=True):
        for pipe, flow in zip(loop, flows, strict=True):
            first[pipe - 1] = flow  # the first loop that lists a pipe is written last, and gives its sign
    inflow = np.zeros(8)
    np.add.at(inflow, start, first)
    np.subtract.at(inflow, end, first)
    network = Network(8, start, end, (Quadratic(np.array(k)),), np.full(10, 0.02), inflow=inflow)
    return network, first


@pytest.mark.parametrize("factor", [1.0, 0.0, 3.0, -3.0])
def test_ten_pipes_in_three_loops(factor: float) -> None:
    network, first = three_loops()
    example = examples()["net-3loop-fixed-f"]
    found = solve(network, factor * first)
    assert found.converged
    # Printed to four digits at most.
    wanted = np.array(example["derived"]["Q_m3_s_converged"])
    np.testing.assert_allclose(found.flow, wanted, atol=6e-6)
    assert np.abs(network.imbalance(found.flow)).max() < 1e-9 * np.abs(found.flow).max()
    for loop in example["inputs"]["loops"]:
        drops = [found.drop[pipe - 1] for pipe in loop]
        signs = [1.0] * 5 if loop[0] == 1 else [-1.0, 1.0, 1.0, 1.0] if loop[0] == 4 else [-1.0, 1.0, 1.0, -1.0]
        assert abs(sum(sign * drop for sign, drop in zip(signs, drops, strict=True))) < 1e-8 * max(map(abs, drops))


def test_the_three_passes_that_the_source_prints_are_near_the_converged_flows() -> None:
    example = examples()["net-3loop-fixed-f"]
    printed = np.array(example["expected"]["Q_m3_s_after_3_iterations"])
    network, first = three_loops()
    np.testing.assert_allclose(solve(network, first).flow, printed, rtol=0.06)


def test_three_reservoirs_and_a_junction() -> None:
    example = examples()["fluids-1962-9-12"]
    pipes = example["inputs"]["pipe"]
    network = Network(
        nodes=4,
        start=np.array([0, 3, 3]),
        end=np.array([3, 1, 2]),
        laws=(Quadratic(np.array([pipe["K"] for pipe in pipes])),),
        typical=np.ones(3),
        known=np.array([0, 1, 2]),
        pressure=np.array([pipe["z_m"] for pipe in pipes]),
    )
    found = solve(network, np.zeros(3))
    assert found.converged
    # The source stops its hand iteration with 0.002 m3/s left over: 1.5 %.
    expected = example["expected"]
    assert found.pressure[3] == pytest.approx(expected["junction_head_m"], rel=1e-3)
    np.testing.assert_allclose(found.flow, [expected["Q1"], expected["Q2"], expected["Q3"]], rtol=0.015)
    assert found.flow[0] == pytest.approx(found.flow[1] + found.flow[2], rel=1e-9)


def pumped(speed: float = 1.0, units: int = 1) -> tuple[Solution, Running]:
    """Water pumped up from one tank to another, in kg/s and Pa."""
    inputs = examples()["munson-12-4"]["inputs"]
    density, viscosity = 999.0, 1.12e-3  # water at 60 degF
    bore = inputs["D_in"] * 0.0254
    area = pi / 4 * bore**2
    curve = Curve.through(
        np.array(inputs["pump_gpm"]) * GPM * density, np.array(inputs["pump_ft"]) * FOOT * density * G
    )
    pump = Running(0, units, speed, curve, outlet=0.0, held=0.0, set_point=None)
    columns = (1.0, density, viscosity, area, bore, inputs["roughness_mm"] * 1e-3, 64.0)
    length = inputs["L_ft"] * FOOT
    pipe = Friction(np.array([1]), *(np.array([value]) for value in (*columns, length, 0.0, 0.0)))
    k = sum(inputs["K"]) / (2.0 * density * area**2)
    network = Network(
        nodes=3,
        start=np.array([0, 1]),
        end=np.array([1, 2]),
        laws=(Gains((pump,)), pipe, Quadratic(np.array([0.0, k]))),
        typical=np.full(2, 100.0),
        known=np.array([0, 2]),
        pressure=np.array([0.0, inputs["lift_ft"] * FOOT * density * G]),
    )
    found = solve(network)
    assert found.converged
    return found, pump


def test_a_pump_works_where_its_curve_meets_the_system() -> None:
    found, _ = pumped()
    # The book takes f = 0.02; the law of Colebrook and White gives 3.9 % less.
    assert found.flow[0] / (GPM * 999.0) == pytest.approx(examples()["munson-12-4"]["expected"]["Q_gpm"], rel=0.05)


def test_the_affinity_laws_of_the_book_hold_for_a_curve() -> None:
    example = examples()["crane-7-33"]
    inputs, expected = example["inputs"], example["expected"]
    flow = inputs["Q1_gpm"] * GPM * 1000.0
    head = inputs["H1_ft"] * FOOT * 1000.0 * G
    curve = Curve.through(np.array([0.0, flow, 2.0 * flow]), np.array([1.2 * head, head, 0.4 * head]))
    pump = Running(0, 1, inputs["n2_rpm"] / inputs["n1_rpm"], curve, outlet=0.0, held=0.0, set_point=None)
    reduced = expected["Q2_gpm"] * GPM * 1000.0
    assert pump.gain(reduced)[0] == pytest.approx(expected["H2_ft"] * FOOT * 1000.0 * G, rel=0.01)
