"""The tour of the README: its commands print what it shows."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest

from budget.commands.dispatch import main

ROOT = Path(__file__).parents[1]
TOUR = re.findall(
    r"<!-- tour -->\n```console\n\$ (.*)\n((?:.*\n)*?)```", (ROOT / "README.md").read_text(encoding="utf-8")
)


def test_the_tour_is_found() -> None:
    assert len(TOUR) == 3
    assert all(command.startswith("budget ") and len(shown.splitlines()) >= 4 for command, shown in TOUR)


@pytest.mark.parametrize(("command", "shown"), TOUR)
def test_a_command_of_the_tour_prints_what_it_shows(
    command: str, shown: str, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(ROOT)
    main(shlex.split(command)[1:])
    printed = iter(capsys.readouterr().out.splitlines())
    for line in shown.splitlines():
        assert line in printed, line  # in this order, others between


def test_the_tour_names_the_index_terminal() -> None:
    from budget.commands.opening import open_run

    snapshot = open_run(str(ROOT / "examples" / "three-floor-heating.toml")).snapshot
    assert snapshot is not None
    assert snapshot.budget.sources["P1"].index == ("AH-001",)
