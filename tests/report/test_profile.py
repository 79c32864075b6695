"""The pressure profile, by hand, and its drawing."""

from __future__ import annotations

from pathlib import Path

import pytest

from budget.commands.opening import open_run
from budget.network import Budget
from budget.report.profile import BLOCKS, Point, Profile, bounds, draw, index_profile, terminal_profile
from tests.network.small import GAS, LIQUID, budget_of

EXAMPLES = Path(__file__).parents[2] / "examples"

HEATING = (
    LIQUID
    + """
[device.DRV]
kv = [[0, 0.001], [4, 1000]]
least_drop = 1
[source.P1]
[[source.P1.item]]
name = "Boiler"
drop = 6
[section.M]
from = "P1"
bore = 40
length = 10
[[section.M.item]]
name = "Strainer"
drop = 2
[terminal.T1]
from = "M"
flow = 0.5
drop = 12
[terminal.T2]
from = "M"
flow = 0.5
drop = 5
balance = "DRV"
"""
)


def places(profile: Profile) -> list[tuple[str, str, float]]:
    return [(point.id, point.what, point.distance) for point in profile.points]


def test_a_liquid_comes_back_to_the_inlet_with_nothing_left() -> None:
    budget = budget_of(HEATING)
    (profile,) = index_profile(budget, "P1")
    assert profile.terminal == "T1"
    assert places(profile) == [
        ("P1", "start", 0.0), ("P1", "Boiler", 0.0), ("M", "supply", 10.0), ("M", "Strainer", 10.0),
        ("T1", "terminal", 10.0), ("M", "return", 20.0),
    ]  # fmt: skip
    friction = budget.sections["M"].run.legs[0].friction
    back = budget.sections["M"].run.legs[1].friction
    totals = [20_000 + friction + back, 14_000 + friction + back, 14_000 + back, 12_000 + back, back, 0.0]
    assert [point.total for point in profile.points] == pytest.approx(totals, abs=1e-6)
    assert all(point.static is None for point in profile.points)
    assert profile.length == 20.0


def test_another_terminal_shows_its_device_at_its_setting() -> None:
    profile = terminal_profile(budget_of(HEATING), "T2")
    device = profile.points[4]
    assert (device.id, device.what) == ("T2", "DRV")
    assert profile.points[3].total - device.total == pytest.approx(7000.0)  # 1 open and 6 taken up
    assert profile.points[-1].total == pytest.approx(0.0, abs=1e-6)


DUCTS = (
    GAS
    + """
[source]
F = {}
[section]
D = { from = "F", size = "200 mm", length = 8 }
X = { to = "F", size = "200 mm", length = 4 }
[terminal]
S = { from = "D", flow = "0.1570796327 m3/s", drop = 30 }
E = { to = "X", flow = "0.1570796327 m3/s", drop = 20 }
"""
)


def test_a_gas_has_total_and_static_pressure_on_both_sides_of_its_fan() -> None:
    budget = budget_of(DUCTS)
    suction, discharge = index_profile(budget, "F")
    assert (suction.terminal, discharge.terminal) == ("E", "S")
    pv = 15.0  # 5 m/s at 1.2 kg/m3
    inlet = budget.sections["X"].run.friction
    assert [p.total for p in suction.points] == pytest.approx([0.0, -20.0, -20.0 - inlet], rel=1e-6)
    assert [p.static for p in suction.points] == pytest.approx([0.0, -20.0 - pv, -20.0 - inlet - pv], rel=1e-6)
    outlet = budget.sections["D"].run.friction
    assert [p.total for p in discharge.points] == pytest.approx([30.0 + outlet, 30.0, 0.0], rel=1e-6, abs=1e-9)
    assert [p.static for p in discharge.points] == pytest.approx([15.0 + outlet, 15.0, 0.0], rel=1e-6, abs=1e-9)
    assert [p.id for p in discharge.points] == ["F", "D", "S"]
    assert [p.id for p in suction.points] == ["E", "E", "X"]


def ends(budget: Budget) -> None:
    for id_, terminal in budget.terminals.items():
        source = budget.sources[terminal.source]
        last = terminal_profile(budget, id_).points[-1].total
        outward = budget.run.layout.description.terminals[id_].from_ is not None
        left = terminal.excess
        if source.kind == "air" and not outward:
            assert source.suction_required is not None
            left -= source.suction_required
        assert last == pytest.approx(left, abs=1e-7 * source.required)


def test_every_circuit_ends_with_its_excess() -> None:
    ends(budget_of(HEATING.replace('balance = "DRV"\n', "")))
    ends(budget_of(DUCTS))


@pytest.mark.parametrize("path", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
def test_every_circuit_of_the_examples_does(path: Path) -> None:
    one = open_run(str(path))
    assert one.snapshot is not None
    if one.status < 2:
        ends(one.snapshot.budget)


def test_an_id_that_is_none_is_refused() -> None:
    budget = budget_of(HEATING)
    with pytest.raises(KeyError):
        terminal_profile(budget, "M")
    with pytest.raises(KeyError):
        index_profile(budget, "T1")


FALL = Profile("P", "T", (
    Point(0.0, 10.0, None, "P", "start"), Point(5.0, 5.0, None, "A", "supply"),
    Point(5.0, 2.0, None, "T", "terminal"), Point(10.0, 0.0, None, "A", "return"),
))  # fmt: skip


def test_a_drawing_falls_from_the_first_to_the_last() -> None:
    # A column a metre, a row a pascal; the step stands in the column that begins at 5 m, 1.6 Pa is nearest to row 2.
    assert draw([FALL], 13, 13, ("10", "0", "0 m", "10 m")) == [
        "10|*",
        "  |**",
        "  | **",
        "  |  **",
        "  |   **",
        "  |    **",
        "  |     *",
        "  |     *",
        "  |     **",
        "  |      ***",
        " 0|--------**",
        "  +----------",
        "   0 m   10 m",
    ]


def test_a_second_profile_has_its_own_mark_and_the_first_lies_above() -> None:
    other = Profile("P", "U", (Point(0.0, 10.0, None, "P", "start"), Point(10.0, 8.0, None, "U", "supply")))
    lines = draw([FALL, other], 60, 12, ("10", "0", "0", "10"), BLOCKS)
    assert lines[0].startswith("10│█")
    assert "▒" in "".join(lines[:4])
    assert "▒" not in "".join(lines[4:])


@pytest.mark.parametrize(("width", "height"), [(0, 0), (10, 20), (80, 4), (-1, 10)])
def test_where_there_is_no_room_there_is_no_drawing(width: int, height: int) -> None:
    assert draw([FALL], width, height, ("10", "0", "0", "10")) == []


@pytest.mark.parametrize(("width", "height"), [(20, 5), (80, 24), (200, 50)])
def test_a_drawing_keeps_to_its_room(width: int, height: int) -> None:
    suction, discharge = index_profile(budget_of(DUCTS), "F")
    for profile in (suction, discharge):
        low, high, length = bounds([profile])
        lines = draw([profile], width, height, (f"{high:.0f}", f"{low:.0f}", "0 m", f"{length:.0f} m"))
        assert len(lines) == height
        assert max(map(len, lines)) <= width
        assert "*" in "".join(lines)
        assert "." in "".join(lines)


def test_nothing_is_drawn_of_nothing() -> None:
    assert bounds([]) == (0.0, 0.0, 0.0)
    assert draw([], 80, 24, ("", "", "", "")) == []
