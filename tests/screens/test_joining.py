"""Junctions and changes of area: each way to state one shows what it gives on both legs, and is one step."""

from __future__ import annotations

import math
import tomllib

import pytest

from budget.document import Document
from budget.report.figures import Figures
from budget.screens.joining import hangs_on_section, meeting, part_of
from budget.units import Dimension
from tests.screens.conftest import DUCT, SMALL, Hands, Stage

NONE_TO_STATE = SMALL.replace('takeoff = "none"\n', "")


def at_joint(text: str, id_: str) -> str:
    """Spell what a section loses where it hangs on another, computed apart from the app."""
    snapshot = Document.of(text).snapshot
    run = snapshot.budget.sections[id_].run
    return Figures(snapshot.description).text(math.fsum((run.junction, run.transition)), Dimension.PRESSURE)


@pytest.mark.parametrize(("keys", "row", "b", "c"), [
    ((), "branch", "branch", "straight"),
    (("down",), "none", "none", "straight"),
    (("down", "down"), "straight, and C branch", "straight", "branch"),
    (("down", "down", "down"), "none, and C none", "none", "none"),
])  # fmt: skip
def test_each_way_shows_the_drop_at_both_legs_and_is_what_it_then_gives(
    play: Stage, keys: tuple[str, ...], row: str, b: str, c: str
) -> None:
    first, second = DUCT.split("[section.C]")
    changed = first.replace('"branch"', f'"{b}"') + "[section.C]" + second.replace('"straight"', f'"{c}"')

    async def act(hands: Hands) -> None:
        await hands.at("B")
        await hands.press("y")
        assert hands.lines()[1].split() == ["at", "B", "Pa", "at", "C", "Pa", "required", "Pa"]
        await hands.press(*keys)
        assert hands.app.choosers["list"].marked is not None
        await hands.looked()
        shown = hands.listing(row).removeprefix(f" {row}").split()
        assert shown[:2] == [at_joint(changed, "B"), at_joint(changed, "C")]
        await hands.press("enter")
        stated = tomllib.loads(hands.text)["section"]
        assert (stated["B"]["takeoff"], stated["C"]["takeoff"]) == (b, c)
        assert f"required {shown[2]}" in hands.budget
        if hands.text != DUCT:
            assert hands.app.document.history.position == 1
            await hands.press("u")
        assert hands.text == DUCT

    play(act, DUCT)


def test_a_way_that_makes_no_junction_says_why_and_is_refused(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B")
        await hands.press("y", "up")
        assert hands.listing("straight").split() == ["straight", "-", "-", "-"]
        assert "of two legs one is the branch" in hands.screen_text
        await hands.press("enter")
        assert "does not fit" in hands.foot
        assert hands.text == DUCT

    play(act, DUCT)


def test_the_list_tells_leg_by_leg_what_a_junction_of_paired_sections_loses_and_gains(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B1")
        await hands.press("y")
        await hands.type("branch, and")
        said = " ".join(hands.screen_text.split())
        assert "B1, supply: branch of a diverging junction, 90 deg" in said
        assert "B1, return: branch of a converging junction, 90 deg" in said
        assert "B2, supply: straight of a diverging junction, 90 deg: K -" in said
        assert ", a gain, velocity of the combined flow 0.49 m/s" in said
        assert "tee-crane: Crane" in said
        await hands.press("enter")
        stated = tomllib.loads(hands.text)["section"]
        assert (stated["B1"]["takeoff"], stated["B2"]["takeoff"]) == ("branch", "straight")

    play(act, NONE_TO_STATE, size=(100, 40))


def test_a_change_of_area_is_picked_by_its_angle_or_written(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("C")
        await hands.press("w")
        assert hands.listed[:3] == ["abrupt", "15 deg", "20 deg"]
        for way, value in (("abrupt", '"abrupt"'), ("60 deg", "60")):
            changed = DUCT.replace('takeoff = "straight"\n', f'takeoff = "straight"\ntransition = {value}\n')
            await hands.looked()
            assert hands.listing(way).removeprefix(f" {way}").split()[0] == at_joint(changed, "C")
        await hands.type("25")
        assert hands.listed == ["25"]
        await hands.press("enter")
        assert tomllib.loads(hands.text)["section"]["C"]["transition"] == 25
        await hands.press("w")
        await hands.type("200")
        await hands.looked()
        assert hands.listing("200").split()[1:4] == ["-", "-", "-"]
        await hands.press("escape", "w")
        await hands.type("not stated")
        await hands.press("enter")
        assert hands.text == DUCT

    play(act, DUCT)


def test_family_and_angle_are_picked_from_the_row_detail(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B")
        for key, choice, value in (("junction", "tee-idelchik", "tee-idelchik"), ("angle", "45 deg", 45)):
            await hands.press("v")
            place = [label.strip() for label in hands.listed].index(key)
            assert hands.app.choosers["detail"].kept[place].cells[1].startswith("not stated: ")
            await hands.press(*["down"] * place, "p")
            await hands.type(choice)
            await hands.press("enter")
            assert tomllib.loads(hands.text)["section"]["B"][key] == value
            await hands.press("escape")
        assert hands.app.document.history.position == 2

    play(act, DUCT)


def test_a_finding_that_offers_a_transition_asks_which_and_sets_it(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("F")
        codes = [choice.value.code for choice in hands.app.choosers["findings"].kept]  # type: ignore[attr-defined]
        assert "area-change" in codes
        await hands.press(*["down"] * codes.index("area-change"), "p")
        await hands.type("30")
        await hands.press("enter")
        assert hands.screen == "findings"
        assert tomllib.loads(hands.text)["section"]["C"]["transition"] == 30
        codes = [choice.value.code for choice in hands.app.choosers["findings"].kept]  # type: ignore[attr-defined]
        assert "area-change" not in codes
        assert hands.foot == "transition of C: 30 deg; u takes it back"
        await hands.press("u")
        assert hands.text == DUCT

    play(act, DUCT)


def test_parts_meet_where_they_hang_on_the_same_section() -> None:
    description = Document.of(DUCT).snapshot.description
    a, b, first = (part_of(description, id_) for id_ in ("A", "B", "T1"))
    assert a is not None
    assert b is not None
    assert first is not None
    assert [part.id for part in meeting(description, b)] == ["C"]
    assert meeting(description, first) == ()
    assert not hangs_on_section(description, a)
    assert hangs_on_section(description, first)
