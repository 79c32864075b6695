"""The text report: complete, stable, in step with the figures, and plain."""

import re

import pytest

from budget.commands.starts import FLUIDS, start
from budget.description import Description, describe, read_text
from budget.document import take
from budget.network import Budget, evaluate
from budget.report.caution import CAUTION
from budget.report.figures import Figures
from budget.report.lines import source_line
from budget.report.plain import plain
from budget.report.table import Column, labelled, table, wrapped
from budget.report.text import text_report
from budget.report.tree import hang
from budget.units import Dimension
from tests.commands.calls import RUN

NAMES = ("Ledger", "Terminals", "Balancing devices", "Fittings", "Titles and notes", "Findings", "Caution")


def report(text: str) -> str:
    snapshot = take(read_text(text))
    return text_report(snapshot.description, snapshot.budget, snapshot.findings)


def computed(text: str) -> tuple[Description, Budget]:
    description = describe(read_text(text))
    return description, evaluate(description)


def part(text: str, name: str) -> list[str]:
    """The lines of one part of a report."""
    lines = text.splitlines()
    first = lines.index(name) + 1
    return lines[first : lines.index("", first) if "" in lines[first:] else len(lines)]


def test_it_holds_every_part_and_the_caution() -> None:
    text = report(RUN)
    assert text.startswith("Ferry house\n")
    for name in ("Source P1: Boiler pump", *NAMES):
        assert f"\n{name}\n" in text
    assert CAUTION in " ".join(text.split())


