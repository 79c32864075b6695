"""The Profile screen: the drawing of the headless profile, and a cursor that names what stands along it."""

from __future__ import annotations

import pytest

from budget.document import Document
from budget.report.figures import Figures
from budget.report.profile import draw, index_profile, terminal_profile
from budget.screens.profile import MARKS, ProfileBoard
from budget.units import Dimension
from tests.screens.conftest import DUCT, SMALL, Hands, Stage


def board(hands: Hands) -> ProfileBoard:
    """The board in front."""
    found = hands.app.boards["profile"]
    assert isinstance(found, ProfileBoard)
    return found


@pytest.mark.parametrize("text", [SMALL, DUCT], ids=["water", "air"])
def test_every_point_is_named_with_its_drop(play: Stage, text: str) -> None:
    snapshot = Document.of(text).snapshot
    figures, source = Figures(snapshot.description), next(iter(snapshot.budget.sources.values()))
    points = terminal_profile(snapshot.budget, source.index[0]).points

    async def act(hands: Hands) -> None:
        await hands.press("L")
        assert hands.lines()[0].startswith(f" Profile {source.index[0]} ")
        for place, point in enumerate(points):
            what, where = hands.lines()[-2:]
            assert what.startswith(f" {point.id}  {point.what}")
            assert f"at {figures.text(point.distance, Dimension.LENGTH, unit=True)}" in where
            assert f"{figures.pressure(point.total, source.fluid.density, unit=True)} behind it" in where
            assert ("static" in where) is (point.static is not None)
            if place:
                drop = points[place - 1].total - point.total
                assert f"drop {figures.pressure(drop, source.fluid.density, unit=True)}" in what
            await hands.press("right")
        assert f"point {len(points)} of {len(points)}" in hands.lines()[-1]
        await hands.press("left")
        assert f"point {len(points) - 1} of {len(points)}" in hands.lines()[-1]

    play(act, text)


def test_the_drawing_is_that_of_the_profile_with_the_index_circuit_behind_it(play: Stage) -> None:
    budget = Document.of(SMALL).snapshot.budget

    async def act(hands: Hands) -> None:
        await hands.at("R1")
        await hands.press("L")
        shown = board(hands)
        profiles = (terminal_profile(budget, "R1"), *index_profile(budget, "P1"))
        assert shown.profiles == profiles
        drawn = draw(profiles, 80, shown.size.height - 4, shown._labels(), MARKS)
        assert hands.lines()[2:-2] == [one.rstrip() for one in drawn]
        assert "index circuit, R4" in hands.lines()[1]

    play(act)


def test_another_circuit_is_a_key_away_and_follows_an_edit(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("L", "home")
        assert hands.lines()[0].startswith(" Profile R1 ")
        await hands.press("down")
        assert hands.lines()[0].startswith(" Profile R2 ")
        await hands.press("enter")
        await hands.type("R3")
        await hands.press("enter")
        await hands.pilot.pause()
        assert hands.lines()[0].startswith(" Profile R3 ")
        await hands.press("escape")
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "R3"
        await hands.at("R3")
        before = board(hands).profiles
        await hands.press("enter", "9", "enter", "L")
        await hands.pilot.pause()
        assert hands.lines()[0].startswith(" Profile R3 ")
        assert board(hands).profiles != before
        await hands.press("u")
        assert board(hands).profiles == before

    play(act)


def test_in_ascii_the_marks_differ(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("L")
        strips = hands.app.screen._compositor.render_strips()
        text = "\n".join("".join(segment.text for segment in strip) for strip in strips)
        for mark in ("#", "="):
            assert text.count(mark) > 5

    play(act, DUCT, ascii_only=True)
