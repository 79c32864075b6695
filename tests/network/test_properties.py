"""What holds for every run: sums, balances, and what may not change the result."""

from __future__ import annotations

import copy
import dataclasses
import json
import math
import random
import tomllib
from collections.abc import Iterable, Mapping
from typing import Any

import pytest
import tomli_w
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from budget.description import describe, read_text
from budget.document import take
from budget.network import Budget, SectionResult, evaluate
from budget.report.json import results
from tests.independent.runs import features, generate

SEEDS = st.integers(1000, 10**6)
"""Seeds beyond those of the comparison with plain loops."""

quick = settings(
    max_examples=10, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large]
)


def small_run(seed: int) -> str:
    """A generated run of not more than 80 sections."""
    text = generate(seed)
    assume(text.count("\n[section.") <= 80)
    return text


def worked_out(text: str) -> Budget:
    budget = evaluate(describe(read_text(text)))
    assert [finding for finding in budget.findings if finding.level == "error"] == []
    return budget


def written(data: Mapping[str, Any]) -> Budget:
    return worked_out(tomli_w.dumps(data))


def close(value: float, other: float, scale: float) -> bool:
    return abs(value - other) <= 1e-9 * abs(scale)


def scale_of(budget: Budget, source: str) -> float:
    """A pressure to which rounding is compared: static parts may cancel in the required pressure."""
    found = budget.sources[source]
    circuits = [abs(t.circuit) + abs(t.static) for t in budget.terminals.values() if t.source == source]
    statics = [abs(section.run.static) for section in budget.sections.values() if section.source == source]
    return max(abs(found.required), *circuits, 1.0) + sum(statics)


@quick
@given(SEEDS)
def test_what_is_spent_adds_up_to_the_required_pressure(seed: int) -> None:
    budget = worked_out(small_run(seed))
    for id_, source in budget.sources.items():
        assert close(math.fsum(source.spent.values()), source.required, scale_of(budget, id_))


def devices_of(budget: Budget, id_: str) -> list[SectionResult]:
    """The sections whose device is in a terminal's circuit, outward and then back.

    A device stands in the supply leg of its section: a terminal that only returns by a paired section passes it by.
    """
    description = budget.run.layout.description
    outward: list[str] = []
    at = description.terminals[id_].from_
    while at is not None and at in description.sections:
        outward.insert(0, at)
        at = description.sections[at].from_
    back = [other for other in budget.terminals[id_].path if description.sections[other].from_ is None]
    return [budget.sections[other] for other in (*outward, *back) if budget.sections[other].device]


def is_holding(section: SectionResult) -> bool:
    return section.device is not None and section.device.holds == "differential"


def taken(sections: Iterable[SectionResult]) -> float:
    return math.fsum(section.device.take_up for section in sections if section.device)


def behind(sections: Iterable[SectionResult], holder: SectionResult | None) -> list[SectionResult]:
    """Those that stand behind a holding section, or all where there is none."""
    return [s for s in sections if holder is None or (s is not holder and set(s.serves) <= set(holder.serves))]


@quick
@given(SEEDS)
def test_circuit_take_ups_and_excess_make_the_required_pressure(seed: int) -> None:
    budget = worked_out(small_run(seed))
    for id_, terminal in budget.terminals.items():
        source, scale = budget.sources[terminal.source], scale_of(budget, terminal.source)
        sections = devices_of(budget, id_)
        holders = [section for section in sections if is_holding(section)]
        spent = taken(behind(sections, holders[-1] if holders else None))
        spent += terminal.device.take_up if terminal.device else 0.0
        assert close(spent + terminal.excess, terminal.margin, scale), id_
        if holders:
            continue
        required = source.required
        if source.kind == "air":
            outward = budget.run.layout.description.terminals[id_].from_ is not None
            required = (source.discharge_required if outward else source.suction_required) or 0.0
        assert close(terminal.circuit + spent + terminal.excess, required, scale), id_


