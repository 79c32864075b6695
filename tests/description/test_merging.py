"""Two versions taken together: whoever changed a table has it, and every byte is one of theirs."""

import tomllib
from random import Random
from typing import Any

import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from budget.description.edits import (
    AddTable,
    CopyTable,
    Edit,
    EditError,
    MoveTable,
    RemoveTable,
    SetValue,
    Several,
    Unset,
    apply_to_text,
    apply_to_value,
)
from budget.description.finding import Path
from budget.description.merging import MergeError, merge
from budget.description.pieces import cut
from tests.description.mutations import TEXTS, mutate
from tests.description.test_differences import replaced
from tests.description.test_edits import RUN
from tests.description.toml_texts import documents

M1: Path = ("section", "M1")
LENGTH = '"14.5 m"'


def standing(base: str | None, ours: str, theirs: str) -> dict[Path, str]:
    found = merge(base, ours, theirs)
    assert found.possible, found.reason
    return {table.table: table.standing for table in found.tables}


def test_takes_what_each_side_changed() -> None:
    ours = replaced(LENGTH, '"15 m"  # longer')
    theirs = replaced("kv = 21.0", "kv = 22.0")
    assert standing(RUN, ours, theirs) == {("source", "P1"): "theirs", M1: "ours"}
    assert merge(RUN, ours, theirs).text() == replaced("kv = 21.0", "kv = 22.0", ours)


def test_wants_a_pick_where_both_changed_a_table() -> None:
    ours, theirs = replaced(LENGTH, '"15 m"'), replaced(LENGTH, '"16 m"')
    found = merge(RUN, ours, theirs)
    (table,) = found.tables
    assert (table.table, table.standing) == (M1, "both")
    assert LENGTH in (table.base or "")
    assert '"15 m"' in (table.ours or "")
    assert '"16 m"' in (table.theirs or "")
    assert found.text() == ours
    assert found.text({M1: "ours"}) == ours
    assert found.text({M1: "theirs"}) == theirs
    assert found.text({M1: "base"}) == RUN


def test_lets_a_pick_go_over_what_one_side_changed() -> None:
    theirs = replaced("kv = 21.0", "kv = 22.0")
    found = merge(RUN, RUN, theirs)
    assert found.text({("source", "P1"): "ours"}) == RUN
    assert found.text({("fluid",): "base"}) == theirs


def test_takes_alike_changes_once() -> None:
    both = replaced(LENGTH, '"15 m"')
    assert standing(RUN, both, both) == {M1: "same"}
    assert merge(RUN, both, both).text() == both


def test_removes_what_one_side_removed() -> None:
    gone = apply_to_text(RUN, RemoveTable(("section", "M3")))
    assert standing(RUN, gone, RUN) == {("section", "M3"): "ours"}
    assert merge(RUN, gone, RUN).text() == gone
    changed = replaced('from = "M1"\naccept = {}', 'from = "M2"\naccept = {}')
    found = merge(RUN, gone, changed)
    assert [(one.standing, one.ours) for one in found.tables] == [("both", None)]
    assert found.text() == gone
    assert found.text({("section", "M3"): "theirs"}) == changed


def test_puts_new_tables_behind_their_neighbours() -> None:
    ours = apply_to_text(RUN, AddTable(("section", "X"), {"from": "M1"}, after=("section", "M2")))
    theirs = apply_to_text(RUN, AddTable(("section", "Y"), {"from": "M3"}, after=("section", "M3")))
    text = merge(RUN, ours, theirs).text()
    headers = [line for line in text.splitlines() if line.startswith("[section.")]
    assert headers == ["[section.M1]", "[section.M2]", "[section.X]", "[section.M3]", "[section.Y]"]
    assert "\n\n[section.Y]" in text


def test_keeps_comments_between_tables() -> None:
    ours = replaced("# ---- Ground floor ----", "# ---- Cellar ----")
    theirs = replaced("# ---- First floor ----\n", "# ---- First floor ----\n\n# Two rooms.\n")
    text = merge(RUN, ours, theirs).text()
    assert text == replaced("# ---- Ground floor ----", "# ---- Cellar ----", theirs)


