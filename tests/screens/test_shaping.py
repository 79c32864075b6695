"""Changing the shape of a run: each change is one step, and the run is whole after it."""

from __future__ import annotations

import tomllib
from collections.abc import Callable
from functools import partial
from pathlib import Path

import pytest

from budget.description import read_text
from budget.description.edits import apply_to_text
from budget.description.finding import Level
from budget.document import Document, take
from budget.screens.naming import new_id
from budget.screens.rows import tree
from budget.screens.shaping import Change, ShapingError, add_section, add_terminal, delete, duplicate, shift
from budget.storage import read_libraries
from tests.screens.conftest import EXAMPLES, SMALL, Hands, Stage


def parts(text: str) -> dict[str, dict[str, dict[str, object]]]:
    return {kind: tomllib.loads(text).get(kind, {}) for kind in ("section", "terminal")}


@pytest.mark.parametrize(
    ("base", "taken", "expected"),
    [
        ("FCU-201", {"FCU-201"}, "FCU-202"),
        ("FCU-201", {"FCU-201", "FCU-202"}, "FCU-203"),
        ("R09", {"R09"}, "R10"),
        ("M1", {"M1"}, "M2"),
        ("T1a", {"T1a"}, "T2a"),
        ("main", {"main"}, "main-2"),
    ],
)
def test_a_new_id_counts_on(base: str, taken: set[str], expected: str) -> None:
    assert new_id(base, taken) == expected


