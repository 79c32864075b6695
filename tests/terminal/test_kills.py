"""Killed outright, the app leaves a whole file and a readable record, and loses no edit older than five seconds."""

from __future__ import annotations

import pytest

from tests.terminal.kills import MANNERS, kill, several, table


def test_killed_while_it_saves_it_loses_nothing() -> None:
    outcome = kill("at a save", 3, again=True, last=0.0)
    assert outcome.problems == []
    assert outcome.edits > 0


@pytest.mark.long
def test_killed_at_any_moment_it_loses_no_edit_older_than_five_seconds() -> None:
    outcomes = several(5 * len(MANNERS), at_once=4)
    assert [(one.manner, one.seed, one.problems) for one in outcomes if one.problems] == [], "\n".join(table(outcomes))
    assert sum(one.edits for one in outcomes) > 100
    assert sum(one.saves for one in outcomes) > 20
    assert any(one.left for one in outcomes)
