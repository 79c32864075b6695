"""Random edits of a real run: what was not touched is the same to the byte, and what is read back is what was meant."""

from __future__ import annotations

import dataclasses
import difflib
import tomllib
from collections.abc import Callable
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from budget.description import Description, SourceText, describe, read_text
from budget.description.edits import CopyTable, Edit, RemoveTable, SetValue, Unset, apply_to_text, apply_to_value
from tests.journeys.test_every_key import EXAMPLES, leaves

TEXTS = {path.stem: path.read_bytes().decode() for path in EXAMPLES}
ENDINGS: dict[str, Callable[[str], str]] = {
    "as it is": lambda text: text,
    "CRLF": lambda text: text.replace("\n", "\r\n"),
    "cut": lambda text: text.rstrip("\n"),
}


@st.composite
def edits(draw: st.DrawFn, data: dict[str, Any]) -> Edit:
    """Draw an edit of one value, of a whole entry, or a copy of one."""
    what = draw(st.sampled_from(["set", "set", "set", "unset", "remove", "copy"]))
    if what in ("set", "unset"):
        path, value = draw(st.sampled_from([leaf for leaf in leaves(data) if leaf[0] != ("format",)]))
        if what == "unset" and not isinstance(path[-1], int):
            return Unset(path)
        others = [other for at, other in leaves(data) if at[-1] == path[-1] and type(other) is type(value)]
        return SetValue(path, draw(st.sampled_from(others)))
    table = draw(st.sampled_from([key for key in ("device", "section", "terminal") if data.get(key)]))
    id_ = draw(st.sampled_from(sorted(data[table])))
    if what == "remove":
        return RemoveTable((table, id_))
    return CopyTable((table, id_), (table, f"{id_} copy"), {})


def described(source: SourceText) -> Description:
    """Return the description, its findings in an order that does not depend on that of the tables."""
    description = describe(source)
    return dataclasses.replace(description, findings=tuple(sorted(description.findings, key=repr)))


def untouched(before: str, after: str) -> int:
    """Return how many characters of the text before do not stand in the text after, in their order."""
    old, new = before.splitlines(keepends=True), after.splitlines(keepends=True)
    blocks = difflib.SequenceMatcher(None, old, new, autojunk=False).get_matching_blocks()
    return len(before) - sum(len("".join(old[block.a : block.a + block.size])) for block in blocks)


@pytest.mark.long
@settings(max_examples=500, deadline=None, suppress_health_check=list(HealthCheck))
@given(st.data())
def test_500_random_edits_touch_nothing_else(draw: st.DataObject) -> None:
    name = draw.draw(st.sampled_from(sorted(TEXTS)), label="example")
    ending = draw.draw(st.sampled_from(sorted(ENDINGS)), label="line ends")
    text = ENDINGS[ending](TEXTS[name])
    data = tomllib.loads(text)
    edit = draw.draw(edits(data), label="edit")
    changed = apply_to_text(text, edit)
    expected = apply_to_value(data, edit)
    if isinstance(edit, RemoveTable):  # a table that only its entries made goes with the last of them
        expected = {key: value for key, value in expected.items() if value != {}}
    assert tomllib.loads(changed) == expected
    assert described(read_text(changed)) == described(SourceText(changed, expected))
    if ending == "CRLF":
        assert "\n" not in changed.replace("\r\n", "")
    if isinstance(edit, SetValue):
        before, after = text.splitlines(keepends=True), changed.splitlines(keepends=True)
        assert len(before) == len(after)
        assert sum(old != new for old, new in zip(before, after, strict=True)) <= 1
    elif isinstance(edit, Unset):
        assert len(changed) < len(text)
        assert untouched(text, changed) <= max(map(len, text.splitlines(keepends=True)))
    elif isinstance(edit, CopyTable):
        assert untouched(text, changed) <= (0 if ending != "cut" else 200)
    else:
        kept = changed.splitlines()
        assert all(line in text.splitlines() for line in kept)