def test_a_section_after_takes_over_what_hangs_there(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("a")
        sections = parts(hands.text)["section"]
        assert sections["M2"] == {"from": "M1", "size": "18 mm", "length": "7.5 m"}
        assert sections["B1"]["from"] == sections["B2"]["from"] == "M2"
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "M2"
        assert hands.app.document.snapshot.level is not Level.ERROR
        await hands.press("u")
        assert hands.text == SMALL

    play(act)


def test_a_section_before_comes_between(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("R1")
        await hands.press("b")
        found = parts(hands.text)
        assert found["section"]["B3"]["from"] == "B1"
        assert found["terminal"]["R1"]["from"] == "B3"
        assert hands.app.document.snapshot.level is not Level.ERROR
        await hands.at("P1")
        await hands.press("b")
        assert hands.foot.startswith("nothing comes before a source")

    play(act)


def test_a_section_beneath_is_a_branch_that_waits_for_its_terminal(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("c")
        assert parts(hands.text)["section"]["M2"]["from"] == "M1"
        assert parts(hands.text)["section"]["B1"]["from"] == "M1"
        await hands.press("t")
        assert parts(hands.text)["terminal"]["R5"]["from"] == "M2"
        assert hands.app.document.snapshot.level is not Level.ERROR

    play(act)


def test_a_terminal_takes_after_its_neighbour(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("R4")
        await hands.press("t")
        added = parts(hands.text)["terminal"]["R5"]
        model = {key: value for key, value in parts(hands.text)["terminal"]["R4"].items() if key != "title"}
        assert added == model
        await hands.press("a")
        assert hands.foot.startswith("nothing hangs on a terminal")

    play(act)


def test_a_branch_is_duplicated_with_new_ids_and_deleted_again(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B2")
        await hands.press("d")
        found = parts(hands.text)
        assert found["section"]["B3"]["from"] == "M1"
        assert found["terminal"]["R5"]["from"] == found["terminal"]["R6"]["from"] == "B3"
        assert found["terminal"]["R3"]["from"] == "B2"
        assert hands.app.document.history.position == 1
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "B3"
        await hands.press("x")
        assert parts(hands.text) == parts(SMALL)
        await hands.press("u")
        assert "B3" in parts(hands.text)["section"]
        await hands.press("u")
        assert hands.text == SMALL

    play(act)


def test_deleting_takes_the_ids_out_of_the_cases(play: Stage) -> None:
    text = SMALL + '\n[case.night]\noff = ["R1", "R3"]\nshare = { R3 = 0.4, R4 = 0.5 }\n'

    async def act(hands: Hands) -> None:
        await hands.at("R3")
        await hands.press("delete")
        case = tomllib.loads(hands.text)["case"]["night"]
        assert case == {"off": ["R1"], "share": {"R4": 0.5}}

    play(act, text)


def test_a_branch_is_hung_on_another_section(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("R1")
        await hands.press("m")
        assert hands.screen == "list"
        await hands.type("South")
        await hands.press("enter")
        assert parts(hands.text)["terminal"]["R1"]["from"] == "B2"
        await hands.at("B1")
        await hands.press("m")
        offered = [choice.value for choice in hands.app.choosers["list"].kept]
        assert offered == ["P1", "M1", "B2"]

    play(act)


def test_a_branch_moves_among_its_neighbours(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B1")
        await hands.press("shift+down")
        ids = [row.id for row in hands.app.ledger.rows if row.kind in ("section", "terminal")]
        assert ids == ["M1", "B2", "R3", "R4", "B1", "R1", "R2"]
        await hands.press("shift+up")
        ids = [row.id for row in hands.app.ledger.rows if row.kind in ("section", "terminal")]
        assert ids == ["M1", "B1", "R1", "R2", "B2", "R3", "R4"]
        await hands.press("shift+up")
        assert hands.foot == "B1 is the first of its neighbours"

    play(act)


def test_an_item_is_duplicated_and_deleted(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        item = next(row for row in hands.app.ledger.rows if row.kind == "item")
        hands.app.ledger.go_to(item.path)
        await hands.press("d")
        assert hands.text.count('name = "Boiler"') == 2
        await hands.press("x")
        assert hands.text.count('name = "Boiler"') == 1

    play(act)


def test_an_empty_run_says_how_to_begin(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        for key in ("enter", "a", "t", "d", "x", "m", "s", "f", "v", "e", "i", "n", "space"):
            await hands.press(key)
            await hands.press("escape")
        await hands.press("enter")
        assert "Text screen" in hands.foot

    play(act, "format = 1\n")


ACTIONS: dict[str, Callable[..., Change]] = {
    "after": partial(add_section, where="after"),
    "before": partial(add_section, where="before"),
    "beneath": partial(add_section, where="beneath"),
    "terminal": add_terminal,
    "duplicate": duplicate,
    "delete": delete,
    "up": partial(shift, step=-1),
    "down": partial(shift, step=1),
}
FOLLOWS = {"set-point", "no-flow"}
"""A longer circuit behind a device that holds a differential; a terminal that is no longer alone and has no flow."""

JOINS = {"terminal", "duplicate"}
"""Changes that bring a third leg to a junction, of which it has to be said anew what each leg is."""

LEAVES_A_GAP = {"beneath", "delete"}
"""A new branch has no terminal yet; the section of a last terminal is left without one."""


@pytest.mark.parametrize("action", ACTIONS)
@pytest.mark.parametrize("example", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
def test_every_shape_is_whole_after_a_change_anywhere(example: Path, action: str) -> None:
    before = Document.open(example).snapshot
    libraries = read_libraries(read_text(before.text), example)
    rows = tree(before.description)
    known = {f.code for f in before.findings if f.level is Level.ERROR} | FOLLOWS
    for place in range(0, len(rows), 1 + len(rows) // 3):
        try:
            change = ACTIONS[action](before.text, before.description, rows, place)
        except ShapingError:
            continue
        after = take(read_text(apply_to_text(before.text, change.edit)), libraries=libraries)
        assert after.text != before.text
        assert after.readable
        new = {f.code for f in after.findings if f.level is Level.ERROR} - known
        new -= {"takeoff"} if action in JOINS else set()
        if action not in LEAVES_A_GAP and (action, rows[place].kind) != ("duplicate", "item"):
            assert not new, (rows[place].id, new)
        assert not change.path or action == "delete" or any(row.path == change.path for row in tree(after.description))


def test_a_part_whose_id_another_has_is_renamed_alone_and_named_by_nothing_before(play: Stage) -> None:
    text = SMALL.replace("[terminal.R4]", "[terminal.M1]")

    async def act(hands: Hands) -> None:
        await hands.at("M1 (terminal)")
        await hands.press("m")
        assert "M1 (terminal)" not in hands.listed
        await hands.press("escape", "r", "ctrl+u")
        await hands.type("R4")
        await hands.press("enter")
        assert hands.text == SMALL

    play(act, text)


def test_nothing_is_hung_on_a_part_whose_id_another_has(play: Stage) -> None:
    text = SMALL.replace("[section.B1]", "[section.P1]").replace('from = "B1"', 'from = "M1"')

    async def act(hands: Hands) -> None:
        await hands.at("P1 (section)")
        for key in ("c", "t"):
            await hands.press(key)
            assert "another has its ID; rename it first" in hands.foot
        assert hands.text == text
        await hands.at("R4")
        await hands.press("m")
        assert "P1" in hands.listed
        assert "P1 (section)" not in hands.listed

    play(act, text)
