"""Themes are legible on every kind of terminal, and one that is not is refused."""

from pathlib import Path

import pytest
from rich.color import ColorSystem
from textual.strip import Strip

from budget.screens.themes import (
    ROLES,
    TERMINAL,
    contrast,
    load_theme,
    names_of_themes,
    read_theme,
    shipped_folder,
    terminal_theme,
)
from budget.screens.toolkit import widget_theme
from tests.screens.conftest import NAMES, Hands, Stage

SHIPPED = [name for name in names_of_themes() if name != TERMINAL]
LEAST_ON_FEW_COLOURS = 3.0
"""Of the fixed palette that stands for 16 and 256 colours; WCAG's bound for large text and signs."""


def test_four_themes_are_shipped() -> None:
    assert SHIPPED == ["colour-blind", "dark", "high-contrast", "light"]


@pytest.mark.parametrize("name", SHIPPED)
@pytest.mark.parametrize("system", [ColorSystem.STANDARD, ColorSystem.EIGHT_BIT, ColorSystem.TRUECOLOR])
def test_every_text_is_legible(name: str, system: ColorSystem) -> None:
    theme, problems = load_theme(name)
    assert problems == ()
    for role in ROLES:
        assert contrast(theme.whole(role), system) >= LEAST_ON_FEW_COLOURS, role


@pytest.mark.parametrize("name", [*SHIPPED, TERMINAL])
def test_the_widgets_of_the_toolkit_can_use_its_colours(name: str) -> None:
    theme, _ = load_theme(name)
    assert widget_theme(theme).to_color_system().generate()


def test_the_terminal_s_own_palette_is_told_apart_without_a_colour() -> None:
    styles = terminal_theme().styles
    assert styles["cursor"].reverse
    assert styles["over"].bold


@pytest.mark.parametrize("name", names_of_themes())
def test_no_screen_paints_a_text_in_its_own_background_where_there_are_16_colours(play: Stage, name: str) -> None:
    async def act(hands: Hands) -> None:
        for keys in (("down", "down", "enter", "9"), ("escape", "f"), ("enter", "f"), ("escape", "v"), ("T",), ("?",)):
            await hands.press(*(NAMES.get(key, key) for key in keys))
            if keys == ("?",):
                await hands.press("enter")
            await hands.pilot.pause()
            assert not clashes(hands.app.screen._compositor.render_strips()), keys

    play(act, theme=load_theme(name)[0])


def clashes(strips: list[Strip]) -> list[str]:
    """Return the pieces of text that a terminal of 16 colours would paint in the colour of their background."""
    found = []
    for text, style, _ in (segment for strip in strips for segment in strip):
        if text.strip(" ▊▎▔▁░") and style is not None and style.color is not None and style.bgcolor is not None:
            front, back = (colour.downgrade(ColorSystem.STANDARD).number for colour in (style.color, style.bgcolor))
            if front is not None and front == back:
                found.append(text)
    return found


def _text(**changes: str | None) -> str:
    text = (shipped_folder() / "dark.toml").read_text()
    for role, words in changes.items():
        lines = [line for line in text.splitlines() if not line.startswith(f"{role} = ")]
        text = "\n".join([*lines, *([f"{role} = {words}"] if words is not None else [])])
    return text


@pytest.mark.parametrize(
    ("changes", "told"),
    [
        ({"over": '"#202020"'}, "its contrast is"),
        ({"over": '"reddish"'}, "is no style"),
        ({"over": "3"}, "is no style"),
        ({"over": None}, "styles.over: it is missing"),
        ({"nonsense": '"#ffffff"'}, "there is no such role"),
        ({"over": '"blink #ffffff"'}, "not allowed"),
        ({"text": '"#ffffff"'}, "it needs a colour and a background"),
    ],
)
def test_a_theme_that_can_t_be_used_is_refused(changes: dict[str, str | None], told: str) -> None:
    theme, problems = read_theme(_text(**changes), "mine")
    assert theme is None
    assert any(told in problem for problem in problems)


def test_a_broken_theme_leaves_the_terminal_s_own(tmp_path: Path) -> None:
    (tmp_path / "themes").mkdir()
    (tmp_path / "themes" / "mine.toml").write_text("styles = 1")
    theme, problems = load_theme("mine", tmp_path)
    assert theme.name == TERMINAL
    assert problems
    assert load_theme("nowhere")[1]
