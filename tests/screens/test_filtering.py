"""A filter shows the rows that have every word, with what they hang on, and nothing is lost by it."""

from __future__ import annotations

import time

import pytest

from budget.document import Document
from budget.screens.filtering import NO_FILTER, matches, nearest, read_filter, sift, sought, text_of, told
from budget.screens.rows import Row, View, tree
from tests.screens.conftest import EXAMPLES, SMALL, Hands, Stage

NOTED = (
    SMALL.replace('title = "Hall"', 'title = "Hall"\nlocation = "Level 0"\nnote = "behind the STRASSE door"')
    .replace('title = "Study"', 'title = "index of what is over"')
    .replace('velocity = "1.0 m/s"', 'velocity = "0.45 m/s"')
    .replace('[section.B1]', '[[section.M1.item]]\nname = "Strainer"\nkv = 4.5\n\n[section.B1]')
)  # fmt: skip
"""With a place, a note, words that have a meaning of their own in a title, and M1 over its limit."""


def left(text: str, words: str) -> list[str]:
    """Return the rows that match, without those that only lead to them."""
    snapshot = Document.of(text).snapshot
    view, rows = View(snapshot), tree(snapshot.description)
    sifted = sift(view, rows, read_filter(words))
    found = [row for row in sifted.rows if row.path not in sifted.leading]
    assert len(found) == sifted.matching
    return [row.id if row.kind != "item" else f"{row.id} item" for row in found]


@pytest.mark.parametrize(
    ("words", "rows"),
    [
        ("kitchen", ["R3"]),
        ("KITCH", ["R3"]),
        ("rooms", ["B1", "B2"]),
        ("south rooms", ["B2"]),
        ("rooms hall", []),
        ("level", ["R1"]),
        ("straße", ["R1"]),
        ('"15 mm"', ["B1", "B2"]),
        ("gate", ["M1"]),
        ('"lv 15"', ["R1", "R2", "R3", "R4"]),
        ("boiler", ["P1", "P1 item", "M1"]),
        ("strainer 4.5", ["M1 item"]),
        ("nowhere", []),
        ("device", ["R1", "R2", "R3", "R4"]),
        ("over", ["M1"]),
        ("index", ["P1", "P1 item", "M1", "M1 item", "B2", "R4"]),
        ("index device", ["R4"]),
        ('"index"', ["R2"]),
        ('"index', ["R2"]),
        ('"over"', ["R2"]),
        ('"south rooms"', ["B2"]),
        ('"rooms south"', []),
        ('"boiler pump" index', ["P1"]),
    ],
)
def test_a_filter_leaves_the_rows_that_have_every_word(words: str, rows: list[str]) -> None:
    assert left(NOTED, words) == rows


@pytest.mark.parametrize("text", ["", "  ", '""', '" "', '"'])
def test_a_filter_that_asks_for_nothing_is_none(text: str) -> None:
    assert not read_filter(text)


def test_a_quote_within_a_word_is_sought() -> None:
    assert read_filter('3/4" pipe').words == ('3/4"', "pipe")


def test_a_search_knows_no_word_with_a_meaning_of_its_own() -> None:
    assert sought("Index over").words == ("index", "over")
    assert sought("index").traits == ()


def test_what_an_item_is_over_is_told_of_the_item_and_of_its_row() -> None:
    broken = SMALL.replace('name = "Boiler"\ndrop = "6 kPa"', 'name = "Boiler"\ndrop = "6 qPa"')
    assert left(broken, "over boiler") == ["P1", "P1 item"]
    assert "P1 item" not in left(SMALL, "over")


def test_with_a_row_come_those_on_which_it_hangs() -> None:
    snapshot = Document.of(SMALL).snapshot
    view, rows = View(snapshot), tree(snapshot.description)
    sifted = sift(view, rows, read_filter("study"))
    assert [row.id for row in sifted.rows] == ["P1", "M1", "B1", "R2"]
    assert sifted.leading == {("source", "P1"), ("section", "M1"), ("section", "B1")}
    assert told(sifted, read_filter("study"), len(rows)) == "1 of 9 rows match, 4 shown: study"


