"""Libraries merged into a run: their origin, their units, and what is wrong inside them."""

from __future__ import annotations

import math

import pytest

from budget.description import Description, Library, describe, read_text
from budget.network import Budget, evaluate
from budget.report.json import results
from budget.report.located import locate
from budget.report.text import text_report

RUN = """\
format = 1
library = ["../office/valves.toml"]

[fluid]
name = "water"
temperature = "60 degC"

[defaults]
paired = true
takeoff = "none"

[pipe.steel]
catalogue = "steel EN 10255 medium"

[source.P1]
available = "60 kPa"

[section.M1]
from = "P1"
pipe = "steel"
size = "DN25"
length = "9 m"
fittings = { "drop ear" = 2 }

[terminal.R1]
from = "M1"
flow = "0.2 L/s"
drop = "4 kPa"
pipe = "office copper"
size = "22 mm"
length = "3 m"
balance = "DRV 20"
"""

VALVES = """\
format = 1

[pipe."office copper"]
catalogue = "copper EN 1057 table X"

[fitting."drop ear"]
k = 0.8
source = "maker's sheet, 2024"

[device."DRV 20"]
kv = [[1, 0.85], [2, 2.0], [3, 3.5], [4, 5.1]]
least_drop = 3
"""


def shelf(*texts: str) -> tuple[Library, ...]:
    """Libraries as a run names them: the first by the name that RUN has."""
    return tuple(Library(f"../office/{name}.toml", read_text(text)) for name, text in zip(NAMES, texts, strict=False))


NAMES = ("valves", "more")


def run(text: str = RUN, *libraries: str) -> tuple[Description, Budget]:
    description = describe(read_text(text), shelf(*(libraries or (VALVES,))))
    return description, evaluate(description)


def messages(description: Description) -> list[tuple[str, str, str]]:
    return [(finding.code, finding.table, finding.message) for finding in description.findings]


def test_a_run_takes_lines_fittings_and_devices_from_a_library() -> None:
    description, budget = run()
    assert description.findings == ()
    whole = RUN.replace('library = ["../office/valves.toml"]\n', "") + VALVES.removeprefix("format = 1")
    alone = evaluate(describe(read_text(whole.replace("least_drop = 3", 'least_drop = "3 kPa"'))))
    assert budget.terminals["R1"].circuit == alone.terminals["R1"].circuit
    assert budget.sections["M1"].run.fittings == alone.sections["M1"].run.fittings > 0.0
    assert budget.terminals["R1"].device is not None
    assert budget.terminals["R1"].device.base >= 3000.0


def test_what_a_library_brings_says_where_it_comes_from() -> None:
    description, budget = run()
    origin = "../office/valves.toml"
    assert description.lines["pipe", "office copper"].origin == origin
    assert description.lines["pipe", "steel"].origin == ""
    assert description.fittings["drop ear"].origin == origin
    assert description.devices["DRV 20"].origin == origin
    loss = budget.sections["M1"].run.legs[0].losses[0]
    assert loss.source == f"maker's sheet, 2024, from {origin}"
    text = text_report(description, budget, ())
    assert f"  DRV 20: from {origin}\n" in text
    assert f"\nLibraries\n  {origin}: pipe office copper, fitting drop ear, device DRV 20\n" in text
    assert "origin" not in str(results("0", "run.toml", description, budget, ()))


def test_a_report_without_libraries_does_not_speak_of_them() -> None:
    description, budget = run(RUN.replace('["../office/valves.toml"]', "[]"))
    assert "Libraries" not in text_report(description, budget, ())


@pytest.mark.parametrize(("units", "pascals"), [("SI", 3000.0), ("IP", 3 * 2989.067)])
def test_a_bare_number_takes_the_units_of_the_library(units: str, pascals: float) -> None:
    for design in ("SI", "IP"):
        text = RUN.replace("[fluid]", f'[design]\nunits = "{design}"\n\n[fluid]')
        library = VALVES.replace("format = 1\n", f'format = 1\n[design]\nunits = "{units}"\n', 1)
        description, _ = run(text, library)
        least = description.devices["DRV 20"].least_drop
        assert least is not None
        assert least.value == pytest.approx(pascals)


def test_a_library_that_was_not_handed_over_is_an_error_that_says_why() -> None:
    description = describe(read_text(RUN))
    assert [finding.path for finding in description.findings if finding.code == "library"] == [("library", 0)]
    assert "save it to a file first" in description.findings[0].message
    assert {"unknown-line", "unknown-fitting", "unknown-device"} < {one.code for one in description.findings}


def test_the_same_name_in_run_and_library_is_an_error_that_names_both_places() -> None:
    own = RUN.replace("[source.P1]", '[device."DRV 20"]\nkv = [[1, 1], [2, 2]]\n\n[source.P1]')
    description, budget = run(own)
    expected = "the device 'DRV 20' is in ../office/valves.toml line 10 too; rename or remove one"
    assert messages(description) == [("duplicate-id", 'device."DRV 20"', expected)]
    found = locate(description.findings, read_text(own), description)
    assert own.splitlines()[found[0].line - 1] == '[device."DRV 20"]'
    assert math.isnan(budget.terminals["R1"].circuit)


