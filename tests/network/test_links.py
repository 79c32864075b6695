"""Rings that links close: flows that balance, whichever way they run, and what a ring can't hold."""

from __future__ import annotations

import math
import subprocess
import sys

import numpy as np
import pytest

from budget.network import Budget
from budget.network.flows import solve_flows
from budget.physics.friction import friction_factor
from budget.report.explain import explain
from budget.report.json import results
from budget.report.text import text_report
from tests.network.small import GAS, LIQUID, budget_of, description_of, errors_of, evaluated_of, findings_of, places
from tests.report.arithmetic import agrees

HEAD = LIQUID + '[source.P]\n[section.M]\nfrom = "P"\nbore = 100\nlength = 20\n'


def section(id_: str, from_: str, length: float, bore: float = 50.0, more: str = "") -> str:
    return f'[section.{id_}]\nfrom = "{from_}"\nbore = {bore}\nlength = {length}\n{more}\n'


def link(from_: str, to: str, length: float, bore: float = 50.0, more: str = "") -> str:
    return f'[link.RING]\nfrom = "{from_}"\nto = "{to}"\nbore = {bore}\nlength = {length}\n{more}\n'


def terminal(id_: str, from_: str, flow: float, more: str = "") -> str:
    return f'[terminal.{id_}]\nfrom = "{from_}"\nflow = {flow}\ndrop = 5\n{more}\n'


def leg_flows(budget: Budget, id_: str) -> list[float]:
    return [leg.mass_flow for leg in budget.sections[id_].run.legs]


def test_equal_halves_of_a_ring_carry_half_each() -> None:
    # M divides into A and B, as long as each other with the link; the one load hangs at the far end of A.
    text = HEAD + section("A", "M", 60) + section("B", "M", 40) + link("B", "A", 20) + terminal("T", "A", 2)
    budget = budget_of(text)
    assert leg_flows(budget, "A") == pytest.approx([1.0, 1.0], rel=1e-7)
    assert leg_flows(budget, "B") == pytest.approx([1.0, 1.0], rel=1e-7)
    assert [leg.mass_flow for leg in budget.links["RING"].run.legs] == pytest.approx([1.0, 1.0], rel=1e-7)
    assert budget.sections["A"].run.drop == pytest.approx(
        budget.sections["B"].run.drop + budget.links["RING"].run.drop, rel=1e-7
    )
    assert leg_flows(budget, "M") == pytest.approx([2.0, 2.0])


def hardy_cross(loop: list[tuple[float, float, float, float]]) -> list[float]:
    """Flows (kg/s) of the pipes around one loop by Cross's corrections, from flows that balance at the nodes.

    A pipe is (length m, bore m, extra loss coefficient, first flow), flow positive around the loop; 1000 kg/m3,
    1 mPa s, roughness 0.05 mm. Source: H. Cross, Analysis of flow in networks of conduits or conductors (1936; from
    memory).
    """
    flows = [flow for *_, flow in loop]

    def loss(pipe: int, flow: float) -> float:
        length, bore, k, _ = loop[pipe]
        area = math.pi * bore**2 / 4
        speed = abs(flow) / (1000 * area)
        factor = float(friction_factor(np.array(speed * bore * 1e6), np.array(5e-5 / bore), np.array(64.0)))
        return math.copysign((factor * length / bore + k) * 500 * speed**2, flow)

    for _ in range(200):
        around = sum(loss(pipe, flow) for pipe, flow in enumerate(flows))
        slopes = sum((loss(pipe, flow + 1e-6) - loss(pipe, flow - 1e-6)) / 2e-6 for pipe, flow in enumerate(flows))
        flows = [flow - around / slopes for flow in flows]
    return flows


UNEVEN = (
    HEAD
    + section("A1", "M", 30, 50)
    + section("A2", "A1", 25, 40, "[[section.A2.item]]\nk = 4")
    + section("B1", "M", 55, 65)
    + section("B2", "B1", 18, 32)
    + link("A2", "B2", 35, 40, "[[link.RING.item]]\nk = 2.5")
    + terminal("T1", "A1", 1.2)
    + terminal("T2", "A2", 1.6)
    + terminal("T3", "B1", 0.4)
    + terminal("T4", "B2", 0.3)
)


