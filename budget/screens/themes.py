"""Colour themes: what each kind of text looks like, read from TOML and checked for legibility before it is used.

A theme names a style for every role in words: `"bold #ffffff on #204060"`. Besides those in the `themes` folder that
is shipped, the config folder may hold more, and one is built in that follows the terminal's own palette.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path

from rich.color import ColorSystem
from rich.errors import StyleSyntaxError
from rich.style import Style

from budget.description.finding import dotted
from budget.description.values import what_is
from budget.report.plain import plain
from budget.screens.settings import lies_within, read_file, read_toml

TERMINAL = "terminal"
"""The built-in theme: the terminal's own colours, with bold, reverse and a colour or two that any palette has."""

ROLES: Mapping[str, str] = {
    "text": "text, with the background of everything",
    "faint": "labels and units",
    "heading": "headings of columns",
    "index": "the index circuit",
    "over": "a value over its limit",
    "error": "an error",
    "warning": "a warning",
    "note": "a note",
    "good": "what is in hand",
    "row": "the row of the cursor",
    "cursor": "the cell under the cursor",
    "field": "a field being written in",
    "bar": "what is spent, in a bar",
    "rest": "what is left, in a bar",
    "key": "a key in the footer",
    "title": "the name of a source or a screen",
}

LEAST_CONTRAST = 4.5
"""Between a text and its background, as WCAG 2.1 (success criterion 1.4.3) asks for text."""

LEAST_CONTRAST_FAINT = 3.0
"""For labels and bars: WCAG 2.1, success criterion 1.4.11."""

_FAINT = frozenset({"faint", "rest", "bar"})

_TERMINAL_STYLES: Mapping[str, str] = {
    **dict.fromkeys(ROLES, ""),
    "heading": "bold",
    "index": "magenta",
    "over": "bold red",
    "error": "bold red",
    "warning": "red",
    "good": "bold",
    "row": "bold",
    "cursor": "reverse",
    "field": "reverse",
    "key": "bold",
    "title": "bold",
}


@dataclass(frozen=True, slots=True)
class Theme:
    """The styles of one theme by role; all stand on that of its text, `whole` joins the two."""

    name: str
    title: str
    dark: bool
    styles: Mapping[str, Style]
    follows_terminal: bool = False

    def whole(self, role: str) -> Style:
        """Return the style of a role with the background on which it stands."""
        return self.styles["text"] + self.styles[role]


def shipped_folder() -> Path:
    """Return the folder of the themes that are shipped, from a wheel or from the source tree."""
    package = Path(__file__).resolve().parent.parent
    inside = package / "themes"
    return inside if inside.is_dir() else package.parent / "themes"


def names_of_themes(folder: Path | None = None) -> tuple[str, ...]:
    """Name every theme there is: the built-in one, the shipped ones, and those in `folder`/themes."""
    names = [TERMINAL]
    for place in (shipped_folder(), *((folder / "themes",) if folder else ())):
        if place.is_dir():
            found = sorted(path.stem for path in place.glob("*.toml") if path.stem.isprintable())
            names += [name for name in found if name not in names]
    return tuple(names)


def no_theme(name: object, names: Iterable[str]) -> str:
    """Say that there is no theme of a name, and which there are."""
    shown = repr(name[:60] if isinstance(name, str) else what_is(name))
    return f"theme: there is no theme {shown}; there are {', '.join(names)}"


def load_theme(name: str, folder: Path | None = None) -> tuple[Theme, tuple[str, ...]]:
    """Return a theme by name; the built-in one, with the reasons, where it can't be used.

    A theme of one's own is a file directly in `folder`/themes. It may be a symbolic link to another file in `folder`,
    which may itself be one, but not to anywhere else: what a settings file names is read from there alone.
    """
    names = names_of_themes(folder)
    if name == TERMINAL:
        return terminal_theme(), ()
    if name not in names:
        return terminal_theme(), (no_theme(name, names),)
    path = shipped_folder() / f"{name}.toml"
    own = folder / "themes" / f"{name}.toml" if folder else path
    if folder and os.path.lexists(own):
        path = own
        if not lies_within(path, folder):
            return terminal_theme(), (f"{path}: it leads out of {folder}; copy the theme there",)
    text, problem = read_file(path)
    if text is None:
        return terminal_theme(), (f"{path}: {problem or 'there is no such file'}",)
    theme, problems = read_theme(text, name)
    return theme or terminal_theme(), tuple(f"{path}: {problem}" for problem in problems)


