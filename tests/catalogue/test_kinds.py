"""Kinds of fittings: every entry complete, parameters, ranges, refusals, and what the section's sides mean."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from budget.catalogue import Kind, KindCoefficient, fitting_names, kind, kind_coefficient, kind_names, kinds_by_name
from budget.catalogue.kinds import CARRIERS, SHAPES
from budget.catalogue.listing import aligned, rows
from budget.physics.elbows import reynolds_factor

UNITS = ("", "deg", "Pa", "m/s", "kg/m3")


def entry(name: str) -> Kind:
    found = kind(name)
    assert found is not None
    return found


def k(name: str, shape: str = "round", width: float = 0.3, height: float | None = None, **values: object) -> float:
    return coefficient(name, shape, width, height, **values).constant


def coefficient(
    name: str, shape: str = "round", width: float = 0.3, height: float | None = None, **values: object
) -> KindCoefficient:
    return kind_coefficient(
        name,
        values,  # type: ignore[arg-type]
        shape=shape,
        width=width,
        height=height or width,
        nominal=width,
    )


def test_there_are_enough_kinds_and_each_name_is_one_entry() -> None:
    assert len(kind_names("pipe")) >= 30
    assert len(kind_names("duct")) >= 24
    names = [name.lower() for name in (*fitting_names(), *kind_names())]
    assert len(set(names)) == len(names)
    assert kind_names() == kind_names("pipe") + kind_names("duct")
    assert kind_names("cable tray") == ()


@pytest.mark.parametrize("name", kind_names())
def test_every_kind_states_method_range_source_how_known_and_a_check(name: str) -> None:
    found = entry(name)
    for text in (found.group, found.formula, found.validity, found.reference, found.source, found.known_from):
        assert text.strip()
        assert text.isprintable()
    assert found.confidence
    assert found.carries in CARRIERS
    assert set(found.shapes) <= set(SHAPES)
    assert found.checks
    for check in found.checks:
        assert check.source
        assert check.known_from
        assert check.value > 0.0
        assert 0.0 < check.tolerance <= 0.5
        assert check.shape in found.shapes
    for parameter in found.parameters:
        assert parameter.meaning
        assert parameter.unit in UNITS
        if parameter.choices:
            assert parameter.default is None or parameter.default in parameter.choices
        else:
            assert parameter.low is not None
            assert parameter.high is None or parameter.low < parameter.high
            assert parameter.default is None or (
                isinstance(parameter.default, int | float)
                and parameter.low <= parameter.default <= (parameter.high or math.inf)
            )


@pytest.mark.parametrize("name", kind_names())
def test_every_kind_holds_its_checks(name: str) -> None:
    for check in entry(name).checks:
        found = kind_coefficient(
            name, check.values, shape=check.shape, width=check.width, height=check.height, nominal=check.nominal
        )
        value = found.constant + found.per_reynolds / check.reynolds
        value += found.reynolds_corrected * float(reynolds_factor(check.reynolds))
        assert value == pytest.approx(check.value, rel=check.tolerance), check
        assert found.in_range, found.reason


@given(st.data())
def test_within_the_ranges_every_kind_gives_a_figure(data: st.DataObject) -> None:
    found = entry(data.draw(st.sampled_from(kind_names())))
    values: dict[str, float | str] = {}
    for parameter in found.parameters:
        if parameter.choices:
            values[parameter.name] = data.draw(st.sampled_from(parameter.choices))
        else:
            low = parameter.low or 0.0
            values[parameter.name] = data.draw(st.floats(low, parameter.high or low + 1000.0))
    shape = data.draw(st.sampled_from(found.shapes))
    width = data.draw(st.floats(0.02, 2.0))
    height = width if shape == "round" else data.draw(st.floats(0.02, 2.0))
    result = kind_coefficient(found.name, values, shape=shape, width=width, height=height, nominal=width)
    for part in (result.constant, result.per_reynolds, result.reynolds_corrected):
        assert 0.0 <= part < math.inf
    assert result.in_range == (result.reason == "")


def test_names_are_folded() -> None:
    assert kind("Elbow  Mitred") is kind("elbow mitred")
    assert kind("elbow bent") is None


def test_a_number_out_of_range_is_held_at_the_end_and_named() -> None:
    found = coefficient("elbow smooth round", radius_ratio=3.0)
    assert found.constant == k("elbow smooth round", radius_ratio=2.5)
    assert not found.in_range
    assert found.reason == "radius_ratio 3 lay outside 0.5 to 2.5"
    assert coefficient("mitre bend", width=0.1, angle=100).reason == "angle 100 deg lay outside 0 to 90 deg"


def test_a_section_out_of_the_figures_is_named() -> None:
    assert coefficient("elbow die-stamped", width=0.4).reason == "diameter 400 mm lay outside 75 to 250 mm"
    assert coefficient("swing check valve clearway", width=0.4).reason == "bore 400 mm lay outside 15.8 to 303.2 mm"
    assert (
        "nominal size 40 mm lay outside 50 to 600 mm"
        in coefficient("butterfly valve offset", width=0.04, pattern="double").reason
    )
    wide = coefficient("elbow mitred", "rectangular", 0.1, 1.0)
    assert wide.reason == "H/W 10 lay outside 0.25 to 8"
    few = coefficient("damper opposed blades", "rectangular", 0.5, 0.5, blades=1)
    assert few.reason == "L/R 0.25 lay outside 0.3 to 1.5"
    assert coefficient("elbow gored", pieces=4, radius_ratio=0.5).reason == "radius_ratio 0.5 lay outside 0.75 to 2"
    assert coefficient("elbow gored", pieces=3, radius_ratio=0.5).in_range
    assert coefficient("coupling", width=0.125).reason.startswith("nominal size 4.921 in")
    assert coefficient("strainer basket", width=0.025).in_range, "DN25 is 1 in"


def test_the_plane_of_a_bend_is_a_side_of_the_section() -> None:
    over_width = k("elbow smooth rectangular", "rectangular", 0.8, 0.2, radius_ratio=0.5, plane="width")
    over_height = k("elbow smooth rectangular", "rectangular", 0.8, 0.2, radius_ratio=0.5, plane="height")
    assert over_width == pytest.approx(1.53)
    assert over_height == pytest.approx(1.06)
    turned = k("elbow smooth rectangular", "rectangular", 0.2, 0.8, radius_ratio=0.5, plane="height")
    assert turned == over_width


def test_only_mitres_take_the_reynolds_factor() -> None:
    for name in kind_names("duct"):
        check = entry(name).checks[0]
        found = kind_coefficient(
            name, check.values, shape=check.shape, width=check.width, height=check.height, nominal=check.nominal
        )
        assert (found.reynolds_corrected > 0.0) == (name in ("elbow mitred", "offset mitred"))


def test_a_pyramid_is_for_rectangular_ducts() -> None:
    cone = k("transition diverging", area_ratio=0.25, angle=30)
    assert cone == k("transition diverging", "rectangular", area_ratio=0.25, angle=30, sides="two")
    assert k("transition diverging", "rectangular", area_ratio=0.25, angle=30) == pytest.approx(0.50)
    below = coefficient("transition diverging", "rectangular", area_ratio=0.25, angle=10)
    assert below.reason == "angle 10 deg lay outside 16 to 180 deg"


def test_blade_of_a_rectangular_damper_turns_on_its_axis() -> None:
    assert k("damper rectangular blade", "rectangular", 1.0, 0.2) == pytest.approx(0.04)
    assert k("damper rectangular blade", "rectangular", 1.0, 0.2, axis="height") == pytest.approx(0.13)


def test_rated_equipment_gives_its_rated_drop() -> None:
    factor = k("coil rated", "rectangular", 0.6, 0.6, rated_drop=60.0, rated_velocity=2.5, face_ratio=2.0)
    assert factor * 0.5 * 1.2 * 5.0**2 == pytest.approx(60.0)


@pytest.mark.parametrize(
    ("name", "values", "message"),
    [
        ("elbow smooth round", {}, "elbow smooth round needs radius_ratio: centre-line radius over diameter"),
        ("elbow smooth round", {"radius": 1.0}, "had no parameter 'radius'; known are radius_ratio, angle"),
        ("entry in wall", {"radius": 1.0}, "had no parameter 'radius'; it takes none"),
        ("elbow gored", {"pieces": 6}, "pieces of elbow gored was 6; it is one of 3, 4, 5"),
        ("elbow mitred", {"plane": "up"}, "plane of elbow mitred was 'up'; it is one of width, height"),
        ("elbow mitred", {"angle": "wide"}, "angle of elbow mitred was 'wide', not a finite number"),
        ("elbow mitred", {"angle": math.nan}, "not a finite number"),
        ("elbow smooth rectangular", {"radius_ratio": 1.0, "plane": "width"}, "no figures for a round section"),
    ],
)
def test_what_cannot_be_worked_out_is_refused(name: str, values: dict[str, float | str], message: str) -> None:
    with pytest.raises(ValueError, match=message):
        kind_coefficient(name, values, shape="round", width=0.2, height=0.2, nominal=0.2)


def test_wrong_names_and_sizes_are_refused() -> None:
    with pytest.raises(LookupError, match="no kind of fitting 'elbow bent'"):
        kind_coefficient("elbow bent", {}, shape="round", width=0.2, height=0.2, nominal=0.2)
    for width, height, nominal in ((0.0, 0.2, 0.2), (0.2, -1.0, 0.2), (0.2, 0.2, math.nan), (math.inf, 0.2, 0.2)):
        with pytest.raises(ValueError, match="needs positive sizes"):
            kind_coefficient("entry in wall", {}, shape="round", width=width, height=height, nominal=nominal)


@pytest.mark.parametrize("name", kind_names())
def test_the_listing_shows_every_kind_with_parameters_and_checks(name: str) -> None:
    found = entry(name)
    detail = aligned(rows("fittings", name))
    for text in (found.formula, found.validity, found.reference, found.source, found.note, found.scatter or ""):
        assert text in detail
    for parameter in found.parameters:
        assert parameter.meaning in detail
    for check in found.checks:
        assert check.source in detail
    assert all(cell.isprintable() for row in rows("fittings", name) for cell in row.cells)


def test_the_overview_lists_fittings_by_name_and_by_kind() -> None:
    overview = aligned(rows("fittings"))
    for name in (*fitting_names(), *kind_names()):
        assert name in overview
    dampers = aligned(rows("fittings", "damper"))
    assert "damper opposed blades" in dampers
    assert "elbow" not in dampers
    assert "must be stated" in aligned(rows("fittings", "orifice plate"))


def test_the_kinds_that_can_be_named_without_parameters_are_listed() -> None:
    bare = [name for name in kind_names() if all(parameter.default is not None for parameter in _kind(name).parameters)]
    assert list(kinds_by_name()) == bare


def _kind(name: str) -> Kind:
    found = kind(name)
    assert found is not None
    return found
