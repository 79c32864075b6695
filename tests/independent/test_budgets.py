"""Whole budgets against plain loops that know nothing of the product.

Fluid properties are taken from the product (they are checked against published rows elsewhere); everything else, from
the connection rules to the duty, is worked out twice.
"""

from __future__ import annotations

import json
from collections import Counter
from typing import Any

import pytest

from budget.description import read_text
from budget.document import take
from budget.report.json import results
from tests.independent.loops import evaluate
from tests.independent.runs import features, generate

RELATIVE = 1e-6
FAST, ALL = 40, 240

FIGURES = {
    "sources": (
        *("flow", "mass_flow", "required", "static", "reserve", "duty", "duty_flow", "available", "in_hand", "items"),
        *("discharge_required", "suction_required", "static_pressure", "external_total", "external_static"),
        *("hydraulic_power", "shaft_power", "electrical_power"),
    ),
    "sections": (
        *("flow", "mass_flow", "hydraulic_diameter", "area", "friction", "fittings", "items", "static", "drop"),
        *("cumulative", "differential", "margin"),
    ),
    "terminals": (*("flow", "mass_flow", "circuit", "drop", "items", "static", "differential", "margin", "excess"),),
}
WANTED = {
    *("closed", "open", "air", "both sides", "several sources", "SI", "IP", "water", "propylene glycol", "custom gas"),
    *("paired", "reverse return", "joined risers", "run-out", "run-out from and to", "suction from a tank"),
    *("round", "rectangular", "oval", "flexible", "bore", "own pipe", "slow", "unequal legs", "diversity"),
    "load",
    *("item k", "item kv", "item cv", "item drop at", "item equivalent_length", "item filter", "item tested"),
    "parallel",
    *("device kv", "device cv", "device k", "holds flow", "holds differential", "nested differentials", "static drop"),
}
DEVICE = ("base", "take_up", "drop", "kv", "k", "setting", "signal")
RUN_OUT = ("friction", "fittings", "drop", "mass_flow")
LEG = ("mass_flow", "velocity", "velocity_pressure", "reynolds", "friction_factor", "gradient", "friction")


class Comparison:
    """Collects the figures in which two results of one run differ."""

    def __init__(self, got: dict[str, Any], want: dict[str, Any]) -> None:
        self.got, self.want = got, want
        self.wrong: list[str] = []
        # A margin is a difference of circuits: rounding in it is that of the required pressure.
        self.floor = 1e-9 * max((abs(source["required"]) for source in want["sources"].values()), default=0.0)

    def run(self) -> list[str]:
        for table, figures in FIGURES.items():
            assert list(self.got[table]) == list(self.want[table])
            for id_, want in self.want[table].items():
                got = self.got[table][id_]
                for figure in figures:
                    if figure in want:
                        self.same(f"{table}.{id_}.{figure}", got[figure], want[figure])
                for figure in ("index", "serves", "path", "kind"):
                    if figure in want and got[figure] != _plain(want[figure]):
                        self.wrong.append(f"{table}.{id_}.{figure}: {got[figure]} is not {want[figure]}")
                self.parts(f"{table}.{id_}", got, want)
        return self.wrong

    def parts(self, where: str, got: dict[str, Any], want: dict[str, Any]) -> None:
        if want.get("device"):
            for figure in DEVICE:
                self.same(f"{where}.device.{figure}", got["device"].get(figure), want["device"].get(figure))
        if want.get("run_out"):
            for figure in RUN_OUT:
                self.same(f"{where}.run_out.{figure}", got["run_out"][figure], want["run_out"][figure])
        for leg, expected in zip(got.get("legs", ()), want.get("legs", ()), strict=True):
            assert (leg["leg"], leg["regime"]) == (expected["leg"], expected["regime"])
            for figure in LEG:
                self.same(f"{where}.{leg['leg']}.{figure}", leg[figure], expected[figure])
        for heading, spent in got.get("spent", {}).items():
            self.same(f"{where}.spent.{heading}", spent, want["spent"].get(heading, 0.0))

    def same(self, where: str, got: float | None, want: float | None) -> None:
        if got is None or want is None:
            if got is not want:
                self.wrong.append(f"{where}: {got} is not {want}")
            return
        if abs(got - want) > RELATIVE * max(abs(got), abs(want)) + self.floor:
            self.wrong.append(f"{where}: {got} is not {want}")


def _plain(value: Any) -> Any:
    return list(value) if isinstance(value, tuple) else value


def compare(seed: int) -> tuple[list[str], frozenset[str]]:
    text = generate(seed)
    snapshot = take(read_text(text))
    printed = results("0", "run.toml", snapshot.description, snapshot.budget, snapshot.findings)
    got = json.loads(json.dumps(printed, allow_nan=False))
    assert not [finding for finding in got["findings"] if finding["level"] == "error"], seed
    fluids = {id_: source.get("fluid", got["fluid"]) for id_, source in got["sources"].items()}
    return Comparison(got, evaluate(text, fluids)).run(), features(text)


@pytest.mark.parametrize("seed", range(FAST))
def test_a_run_agrees_with_plain_loops(seed: int) -> None:
    wrong, _ = compare(seed)
    assert wrong == []


@pytest.mark.long
def test_240_runs_agree_with_plain_loops_and_hold_every_feature() -> None:
    seen: Counter[str] = Counter()
    for seed in range(ALL):
        wrong, holds = compare(seed)
        assert wrong == [], seed
        seen.update(holds)
    rare = {feature: count for feature, count in seen.items() if count < 3}
    assert rare == {}
    assert seen.keys() >= WANTED
