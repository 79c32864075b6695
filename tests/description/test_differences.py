"""What differs between two texts: every value, every comment, and nothing that doesn't."""

import time
import tomllib
from collections.abc import Callable
from random import Random

import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from budget.description.differences import Change, TableChanges, compare, stated
from budget.description.edits import EditError, SetValue, apply_to_text
from budget.description.finding import Path
from budget.description.source import read_text
from budget.description.spans import SpanIndex
from tests.description.mutations import TEXTS, mutate
from tests.description.test_edits import RUN
from tests.description.toml_texts import VALUES, documents


def replaced(old: str, new: str, text: str = RUN) -> str:
    assert text.count(old) == 1, old
    return text.replace(old, new)


def only(before: str, after: str) -> TableChanges:
    (found,) = compare(before, after)
    return found


M1: Path = ("section", "M1")


def test_finds_nothing_between_a_text_and_itself() -> None:
    assert compare(RUN, RUN) == ()


@pytest.mark.parametrize(
    ("old", "new", "change"),
    [
        ('"14.5 m"', '"15 m"', Change((*M1, "length"), '"14.5 m"', '"15 m"')),
        ('size = "DN40"\n', "", Change((*M1, "size"), '"DN40"', None)),
        ('size = "DN40"\n', 'size = "DN40"\nrise = 2\n', Change((*M1, "rise"), None, "2")),
        ('"elbow 90" = 4', '"elbow 90" = 5', Change((*M1, "fittings", "elbow 90"), "4", "5")),
        ('"elbow 90" = 4, ', "", Change((*M1, "fittings", "elbow 90"), "4", None)),
        ('"3 kPa"', '"4 kPa"', Change((*M1, "item", 0, "drop"), '"3 kPa"', '"4 kPa"', name="Meter")),
        (
            'name = "Meter"',
            'name = "Heat meter"',
            Change((*M1, "item", 0, "name"), '"Meter"', '"Heat meter"', name="Heat meter"),
        ),
        (
            '[fitting."swing joint"]\n',
            '[fitting."swing joint"]\nnote = "own"\n',
            Change(("fitting", "swing joint", "note"), None, '"own"'),
        ),
        (
            "[case.summer]",
            "[case.summer.stroke]\nV1 = 0.5\n\n[case.summer]",
            Change(("case", "summer", "stroke", "V1"), None, "0.5"),
        ),
        ("kv = 4.0", "kv = 4", Change((*M1, "item", 1, "kv"), "4.0", "4", name="Valve")),
        ("format = 1", "format = 2", Change(("format",), "1", "2")),
        ("run.out = 1", "run.out = 2", Change(("terminal", "FCU 1", "run", "out"), "1", "2")),
        (
            "# measured",
            "# from the drawing",
            Change(M1, 'length = "14.5 m"  # measured', 'length = "14.5 m"  # from the drawing', "spelling"),
        ),
        ("'65 kPa'", '"65 kPa"', Change(("source", "P1"), "available = '65 kPa'", 'available = "65 kPa"', "spelling")),
        ("name        =", "name =", Change(("fluid",), 'name        = "water"', 'name = "water"', "spelling")),
    ],
)
def test_finds_one_change(old: str, new: str, change: Change) -> None:
    found = only(RUN, replaced(old, new))
    assert found.kind == "changed"
    assert found.changes == (change,)


def test_takes_an_item_in_the_middle_as_one_item() -> None:
    valve = '[[section.M1.item]]\nname = "Valve"'
    after = replaced(valve, f'# A new one.\n[[section.M1.item]]\nname = "Coil"\ndrop = "9 kPa"\n\n{valve}')
    added = '{ name = "Coil", drop = "9 kPa" }'
    assert only(RUN, after) == TableChanges(M1, "changed", (Change((*M1, "item", 1), None, added, name="Coil"),))
    assert only(after, RUN) == TableChanges(M1, "changed", (Change((*M1, "item", 1), added, None, name="Coil"),))
    both = replaced("kv = 4.0", "kv = 5.0", after)
    assert only(RUN, both).changes[1] == Change((*M1, "item", 2, "kv"), "4.0", "5.0", name="Valve")


def test_takes_items_in_brackets_like_those_in_blocks() -> None:
    before = '[section.M1]\nitem = [{ name = "A", k = 1 }, { name = "B", k = 2 }]\n'
    after = '[[section.M1.item]]\nname = "A"\nk = 1\n[[section.M1.item]]\nname = "B"\nk = 3\n'
    assert only(before, after).changes[0] == Change((*M1, "item", 1, "k"), "2", "3", name="B")
    assert only("[section.M1]\nitem = []\n", before).changes[0].after == '{ name = "A", k = 1 }'


def test_tells_a_comment_beside_a_value_that_changed() -> None:
    after = replaced("# measured", "# guessed", replaced('"14.5 m"', '"15 m"'))
    assert only(RUN, after).changes == (
        Change((*M1, "length"), '"14.5 m"', '"15 m"'),
        Change(M1, "# measured", "# guessed", "spelling"),
    )
    curve = replaced("# nearly shut", "# shut", replaced("[1, 1.14]", "[1, 1.2]"))
    assert [one.about for one in only(RUN, curve).changes] == ["value", "spelling"]
    assert only(RUN, curve).changes[1].after == "# shut"


def test_tells_order_of_keys_and_blank_lines() -> None:
    for after in (
        replaced(
            'size = "DN40"\n\tlength = "14.5 m"  # measured\n', '\tlength = "14.5 m"  # measured\nsize = "DN40"\n'
        ),
        replaced('size = "DN40"\n', 'size = "DN40"\n\n'),
    ):
        assert only(RUN, after) == TableChanges(M1, "changed", (Change(M1, None, None, "spelling"),))
    assert only(RUN, replaced("[fluid]", "\n[fluid]")) == TableChanges(
        (), "changed", (Change((), None, None, "spelling"),)
    )


