"""Settings and themes are read from regular files of a sensible size, and a theme from the config folder alone."""

from __future__ import annotations

import os
import time
from pathlib import Path

import pytest

from budget.screens.config import load_config, read_config
from budget.screens.settings import LARGEST
from budget.screens.themes import TERMINAL, load_theme, read_theme, shipped_folder

BOMBS = (
    "x = " + "[" * 50_000,
    "x = " + "[{a = " * 20_000,
    "a." * 50_000 + "a = 1",
    "x = " + "9" * 100_000,
    "[" + "a." * 40 + "a]",
    "x = '" + "a" * 20_000 + "'",
)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A config folder with a theme of one's own."""
    (tmp_path / "budget" / "themes").mkdir(parents=True)
    (tmp_path / "budget" / "themes" / "mine.toml").write_text(DARK)
    return tmp_path / "budget"


DARK = (shipped_folder() / "dark.toml").read_text(encoding="utf-8")


@pytest.mark.parametrize("text", BOMBS, ids=range(len(BOMBS)))
def test_what_is_beyond_a_limit_is_a_sentence(text: str) -> None:
    start = time.process_time()
    _, problems = read_config(text)
    theme, reasons = read_theme(text, "mine")
    assert time.process_time() - start < 8.0
    assert theme is None
    for problem in (*problems, *reasons):
        assert problem.startswith("line 1, column ")
        assert len(problem) < 300


def test_what_is_no_regular_file_does_not_hang(folder: Path) -> None:
    for name in ("config.toml", "themes/pipe.toml"):
        os.mkfifo(folder / name)
    assert "not a regular file" in load_config(folder / "config.toml")[1][0]
    assert "not a regular file" in load_theme("pipe", folder)[1][0]
    (folder / "config.toml").unlink()
    for target in ("/dev/zero", folder):
        (folder / "config.toml").symlink_to(target)
        assert "not a regular file" in load_config(folder / "config.toml")[1][0]
        (folder / "config.toml").unlink()
    (folder / "themes" / "zero.toml").symlink_to("/dev/zero")
    assert "leads out of" in load_theme("zero", folder)[1][0]


def test_what_is_too_large_is_not_read(folder: Path) -> None:
    for name in ("config.toml", "themes/mine.toml"):
        (folder / name).write_bytes(b"#" + b"x" * LARGEST)
    assert "larger than 256 kB" in load_config(folder / "config.toml")[1][0]
    assert "larger than 256 kB" in load_theme("mine", folder)[1][0]


def test_bytes_that_are_no_text_are_told(folder: Path) -> None:
    (folder / "themes" / "mine.toml").write_bytes(b"\xff")
    assert "byte 1 is not UTF-8" in load_theme("mine", folder)[1][0]


@pytest.mark.parametrize(
    "name", ["../outside", "themes/mine", "/etc/hosts", "..", "", "a\x00b", "sub/mine", "mine.toml", "./mine"]
)
def test_a_theme_is_named_without_a_folder(folder: Path, name: str) -> None:
    (folder / "outside.toml").write_text(DARK)
    (folder / "themes" / "sub").mkdir()
    (folder / "themes" / "sub" / "mine.toml").write_text(DARK)
    theme, problems = load_theme(name, folder)
    assert theme.name == TERMINAL
    assert "there is no theme" in problems[0]


def test_a_theme_that_links_out_of_the_folder_is_not_read(folder: Path) -> None:
    (folder.parent / "secret.toml").write_text(DARK)
    (folder / "themes" / "away.toml").symlink_to(folder.parent / "secret.toml")
    theme, problems = load_theme("away", folder)
    assert theme.name == TERMINAL
    assert "leads out of" in problems[0]
    (folder / "themes" / "lost.toml").symlink_to("nowhere.toml")
    assert "there is no such file" in load_theme("lost", folder)[1][0]


def test_links_within_the_folder_and_a_folder_that_is_a_link_are_followed(folder: Path) -> None:
    (folder / "themes" / "same.toml").symlink_to("mine.toml")
    assert load_theme("same", folder)[1] == ()
    linked = folder.parent / "linked"
    linked.symlink_to(folder)
    assert load_theme("mine", linked)[0].name == "mine"
    (folder.parent / "kept.toml").write_text("ascii = true")
    (folder / "config.toml").symlink_to(folder.parent / "kept.toml")
    config, problems = load_config(folder / "config.toml")
    assert (config.ascii, problems) == (True, ())


def test_words_from_a_settings_file_are_shown_without_control_characters() -> None:
    text = '"\\u001b[31m" = 1\ntheme = "\\u0007\\u202E"\n'
    _, problems = read_config(text)
    assert len(problems) == 2
    assert all(problem.isprintable() for problem in problems)
    _, problems = read_theme(DARK + '"\\u001b" = "#ffffff"\n' + '"o\\u0085" = "\\u001b"\n', "mine")
    assert len(problems) == 2
    assert all(problem.isprintable() for problem in problems)
