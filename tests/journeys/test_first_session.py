"""A designer's first session at 80x24: look, change a length, add a terminal, think better of it, save."""

from __future__ import annotations

import json
import subprocess
import sys
import tomllib
from pathlib import Path
from typing import Any

import pytest

from budget.document import Document
from budget.report.figures import Figures
from budget.units import Dimension
from tests.terminal.session import Session

SMALL = (Path(__file__).parents[1] / "screens" / "cottage.toml").read_text()


def required(text: str) -> str:
    """Spell the required pressure of a text's source, computed apart from the app."""
    snapshot = Document.of(text).snapshot
    return Figures(snapshot.description).text(snapshot.budget.sources["P1"].required, Dimension.PRESSURE)


def index(text: str) -> str:
    """Name the index terminal of a text's source."""
    return Document.of(text).snapshot.budget.sources["P1"].index[0]


def checked(file: Path) -> dict[str, Any]:
    """Return what `budget check --json` says of a file."""
    command = [sys.executable, "-c", "import sys; from budget.commands import main; sys.exit(main())"]
    ended = subprocess.run([*command, "check", str(file), "--json"], capture_output=True, text=True, check=False)
    found: dict[str, Any] = json.loads(ended.stdout)
    return found


def test_a_first_session(tmp_path: Path) -> None:
    file = tmp_path / "run.toml"
    file.write_text(SMALL)
    with Session(file, config=tmp_path) as session:
        session.wait_for("required")
        assert f"required {required(SMALL)}" in session.text
        assert f"» {index(SMALL)}" in session.lines[0]

        # Go to the branch that does not decide, and make it longer until it does.
        session.press("g", "B1", "enter", "enter")
        for typed in ("3", "0"):
            session.press(typed)
            length = 3 if typed == "3" else 30
            changed = SMALL.replace('length = "6.0 m"', f"length = {length}")
            assert f"required {required(changed)}" in session.text
            assert f"» {index(changed)}" in session.lines[0]
        assert index(changed) != index(SMALL)
        assert file.read_text() == SMALL
        session.press("enter")
        assert f"required {required(changed)}" in session.text
        assert "required +" in session.lines[0]
        assert "not saved" in session.lines[0]

        # A value that can't be is told beside the cell and changes nothing.
        session.press("enter", "3", "0", "q")
        row = next(line for line in session.lines if "B1" in line)
        assert "is not known" in row
        session.press("escape")
        assert f"required {required(changed)}" in session.text

        # One more radiator on that branch.
        session.press("down", "down", "t")
        assert any("R5" in line for line in session.lines)
        assert f"required {required(changed)}" not in session.text

        # Think better of both, in two steps back; then make the first one again.
        session.press("u")
        assert not any(line.lstrip("» ").startswith("R5") for line in session.lines)
        assert f"required {required(changed)}" in session.text
        session.press("u")
        assert f"required {required(SMALL)}" in session.text
        assert " saved" in session.lines[0]
        assert "not saved" not in session.lines[0]
        session.press("U", "ctrl+s")
        session.wait_for("  saved")
        shown = session.lines[1].split()
        session.send("ctrl+q")
        assert session.wait_for_end() == 0

    saved = file.read_text()
    assert saved == changed
    assert tomllib.loads(saved)["section"]["B1"]["length"] == 30
    results = checked(file)["sources"]["P1"]
    for name in ("required", "reserve", "duty", "available"):
        assert shown[shown.index(name) + 1] == f"{results[name] / 1000.0:.2f}"
    assert shown[shown.index("hand") + 1].rstrip("!") == f"{results['in_hand'] / 1000.0:.2f}"
    assert sum(a != b for a, b in zip(saved.splitlines(), SMALL.splitlines(), strict=True)) == 1


@pytest.mark.long
def test_every_screen_is_reached_and_left_again(tmp_path: Path) -> None:
    file = tmp_path / "run.toml"
    file.write_text(SMALL)
    with Session(file, config=tmp_path) as session:
        session.wait_for("required")
        for keys, shown in (
            (("v",), "as written"), (("F",), "nothing is wrong"), (("T",), "[source.P1]"),
            ((":",), "name in the config"), (("s",), "there is no list"), (("?",), "Manual"),
        ):  # fmt: skip
            session.press(*keys)
            session.wait_for(shown)
            session.press("escape")
            assert "Enter edit" in session.text
        session.press("?", "Units", "enter")
        session.wait_for("Escape back")
        session.settle(0.3)
        assert sum(bool(line.strip()) for line in session.lines) > 12
        session.press("escape")
        session.wait_for("Enter edit")
        session.send("ctrl+q")
        assert session.wait_for_end() == 0
    assert file.read_text() == SMALL
