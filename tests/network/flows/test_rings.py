"""Closing the loop where links close rings, and what can be said of every ring whatever it is made of."""

from __future__ import annotations

import random
import tomllib
from typing import Any

import numpy as np
import pytest
import tomli_w

from budget.network import Computed, compute, lay_out
from budget.network.circuits import path_sums
from tests.network.flows.balanced import balanced_text
from tests.network.flows.test_closing import check
from tests.network.small import description_of, errors_of

LINKS = 3


def ringed_text(seed: int) -> str:
    """A generated run with up to three links between sections of one source, and nothing on a section that can't be."""
    rng = random.Random(seed)
    run: dict[str, Any] = tomllib.loads(balanced_text(seed))
    for section in run["section"].values():
        section.pop("balance", None)
        section["item"] = [item for item in section.get("item", ()) if "drop" not in item and "clean" not in item]
        for item in section["item"]:
            for key in ("control", "characteristic", "rangeability"):
                item.pop(key, None)
    sides: dict[tuple[str, str], list[str]] = {}
    for id_, section in run["section"].items():
        key = "from" if "from" in section else "to"
        at = id_
        while at in run["section"]:
            above = run["section"][at]
            at = above.get("from", above.get("to"))
        sides.setdefault((key, at), []).append(id_)
    run["link"] = {}
    for ids in sides.values():
        for _ in range(LINKS if len(ids) > 1 else 0):
            first, second = rng.sample(ids, 2)
            like = {
                name: value
                for name, value in run["section"][first].items()
                if name in ("pipe", "duct", "size", "bore", "compression")
            }
            name = f"R{len(run['link'])}"
            length = f"{rng.uniform(2, 40):.2f} m"
            run["link"][name] = {"from": first, "to": second, "length": length, **like}
    return tomli_w.dumps({"format": run.pop("format"), **run})


def ringed(seed: int) -> Computed:
    return compute(lay_out(description_of(ringed_text(seed))))


SEEDS = [seed for seed in range(16) if len(tomllib.loads(ringed_text(seed))["link"]) > 0]


def test_there_are_rings_to_look_at() -> None:
    assert len(SEEDS) >= 10
    assert sum(ringed(seed).layout.links.ringed.sum() for seed in SEEDS) > 50


@pytest.mark.parametrize("seed", SEEDS)
def test_a_generated_run_with_rings_closes(seed: int) -> None:
    assert errors_of(ringed_text(seed)) == []
    check(ringed(seed))


@pytest.mark.parametrize("seed", SEEDS)
def test_pressures_balance_around_every_loop_and_flows_at_every_node(seed: int) -> None:
    run = ringed(seed)
    layout, drops, links = run.layout, run.drops, run.layout.links
    legs = layout.legs
    # Without heights: a link's ends have those of its sections.
    along = path_sums(drops.leg_total - drops.leg_static, legs.parent)
    loss = drops.links.friction + drops.links.fittings
    np.add.at(loss, links.items.carrier, drops.link_items)
    sign = np.where(legs.outward[links.first], 1.0, -1.0)
    around = loss - sign * (along[links.second] - along[links.first])
    assert np.abs(around).max() <= 1e-6 * np.abs(along).max()
    # What a leg carries is what hangs on its far end and what links take from there.
    carried = np.zeros(len(legs))
    for ends in (layout.terminals.out, layout.terminals.back):
        np.add.at(carried, ends[ends >= 0], drops.terminal_mass[ends >= 0])
    inner = legs.parent >= 0
    np.add.at(carried, legs.parent[inner], drops.leg_mass[inner])
    np.add.at(carried, links.first, sign * drops.links.mass)
    np.add.at(carried, links.second, -sign * drops.links.mass)
    np.testing.assert_allclose(carried, drops.leg_mass, atol=1e-9 * np.abs(drops.leg_mass).max())


@pytest.mark.parametrize("seed", SEEDS[:5])
def test_a_link_written_the_other_way_round_flows_the_other_way(seed: int) -> None:
    run = tomllib.loads(ringed_text(seed))
    for link in run["link"].values():
        link["from"], link["to"] = link["to"], link["from"]
    first, second = ringed(seed), compute(lay_out(description_of(tomli_w.dumps(run))))
    most = np.abs(first.drops.leg_mass).max()
    np.testing.assert_allclose(second.drops.leg_mass, first.drops.leg_mass, atol=1e-6 * most)
    np.testing.assert_allclose(second.drops.links.mass, -first.drops.links.mass, atol=1e-6 * most)
    np.testing.assert_allclose(second.circuits.circuit, first.circuits.circuit, rtol=1e-6)