def test_an_uneven_ring_is_that_of_a_loop_worked_out_by_hand() -> None:
    # Around the loop: out along A, over the link, back along B. The items stand in the supply legs.
    loop = [(30.0, 0.05, 0.0, 2.8), (25, 0.04, 4.0, 1.6), (35, 0.04, 2.5, 0.0), (18, 0.032, 0.0, -0.3)]
    loop.append((55, 0.065, 0.0, -0.7))
    a1, a2, ring, b2, b1 = hardy_cross(loop)
    budget = budget_of(UNEVEN)
    supply = {id_: leg_flows(budget, id_)[0] for id_ in ("A1", "A2", "B1", "B2")}
    assert supply == pytest.approx({"A1": a1, "A2": a2, "B1": -b1, "B2": -b2}, rel=1e-6)
    assert budget.links["RING"].run.mass_flow == pytest.approx(ring, rel=1e-6)
    assert ring < -0.1  # from B2 to A2
    back = hardy_cross([(length, bore, 0.0, flow) for length, bore, _, flow in loop])
    returning = [budget.sections[id_].run.legs[1].mass_flow for id_ in ("A1", "A2")]
    assert returning == pytest.approx(back[:2], rel=1e-6)
    assert budget.links["RING"].run.legs[1].mass_flow == pytest.approx(back[2], rel=1e-6)


def test_pressures_balance_around_every_loop_on_both_legs() -> None:
    budget = budget_of(UNEVEN)
    for leg in (0, 1):
        drops = {
            id_: run.legs[leg].friction + (run.items if leg == 0 else 0.0)
            for id_, run in [
                *((id_, found.run) for id_, found in budget.sections.items()),
                *((id_, found.run) for id_, found in budget.links.items()),
            ]
        }
        along_a, along_b = drops["A1"] + drops["A2"], drops["B1"] + drops["B2"]
        assert along_a + drops["RING"] == pytest.approx(along_b, rel=1e-6)
    # So the circuit of a terminal is the same by the other way round: that of T4 out by A and over the link, back by B.
    by_trees = budget.terminals["T4"].circuit
    main = budget.sections["M"].run.drop
    a = sum(budget.sections[id_].run.legs[0].friction + budget.sections[id_].run.items for id_ in ("A1", "A2"))
    over = budget.links["RING"].run.legs[0].friction + budget.links["RING"].run.items
    back = sum(budget.sections[id_].run.legs[1].friction for id_ in ("B1", "B2"))
    assert main + a + over + back + 5e3 == pytest.approx(by_trees, rel=1e-9)
    assert budget.run.drops.settled


BACKWARD = (
    HEAD
    + section("A", "M", 5, 80)
    + section("B1", "M", 300, 25)
    + section("B2", "B1", 40, 50, "[[section.B2.item]]\nkv = 20")
    + link("A", "B2", 10, 80)
    + terminal("T1", "B1", 1)
    + terminal("T2", "B2", 0.5)
)


def test_a_leg_may_run_backward_and_loses_as_much() -> None:
    budget = budget_of(BACKWARD)
    found = budget.sections["B2"]
    flow = found.run.mass_flow
    assert flow < -0.5
    assert found.run.friction < 0.0
    assert found.run.items == pytest.approx(-1e5 * (3.6 * -flow / 20) ** 2)
    assert found.run.legs[0].velocity > 0.0
    assert leg_flows(budget, "B1")[0] - flow == pytest.approx(1.0)
    assert not [finding for finding in budget.findings if finding.level == "error"]


DRESSED = BACKWARD.replace("length = 40", 'length = 40\nfittings = { "elbow 90" = 2 }\ntransition = "abrupt"')


@pytest.mark.parametrize("text", [UNEVEN, DRESSED])
def test_every_calculation_of_a_ring_can_be_worked_out_again(text: str) -> None:
    description, budget = description_of(text), budget_of(text)
    for id_ in budget.sections:
        for step in explain(description, budget, id_):
            if step.numbers:
                assert agrees(step.numbers, step.result), step


