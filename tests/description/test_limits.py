"""A text just within a limit is read; one beyond it is refused where it goes past, and nothing else is mistaken."""

from __future__ import annotations

import pytest

from budget.description import read_text
from budget.description.limits import (
    LONGEST_KEY,
    LONGEST_NUMBER,
    LONGEST_TEXT,
    MOST_ENTRIES,
    MOST_TABLES,
    beyond_as_text,
)

LONG = "1" * (LONGEST_NUMBER + 1)


@pytest.mark.parametrize(
    "text",
    [
        "x = [" + "1," * MOST_ENTRIES + "]",
        "".join(f"a{n} = 1\n" for n in range(MOST_ENTRIES)),
        "[[a]]\n" * MOST_TABLES,
        "# " + "[" * 20 + "{}" * MOST_TABLES,
        f'x = "{"a" * LONGEST_TEXT}"',
        f"{'a' * LONGEST_KEY} = 1",
        f"x = {LONG[1:]}",
    ],
    ids=["elements", "keys", "tables", "brackets in a comment", "text", "key", "number"],
)
def test_a_text_at_a_limit_is_read(text: str) -> None:
    assert read_text(text).data is not None


@pytest.mark.parametrize(
    "text",
    [
        f"{LONG} = 1",
        f"-{LONG} = 1",
        f"a{LONG} = 1",
        f"a.{LONG} . b = 1",
        f"[{LONG}]\n[a.{LONG}]\r\n[[b.{LONG}]] # note",
        f"x = {{ {LONG} = 1 }}",
        f'x = "{LONG}"',
        f"x = '{LONG}'",
        f'x = """\n{LONG} \\" "" {LONG}"""',
        f"x = '''\n{LONG} '' {LONG}'''",
        f"# {LONG}\n",
        f"x = 1 # {LONG}",
        f'"{LONG}" = 1',
    ],
)
def test_digits_in_names_texts_and_comments_are_no_numbers(text: str) -> None:
    assert read_text(text).data is not None


@pytest.mark.parametrize(
    "number",
    [
        *(LONG, f"+{LONG}", f"-{LONG}.5", f"0.{LONG}", f"1e{LONG}", f"0x{LONG}", f"0b{LONG}", "1_1" * 20),
        *(f"1979-05-27T07:32:00.{LONG}Z", f"07:32:00.{LONG}"),
    ],
)
@pytest.mark.parametrize(
    ("before", "after"),
    [("x = ", ""), ("y = 'a'\nx=", " # a"), ("x = [", "]"), ("x = [\n  1,\n  ", ",\n]"), ("x = { a = ", " }")],
)
def test_a_number_that_is_too_long_is_found(number: str, before: str, after: str) -> None:
    found = beyond_as_text(before + number + after)
    assert found is not None
    assert (found.code, found.place) == ("long-number", len(before))
    source = read_text(before + number + after)
    assert source.data is None
    assert source.place == (before.count("\n") + 1, len(before.rpartition("\n")[2]) + 1)