def test_leaves_a_comment_with_its_table() -> None:
    base = "[section.A]\nsize = 1\n\n[section.B]\nsize = 1\n"
    ours = base.replace("1\n\n", "1\n# Of A.\n\n")
    theirs = base.replace("\n\n", "\n")
    assert merge(base, ours, theirs).text() == ours


def test_takes_items_that_stand_elsewhere_with_their_table() -> None:
    base = "[section.A]\nsize = 1\n\n[section.B]\nsize = 1\n\n[[section.A.item]]\nk = 1\n"
    ours = base.replace("k = 1", "k = 2\n\n[[section.A.item]]\nk = 3")
    theirs = base.replace("[section.B]\nsize = 1", "[section.B]\nsize = 2")
    found = merge(base, ours, theirs)
    assert {one.table: one.standing for one in found.tables} == {("section", "A"): "ours", ("section", "B"): "theirs"}
    assert found.text() == ours.replace("[section.B]\nsize = 1", "[section.B]\nsize = 2")
    assert found.text({("section", "A"): "theirs"}) == theirs


def test_follows_the_side_that_moved_tables() -> None:
    moved = apply_to_text(RUN, MoveTable(("section", "M3"), after=("section", "M1")))
    changed = replaced("kv = 21.0", "kv = 22.0")
    assert merge(RUN, moved, changed).text() == replaced("kv = 21.0", "kv = 22.0", moved)
    assert merge(RUN, changed, moved).text() == replaced("kv = 21.0", "kv = 22.0", moved)


def test_follows_the_side_that_changed_line_ends() -> None:
    ours, theirs = replaced(LENGTH, '"15 m"'), replaced("kv = 21.0", "kv = 22.0")
    both = replaced("kv = 21.0", "kv = 22.0", ours).replace("\n", "\r\n")
    windows = RUN.replace("\n", "\r\n")
    assert merge(RUN, ours, theirs.replace("\n", "\r\n")).text() == both
    assert merge(RUN, ours.replace("\n", "\r\n"), theirs).text() == both
    assert merge(windows, ours.replace("\n", "\r\n"), theirs.replace("\n", "\r\n")).text() == both
    assert merge(windows, ours, theirs.replace("\n", "\r\n")).text() == both.replace("\r\n", "\n")


def test_has_every_table_that_differs_picked_where_no_base_is_known() -> None:
    ours, theirs = replaced(LENGTH, '"15 m"'), replaced("kv = 21.0", "kv = 22.0")
    assert standing(None, ours, theirs) == {("source", "P1"): "both", M1: "both"}
    found = merge(None, ours, theirs)
    assert found.text() == ours
    assert found.text({("source", "P1"): "theirs"}) == replaced("kv = 21.0", "kv = 22.0", ours)
    with pytest.raises(MergeError, match="no version that both come from is known"):
        found.text({M1: "base"})


@pytest.mark.parametrize(
    ("texts", "reason"),
    [
        (("a = ", RUN, RUN), "the version that both come from is not TOML"),
        ((RUN, "a = ", RUN), "your version is not TOML"),
        ((RUN, RUN, "a = "), "the version on disk is not TOML"),
    ],
)
def test_says_which_version_is_not_toml(texts: tuple[str, str, str], reason: str) -> None:
    found = merge(*texts)
    assert not found.possible
    assert reason in found.reason
    with pytest.raises(MergeError, match=reason):
        found.text()


def test_refuses_what_is_no_toml_together() -> None:
    base, ours, theirs = "a = 1\n", "a = 1\nfluid.name = 'water'\n", "a = 1\n\n[fluid]\nname = 'air'\n"
    found = merge(base, ours, theirs)
    assert not found.possible
    assert "only a whole version can be taken" in found.reason
    assert tomllib.loads(found.text({(): "base"})) == tomllib.loads(theirs)
    assert tomllib.loads(found.text({("fluid",): "base"})) == tomllib.loads(ours)


def test_adds_nothing_but_newlines() -> None:
    ours = apply_to_text(RUN, AddTable(("section", "X"), {"from": "M1"}, after=("section", "M2")))
    theirs = apply_to_text(RUN, RemoveTable(("section", "M3"))).removesuffix("\n")
    text = merge(RUN, ours, theirs).text()
    assert set(text.splitlines()) - {""} <= set(ours.splitlines()) | set(theirs.splitlines())


