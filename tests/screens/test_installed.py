"""The As installed screen: flows and operating points of the headless solve, worked out beside the keyboard."""

from __future__ import annotations

import asyncio
import subprocess
import sys
import threading
from typing import Any

import numpy as np
import pytest

from budget.document import Document
from budget.network.flows import Devices, Flows, solve_flows
from budget.report.figures import Figures
from budget.report.operating import operating
from budget.screens import solving
from budget.screens.installed import Installed
from tests.screens.conftest import SMALL, Hands, Stage

PUMP = 'curve = [["0 L/s", "34 kPa"], ["0.1 L/s", "30 kPa"], ["0.2 L/s", "18 kPa"]]'
CURVE = (
    SMALL.replace("efficiency = 0.35", f"efficiency = 0.35\n{PUMP}")
    + """
[case.night]
title = "Night"
off = ["R1"]
"""
)


def board(hands: Hands) -> Installed:
    """The board in front."""
    found = hands.app.boards["installed"]
    assert isinstance(found, Installed)
    return found


async def solved(hands: Hands) -> Installed:
    """Wait until all is solved and drawn."""
    await hands.pilot._wait_for_screen()
    while board(hands).work.working:
        await asyncio.sleep(0.005)
        await hands.pilot._wait_for_screen()
    return board(hands)


def headless(text: str, devices: Devices = "given", case: str | None = None) -> Flows:
    """The flows, worked out apart from the app."""
    snapshot = Document.of(text).snapshot
    return solve_flows(snapshot.budget.run, snapshot.description.cases.get(case or ""), devices)


def assert_shown(hands: Hands, text: str, flows: Flows) -> None:
    """Every row says what was solved."""
    figures = Figures(Document.of(text).snapshot.description)
    lines = hands.lines()
    for one in flows.terminals.values():
        words = next(line for line in lines[4:] if line.lstrip("» ").startswith(f"{one.id} ")).replace("!", " ").split()
        assert figures.flow(one.flow, one.mass_flow) in words
        assert figures.flow(one.design_flow, one.design_mass_flow) in words
        assert f"{100.0 * one.share:.1f}" in words
        off = one.wanted == 0.0
        assert ("off" if off else "within" if one.within else "over" if one.share > 1.0 else "under") in words
    for source in flows.sources.values():
        assert f"{source.id} works at {figures.flow(source.flow, source.mass_flow, unit=True)}" in lines[1]
        assert figures.pressure(source.pressure, 1000.0, unit=True) in lines[1]


