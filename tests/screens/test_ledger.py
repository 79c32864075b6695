"""The ledger shows the run as a tree in file order, and the cursor stays where it was put."""

from __future__ import annotations

import json
import math

import pytest

from budget.document import Document
from budget.report.figures import Figures
from budget.screens.rows import View, tree, visible
from budget.units import Dimension
from tests.screens.conftest import EXAMPLES, SMALL, Hands, Stage

TWO_SOURCES = SMALL + SMALL[SMALL.index("[source.P1]") :].replace(".P1", ".P2").replace('"P1"', '"P2"').replace(
    "M1", "X1"
).replace("B1", "Y1").replace("B2", "Y2").replace("terminal.R", "terminal.S")


def test_rows_stand_in_file_order_each_under_what_feeds_it() -> None:
    rows = tree(Document.of(SMALL).snapshot.description)
    assert [(row.kind, row.id, row.depth) for row in rows] == [
        ("source", "P1", 0), ("item", "P1", 1), ("section", "M1", 1),
        ("section", "B1", 2), ("terminal", "R1", 3), ("terminal", "R2", 3),
        ("section", "B2", 2), ("terminal", "R3", 3), ("terminal", "R4", 3),
    ]  # fmt: skip


def test_what_hangs_on_nothing_stands_at_the_end_and_a_circle_does_not_hang_the_tree() -> None:
    loose = SMALL.replace('title = "North rooms"\nfrom = "M1"', 'title = "North rooms"\nfrom = "M9"')
    rows = tree(Document.of(loose).snapshot.description)
    assert [row.id for row in rows if row.depth == 0] == ["P1", "B1"]
    circle = SMALL.replace('from = "P1"', 'from = "B2"')
    rows = tree(Document.of(circle).snapshot.description)
    assert {row.id for row in rows} == {"P1", "M1", "B1", "B2", "R1", "R2", "R3", "R4"}


def test_a_folded_branch_hides_what_hangs_on_it() -> None:
    rows = tree(Document.of(SMALL).snapshot.description)
    shown = [row.id for row in visible(rows, frozenset({"B1"})) if row.kind != "item"]
    assert shown == ["P1", "M1", "B1", "B2", "R3", "R4"]


