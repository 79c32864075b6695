"""Whatever a slip of the hand makes of a file: it is read, computed and reported, and nothing is raised."""

from __future__ import annotations

from random import Random

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from budget.description import CODES, read_bytes
from tests.description.mutations import SNIPPETS, TEXTS, VALUES, mutate
from tests.description.reading import findings_in
from tests.description.sound import SOUND

QUICK = settings(deadline=None, suppress_health_check=[HealthCheck.too_slow])


def check(text: str) -> None:
    lines = text.split("\n")
    for one in findings_in(text.encode("utf-8", "surrogatepass")):
        assert one.code in CODES
        assert one.message
        assert "\n" not in one.message
        assert 1 <= one.line <= len(lines)
        assert 1 <= one.column <= len(lines[one.line - 1]) + 2


@settings(QUICK, max_examples=300)
@given(st.sampled_from(TEXTS), st.randoms(use_true_random=False), st.integers(1, 4))
def test_a_mutated_run_is_read_computed_and_reported(text: str, random: Random, times: int) -> None:
    check(mutate(text, random, times))


@settings(QUICK, max_examples=100)
@given(st.binary(max_size=200))
def test_any_bytes_are_read(content: bytes) -> None:
    read_bytes(content)
    findings_in(content)


@pytest.mark.parametrize("turn", range(len(VALUES)), ids=lambda turn: VALUES[turn][:20])
def test_keys_take_any_value_or_refuse_it(turn: int) -> None:
    lines, value = SOUND.split("\n"), VALUES[turn]
    for number, line in enumerate(lines):
        key, equals, _ = line.partition(" = ")
        if equals and (number + turn) % 5 == 0:
            check("\n".join([*lines[:number], key + equals + value, *lines[number + 1 :]]))


@pytest.mark.parametrize("snippet", SNIPPETS, ids=repr)
def test_a_stray_character_does_not_stop_the_report(snippet: str) -> None:
    for place in range(0, len(SOUND), 29):
        check(SOUND[:place] + snippet + SOUND[place:])