def test_a_cross_tie_joins_two_returns() -> None:
    text = (
        HEAD.replace("paired = true", "paired = false")
        + section("A", "M", 10)
        + section("B", "M", 10)
        + '[section.R]\nto = "P"\nbore = 100\nlength = 20\n'
        + '[section.RA]\nto = "R"\nbore = 50\nlength = 10\n[section.RB]\nto = "R"\nbore = 50\nlength = 80\n'
        + link("RB", "RA", 5)
        + terminal("TA", "A", 1, 'to = "RA"')
        + terminal("TB", "B", 1, 'to = "RB"')
    )
    budget = budget_of(text)
    near, far = leg_flows(budget, "RA")[0], leg_flows(budget, "RB")[0]
    tie = budget.links["RING"].run
    assert near + far == pytest.approx(2.0)
    assert near > 1.3
    assert far == pytest.approx(1.0 - tie.mass_flow, rel=1e-6)
    assert tie.legs[0].leg == "return"
    assert budget.sections["RB"].run.drop == pytest.approx(tie.drop + budget.sections["RA"].run.drop, rel=1e-6)
    flows = solve_flows(budget.run, devices="set")
    assert flows.links["RING"].mass_flow == pytest.approx(tie.mass_flow, rel=0.2)
    assert flows.settled


def test_a_duct_ring() -> None:
    text = (
        GAS
        + '[source.F]\n[section.S]\nfrom = "F"\nsize = "600x300"\nlength = 5\n'
        + '[section.A]\nfrom = "S"\nsize = "400"\nlength = 20\n[section.B]\nfrom = "S"\nsize = "400"\nlength = 10\n'
        + '[link.L]\nfrom = "B"\nto = "A"\nsize = "400"\nlength = 10\n'
        + '[terminal.G]\nfrom = "A"\nflow = 600\ndrop = 20\n'
    )
    budget = budget_of(text)
    assert budget.links["L"].run.mass_flow == pytest.approx(0.36, rel=1e-6)


def test_heights_of_an_open_ring_balance() -> None:
    text = (
        HEAD.replace("[source.P]", "[source.P]\nopen = true").replace("paired = true", "paired = false")
        + section("A", "M", 30, 50, "rise = 12")
        + section("B", "M", 20, 50, "rise = 4")
        + link("B", "A", 10)
        + terminal("T", "A", 2)
    )
    budget = budget_of(text)
    assert leg_flows(budget, "A") == pytest.approx([1.0], rel=1e-6)
    flows = solve_flows(budget.run)
    assert flows.links["RING"].mass_flow == pytest.approx(1.0, rel=1e-3)
    assert flows.terminals["T"].share == pytest.approx(1.0, rel=1e-4)


@pytest.mark.parametrize("text", [UNEVEN, BACKWARD])
def test_devices_set_give_every_terminal_of_a_ring_its_flow(text: str) -> None:
    valve = "[device.V]\nkv = [[0, 1e-4], [10, 1e4]]\n"
    for id_ in ("T1", "T2", "T3", "T4"):
        text = text.replace(f"[terminal.{id_}]\n", f'[terminal.{id_}]\nbalance = "V"\n')
    budget = budget_of(text + valve)
    flows = solve_flows(budget.run, devices="set", start=None)
    assert flows.settled
    for one in flows.terminals.values():
        assert one.share == pytest.approx(1.0, abs=1e-3)
    for id_, found in flows.links.items():
        assert found.mass_flow == pytest.approx(budget.links[id_].run.mass_flow, rel=1e-2)
    assert not [finding for finding in flows.findings if finding.code == "backward"]


def test_results_and_report_have_the_links() -> None:
    description, budget = description_of(BACKWARD), budget_of(BACKWARD)
    found = results("", "run.toml", description, budget, ())
    assert list(found["links"]) == ["RING"]
    assert found["links"]["RING"]["mass_flow"] == pytest.approx(budget.links["RING"].run.mass_flow)
    assert len(found["links"]["RING"]["legs"]) == 2
    report = text_report(description, budget, ())
    assert "\nLinks\n" in report
    assert any(line.split()[:3] == ["RING", "A", "B2"] for line in report.splitlines())
    plain = HEAD + terminal("T", "M", 1)
    assert "links" not in results("", "run.toml", description_of(plain), budget_of(plain), ())
    assert "\nLinks\n" not in text_report(description_of(plain), budget_of(plain), ())


def test_a_section_that_only_feeds_a_link_is_not_idle() -> None:
    text = HEAD + section("A", "M", 30) + section("B", "M", 30) + link("B", "A", 1) + terminal("T", "A", 2)
    assert errors_of(text) == []
    without = text.replace(link("B", "A", 1), "")
    assert ("no-terminal", "section.B") in errors_of(without)


SOUND = HEAD + section("A", "M", 30) + section("B", "M", 30) + terminal("T", "A", 2) + terminal("U", "B", 2)
HELD = '[device.D]\nholds = "differential"\nleast_drop = 1\n[device.V]\nkv = [[0, 1], [4, 9]]\n'


