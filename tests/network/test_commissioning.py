"""The order of work, flows from readings, and the next device to adjust."""

from __future__ import annotations

import pytest

from budget.description import read_text
from budget.description.readings import read_readings
from budget.network import Budget
from budget.network.commissioning import (
    Judged,
    Next,
    flow_of_signal,
    judge,
    kv_at,
    next_step,
    order_of_work,
)
from tests.network.small import GAS, LIQUID, budget_of, places

DEVICES = """
[device.DRV]
kv = [[1, 0.36], [3, 36]]
[device.ORF]
kv = [[1, 0.36], [3, 36]]
signal_kv = 3.6
[device.PIV]
holds = "flow"
least_drop = 5
"""

# Two branches: A with the index terminal A2, B nearer to the pump; a terminal C on the pump itself.
BRANCHES = (
    LIQUID
    + DEVICES
    + """
[source]
P1 = {}
[section]
M = { from = "P1", bore = 40, length = 0 }
B = { from = "M", bore = 40, length = 0, balance = "DRV" }
A = { from = "M", bore = 40, length = 0, balance = "DRV" }
[terminal]
B1 = { from = "B", flow = 1, drop = 5, balance = "DRV" }
B2 = { from = "B", flow = 1, drop = 15, balance = "DRV" }
A1 = { from = "A", flow = 1, drop = 20, balance = "DRV" }
A2 = { from = "A", flow = 2, drop = 40, balance = "ORF" }
C = { from = "P1", flow = 1, drop = 1, balance = "DRV" }
"""
)


def shares(budget: Budget, **found: float) -> dict[str, Judged]:
    """What was measured, as shares of the design flow."""
    text = "".join(
        f'[reading.{id_}]\nflow = "{share * budget.terminals[id_].flow * 1000:.12f} L/s"\n'
        for id_, share in found.items()
    )
    return judge(budget, read_readings(read_text(text), budget.run.layout.description), 0.1)[0]


def following(budget: Budget, **found: float) -> Next:
    return next_step(budget, order_of_work(budget), shares(budget, **found), 0.1)


def test_branches_come_before_mains_and_the_furthest_from_the_index_last() -> None:
    steps = order_of_work(budget_of(BRANCHES))
    assert [step.id for step in steps] == ["A2", "A1", "B2", "B1", "A", "B", "C", "P1"]
    assert [step.branch for step in steps] == ["A", "A", "B", "B", "P1", "P1", "P1", ""]
    assert [step.id for step in steps if step.reference] == ["A2", "B2", "A"]


def test_what_holds_its_flow_is_no_reference() -> None:
    text = BRANCHES.replace('drop = 40, balance = "ORF"', 'drop = 40, balance = "PIV"')
    steps = order_of_work(budget_of(text))
    assert [step.id for step in steps][:2] == ["A2", "A1"]
    assert [step.id for step in steps if step.reference] == ["A1", "B2", "A"]


def test_the_two_sides_of_a_fan_share_nothing() -> None:
    text = GAS + (
        "[source]\nF = {}\n[terminal]\n"
        'S1 = { from = "F", flow = 1, drop = 5 }\nS2 = { from = "F", flow = 1, drop = 9 }\n'
        'E1 = { to = "F", flow = 1, drop = 7 }\nE2 = { to = "F", flow = 1, drop = 3 }\n'
    )
    steps = order_of_work(budget_of(text))
    assert [(step.id, step.suction, step.reference) for step in steps] == [
        ("E1", True, True), ("E2", True, False), ("S2", False, True), ("S1", False, False), ("F", False, False),
    ]  # fmt: skip


def test_a_setting_gives_a_kv_on_its_logarithm() -> None:
    table = ((1.0, 1.0), (3.0, 4.0))
    assert kv_at(table, 2.0) == pytest.approx(2.0)
    assert kv_at(table, 3.0) == pytest.approx(4.0)
    assert kv_at(table, 3.1) is None
    assert kv_at(((1.0, 4.0), (3.0, 1.0)), 2.0) == pytest.approx(2.0)


