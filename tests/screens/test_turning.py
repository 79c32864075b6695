"""The other screens, in the ledger's place: findings, lists, text, manual, saving and leaving."""

from __future__ import annotations

import pytest

from budget.description.model import Line
from budget.manual import TOPICS, titles
from budget.screens.actions import ACTIONS
from budget.screens.chooser import Chooser
from budget.screens.picking import sizes_of
from tests.screens.conftest import SMALL, Hands, Stage

FAST = SMALL.replace('velocity = "1.0 m/s"', 'velocity = "0.45 m/s"')


def kept(hands: Hands) -> list[str]:
    front = hands.app.front
    assert isinstance(front, Chooser)
    return [choice.cells[0] for choice in front.kept]


def test_a_size_is_picked_with_bore_and_drop_in_view(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("s")
        heads, now = hands.lines()[1], next(line for line in hands.lines() if line.startswith(" 18 mm"))
        assert "bore mm" in heads
        assert "required kPa" in heads
        assert "20.88" in now
        assert hands.app.choosers["list"].marked is not None
        assert hands.app.choosers["list"].marked.value == "18 mm"
        await hands.type("22")
        assert kept(hands) == ["22 mm"]
        await hands.press("enter")
        assert 'size = "22 mm"' in hands.text
        assert hands.screen == "ledger"
        assert "required -3.15 kPa" in hands.budget

    play(act)


def test_what_a_size_would_give_is_what_it_then_gives(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B2")
        await hands.press("s")
        await hands.type("22")
        await hands.looked()
        line = hands.lines()[2].split()
        await hands.press("enter")
        shown = hands.row("B2").split()
        assert line[2] in shown  # velocity
        assert line[4] in shown  # drop

    play(act)


def test_fittings_are_counted_and_entered_as_one_step(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("f")
        assert kept(hands)[:2] == ["elbow 90", "gate valve"]
        await hands.press("right", "right")
        assert "required +0.88 kPa" in hands.budget
        await hands.press("left")
        await hands.press("enter")
        assert 'fittings = { "elbow 90" = 5, "gate valve" = 1 }' in hands.text
        await hands.press("f")
        await hands.type("globe")
        await hands.press("enter")
        assert '"globe valve" = 1' in hands.text
        assert hands.app.document.history.position == 2
        await hands.press("f", "right", "escape")
        assert "required +0.4" not in hands.budget
        assert hands.app.document.history.position == 2

    play(act)


def test_devices_and_words_are_picked(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B1", "drop")
        await hands.press("p")
        assert hands.foot.startswith("there is no list for this")
        await hands.at("M1", "size")
        await hands.press("enter", "down")
        assert hands.screen == "list"
        await hands.press("escape", "v")
        chooser = hands.app.choosers["detail"]
        place = next(n for n, choice in enumerate(chooser.kept) if choice.cells[0] == "  from")
        await hands.press(*["down"] * place)
        await hands.press("p")
        assert hands.foot

    play(act)


def test_a_duct_size_may_be_written() -> None:
    duct = Line("sheet", "duct", 0.00015)
    sizes = dict(sizes_of(duct, "SI"))
    assert sizes["250 mm"] == pytest.approx(0.25)
    assert dict(sizes_of(duct, "IP"))["10 in"] == pytest.approx(0.254)
    assert sizes_of(Line("own", "pipe", 1e-5, own_sizes={"A": 0.02}), "SI") == (("A", 0.02),)


def test_a_finding_leads_to_its_row_and_cell(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("F")
        assert any("velocity" in line for line in hands.lines())
        await hands.press("enter")
        assert hands.screen == "ledger"
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "M1"
        assert "m/s" in hands.foot
        await hands.press("F", "v")
        assert hands.screen == "detail"

    play(act, FAST)


def test_a_finding_without_a_row_leads_to_its_line_of_the_text(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("F", "enter")
        assert hands.screen == "text"
        assert hands.app.text.cursor_location[0] == 4

    play(act, SMALL.replace("[design]\n", "[design]\ncolour = 3\n"))


def test_the_command_list_has_every_action_of_the_ledger_with_its_key(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("colon")
        titles = kept(hands)
        for action in ACTIONS:
            if "ledger" in action.places and action.id not in ("up", "down", "left", "right", "commands"):
                assert action.title in titles
        await hands.type("index term")
        await hands.press("enter")
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "R4"

    play(act)


def test_the_text_goes_into_the_design_as_one_step(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("T")
        text = hands.app.text
        assert text.text == SMALL
        assert SMALL.splitlines()[text.cursor_location[0]] == "[section.M1]"
        text.load_text(SMALL.replace('length = "7.5 m"', 'length = "9.5 m"'))
        await hands.press("ctrl+e")
        assert 'length = "9.5 m"' in hands.text
        assert hands.screen == "text"
        await hands.press("escape")
        assert hands.screen == "ledger"
        await hands.pilot.pause()
        assert "9.5" in hands.row("M1")
        await hands.press("u")
        assert hands.text == SMALL

    play(act)


def test_a_text_that_is_not_toml_says_where_and_the_figures_stay(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("T")
        hands.app.text.load_text(SMALL.replace("[section.M1]", "[section.M1"))
        await hands.press("ctrl+e")
        assert hands.foot.startswith("line 47:")
        assert hands.app.text.cursor_location[0] == 46
        assert hands.text == SMALL
        assert "20.88" in hands.budget
        await hands.press("escape")
        assert kept(hands) == ["throw away what was written", "mend it"]
        await hands.press("down", "enter")
        assert hands.screen == "text"
        assert "[section.M1\n" in hands.app.text.text
        await hands.press("escape", "enter")
        assert hands.screen == "ledger"
        await hands.press("T")
        assert hands.app.text.text == SMALL

    play(act)


def test_saving_writes_the_file_and_says_so(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        path = hands.app.document.path
        assert path is not None
        await hands.at("M1")
        await hands.press("enter", "9", "enter")
        assert "not saved" in hands.budget
        await hands.press("ctrl+s")
        assert hands.foot.startswith("saved")
        assert path.read_text() == hands.text
        assert "not saved" not in hands.budget
        path.write_text(SMALL)
        await hands.press("enter", "8", "enter", "ctrl+s")
        assert path.read_text() == SMALL
        assert hands.screen == "list"
        await hands.type("write over")
        await hands.press("enter")
        assert path.read_text() == hands.text

    play(act)


def test_a_run_is_saved_under_another_name(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        path = hands.app.document.path
        assert path is not None
        other = path.with_name("other.toml")
        await hands.press("colon")
        await hands.type("another name")
        await hands.press("enter", "ctrl+u")
        await hands.type("other.toml")
        await hands.press("enter")
        assert other.read_text() == SMALL
        assert hands.app.document.path == other

    play(act)


def test_leaving_asks_where_the_run_is_not_saved(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("enter", "9", "enter", "ctrl+q")
        ways = ["save and quit", "quit, and keep the changes for the next time", "quit without saving", "stay"]
        assert kept(hands) == ways
        await hands.press("escape")
        assert hands.screen == "ledger"
        await hands.press("ctrl+q", "enter")
        assert hands.app.return_value == 0
        assert hands.app.document.path is not None
        assert "length = 9\n" in hands.app.document.path.read_text()

    play(act)


def test_leaving_a_saved_run_is_at_once(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("ctrl+q")
        assert hands.app.return_value == 0

    play(act)


def test_the_manual_lists_its_pages_as_one_would_read_them(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("question_mark")
        chooser = hands.app.choosers["list"]
        assert [choice.value for choice in chooser.kept] == list(TOPICS)
        assert kept(hands) == list(titles().values())

    play(act)
