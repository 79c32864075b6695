"""What the app sends over a narrow link: only what changed."""

from __future__ import annotations

import re
import time
from collections.abc import Callable, Iterator

import pytest

from tests.terminal.conftest import EXAMPLES, SMALL, Open
from tests.terminal.session import Session

SMALL_SCREEN, LARGE_SCREEN = (80, 24), (200, 50)
LARGE_RUN = (EXAMPLES / "three-floor-heating.toml").read_text()


@pytest.fixture(scope="module", autouse=True)
def idle(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Callable[[], Session]]:
    """An app that is left alone, in an editor's field, while the others are tested: five seconds at least."""
    folder = tmp_path_factory.mktemp("idle")
    (folder / "run.toml").write_text(SMALL)
    with Session(folder / "run.toml", config=folder) as session:
        session.wait_for("required")
        session.press("down", "enter")
        session.settle(0.2)
        since = time.monotonic()

        def left_alone() -> Session:
            time.sleep(max(0.0, since + 5.0 - time.monotonic()))
            return session

        yield left_alone


def changed_cells(before: list[str], after: list[str]) -> int:
    """Return in how many words two screens differ: each is a cell of the ledger or of the budget line."""
    count = 0
    for old, new in zip(before, after, strict=True):
        words, others = ({(m.start(), m.group()) for m in re.finditer(r"\S+", line)} for line in (old, new))
        count += max(len(words - others), len(others - words))
    return count


@pytest.mark.parametrize(
    ("size", "start", "move", "edit", "cell"),
    [(SMALL_SCREEN, 35_000, 400, 300, 100), (LARGE_SCREEN, 75_000, 700, 600, 150)],
    ids=["80x24", "200x50"],
)
def test_no_more_is_sent_than_what_changed(
    opened: Open, size: tuple[int, int], start: int, move: int, edit: int, cell: int
) -> None:
    session = opened(size=size)
    session.settle(0.2)
    assert len(session.received) <= start

    for key in ("down", "right", "left", "down"):
        before = session.lines
        assert session.press(key) <= move + detail(before, session.lines, size[0]), key

    session.press("enter")
    for key in ("2", "5", "enter", "u"):
        before = session.lines
        sent = session.press(key)
        cells = changed_cells(before, session.lines)
        assert cells > 5 or key == "enter"
        assert sent <= edit + cell * max(1, cells), key
    assert session.settle(quiet=0.3, limit=1.0) == 0


@pytest.mark.parametrize("screen", ["B", "L", "s"])
def test_the_first_key_after_another_screen_is_as_frugal(opened: Open, screen: str) -> None:
    session = opened()
    session.press("down", "down", screen, "escape")
    session.settle(0.2)
    assert session.press("up") <= 400


def test_a_theme_of_many_colours_keeps_to_it_in_true_colour(opened: Open) -> None:
    session = opened(LARGE_RUN, config='theme = "dark"', environment={"COLORTERM": "truecolor"})
    assert max(session.press(key) for key in ("down", "down", "right", "down", "left", "up", "down")) <= 400


def detail(before: list[str], after: list[str], width: int) -> int:
    """Return how many cells the changed lines of the row detail have, where it stands beside the ledger."""
    left = next((line.index("Row detail") for line in after if "Row detail" in line), width)
    return sum(old[left:] != new[left:] for old, new in zip(before, after, strict=True)) * (width - left)


def test_an_idle_app_sends_nothing(idle: Callable[[], Session]) -> None:
    assert idle().settle() == 0