def read_theme(text: str, name: str) -> tuple[Theme | None, tuple[str, ...]]:
    """Read a theme's TOML. None with the reasons where a role is unknown, missing, no style, or not legible."""
    data, problem = read_toml(text)
    if data is None:
        return None, (problem,)
    problems = [
        f"{dotted((key[:60],))}: there is no such setting" for key in data if key not in ("title", "dark", "styles")
    ]
    styles = data.get("styles")
    if not isinstance(styles, dict) or not isinstance(data.get("dark"), bool):
        return None, (*problems, "write dark = true or false, and a table [styles]")
    problems += [f"{dotted(('styles', role[:60]))}: there is no such role" for role in styles if role not in ROLES]
    problems += [f"styles.{role}: it is missing ({ROLES[role]})" for role in ROLES if role not in styles]
    read = {role: _read_style(role, styles[role], problems) for role in ROLES if role in styles}
    if problems:
        return None, tuple(problems)
    theme = Theme(name, plain(str(data.get("title", name)))[:60], data["dark"], read)
    problems += _illegible(theme)
    return (None if problems else theme), tuple(problems)


@cache
def terminal_theme() -> Theme:
    """Return the built-in theme, which leaves the colours to the terminal."""
    styles = {role: Style.parse(words) for role, words in _TERMINAL_STYLES.items()}
    return Theme(TERMINAL, "The terminal's own colours", True, styles, follows_terminal=True)


def contrast(style: Style, system: ColorSystem | None = None) -> float:
    """Return the contrast ratio of a style's text on its background, 1 to 21, as WCAG 2.1 defines it.

    `system` is the colour system that the terminal has; the nearest colours that it knows are compared then.
    """
    front, back = _triplet(style, system), _triplet(style, system, back=True)
    if style.reverse:
        front, back = back, front
    lighter, darker = sorted((_luminance(front), _luminance(back)), reverse=True)
    return (lighter + 0.05) / (darker + 0.05)


def hex_of(style: Style, *, back: bool = False) -> str:
    """Return the colour of a style's text, or of its background, as `#rrggbb`."""
    red, green, blue = _triplet(style, None, back=back)
    return f"#{int(red):02x}{int(green):02x}{int(blue):02x}"


def _read_style(role: str, words: object, problems: list[str]) -> Style:
    try:
        style = Style.parse(words if isinstance(words, str) else "?")
    except StyleSyntaxError:
        shown = repr(words[:60]) if isinstance(words, str) else what_is(words)
        problems.append(f'styles.{role}: {shown} is no style; write "bold #ffffff on #204060"')
        return Style()
    if style.blink or style.blink2 or style.conceal or style.link:
        problems.append(f"styles.{role}: blink, conceal and links are not allowed")
    if role == "text" and (style.color is None or style.bgcolor is None):
        problems.append('styles.text: it needs a colour and a background, "#e0e0e0 on #101010"')
    return style


def _illegible(theme: Theme) -> list[str]:
    problems = []
    for role in theme.styles:
        least = LEAST_CONTRAST_FAINT if role in _FAINT else LEAST_CONTRAST
        found = contrast(theme.whole(role))
        if found < least:
            problems.append(f"styles.{role}: its contrast is {found:.1f}, at least {least} is needed")
    return problems


def _triplet(style: Style, system: ColorSystem | None, *, back: bool = False) -> tuple[float, float, float]:
    color = style.bgcolor if back else style.color
    if color is None:
        return (0.0, 0.0, 0.0) if back else (255.0, 255.0, 255.0)
    if system is not None:
        color = color.downgrade(system)
    red, green, blue = color.get_truecolor(foreground=not back)
    return float(red), float(green), float(blue)


def _luminance(triplet: tuple[float, float, float]) -> float:
    red, green, blue = (
        part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4
        for part in (channel / 255.0 for channel in triplet)
    )
    return 0.2126 * red + 0.7152 * green + 0.0722 * blue
