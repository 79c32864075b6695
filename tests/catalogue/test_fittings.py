"""Fittings: every name by every method, interpolation, ends of tables, fallbacks."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.catalogue import METHODS, Coefficient, coefficient, fitting, fitting_names

NAMES = (
    "elbow 90", "elbow 90 long", "elbow 45", "return bend", "tee straight", "tee branch", "gate valve",
    "globe valve",
    "angle valve", "swing check valve", "ball valve", "butterfly valve", "plug valve", "lift check valve",
    "diaphragm valve", "foot valve", "entrance flush", "entrance projecting", "entrance bell", "exit",
)  # fmt: skip
BY_SIZE = NAMES[:10]


def k(name: str, method: str, nominal: float, bore: float | None = None) -> Coefficient:
    found = coefficient(name, method, nominal, bore or nominal)
    assert found is not None
    return found


def test_names() -> None:
    assert fitting_names() == NAMES
    assert fitting("elbow  90") == fitting("Elbow 90")
    assert fitting("elbow 91") is None
    assert coefficient("elbow 91", "by size", 0.05, 0.05) is None


@pytest.mark.parametrize("name", NAMES)
def test_every_fitting_has_a_figure_by_every_method_with_its_source(name: str) -> None:
    entry = fitting(name)
    assert entry is not None
    assert entry.source
    assert entry.known_from
    for method in METHODS:
        for nominal in (0.015, 0.05, 0.1):
            found = k(name, method, nominal)
            assert 0 < found.constant < 30
            assert found.per_reynolds >= 0
            assert found.source
            assert found.known_from
            assert found.method in (*entry.methods, "constant")
            asked = found.method in (method, "constant")
            assert asked or f'not tabulated for the method "{method}"' in found.note


@pytest.mark.parametrize(
    ("name", "nominal", "value"),
    [
        ("elbow 90", 0.040, 1.2), ("elbow 90", 0.050, 1.0), ("elbow 90", 0.065, 0.35),
        ("elbow 90", 0.300, 0.24),
        ("elbow 90 long", 0.025, 0.78), ("elbow 45", 0.020, 0.35), ("elbow 45", 0.100, 0.18),
        ("return bend", 0.015, 2.1),
        ("tee straight", 0.032, 0.9), ("tee straight", 0.150, 0.12), ("tee branch", 0.025, 1.8),
        ("tee branch", 0.080, 0.76),
        ("gate valve", 0.050, 0.17), ("gate valve", 0.065, 0.27), ("globe valve", 0.020, 10.0),
        ("angle valve", 0.020, 6.1),
        ("angle valve", 0.200, 2.1), ("swing check valve", 0.010, 8.0), ("swing check valve", 0.100, 2.0),
    ],
)  # fmt: skip
def test_by_size_is_threaded_to_dn50_and_flanged_above(name: str, nominal: float, value: float) -> None:
    """Hydraulic Institute engineering data, tables by size (read and from memory)."""
    found = k(name, "by size", nominal)
    assert found.constant == value
    assert (found.per_reynolds, found.method, found.in_range) == (0.0, "by size", True)


def test_between_sizes_k_is_linear_in_the_logarithm_of_the_size() -> None:
    assert k("elbow 90", "by size", math.sqrt(0.020 * 0.025)).constant == pytest.approx((1.7 + 1.5) / 2)
    # 54 mm lies above DN50 and so between the flanged figures of 50 and 65 mm
    share = math.log(54 / 50) / math.log(65 / 50)
    assert k("elbow 90", "by size", 0.054).constant == pytest.approx(0.38 + share * (0.35 - 0.38))


@pytest.mark.parametrize(
    ("name", "nominal", "value"),
    [
        ("elbow 90", 0.008, 2.5), ("elbow 90", 0.400, 0.24), ("elbow 90 long", 0.015, 0.92),
        ("angle valve", 0.010, 6.1),
    ],
)  # fmt: skip
def test_outside_the_table_the_nearest_figure_stands_and_is_marked(name: str, nominal: float, value: float) -> None:
    found = k(name, "by size", nominal)
    assert (found.constant, found.in_range) == (value, False)


@given(st.sampled_from(BY_SIZE), st.floats(0.010, 0.05), st.floats(1.001, 1.5))
def test_k_by_size_never_grows_with_the_size_of_threaded_fittings(name: str, nominal: float, more: float) -> None:
    larger = min(nominal * more, 0.05)
    assert k(name, "by size", larger).constant <= k(name, "by size", nominal).constant + 1e-12


def test_crane() -> None:
    """n fT, fT 0.02 at the 1-1/2 in bore (Crane TP-410, read)."""
    found = k("elbow 90", "crane", 0.040, 0.04089)
    assert found.constant == pytest.approx(30 * 0.02)
    assert found.per_reynolds == 0.0
    middle = k("elbow 90", "crane", 0.045, math.sqrt(0.04089 * 0.0525)).constant
    assert middle == pytest.approx(30 * (0.02 + 0.01885) / 2)


@pytest.mark.parametrize(
    ("bore", "inside"), [(0.01576, True), (0.0150, False), (0.0158, True), (0.30318, True), (0.310, False)]
)
def test_crane_marks_bores_outside_the_table(bore: float, inside: bool) -> None:
    assert k("gate valve", "crane", bore, bore).in_range is inside


@pytest.mark.parametrize(
    ("nominal", "n", "inside"),
    [
        (0.040, 45, False), (0.050, 45, True), (0.200, 45, True), (0.225, 45, True), (0.250, 35, True),
        (0.350, 35, False), (0.400, 25, False), (0.700, 25, False),
    ],
)  # fmt: skip
def test_butterfly_valve_by_band_of_size(nominal: float, n: float, inside: bool) -> None:
    """Crane TP-410: 45 fT to 200 mm, 35 to 350, 25 to 600 (read); fT is tabulated to 12 in only."""
    found = k("butterfly valve", "crane", nominal)
    ft = k("elbow 90", "crane", nominal).constant / 30
    assert found.constant == pytest.approx(n * ft)
    assert found.in_range is inside


@pytest.mark.parametrize(
    ("name", "asked", "used"),
    [
        ("ball valve", "by size", "crane"), ("butterfly valve", "darby", "crane"),
        ("plug valve", "by size", "darby"),
        ("plug valve", "crane", "darby"), ("diaphragm valve", "by size", "darby"),
        ("foot valve", "hooper", "crane"),
        ("lift check valve", "by size", "crane"),
    ],
)  # fmt: skip
def test_another_method_is_taken_where_one_is_lacking_and_the_note_says_so(name: str, asked: str, used: str) -> None:
    found = k(name, asked, 0.05)
    assert found.method == used
    assert found.note.startswith(f'not tabulated for the method "{asked}", so "{used}" was taken')
    same = k(name, used, 0.05)
    assert (found.constant, found.per_reynolds) == (same.constant, same.per_reynolds)


@pytest.mark.parametrize(
    ("name", "value"),
    [("entrance flush", 0.5), ("entrance projecting", 1.0), ("entrance bell", 0.05), ("exit", 1.0)],
)
def test_entrances_and_exit_are_constant(name: str, value: float) -> None:
    for method in METHODS:
        for size in (0.005, 0.05, 1.0):
            found = k(name, method, size)
            assert (found.constant, found.per_reynolds, found.method) == (value, 0.0, "constant")
            assert found.in_range


def test_threaded_and_flanged_constants() -> None:
    assert k("elbow 90", "darby", 0.05).constant > k("elbow 90", "darby", 0.051).constant
    assert k("elbow 90", "hooper", 0.05).constant > k("elbow 90", "hooper", 0.051).constant
    assert k("gate valve", "hooper", 0.05, 0.0525).constant == pytest.approx(0.1 * (1 + 0.0254 / 0.0525))


def test_wrong_calls_are_refused() -> None:
    with pytest.raises(ValueError, match="known are by size, crane, darby, hooper"):
        coefficient("elbow 90", "by guess", 0.05, 0.05)
    for nominal, bore in ((0.0, 0.05), (0.05, -1.0), (math.nan, 0.05)):
        with pytest.raises(ValueError, match="positive size and bore"):
            coefficient("elbow 90", "by size", nominal, bore)


def test_scatter_is_that_of_the_institute() -> None:
    assert k("swing check valve", "by size", 0.1).scatter == "threaded 30 %; flanged +200 % to -80 %"
    assert k("ball valve", "crane", 0.1).scatter is None
