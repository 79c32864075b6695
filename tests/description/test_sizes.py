"""Sizes of pipes and ducts as the trade writes them."""

from __future__ import annotations

import pytest

from budget.catalogue import pipe_line, pipe_names
from budget.description import Geometry, Level, Line
from budget.description.sizes import nominal_of, read_duct_size, read_pipe_size
from budget.description.values import Reading

PATH = ("section", "M1", "size")


def pipe(value: str | float, line: str = "steel EN 10255 medium", units: str = "SI") -> tuple[Geometry | None, str]:
    reading = Reading(units=units)
    found = read_pipe_size(reading, value, Line("steel", "pipe", 4.5e-5, catalogue=line), PATH)
    return found, " ".join(one.message for one in reading.findings)


def own(value: str) -> tuple[Geometry | None, str]:
    reading = Reading()
    line = Line("own", "pipe", 1e-5, own_sizes={"DN 25": 0.0273, "NPS 1-1/2": 0.0409, "Big One": 0.06})
    found = read_pipe_size(reading, value, line, PATH)
    return found, " ".join(one.message for one in reading.findings)


def duct(value: str | float, units: str = "SI") -> tuple[Geometry | None, list[str]]:
    reading = Reading(units=units, gas=True)
    found = read_duct_size(reading, value, PATH)
    return found, [one.code for one in reading.findings]


@pytest.mark.parametrize("written", ["DN40", "dn40", "DN 40", " DN40 ", "Dn 40"])
def test_a_pipe_size_is_found_however_it_is_spaced(written: str) -> None:
    found, message = pipe(written)
    assert found is not None
    assert (found.bore, found.nominal, found.label, message) == (0.0419, 0.04, "DN40", "")


@pytest.mark.parametrize(
    ("written", "label"),
    [("NPS 1-1/2", "NPS 1-1/2"), ("NPS 1 1/2", "NPS 1-1/2"), ("DN40", "NPS 1-1/2"), ("nps2", "NPS 2")],
)
def test_an_inch_pipe_has_two_names(written: str, label: str) -> None:
    found, _ = pipe(written, "steel ASME B36.10 schedule 40")
    assert found is not None
    assert found.label == label


@pytest.mark.parametrize("written", [28, 28.0, "28", "28 mm", "28mm"])
def test_a_bare_pipe_size_is_in_millimetres(written: str | float) -> None:
    found, _ = pipe(written, "copper EN 1057 table X")
    assert found is not None
    assert (found.label, found.bore) == ("28 mm", 0.0262)


@pytest.mark.parametrize("written", [4, "4", "NPS 4"])
def test_in_an_inch_pound_design_a_bare_pipe_size_is_in_inches(written: str | float) -> None:
    found, _ = pipe(written, "steel ASME B36.10 schedule 40", units="IP")
    assert found is not None
    assert found.label == "NPS 4"


@pytest.mark.parametrize(
    ("written", "nearest"),
    [
        ("DN33", "DN25, DN32, DN40"),
        ("DN1000", "DN100, DN125, DN150"),
        ("DN1", "DN15, DN20, DN25"),
        ("NPS 2", "DN40, DN50, DN65"),
        (33, "DN25, DN32, DN40"),
        ("wide", "DN15, DN20, DN25"),
    ],
)
def test_a_size_that_the_line_lacks_names_the_nearest_three(written: str | float, nearest: str) -> None:
    found, message = pipe(written)
    assert found is None
    assert message.endswith(f"the nearest are {nearest}")


@pytest.mark.parametrize("name", pipe_names())
def test_every_size_of_the_catalogue_is_found(name: str) -> None:
    line = pipe_line(name)
    assert line is not None
    for size in line.sizes:
        for written in (size.written, *size.other):
            found, message = pipe(written, name)
            assert found is not None, message
            assert (found.shape, found.bore, found.nominal) == ("round", size.bore, size.nominal)