def test_tells_tables_that_come_go_and_move() -> None:
    one, other, third = ('[section.A]\nfrom = "P"\n', '[section.B]\nfrom = "A"\nsize = "DN20"\n', "[section.C]\n")
    added = only(one + third, one + other + third)
    assert added.kind == "added"
    assert added.table == ("section", "B")
    assert [(change.path[-1], change.before, change.after) for change in added.changes] == [
        ("from", None, '"A"'),
        ("size", None, '"DN20"'),
    ]
    assert [found.kind for found in compare(one + other + third, third + "[section.D]\n")] == [
        "removed",
        "removed",
        "added",
    ]
    moved = only(one + other + third, third + one + other)
    place = Change(("section", "C"), "section.B", "", "place")
    assert moved == TableChanges(("section", "C"), "moved", (place,))
    both = only(one + other + third, third + "size = 1\n" + one + other)
    assert both.kind == "changed"
    assert both.changes == (Change(("section", "C", "size"), None, "1"), place)


def test_stands_in_the_order_of_the_text_after() -> None:
    names = "ABCDE"
    before = "".join(f"[section.{name}]\nsize = 1\n" for name in names)
    after = before.replace("[section.B]\nsize = 1\n", "").replace("size = 1", "size = 2")
    assert "".join(str(found.table[1]) for found in compare(before, after)) == names


def test_tells_comments_between_tables() -> None:
    found = compare(RUN, replaced("# ---- Ground floor ----", "# ---- Cellar ----"))
    assert [(one.kind, one.changes[0].before, one.changes[0].after) for one in found] == [
        ("comment", "# ---- Ground floor ----", None),
        ("comment", None, "# ---- Cellar ----"),
    ]


def test_tells_line_ends_once() -> None:
    after = replaced('"14.5 m"', '"15 m"').replace("\n", "\r\n")
    ends, table = compare(RUN, after)
    assert ends == TableChanges((), "changed", (Change((), "LF", "CRLF", "line ends"),))
    assert table.changes == (Change((*M1, "length"), '"14.5 m"', '"15 m"'),)


def test_goes_by_lines_where_a_text_is_not_toml() -> None:
    marked = replaced('size = "DN40"\n', '<<<<<<< yours\nsize = "DN40"\n=======\nsize = "DN50"\n>>>>>>> theirs\n')
    found = only(RUN, marked)
    assert (found.table, found.kind) == ((), "text")
    number = RUN.splitlines().index('size = "DN40"') + 1
    assert found.lines[:2] == (f"line {number}", "+ <<<<<<< yours")
    assert '+ size = "DN50"' in found.lines
    assert only("a = [\n", "a = [\r\n").lines == ("the lines end otherwise",)


@settings(max_examples=40)
@given(documents(), documents())
def test_tells_something_of_any_two_texts(before: str, after: str) -> None:
    found = compare(before, after)
    assert bool(found) == (before != after)
    for one in found:
        assert one.changes or one.lines


@given(st.text(), st.text(alphabet="a=[]\"'#.\r\n1 "))
def test_never_raises(before: str, after: str) -> None:
    compare(before, after)
    stated(after)


@pytest.mark.parametrize("seed", range(12))
def test_tells_what_mutations_do(seed: int) -> None:
    random = Random(seed)
    for text in TEXTS[:4]:
        other = mutate(text, random, 3)
        assert bool(compare(text, other)) == (text != other)


@settings(max_examples=50, suppress_health_check=[HealthCheck.filter_too_much, HealthCheck.too_slow])
@given(st.data(), documents(), VALUES)
def test_finds_the_value_that_was_set(data: st.DataObject, text: str, value: object) -> None:
    assume(read_text(text).data)
    paths = [path for path in SpanIndex.of(text).paths() if SpanIndex.of(text).value(path) is not None]
    assume(paths)
    path = data.draw(st.sampled_from(paths))
    try:
        after = apply_to_text(text, SetValue(path, value))
    except EditError:
        assume(False)
    found = compare(text, after)
    assert len(found) <= 1
    for change in found[0].changes if found else ():
        size = min(len(change.path), len(path))
        if change.about == "value":
            assert [one for one in change.path[:size] if isinstance(one, str)] == [
                one for one in path[:size] if isinstance(one, str)
            ]


def test_states_every_value_by_its_keys() -> None:
    found = stated(RUN)
    assert found[*M1, "item Meter", "drop"] == '"3 kPa"'
    assert found[*M1, "fittings", "swing joint"] == "2"
    assert found["source", "P1", "available"] == "'65 kPa'"
    twice = '[[source.P.item]]\nname = "A"\n[[source.P.item]]\nname = "A"\n[[source.P.item]]\nk = 1\n'
    assert [path[2] for path in stated(twice)] == ["item A", "item A (2)", "item 3"]
    assert stated("a = ") == {}


@pytest.mark.parametrize(("old", "new"), [('"400 m"', '"4 m"'), ("elbow 90", "elbow 45")])
def test_is_quick(old: str, new: str) -> None:
    text = "".join(
        f'[section.S{n}]\nfrom = "S{n - 1}"\nsize = "DN40"\nlength = "{n} m"\nfittings = {{ "elbow 90" = 4 }}\n\n'
        for n in range(2000)
    )
    after = text.replace(old, new)
    shares = [_seconds(lambda: compare(text, after)) / _seconds(lambda: tomllib.loads(text)) for _ in range(3)]
    assert min(shares) < 15  # of reading one of them; a third of a second where nothing else runs


def _seconds(work: Callable[[], object]) -> float:
    start = time.perf_counter()
    work()
    return time.perf_counter() - start
