"""The Balance screen: the schedule of the headless results, settings, readings, and what would do in a place."""

from __future__ import annotations

import asyncio

import pytest

from budget.document import Document, Snapshot
from budget.network.proposals import propose_devices, propose_kv
from budget.report.figures import Figures, plain_number
from budget.report.schedule import Row, schedule
from budget.screens import balance
from budget.screens.balance import Balance, readings_beside
from budget.screens.board import place_heads
from tests.screens.conftest import SMALL, Hands, Stage

CONTROLLED = SMALL.replace(
    '[terminal.R4]\n', '[terminal.R4]\nlocation = "Shed"\n'
) + """
[[terminal.R4.item]]
name = "Zone valve"
drop = "2.2 kPa"
at = "0.031 L/s"
control = "two-port"

[device."LV 20"]
kv = [[0, 0.2], [4, 2.4]]

[device.HOLD]
holds = "flow"
least_drop = "9 kPa"
"""  # fmt: skip
COARSE = SMALL.replace("[[0, 0.08], [1, 0.16], [2, 0.35], [3, 0.60], [4, 0.85]]", "[[3, 0.60], [4, 0.85]]")
READINGS = """
[reading.R3]
flow = "0.021 L/s"
date = 2026-03-31
[reading.R4]
flow = "0.032 L/s"
note = "valve [@click=app.quit]sticks[/] \\u001b[2J"
[reading.R1]
signal = "6.1 kPa"
"""


def board(hands: Hands) -> Balance:
    """The board in front."""
    found = hands.app.front
    assert isinstance(found, Balance)
    return found


def rows(text: str) -> tuple[Snapshot, tuple[Row, ...]]:
    """The schedule, worked out apart from the app."""
    snapshot = Document.of(text).snapshot
    return snapshot, schedule(snapshot.description, snapshot.budget, Figures(snapshot.description)).rows


def line(hands: Hands, id_: str) -> str:
    """The line of the board that begins with an ID."""
    return next(one for one in hands.lines() if one.lstrip("» ").split(" ")[0] == id_)


async def wait_for_list(hands: Hands) -> None:
    """Wait until what is worked out beside the keyboard is offered."""
    while hands.app.valves.working:
        await asyncio.sleep(0.005)
        await hands.pilot._wait_for_screen()
    await hands.press("home")
    await hands.pilot.pause()


@pytest.mark.parametrize("size", [(80, 24), (160, 40)], ids=["80x24", "160x40"])
def test_the_schedule_shows_the_figures_of_the_results(play: Stage, size: tuple[int, int]) -> None:
    snapshot, expected = rows(SMALL)
    figures = Figures(snapshot.description)

    async def act(hands: Hands) -> None:
        await hands.press("B")
        shown = [one.lstrip("» ").split(" ")[0] for one in hands.lines()[3 : 3 + len(expected)]]
        assert shown == [row.id for row in expected]
        for row in expected:
            words = line(hands, row.id).split()
            assert figures.flow(row.design_flow, row.mass_flow) in words
            assert figures.pressure(row.drop, row.density) in words
            result = snapshot.budget.terminals.get(row.id)
            if result is not None:
                assert plain_number(row.setting) in words
                assert figures.pressure(result.margin, row.density) in words
                assert line(hands, row.id).startswith("»") is result.index
        assert all(len(one) <= size[0] for one in hands.lines())

    play(act, size=size)


