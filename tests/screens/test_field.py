"""A field makes of keys what a person expects."""

from hypothesis import given
from hypothesis import strategies as st

from budget.screens.field import LONGEST, Field
from budget.screens.safe import width_of


def typed(field: Field, text: str) -> Field:
    for c in text:
        field = field.press("x", c) or field
    return field


def keyed(field: Field, *keys: str) -> Field:
    for key in keys:
        pressed = field.press(key, None)
        assert pressed is not None
        field = pressed
    return field


def test_the_first_letter_replaces_the_whole_value() -> None:
    assert typed(Field.holding("14.5 m"), "16").text == "16"


def test_an_arrow_keeps_the_value() -> None:
    field = typed(keyed(Field.holding("14.5 m"), "home", "right"), "0")
    assert (field.text, field.at) == ("104.5 m", 2)


def test_backspace_clears_a_marked_value_and_takes_one_letter_else() -> None:
    assert keyed(Field.holding("14.5 m"), "backspace").text == ""
    assert keyed(Field.holding("14.5 m"), "end", "backspace").text == "14.5 "
    assert keyed(Field.holding("14.5 m"), "home", "delete").text == "4.5 m"


def test_words_and_lines_are_cut() -> None:
    assert keyed(Field("one two ", 8), "ctrl+w").text == "one "
    assert keyed(Field("one two", 3), "ctrl+u").text == " two"
    assert keyed(Field("one two", 3), "ctrl+k").text == "one"


def test_other_keys_mean_nothing_to_it() -> None:
    assert Field("a", 1).press("f5", None) is None


def test_what_is_pasted_is_one_plain_line() -> None:
    assert Field().insert("12 m\n\x1b[2J").text == "12 m ?[2J".replace("?", "\N{REPLACEMENT CHARACTER}")
    assert Field().insert("x" * 9999) == Field()
    assert len(Field("a", 1, fresh=True).insert("x" * 9999).text) == LONGEST


@given(st.text(st.characters(categories=["L", "N", "P"]), max_size=60), st.integers(0, 60), st.integers(2, 30))
def test_the_window_shows_the_place_of_writing(text: str, at: int, width: int) -> None:
    field = Field(text, min(at, len(text)))
    before, letter, after = field.window(width)
    assert width_of(before + letter + after) <= max(width, width_of(letter))
    assert letter == (text[field.at : field.at + 1] or " ")
    assert before + letter + after in text + " "
