"""Pipe lines: names, sizes, roughness, spelling."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.catalogue import PipeLine, pipe_line, pipe_names

NAMES = (
    "steel EN 10255 medium", "steel EN 10255 heavy", "steel ASME B36.10 schedule 40",
    "steel ASME B36.10 schedule 80",
    "copper EN 1057 table X", "copper EN 1057 table Y", "copper EN 1057 metric", "copper ASTM B88 type L",
    "copper ASTM B88 type M", "stainless EN 10312 series 1", "stainless press", "PE 100 SDR 11",
    "PE 100 SDR 17",
    "PP-R SDR 7.4", "PP-R SDR 11", "PEX ISO 15875 S 3.2", "PEX ISO 15875 S 5", "PEX class C",
    "PEX ASTM F876 SDR 9",
    "multilayer ISO 21003",
)  # fmt: skip


def line(name: str) -> PipeLine:
    found = pipe_line(name)
    assert found is not None
    return found


def test_there_are_the_twenty_lines() -> None:
    assert pipe_names() == NAMES
    assert pipe_line("steel of no standard") is None
    assert pipe_line("  Steel  EN 10255   MEDIUM ") == line("steel EN 10255 medium")


@pytest.mark.parametrize("name", NAMES)
def test_every_line_is_whole(name: str) -> None:
    pipe = line(name)
    assert pipe.source
    assert pipe.known_from
    assert pipe.confidence
    assert pipe.roughness_source
    bores = [size.bore for size in pipe.sizes]
    assert bores == sorted(bores)
    for size in pipe.sizes:
        wall = (size.outside - size.bore) / 2
        assert 0.0005 < wall < 0.03
        assert 0 < size.bore < size.outside
        assert pipe.find(size.written) is size
        assert all(pipe.find(other) is size for other in size.other)
    assert len({size.written for size in pipe.sizes}) == len(pipe.sizes)


@pytest.mark.parametrize(
    ("name", "written", "nominal", "bore", "outside"),
    [
        ("steel EN 10255 medium", "DN40", 0.040, 0.0419, 0.0483),
        ("steel EN 10255 heavy", "DN150", 0.150, 0.1543, 0.1651),
        ("steel ASME B36.10 schedule 40", "NPS 1-1/2", 0.040, 0.04094, 0.0483),
        ("steel ASME B36.10 schedule 40", "DN40", 0.040, 0.04094, 0.0483),
        ("steel ASME B36.10 schedule 80", "NPS 2-1/2", 0.065, 0.05898, 0.073),
        ("copper EN 1057 table X", "28 mm", 0.028, 0.0262, 0.028),
        ("copper EN 1057 table Y", "66.7 mm", 0.0667, 0.0627, 0.0667),
        ("copper EN 1057 metric", "28 mm", 0.028, 0.025, 0.028),
        ("copper ASTM B88 type L", "NPS 3/4", 0.020, 0.019939, 0.022225),
        ("PEX ASTM F876 SDR 9", "NPS 3/8", 0.010, 0.00914, 0.0127),
        ("multilayer ISO 21003", "26 mm", 0.026, 0.020, 0.026),
        ("PE 100 SDR 11", "63 mm", 0.063, 0.0514, 0.063),
    ],
)
def test_sizes_of_the_standards(name: str, written: str, nominal: float, bore: float, outside: float) -> None:
    size = line(name).find(written)
    assert size is not None
    assert (size.nominal, size.bore, size.outside) == (nominal, bore, outside)


def test_standard_dimension_ratios_hold() -> None:
    """SDR = outside diameter over wall, within the rounding of the wall upward."""
    for name, sdr in (
        ("PE 100 SDR 11", 11),
        ("PE 100 SDR 17", 17),
        ("PP-R SDR 7.4", 7.4),
        ("PP-R SDR 11", 11),
    ):
        for size in line(name).sizes:
            wall = (size.outside - size.bore) / 2
            assert wall == pytest.approx(size.outside / sdr, abs=3e-4), (name, size.written)


@pytest.mark.parametrize(
    ("name", "millimetres"),
    [
        ("steel EN 10255 medium", 0.045), ("steel ASME B36.10 schedule 80", 0.045),
        ("copper EN 1057 metric", 0.0015),
        ("PE 100 SDR 11", 0.0015), ("PEX class C", 0.0015), ("PP-R SDR 11", 0.0015),
        ("multilayer ISO 21003", 0.007),
        ("stainless press", 0.015),
    ],
)  # fmt: skip
def test_roughness(name: str, millimetres: float) -> None:
    assert line(name).roughness == float(f"{millimetres}e-3")


@pytest.mark.parametrize(
    ("name", "spellings"),
    [
        ("steel EN 10255 medium", ("DN40", "dn40", "DN 40", " dn  40 ")),
        ("steel ASME B36.10 schedule 40", ("NPS 1-1/2", "nps1-1/2", "NPS 1 1/2", "nps 1-1/2 ", "Dn 40")),
        ("copper EN 1057 metric", ("28 mm", "28mm", "28.0 mm", " 28 MM")),
    ],
)
def test_spelling_of_sizes_is_tolerant(name: str, spellings: tuple[str, ...]) -> None:
    found = {line(name).find(spelling) for spelling in spellings}
    assert len(found) == 1
    assert None not in found


@pytest.mark.parametrize(
    "written", ["DN45", "40", "40 mm", "DN40 mm", "NPS 40", "", "DN", "forty", "DN4 0.0.1", "DN١٥"]
)
def test_what_is_no_size_of_the_line_is_not_found(written: str) -> None:
    assert line("steel EN 10255 medium").find(written) is None


@given(st.text(max_size=20))
def test_any_text_is_answered(text: str) -> None:
    for name in ("steel ASME B36.10 schedule 40", "copper EN 1057 metric"):
        pipe = line(name)
        pipe.find(text)
        nearest = pipe.nearest(text)
        assert len(nearest) == 3


@pytest.mark.parametrize(
    ("name", "written", "nearest"),
    [
        ("steel EN 10255 medium", "DN45", ["DN32", "DN40", "DN50"]),
        ("steel EN 10255 medium", "DN500", ["DN100", "DN125", "DN150"]),
        ("steel EN 10255 medium", "NPS 2-1/2", ["DN50", "DN65", "DN80"]),
        ("steel ASME B36.10 schedule 40", "NPS 9/16", ["NPS 1/2", "NPS 3/4", "NPS 1"]),
        ("copper EN 1057 metric", "30 mm", ["22 mm", "28 mm", "35 mm"]),
        ("steel EN 10255 medium", "nonsense", ["DN15", "DN20", "DN25"]),
        ("steel EN 10255 medium", "DN0", ["DN15", "DN20", "DN25"]),
        ("steel EN 10255 medium", "NPS 1/0", ["DN15", "DN20", "DN25"]),
    ],
)
def test_the_nearest_three(name: str, written: str, nearest: list[str]) -> None:
    assert line(name).nearest(written) == nearest


def test_nearest_may_give_fewer_or_more() -> None:
    assert line("steel EN 10255 medium").nearest("DN44", 1) == ["DN40"]
    assert len(line("PEX class C").nearest("16 mm", 99)) == 6


def test_memory_is_marked() -> None:
    assert line("PEX class C").known_from == "memory"
    assert line("stainless press").known_from == "memory"
    assert line("steel EN 10255 medium").known_from == "read+memory"
    assert math.isclose(line("steel ASME B36.10 schedule 40").sizes[-1].bore, 0.30318)
