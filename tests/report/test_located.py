"""Findings as they shown: at their place in the file, in the units of the design, each once."""

from __future__ import annotations

from budget.description import describe, error, note, read_text, warning
from budget.report.located import Located, locate

TEXT = """format = 1

[design]
title = "Small run"
UNITS

[fluid]
name = "water"
temperature = 70

[source.P1]

[section."M 1"]
from = "P1"
  length = "3 m"

[[section."M 1".item]]
name = "Filter"
drop = "2 kPa"
"""


def located(*findings: object, units: str = "") -> tuple[Located, ...]:
    source = read_text(TEXT.replace("UNITS", units))
    return locate(findings, source, describe(source))  # type: ignore[arg-type]


def test_a_finding_stands_at_the_line_and_column_of_its_value() -> None:
    found = located(error("range", "too long", ("section", "M 1", "length")))[0]
    assert (found.line, found.column) == (15, 12)
    assert (found.table, found.key, found.owner) == ('section."M 1"', "length", "M 1")
    assert (found.level, found.code, found.message) == ("error", "range", "too long")
    assert found.path == ("section", "M 1", "length")


def test_a_finding_in_a_list_of_tables_stands_in_its_block() -> None:
    found = located(error("range", "too much", ("section", "M 1", "item", 0, "drop")))[0]
    assert (found.line, found.column) == (19, 8)
    assert found.key == "item.0.drop"


def test_a_finding_about_a_key_that_is_missing_stands_at_its_table() -> None:
    found = located(error("missing", "no size", ("section", "M 1", "size")))[0]
    assert found.line == 13


def test_a_finding_about_a_missing_table_stands_at_the_start() -> None:
    found = located(warning("heading", "over", ("budget", "plant")))[0]
    assert found.line == 1
    assert (found.table, found.key, found.owner) == ("budget", "plant", "")


def test_findings_come_in_the_order_of_the_file() -> None:
    found = located(
        note("duct-size", "third", ("section", "M 1", "item", 0, "drop")),
        error("range", "second", ("section", "M 1", "length")),
        warning("format", "first", ("format",)),
    )
    assert [finding.message for finding in found] == ["first", "second", "third"]


def test_findings_at_one_place_keep_the_order_in_which_they_were_found() -> None:
    place = ("section", "M 1", "length")
    found = located(error("range", "b", place), error("type", "a", place), error("choice", "c", place))
    assert [finding.message for finding in found] == ["b", "a", "c"]


def test_the_same_finding_is_shown_once() -> None:
    wrong = error("range", "too long", ("section", "M 1", "length"))
    assert len(located(wrong, wrong, error("range", "another", ("section", "M 1", "length")))) == 2


def test_figures_are_written_in_the_units_of_the_design() -> None:
    finding = warning(
        "velocity", "velocity {0} is above {1}", ("section", "M 1"), (1.5, "velocity"), (0.3048, "velocity")
    )
    assert located(finding)[0].message == "velocity 1.50 m/s is above 0.30 m/s"
    assert located(finding, units='units = "IP"')[0].message == "velocity 4.92 ft/s is above 1.00 ft/s"


def test_a_pressure_figure_is_shown_where_the_design_shows_heads() -> None:
    finding = warning("heading", "{0} too much", ("budget",), (9806.65, "pressure"))
    # A head needs a density, which a finding has not: it is shown in the usual unit.
    shown = located(finding, units='[display]\npressure = "m"')[0].message
    assert shown == "9.81 kPa too much"


def test_a_sentence_without_figures_is_not_filled_in() -> None:
    assert (
        located(error("unknown-key", "'{0}' is not a key {", ("section", "M 1")))[0].message == "'{0}' is not a key {"
    )


def test_in_a_text_that_is_not_toml_every_finding_stands_where_reading_stopped() -> None:
    source = read_text("format = 1\nlength = 12.4 m\n")
    found = locate(source.findings, source, describe(source))
    assert [(finding.line, finding.code, finding.table) for finding in found] == [(2, "syntax", "")]
