"""What the app sends over a narrow link: only what changed."""

from __future__ import annotations

import re

import pytest

from budget.screens.themes import names_of_themes
from tests.terminal.conftest import EXAMPLES, Open

SMALL_SCREEN, LARGE_SCREEN = (80, 24), (200, 50)
LARGE_RUN = (EXAMPLES / "three-floor-heating.toml").read_text()


def changed_cells(before: list[str], after: list[str]) -> int:
    """Return in how many words two screens differ: each is a cell of the ledger or of the budget line."""
    count = 0
    for old, new in zip(before, after, strict=True):
        words, others = ({(m.start(), m.group()) for m in re.finditer(r"\S+", line)} for line in (old, new))
        count += max(len(words - others), len(others - words))
    return count


@pytest.mark.parametrize("theme", names_of_themes())
def test_a_cursor_move_sends_at_most_400_bytes(opened: Open, theme: str) -> None:
    session = opened(LARGE_RUN, config=f'theme = "{theme}"')
    for key in ("down", "down", "right", "down", "left", "up", "down"):
        assert session.press(key) <= 400, key


def test_on_a_large_screen_700_bytes_besides_the_lines_of_the_row_detail(opened: Open) -> None:
    session = opened(LARGE_RUN, size=LARGE_SCREEN)
    assert session.press("right") <= 700
    before = session.lines
    sent = session.press("down")
    detail = sum(len(new) - 100 for old, new in zip(before, session.lines, strict=True) if old[134:] != new[134:])
    assert sent <= 700 + detail


@pytest.mark.parametrize(("size", "start", "each"), [(SMALL_SCREEN, 300, 100), (LARGE_SCREEN, 600, 150)])
def test_an_edit_sends_what_it_changes(opened: Open, size: tuple[int, int], start: int, each: int) -> None:
    session = opened(size=size)
    session.press("down", "down", "enter")
    for keys in ("2", "5"):
        before = session.lines
        sent = session.press(keys)
        cells = changed_cells(before, session.lines)
        assert cells > 5
        assert sent <= start + each * cells
    before = session.lines
    sent = session.press("enter")
    assert sent <= start + each * max(1, changed_cells(before, session.lines))
    before = session.lines
    sent = session.press("u")
    assert sent <= start + each * changed_cells(before, session.lines)


def test_nothing_is_sent_while_nothing_happens(opened: Open) -> None:
    session = opened()
    assert session.settle(quiet=5.0, limit=5.0) == 0
    session.press("down", "enter")
    assert session.settle(quiet=2.0, limit=2.0) == 0


@pytest.mark.parametrize(("size", "most"), [(SMALL_SCREEN, 35_000), (LARGE_SCREEN, 75_000)])
def test_the_start_sends_little(opened: Open, size: tuple[int, int], most: int) -> None:
    session = opened(LARGE_RUN, size=size)
    session.settle(0.5)
    assert len(session.received) <= most
