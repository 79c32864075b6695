"""Balancing at 80x24: the schedule, a setting on site, the flows that it moves, and one step back."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from budget.document import Document
from budget.network.flows import Flows, solve_flows
from budget.report.figures import Figures, plain_number
from budget.report.profile import terminal_profile
from budget.report.schedule import schedule
from tests.terminal.session import Session

EXAMPLES = Path(__file__).parents[2] / "examples"


def flows_of(path: Path, text: str) -> Flows:
    """The flows as installed of a text, worked out apart from the app."""
    return solve_flows(Document.of(text, path).snapshot.budget.run)


def shown(session: Session, id_: str) -> list[str]:
    """The words of the row of an ID."""
    line = next(line for line in session.lines[3:] if line.lstrip("» ").startswith(f"{id_} "))
    return line.replace("!", " ").replace("│", " ").split()


def wait_until_solved(session: Session) -> None:
    """Wait until flows and curves stand there."""
    session.wait_for("● works here")
    session.wait_for("█")
    session.settle(0.5)
    assert "solving" not in session.text


@pytest.mark.long
def test_a_setting_moves_the_flows_and_undo_moves_them_back(tmp_path: Path) -> None:
    shutil.copytree(EXAMPLES, tmp_path / "run")
    (tmp_path / "run" / ".git").mkdir()  # what a library may lie within
    path = tmp_path / "run" / "three-floor-heating.toml"
    before = path.read_text()
    snapshot = Document.of(before, path).snapshot
    figures = Figures(snapshot.description)
    row = next(one for one in schedule(snapshot.description, snapshot.budget, figures).rows if one.id == "FC-022")
    with Session(path, config=tmp_path) as session:
        session.wait_for("required")
        session.press("g", "FC-022", "enter", "B")
        session.wait_for("in the order of work")
        assert "no readings beside the run" in session.text
        assert {plain_number(row.setting), figures.pressure(row.drop, row.density)} <= set(shown(session, "FC-022"))
        assert session.lines[22].startswith(" FC-022  DRV 15  Metal shop, south")

        # As installed, at the settings proposed, everything has its flow.
        session.press("I")
        wait_until_solved(session)
        assert "0 outside tolerance" in session.text
        assert "100.0" in shown(session, "FC-022")

        # The valve is found further shut on site: the flows follow while the setting is typed.
        session.press("B", "enter", "1")
        session.wait_until(lambda: "1" in shown(session, "FC-022"), "the setting")
        session.press("enter")
        assert "not saved" in session.lines[0]
        assert "set on site at 1" in session.text
        session.press("I")
        session.wait_for("1 outside tolerance")
        wait_until_solved(session)
        changed = before.replace("[terminal.FC-022]\n", "[terminal.FC-022]\nsetting = 1\n")
        flows = flows_of(path, changed)
        for id_ in ("FC-021", "FC-022", "FC-023"):
            one = flows.terminals[id_]
            assert {figures.flow(one.flow, one.mass_flow), f"{100.0 * one.share:.1f}"} <= set(shown(session, id_))
        assert "under" in shown(session, "FC-022")

        # Nothing is sent while nothing is done, on any of the screens.
        assert session.settle(quiet=0.6, limit=1.2) == 0
        session.press("L")
        point = terminal_profile(Document.of(changed, path).snapshot.budget, "FC-022").points[1]
        session.press("right")
        assert any(line.startswith(f" {point.id}  {point.what}  drop") for line in session.lines)
        assert session.press("right", "left") <= 2 * 400
        assert session.settle(quiet=0.6, limit=1.2) == 0
        session.press("B")
        assert session.press("up", "down") <= 2 * 600
        assert session.settle(quiet=0.6, limit=1.2) == 0

        # Back, and one step back: the file is as it was.
        session.press("u")
        assert "undone: setting of FC-022" in session.text
        session.press("I")
        session.wait_for("0 outside tolerance")
        wait_until_solved(session)
        assert "100.0" in shown(session, "FC-022")
        session.press("escape")
        session.wait_for("Enter edit")
        assert any(line.lstrip("» ").startswith("FC-022") for line in session.lines)
        assert "not saved" not in session.lines[0]
        session.send("ctrl+q")
        assert session.wait_for_end() == 0
    assert path.read_text() == before


def test_a_run_that_is_being_solved_is_left_at_once(tmp_path: Path) -> None:
    shutil.copytree(EXAMPLES, tmp_path / "run")
    path = tmp_path / "run" / "air-handling-unit.toml"
    with Session(path, config=tmp_path) as session:
        session.wait_for("required")
        session.send("I", "o", "o", "ctrl+q")
        assert session.wait_for_end() == 0