def test_a_setting_is_one_step_and_leads_back_to_its_row(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("B", "down", "enter")
        await hands.type("2.5")
        assert " 2.5 " in line(hands, "R3")
        assert hands.text == SMALL
        await hands.press("enter")
        assert "setting = 2.5" in hands.text
        assert "set on site at 2.5" in hands.screen_text
        assert hands.app.document.history.position == 1
        await hands.press("home", "u")
        assert hands.text == SMALL
        assert " 2.5 " not in line(hands, "R3")
        await hands.press("down", "escape")
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "R3"

    play(act)


def test_a_wrong_setting_is_told_and_a_pump_has_none(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("B", "enter")
        await hands.type("x")
        assert any("number" in one for one in hands.lines(hands.app.foot))
        await hands.press("escape", "end", "enter")
        assert hands.foot.startswith("a setting belongs to")
        await hands.press("p")
        assert hands.foot.startswith("a device belongs to")
        assert hands.text == SMALL

    play(act)


def test_what_is_out_of_its_range_has_a_sign(play: Stage) -> None:
    snapshot, expected = rows(COARSE)
    outside = {finding.owner for finding in snapshot.findings if finding.code == "device-range"}
    assert outside

    async def act(hands: Hands) -> None:
        await hands.press("B")
        for row in expected:
            assert ("-!" in line(hands, row.id)) is (row.id in outside)

    play(act, COARSE)


def test_readings_beside_the_run_are_judged_and_the_next_step_is_told(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("B")
        assert "no readings beside the run" in hands.lines()[0]
        path = readings_beside(hands.app.document.path)
        assert path is not None
        assert path.name == "run.readings.toml"
        path.write_text(READINGS)
        await hands.press("escape", "B")
        found = board(hands).schedule
        judged = {row.id: row.judged for row in found.rows if row.judged is not None}
        assert set(judged) == {"R1", "R3", "R4"}
        for id_, one in judged.items():
            words = line(hands, id_).split()
            assert f"{100.0 * one.share:.0f}" in words
            assert one.verdict in words
        assert found.next is not None
        assert any(one.startswith(f" Next: {found.next.action.capitalize()} {found.next.id}") for one in hands.lines())
        assert "[@click=app.quit]sticks[/]" in hands.screen_text
        assert "\x1b" not in hands.screen_text
        path.write_text("[reading.R9]\nflow = 1\n")
        await hands.press("B")
        assert hands.foot.startswith("readings, line 1:")
        assert "R9" in hands.foot
        path.write_bytes(b"\xff\xfe\x00")
        await hands.press("B")
        assert "readings" in hands.lines()[0]

    play(act)


def test_a_kv_is_proposed_and_taken_as_an_edit(play: Stage) -> None:
    snapshot = Document.of(CONTROLLED).snapshot
    found = propose_kv(snapshot.budget.run, "R4")
    assert found is not None

    async def act(hands: Hands) -> None:
        await hands.press("B")
        assert board(hands).go_to("R4")
        await hands.press("K")
        await wait_for_list(hands)
        figures = Figures(snapshot.description)
        for one in found.choices:
            cells = next(c.cells for c in hands.app.choosers["list"].kept if c.value == one.kv)
            assert cells[:3] == (plain_number(one.kv), figures.pressure(one.drop), plain_number(one.authority, 2))
        await hands.press("enter")
        assert f"kv = {found.choices[0].kv:g}" in hands.text
        assert 'drop = "2.2 kPa"' not in hands.text
        assert 'at = "0.031 L/s"' not in hands.text
        assert hands.screen == "balance"
        await hands.pilot.pause()
        assert hands.app.document.history.position == 1
        result = hands.app.document.snapshot.budget.terminals["R4"]
        assert result.authority == pytest.approx(found.choices[0].authority)
        await hands.press("u")
        assert hands.text == CONTROLLED
        assert board(hands).go_to("R1")
        await hands.press("K")
        assert hands.foot == "R1 has no control item"

    play(act, CONTROLLED)


def test_another_device_is_picked_with_where_it_would_be_set(play: Stage) -> None:
    snapshot = Document.of(CONTROLLED).snapshot
    found = propose_devices(snapshot.budget.run, "R2")

    async def act(hands: Hands) -> None:
        await hands.press("B")
        assert board(hands).go_to("R2")
        await hands.press("p")
        await wait_for_list(hands)
        assert hands.listed == [*(one.name for one in found), "HOLD"]
        for one in found:
            assert plain_number(one.setting) in hands.listing(one.name).split()
        await hands.type("LV 20")
        await hands.press("enter")
        await hands.pilot.pause()
        assert hands.app.document.snapshot.description.terminals["R2"].balance == "LV 20"
        assert "LV 20" in line(hands, "R2")
        await hands.press("u")
        assert hands.text == CONTROLLED

    play(act, CONTROLLED)


def test_what_is_worked_out_is_not_offered_after_something_else_was_done(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("B")
        assert board(hands).go_to("R4")
        hands.app.do("propose_kv")
        hands.app.turn_to("ledger")
        while hands.app.valves.working:
            await asyncio.sleep(0.005)
            await hands.pilot._wait_for_screen()
        assert hands.screen == "ledger"

    play(act, CONTROLLED)


def test_columns_leave_whole(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("B")
        for width in (40, 60, 80, 101, 140, 200):
            placed = place_heads(board(hands).heads, width)
            assert sum(cells for _, cells in placed) <= width - 1
            assert all(cells >= head.width for head, cells in placed)
            assert placed[0][0].key == "id"

    play(act)


def test_a_long_schedule_is_worked_out_beside_the_keyboard(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    _, expected = rows(SMALL)
    monkeypatch.setattr(balance, "MANY", 0)

    async def act(hands: Hands) -> None:
        await hands.at("R2")
        await hands.press("B")
        while board(hands).work.working:
            await asyncio.sleep(0.005)
            await hands.pilot._wait_for_screen()
        assert [row.id for row in board(hands).schedule.rows] == [row.id for row in expected]
        assert board(hands).marked == "R2"
        assert hands.foot.startswith("R2  LV 15")

    play(act)


def test_text_of_the_file_is_shown_as_it_is_on_every_board(play: Stage) -> None:
    bad = "[@click=app.quit]x[/] \\u001b]52;c;aGk=\\u0007 [/]"
    text = SMALL.replace('title = "Hall"', f'title = "{bad}"\nlocation = "{bad}"')
    text = text.replace('"LV 15"', '"L[b]V"') + f'\n[case."{bad}"]\noff = ["R4"]\n'

    async def act(hands: Hands) -> None:
        await hands.at("R1")
        for keys in (("B",), ("I", "c"), ("L",)):
            await hands.press(*keys)
            await hands.pilot.pause()
            strips = hands.app.screen._compositor.render_strips()
            shown = "\n".join("".join(segment.text for segment in strip) for strip in strips)
            assert "[@click=app.quit]x[/]" in shown
            assert shown.replace("\n", "").isprintable()

    play(act, text)
