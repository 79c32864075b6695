"""Random networks as graphs, and their residuals worked out a second time edge by edge."""

from __future__ import annotations

import random
from dataclasses import dataclass
from math import copysign, log10, pi, sqrt

import numpy as np

from budget.network.flows.graph import Network
from budget.network.flows.laws import Friction, Quadratic
from budget.network.flows.solve import Solution

DENSITY, VISCOSITY = 998.0, 1.0e-3


@dataclass(frozen=True, slots=True)
class Pipe:
    start: int
    end: int
    length: float
    bore: float
    roughness: float
    k: float


def pipes_of(nodes: int, loops: float, seed: int) -> list[Pipe]:
    """A random tree with so many more pipes as a share of its nodes, bores ten to one apart."""
    rng = random.Random(seed)
    ends = [(rng.randrange(max(0, node - 40), node), node) for node in range(1, nodes)]
    more = max(2, round(loops * nodes))
    while more:
        start, end = rng.randrange(nodes), rng.randrange(nodes)
        if start != end:
            ends.append((start, end))
            more -= 1
    return [
        Pipe(
            *(pair if rng.random() < 0.5 else pair[::-1]),
            length=rng.uniform(1.0, 60.0),
            bore=0.015 * 10 ** rng.random(),
            roughness=rng.choice((1.5e-6, 4.6e-5, 1.5e-4)),
            k=rng.uniform(0.0, 8.0),
        )
        for pair in ends
    ]


def network_of(nodes: int, loops: float, seed: int) -> tuple[Network, list[Pipe]]:
    """A random network with draw-offs everywhere, fed at node 0, and one valve of a loop shut."""
    rng = random.Random(seed + 1)
    pipes = pipes_of(nodes, loops, seed)
    bore = np.array([pipe.bore for pipe in pipes])
    area = pi / 4 * bore**2
    count = len(pipes)
    inflow = np.array([rng.uniform(-0.2, 0.05) for _ in range(nodes)])
    inflow[0] -= inflow.sum()
    shut = np.zeros(count, dtype=np.bool_)
    shut[nodes - 1] = True  # the first that closes a loop
    quadratic = np.array([pipe.k for pipe in pipes]) / (2.0 * DENSITY * area**2)
    friction = Friction(
        edge=np.arange(count),
        share=np.ones(count),
        density=np.full(count, DENSITY),
        viscosity=np.full(count, VISCOSITY),
        area=area,
        diameter=bore,
        roughness=np.array([pipe.roughness for pipe in pipes]),
        laminar=np.full(count, 64.0),
        length=np.array([pipe.length for pipe in pipes]),
        per_reynolds=np.zeros(count),
        corrected=np.zeros(count),
    )
    network = Network(
        nodes=nodes,
        start=np.array([pipe.start for pipe in pipes]),
        end=np.array([pipe.end for pipe in pipes]),
        laws=(Quadratic(quadratic), friction),
        typical=DENSITY * area,  # 1 m/s
        inflow=inflow,
        shut=shut,
    )
    return network, pipes


def drop_of(pipe: Pipe, flow: float) -> float:
    """The drop of a pipe in plain arithmetic; Colebrook-White by iteration."""
    velocity = abs(flow) / (DENSITY * pi / 4 * pipe.bore**2)
    if velocity == 0.0:
        return 0.0
    re = DENSITY * velocity * pipe.bore / VISCOSITY
    laminar = 64.0 / re
    factor = laminar
    if re >= 2300.0:
        x = 7.0
        for _ in range(100):
            x = -2.0 * log10(pipe.roughness / pipe.bore / 3.7 + 2.51 * x / re)
        s = min(1.0, (re - 2300.0) / 1700.0)
        weight = s * s * (3.0 - 2.0 * s)
        factor = laminar + weight * (1.0 / (x * x) - laminar)
    size = (factor * pipe.length / pipe.bore + pipe.k) * DENSITY * velocity**2 / 2.0
    return copysign(size, flow)


def worst_of(network: Network, pipes: list[Pipe], found: Solution) -> tuple[float, float]:
    """The largest energy residual over the largest drop, and the largest imbalance over the largest flow."""
    assert network.inflow is not None
    assert network.shut is not None
    balance = network.inflow.tolist()
    drops, residuals = [1e-30], []
    for number, pipe in enumerate(pipes):
        flow = float(found.flow[number])
        balance[pipe.end] += flow
        balance[pipe.start] -= flow
        if network.shut[number]:
            assert flow == 0.0
            continue
        drop = drop_of(pipe, flow)
        drops.append(abs(drop))
        residuals.append(abs(drop - float(found.pressure[pipe.start] - found.pressure[pipe.end])))
    largest = float(np.abs(found.flow).max())
    return max(residuals) / max(drops), max(map(abs, balance)) / largest


def spread(seed: int) -> tuple[int, float]:
    """Number of nodes, 10 to 2,000, and share of loops, 5 to 30 %, of one random network."""
    rng = random.Random(seed)
    return round(10 * sqrt(200.0) ** (2 * rng.random())), rng.uniform(0.05, 0.3)