@quick
@given(SEEDS)
def test_a_holding_device_takes_all_that_remains_of_what_is_behind_it(seed: int) -> None:
    budget = worked_out(small_run(seed))
    for holder in filter(is_holding, budget.sections.values()):
        sections = devices_of(budget, holder.serves[0])
        holders = [section for section in sections if is_holding(section)]
        place = holders.index(holder)
        outside = [
            s for s in behind(sections, holders[place - 1] if place else None) if s not in behind(sections, holder)
        ]
        assert close(taken(outside), holder.margin, scale_of(budget, holder.source)), holder.id


@quick
@given(SEEDS)
def test_mass_is_conserved(seed: int) -> None:
    text = small_run(seed)
    assume("diversity" not in features(text))
    budget = worked_out(text)
    for id_, source in budget.sources.items():
        own = [terminal for terminal in budget.terminals.values() if terminal.source == id_]
        if source.kind != "air":
            assert source.mass_flow == pytest.approx(math.fsum(terminal.mass_flow for terminal in own), rel=1e-12)
    for section in budget.sections.values():
        flow = math.fsum(budget.terminals[id_].mass_flow for id_ in section.serves)
        if len(section.run.legs) == 1:
            assert section.run.mass_flow == pytest.approx(flow, rel=1e-12)
    layout, drops = budget.run.layout, budget.run.drops
    for leg in range(len(layout.legs)):
        flow = math.fsum(drops.terminal_mass[layout.served(leg)])
        assert drops.leg_mass[leg] == pytest.approx(flow, rel=1e-12)


SETTLED_BY_TIES = {"device", "excess", "index", "authority"}


def figures(budget: Budget) -> dict[str, Any]:
    """Everything that no tie decides."""
    found: dict[str, Any] = {}
    for id_, source in budget.sources.items():
        found[id_] = {
            key: getattr(source, key)
            for key in ("flow", "mass_flow", "required", "items_drop", "discharge_required", "suction_required")
        }
    for records in (budget.sections, budget.terminals):
        for id_, record in records.items():
            values = {field.name: getattr(record, field.name) for field in dataclasses.fields(record)}
            found[id_] = {key: value for key, value in values.items() if key not in SETTLED_BY_TIES}
    return found


def assert_alike(one: Any, other: Any, floor: float, where: str = "") -> None:
    if dataclasses.is_dataclass(one) and not isinstance(one, type):
        one, other = dataclasses.asdict(one), dataclasses.asdict(other)
    if isinstance(one, dict):
        assert one.keys() == other.keys(), where
        for key, value in one.items():
            assert_alike(value, other[key], floor, f"{where}.{key}")
    elif isinstance(one, list | tuple) and where.endswith(".serves"):
        assert sorted(one) == sorted(other), where
    elif isinstance(one, list | tuple):
        assert len(one) == len(other), where
        for place, value in enumerate(one):
            assert_alike(value, other[place], floor, f"{where}.{place}")
    elif isinstance(one, float) and isinstance(other, float):
        assert one == pytest.approx(other, rel=1e-9, abs=floor, nan_ok=True), where
    else:
        assert one == other, where


@quick
@given(SEEDS, st.randoms(use_true_random=False))
def test_the_order_of_tables_decides_ties_and_nothing_else(seed: int, rng: random.Random) -> None:
    data = tomllib.loads(small_run(seed))
    shuffled = copy.deepcopy(data)
    for table in ("source", "section", "terminal", "device", "pipe", "duct"):
        entries = list(shuffled.get(table, {}).items())
        rng.shuffle(entries)
        if entries:
            shuffled[table] = dict(entries)
    one, other = written(data), written(shuffled)
    floor = 1e-9 * max(scale_of(one, id_) for id_ in one.sources)
    assert_alike(figures(one), figures(other), floor)


NOT_FRICTION = {
    *("item", "balance", "setting", "fittings", "drop", "static_drop", "neck", "at", "exponent"),
    *("rise", "outlet_pressure", "accept"),
}