@pytest.mark.parametrize(
    ("table", "entry"),
    [
        ('pipe."office copper"', 'catalogue = "copper EN 1057 table X"'),
        ('fitting."drop ear"', "k = 0.4"),
        ('device."DRV 20"', "kv = [[1, 1], [2, 2]]"),
    ],
)
def test_the_same_name_in_two_libraries_is_an_error_and_its_figure_unknown(table: str, entry: str) -> None:
    both = RUN.replace('valves.toml"]', 'valves.toml", "../office/more.toml"]')
    description, budget = run(both, VALVES, f"format = 1\n\n[{table}]\n{entry}\n")
    kind, name = table.split(".")
    line = VALVES[: VALVES.index(f"[{table}]")].count("\n") + 1
    places = f"of ../office/more.toml line 3 is in ../office/valves.toml line {line}"
    expected = f"the {kind} {name.strip(chr(34))!r} {places}"
    assert messages(description) == [("duplicate-id", "library", f"{expected} too; rename or remove one")]
    assert description.findings[0].path == ("library", 1)
    assert math.isnan(budget.terminals["R1"].circuit)


@pytest.mark.parametrize(
    ("old", "new", "code", "said"),
    [
        ("format = 1\n", "", "format", "../office/valves.toml:1: the format is not stated"),
        ("format = 1", "format = 2", "format", "../office/valves.toml:1: format: the number 2 is no format"),
        ("format = 1\n", 'format = 1\nlibrary = ["x.toml"]\n', "library", ":2: library: a library can't name another"),
        ("format = 1\n", "format = 1\n[section.M1]\n", "unknown-table", ": 'section' can't stand in a library"),
        ("format = 1\n", 'format = 1\ntitle = "x"\n', "unknown-key", ":2: title: 'title' can't stand in a library"),
        ("format = 1\n", 'format = 1\n[design]\ntitle = "x"\n', "unknown-key", ":3: design.title: 'title' is not"),
        ("least_drop = 3", 'least_drop = "3 kg/s"', "wrong-dimension", ':12: device."DRV 20".least_drop: '),
        ("k = 0.8", "k = -1", "range", ':7: fitting."drop ear".k: -1 is out of range'),
        ("[2, 2.0]", "[2, 0.2]", "order", ':11: device."DRV 20".kv: '),
        ("table X", "table Q", "unknown-line", ':4: pipe."office copper".catalogue: '),
        ('"drop ear"', '"elbow 90"', "contradiction", ':6: fitting."elbow 90": '),
        ("k = 0.8", "k = ", "library", "../office/valves.toml:7:5: the file is not TOML"),
        ("k = 0.8", "k = 0.8\nk = 0.9", "library", "../office/valves.toml:8:1: 'k = 0.9' stands twice"),
        ("[fitting.", "[[fitting.", "library", "../office/valves.toml:6:"),
        ('[fitting."drop ear"]', '[fitting."a\\u202Eb"]', "control-character", "the ID has a control character"),
    ],
)
def test_a_fault_in_a_library_is_found_at_the_key_of_the_run(old: str, new: str, code: str, said: str) -> None:
    assert old in VALVES
    description, _ = run(RUN, VALVES.replace(old, new, 1))
    faults = [finding for finding in description.findings if finding.code == code and finding.table == "library"]
    assert len(faults) == 1, messages(description)
    assert said in faults[0].message
    assert faults[0].path == ("library", 0)
    placed = locate(faults, read_text(RUN), description)[0]
    assert (placed.line, placed.column) == (2, 12)


def test_a_figure_that_rests_on_a_faulty_library_is_unknown_and_its_neighbours_stand() -> None:
    _, budget = run(RUN, VALVES.replace("least_drop = 3", 'least_drop = "x"'))
    assert math.isnan(budget.terminals["R1"].circuit)
    assert budget.sections["M1"].run.drop > 0.0
    _, budget = run(RUN, VALVES.replace("table X", 'table X"\nroughness = "x'))
    assert math.isnan(budget.terminals["R1"].circuit)


@pytest.mark.parametrize("stated", ['"a.toml"', "[1]", '["a.toml", 2]', "{ a = 1 }", "true", '""'])
def test_a_key_that_is_no_list_of_paths_is_an_error(stated: str) -> None:
    description, _ = run(RUN.replace('["../office/valves.toml"]', stated))
    assert ("type", "library") in {(code, table) for code, table, _ in messages(description)}


def test_the_same_library_twice_is_an_error() -> None:
    path = '"../office/valves.toml"'
    description, budget = run(RUN.replace(f"[{path}]", f"[{path}, {path}]"))
    assert messages(description) == [("library", "library", "'../office/valves.toml' stands twice; remove one")]
    assert budget.terminals["R1"].circuit > 0.0