@pytest.mark.parametrize("example", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
def test_the_figures_are_those_of_the_results(example) -> None:  # type: ignore[no-untyped-def]  # noqa: ANN001
    snapshot = Document.open(example).snapshot
    view, figures = View(snapshot), Figures(snapshot.description)
    rows = [row for row in tree(snapshot.description) if row.kind in ("section", "terminal")]
    assert rows
    for row in rows:
        cells = view.cells(row)
        result = snapshot.budget.sections.get(row.id)
        if result is not None:
            assert cells["drop"].text == figures.text(result.run.drop, Dimension.PRESSURE)
            assert cells["sum"].text == figures.text(result.cumulative, Dimension.PRESSURE)
            assert cells["margin"].text == figures.text(result.margin, Dimension.PRESSURE)
            assert cells["velocity"].text == figures.text(result.run.legs[0].velocity, Dimension.VELOCITY)
        else:
            terminal = snapshot.budget.terminals.get(row.id)
            if terminal is None:
                assert "sum" not in cells
                continue
            assert cells["sum"].text == figures.text(terminal.circuit, Dimension.PRESSURE)
            assert cells["margin"].text == figures.text(terminal.margin, Dimension.PRESSURE)


def test_the_index_circuit_and_what_is_over_its_limit_carry_signs(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        assert hands.row("R4").startswith("»")
        assert not hands.row("R1").startswith("»")
        assert "0.49!" in hands.row("M1")
        assert "197 " in hands.row("M1")

    play(act, SMALL.replace('velocity = "1.0 m/s"', 'velocity = "0.45 m/s"'))


def test_the_cursor_stays_on_its_row_through_undo_and_fold(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        ledger = hands.app.ledger
        await hands.at("R3", "drop")
        await hands.press("z")
        assert ledger.row is not None
        assert len(ledger.shown) < len(ledger.rows)
        await hands.press("z")
        await hands.at("B2")
        await hands.press("d")
        await hands.at("R3", "drop")
        await hands.press("space")
        assert hands.foot == "nothing hangs on this row"
        await hands.press("u")
        assert ledger.row.id == "B2"

    play(act)


def test_keys_move_the_cursor_and_the_row_stays_in_view(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        ledger = hands.app.ledger
        await hands.press("end")
        assert ledger.row is not None
        assert ledger.row.id == ledger.rows[-1].id
        assert ledger.top <= ledger.cursor < ledger.top + ledger.page
        await hands.press("pageup", "pageup", "up", "up")
        assert ledger.top <= ledger.cursor < ledger.top + ledger.page
        await hands.press("home")
        assert (ledger.cursor, ledger.top) == (0, 0)
        column = ledger.column
        await hands.press("right", "left")
        assert ledger.column == column

    play(act, (EXAMPLES / "three-floor-heating.toml").read_text())


def test_searching_goes_to_the_first_match_while_one_types(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        ledger = hands.app.ledger
        await hands.press("slash")
        await hands.type("r")
        first = ledger.row
        await hands.press("escape")
        await hands.press("slash")
        await hands.type("kitch")
        assert ledger.row is not None
        assert ledger.row.id == "R3"
        await hands.press("enter", "slash")
        await hands.type("rooms")
        await hands.press("enter")
        there = ledger.row.id
        await hands.press("n")
        assert {there, ledger.row.id} == {"B1", "B2"}
        await hands.press("N")
        assert ledger.row.id == there
        await hands.press("slash")
        await hands.type("nowhere")
        await hands.press("enter")
        assert hands.foot == 'nothing has "nowhere"'
        assert first is not None

    play(act)


def test_straight_to_the_index_terminal_an_id_a_source_and_a_finding(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        ledger = hands.app.ledger
        await hands.press("i")
        assert ledger.row is not None
        assert ledger.row.id == "R4"
        await hands.press("g")
        await hands.type("b1")
        await hands.press("enter")
        assert ledger.row.id == "B1"
        await hands.press("P")
        assert ledger.row.id == "P2"
        assert " P2 " in hands.budget
        await hands.press("e")
        assert hands.foot
        assert ledger.row.id in {"M1", "X1"}

    play(act, TWO_SOURCES.replace('velocity = "1.0 m/s"', 'velocity = "0.45 m/s"'))


def test_the_budget_line_states_what_the_results_say(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        result = hands.app.document.snapshot.budget.sources["P1"]
        figures = Figures(hands.app.document.snapshot.description)
        for name, value in (
            ("required", result.required), ("reserve", result.reserve), ("duty", result.duty),
            ("available", result.available), ("in hand", result.in_hand),
        ):  # fmt: skip
            assert f"{name} {figures.text(value, Dimension.PRESSURE)}" in hands.budget
        for heading, value in result.spent.items():
            if value:
                assert figures.text(value, Dimension.PRESSURE) in hands.lines(hands.app.budget_line)[2], heading

    play(act)


@pytest.mark.parametrize("size", [(80, 24), (100, 30), (200, 50), (40, 12), (20, 8)])
def test_it_fits_any_terminal(play: Stage, size: tuple[int, int]) -> None:
    async def act(hands: Hands) -> None:
        for key in ("down", "right", "end", "home", "v", "escape", "s", "escape", "enter", "2", "escape"):
            await hands.press(key)
        assert all(len(line) <= size[0] for line in hands.lines())
        if size[0] >= 120:
            assert hands.app.choosers["beside"].display

    play(act, size=size)


def test_ten_thousand_rows_are_moved_through_without_spelling_them_all() -> None:
    view = View(Document.of(SMALL).snapshot)
    row = tree(view.snapshot.description)[3]
    assert view.cells(row) is view.cells(row)


def test_results_without_a_figure_are_dashes() -> None:
    text = SMALL.replace('size = "18 mm"', 'size = "19 mm"')
    snapshot = Document.of(text).snapshot
    view = View(snapshot)
    row = next(row for row in tree(snapshot.description) if row.id == "M1")
    cells = view.cells(row)
    assert cells["size"].text == "-"
    assert cells["size"].sign == "!"
    result = snapshot.budget.sections.get("M1")
    assert result is None or math.isnan(result.run.drop)
    assert json.dumps(cells["drop"].text if "drop" in cells else "-") == '"-"'


def test_with_the_mouse_a_click_goes_to_a_cell_and_two_edit_it(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        ledger = hands.app.ledger
        length = next(placed for placed in ledger.placed if placed.column.key == "length")
        await hands.pilot.click("#ledger", offset=(length.x + 1, 4))
        assert ledger.row is not None
        assert (ledger.row.id, ledger.column) == ("M1", "length")
        await hands.pilot.click("#ledger", offset=(length.x + 1, 4), times=2)
        assert hands.place == "entry"
        await hands.press("escape", "s")
        await hands.pilot.click("#list", offset=(3, 2))
        assert hands.app.choosers["list"].cursor == 0

    play(act)