def lengthened(data: Mapping[str, Any], factor: float) -> Budget:
    """A run of friction alone, with so many times its lengths."""
    scaled = copy.deepcopy(dict(data))
    description = describe(read_text(tomli_w.dumps(data)))
    for table in ("source", "section", "terminal"):
        for id_, entry in scaled[table].items():
            for key in NOT_FRICTION & entry.keys():
                del entry[key]
            if "length" in entry:
                run = description.sections[id_].run if table == "section" else description.terminals[id_].run
                assert run is not None
                assert run.length is not None
                entry["length"] = f"{run.length * factor!r} m"
    return written(scaled)


@quick
@given(SEEDS, st.sampled_from([2.0, 0.5, 3.0]))
def test_the_drops_of_a_run_of_friction_alone_are_proportional_to_its_lengths(seed: int, factor: float) -> None:
    data = tomllib.loads(small_run(seed))
    one, other = lengthened(data, 1.0), lengthened(data, factor)
    for id_, source in one.sources.items():
        assert other.sources[id_].required == pytest.approx(factor * source.required, rel=1e-9)
    for id_, section in one.sections.items():
        assert other.sections[id_].run.drop == pytest.approx(factor * section.run.drop, rel=1e-9)
    for id_, terminal in one.terminals.items():
        assert other.terminals[id_].circuit == pytest.approx(factor * terminal.circuit, rel=1e-9)


@quick
@given(SEEDS, st.randoms(use_true_random=False), st.integers(1, 9))
def test_more_fittings_never_lower_the_required_pressure(seed: int, rng: random.Random, count: int) -> None:
    data = tomllib.loads(small_run(seed))
    before = written(data)
    more = copy.deepcopy(data)
    more.setdefault("fitting", {})["extra bend"] = {"k": 0.7}
    id_ = rng.choice(list(more["section"]))
    more["section"][id_].setdefault("fittings", {})["extra bend"] = count
    after = evaluate(describe(read_text(tomli_w.dumps(more))))
    for source, found in before.sources.items():
        assert after.sources[source].required >= found.required - 1e-9 * scale_of(before, source)
    for terminal, result in before.terminals.items():
        assert after.terminals[terminal].circuit >= result.circuit - 1e-9 * scale_of(before, result.source)


@st.composite
def dimensions(draw: st.DrawFn) -> dict[str, float]:
    """Figures of one small run, in SI."""
    ranges = {
        "length": (0.5, 60.0),
        "bore": (0.02, 0.2),
        "flow": (2e-5, 5e-3),
        "drop": (100.0, 5e4),
        "celsius": (20.0, 80.0),
        "available": (1e3, 1e6),
        "kv": (0.5, 40.0),
    }
    return {name: draw(st.floats(low, high)) for name, (low, high) in ranges.items()}


SPELLED = """format = 1
[design]
title = "Spelled twice"
units = "{units}"
[fluid]
name = "water"
temperature = {temperature}
return_temperature = {back}
[defaults]
pipe = "steel"
paired = true
takeoff = "none"
[pipe.steel]
roughness = {roughness}
[limits]
velocity = {velocity}
gradient = {gradient}
[source.P1]
available = {available}
reserve = 0.1
[section.M1]
from = "P1"
bore = {bore}
length = {length}
fittings = {{ "elbow 90" = 3 }}
[terminal.T1]
from = "M1"
flow = {flow}
drop = {drop}
item = [{{ {valve} }}]
"""