def test_flows_are_those_of_the_solve_in_every_way_and_case(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("I")
        await solved(hands)
        assert_shown(hands, CURVE, headless(CURVE))
        for devices in ("open", "set"):
            await hands.press("o")
            await solved(hands)
            assert_shown(hands, CURVE, headless(CURVE, devices))
        await hands.press("c")
        await solved(hands)
        assert "case night" in hands.lines()[0]
        assert_shown(hands, CURVE, headless(CURVE, "set", "night"))
        await hands.press("c", "o")
        await solved(hands)
        assert_shown(hands, CURVE, headless(CURVE, "rounded"))
        await hands.press("o")
        await solved(hands)
        assert "no case" in hands.lines()[0]

    play(act, CURVE)


def test_the_curves_meet_at_the_operating_point(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("I")
        shown = await solved(hands)
        assert shown.solved is not None
        found = shown.solved.curves["P1"]
        run = Document.of(CURVE).snapshot.budget.run
        apart = operating(run, solve_flows(run), "P1")
        assert found is not None
        assert apart is not None
        assert np.asarray(found.system) == pytest.approx(np.asarray(apart.system))
        assert (found.flow, found.pressure) in found.system
        picture = [line[45:] for line in hands.lines()[3:]]
        assert sum(line.count("●") for line in picture) == 1
        assert sum(line.count("█") for line in picture) > 15
        assert sum(line.count("·") for line in picture) > 15
        await hands.pilot.resize_terminal(70, 24)
        await hands.pilot.pause()
        assert "●" not in hands.screen_text
        assert "over" in hands.screen_text

    play(act, CURVE)


def test_an_edit_moves_the_flows_while_it_is_typed_and_undo_moves_them_back(play: Stage) -> None:
    changed = CURVE.replace("[terminal.R1]\n", "[terminal.R1]\nsetting = 0.5\n")

    async def act(hands: Hands) -> None:
        await hands.at("R1")
        await hands.press("I")
        await solved(hands)
        assert board(hands).marked == "R1"
        await hands.press("enter")
        await hands.type("0.5")
        await solved(hands)
        assert hands.place == "entry"
        assert hands.text == CURVE
        assert_shown(hands, CURVE, headless(changed))
        await hands.press("enter")
        await solved(hands)
        assert hands.app.document.snapshot.description.terminals["R1"].setting == 0.5
        assert_shown(hands, CURVE, headless(changed))
        await hands.press("u")
        await solved(hands)
        assert hands.text == CURVE
        assert_shown(hands, CURVE, headless(CURVE))

    play(act, CURVE)


def test_a_long_solve_never_holds_up_a_key_and_escape_stops_it(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    ended, stopped = threading.Event(), threading.Event()

    def long(*arguments: Any, watch: Any, **more: Any) -> Flows:
        step = 0
        try:
            while not ended.wait(0.002):
                step += 1
                watch(step, 1.0)
        except Exception:
            stopped.set()
            raise
        return solve_flows(*arguments, watch=watch, **more)

    monkeypatch.setattr(solving, "solve_flows", long)

    async def act(hands: Hands) -> None:
        await hands.press("I")
        assert hands.foot.startswith("solving...")
        assert "nothing is solved yet" in hands.lines()[1]
        await hands.press("escape")
        assert hands.screen == "installed"
        assert hands.foot.startswith("stopped")
        assert await asyncio.to_thread(stopped.wait, 2.0)
        assert not board(hands).work.working
        await hands.press("r")
        assert hands.foot.startswith("solving...")
        await hands.press("B", "down", "enter", "2", "enter")
        assert "setting = 2\n" in hands.text
        await hands.press("I")
        ended.set()
        await solved(hands)
        assert_shown(hands, hands.text, headless(hands.text))
        await hands.press("escape")
        assert hands.screen == "ledger"

    play(act)


def test_the_row_in_hand_stays_in_hand_before_there_are_flows(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    ended = threading.Event()

    def late(*arguments: Any, **more: Any) -> Flows:
        ended.wait(30.0)
        return solve_flows(*arguments, **more)

    monkeypatch.setattr(solving, "solve_flows", late)

    async def act(hands: Hands) -> None:
        await hands.at("R1")
        await hands.press("I", "L")
        assert hands.lines()[0].startswith(" Profile R1 ")
        await hands.press("I", "B")
        assert hands.app.front is hands.app.boards["balance"]
        assert hands.app.boards["balance"].marked == "R1"
        await hands.press("I")
        ended.set()
        assert (await solved(hands)).marked == "R1"

    play(act)


def test_what_can_not_be_solved_is_told(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    def broken(*_: Any, **__: Any) -> Flows:
        raise ValueError("no way")

    async def act(hands: Hands) -> None:
        await hands.press("c", "u", "I")
        monkeypatch.setattr(solving, "solve_flows", broken)
        await hands.press("o")
        await solved(hands)
        assert hands.foot == "could not be solved: no way"
        await hands.press("c")
        assert hands.foot.startswith("the run has no case")

    play(act)


LOST, SIZELESS = SMALL.replace('from = "P1"', 'from = "P9"'), SMALL.replace('size = "18 mm"', "")


@pytest.mark.parametrize("text", ["format = 1\n", "", LOST, SIZELESS], ids=["bare", "empty", "lost", "sizeless"])
def test_a_run_that_can_not_be_computed_has_every_screen_all_the_same(play: Stage, text: str) -> None:
    async def act(hands: Hands) -> None:
        for key in ("I", "B", "L", "down", "right", "K", "I", "down", "o", "enter"):
            await hands.press(key)
            await hands.pilot.pause()
        await solved(hands)
        await hands.press("escape", "escape")
        assert hands.app.return_code is None

    play(act, text)


def test_scipy_is_loaded_when_the_flows_are_first_asked_for(tmp_path: Any) -> None:
    (tmp_path / "run.toml").write_text(SMALL)
    code = f"""
import asyncio, sys
from pathlib import Path
from textual import events
from budget.document import Document
from budget.screens.app import BudgetApp
from budget.screens.config import Config
from budget.screens.themes import terminal_theme
async def main():
    document = Document.open(Path({str(tmp_path / "run.toml")!r}))
    app = BudgetApp(document, Config(), terminal_theme(), ascii_only=False, notes=())
    async with app.run_test(size=(80, 24)) as pilot:
        for key in ("B", "L"):
            app.post_message(events.Key(key, key)); await pilot.pause()
        print("scipy" in sys.modules)
        app.post_message(events.Key("I", "I")); await pilot.pause()
        while app.boards["installed"].work.working:
            await asyncio.sleep(0.01)
        print("scipy" in sys.modules)
asyncio.run(main())
"""
    ended = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert ended.stdout.split() == ["False", "True"]