def test_the_ledger_is_indented_and_says_index_in_a_word() -> None:
    rows = part(report(RUN), "Ledger")[2:]
    assert [row[: len(row) - len(row.lstrip())] + row.split("  ")[0].strip() for row in rows if row[2] != "s"]
    names = [row for row in rows if re.match(r" +(P1|M1|R1|R 2|- run-out|- Boiler|- LV 15)( |$)", row)]
    depths = [(len(row) - len(row.lstrip()) - 2) // 2 for row in names]
    assert depths == [0, 1, 1, 2, 3, 3, 2, 3, 3]
    marked = [row.split()[0] for row in rows if row.endswith("  index")]
    assert marked == ["M1", "R"]


def test_its_figures_are_those_that_were_computed() -> None:
    description, budget = computed(RUN)
    figures = Figures(description)
    source, section, terminal = budget.sources["P1"], budget.sections["M1"], budget.terminals["R 2"]
    text = report(RUN)
    assert re.search(rf"^  required +{figures.pressure(source.required)} kPa$", text, re.MULTILINE)
    assert re.search(rf"^  duty +{figures.pressure(source.duty)} kPa at ", text, re.MULTILINE)
    assert re.search(r"^  index circuit +P1, M1, R 2, M1$", text, re.MULTILINE)
    m1 = next(row for row in part(text, "Ledger") if row.strip().startswith("M1")).split()
    values = (section.run.drop, section.cumulative, section.differential, section.margin)
    assert m1[-5:-1] == [figures.pressure(value) for value in values]
    r2 = next(row for row in part(text, "Terminals") if row.startswith("  R 2")).split()
    assert r2[-1] == "index"
    assert figures.pressure(terminal.circuit) in r2
    assert terminal.run_out is not None
    assert figures.pressure(terminal.run_out.drop) in r2
    assert terminal.device is not None
    r2 = next(row for row in part(text, "Balancing devices") if row.startswith("  R 2")).split()
    assert figures.pressure(terminal.device.drop) in r2


def test_what_is_spent_adds_up_to_required() -> None:
    text = report(RUN.replace("[device", '[budget]\nplant = "7 kPa"\n\n[device'))
    line = r"^  (plant|distribution|terminal|balancing|required) +([0-9.]+)( |$)"
    rows = {name: float(value) for name, value, _ in re.findall(line, text, re.MULTILINE)}
    assert rows["plant"] == 6.0
    assert sum(value for name, value in rows.items() if name != "required") == pytest.approx(rows["required"], abs=0.03)
    assert re.search(r"^  plant +6.00 +7.00 +1.00$", text, re.MULTILINE)


@pytest.mark.parametrize("units", ["SI", "IP"])
@pytest.mark.parametrize("kind", FLUIDS)
def test_it_is_plain_stable_and_narrow(kind: str, units: str) -> None:
    text = start(kind, FLUIDS[kind][0], "IP" if units == "IP" else "SI")
    first = report(text)
    assert first == report(text)
    assert first.endswith("\n")
    assert not re.search(r"[ \t]$", first, re.MULTILINE)
    assert all(line.isprintable() for line in first.splitlines())
    assert "nan" not in first
    assert max(map(len, first.splitlines())) <= (100 if units == "SI" else 112)
    figures = Figures(describe(read_text(text)))
    assert figures.unit(Dimension.PRESSURE) in first


def test_a_change_of_one_length_leaves_most_lines_alone() -> None:
    before, after = (report(RUN.replace("9.0 m", length)).splitlines() for length in ("9.0 m", "9.5 m"))
    assert len(before) == len(after)
    assert sum(one != other for one, other in zip(before, after, strict=True)) < len(before) / 3


def test_nothing_from_the_file_is_obeyed() -> None:
    evil = RUN.replace("Ferry house", "\\u001b]52;c;x\\u0007 Ferry\\u202e").replace('"Hall"', '"a\\nb\\u009bc"')
    text = report(evil)
    assert "\ufffd]52;c;x\ufffd Ferry\ufffd" in text
    assert "R1: a b\ufffdc" in text
    assert all(line.isprintable() for line in text.splitlines())


def test_a_run_with_errors_is_reported_as_far_as_it_goes() -> None:
    text = report(RUN.replace('size = "22 mm"', 'size = "23 mm"'))
    assert "  error unknown-size: section.M1.size: '23 mm'" in text
    assert re.search(r"^  required +-$", text, re.MULTILINE)
    assert "nan" not in text
    assert report("format = 1\n").startswith("Untitled run\n")
    assert report("").startswith("Untitled run\n")


def test_findings_stand_by_key_and_the_gravest_first() -> None:
    text = report(RUN.replace("25 kPa", "1 kPa") + '\n[section.X]\nfrom = "P1"\nsize = "22 mm"\nlength = "1 m"\n')
    findings = [line.split()[0] for line in part(text, "Findings") if line[2] != " "]
    assert findings == sorted(findings, key=["error", "warning", "note"].index)
    assert {"error", "warning"} <= set(findings)


def test_suction_sides_and_reverse_returns_run_the_right_way() -> None:
    extract = start("air", "air", "SI").replace("from =", "to =")
    assert re.search(r"^  index circuit +A2, D3, D1, F1$", report(extract), re.MULTILINE)
    text = RUN.replace(
        "[terminal.R1]",
        '[section.S]\nfrom = "P1"\nsize = "22 mm"\nlength = "1 m"\npaired = false\n\n[terminal.R1]',
    ).replace('[terminal."R 2"]\nfrom = "M1"', '[terminal."R 2"]\nfrom = "S"\nto = "M1"')
    assert re.search(r"^  index circuit +P1, S, R 2, M1$", report(text), re.MULTILINE)


def test_a_deep_branch_says_its_level() -> None:
    sections = "".join(
        f'\n[section.D{n}]\nfrom = "{f"D{n - 1}" if n else "M1"}"\nsize = "22 mm"\nlength = "1 m"\n' for n in range(30)
    )
    text = RUN.replace("[terminal.R1]", f"{sections}\n[terminal.R1]")
    text = report(text.replace('from = "M1"\nload', 'from = "D29"\nload'))
    assert " [32] R1" in text


def test_every_row_hangs_once_whatever_the_connections() -> None:
    cases = {
        RUN: [("P1", 0), ("M1", 1), ("R1", 2), ("R 2", 2)],
        RUN.replace('from = "P1"', 'from = "M1"'): [("P1", 0), ("M1", 0), ("R1", 1), ("R 2", 1)],
        RUN.replace('from = "P1"', 'from = "X"'): [("P1", 0), ("M1", 0), ("R1", 1), ("R 2", 1)],
    }
    for text, expected in cases.items():
        assert [tuple(one) for one in hang(describe(read_text(text)))] == expected


def test_heads_are_those_of_the_fluid() -> None:
    text = RUN.replace("[fluid]", '[display]\npressure = "m"\n\n[fluid]')
    description, budget = computed(text)
    source = budget.sources["P1"]
    head = source.required / (source.fluid.density * 9.80665)
    assert f"required {head:.1f} m, " in source_line("f", description, source)


def test_tables_align_and_leave_out_what_says_nothing() -> None:
    columns = [Column("a", left=True), Column("b", "kPa"), Column("c", optional=True), Column("", left=True)]
    assert table(columns, [("x", "1.0", "-", ""), ("長い", "10.0", "-", "index")], "") == [
        "a        b",
        "       kPa",
        "x      1.0",
        "長い  10.0  index",
    ]
    assert labelled([("a", "1"), ("long", "2"), ("none", "")], "") == ["a     1", "long  2"]
    assert wrapped("", "  ") == [""]


def test_plain_text_is_one_printable_line() -> None:
    assert plain("a\nb\tc\u2028d\xa0e") == "a b c d e"
    assert plain("\x1b\x00\x9f\u202e\u200b\ud800") == "\ufffd" * 6
    assert plain("Überströmung ½ 長") == "Überströmung ½ 長"


def test_junctions_and_changes_of_area_are_reported_leg_by_leg() -> None:
    text = RUN.replace("[terminal.R1]", '[section.B1]\nfrom = "M1"\nsize = "18 mm"\nlength = 4\n[terminal.R1]')
    text = text.replace('size = "18 mm"', 'size = "18 mm"\ntakeoff = "straight"\ntransition = 30').replace(
        '[terminal.R1]\ntitle = "Hall"\nfrom = "M1"', '[terminal.R1]\ntitle = "Hall"\nfrom = "B1"'
    )
    text = text.replace('[terminal."R 2"]\n', '[terminal."R 2"]\ntakeoff = "branch"\n')
    description, budget = computed(text)
    figures = Figures(description)
    rows = part(report(text), "Junctions and changes of area")
    supply, back = budget.sections["B1"].run.legs
    for leg in (supply, back):
        for joint in leg.joints:
            row = next(row for row in rows if row.split()[:2] == ["B1", leg.leg] and joint.name in row)
            assert figures.pressure(joint.drop) in row
            assert figures.text(joint.reference_velocity, Dimension.VELOCITY) in row
    assert sum(row.split()[:2] == ["B1", "supply"] for row in rows) == 2
    assert sum(row.startswith("  R 2") for row in rows) == 2
    said = " ".join(rows)
    assert "on the velocity of the combined flow" in said
    assert "on the velocity in the smaller area" in said
    assert "Junctions and changes of area" not in report(RUN)