def test_a_row_in_hand_stays_and_is_not_counted() -> None:
    snapshot = Document.of(SMALL).snapshot
    view, rows = View(snapshot), tree(snapshot.description)
    sifted = sift(view, rows, read_filter("study"), held=("terminal", "R3"))
    assert [row.id for row in sifted.rows] == ["P1", "M1", "B1", "R2", "B2", "R3"]
    assert ("terminal", "R3") not in sifted.leading
    assert ("section", "B2") in sifted.leading
    assert sifted.matching == 1


@pytest.mark.parametrize("example", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
@pytest.mark.parametrize("words", ["a", "1", "index", "device", "over", "e 2"])
def test_what_is_shown_is_a_tree_of_what_matches(example, words: str) -> None:  # type: ignore[no-untyped-def]  # noqa: ANN001
    snapshot = Document.open(example).snapshot
    view, rows, wanted = View(snapshot), tree(snapshot.description), read_filter(words)
    shown = sift(view, rows, wanted).rows
    expected: set[int] = set()
    for place, row in enumerate(rows):
        if matches(view, row, wanted):
            expected.add(place)
            for depth in range(row.depth):
                expected.add(max(above for above in range(place) if rows[above].depth == depth))
    assert [rows.index(row) for row in shown] == sorted(expected)


@pytest.mark.parametrize("example", sorted(EXAMPLES.glob("*.toml")), ids=lambda path: path.stem)
def test_the_index_circuit_is_that_of_the_results(example) -> None:  # type: ignore[no-untyped-def]  # noqa: ANN001
    budget = Document.open(example).snapshot.budget
    sections = {result.id for result in budget.sections.values() if result.index}
    assert budget.index == sections | {result.id for result in budget.terminals.values() if result.index}


def test_the_closest_row_that_is_shown_is_found() -> None:
    rows = [Row(("section", str(n)), "section", str(n), 0) for n in range(10)]
    shown = [rows[1], rows[6], rows[8]]
    assert nearest(rows, shown, ("section", "6")) == 1
    assert nearest(rows, shown, ("section", "5")) == 1
    assert nearest(rows, shown, ("section", "7")) == 1
    assert nearest(rows, shown, ("section", "5"), above=True) == 0
    assert nearest(rows, shown, ("section", "0"), above=True) == 0
    assert nearest(rows, shown, ("section", "gone")) is None
    assert nearest(rows, [], ("section", "5")) is None


def test_a_thousand_rows_are_sifted_while_a_key_comes_up() -> None:
    source = SMALL[: SMALL.index("[section.M1]")]
    branches = "".join(
        f'[section.B{n}]\ntitle = "Branch {n}"\nfrom = "P1"\nsize = "18 mm"\nlength = "5 m"\n'
        f'[terminal.R{n}]\ntitle = "Room {n}"\nlocation = "Level {n % 7}"\nfrom = "B{n}"\nload = "1 kW"\n'
        for n in range(500)
    )
    snapshot = Document.of(source + branches).snapshot
    view, rows = View(snapshot), tree(snapshot.description)
    assert len(rows) == 1002
    took = []
    for words in ("r", "ro", "room", "room 4", "index", "over", "device", "nowhere"):
        begun = time.thread_time()
        sift(view, rows, read_filter(words))
        took.append(time.thread_time() - begun)
    assert sorted(took)[-2] < 0.02, took
    assert text_of(view, rows[-1]) is text_of(view, rows[-1])


def shown(hands: Hands) -> list[str]:
    """The IDs in the ledger."""
    return [row.id for row in hands.app.ledger.shown]


def in_hand(hands: Hands) -> str:
    """The ID under the cursor."""
    row = hands.app.ledger.row
    return row.id if row is not None else ""


async def keep_only(hands: Hands, words: str) -> None:
    """Set a filter."""
    await hands.press("W")
    if hands.app.ledger.filter:
        await hands.press("ctrl+u")
    await hands.type(words)
    await hands.press("enter")


def test_rows_go_while_one_types_and_come_back_with_escape(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("R4", "length")
        await hands.press("W")
        await hands.type("hall")
        assert hands.place == "entry"
        assert shown(hands) == ["P1", "M1", "B1", "R1"]
        assert hands.lines()[0] == " 1 of 9 rows match, 4 shown: hall"
        assert hands.lines()[2].split()[:3] == ["4", "of", "4"]
        assert in_hand(hands) == "R1"
        await hands.press(*["backspace"] * 4)
        assert len(shown(hands)) == 9
        assert in_hand(hands) == "R4"
        await hands.type("zz")
        assert hands.lines()[0] == " 0 of 9 rows match, 0 shown: zz"
        assert "no row" in hands.lines()[2]
        await hands.press("escape")
        assert len(shown(hands)) == 9
        assert in_hand(hands) == "R4"
        assert "match" not in hands.screen_text

    play(act)


def test_enter_keeps_a_filter_and_escape_takes_it_away(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await keep_only(hands, "rooms")
        assert hands.foot == "2 of 9 rows match; Escape shows every row"
        assert shown(hands) == ["P1", "M1", "B1", "B2"]
        await hands.press("end", "v", "escape")
        assert shown(hands) == ["P1", "M1", "B1", "B2"]
        await hands.press("W", "escape")
        assert shown(hands) == ["P1", "M1", "B1", "B2"]
        await hands.press("escape")
        assert hands.foot == "every row is shown"
        assert len(shown(hands)) == 9
        assert in_hand(hands) == "B2"
        await keep_only(hands, "nowhere")
        assert hands.foot == "no row matches nowhere; every row is shown"
        assert len(shown(hands)) == 9
        await keep_only(hands, "rooms")
        await keep_only(hands, "")
        assert len(shown(hands)) == 9

    play(act)


def test_rows_that_only_lead_to_others_are_faint(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await keep_only(hands, "index device")
        lines = [list(hands.app.ledger.line(y, 80)) for y in range(3, 7)]
        assert [{role for _, role in line[2:] if role} for line in lines[1:3]] == [{"faint"}, {"faint"}]
        assert lines[3][1][0].strip() == "R4"
        assert lines[3][1][1] == "index"

    play(act)


def test_folds_wait_until_the_filter_is_gone(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("B1", "length")
        await hands.press("space")
        assert "R1" not in shown(hands)
        await keep_only(hands, "hall")
        assert shown(hands)[-1] == "R1"
        assert "+B1" not in hands.screen_text
        await hands.at("R1", "length")
        for key in ("space", "z"):
            await hands.press(key)
            assert hands.foot == "nothing is folded while a filter stands; Escape shows every row"
        await hands.press("escape")
        assert "+B1" in hands.screen_text
        assert "R1" not in shown(hands)
        assert in_hand(hands) == "B1"

    play(act)


def test_a_row_that_is_mended_stays_until_the_cursor_leaves_it(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await keep_only(hands, "over")
        assert shown(hands) == ["P1", "M1"]
        await hands.at("M1", "size")
        await hands.press("enter")
        await hands.type("28 mm")
        assert in_hand(hands) == "M1"
        await hands.press("enter")
        assert shown(hands) == ["P1", "M1"]
        assert hands.lines()[0] == " 0 of 9 rows match, 2 shown: over"
        await hands.press("u")
        assert hands.lines()[0] == " 1 of 9 rows match, 2 shown: over"
        await hands.press("U")
        assert in_hand(hands) == "M1"

    play(act, SMALL.replace('velocity = "1.0 m/s"', 'velocity = "0.45 m/s"'))


def test_a_row_that_is_renamed_or_retitled_goes_when_it_is_left(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await keep_only(hands, '"lv 15"')
        await hands.at("R3", "length")
        await hands.press("equals_sign")
        await hands.type("balance =")
        await hands.press("enter")
        assert "balance" not in hands.text[hands.text.index("[terminal.R3]") : hands.text.index("[terminal.R4]")]
        assert in_hand(hands) == "R3"
        assert hands.lines()[0].startswith(" 3 of 9 rows match")
        await hands.press("down")
        assert in_hand(hands) == "R4"
        assert "R3" not in shown(hands)
        await keep_only(hands, "r4")
        await hands.press("r")
        await hands.type("X9")
        await hands.press("enter")
        assert in_hand(hands) == "X9"
        assert "X9" in shown(hands)

    play(act)


def test_a_filter_that_a_change_leaves_with_nothing_goes_away(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        ledger = hands.app.ledger
        ledger.keep_only(read_filter("kitchen"))
        before = hands.app.document.snapshot
        hands.app.document.replace_text(SMALL[: SMALL.index("[source.P1]")] + "[source.Q1]\n", "empty")
        hands.app.show(hands.app.document.snapshot, before)
        assert ledger.filter is NO_FILTER
        assert shown(hands) == ["Q1"]

    play(act)


def test_a_new_row_is_shown_and_an_edit_undo_and_reload_keep_the_filter(play: Stage, tmp_path) -> None:  # type: ignore[no-untyped-def]  # noqa: ANN001
    async def act(hands: Hands) -> None:
        await keep_only(hands, "hall")
        await hands.at("R1", "length")
        await hands.press("t")
        assert in_hand(hands) == "R5"
        assert shown(hands) == ["P1", "M1", "B1", "R1", "R5"]
        await hands.press("u")
        assert shown(hands) == ["P1", "M1", "B1", "R1"]
        await hands.press("enter")
        await hands.type("4")
        assert shown(hands) == ["P1", "M1", "B1", "R1"]
        await hands.press("enter", "u")
        assert hands.app.ledger.filter.words == ("hall",)
        (tmp_path / "run.toml").write_text(SMALL.replace("[terminal.R4]", "[terminal.R9]").replace("Study", "Hall 2"))
        hands.app.look_again()
        await hands.done()
        assert hands.foot.startswith("reloaded")
        assert shown(hands) == ["P1", "M1", "B1", "R1", "R2"]

    play(act)


def test_going_to_a_row_that_is_left_out_takes_the_filter_away_with_a_word(play: Stage) -> None:
    gone = "the filter was taken away"

    async def act(hands: Hands) -> None:
        await keep_only(hands, "hall")
        await hands.press("g")
        await hands.type("b1")
        await hands.press("enter")
        assert in_hand(hands) == "B1"
        assert hands.app.ledger.filter
        await hands.press("g")
        await hands.type("r3")
        await hands.press("enter")
        assert (in_hand(hands), hands.foot, len(shown(hands))) == ("R3", gone, 9)
        await keep_only(hands, "hall")
        await hands.press("i")
        assert (in_hand(hands), hands.foot) == ("R4", gone)
        await keep_only(hands, "hall")
        await hands.press("e")
        assert in_hand(hands) == "M1"
        assert hands.app.ledger.filter
        await keep_only(hands, '"boiler pump"')
        await hands.press("e")
        assert in_hand(hands) == "M1"
        assert hands.foot.startswith(f"{gone}; velocity 0.49")
        await keep_only(hands, "hall")
        await hands.press("F", "enter")
        assert in_hand(hands) == "M1"

    play(act, SMALL.replace('velocity = "1.0 m/s"', 'velocity = "0.45 m/s"'))


def test_searching_for_a_row_that_is_left_out_takes_the_filter_away_and_escape_puts_it_back(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await keep_only(hands, "hall")
        await hands.at("M1", "length")
        await hands.press("slash")
        await hands.type("kitchen")
        assert in_hand(hands) == "R3"
        await hands.press("escape")
        assert (in_hand(hands), shown(hands)) == ("M1", ["P1", "M1", "B1", "R1"])
        await hands.press("slash")
        await hands.type("hall")
        await hands.press("enter")
        assert (in_hand(hands), bool(hands.app.ledger.filter)) == ("R1", True)
        await hands.press("home", "slash")
        await hands.type("rooms")
        await hands.press("enter")
        assert (in_hand(hands), bool(hands.app.ledger.filter)) == ("B1", True)
        await hands.press("n")
        assert (in_hand(hands), bool(hands.app.ledger.filter)) == ("B2", False)
        assert hands.foot == "the filter was taken away"

    play(act)


def test_moving_on_the_balance_screen_keeps_the_filter_of_the_ledger(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await keep_only(hands, "hall")
        await hands.press("B", "home", "down", "down")
        marked = hands.app.boards["balance"].marked
        await hands.press("escape")
        assert hands.app.ledger.filter
        assert in_hand(hands) == marked
        await hands.press("home")
        assert shown(hands) == ["P1", "M1", "B1", "R1"]

    play(act)
