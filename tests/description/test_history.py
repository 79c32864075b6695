"""Undo and redo."""

from hypothesis import given
from hypothesis import strategies as st

from budget.description.history import History


def test_undo_and_redo() -> None:
    opened = History.of("a", mark=1)
    assert (opened.text, opened.label, opened.mark) == ("a", "", 1)
    assert not opened.can_undo
    assert not opened.can_redo
    assert opened.undo() is opened
    assert opened.redo() is opened
    edited = opened.push("b", "set size", mark=2).push("c", "add section", mark=3)
    assert (edited.text, edited.label, edited.mark) == ("c", "add section", 3)
    back = edited.undo()
    assert (back.text, back.label, back.mark, back.redo_label) == ("b", "set size", 2, "add section")
    assert back.redo() == edited
    assert edited.redo_label == ""
    assert back.undo().text == "a"
    assert opened.text == "a"


def test_a_new_step_drops_what_was_undone() -> None:
    history = History.of("a").push("b", "one").push("c", "two").undo().push("d", "three")
    assert history.text == "d"
    assert not history.can_redo
    assert history.undo().text == "b"


def test_the_same_text_is_no_step() -> None:
    history = History.of("a")
    assert history.push("a", "nothing") is history


@given(st.lists(st.text(max_size=3)), st.integers(min_value=0, max_value=40))
def test_every_step_can_be_undone_and_brought_back(texts: list[str], count: int) -> None:
    history = History.of("")
    for text in texts:
        history = history.push(text, "step")
    steps = [step.text for step in history.steps]
    position = len(steps) - 1
    for _ in range(count):
        history, position = history.undo(), max(0, position - 1)
        assert history.text == steps[position]
    for _ in range(count):
        history = history.redo()
    assert history.text == steps[min(len(steps) - 1, position + count)]
