"""Fittings: what is offered for the section in hand, with what it would cost; parameters are asked for in a form."""

from __future__ import annotations

import tomllib
from typing import Any

import pytest

from budget.catalogue import kind_names
from budget.document import Document
from budget.report.figures import Figures, plain_number
from budget.screens.runs import losses_of
from budget.units import Dimension
from tests.screens.conftest import DUCT, SMALL, Hands, Stage

ELBOW = "elbow smooth rectangular"


def entries(text: str, table: str = "section", id_: str = "A") -> list[dict[str, Any]]:
    """Return the fittings with parameters as they stand in a text."""
    found: list[dict[str, Any]] = tomllib.loads(text)[table][id_].get("fitting", [])
    return found


def cost(text: str, id_: str, place: int) -> tuple[str, str]:
    """Spell coefficient and drop of a fitting of a section, computed apart from the app."""
    snapshot = Document.of(text).snapshot
    run = snapshot.description.sections[id_].run
    found = losses_of(snapshot.budget.sections[id_].run, len(run.fittings) + len(run.uses))[place]
    assert found is not None
    return plain_number(found.loss.k), Figures(snapshot.description).text(found.drop, Dimension.PRESSURE)


def test_what_fits_the_section_is_offered_what_stands_there_first(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("A")
        await hands.press("f")
        assert hands.listed[0] == ELBOW
        assert hands.listed[1] == "shoe tap"
        assert {"damper opposed blades", "elbow mitred vaned", "exit"} <= set(hands.listed)
        assert not {"gate valve", "elbow 90", "damper round blade", "elbow gored"} & set(hands.listed)
        k, drop = cost(DUCT, "A", 0)
        assert hands.lines()[2].split()[3:6] == ["2", k, f"{float(drop) / 2:.1f}"]
        await hands.press("escape")
        await hands.at("B")
        await hands.press("f")
        assert {"damper round blade", "elbow gored"} <= set(hands.listed)
        assert not {"damper opposed blades", ELBOW} & set(hands.listed)
        await hands.type("gored 5")
        assert hands.listed == []
        await hands.press("ctrl+u")
        await hands.type("dampers")
        assert hands.listed == ["damper round blade"]

    play(act, DUCT)


def test_a_pipe_is_offered_pipe_fittings_and_a_leg_of_a_junction_no_tee(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B1")
        await hands.press("f")
        assert hands.listed[0] == "elbow 90"
        assert {"tee branch", "globe valve", "bend", "orifice plate"} <= set(hands.listed)
        assert not set(kind_names("duct")) & set(hands.listed)
        assert "both legs" in hands.lines()[1]
        await hands.press("escape")
        await hands.at("B1")
        await hands.press("y", "down", "down", "down", "down", "enter")
        assert 'takeoff = "branch"' in hands.text
        await hands.at("B1")
        await hands.press("f")
        assert not any(name.startswith("tee ") for name in hands.listed)

    play(act)


def test_the_marked_one_tells_method_velocity_source_and_how_it_is_known(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("f")
        said = " ".join(hands.screen_text.split())
        assert "by size, velocity in the section 0.49 m/s" in said
        assert "read in print or public data, in part from memory; confidence high" in said
        assert "source: Hydraulic Institute engineering data" in said
        await hands.type("orifice")
        assert "bore_ratio must be stated: Enter asks for it" in hands.screen_text
        assert hands.listing("orifice plate").split()[2:4] == ["-", "-"]

    play(act)


def test_parameters_are_asked_for_with_meaning_range_and_default_and_entered_as_one_step(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("A", "drop")
        await hands.press("f")
        await hands.type("smooth rect")
        await hands.press("down", "enter")
        assert hands.screen == "form"
        assert "0.5 to 2; must be stated" in hands.screen_text
        assert "width or height; must be stated" in hands.screen_text
        assert "0 to 180 deg; default 90" in hands.screen_text
        assert "centre-line radius" in hands.screen_text
        assert "ASHRAE" in hands.screen_text
        await hands.type("1.5")
        assert "state plane" in hands.screen_text
        await hands.press("enter")
        assert hands.screen == "form"
        await hands.press("tab", "right")
        changed = DUCT.replace("count = 2\n", f'count = 2\n\n[[section.A.fitting]]\nkind = "{ELBOW}"\n'
                               'radius_ratio = 1.5\nplane = "width"\n')  # fmt: skip
        k, drop = cost(changed, "A", 1)
        assert f"K {k}   drop of one {drop} Pa   velocity in the section 4.75 m/s" in hands.screen_text
        assert hands.text == DUCT
        assert f"required +{drop} Pa" in hands.budget
        await hands.press("enter")
        assert hands.screen == "ledger"
        assert hands.text == changed
        assert hands.app.document.history.position == 1
        await hands.press("u")
        assert hands.text == DUCT

    play(act, DUCT)


def test_an_entry_is_changed_and_taken_out_from_the_same_place(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("A")
        await hands.press("f", "enter")
        assert f"{ELBOW} on A" in hands.screen_text
        await hands.type("1.25")
        await hands.press("tab", "right", "tab")
        await hands.type("45")
        await hands.press("enter")
        wanted = {"kind": ELBOW, "radius_ratio": 1.25, "plane": "height", "count": 2, "angle": 45}
        assert entries(hands.text) == [wanted]
        assert hands.app.document.history.position == 1
        await hands.press("f", "right", "enter")
        assert entries(hands.text) == [wanted | {"count": 3}]
        await hands.press("f", "enter", "up")
        await hands.type("0")
        assert "takes the fitting out" in hands.screen_text
        await hands.press("enter")
        assert entries(hands.text) == []
        await hands.press("u", "u", "u")
        assert hands.text == DUCT
        await hands.press("f", "delete", "enter")
        assert entries(hands.text) == []

    play(act, DUCT)


def test_what_can_t_stand_is_told_and_escape_leaves_things_as_they_were(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("A")
        before = hands.budget
        await hands.press("f", "enter")
        await hands.type("1.5 m")
        assert "a plain number" in hands.screen_text
        assert hands.budget == before
        await hands.press("enter")
        assert hands.screen == "form"
        await hands.press("ctrl+u")
        await hands.type("7")
        assert "outside what was published" in hands.screen_text
        assert "required" in hands.budget
        await hands.press("up")
        await hands.type("many")
        assert "a whole number" in hands.screen_text
        await hands.press("escape")
        assert hands.screen == "list"
        await hands.press("escape")
        assert hands.screen == "ledger"
        assert hands.budget == before
        assert hands.text == DUCT
        assert not hands.app.document.history.can_undo

    play(act, DUCT)


@pytest.mark.parametrize(("width", "height"), [(80, 24), (60, 12), (200, 50)])
def test_the_form_fits_any_terminal(play: Stage, width: int, height: int) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("A")
        await hands.press("f", "enter")
        for _ in range(5):
            for _ in range(40):  # a form is laid out a moment after it is opened, later on a busy machine
                if any(hands.app.form.blank.key in line for line in hands.lines(hands.app.form)):  # type: ignore[union-attr]
                    break
                await hands.pilot.pause(0.05)
            assert any(hands.app.form.blank.key in line for line in hands.lines(hands.app.form))  # type: ignore[union-attr]
            assert all(len(line) <= width for line in hands.lines(hands.app.form))
            await hands.press("down")

    play(act, DUCT, size=(width, height))


def test_a_kind_without_parameters_and_a_run_out_are_counted_by_name(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("R1")
        await hands.press("f")
        await hands.type("union")
        await hands.press("enter")
        assert tomllib.loads(hands.text)["terminal"]["R1"]["fittings"] == {"union": 1}
        await hands.press("f", "right", "right", "enter")
        assert tomllib.loads(hands.text)["terminal"]["R1"]["fittings"] == {"union": 3}
        await hands.press("f", "left", "left", "left", "enter")
        assert "fittings" not in tomllib.loads(hands.text)["terminal"]["R1"]

    play(act, SMALL)
