"""IDs that stand twice: an error, and both parts are there to be seen, each with its own figures."""

from __future__ import annotations

import pytest

from budget.description import describe, read_text
from budget.document import Document
from budget.network import evaluate
from tests.description.sound import SOUND

TWICE = [("section.B1", "P1"), ("terminal.T2", "B1"), ("terminal.T2", "P1"), ("terminal.T2", "M1")]


def renamed(old: str, new: str) -> str:
    """The run with a table under another ID, and nothing that hung on it led astray."""
    table, id_ = old.split(".")
    text = SOUND.replace(f"[{old}]", f"[{table}.{new}]").replace(f"[[{old}.", f"[[{table}.{new}.")
    return text.replace(f'from = "{id_}"', 'from = "M1"').replace(f'to = "{id_}"', 'to = "M1"')


@pytest.mark.parametrize(("old", "taken"), TWICE)
def test_a_part_whose_id_is_taken_has_the_figures_that_it_has_under_another(old: str, taken: str) -> None:
    twice, once = Document.of(renamed(old, taken)).snapshot, Document.of(renamed(old, "Z9")).snapshot
    table = old.split(".", maxsplit=1)[0]
    apart = f"{taken} ({table})"
    assert {finding.code for finding in twice.findings} - {finding.code for finding in once.findings} == {
        "duplicate-id"
    }
    assert twice.budget.sources["P1"].required == once.budget.sources["P1"].required
    if table == "section":
        assert twice.budget.sections[apart].run.drop == once.budget.sections["Z9"].run.drop
    else:
        assert twice.budget.terminals[apart].margin == once.budget.terminals["Z9"].margin
    order = once.description.order
    assert twice.description.order == tuple(apart if id_ == "Z9" else id_ for id_ in order)


def test_three_parts_and_one_that_is_called_as_the_second_would_be_are_kept_apart() -> None:
    text = (
        'format = 1\n[source.P1]\n[section.P1]\nfrom = "P1"\n[terminal.P1]\nfrom = "P1"\n'
        '[section."P1 (terminal)"]\nfrom = "P1"\n'
    )
    description = describe(read_text(text))
    assert set(description.sections) == {"P1 (section)", "P1 (terminal)"}
    assert set(description.terminals) == {"P1 (terminal) (terminal)"}
    assert description.order == ("P1", "P1 (section)", "P1 (terminal) (terminal)", "P1 (terminal)")
    assert all(part.path[1] == "P1" for part in description.terminals.values())
    assert evaluate(description).sources.keys() == {"P1"}
