"""The places of headers, keys and values, in every spelling of TOML."""

import time
import tomllib
from collections.abc import Iterator
from typing import Any

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from budget.description.spans import Path, Span, SpanError, SpanIndex
from tests.description.toml_texts import documents

RUN = """\
# A heating run.
format = 1

[design]
title = "Quayside"  # shown on every report

# The risers.
# Both are new.
[section.M1]
from = "P1"
fittings = { "elbow 90" = 4, 'gate valve' = 2 }

  [[section.M1.item]]
  name = "Strainer"

[[section.M1.item]]
kv = 21.0
# the end of the item

# On the second floor:

[ terminal . "FCU 1" ]
curve = [
  ["0 L/s", "80 kPa"],  # shut-off
  ["1.2 L/s", "72 kPa"],
]
run.out.size = "DN20"
"""


def paths_of(value: Any, path: Path = ()) -> Iterator[Path]:
    if path:
        yield path
    if isinstance(value, dict):
        for key, inner in value.items():
            yield from paths_of(inner, (*path, key))
    elif isinstance(value, list):
        for position, inner in enumerate(value):
            yield from paths_of(inner, (*path, position))


def value_of(data: Any, path: Path) -> Any:
    for part in path:
        data = data[part]
    return data


def read(text: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError:
        assume(False)
        raise


@settings(max_examples=100, deadline=None)
@given(documents())
def test_the_paths_are_those_of_the_document_and_each_span_spells_its_value(text: str) -> None:
    data = read(text)
    index = SpanIndex.of(text)
    paths = list(index.paths())
    assert sorted(map(repr, paths)) == sorted(map(repr, paths_of(data)))
    for path in paths:
        value = index.value(path)
        if value is not None:
            spelled = text[value.start : value.end]
            assert tomllib.loads("x = " + spelled)["x"] == value_of(data, path)
        key = index.key(path)
        if isinstance(path[-1], str):
            assert key is not None
            assert key in index.occurrences(path) or path not in index.tables()
            for found in index.occurrences(path):
                assert list(tomllib.loads(text[found.start : found.end] + " = 1")) == [path[-1]]
        line, column = index.locate(path)
        assert 1 <= line <= text.count("\n") + 1
        assert column >= 1


@settings(max_examples=100, deadline=None)
@given(documents(), st.data())
def test_a_character_of_a_value_leads_to_its_path(text: str, data: st.DataObject) -> None:
    read(text)
    index = SpanIndex.of(text)
    with_value = [path for path in index.paths() if index.value(path)]
    assume(with_value)
    path = data.draw(st.sampled_from(with_value))
    entry = index.entry(path)
    assert entry is not None
    offset = data.draw(st.integers(entry.start, entry.end - 1))
    assert index.path_at(offset)[: len(path)] == path
    assert isinstance(index.path_at(data.draw(st.integers(0, len(text)))), tuple)


@settings(max_examples=100, deadline=None)
@given(documents())
def test_blocks_stand_in_order_apart_from_each_other_and_hold_their_own_lines(text: str) -> None:
    read(text)
    index = SpanIndex.of(text)
    position = 0
    for path in [(), *index.tables()]:
        block, table = index.block(path), index.table(path)
        assert block is not None
        assert table is not None
        assert position <= block.start <= table.start <= table.body_end <= block.end
        between = text[position : block.start].splitlines()
        assert all(not line.strip() or line.lstrip().startswith("#") for line in between)
        position = block.end
        assert len(SpanIndex.of(text[block.start : block.end]).tables()) == (1 if path else 0)


def shown(text: str, span: Span | None) -> str:
    assert span is not None
    return text[span.start : span.end]


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_a_run(newline: str) -> None:
    text = RUN.replace("\n", newline)
    index = SpanIndex.of(text)
    assert index.tables() == [
        ("design",),
        ("section", "M1"),
        ("section", "M1", "item", 0),
        ("section", "M1", "item", 1),
        ("terminal", "FCU 1"),
    ]
    assert shown(text, index.value(("design", "title"))) == '"Quayside"'
    assert shown(text, index.key(("design", "title"))) == "title"
    assert shown(text, index.value(("section", "M1", "fittings", "gate valve"))) == "2"
    assert shown(text, index.key(("section", "M1", "fittings", "gate valve"))) == "'gate valve'"
    assert shown(text, index.entry(("section", "M1", "fittings", "elbow 90"))) == '"elbow 90" = 4'
    assert shown(text, index.value(("section", "M1", "item", 1, "kv"))) == "21.0"
    assert shown(text, index.value(("terminal", "FCU 1", "curve", 1, 0))) == '"1.2 L/s"'
    assert shown(text, index.entry(("terminal", "FCU 1", "run", "out", "size"))) == 'run.out.size = "DN20"'
    assert shown(text, index.header(("terminal", "FCU 1"))) == '[ terminal . "FCU 1" ]'
    assert shown(text, index.key(("terminal", "FCU 1"))) == '"FCU 1"'
    assert shown(text, index.header(("section", "M1", "item", 0))) == "[[section.M1.item]]"
    assert len(index.occurrences(("section", "M1"))) == 3
    assert len(index.occurrences(("section",))) == 3
    assert index.key(("section", "M1", "item")) == index.key(("section", "M1", "item", 0))
    for missing in [("section", "M2"), ("design", "title", "x"), ("terminal", "FCU 1", "curve", 9), ("x",)]:
        assert index.value(missing) is index.key(missing) is index.entry(missing) is None
        assert index.header(missing) is index.block(missing) is None
        assert index.table(missing) is None
        assert index.occurrences(missing) == ()
    assert index.header(()) is None


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_blocks_of_a_run(newline: str) -> None:
    text = RUN.replace("\n", newline)
    index = SpanIndex.of(text)

    def block(*path: str | int) -> list[str]:
        return shown(text, index.block(path)).split(newline)

    assert block("design") == ["[design]", 'title = "Quayside"  # shown on every report', "", ""]
    assert block("section", "M1")[:3] == ["# The risers.", "# Both are new.", "[section.M1]"]
    assert block("section", "M1", "item", 0) == ["  [[section.M1.item]]", '  name = "Strainer"', "", ""]
    assert block("section", "M1", "item", 1)[-3:] == ["# the end of the item", "", ""]
    assert block("terminal", "FCU 1")[0] == '[ terminal . "FCU 1" ]'
    assert block() == ["# A heating run.", "format = 1", "", ""]


@pytest.mark.parametrize("newline", ["\n", "\r\n"])
def test_lines_and_columns(newline: str) -> None:
    index = SpanIndex.of(RUN.replace("\n", newline))
    assert index.locate(("format",)) == (2, 10)
    assert index.locate(("design", "title")) == (5, 9)
    assert index.locate(("section", "M1")) == (9, 10)
    assert index.locate(("section", "M1", "item", 0, "name")) == (14, 10)
    assert index.locate(("section", "M1", "item", 0, "kv")) == (13, 16)  # its table, as it is missing
    assert index.locate(("section", "M1", "fittings", "tee branch")) == (11, 12)
    assert index.locate(("terminal", "FCU 1", "curve", 1, 0)) == (25, 4)
    assert index.locate(("terminal", "FCU 1", "run", "out")) == (27, 5)
    assert index.locate(("section", "M9")) == (9, 2)
    assert index.locate(("nothing",)) == (1, 1)
    assert index.locate(()) == (1, 1)


def test_a_column_counts_characters() -> None:
    assert SpanIndex.of('a = { "é😀" = 1, b = 2 }').locate(("a", "b")) == (1, 21)


def test_the_path_under_a_cursor() -> None:
    index = SpanIndex.of(RUN)

    def at(text: str, further: int = 0) -> Path:
        return index.path_at(RUN.index(text) + further)

    assert at("format") == ("format",)
    assert at("shown on") == ("design", "title")
    assert at("# The risers") == ("section", "M1")
    assert at("[section.M1]") == ("section", "M1")
    assert at("'gate valve'") == ("section", "M1", "fittings", "gate valve")
    assert at(", 'gate") == ("section", "M1", "fittings")
    assert at("  name") == ("section", "M1", "item", 0, "name")
    assert at("21.0", 4) == ("section", "M1", "item", 1, "kv")
    assert at("# the end of") == ("section", "M1", "item", 1)
    assert at('"72 kPa"', 2) == ("terminal", "FCU 1", "curve", 1, 1)
    assert at("# shut-off") == ("terminal", "FCU 1", "curve")
    assert at("out.size") == ("terminal", "FCU 1", "run", "out", "size")
    assert index.path_at(len(RUN)) == ("terminal", "FCU 1")
    assert SpanIndex.of("a = 1").path_at(5) == ("a",)
    assert SpanIndex.of("").path_at(0) == ()


def test_nested_too_deeply_is_an_error_not_a_crash() -> None:
    for opening, closing in (("[", "]"), ("{ a = ", " }")):
        text = "x = " + opening * 5000 + "1" + closing * 5000
        with pytest.raises(SpanError, match=r"line 1, column \d+: .* nested more than 64"):
            SpanIndex.of(text)
        fair = "x = " + opening * 32 + "1" + closing * 32
        assert len(list(SpanIndex.of(fair).paths())) == 33


@settings(max_examples=100, deadline=None)
@given(st.text(alphabet="ab=[]{}\"'\\#.,\n\r 1-", max_size=40))
def test_what_is_no_toml_is_refused_or_indexed_but_never_hangs(text: str) -> None:
    try:
        list(SpanIndex.of(text).paths())
    except SpanError as error:
        refused = str(error)
    else:
        return
    assert refused
    with pytest.raises(tomllib.TOMLDecodeError):
        tomllib.loads(text)


def test_a_long_file_is_indexed_fast() -> None:
    section = '[section.M{0}]\nfrom = "P1"\nlength = "14.5 m"  # note\nfittings = {{ "elbow 90" = 4 }}\n\n'
    text = "".join(section.format(number) for number in range(2000))
    started = time.process_time()
    SpanIndex.of(text)
    assert time.process_time() - started < 5.0  # about 0.02 s; slow machines are given room
