"""What is typed into a field becomes a value, or a sentence says why not."""

from __future__ import annotations

import pytest

from budget.description import Path
from budget.screens.writing import WritingError, value_of

MANY = "9" * 5_000


@pytest.mark.parametrize("path", [("section", "M1", "length"), ("device", "V", "kv"), ("section", "M1", "unheard")])
@pytest.mark.parametrize("typed", [MANY, f"[{MANY}]", "[" * 5_000, "{ a = " * 2_000])
def test_a_number_without_end_and_brackets_without_end_are_refused(path: Path, typed: str) -> None:
    if typed[0] in "[{" and path[2] == "length":
        assert value_of(typed, path, "") == typed.strip()  # a quantity is a text, and refused as one
        return
    with pytest.raises(WritingError):
        value_of(typed, path, "")
