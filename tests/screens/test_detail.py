"""Row detail and calculation: every loss leg by leg with its source, shortened to fit or whole."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from budget.document import Document
from budget.network.results import LossResult, RunResult
from budget.report.caution import CAUTION
from budget.report.figures import Figures
from budget.screens.calculation import steps_of
from budget.screens.detail import lines_of
from budget.screens.page import lay_lines
from budget.screens.rows import tree
from budget.screens.safe import clip, packed, width_of, wrapped
from tests.screens.conftest import DUCT, EXAMPLES, SMALL, Hands, Stage

CUT = re.compile(r"[\d.]…")


@pytest.mark.parametrize("example", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
def test_every_loss_of_every_leg_is_told_with_coefficient_drop_and_velocity(example: Path) -> None:
    snapshot = Document.open(example).snapshot
    figures = Figures(snapshot.description)
    for row in tree(snapshot.description):
        section, terminal = snapshot.budget.sections.get(row.id), snapshot.budget.terminals.get(row.id)
        run: RunResult | None = section.run if section else terminal.run_out if terminal else None
        if row.kind == "item" or run is None:
            continue
        density = snapshot.budget.sources[(section or terminal).source].fluid.density  # type: ignore[union-attr]
        lines = lines_of(snapshot, row)
        said = [" ".join(line.pieces) for line in lines]
        losses: list[LossResult] = [loss for leg in run.legs for loss in (*leg.losses, *leg.joints)]
        for loss in losses:
            drop = figures.pressure(loss.drop, density, unit=True)
            gain = " gain" if loss.drop < 0 else ""
            assert any(f" {drop}{gain} " in text and loss.reference.split(":")[0] in text for text in said), loss
        assert sum(bool(line.source) for line in lines) >= len(losses)
        assert {leg.leg for leg in run.legs} <= {line.label.removesuffix(" leg") for line in lines}


@pytest.mark.parametrize("width", [60, 80, 100])
@pytest.mark.parametrize("text", [SMALL, DUCT, (EXAMPLES / "air-handling-unit.toml").read_text()])
def test_no_line_is_longer_than_the_screen_and_no_figure_is_cut(text: str, width: int) -> None:
    snapshot = Document.of(text).snapshot
    for row in tree(snapshot.description)[:: 1 + len(text) // 4000]:
        for lines in (lines_of(snapshot, row), steps_of(snapshot, row)):
            column = min(34, max(width_of(line.label) for line in lines)) + 2
            computed = [line for line in lines if line.path is None and not line.label.startswith("  serves")]
            for choice in lay_lines(computed, width, whole=False):
                shown = clip(choice.cells[1], width - 2 - column)
                assert choice.words or not CUT.search(shown), shown


def test_sources_are_shortened_to_fit_and_whole_on_a_wide_terminal() -> None:
    snapshot = Document.of(DUCT).snapshot
    row = next(row for row in tree(snapshot.description) if row.id == "B")
    lines = lines_of(snapshot, row)
    narrow, wide = (lay_lines(lines, width, whole=whole) for width, whole in ((80, False), (140, True)))
    assert sum(choice.cells[1].endswith("…") for choice in narrow) > 0
    assert not any("…" in choice.cells[1] for choice in wide)
    said = " ".join(choice.cells[1] for choice in wide)
    assert "tee-crane; read in print or public data, in part taken off a library; Crane Technical Paper 410" in said
    assert any(choice.cells[1].startswith("tee-crane; read+library; Crane") for choice in narrow)


def test_leakage_items_and_devices_are_told_where_they_stand() -> None:
    snapshot = Document.of(DUCT).snapshot
    rows = {row.id: row for row in tree(snapshot.description) if row.kind != "item"}
    leakage = snapshot.budget.sections["A"].run.leakage
    assert leakage is not None
    for id_ in ("A", "F1"):
        assert any(line.label == "  leakage" for line in lines_of(snapshot, rows[id_]))
    assert not any(line.label == "  leakage" for line in lines_of(snapshot, rows["B"]))
    snapshot = Document.open(EXAMPLES / "three-floor-heating.toml").snapshot
    told = {
        line.label: line.pieces
        for row in tree(snapshot.description)
        if row.kind in ("section", "terminal")
        for line in lines_of(snapshot, row)
        if line.label in ("  item", "  device")
    }
    assert "control" in told["  item"]
    assert any(piece.startswith("setting ") for piece in told["  device"])


def test_the_calculation_of_a_row_ends_in_the_caution(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        result = hands.app.document.snapshot.budget.sections["B"]
        await hands.at("B")
        await hands.press("E")
        assert hands.screen == "explain"
        assert hands.lines()[0].startswith(" Explain B")
        said = [choice.cells for choice in hands.app.choosers["explain"].kept]
        assert any(text == f"= {result.run.legs[0].velocity:.4f} m/s" for _, text in said)
        assert any(text.startswith("v = q / A") for _, text in said)
        await hands.press("end")
        assert "licensed" in hands.screen_text
        await hands.press("u")
        await hands.press("v")
        assert hands.screen == "detail"
        await hands.press("E", "escape")
        assert hands.screen == "ledger"

    play(act, DUCT)


def test_the_calculation_of_every_row_of_every_example_can_be_shown() -> None:
    for example in sorted(EXAMPLES.glob("*.toml")):
        snapshot = Document.open(example).snapshot
        for row in tree(snapshot.description)[::5]:
            lines = steps_of(snapshot, row)
            assert [line.label for line in lines[-2:]] == ["caution", ""]
            assert " ".join(lines[-1].pieces) == CAUTION


def test_texts_break_at_spaces_and_pieces_not_at_all() -> None:
    assert wrapped("a long text of words", 10) == ["a long", "text of", "words"]
    assert packed(("K 0.2", "12.50 kPa", "velocity 1.0 m/s"), 18) == ["K 0.2  12.50 kPa", "velocity 1.0 m/s"]
    assert packed(("longer than room",), 4) == ["longer than room"]
    assert packed((), 4) == []
