"""The targets on the corpus and on generated input: a short turn of what the search does for longer."""

from __future__ import annotations

import time
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from budget.units import units_of
from tests.description.mutations import TEXTS, mutate
from tests.description.tangles import tangle
from tests.description.toml_texts import documents
from tests.fuzz import TARGETS, targets
from tests.fuzz.targets import BY_NAME, LONGEST, HangError, corpus, run
from tests.fuzz.units import DIMENSIONS

FILES = [pytest.param(name, path, id=f"{name}: {path.name}") for name in TARGETS for path in corpus(name)]
QUICK = settings(deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.filter_too_much])

RUNS = st.builds(
    lambda text, random, times: mutate(text, random, times).encode("utf-8", "surrogatepass"),
    st.sampled_from(TEXTS),
    st.randoms(use_true_random=False),
    st.integers(1, 4),
)
"""Whole runs with something knocked out of place."""

TANGLES = st.randoms(use_true_random=False).map(lambda random: tangle(random).encode())
"""Runs in which anything hangs on anything."""

DOCUMENTS = documents().map(lambda text: text.encode("utf-8", "surrogatepass"))
"""TOML in every spelling."""

UNITS = sorted({unit for dimension in DIMENSIONS for unit in units_of(dimension)})
QUANTITIES = st.tuples(
    st.binary(min_size=2, max_size=2),
    st.one_of(
        st.binary(max_size=20),
        st.tuples(
            st.one_of(st.floats().map(str), st.from_regex(r"\s?[-+−]?[0-9]{0,4}[.,/_ -]?[0-9]{1,3}(e-?[0-9]{1,3})?")),
            st.sampled_from(["", " ", "\t", "."]),
            st.one_of(st.sampled_from(UNITS), st.text("mkPaKWft in.³/()°\u202e", max_size=9)),
        ).map(lambda parts: "".join(parts).encode()),
    ),
).map(b"".join)
"""Texts that are, or might have been, quantities."""

GENERATED = {
    "reading": RUNS | DOCUMENTS | TANGLES,
    "telling": TANGLES | RUNS,
    "spans": DOCUMENTS | RUNS,
    "edits": st.tuples(DOCUMENTS | RUNS, st.just(b"\0"), st.binary(min_size=4, max_size=30)).map(b"".join),
    "units": QUANTITIES,
}


@pytest.mark.parametrize(("name", "path"), FILES)
def test_every_file_of_the_corpus_passes(name: str, path: Path) -> None:
    run(BY_NAME[name], path.read_bytes())


@pytest.mark.parametrize("name", TARGETS)
@settings(QUICK, max_examples=100)
@given(data=st.data())
def test_generated_input_passes(name: str, data: st.DataObject) -> None:
    run(BY_NAME[name], data.draw(GENERATED[name]))


@pytest.mark.parametrize("name", TARGETS)
@settings(QUICK, max_examples=60)
@given(content=st.binary(max_size=200))
def test_any_bytes_pass(name: str, content: bytes) -> None:
    run(BY_NAME[name], content)


@pytest.mark.long
@pytest.mark.parametrize("name", TARGETS)
@settings(QUICK, max_examples=1000)
@given(data=st.data())
def test_much_generated_input_passes(name: str, data: st.DataObject) -> None:
    run(BY_NAME[name], data.draw(GENERATED[name]))


def test_an_input_that_takes_too_long_is_a_fault() -> None:
    def slow(_: bytes) -> None:
        end = time.process_time() + LONGEST * 1.05
        while time.process_time() < end:
            pass

    with pytest.raises(HangError):
        run(slow, b"")


def test_an_input_that_never_ends_is_given_up(monkeypatch: pytest.MonkeyPatch) -> None:
    def endless(_: bytes) -> None:
        while True:
            pass

    monkeypatch.setattr(targets, "GIVEN_UP", 0.1)
    with pytest.raises(HangError, match="given up"):
        run(endless, b"")
