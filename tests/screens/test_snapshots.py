"""What a designer sees, as text, at three sizes of terminal.

With BUDGET_WRITE_SNAPSHOTS=1 in the environment the pictures are written anew; look at the difference then.
"""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from tests.screens.conftest import Hands, Stage

FOLDER = Path(__file__).parent / "snapshots"


def picture(hands: Hands) -> str:
    """Return the whole screen as text."""
    strips = hands.app.screen._compositor.render_strips()
    return "\n".join("".join(segment.text for segment in strip).rstrip() for strip in strips) + "\n"


@pytest.mark.parametrize("size", [(80, 24), (100, 30), (200, 50)], ids=lambda size: f"{size[0]}x{size[1]}")
@pytest.mark.parametrize(
    ("name", "keys"),
    [
        ("ledger", ("down", "down")),
        ("edited", ("down", "down", "enter", "2", "5")),
        ("refused", ("down", "down", "enter", "2", "x")),
        ("sizes", ("down", "down", "s")),
        ("detail", ("down", "down", "v")),
    ],
)
def test_a_screen_looks_as_it_did(play: Stage, size: tuple[int, int], name: str, keys: tuple[str, ...]) -> None:
    async def act(hands: Hands) -> None:
        await hands.press(*keys)
        await hands.pilot.pause()
        shown = picture(hands)
        file = FOLDER / f"{name}-{size[0]}x{size[1]}.txt"
        if os.environ.get("BUDGET_WRITE_SNAPSHOTS") == "1":
            FOLDER.mkdir(exist_ok=True)
            file.write_text(shown, encoding="utf-8")
        expected = file.read_text(encoding="utf-8")
        for _ in range(40):  # on a busy machine a value is tried out only when the letters pause
            if shown == expected:
                break
            await hands.pilot.pause(0.05)
            shown = picture(hands)
        assert shown == expected

    play(act, size=size)