@given(dimensions())
@settings(max_examples=40, deadline=None)
def test_the_same_run_in_si_and_in_ip_gives_the_same(size: dict[str, float]) -> None:
    foot, gallon, water_foot = 0.3048, 3.785411784e-3, 12 * 249.08891
    metric = worked_out(
        SPELLED.format(
            units="SI",
            temperature=size["celsius"],
            back=size["celsius"] - 10,
            roughness=0.045,
            velocity=1.5,
            gradient=250,
            available=size["available"] / 1000,
            bore=size["bore"] * 1000,
            length=size["length"],
            flow=size["flow"] * 1000,
            drop=size["drop"] / 1000,
            valve=f"kv = {size['kv']}",
        )
    )
    imperial = worked_out(
        SPELLED.format(
            units="IP",
            temperature=size["celsius"] * 1.8 + 32,
            back=(size["celsius"] - 10) * 1.8 + 32,
            roughness=0.045 / 25.4,
            velocity=1.5 / foot,
            gradient=250 / (water_foot / (100 * foot)),
            available=size["available"] / water_foot,
            bore=size["bore"] / 0.0254,
            length=size["length"] / foot,
            flow=size["flow"] / gallon * 60,
            drop=size["drop"] / water_foot,
            valve=f"cv = {size['kv'] * 1.156}",
        )
    )
    assert_alike(figures(metric), figures(imperial), 1e-6)
    assert imperial.sources["P1"].duty == pytest.approx(metric.sources["P1"].duty, rel=1e-9)
    assert [finding.code for finding in imperial.findings] == [finding.code for finding in metric.findings]


NULLABLE = {
    *("available", "in_hand", "discharge_required", "suction_required", "static_pressure", "external_total"),
    *("external_static", "shaft_power", "electrical_power", "sfp", "bore", "width", "height", "differential"),
    *("authority", "authority_low", "device", "run_out", "kv", "k", "setting", "signal", "specific_heat", "leakage"),
}


def nulls(value: Any, key: str = "") -> set[str]:
    if isinstance(value, dict):
        return set().union(*(nulls(inner, name) for name, inner in value.items()))
    if isinstance(value, list):
        return set().union(*(nulls(inner, key) for inner in value))
    return {key} if value is None else set()


def printed(text: str) -> dict[str, Any]:
    snapshot = take(read_text(text))
    found = results("0", "run.toml", snapshot.description, snapshot.budget, snapshot.findings)
    loaded: dict[str, Any] = json.loads(json.dumps(found, allow_nan=False))
    return loaded


@quick
@given(SEEDS)
def test_every_figure_of_a_valid_run_is_a_finite_number(seed: int) -> None:
    assert nulls(printed(small_run(seed))) <= NULLABLE


ODD: list[Any] = [0, -1, 1e300, "", "12,4 m", "nan", "1e400 Pa", "DN40", "P1", True, [], [[1, 2]], {}, {"k": 1}]


@settings(max_examples=50, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large])
@given(SEEDS, st.randoms(use_true_random=False))
def test_whatever_stands_in_a_file_there_is_a_result_and_a_finding(seed: int, rng: random.Random) -> None:
    text = generate(seed)
    assume(text.count("\n[section.") <= 25)
    data = tomllib.loads(text)
    for _ in range(rng.randint(1, 4)):
        spoil(data, rng)
    found = printed(tomli_w.dumps(data))
    for id_, section in found["sections"].items():
        assert all(leg["velocity"] is None or leg["velocity"] >= 0 for leg in section["legs"]), id_


def spoil(data: dict[str, Any], rng: random.Random) -> None:
    """Take a key away, give it an odd value, or that of another."""
    tables = [key for key, value in data.items() if isinstance(value, dict) and value]
    table = rng.choice(tables or list(data) or ["format"])
    ids = [id_ for key in ("source", "section", "terminal") if isinstance(data.get(key), dict) for id_ in data[key]]
    owner: Any = data
    path: list[Any] = [table]
    while True:
        value = owner.get(path[-1]) if isinstance(owner, dict) else owner[path[-1]]
        if isinstance(value, dict) and value and rng.random() < 0.9:
            owner, path = value, [*path, rng.choice(list(value))]
        elif isinstance(value, list) and value and rng.random() < 0.9:
            owner, path = value, [*path, rng.randrange(len(value))]
        else:
            break
    chance = rng.random()
    if chance < 0.3 and isinstance(owner, dict):
        owner.pop(path[-1], None)
    elif chance < 0.5 and isinstance(owner, dict) and owner:
        owner[path[-1]] = copy.deepcopy(rng.choice(list(owner.values())))
    elif chance < 0.6:
        owner[path[-1]] = rng.choice([*ids, "nowhere"])
    else:
        owner[path[-1]] = copy.deepcopy(rng.choice(ODD))
