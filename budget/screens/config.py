"""The user's settings for the app: `config.toml` in the user's config folder, read with every mistake told.

    theme = "dark"       # terminal, light, dark, high-contrast, colour-blind, or a file of one's own, themes/NAME.toml
    mouse = false
    ascii = false
    letters = false      # h j k l move as well

    [keys]
    undo = "u"
    save = ["ctrl+s", "f12"]

The file itself may be a symbolic link to anywhere; a theme is a file in the folder `themes` beside it, and is named
without a folder. A setting that can't be taken is reported and left at its default, so that the app always opens.
"""

from __future__ import annotations

import difflib
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import platformdirs

from budget.description.finding import dotted
from budget.screens.keymap import Keymap, build
from budget.screens.settings import read_file, read_toml
from budget.screens.themes import TERMINAL, names_of_themes, no_theme

NAME = "config.toml"


@dataclass(frozen=True, slots=True)
class Config:
    """What the user chose."""

    theme: str = TERMINAL
    mouse: bool = False
    ascii: bool = False
    letters: bool = False
    keymap: Keymap = field(default_factory=lambda: build()[0])


def config_folder() -> Path:
    """Return the user's config folder for this program; it need not exist."""
    return Path(platformdirs.user_config_path("budget"))


def config_path() -> Path:
    """Return where the config file is looked for."""
    return config_folder() / NAME


def load_config(path: Path | None = None) -> tuple[Config, tuple[str, ...]]:
    """Read the user's config file; without one, the defaults. Problems start with the path of the file."""
    path = path or config_path()
    text, problem = read_file(path)
    if text is None:
        return Config(), ((f"{path}: {problem}",) if problem else ())
    config, problems = read_config(text, path.parent)
    return config, tuple(f"{path}: {problem}" for problem in problems)


def read_config(text: str, folder: Path | None = None) -> tuple[Config, tuple[str, ...]]:
    """Read the text of a config; themes of one's own are looked for in `folder`/themes.

    Returns what could be taken, and one sentence for everything that could not.
    """
    data, problem = read_toml(text)
    if data is None:
        return Config(), (f"{problem}; every setting is at its default",)
    problems: list[str] = []
    settings: dict[str, Any] = {}
    for key, value in data.items():
        if key == "keys":
            continue
        problem = _check(key, value, folder)
        if problem:
            problems.append(problem)
        else:
            settings[key] = value
    keymap, wrong_keys = _keys(data.get("keys", {}), letters=settings.get("letters", False))
    return Config(**settings, keymap=keymap), (*problems, *wrong_keys)


def _keys(value: object, *, letters: bool) -> tuple[Keymap, tuple[str, ...]]:
    if not isinstance(value, Mapping):
        return build(letters=letters)[0], ("keys: write a table, [keys]",)
    keymap, problems = build(value, letters=letters)
    if not problems:
        return keymap, ()
    return build(letters=letters)[0], (*problems, "the keys are at their defaults until that is mended")


def _check(key: str, value: object, folder: Path | None) -> str:
    if key in ("mouse", "ascii", "letters"):
        return "" if isinstance(value, bool) else f"{key}: write true or false"
    if key == "theme":
        names = names_of_themes(folder)
        if isinstance(value, str) and value in names:
            return ""
        return no_theme(value, names)
    close = difflib.get_close_matches(key, ["theme", "mouse", "ascii", "letters", "keys"], n=1, cutoff=0.5)
    return f"{dotted((key[:60],))}: there is no such setting; " + (
        f"did you mean {close[0]}?" if close else "remove it"
    )