@pytest.mark.parametrize(
    ("text", "code", "place"),
    [
        (SOUND + link("A", "X", 5), "dangling", "link.RING.to"),
        (SOUND + link("A", "T", 5), "dangling", "link.RING.to"),
        (SOUND + link("A", "A", 5), "wrong-connection", "link.RING.to"),
        (SOUND + '[section.R]\nto = "M"\nbore = 50\nlength = 1\n' + link("A", "R", 5),
         "wrong-connection", "link.RING.to"),
        (
            SOUND + "[source.Q]\n" + section("C", "Q", 5) + terminal("V", "C", 1) + link("A", "C", 5),
            "wrong-connection",
            "link.RING.to",
        ),
        (SOUND.replace('[section.B]\n', '[section.B]\nbalance = "D"\n') + HELD + link("A", "B", 5),
         "wrong-connection", "link.RING.to"),
        (SOUND.replace('[section.B]\n', '[section.B]\nbalance = "V"\n') + HELD + link("A", "B", 5),
         "contradiction", "section.B.balance"),
        (SOUND + link("A", "B", 5, more='balance = "V"') + HELD, "contradiction", "link.RING.balance"),
        (SOUND + link("A", "B", 5, more='rise = 1'), "contradiction", "link.RING.rise"),
        (SOUND + link("A", "B", 5, more='takeoff = "branch"'), "contradiction", "link.RING.takeoff"),
        (SOUND + link("A", "B", 5, more="[[link.RING.item]]\ndrop = 2"), "missing", "link.RING.item.0.at"),
        (SOUND.replace("length = 30\n", "length = 30\n[[section.A.item]]\ndrop = 2\n", 1) + link("A", "B", 5),
         "missing", "section.A.item.0.at"),
        (SOUND.replace("length = 30\n", 'length = 30\n[[section.A.item]]\nkv = 20\ncontrol = "two-port"\n', 1)
         + link("A", "B", 5), "contradiction", "section.A.item.0.control"),
        (SOUND.replace("length = 30\n", "length = 30\npaired = false\n").replace(
            'from = "A"', 'from = "A"\nto = "M"').replace('from = "B"', 'from = "B"\nto = "M"')
         + link("A", "B", 5, more="paired = true"), "paired", "link.RING.paired"),
    ],
)  # fmt: skip
def test_what_a_link_can_not_be(text: str, code: str, place: str) -> None:
    assert (code, place) in errors_of(text)


def test_a_junction_in_a_ring_is_not_counted_and_said_so() -> None:
    text = (
        HEAD
        + section("A", "M", 30, more='takeoff = "straight"')
        + section("B", "M", 30, more='takeoff = "branch"')
        + terminal("T", "A", 2)
        + terminal("U", "B", 2)
    )
    assert budget_of(text).sections["B"].run.junction > 0.0
    ringed = text + link("A", "B", 5)
    assert budget_of(ringed).sections["B"].run.junction == 0.0
    found = places(findings_of(ringed), "warning")
    assert ("junction", "section.B.takeoff") in found
    assert ("junction", "section.A.takeoff") in found


def test_what_is_unknown_in_a_ring_leaves_other_sources_alone() -> None:
    lost = UNEVEN.replace('[section.A2]\nfrom = "A1"\nbore = 40\nlength = 25', '[section.A2]\nfrom = "A1"\nbore = 40')
    other = "[source.Q]\n" + section("C", "Q", 5) + terminal("V", "C", 1)
    other += section("D", "Q", 5) + terminal("W", "D", 3) + link("C", "D", 1).replace("RING", "R2")
    budget = evaluated_of(lost + other)
    assert math.isnan(budget.sections["A1"].run.mass_flow)
    assert math.isnan(budget.links["RING"].run.mass_flow)
    assert budget.links["R2"].run.mass_flow > 0.1
    assert budget.sections["M"].run.mass_flow == pytest.approx(3.5)


def test_only_links_need_scipy() -> None:
    script = (
        "import sys; from tests.network.small import budget_of; from tests.network.test_links import SOUND, link;"
        "sys.modules.pop('scipy', None); budget_of(SOUND).links; assert 'scipy.sparse' not in sys.modules;"
        "budget_of(SOUND + link('A', 'B', 5)); assert 'scipy.sparse' in sys.modules"
    )
    subprocess.run([sys.executable, "-c", script], check=True)
