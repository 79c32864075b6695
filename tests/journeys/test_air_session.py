"""A session on an air system: what leaves a trunk and what goes straight on change places, and a branch its size."""

from __future__ import annotations

import json
import math
import shutil
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import pytest

from budget.description.model import Description, Section
from budget.document import Document
from budget.report.figures import Figures
from budget.screens.joining import meeting
from budget.units import Dimension
from tests.terminal.session import Session

EXAMPLE = Path(__file__).parents[2] / "examples" / "air-handling-unit.toml"
FIGURES = Figures(Document.open(EXAMPLE).snapshot.description)
JOINTS = ("junction", "transition")


def checked(file: Path) -> dict[str, Any]:
    """Return what `budget check --json` says of a file."""
    command = [sys.executable, "-m", "budget", "check", str(file), "--json"]
    ended = subprocess.run(command, capture_output=True, text=True, check=False)
    found: dict[str, Any] = json.loads(ended.stdout)
    return found


def first_junction(description: Description) -> tuple[Section, Section]:
    """Return the first two sections that make a junction: the branch, and what goes straight on."""
    for section in description.sections.values():
        others = meeting(description, section)
        if section.takeoff == "branch" and len(others) == 1 and others[0].takeoff == "straight":
            other = others[0]
            if isinstance(other, Section) and section.run.geometry is not None:
                return section, other
    pytest.fail("the example has no junction of two sections")


def spelled(found: dict[str, Any], what: Sequence[str], *ids: str) -> list[str]:
    """Spell a sum of figures of each section as the app shows it, from the JSON of the command line."""
    sums = [math.fsum(found["sections"][id_][key] for key in what) for id_ in ids]
    return [FIGURES.text(value, Dimension.PRESSURE) for value in sums]


def go_to(session: Session, id_: str) -> None:
    """Put the cursor on a section."""
    session.press("g", id_, "enter")
    assert any(line.lstrip("» ").startswith(id_) for line in session.lines)


def listed(session: Session) -> list[str]:
    """List what a section can be at its junction; return the figures of what it is now, at both legs."""
    session.press("y")
    session.wait_for("at each leg")
    session.settle(0.25)  # the figures come one by one
    return next(line for line in session.lines if line.endswith("  now")).split()[1:3]


def save(session: Session) -> None:
    """Save, and wait until it is told."""
    session.press("ctrl+s")
    session.wait_for("  saved")


def shown_drop(session: Session, id_: str, drop: str) -> bool:
    """Whether the row of a section shows a drop."""
    return any(line.lstrip("» ").startswith(f"{id_} ") and f" {drop} " in line for line in session.lines)


@pytest.mark.long
def test_a_junction_is_changed_and_put_back(tmp_path: Path) -> None:
    file, kept = tmp_path / "air.toml", tmp_path / "kept.toml"
    for copy in (file, kept):
        shutil.copy(EXAMPLE, copy)
    branch, straight = first_junction(Document.open(file).snapshot.description)
    ids = (branch.id, straight.id)
    with Session(file, config=tmp_path) as session:
        session.wait_for("required")

        # What the list says of the junction is what the command line says of the file.
        go_to(session, branch.id)
        before = listed(session)
        assert before == spelled(checked(file), JOINTS, *ids)

        # The branch goes straight on, and the other one becomes the branch: both legs change.
        session.press(f"straight, and {straight.id}", "enter")
        save(session)
        description = Document.open(file).snapshot.description
        assert description.sections[branch.id].takeoff == "straight"
        assert description.sections[straight.id].takeoff == "branch"
        swapped, found = listed(session), checked(file)
        assert swapped == spelled(found, JOINTS, *ids)
        assert all(now != was for now, was in zip(swapped, before, strict=True))
        session.press("escape")
        for id_, drop in zip(ids, spelled(found, ("drop",), *ids), strict=True):
            go_to(session, id_)
            assert shown_drop(session, id_, drop)

        # One step back restores it, on the screen and in the file.
        session.press("u")
        save(session)
        assert file.read_bytes() == kept.read_bytes()
        go_to(session, branch.id)
        assert listed(session) == before
        session.press("escape")

        # Another size of the branch changes what both legs lose, for the area ratio of the junction is another.
        session.press("s")
        session.press("400 mm", "enter")
        save(session)
        assert Document.open(file).snapshot.description.sections[branch.id].run.geometry != branch.run.geometry
        resized = listed(session)
        assert resized == spelled(checked(file), JOINTS, *ids)
        assert all(now != was for now, was in zip(resized, before, strict=True))
        session.press("escape", "u")
        assert listed(session) == before
        session.press("escape")
        save(session)
        session.send("ctrl+q")
        assert session.wait_for_end() == 0
    assert file.read_bytes() == kept.read_bytes()
