"""Closing the loop: devices at the drops that the budget proposes give every terminal its design flow."""

import dataclasses
import random
import tomllib
from pathlib import Path

import numpy as np
import pytest
import tomli_w

from budget.document import Document
from budget.network import Computed, compute, lay_out
from budget.network.flows import solve_flows
from budget.network.flows.edges import design_flows
from tests.network.flows.balanced import balanced, balanced_text
from tests.network.small import description_of

EXAMPLES = sorted(
    path for path in (Path(__file__).parents[3] / "examples").glob("*.toml") if not path.name.startswith("faulty")
)


def without_diversity(path: Path) -> Computed:
    """An example with every terminal open at once."""
    description = Document.open(path).snapshot.description
    sections = {
        id_: dataclasses.replace(section, run=dataclasses.replace(section.run, diversity=None))
        for id_, section in description.sections.items()
    }
    return compute(lay_out(dataclasses.replace(description, sections=sections)))


def check(run: Computed) -> None:
    assert run.take_up.excess.max() < 1.0
    first = solve_flows(run, devices="set")
    edges = first.installed.edges
    design = design_flows(edges, run.drops)
    for start in (1.0, 3.0, 0.0):
        flows = solve_flows(run, devices="set", start=start * design)
        assert flows.settled
        assert len(flows.terminals) == len(run.layout.terminals)
        for terminal in flows.terminals.values():
            assert terminal.share == pytest.approx(1.0, abs=1e-3), (terminal.id, start)
            assert terminal.within
        for number, source in enumerate(flows.sources.values()):
            assert source.pressure == pytest.approx(run.required_of(number), rel=1e-6)
        network = flows.installed.network
        flow = flows.solution.flow
        assert np.abs(network.imbalance(flow)).max() <= 1e-9 * np.abs(flow).max()


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_an_example_closes(path: Path) -> None:
    check(without_diversity(path))


@pytest.mark.parametrize("seed", range(50))
def test_a_generated_run_closes(seed: int) -> None:
    check(balanced(seed))


@pytest.mark.parametrize("seed", [1, 4, 8, 13])
def test_with_devices_open_the_index_starves_and_others_are_over_supplied(seed: int) -> None:
    """Where the pump gives what it must at design, what is not throttled draws more, and the last gets less."""
    run = balanced(seed)
    flows = solve_flows(run, devices="open")
    assert flows.settled
    shares = np.array([terminal.share for terminal in flows.terminals.values()])
    index = [run.layout.terminals.ids[number] for number in np.flatnonzero(run.circuits.index)]
    assert min(flows.terminals[id_].share for id_ in index) < 1.0
    nearest = int(np.argmax(run.circuits.margin))
    assert shares[nearest] > 1.1
    assert any(finding.code == "flow-tolerance" for finding in flows.findings)


@pytest.mark.parametrize("seed", [1, 2, 10])
@pytest.mark.parametrize("devices", ["open", "set"])
def test_the_order_of_the_file_changes_nothing(seed: int, devices: str) -> None:
    text = balanced_text(seed)
    run = tomllib.loads(text)
    rng = random.Random(seed)
    for table in ("section", "terminal"):
        entries = list(run[table].items())
        rng.shuffle(entries)
        run[table] = dict(entries)
    moved = compute(lay_out(description_of(tomli_w.dumps(run))))
    first = solve_flows(compute(lay_out(description_of(text))), devices=devices)  # type: ignore[arg-type]
    second = solve_flows(moved, devices=devices)  # type: ignore[arg-type]
    most = max(abs(one.mass_flow) for one in first.terminals.values())
    for id_, terminal in first.terminals.items():
        assert second.terminals[id_].mass_flow == pytest.approx(terminal.mass_flow, abs=2e-6 * most)
    for id_, section in first.sections.items():
        assert second.sections[id_].flow == pytest.approx(section.flow, rel=1e-5, abs=1e-8)
