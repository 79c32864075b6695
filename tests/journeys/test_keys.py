"""Any keys in any order, on sound runs and on tangled ones: the app goes on."""

from __future__ import annotations

from random import Random

import pytest

from budget.screens.actions import ACTIONS
from tests.description.tangles import tangle
from tests.screens.conftest import NAMES, SMALL, Hands, Stage, play

__all__ = ["play"]

ENDING = {"ctrl+q", "ctrl+z", "ctrl+o", "ctrl+t"}
"""Keys that leave the app, or the terminal to another program."""

KEYS = [key for action in ACTIONS for key in action.keys if key not in ENDING]
OFTEN = ["enter", "escape", "down", "up", "tab"] * 12 + list("0123abMPT1. ")


def press_any(play: Stage, seed: int, times: int) -> None:
    """Press so many keys; what was pressed is told where the app fails."""
    random = Random(seed)
    pressed: list[str] = []

    async def act(hands: Hands) -> None:
        for _ in range(times):
            pressed.append(random.choice((*KEYS, *OFTEN)))
            await hands.press(NAMES.get(pressed[-1], pressed[-1]))
            assert hands.app.failure is None, (seed, pressed)
            assert hands.app.is_running, (seed, pressed)

    text = tangle(random) if random.random() < 0.7 else SMALL
    play(act, text, size=random.choice(((80, 24), (140, 40))))


@pytest.mark.parametrize("seed", range(2))
def test_any_keys_are_taken(play: Stage, seed: int) -> None:
    press_any(play, seed, 40)


@pytest.mark.long
@pytest.mark.parametrize("seed", range(100, 124))
def test_many_keys_are_taken(play: Stage, seed: int) -> None:
    press_any(play, seed, 200)
