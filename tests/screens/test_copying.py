"""Rows are copied as a table that a spreadsheet takes as it is meant, to the clipboard and to a file of the user's."""

from __future__ import annotations

import csv
import io
import stat
from pathlib import Path

import pytest

from budget.document import Document
from budget.screens.copying import LARGEST, branch, cell, objection, table_of_rows
from budget.screens.rows import View, tree
from budget.storage.folders import state_folder
from tests.hostile.payloads import FORMULA, PAYLOADS
from tests.screens.conftest import EXAMPLES, SMALL, Hands, Stage

HEAD = (
    "section or terminal\tsize\tlength [m]\tflow [L/s]\tvelocity [m/s]\tgradient [Pa/m]\tdrop [kPa]\tsum so far [kPa]\t"
    "differential [kPa]\tmargin [kPa]\tbalance\tfittings\ttitle"
)


@pytest.fixture(autouse=True)
def _own_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    monkeypatch.setenv("TERM", "xterm-256color")


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("-0.5", "-0.5"),
        ("+12.40", "+12.40"),
        ("1.5e-3", "1.5e-3"),
        ("-", ""),
        ("--5", "'--5"),
        ("-1+2", "'-1+2"),
        ("-0.5 kPa", "'-0.5 kPa"),
        ("=1+1", "'=1+1"),
        ("+cmd", "'+cmd"),
        ("@SUM(A1)", "'@SUM(A1)"),
        ("  =1", "'  =1"),
        ("a;=1", "a;'=1"),
        ("a\tb\r\nc", "a b  c"),
        ('3/4" pipe', '3/4" pipe'),
        ('"old" main', '"""old"" main"'),
        ("\x1b]52;c;aGk=\x07", "\N{REPLACEMENT CHARACTER}]52;c;aGk=\N{REPLACEMENT CHARACTER}"),
    ],
)
def test_a_cell_is_one_line_and_no_formula(text: str, expected: str) -> None:
    assert cell(text) == expected


@pytest.mark.parametrize("name", PAYLOADS)
def test_no_text_breaks_the_table_or_begins_a_formula(name: str) -> None:
    quoted = "".join(f"\\U{ord(c):08x}" for c in PAYLOADS[name])
    snapshot = Document.of(SMALL.replace('title = "Hall"', f'title = "{quoted}"')).snapshot
    view, rows = View(snapshot), tree(snapshot.description)
    text = table_of_rows(view, rows)
    assert text.count("\n") == len(rows) + 1
    assert all(c.isprintable() for c in text if c not in "\t\n")
    table = list(csv.reader(io.StringIO(text), delimiter="\t"))
    assert {len(line) for line in table} == {13}
    titles = [line[-1] for line in table]
    assert titles[6:] == ["Study", "South rooms", "Kitchen", "Workshop"]
    assert not titles[5].strip().startswith(FORMULA) or titles[5] == "+1"


def test_a_branch_is_a_row_with_all_that_hangs_on_it() -> None:
    rows = tree(Document.of(SMALL).snapshot.description)
    by_id = {row.id: row for row in rows if row.kind != "item"}
    assert [row.id for row in branch(rows, by_id["B1"])] == ["B1", "R1", "R2"]
    assert [row.id for row in branch(rows, by_id["R4"])] == ["R4"]
    assert branch(rows, by_id["P1"]) == rows
    assert branch(rows, None) == ()
    assert branch(rows[:3], by_id["R4"]) == ()


