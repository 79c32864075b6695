"""In a long run no key waits for a trial: the figures follow when the typing pauses."""

from __future__ import annotations

import pytest

from budget.description.edits import Edit, SetValue
from budget.document import Document, Snapshot
from budget.screens.trials import PAUSE, ROWS, SLOW
from tests.screens.conftest import SMALL, Hands, Stage

ONE = '\n[terminal.X{}]\nfrom = "B1"\nload = "0.1 kW"\ndrop = "1 kPa"\nsize = "12 mm"\nlength = 1\n'
LONG = SMALL + "".join(ONE.format(number) for number in range(ROWS))


@pytest.fixture
def trials(monkeypatch: pytest.MonkeyPatch) -> list[Edit]:
    """What was tried out so far."""
    tried: list[Edit] = []
    preview = Document.preview

    def counted(document: Document, edit: Edit) -> Snapshot:
        tried.append(edit)
        return preview(document, edit)

    monkeypatch.setattr(Document, "preview", counted)
    return tried


def test_the_first_key_in_a_long_run_waits_for_the_pause(play: Stage, trials: list[Edit]) -> None:
    async def act(hands: Hands) -> None:
        assert len(hands.app.ledger.rows) > ROWS
        await hands.at("M1")
        await hands.press("enter", "9", "full_stop", "5")
        assert trials == []
        assert "9.5" in hands.row("M1")
        await hands.pilot.pause(PAUSE * 1.5)
        assert len(trials) == 1
        assert "required +" in hands.budget

    play(act, LONG)


def test_a_list_in_a_long_run_computes_the_marked_entry_when_the_cursor_rests(play: Stage, trials: list[Edit]) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("s", "down")
        assert trials == []
        await hands.pilot.pause(PAUSE * 1.5)
        assert len(trials) == 1
        marked = hands.app.choosers["list"].marked
        assert marked is not None
        assert len(hands.listing(marked.cells[0]).split()) > 4
        others = [line for line in hands.lines()[2:] if not line.startswith(f" {marked.cells[0]} ") and line.strip()]
        assert all(len(line.split()) == 3 for line in others)

    play(act, LONG)


def test_in_a_short_run_every_key_is_tried_at_once_until_a_trial_took_long(play: Stage, trials: list[Edit]) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("enter", "9")
        assert len(trials) == 1
        hands.app.trials._took = 2 * SLOW
        await hands.press("5")
        assert len(trials) == 1
        await hands.press("escape")
        await hands.pilot.pause(PAUSE * 1.5)
        assert len(trials) == 1

    play(act)


def test_a_middling_run_fills_a_list_entry_by_entry(play: Stage, trials: list[Edit]) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        hands.app.trials._took = 0.1
        await hands.press("s")
        await hands.looked()
        marked = hands.app.choosers["list"].marked
        assert marked is not None
        assert trials[0] == SetValue(("section", "M1", "size"), marked.value)
        filled = [line for line in hands.lines()[2:] if len(line.split()) > 4]
        assert len(filled) == len(trials) > 5

    play(act)