@settings(max_examples=40)
@given(documents(), documents())
def test_leaves_one_changed_version_as_it_is(one: str, other: str) -> None:
    assume(cut(one) is not None and cut(other) is not None)
    assert merge(one, one, other).text() == other
    assert merge(one, other, one).text() == other
    assert merge(one, other, other).text() == other
    assert merge(None, other, other).text() == other


@settings(max_examples=40)
@given(documents(), documents(), documents())
def test_gives_whole_versions_by_picks(base: str, ours: str, theirs: str) -> None:
    assume(all(cut(text) is not None for text in (base, ours, theirs)))
    found = merge(base, ours, theirs)
    for side, text in (("ours", ours), ("theirs", theirs), ("base", base)):
        picks: Any = dict.fromkeys((one.table for one in found.tables), side)
        try:
            merged = found.text(picks)
        except MergeError:  # the order of one version, with the tables of another, is not always TOML
            continue
        assert tomllib.loads(merged) == tomllib.loads(text)


@given(st.one_of(st.none(), st.text(alphabet="a=[]\"'#.\r\n1 ")), documents() | st.text(), documents() | st.text())
def test_never_raises(base: str | None, ours: str, theirs: str) -> None:
    found = merge(base, ours, theirs)
    if found.possible:
        assert cut(found.text()) is not None


@pytest.mark.parametrize("seed", range(40))
def test_takes_mutations_of_one_run_together(seed: int) -> None:
    random = Random(seed)
    text = random.choice(TEXTS)
    ours, theirs = (mutate(text, random, 2) for _ in range(2))
    if cut(ours) is not None:
        assert merge(text, text, ours).text() == merge(text, ours, text).text() == ours
    found = merge(text, ours, theirs)
    if not found.possible:
        return
    merged, before = cut(found.text()), cut(text)
    assert merged is not None
    assert before is not None
    expected = {owner: "\n\n".join(piece.text for piece in pieces) for owner, pieces in before.owned.items()}
    for one in found.tables:
        chosen = one.theirs if one.standing == "theirs" else one.ours
        expected.pop(one.table, None)
        expected |= {} if chosen is None else {one.table: chosen}
    assert {owner: "\n\n".join(piece.text for piece in pieces) for owner, pieces in merged.owned.items()} == expected


KINDS = ("section", "terminal")


@st.composite
def edits(draw: Any, name: Path, others: list[Path]) -> Edit:
    """Draw an edit of one table."""
    target = draw(st.sampled_from(others))
    return draw(  # type: ignore[no-any-return]
        st.sampled_from(
            [
                SetValue((*name, "note"), "Seen on site."),
                SetValue((*name, "length"), "7.25 m"),
                SetValue((*name, "fittings"), {"elbow 90": 3}),
                Several((SetValue((*name, "rise"), 1), Unset((*name, "rise")), SetValue((*name, "rise"), 2))),
                AddTable((*name, "item"), {"name": "Trap", "drop": "1 kPa"}, array=True),
                RemoveTable(name),
                CopyTable(name, (name[0], f"{name[1]} again"), {"note": "New."}),
                MoveTable(name, after=target),
            ]
        )
    )


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.too_slow, HealthCheck.filter_too_much])
@given(st.data(), st.sampled_from(TEXTS))
def test_has_both_edits_of_two_tables(data: st.DataObject, text: str) -> None:
    content = tomllib.loads(text)
    names: list[Path] = [(kind, name) for kind in KINDS for name in content.get(kind, {})]
    mine, yours = data.draw(st.lists(st.sampled_from(names), min_size=2, max_size=2, unique=True))
    others = [name for name in names if name not in (mine, yours)]
    assume(others)
    edit, other = data.draw(edits(mine, others)), data.draw(edits(yours, others))
    try:
        ours, theirs = apply_to_text(text, edit), apply_to_text(text, other)
        expected = apply_to_value(apply_to_value(content, edit), other)
    except EditError:
        assume(False)
    found = merge(text, ours, theirs)
    assert found.possible, found.reason
    assert not [one.table for one in found.tables if one.standing == "both"]
    there = {key: value for key, value in expected.items() if value != {}}  # without what two removals emptied
    assert tomllib.loads(found.text()) == there