@pytest.mark.parametrize("example", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
def test_what_is_copied_is_what_the_ledger_says(example: Path) -> None:
    snapshot = Document.open(example).snapshot
    view, rows = View(snapshot), tree(snapshot.description)
    lines = table_of_rows(view, rows).splitlines()[1:]
    for row, line in zip(rows, lines, strict=True):
        cells = view.cells(row)
        copied = line.split("\t")
        assert copied[0] == cells["id"].text
        assert copied[6] == ("" if cells["drop"].text == "-" else cells["drop"].text) if "drop" in cells else True


def test_a_branch_is_copied_whole_whatever_is_folded_or_has_no_room(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B1", "length")
        await hands.press("space", "C")
        text = hands.app.clipboard
        lines = text.splitlines()
        assert lines[0] == HEAD
        assert [line.split("\t")[0] for line in lines[1:]] == ["B1", "R1", "R2"]
        assert lines[2].split("\t")[-1] == "Hall"
        file = tmp_path / "state" / "budget" / "copied.tsv"
        assert hands.foot.startswith("3 rows copied; ")
        assert "should a terminal multiplexer drop them, they are also in" in hands.foot
        assert hands.app.foot.message.endswith(str(file))
        assert file.read_text() == text
        assert stat.S_IMODE(file.stat().st_mode) == 0o600
        await hands.at("R4")
        await hands.press("C")
        assert hands.foot.startswith("1 row copied; ")
        assert file.read_text() == hands.app.clipboard != text
        assert [path.name for path in file.parent.iterdir() if path.name.startswith(".")] == []

    play(act)


def test_where_a_filter_stands_what_it_leaves_is_copied_and_that_is_said(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("W")
        await hands.type("kitchen")
        await hands.press("enter", "home", "C")
        assert hands.foot.startswith("4 of 9 rows copied; ")
        assert [line.split("\t")[0] for line in hands.app.clipboard.splitlines()[1:]] == ["P1", "M1", "B2", "R3"]

    play(act)


def test_the_schedule_is_copied_from_its_screen(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("B", "C")
        lines = hands.app.clipboard.splitlines()
        assert lines[0].split("\t")[:3] == ["ID", "flow [L/s]", "device"]
        ids = hands.app.boards["balance"].ids
        assert [line.split("\t")[0] for line in lines[1:]] == list(ids)
        assert hands.foot.startswith(f"{len(ids)} rows copied; ")

    play(act)


def test_what_is_too_long_for_a_clipboard_goes_to_the_file_alone(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    assert objection("x" * LARGEST) == ""
    assert objection("é" * LARGEST) == "too many rows for a clipboard"
    assert (LARGEST + 2) // 3 * 4 + len("\x1b]52;c;\x07") <= 100_000
    monkeypatch.setattr("budget.screens.copying.LARGEST", 500)

    async def act(hands: Hands) -> None:
        await hands.press("home", "C")
        assert hands.app.clipboard == ""
        assert hands.app.foot.message.startswith("not copied: too many rows for a clipboard; ")
        assert hands.app.foot.message.endswith("copied.tsv")
        assert (state_folder() / "copied.tsv").read_text().startswith(HEAD)

    play(act)


def test_a_console_without_a_clipboard_is_sent_nothing(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("TERM", "linux")

    async def act(hands: Hands) -> None:
        await hands.press("C")
        assert hands.app.clipboard == ""
        assert hands.app.foot.message.startswith("not copied: this console has no clipboard; ")

    play(act)


def test_where_the_file_can_not_be_written_that_is_said(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        (tmp_path / "state" / "budget" / "copied.tsv").mkdir(parents=True)
        await hands.press("C")
        assert hands.app.clipboard.startswith(HEAD)
        message = hands.app.foot.message
        assert message.startswith("9 rows copied; a terminal multiplexer may drop them, and copied.tsv could not be")
        assert hands.app.foot.role == "warning"

    play(act)


def test_a_link_in_the_place_of_the_file_is_not_followed(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        other = tmp_path / "other.txt"
        other.write_text("mine")
        place = state_folder() / "copied.tsv"
        place.symlink_to(other)
        await hands.press("C")
        assert other.read_text() == "mine"
        assert not place.is_symlink()
        assert stat.S_IMODE(place.stat().st_mode) == 0o600

    play(act)
