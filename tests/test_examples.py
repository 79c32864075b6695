"""The example runs: each reads without error, finds exactly what its comments say, and comes out sensible."""

from __future__ import annotations

import math
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from budget.description import Description, describe, read_bytes
from budget.network import Budget, evaluate
from budget.report.json import results
from budget.report.located import Located, locate
from budget.storage import read_libraries

FOLDER = Path(__file__).parents[1] / "examples"

FINDINGS: dict[str, set[tuple[str, str]]] = {
    "first-look": set(),
    "three-floor-heating": {("note", "slow"), ("note", "authority-low")},
    "chilled-reverse-return": {("note", "settings-diversified"), ("note", "authority-low")},
    "air-handling-unit": {("note", "gradient"), ("note", "junction-gain")},
    "condenser-tower": set(),
    "faulty-cottage": {
        ("error", "unknown-key"),
        ("error", "wrong-dimension"),
        ("error", "unknown-fitting"),
        ("error", "no-terminal"),
        ("error", "unknown-size"),
        ("error", "decimal-comma"),
        ("error", "unknown-device"),
        ("error", "dangling"),
        ("warning", "heading"),
        ("warning", "nothing-in-hand"),
        ("warning", "velocity"),
        ("warning", "gradient"),
        ("warning", "junction"),
        ("warning", "excess"),
        ("warning", "transitional"),
    },
}
SOUND = [name for name in FINDINGS if name != "faulty-cottage"]


def load(name: str) -> tuple[Description, Budget, tuple[Located, ...]]:
    path = FOLDER / f"{name}.toml"
    source = read_bytes(path.read_bytes())
    description = describe(source, read_libraries(source, path))
    budget = evaluate(description)
    return description, budget, locate(budget.findings, source, description)


def numbers(value: Any) -> Iterator[float]:
    """Yield every figure of a result."""
    if isinstance(value, float):
        yield value
    elif isinstance(value, dict | list | tuple):
        for inner in value.values() if isinstance(value, dict) else value:
            yield from numbers(inner)


def test_every_example_is_known_here() -> None:
    assert {path.stem for path in FOLDER.glob("*.toml")} == set(FINDINGS)


@pytest.mark.parametrize("name", FINDINGS)
def test_an_example_finds_what_it_is_meant_to_find(name: str) -> None:
    _, _, found = load(name)
    assert {(one.level.value, one.code) for one in found} == FINDINGS[name]


@pytest.mark.parametrize("name", FINDINGS)
def test_an_example_opens_with_a_comment_that_says_what_it_shows(name: str) -> None:
    assert_well_written((FOLDER / f"{name}.toml").read_text(encoding="utf-8"))


def test_a_library_among_the_examples_is_in_use() -> None:
    assert_well_written((FOLDER / "office" / "valves.toml").read_text(encoding="utf-8"))
    description, _, _ = load("three-floor-heating")
    taken = {device.name for device in description.devices.values() if device.origin == "office/valves.toml"}
    assert taken == {"PIV 15", "PIV 20"}
    assert taken < {terminal.balance for terminal in description.terminals.values()}


def assert_well_written(text: str) -> None:
    assert text.startswith("# ")
    assert text.isascii()
    assert text.endswith("\n")
    assert not text.endswith("\n\n")
    assert max(map(len, text.splitlines())) <= 120


@pytest.mark.parametrize("name", SOUND)
def test_the_figures_of_an_example_are_finite_and_its_balance_comes_out(name: str) -> None:
    description, budget, found = load(name)
    whole = results("0", f"{name}.toml", description, budget, found)
    assert all(math.isfinite(number) for number in numbers(whole))
    for source in whole["sources"].values():
        assert source["in_hand"] > 0.0
        assert sum(source["spent"].values()) == pytest.approx(source["required"], rel=1e-9)
        for heading, allowed in source["budget"].items():
            assert source["spent"][heading] <= allowed
    for id_, terminal in whole["terminals"].items():
        assert terminal["circuit"] is not None, id_
        assert terminal["margin"] >= 0.0, id_
        assert terminal["excess"] < 1.0, id_
        device = terminal["device"]
        if device and description.devices[device["name"]].holds is None:
            assert device["setting"] is not None, id_


WATER = {"three-floor-heating", "chilled-reverse-return", "condenser-tower", "first-look"}


@pytest.mark.parametrize("name", SOUND)
def test_an_example_is_sized_as_a_designer_would(name: str) -> None:
    description, budget, found = load(name)
    slowest, fastest = (0.15, 2.9) if name in WATER else (1.5, 8.0)
    for id_, section in results("0", "", description, budget, found)["sections"].items():
        velocities = [leg["velocity"] for leg in section["legs"] if leg["mass_flow"] > 0.0]
        assert slowest <= min(velocities) <= max(velocities) <= fastest, id_


@pytest.mark.parametrize(
    ("name", "sections", "terminals"),
    [
        ("three-floor-heating", 19, 40),
        ("chilled-reverse-return", 19, 16),
        ("air-handling-unit", 25, 33),
        ("condenser-tower", 13, 3),
    ],
)
def test_an_example_is_of_real_size(name: str, sections: int, terminals: int) -> None:
    description, _, _ = load(name)
    assert (len(description.sections), len(description.terminals)) == (sections, terminals)


def test_every_fault_of_the_faulty_cottage_is_named_above_it() -> None:
    lines = (FOLDER / "faulty-cottage.toml").read_text(encoding="utf-8").splitlines()
    _, _, found = load("faulty-cottage")
    for one in found:
        if one.code == "heading":
            continue  # it comes of the main that is too small
        above = lines[max(0, one.line - 9) : one.line]
        assert any(line.startswith("# Wrong: ") for line in above), one


def test_the_open_tower_spends_its_static_height_once() -> None:
    _, budget, _ = load("condenser-tower")
    source = budget.sources["CWP"]
    rise = (9 + 52 + 7.5 + 2 - 3 - 57) * 0.3048
    assert source.static == pytest.approx(994.0 * 9.80665 * rise + 2.6 * 6894.757, rel=0.03)  # water of 30 to 35 degC


def test_both_fans_of_the_unit_have_two_sides() -> None:
    _, budget, _ = load("air-handling-unit")
    for fan in ("SF3", "EF3"):
        source = budget.sources[fan]
        assert source.discharge_required is not None
        assert source.suction_required is not None
        assert len(source.index) == 2
        assert source.sfp is not None
        assert 500.0 < source.sfp < 2000.0


def test_the_floor_behind_the_differential_valve_sees_its_set_point() -> None:
    description, budget, _ = load("three-floor-heating")
    device = budget.sections["S1"].device
    assert device is not None
    assert device.take_up > 0.0
    behind = [id_ for id_ in description.terminals if "S1" in budget.terminals[id_].path]
    assert len(behind) == 14
    spendable = [budget.terminals[id_].circuit + budget.terminals[id_].margin for id_ in behind]
    assert spendable == pytest.approx([spendable[0]] * 14)
    assert min(budget.terminals[id_].margin for id_ in behind) == pytest.approx(budget.sections["S4"].margin)
