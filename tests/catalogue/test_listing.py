"""Listing: every figure with its source and how it is known."""

import pytest

from budget.catalogue import (
    CATALOGUE_VERSION,
    duct_names,
    fitting_names,
    fluid,
    fluid_names,
    limits,
    pipe_names,
)
from budget.catalogue.listing import KINDS, Row, aligned, rows
from budget.catalogue.loader import load
from budget.catalogue.provenance import how_known


def text(kind: str, name: str | None = None) -> str:
    return aligned(rows(kind, name))


@pytest.mark.parametrize(
    ("kind", "names"),
    [
        ("pipes", pipe_names()),
        ("ducts", duct_names()),
        ("fittings", fitting_names()),
        ("fluids", fluid_names()),
    ],
)
def test_overview_names_every_entry_and_detail_exists_for_each(kind: str, names: tuple[str, ...]) -> None:
    overview = text(kind)
    for name in names:
        assert name in overview
        detail = rows(kind, name.upper())
        assert detail[0].heading
        assert name in aligned(detail)


def test_a_pipe_shows_bores_sources_and_what_stands_from_memory() -> None:
    detail = text("pipes", "PEX class C")
    assert "20.4" in detail
    assert "from memory (confidence medium)" in detail
    assert "roughness 0.0015 mm (published 0.0015 to 0.007)" in detail
    assert "DN40" in text("pipes", "steel ASME B36.10 schedule 40")
    assert "5 published CIBSE copper values" in text("pipes", "copper EN 1057 metric")


def test_a_fitting_shows_each_method() -> None:
    detail = text("fittings", "elbow 90")
    for piece in ("40 mm 1.2", "K = 30 fT", "Km 800, Ki 0.14, Kd 4", "K1 800, Kinf 0.25", "scatter"):
        assert piece in detail
    assert "50 to 200 mm: 45" in text("fittings", "butterfly valve")
    assert "K = 0.5 at every size" in text("fittings", "entrance flush")
    assert "-1" not in text("fittings", "angle valve").replace("1-1", "")


def test_ducts_show_standard_sizes_and_the_factor_of_flexible_duct() -> None:
    assert "EN 1506:2007" in text("ducts")
    assert "exp(-0.00496 D)" in text("ducts", "flexible")
    assert "EN 1506:2007" not in text("ducts", "flexible")
    assert "fabric and wire" in text("ducts", "flexible")
    assert "EN 1506:2007" not in text("ducts", "st")


def test_fluids_show_their_ranges() -> None:
    assert "holds 0 to 150 degC" in text("fluids", "water")
    assert "holds by volume 10 to 60 %" in text("fluids", "ethylene glycol")
    custom = fluid("custom")
    assert custom is not None
    assert custom.ranges == {}
    assert fluid("mercury") is None


def test_limits_are_marked_as_practice_or_carry_a_standard() -> None:
    assert all(limit.source and limit.known_from and limit.confidence for limit in limits())
    assert "common practice" in text("limits", "margins")
    assert "400 Pa/m" in text("limits", "friction rate of pipes")
    assert any("authority" in limit.group for limit in limits())


def test_part_of_a_name_lists_what_holds_it() -> None:
    found = text("pipes", "copper")
    assert found.count("copper") >= 5
    assert "steel" not in found


@pytest.mark.parametrize(
    ("kind", "name", "message"),
    [
        ("pipes", "stel EN 10255", "no pipe line 'stel EN 10255'; nearest: steel EN 10255"),
        ("fittings", "elbow 91", "nearest: elbow 90"),
        ("ducts", "zzz", "nearest: galvanised steel"),
        ("pumps", None, "no part 'pumps'; known are pipes, ducts, fittings, fluids, limits"),
    ],
)
def test_what_is_not_there_names_the_nearest(kind: str, name: str | None, message: str) -> None:
    with pytest.raises(LookupError, match=message):
        rows(kind, name)


def test_columns_are_aligned() -> None:
    lines = aligned([Row(("a", "b"), heading=True), Row(("long", "c")), Row(("a note over all",)), Row(("x",), True)])
    assert lines.split("\n") == ["a     b", "long  c", "a note over all", "", "x"]
    assert aligned([]) == ""


@pytest.mark.parametrize("kind", KINDS)
def test_every_row_of_an_overview_is_plain_text(kind: str) -> None:
    for row in rows(kind):
        assert row.cells
        assert all(cell.isprintable() for cell in row.cells)


def test_how_known_in_words() -> None:
    assert how_known("memory") == "from memory"
    assert how_known("read+memory") == "read in print or public data, in part from memory"
    assert how_known("read+library+memory").endswith("in part taken off a library and from memory")
    assert how_known("measured on site") == "measured on site"


def test_files_are_read_once_and_a_missing_one_is_an_error() -> None:
    assert load("pipes") is load("pipes")
    with pytest.raises(FileNotFoundError):
        load("none")


def test_version() -> None:
    assert CATALOGUE_VERSION.count(".") == 1