def test_a_signal_of_one_bar_is_a_flow_of_kv() -> None:
    assert flow_of_signal(1e5, 3.6, 1000.0) == pytest.approx(0.001)
    assert flow_of_signal(25e3, 3.6, 1000.0) == pytest.approx(0.0005)
    assert flow_of_signal(0.0, 3.6, 1000.0) == 0.0


def measured(text: str) -> tuple[dict[str, Judged], list[tuple[str, str]], list[tuple[str, str]]]:
    budget = budget_of(BRANCHES)
    found, findings = judge(budget, read_readings(read_text(text), budget.run.layout.description), 0.1)
    return found, places(findings, "error"), places(findings, "warning")


def test_flows_come_from_flows_orifices_and_valves() -> None:
    found, errors, warnings = measured(
        '[reading.A2]\nsignal = "4 bar"\n[reading.A1]\nsignal = "1 bar"\nsetting = 2\n[reading.B1]\nflow = "1.2 kg/s"\n'
        "[reading.P1]\nflow = 5.4\n"
    )
    assert errors == []
    # Through the orifice, Kv 3.6: 4 bar is 2 L/s. The valve at 2 has Kv sqrt(0.36 x 36) = 3.6: 1 bar is 1 L/s.
    assert {id_: one.share for id_, one in found.items()} == pytest.approx({"A2": 1, "A1": 1, "B1": 1.2, "P1": 0.9})
    assert [one.verdict for one in found.values()] == ["within", "within", "high", "within"]
    assert warnings == [("measured-flow", "reading.B1.flow")]


def test_a_valve_is_taken_at_its_proposed_setting_where_none_is_read() -> None:
    budget = budget_of(BRANCHES)
    device = budget.terminals["A1"].device
    assert device is not None
    found, _, _ = measured(f'[reading.A1]\nsignal = "{device.signal:.9f} Pa"\n')
    assert found["A1"].share == pytest.approx(1.0)


@pytest.mark.parametrize(
    ("text", "place"),
    [
        ('[reading.M]\nsignal = "1 kPa"\n', "reading.M.signal"),
        ('[reading.P1]\nsignal = "1 kPa"\n', "reading.P1.signal"),
        ('[reading.A1]\nsignal = "1 kPa"\nsetting = 9\n', "reading.A1.setting"),
    ],
)
def test_a_signal_that_says_nothing_is_an_error(text: str, place: str) -> None:
    found, errors, _ = measured(text)
    assert found == {}
    assert errors == [("reading", place)]


def test_the_edges_of_the_tolerance_are_within() -> None:
    budget = budget_of(BRANCHES)
    found = shares(budget, A1=0.9, A2=1.1, B1=0.899, B2=1.101)
    assert [found[id_].verdict for id_ in ("A1", "A2", "B1", "B2")] == ["within", "within", "low", "high"]


def test_what_was_not_measured_is_measured_first_in_the_order_of_work() -> None:
    budget = budget_of(BRANCHES)
    assert (following(budget).action, following(budget).id) == ("measure", "A2")
    step = following(budget, A2=1.0)
    assert (step.action, step.id, step.branch) == ("measure", "A1", "A")


def test_a_terminal_is_brought_to_the_share_of_the_least_supplied_one() -> None:
    budget = budget_of(BRANCHES)
    step = following(budget, A2=0.7, A1=1.4)
    assert (step.action, step.id, step.branch, step.reference) == ("adjust", "A1", "A", "A2")
    assert (step.share, step.target) == pytest.approx((1.4, 0.7))
    assert step.flow == pytest.approx(0.0007)


def test_branches_follow_by_the_sums_of_their_terminals() -> None:
    budget = budget_of(BRANCHES)
    step = following(budget, A2=0.7, A1=0.7, B2=1.3, B1=1.3, C=0.7)
    assert (step.action, step.id, step.branch, step.reference) == ("adjust", "B", "P1", "A")
    assert (step.share, step.target) == pytest.approx((1.3, 0.7))


