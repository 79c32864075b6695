"""The target `spans`: where the index says that a key or a value stands, there stands what TOML's own reader found."""

from __future__ import annotations

import tomllib
from typing import Any

from budget.description.finding import Path
from budget.description.source import Source, read_text
from budget.description.spans import SpanError, SpanIndex


def spans(data: bytes) -> None:
    """Compare the index of a text with what TOML's own reader makes of it."""
    try:
        text = data.decode("utf-8")
    except UnicodeDecodeError:
        return
    source = read_text(text)
    if source.data is None:
        try:
            SpanIndex.of(text)
        except SpanError:
            return
    compare(source)


def compare(source: Source) -> None:
    """Compare every key and value of a text that TOML's reader accepted with what stands at its place."""
    if source.data is None:
        return
    index = SpanIndex.of(source.text)
    seen: set[Path] = set()
    _compare(index, source.data, (), seen)
    assert seen == set(index.paths()), "the index has other paths than the data"
    for path in seen:
        line, column = index.locate(path)
        assert 1 <= line <= source.text.count("\n") + 1, path
        assert column >= 1, path


def same(one: Any, other: Any) -> bool:
    """Whether two values of TOML are the same, kinds, signs and nan included."""
    if type(one) is not type(other):
        return False
    if isinstance(one, dict):
        return one.keys() == other.keys() and all(same(value, other[key]) for key, value in one.items())
    if isinstance(one, list):
        return len(one) == len(other) and all(map(same, one, other))
    return repr(one) == repr(other)


def _compare(index: SpanIndex, value: Any, path: Path, seen: set[Path]) -> None:
    if path:
        seen.add(path)
        _check_value(index, value, path)
        if isinstance(path[-1], str):
            _check_key(index, path)
    if isinstance(value, dict | list):
        for key, inner in value.items() if isinstance(value, dict) else enumerate(value):
            _compare(index, inner, (*path, key), seen)


def _check_value(index: SpanIndex, value: Any, path: Path) -> None:
    span = index.value(path)
    if span is not None:
        text = index.text[span.start : span.end]
        assert same(tomllib.loads(f"x = {text}"), {"x": value}), (path, text)
        return
    first = (*path, 0) if isinstance(value, list) else path
    named = index.table(first) is not None or bool(index.occurrences(path))
    assert isinstance(value, dict | list), (path, "has no place")
    assert named, (path, "is named nowhere")


def _check_key(index: SpanIndex, path: Path) -> None:
    places = index.occurrences(path)
    assert places, (path, "has no key")
    assert index.key(path) in places, path
    for span in places:
        text = index.text[span.start : span.end]
        assert list(tomllib.loads(f"{text} = 1")) == [path[-1]], (path, text)
