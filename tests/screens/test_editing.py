"""Editing in the ledger: every valid keystroke is tried out, Enter is one undo step, Escape puts things back."""

from __future__ import annotations

import pytest
from textual import events

from tests.screens.conftest import SMALL, Hands, Stage


def test_the_budget_runs_along_and_escape_puts_the_old_value_back(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        before = hands.budget
        await hands.press("enter", "2", "5")
        assert "25" in hands.row("M1")
        assert "required +7.05 kPa" in hands.budget
        assert hands.text == SMALL
        await hands.press("escape")
        assert hands.budget == before
        assert hands.text == SMALL
        assert not hands.app.document.history.can_undo

    play(act)


def test_enter_is_one_step_and_undo_and_redo_follow_it(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B2")
        await hands.press("enter")
        await hands.type("20 m")
        await hands.press("enter")
        assert 'length = "20 m"' in hands.text
        assert hands.app.document.history.position == 1
        await hands.at("R1")
        await hands.press("u")
        assert hands.text == SMALL
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "B2"
        assert hands.foot == "undone: length of B2"
        await hands.press("U")
        assert 'length = "20 m"' in hands.text
        await hands.press("u", "u")
        assert hands.foot == "nothing to undo"

    play(act)


def test_an_invalid_value_says_what_is_wrong_beside_the_cell_and_stays_out(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("enter")
        await hands.type("12,4 m")
        assert "has a decimal comma" in hands.row("M1")
        await hands.press("enter")
        assert hands.place == "entry"
        assert hands.text == SMALL
        await hands.press("escape")
        assert hands.place == "ledger"

    play(act)


def test_a_size_that_the_line_lacks_is_refused_with_the_nearest(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1", "size")
        await hands.press("enter")
        await hands.type("19 mm")
        assert "is not a size of" in hands.foot
        await hands.press("enter", "ctrl+u")
        await hands.type("22 mm")
        await hands.press("enter")
        assert hands.text.count('size = "22 mm"') == 1

    play(act)


@pytest.mark.parametrize(
    ("id_", "column", "typed", "line"),
    [
        ("M1", "length", "9", "length = 9\n"),
        ("M1", "length", "29.5 ft", 'length = "29.5 ft"\n'),
        ("R1", "flow", "1.5 kW", 'load = "1.5 kW"\n'),
        ("R1", "drop", "2 kPa", 'drop = "2 kPa"\n'),
        ("R1", "size", "15 mm", 'size = "15 mm"\n'),
    ],
)
def test_a_cell_edits_its_key(play: Stage, id_: str, column: str, typed: str, line: str) -> None:
    async def act(hands: Hands) -> None:
        await hands.at(id_, column)
        await hands.press("enter")
        await hands.type(typed)
        await hands.press("enter")
        assert line in hands.text

    play(act)


def test_a_computed_cell_says_so(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1", "margin")
        await hands.press("enter")
        assert hands.foot.startswith("margin is computed")
        assert hands.place == "ledger"

    play(act)


def test_tab_goes_from_one_cell_that_can_be_edited_to_the_next(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1", "size")
        await hands.press("enter", "tab")
        assert hands.place == "entry"
        assert hands.app.ledger.column == "length"
        await hands.press("8", "tab")
        assert "length = 8\n" in hands.text
        assert hands.app.ledger.row is not None
        assert (hands.app.ledger.row.id, hands.app.ledger.column) == ("B1", "size")
        await hands.press("shift+tab")
        assert (hands.app.ledger.row.id, hands.app.ledger.column) == ("M1", "length")

    play(act)


def test_a_key_is_set_and_taken_out_in_words_of_the_file(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("equals_sign")
        await hands.type("limit_velocity = 0.3 m/s")
        await hands.press("enter")
        assert 'limit_velocity = "0.3 m/s"' in hands.text
        assert "0.49!" in hands.row("M1")
        await hands.press("equals_sign")
        await hands.type("limit_velocity =")
        await hands.press("enter")
        assert hands.text == SMALL
        await hands.press("equals_sign")
        await hands.type("lngth = 3")
        assert "did you mean 'length'?" in hands.lines(hands.app.foot)[1]
        await hands.press("escape")

    play(act)


def test_renaming_an_id_takes_all_that_refers_to_it_along(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B1")
        await hands.press("r")
        await hands.type("North")
        await hands.press("enter")
        assert "[section.North]" in hands.text
        assert hands.text.count('from = "North"') == 2
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "North"
        await hands.press("r")
        await hands.type("B2")
        assert "B2 is taken" in hands.lines(hands.app.foot)[1]
        await hands.press("escape", "u")
        assert hands.text == SMALL

    play(act)


def test_a_value_is_edited_in_the_row_detail(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("v")
        labels = [choice.cells[0].strip() for choice in hands.app.choosers["detail"].kept]
        assert {"title", "size", "supply leg", "return leg", "friction"} <= set(labels)
        place = labels.index("length")
        await hands.press(*["down"] * place)
        await hands.press("enter", "9", "enter")
        assert "length = 9\n" in hands.text
        assert hands.screen == "detail"
        await hands.press("escape")
        assert hands.screen == "ledger"

    play(act)


def test_pasted_text_goes_into_the_field(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("enter")
        await hands.send(events.Paste("11 m\n"))
        await hands.press("enter")
        assert 'length = "11 m"' in hands.text

    play(act)
