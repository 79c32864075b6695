"""The user's settings: every mistake is told, and the app opens all the same."""

import subprocess
import sys
from pathlib import Path

import pytest

from budget.screens.actions import ACTIONS, BY_ID, FOOTER
from budget.screens.config import load_config, read_config
from budget.screens.doing import DOINGS
from budget.screens.keymap import SAME_IN_A_TERMINAL, build, known_key, spelled


def test_an_empty_config_is_the_default() -> None:
    config, problems = read_config("")
    assert problems == ()
    assert (config.theme, config.mouse, config.ascii, config.letters) == ("terminal", False, False, False)


def test_settings_are_taken() -> None:
    config, problems = read_config(
        'theme = "high-contrast"\nmouse = true\nascii = true\nletters = true\n[keys]\nundo = ["ctrl+u", "f9"]\n'
    )
    assert problems == ()
    assert config.theme == "high-contrast"
    assert config.mouse
    assert config.ascii
    assert config.keymap.action("ledger", "f9") == "undo"
    assert config.keymap.action("ledger", "u") is None
    assert config.keymap.action("ledger", "j") == "down"


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("thme = 1", "did you mean theme?"),
        ('theme = "drak"', "there is no theme 'drak'"),
        ("mouse = 1", "mouse: write true or false"),
        ("keys = 3", "keys: write a table"),
        ('[keys]\nundoo = "u"', "did you mean undo?"),
        ('[keys]\nundo = "notakey"', 'there is no key "notakey"'),
        ('[keys]\nundo = "ctrl+m"', 'can\'t tell "ctrl+m" from "enter"'),
        ('[keys]\nundo = "i"', '"i" would be both undo and go_to_index on ledger'),
        ('[keys]\nleave = "q"', 'a field needs "q"'),
        ("[keys]\nquit = []", "quit: it needs a key"),
        ("[keys]\nundo = 4", "write a key or a list of keys"),
        ("theme = [", "line 1, column 10: the file is not TOML"),
    ],
)
def test_what_is_wrong_is_told(text: str, told: str) -> None:
    config, problems = read_config(text)
    assert any(told in problem for problem in problems)
    assert config.keymap.action("ledger", "u") == "undo"


def test_letters_do_not_clash_with_the_default_keys() -> None:
    assert build(letters=True)[1] == ()


def test_problems_name_the_file(tmp_path: Path) -> None:
    path = tmp_path / "config.toml"
    path.write_text("mouse = 3")
    _, problems = load_config(path)
    assert problems == (f"{path}: mouse: write true or false",)
    path.write_bytes(b"\xff\xfe")
    assert "could not be read" in load_config(path)[1][0]
    assert load_config(tmp_path / "none.toml")[1] == ()


def test_a_theme_of_one_s_own_is_found_beside_the_config(tmp_path: Path) -> None:
    (tmp_path / "themes").mkdir()
    shipped = Path(__file__).parents[2] / "themes" / "dark.toml"
    (tmp_path / "themes" / "mine.toml").write_text(shipped.read_text())
    config, problems = read_config('theme = "mine"', tmp_path)
    assert problems == ()
    assert config.theme == "mine"


def test_every_action_can_be_done_and_every_doing_is_an_action() -> None:
    assert set(DOINGS) == set(BY_ID)


def test_default_keys_are_keys_that_a_terminal_can_send() -> None:
    for action in ACTIONS:
        for key in action.keys:
            assert known_key(key) == key
            assert key not in SAME_IN_A_TERMINAL
            assert key not in ("ctrl+a", "ctrl+b")


def test_the_footer_shows_at_most_six_keys_and_fits_80_columns() -> None:
    keymap, _ = build()
    for place, actions in FOOTER.items():
        assert len(actions) <= 6
        for action in actions:
            assert place in BY_ID[action].places
        words = (f" {keymap.shown(a, place=place)} {BY_ID[a].short or BY_ID[a].title.lower()}  " for a in actions)
        assert sum(map(len, words)) <= 80, place


def test_keys_are_spelled_for_people() -> None:
    assert spelled("ctrl+s") == "^s"
    assert spelled("question_mark") == "?"
    assert spelled("shift+up") == "Shift+Up"
    assert known_key("/") == "slash"
    assert known_key("shift+a") is None


def test_the_config_is_read_without_the_toolkit() -> None:
    code = "import sys; from budget.screens.config import load_config; load_config(); print('textual' in sys.modules)"
    ended = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, timeout=30, check=True)
    assert ended.stdout.strip() == "False"
