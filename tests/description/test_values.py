"""One value at a time: what each kind of key takes, and what a refused value is told."""

from __future__ import annotations

import time
from typing import Any

import pytest

from budget.description import nearest
from budget.description.schema import (
    KEYED,
    SINGLE,
    TOP,
    Array,
    Choice,
    Flag,
    Inline,
    Measure,
    Names,
    Number,
    Pairs,
    Size,
    Spec,
    Table,
    Text,
)
from budget.description.values import Reading
from budget.units import Dimension, UnitError, parse

PATH = ("section", "M1", "key")


def read(value: Any, spec: Spec) -> tuple[Any, list[str]]:
    reading = Reading()
    found = reading.value(value, spec, PATH)
    return found, [one.code for one in reading.findings]


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("12,4 m", "decimal-comma"),
        ("1,250 m", "decimal-comma"),
        ("nan m", "not-finite"),
        ("-inf", "not-finite"),
        ("1e999 m", "not-finite"),
        ("12 furlongs", "unknown-unit"),
        ("12 kPa", "wrong-dimension"),
        ("twelve", "not-a-quantity"),
        ("1/2 in", "not-a-quantity"),
        ("1,250,000 m", "not-a-quantity"),
        ("0x12 m", "not-a-quantity"),
        ("1_000 m", "not-a-quantity"),
        ("", "not-a-quantity"),
        ("9" * 70, "not-a-quantity"),
    ],
)
def test_a_text_that_is_no_length_says_in_which_way(text: str, code: str) -> None:
    with pytest.raises(UnitError) as refused:
        parse(text, Dimension.LENGTH, default_unit="m")
    assert refused.value.code == code
    assert refused.value.remedy
    assert read(text, Measure(Dimension.LENGTH)) == (None, [code])


@pytest.mark.parametrize(
    ("value", "spec", "wanted"),
    [
        ("x", Text(), "x"),
        ("b", Choice(("a", "b")), "b"),
        (True, Flag(), True),
        (3, Number(), 3.0),
        (3.0, Number(1, 5, whole=True), 3),
        ("3 m", Measure(Dimension.LENGTH), 3.0),
        (3, Measure(Dimension.LENGTH, small=True), 0.003),
        ([[1, 2], [3, 4.5]], Pairs(Number(), Number()), ((1, 2), (3, 4.5))),
        (["A", "B"], Names(), ("A", "B")),
        ({"elbow": 2}, Inline(Number()), {"elbow": 2}),
        ({"a": "x"}, Table({"a": Text()}), {"a": "x"}),
        ([{"a": "x"}], Array({"a": Text()}), ({"a": "x"},)),
        ("DN40", Size(), "DN40"),
        (40, Size(), 40),
    ],
)
def test_a_value_of_the_right_kind_is_read(value: Any, spec: Spec, wanted: Any) -> None:
    assert read(value, spec) == (wanted, [])


SPECS: tuple[Spec, ...] = (
    *(Text(), Choice(("a",)), Flag(), Number(), Measure(Dimension.FLOW)),
    *(Pairs(Number(), Number()), Names(), Inline(Text()), Table({}), Size()),
)


@pytest.mark.parametrize("spec", SPECS, ids=lambda spec: type(spec).__name__)
@pytest.mark.parametrize("wrong", [None, 10**400, [[]], [1]], ids=["date", "huge", "empty list inside", "list"])
def test_a_value_of_another_kind_is_refused_once(spec: Spec, wrong: Any) -> None:
    found, codes = read(wrong, spec)
    assert not found
    assert codes in (["type"], ["range"])


@pytest.mark.parametrize(
    ("number", "spec", "wrong"),
    [
        (0, Number(0, 1), False),
        (1, Number(0, 1), False),
        (0, Number(0, 1, above=True), True),
        (1.0000001, Number(0, 1), True),
        (-1e-9, Number(0, 1), True),
    ],
)
def test_bounds_belong_to_the_range_unless_it_says_above(number: float, spec: Number, wrong: bool) -> None:
    assert read(number, spec)[1] == (["range"] if wrong else [])


@pytest.mark.parametrize(
    ("spec", "bounds"),
    [
        (Number(0, 1), "at least 0 and at most 1"),
        (Number(0, 1, above=True), "above 0 and at most 1"),
        (Measure(Dimension.LENGTH, high=0.1, small=True), "at most 100 mm"),
        (Measure(Dimension.TEMPERATURE, 273.15, 373.15), "at least 0 degC and at most 100 degC"),
    ],
)
def test_what_is_out_of_range_is_told_the_bounds_in_the_units_of_the_design(spec: Spec, bounds: str) -> None:
    reading = Reading()
    reading.value(-99999 if isinstance(spec, Number) else 99999, spec, PATH)
    assert reading.findings[0].message.endswith(f"it must be {bounds}")


def test_nearest_names_what_is_near_or_what_is_known() -> None:
    assert nearest("lenght", ["size", "length", "from"]) == "did you mean 'length'?"
    assert nearest("zzz", ["size", "length"]) == "known are size, length"
    assert nearest("zzz", map(str, range(20))) == "known are 0, 1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, ..."
    assert nearest("a", []) == "none is known yet"


def test_faults_are_remembered_by_place() -> None:
    reading = Reading()
    assert not reading.faulty(PATH)
    reading.wrong("missing", "x; y", (*PATH, "item", 0))
    assert reading.faulty(PATH)
    assert reading.faulty((*PATH, "item"))
    assert not reading.faulty((*PATH, "item", 1))
    reading.later("x", PATH)
    reading.later("x", PATH)
    assert [one.code for one in reading.findings] == ["missing", "later"]


def test_every_table_of_the_format_is_known() -> None:
    assert set(TOP) == {"format", "library"} | set(SINGLE) | set(KEYED)
    assert all((SINGLE | KEYED).values())
    assert {"from", "to", "size", "length", "fittings", "item"} <= set(KEYED["section"])


def test_among_very_many_words_the_nearest_is_found_in_good_time() -> None:
    known = [f"S{number}" for number in range(50_000)]
    assert nearest("S12E", known).startswith("did you mean 'S12")
    assert nearest("s1234", known) == "did you mean 'S1234'?"
    assert nearest("elbow", known).startswith("known are S0, S1, ")
    start = time.process_time()
    for number in range(1_000):
        nearest(f"X{number}", known)
    assert time.process_time() - start < 4.0
