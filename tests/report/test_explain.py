"""Every printed calculation, worked out again as it stands, gives its result; and the result is the product's own."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Mapping
from itertools import pairwise
from pathlib import Path

import pytest

from budget.commands.opening import open_run
from budget.description import read_text
from budget.document import Snapshot, take
from budget.report.explain import Step, explain, explain_text
from budget.report.figures import NONE
from budget.report.plain import plain
from tests.description.mutations import TEXTS
from tests.description.sound import SOUND, SOUND_AIR, SOUND_OPEN
from tests.description.test_faults import GROUPS
from tests.independent.runs import generate
from tests.report.arithmetic import Worked, agrees, read, worked_out
from tests.report.rich import RICH, RICH_AIR, RICH_OPEN

EXAMPLES = sorted((Path(__file__).parents[2] / "examples").glob("*.toml"))
OWN = {"liquid": RICH, "air": RICH_AIR, "open": RICH_OPEN, "sound": SOUND, "sound air": SOUND_AIR, "rise": SOUND_OPEN}


def of(text: str) -> Snapshot:
    return take(read_text(text))


def example(path: Path) -> Snapshot:
    snapshot = open_run(str(path)).snapshot
    assert snapshot is not None
    return snapshot


def ids(snapshot: Snapshot) -> list[str]:
    described = snapshot.description
    return [*described.sources, *described.sections, *described.terminals]


def steps(snapshot: Snapshot, id_: str) -> tuple[Step, ...]:
    return explain(snapshot.description, snapshot.budget, id_)


def every(snapshot: Snapshot) -> Iterator[tuple[str, Step]]:
    for id_ in ids(snapshot):
        for step in steps(snapshot, id_):
            yield id_, step


def assert_worked_out(snapshot: Snapshot) -> int:
    """See that every calculation of a run comes out; return how many there are."""
    count = 0
    for id_, step in every(snapshot):
        if step.numbers:
            count += 1
            assert agrees(step.numbers, step.result), (id_, step)
    return count


@pytest.mark.parametrize("path", EXAMPLES, ids=lambda path: path.stem)
def test_every_calculation_of_an_example_comes_out(path: Path) -> None:
    assert assert_worked_out(example(path)) > 50


@pytest.mark.parametrize("name", OWN)
def test_every_calculation_of_every_form_comes_out(name: str) -> None:
    snapshot = of(OWN[name])
    assert not [one for one in snapshot.findings if one.level.value == "error"], snapshot.findings
    assert assert_worked_out(snapshot) > 50
    lost = {(id_, step.title) for id_, step in every(snapshot) if "can't be computed" in step.source}
    assert lost == set()


@pytest.mark.parametrize("seed", [3, 6, 9, 16, 22])
def test_every_calculation_of_a_random_run_comes_out(seed: int) -> None:
    assert assert_worked_out(of(generate(seed))) > 100


def test_what_is_worked_out_again_would_tell_a_wrong_figure() -> None:
    """One part in two thousand more in any result of a product is no longer the printed one."""
    told = 0
    for path in EXAMPLES:
        for _, step in every(example(path)):
            digits = step.result.split(" ")[0]
            if not step.numbers or " x " not in step.numbers or len(digits.replace(".", "").lstrip("-0")) < 5:
                continue
            wrong = f"{float(digits) * 1.002:.{len(digits.partition('.')[2])}f}"
            told += 1
            assert not agrees(step.numbers, step.result.replace(digits, wrong, 1)), step
    assert told > 1000


def test_the_check_itself_knows_units_operators_and_rounding() -> None:
    assert worked_out("2 x 3 kPa + |-4 Pa|^2").value == pytest.approx(6016.0)
    assert worked_out("max(1 kPa, 20 mbar)").value == pytest.approx(2000.0)
    assert worked_out("pi / 4 x (41.9 mm)^2").value == pytest.approx(math.pi / 4 * 0.0419**2)
    assert worked_out("62.4 lb/ft3 x 32.174 ft/s2 x 10 ft").value == pytest.approx(29890, rel=1e-3)
    assert worked_out("1.2346 kPa").slack == pytest.approx(0.05)
    assert worked_out("2 x 12.346 kPa").slack == pytest.approx(1.0)
    assert worked_out("2 x 14.5 kPa").slack == 0.0
    assert read("-0.12 kPa (0.012 m of the fluid)").value == -120.0
    assert not agrees("2 x 12.346 kPa", "24.70 kPa")
    with pytest.raises(AssertionError):
        worked_out("2 x margin")


def results(found: tuple[Step, ...]) -> Mapping[str, list[Worked]]:
    """The results of steps in SI, by their titles."""
    by_title: dict[str, list[Worked]] = {}
    for step in found:
        if re.match(r"-?\d", step.result) and "degC" not in step.result:
            by_title.setdefault(step.title, []).append(read(step.result))
    return by_title


RUNS = [*(pytest.param(path, id=path.stem) for path in EXAMPLES), *OWN]


def snapshot_of(run: Path | str) -> Snapshot:
    return example(run) if isinstance(run, Path) else of(OWN[run])


@pytest.mark.parametrize("run", RUNS)
def test_the_results_of_a_section_are_its_figures(run: Path | str) -> None:
    snapshot = snapshot_of(run)
    for id_, result in snapshot.budget.sections.items():
        found = results(steps(snapshot, id_))
        for place, leg in enumerate(result.run.legs):
            for title, value in (
                ("mass flow", leg.mass_flow),
                ("velocity", leg.velocity),
                ("velocity pressure", leg.velocity_pressure),
                ("Reynolds number", leg.reynolds),
                ("friction factor", leg.friction_factor),
                ("gradient", leg.gradient),
                ("friction", leg.friction),
            ):
                if not math.isnan(value):
                    assert_same(found[title][place], value, (id_, title))
        for title, value in (
            ("drop", result.run.drop),
            ("sum so far", result.cumulative),
            ("margin", result.margin),
        ):
            if not math.isnan(value):
                assert_same(found[title][-1], value, (id_, title))
        device = result.device
        figures: tuple[tuple[str, float | None], ...] = (
            ("differential", result.differential),
            ("authority", result.authority),
            ("low authority", result.authority_low),
            ("take-up", device.take_up if device else None),
            ("base drop", device.base if device else None),
            ("drop as set", device.drop if device else None),
            ("setting", device.setting if device else None),
        )
        for title, figure in figures:
            if figure is not None and not math.isnan(figure):
                assert_same(found[title][0], figure, (id_, title))
            else:
                assert title not in found
        for item in result.items:
            assert any(close(value, item.drop) for value in found[plain(item.name)])


@pytest.mark.parametrize("run", RUNS)
def test_the_results_of_a_terminal_are_its_figures_and_its_circuit_adds_up(run: Path | str) -> None:
    snapshot = snapshot_of(run)
    for id_, result in snapshot.budget.terminals.items():
        found = steps(snapshot, id_)
        by_title = results(found)
        if math.isnan(result.circuit):
            continue
        assert_same(by_title["mass flow"][0], result.mass_flow, id_)
        assert_same(by_title["drop"][0], result.drop, id_)
        for title, value in (
            ("circuit", result.circuit),
            ("margin", result.margin),
            ("excess", result.excess),
            ("differential", result.differential),
        ):
            if value is not None:
                assert_same(by_title[title][0], value, (id_, title))
        titles = [step.title for step in found]
        listed = found[titles.index("circuit") + 1 : len(titles) - titles[::-1].index("circuit") - 1]
        own = [read(step.result).value for step in listed]
        legs = [step for step in listed if not step.title.endswith("itself")]
        kind = snapshot.budget.sources[result.source].kind
        items = 0.0 if kind == "air" else snapshot.budget.sources[result.source].items_drop
        assert sum(own) + items == pytest.approx(result.circuit, rel=2e-4, abs=1.0)
        run_out = 0 if result.run_out is None else len(result.run_out.legs)
        assert len(legs) == len(result.path) + run_out


@pytest.mark.parametrize("run", RUNS)
def test_the_results_of_a_source_are_its_figures(run: Path | str) -> None:
    snapshot = snapshot_of(run)
    for id_, result in snapshot.budget.sources.items():
        found = results(steps(snapshot, id_))
        for title, value in (
            ("mass flow", result.mass_flow),
            ("flow", result.flow),
            ("required", result.required),
            ("duty", result.duty),
            ("reserve", result.reserve),
            ("duty flow", result.duty_flow),
            ("in hand", result.in_hand),
            ("hydraulic power", result.hydraulic_power),
            ("shaft power", result.shaft_power),
            ("electrical power", result.electrical_power),
            ("specific power", result.sfp),
            ("external total", result.external_total),
            ("external static", result.external_static),
            ("fan static pressure", result.static_pressure if result.kind == "air" else None),
            ("leakage", result.leakage),
        ):
            if value is not None and not math.isnan(value):
                assert_same(found[title][0], value, (id_, title))
        for heading, value in result.spent.items():
            if value:
                assert any(close(one, value) for one in found[heading])


def close(got: Worked, want: float) -> bool:
    """Whether a printed result is a figure, rounded to the digits printed."""
    return abs(got.value - want) <= 1.001 * got.slack + 1e-9 * abs(want)


def assert_same(got: Worked, want: float, where: object) -> None:
    assert close(got, want), (where, got, want)


def shown(text: str, id_: str) -> str:
    snapshot = of(text)
    return explain_text(snapshot.description, snapshot.budget, id_)


def one_line(text: str) -> str:
    return " ".join(text.split())


def test_a_section_is_explained_leg_by_leg_with_its_sources() -> None:
    text = shown(RICH, "M1")
    assert text.startswith("section M1\n\nCross-section\n")
    assert text.index("\nM1, supply leg\n") < text.index("\nM1, return leg\n") < text.index("\nThe section\n")
    for said in (
        "undiversified flow: M = m(T1) + m(T2) + m(T3) + m(T4)",
        "mass flow: m = diversity x M",
        "propylene glycol 30 % by volume at 7 degC",
        "K of elbow 90: K = constant + K1 / Re",
        "hooper; Hooper, ",
        "counts as distribution",
        "(equivalent length in M1, supply",
        "2 in parallel",
    ):
        assert said.strip("(") in one_line(text), said


def test_junctions_and_changes_of_area_show_their_ratios_and_family() -> None:
    text = one_line(shown(RICH, "B2"))
    for said in (
        "flow ratio of the junction: m(B2) / (m(B2) + m(B1))",
        "area ratio of the junction: A(B2) / A(M1)",
        "tee-idelchik at flow ratio",
        "60 deg",
        "on the velocity of the combined flow",
        "contraction between M1, supply and B2, supply",
        "measured on site",
        "stated in [pipe.own]",
    ):
        assert said in text, said


def test_each_regime_is_explained_by_its_law() -> None:
    text = shown(RICH, "T4")
    assert "f = C / Re\n    = 64 / " in text
    assert "Colebrook" not in text
    slow = RICH.replace('flow = "0.003 L/s"', 'flow = "0.16 L/s"')
    run_out = of(slow).budget.terminals["T4"].run_out
    assert run_out is not None
    assert {leg.regime for leg in run_out.legs} == {"transitional"}
    text = one_line(shown(slow, "T4"))
    assert "w = s^2 x (3 - 2 x s)" in text
    assert "f = laminar + w x (turbulent - laminar)" in text
    assert "no published law is reliable there" in text


def test_a_fan_is_explained_in_ip_units_with_its_leakage_and_flexible_duct() -> None:
    text = one_line(shown(RICH_AIR, "S1"))
    for said in ("D = 2 x W x H / (W + H)", "leakage, ATC 3: f x |ps|^0.65 x S", "cfm", "fpm", "inH2O/100ft", "ft2"):
        assert said in text, said
    assert "K90 x factor of Re" in text
    assert "D = 4 x A / (pi x a + 2 x (b - a))" in shown(RICH_AIR, "S2")
    assert "F = 1 + 0.58 x r x exp(-0.00496 x D)" in shown(RICH_AIR, "G2")
    assert "stated in [duct.rough]" in shown(RICH_AIR, "X1")
    assert "static drop x (q / at)^exponent + pv" in shown(RICH_AIR, "G1")
    assert "|static drop| - pv" in shown(RICH_AIR, "L1")
    assert "that of the other side" in shown(RICH_AIR, "L1")
    assert "(clean + final) / 2" in shown(RICH_AIR, "SF")


def test_heads_stand_beside_pressures_and_flows_by_mass() -> None:
    text = shown(RICH_OPEN, "CT1")
    assert re.search(r"= [0-9.]+ kPa \([0-9.]+ m of the fluid\)", text)
    assert "kg/h" in text
    assert "rho x g x rise" in text
    assert "9.80665 m/s2" in text


def test_a_device_of_a_library_says_where_it_comes_from() -> None:
    path = next(path for path in EXAMPLES if path.stem == "three-floor-heating")
    snapshot = example(path)
    text = explain_text(snapshot.description, snapshot.budget, "FC-111")
    assert "from office/valves.toml" in text


def test_the_text_is_narrow_plain_and_without_trailing_blanks() -> None:
    for text in (RICH, RICH_AIR, RICH_OPEN):
        snapshot = of(text)
        for id_ in ids(snapshot):
            lines = explain_text(snapshot.description, snapshot.budget, id_).split("\n")
            assert max(map(len, lines)) <= 100
            assert all(line == line.rstrip() and (line.isascii() and line.isprintable()) for line in lines)
            assert not any(one == other == "" for one, other in pairwise(lines))


def test_names_can_not_write_to_the_terminal() -> None:
    text = RICH.replace("section.B1", 'section."B\\u001b[2J"').replace('from = "B1"', 'from = "B\\u001b[2J"')
    snapshot = of(text)
    for id_ in ids(snapshot):
        assert "\x1b" not in explain_text(snapshot.description, snapshot.budget, id_)


def test_what_can_not_be_computed_is_a_dash_and_says_so() -> None:
    snapshot = of(RICH.replace('length = "6 m"\ntakeoff', 'length = "6 kg"\ntakeoff'))
    found = {step.title: step for step in steps(snapshot, "B1") if step.result == NONE}
    assert {"friction", "loss of the leg", "drop"} <= set(found)
    assert all(not step.numbers for step in found.values())
    assert {step.source for step in found.values()} == {"can't be computed: a finding says why"}
    assert assert_worked_out(snapshot) > 50


def test_what_hangs_on_nothing_says_so() -> None:
    snapshot = of(RICH.replace('[section.B1]\nfrom = "M1"', '[section.B1]\nfrom = "M9"'))
    assert steps(snapshot, "B1")[0].source == "it hangs on no source: a finding says why"
    assert steps(snapshot, "T1")[0].result == NONE
    with pytest.raises(KeyError):
        steps(snapshot, "M9")
    with pytest.raises(KeyError):
        explain_text(snapshot.description, snapshot.budget, "M9")


FAULTY = [fault.text for group in GROUPS.values() for fault in group]


@pytest.mark.long
def test_no_fault_keeps_the_rest_from_being_explained() -> None:
    count = 0
    for text in (*FAULTY, *TEXTS):
        snapshot = of(text)
        if snapshot.readable:
            for id_ in ids(snapshot):
                count += len(explain_text(snapshot.description, snapshot.budget, id_).split("\n"))
    assert count > 10_000


@pytest.mark.parametrize("text", FAULTY[::9])
def test_the_calculations_of_a_faulty_run_come_out_where_they_can(text: str) -> None:
    snapshot = of(text)
    if snapshot.readable:
        assert_worked_out(snapshot)