def test_the_source_comes_last_and_puts_all_between_the_ends() -> None:
    budget = budget_of(BRANCHES)
    step = following(budget, A2=1.2, A1=1.2, B2=1.25, B1=1.25, C=1.3)
    assert (step.action, step.id) == ("source", "P1")
    # Of 6 L/s: 3 x 1.2 + 2 x 1.25 + 1.3 = 7.4; to be divided by the middle of 1.2 and 1.3.
    assert (step.share, step.target) == pytest.approx((7.4 / 6, 7.4 / 6 / 1.25))
    assert step.flow == pytest.approx(0.0074 / 1.25)


def test_where_all_is_within_there_is_nothing_to_do() -> None:
    budget = budget_of(BRANCHES)
    assert following(budget, A2=0.91, A1=1.09, B2=1.0, B1=1.0, C=1.0).action == "done"


def test_what_no_device_can_put_right_is_to_be_looked_after() -> None:
    budget = budget_of(BRANCHES)
    step = following(budget, A2=0.0, A1=1.0)
    assert (step.action, step.id) == ("look", "A2")
    held = budget_of(BRANCHES.replace('drop = 40, balance = "ORF"', 'drop = 40, balance = "PIV"'))
    step = following(held, A2=0.5, A1=1.0, B1=1.0, B2=1.0, C=1.0)
    assert (step.action, step.id) == ("look", "A2")
    bare = budget_of(BRANCHES.replace('drop = 1, balance = "DRV"', "drop = 1"))
    step = following(bare, A2=0.95, A1=0.95, B1=0.95, B2=0.95, C=2.0)
    assert (step.action, step.id) == ("look", "C")


def test_following_the_proposals_ends_with_every_flow_within() -> None:
    """A toy site: throttling one pushes its flow to the others in proportion, setting the pump scales all."""
    budget = budget_of(BRANCHES)
    ids = ("A2", "A1", "B2", "B1", "C")
    now = dict(zip(ids, (0.5, 1.1, 1.3, 1.9, 2.4), strict=True))
    branch = {"A": ("A2", "A1"), "B": ("B2", "B1")}
    done = []
    for _ in range(30):
        step = following(budget, **now)
        done.append(step.action)
        if step.action == "done":
            break
        assert step.action in ("adjust", "source")
        moved = branch.get(step.id, (step.id,)) if step.action == "adjust" else ids
        factor = step.target / step.share
        now = {id_: share * (factor if id_ in moved else 1.02) for id_, share in now.items()}
    assert done[-1] == "done"
    assert done[-2] == "source"
    assert all(0.9 <= share <= 1.1 for share in now.values())


def test_the_order_of_the_file_changes_nothing_but_ties() -> None:
    lines = BRANCHES.splitlines()
    first = lines.index("[terminal]") + 1
    turned = "\n".join([*lines[:first], *reversed(lines[first:])])
    before, after = (order_of_work(budget_of(text)) for text in (BRANCHES, turned))
    assert [(step.id, step.branch, step.reference) for step in before] == [
        (step.id, step.branch, step.reference) for step in after
    ]


def test_a_set_point_is_put_right_before_the_branches_outside() -> None:
    text = BRANCHES.replace("[source]", '[device.DPV]\nholds = "differential"\nleast_drop = 2\n[source]')
    budget = budget_of(text.replace('length = 0, balance = "DRV" }\nA', 'length = 0, balance = "DPV" }\nA'))
    assert [step.id for step in order_of_work(budget)] == ["A2", "A1", "B2", "B1", "A", "B", "C", "P1"]
    step = following(budget, A2=1.0, A1=1.0, B2=1.5, B1=1.5, C=1.0)
    assert (step.action, step.id) == ("adjust", "B")
