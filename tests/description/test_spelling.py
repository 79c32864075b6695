"""Keys typed by hand."""

from typing import Any

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from budget.description.edits import EditError, read_path
from budget.description.spans import Path
from budget.description.spelling import render_dotted, show

DATA = {
    "section": {"1": {"item": [{"kv": 1.0}], "curve": [[0, 1]]}, "M1": {"fittings": {"20": 2}}},
    "case": {"c": {"share": {"7": 0.5}}},
}


@pytest.mark.parametrize(
    ("text", "path"),
    [
        ("format", ("format",)),
        ("section.M1.length", ("section", "M1", "length")),
        ('terminal."FCU 1".item[0].kv', ("terminal", "FCU 1", "item", 0, "kv")),
        ("terminal.'FCU 1'.item.0.kv", ("terminal", "FCU 1", "item", 0, "kv")),
        ("source.P1.curve[1][0]", ("source", "P1", "curve", 1, 0)),
        ("source.P1.curve.1.0", ("source", "P1", "curve", 1, 0)),
        ("section.1.length", ("section", "1", "length")),
        ("case.summer.share.7", ("case", "summer", "share", "7")),
        ('section.M1.item."0"', ("section", "M1", "item", "0")),
        ('a."b\\"\\u00e9".c', ("a", 'b"é', "c")),
        ('""."a.b"', ("", "a.b")),
    ],
)
def test_a_key_is_read(text: str, path: Path) -> None:
    assert read_path(text) == path


@pytest.mark.parametrize(
    ("text", "path"),
    [
        ("section.1.item.0.kv", ("section", "1", "item", 0, "kv")),
        ("section.1.curve.0.1", ("section", "1", "curve", 0, 1)),
        ("section.M1.fittings.20", ("section", "M1", "fittings", "20")),
        ("case.c.share.7", ("case", "c", "share", "7")),
        ("case.d.share.7", ("case", "d", "share", "7")),
        ("section.M2.item.0.kv", ("section", "M2", "item", 0, "kv")),
    ],
)
def test_the_data_tells_a_position_from_a_name(text: str, path: Path) -> None:
    assert read_path(text, DATA) == path


@pytest.mark.parametrize(
    ("text", "place"),
    [
        ("", "character 1 a key"),
        (".a", "character 1 a key"),
        ("a.", "character 3 a key"),
        ("a..b", "character 3 a key"),
        ("[0].a", "character 1 a key"),
        ("a b", 'character 2 a "."'),
        ("a[x]", "character 2 a key"),
        ("a[0]b", 'character 5 a "."'),
        ('a."b', "character 3 a key"),
        ('a."\\q"', "not a TOML value"),
        ("section.é", "character 9 a key"),
        ("a\x1b", 'character 2 a "."'),
    ],
)
def test_a_key_that_is_refused(text: str, place: str) -> None:
    with pytest.raises(EditError) as caught:
        read_path(text)
    assert place in str(caught.value)
    assert str(caught.value).isprintable()


@example(["a", "b", "007"])
@example(["", "", "00"])
@given(st.lists(st.text(st.characters(exclude_categories=["Cs"]), max_size=5), min_size=1, max_size=4))
def test_a_path_that_is_shown_is_read_back(names: list[str]) -> None:
    path: tuple[Any, ...] = tuple(names)
    assert render_dotted(path) == show(path)
    assert tuple(map(str, read_path(show(path)))) == path
