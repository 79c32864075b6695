"""The random runs: varied enough, the same for the same seed, and consistent in themselves."""

import tomllib
from collections import Counter

import pytest

from tests.independent.loops import evaluate, solve
from tests.independent.runs import features, generate

pytestmark = pytest.mark.long

SEEDS = range(200)
WANTED = (
    "SI", "IP", "closed", "open", "air", "paired", "reverse return", "joined risers", "both sides",
    "lone terminal omits its flow", "discharge side alone", "suction side alone", "suction from a tank",
    "diversity", "unequal legs", "load", "terminal's return temperature", "several sources",
    "source with a temperature of its own", "holds flow", "holds differential", "holds flow on a section",
    "stated set point",
    "default set point", "nested differentials", "device kv", "device cv", "device k", "least drop",
    "run-out", "run-out from and to", "item k", "item kv", "item cv", "item drop", "item drop at",
    "item filter", "item equivalent_length", "item tested", "exponent", "parallel", "item on a section",
    "item on a terminal", "item on a source", "control item", "static drop", "round", "rectangular",
    "oval", "flexible", "fittings by size", "own fitting", "own pipe", "bore", "copper", "reserve",
    "flow reserve", "available", "outlet", "inside", "head", "mass flow", "bare number", "quoted ID",
    "accept", "sections in any order", "terminal on the source", "water", "propylene glycol",
    "ethylene glycol", "custom liquid", "custom gas", "slow",
)  # fmt: skip


@pytest.fixture(scope="module")
def texts() -> list[str]:
    return [generate(seed) for seed in SEEDS]


def test_the_random_runs_reach_everything(texts: list[str]) -> None:
    seen = Counter(feature for text in texts for feature in features(text))
    assert {feature: seen[feature] for feature in WANTED if seen[feature] < 5} == {}
    assert sum("  # " in text for text in texts) > len(texts) / 2


def test_the_random_runs_are_of_every_size_and_the_same_again(texts: list[str]) -> None:
    sizes = [text.count("\n[section.") for text in texts]
    assert min(sizes) >= 5
    assert max(sizes) <= 500
    assert sum(size > 300 for size in sizes) >= 10
    assert sum(size < 20 for size in sizes) >= 30
    assert generate(7) == texts[7]


def small(texts: list[str]) -> list[str]:
    return [text for text in texts if text.count("\n[section.") <= 90]


def test_the_random_runs_flow_in_every_regime(texts: list[str]) -> None:
    regimes = Counter(
        leg["regime"]
        for text in small(texts)
        for section in evaluate(text)["sections"].values()
        for leg in section["legs"]
    )
    assert min(regimes[name] for name in ("laminar", "transitional", "turbulent")) > 200
    assert regimes["turbulent"] > sum(regimes.values()) / 2


def test_some_devices_are_asked_for_more_than_their_table_has(texts: list[str]) -> None:
    owners = [
        owner for text in small(texts) for kind in ("sections", "terminals") for owner in evaluate(text)[kind].values()
    ]
    devices = [owner["device"] for owner in owners if owner["device"] and "kv" in owner["device"]]
    outside = sum(device["setting"] is None for device in devices)
    assert len(devices) / 50 < outside < len(devices) / 2


def test_no_leg_is_idle_and_mass_is_kept(texts: list[str]) -> None:
    for text in small(texts):
        net = solve(tomllib.loads(text), {})
        assert all(net["users"].values())
        for way, served in net["users"].items():
            mass = sum(net["terminals"][name]["mass"] for name in served)
            if "; diversity" in text.partition("\n")[0]:
                assert net["masses"][way] <= mass * (1 + 1e-12)
            else:
                assert net["masses"][way] == pytest.approx(mass, rel=1e-12)
        for source in net["sources"].values():
            sides = source["mass by side"]
            if net["gas"] and min(sides.values()) > 0:
                assert sides["out"] == pytest.approx(sides["back"], rel=1e-2)


def test_every_circuit_is_filled_up_to_the_required_pressure(texts: list[str]) -> None:
    for text in small(texts):
        net = solve(tomllib.loads(text), {})
        result = evaluate(text)
        gas = net["gas"]
        for source in result["sources"].values():
            assert sum(source["spent"].values()) == pytest.approx(source["required"], rel=1e-9)
            assert source["duty"] >= source["required"] * (1 - 1e-12)
        for name, end in result["terminals"].items():
            terminal = net["terminals"][name]
            source = result["sources"][terminal["source"]]
            required = source["required"]
            if gas:
                required = source["discharge_required" if terminal["side"] == "out" else "suction_required"]
            taken = [
                result["sections"][way[0]]["device"]["take_up"]
                for way in (*terminal["out"], *terminal["back"])
                if way[1] == net["sections"][way[0]]["main"] and result["sections"][way[0]]["device"]
            ]
            if end["device"]:
                taken.append(end["device"]["take_up"])
            total = end["circuit"] + sum(taken) + end["excess"]
            assert total == pytest.approx(required, rel=1e-9), name
            assert min([*taken, end["excess"], end["margin"]]) > -1e-6 * required
            own = terminal["own"]
            assert end["differential"] == pytest.approx(end["margin"] + own, rel=1e-6, abs=1e-6 * required)
        most = max(source["required"] for source in result["sources"].values())
        assert min(section["margin"] for section in result["sections"].values()) > -1e-6 * most


def test_the_index_circuit_has_no_margin(texts: list[str]) -> None:
    for text in small(texts):
        result = evaluate(text)
        for source in result["sources"].values():
            for name in source["index"]:
                end = result["terminals"][name]
                assert end["index"]
                if "stated set point" not in features(text):
                    assert end["margin"] == pytest.approx(0, abs=1e-7 * source["required"])
                assert all(result["sections"][section]["index"] for section in end["path"])
