"""The readings file: what may stand there, and what is wrong where."""

from __future__ import annotations

import pytest

from budget.description import describe, read_bytes, read_text
from budget.description.readings import Readings, read_readings
from budget.report.located import locate
from budget.units import Basis
from tests.commands.calls import RUN

DESCRIPTION = describe(read_text(RUN))


def readings(text: str) -> Readings:
    return read_readings(read_text(text), DESCRIPTION)


def test_flows_signals_settings_dates_and_notes_are_read() -> None:
    found = readings(
        'format = 1\n[reading.R1]\nflow = "0.03 L/s"\ndate = 2026-03-31\n'
        '[reading."R 2"]\nsignal = "3 m"\nsetting = 2.5\ndate = "2026-04-01"\nnote = "cold"\n'
        "[reading.P1]\nflow = 0.06\n[reading.M1]\nflow = 0\ndate = 2026-03-31T10:00:00\n"
    )
    assert found.findings == ()
    r1, r2, p1, m1 = found.measured.values()
    assert r1.flow is not None
    assert r1.flow.value == pytest.approx(3e-5)
    assert (r1.id, r1.date, r1.signal) == ("R1", "2026-03-31", None)
    assert r2.signal is not None
    assert (r2.signal.value, r2.signal.basis, r2.setting, r2.note) == (3.0, Basis.HEAD, 2.5, "cold")
    assert r2.date == "2026-04-01"
    assert p1.flow is not None
    assert p1.flow.value == pytest.approx(6e-5)
    assert p1.date == ""
    assert m1.date == "2026-03-31"


def test_an_empty_file_has_no_readings() -> None:
    assert readings("") == Readings()


@pytest.mark.parametrize(
    ("text", "code", "line", "column"),
    [
        ("[reading.R1", "syntax", 1, 12),
        ('[reading.R9]\nflow = "1 L/s"', "dangling", 1, 10),
        ('[reading.R1]\nflow = "1 kPa"', "wrong-dimension", 2, 8),
        ('[reading.R1]\nflow = "-1 L/s"', "range", 2, 8),
        ("[reading.R1]\nflow = nan", "not-finite", 2, 8),
        ('[reading.R1]\nflow = "1 L/s"\nsignal = "1 kPa"', "contradiction", 3, 10),
        ("[reading.R1]\ndate = 2026-03-31", "missing", 1, 10),
        ('[reading.R1]\nflow = "1 L/s"\ndate = "31.3.2026"', "type", 3, 8),
        ('[reading.R1]\nflow = "1 L/s"\ndate = 3', "type", 3, 8),
        ('[reading.R1]\nflow = "1 L/s"\nflaw = 1', "unknown-key", 3, 1),
        ("[terminal.R1]\nflow = 1", "unknown-table", 1, 2),
        ("format = 2", "format", 1, 10),
        ("reading = 3", "type", 1, 11),
        ("[reading]\nR1 = 3", "type", 2, 6),
    ],
)
def test_what_is_wrong_is_found_at_its_line_and_column(text: str, code: str, line: int, column: int) -> None:
    source = read_text(text)
    found = locate(read_readings(source, DESCRIPTION).findings, source, DESCRIPTION)
    assert [(one.code, one.line, one.column) for one in found] == [(code, line, column)]


def test_the_good_readings_beside_a_bad_one_stand() -> None:
    found = readings('[reading.R1]\nflow = "x"\n["reading"."R 2"]\nflow = "0.02 L/s"\n')
    assert list(found.measured) == ["R 2"]
    assert [one.code for one in found.findings] == ["not-a-quantity"]


def test_bytes_that_are_no_text_are_refused() -> None:
    found = read_readings(read_bytes(b"\xff"), DESCRIPTION)
    assert ([one.code for one in found.findings], found.measured) == (["encoding"], {})