@pytest.mark.parametrize(
    ("written", "bore", "nominal"),
    [("dn25", 0.0273, 0.025), ("NPS 1-1/2", 0.0409, 0.0381), ("big one", 0.06, 0.06)],
)
def test_sizes_of_ones_own_are_found(written: str, bore: float, nominal: float) -> None:
    found, _ = own(written)
    assert found is not None
    assert found.bore == bore
    assert found.nominal == pytest.approx(nominal)


def test_a_size_that_ones_own_line_lacks_names_those_that_it_has() -> None:
    found, message = own("DN 26")
    assert found is None
    assert "'DN 25'" in message


def test_a_line_without_sizes_asks_for_a_bore() -> None:
    reading = Reading()
    assert read_pipe_size(reading, "DN25", Line("bare", "pipe", 1e-5), PATH) is None
    assert "state bore" in reading.findings[0].message


@pytest.mark.parametrize(
    ("written", "nominal"),
    [("DN40", 0.04), ("NPS 1-1/2", 0.0381), ("NPS 3/4", 0.01905), ("54 mm", 0.054), ("NPS 1/0", 9.0), ("x", 9.0)],
)
def test_a_written_size_names_its_nominal_size_or_takes_the_bore(written: str, nominal: float) -> None:
    assert nominal_of(written, 9.0) == pytest.approx(nominal)


@pytest.mark.parametrize(
    ("written", "shape", "width", "height"),
    [
        ("250 mm", "round", 0.25, 0.25),
        (250, "round", 0.25, 0.25),
        ("0.25 m", "round", 0.25, 0.25),
        ("10 in", "round", 0.254, 0.254),
        ("600x300", "rectangular", 0.6, 0.3),
        ("300 x 600 mm", "rectangular", 0.3, 0.6),
        ("600×300", "rectangular", 0.6, 0.3),
        ("600X300", "rectangular", 0.6, 0.3),
        ("24x12 in", "rectangular", 0.6096, 0.3048),
        ("oval 800x250", "oval", 0.8, 0.25),
        ("oval 800 x 250 mm", "oval", 0.8, 0.25),
    ],
)
def test_a_duct_is_round_rectangular_or_oval(written: str | float, shape: str, width: float, height: float) -> None:
    found, codes = duct(written)
    assert found is not None
    assert found.shape == shape
    assert found.width == pytest.approx(width)
    assert found.height == pytest.approx(height)
    assert found.bore == (pytest.approx(width) if shape == "round" else None)
    assert "error" not in codes


@pytest.mark.parametrize(("written", "width"), [("24x12", 0.6096), ("24x12 in", 0.6096), ("600x300 mm", 0.6)])
def test_in_an_inch_pound_design_a_duct_is_in_inches(written: str, width: float) -> None:
    found, _ = duct(written, units="IP")
    assert found is not None
    assert found.width == pytest.approx(width)


@pytest.mark.parametrize(
    "written", ["600x", "x300", "600x300x200", "round", "", "6x3 furlongs", "nan", "600-300", "1.2.3x4"]
)
def test_what_is_no_duct_size_is_refused(written: str) -> None:
    assert duct(written) == (None, ["size"])


@pytest.mark.parametrize("written", ["0x300", "600x0", "0 mm", "-250 mm", "30000x300", "25 m", 0, -1])
def test_a_side_must_be_above_nothing_and_at_most_20_m(written: str | float) -> None:
    assert duct(written) == (None, ["range"])


@pytest.mark.parametrize(
    ("written", "units", "nearest"),
    [
        ("260 mm", "SI", "250 mm, 300 mm, 315 mm"),
        ("610x300", "SI", "500x250, 500x300, 600x250, 600x300"),
        ("13 in", "IP", "12 in, 14 in"),
    ],
)
def test_a_size_off_the_grid_is_a_note_that_names_the_nearest(written: str, units: str, nearest: str) -> None:
    reading = Reading(units=units, gas=True)
    assert read_duct_size(reading, written, PATH) is not None
    (one,) = reading.findings
    assert (one.level, one.code) == (Level.NOTE, "duct-size")
    assert nearest in one.message


def test_a_neck_may_have_any_size() -> None:
    reading = Reading(gas=True)
    assert read_duct_size(reading, "217 mm", PATH, remark=False) is not None
    assert reading.findings == []
