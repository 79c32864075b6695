"""Differences as lines: what a designer reads, within the columns there are, and nothing a terminal would obey."""

import unicodedata

from hypothesis import given, settings
from hypothesis import strategies as st

from budget.description.differences import compare
from budget.description.edits import AddTable, MoveTable, RemoveTable, apply_to_text
from budget.description.merging import MergeTable, merge
from budget.report.differences import difference_lines, merge_lines
from tests.description.test_differences import replaced
from tests.description.test_edits import RUN
from tests.description.toml_texts import documents

OURS = replaced('"14.5 m"', '"15 m"', replaced('"elbow 90" = 4', '"elbow 90" = 5', replaced("3 kPa", "4 kPa")))
THEIRS = replaced('"14.5 m"', '"16 m"', replaced("# measured", "# guessed"))


def lines(before: str, after: str, width: int = 100) -> list[str]:
    return list(difference_lines(compare(before, after), width))


def table(base: str | None, ours: str, theirs: str) -> MergeTable:
    (one,) = merge(base, ours, theirs).tables
    return one


def test_tells_a_table_key_by_key() -> None:
    assert lines(RUN, OURS) == [
        "section M1: changed",
        "  length              14.5 m  ->  15 m",
        "  fittings, elbow 90  4       ->  5",
        "  item 1 Meter, drop  3 kPa   ->  4 kPa",
    ]


def test_tells_comments_and_what_is_not_stated() -> None:
    assert lines(RUN, replaced('size = "DN40"\n', "", replaced("# measured", "# guessed"))) == [
        "section M1: changed",
        "  size                  DN40                           ->  -",
        '  comments or spelling  length = "14.5 m"  # measured  ->  length = "14.5 m"  # guessed',
    ]
    assert lines(RUN, replaced('size = "DN40"\n', 'size = "DN40"\n\n')) == [
        "section M1: changed",
        "  comments or spelling  -  ->  ordered or spaced otherwise",
    ]
    assert lines(RUN, replaced("# ---- Ground floor ----\n", "")) == [
        "a comment between tables: removed",
        "  # ---- Ground floor ----",
    ]


def test_tells_tables_that_come_go_and_move() -> None:
    gone = apply_to_text(RUN, RemoveTable(("section", "M3")))
    assert lines(RUN, gone) == ["section M3: removed", "  from    M1", "  accept  {}"]
    assert lines(gone, RUN) == ["section M3: added", "  from    M1", "  accept  {}"]
    assert lines(RUN, apply_to_text(RUN, MoveTable(("section", "M3"), after=("section", "M1")))) == [
        "section M3: moved",
        '  place  behind terminal."FCU 1"  ->  behind section.M1',
    ]


def test_tells_items_and_fittings_in_the_terms_of_the_file() -> None:
    item = {"name": "Coil", "drop": "9 kPa", "parallel": 2, "k": 1.5}
    assert lines(RUN, apply_to_text(RUN, AddTable(("section", "M1", "item"), item, array=True))) == [
        "section M1: changed",
        "  item 3 Coil  -  ->  name: Coil, drop: 9 kPa, parallel: 2, k: 1.5",
    ]
    assert lines("[section.M1]\nkv = '1'\n", "[section.M1]\nkv = 1\n")[1] == "  kv  '1'  ->  1"
    assert lines("a = 1\n", "a = 2\n") == ["the file: changed", "  a  1  ->  2"]


def test_tells_a_text_that_is_not_toml_by_its_lines() -> None:
    assert lines("a = 1\nb = 2\n", "a = 1\n<<<<<<< yours\n") == [
        "the text, line by line, as one version is not TOML: changed",
        "  line 2",
        "  - b = 2",
        "  + <<<<<<< yours",
    ]
    assert lines(RUN, RUN.replace("\n", "\r\n")) == ["the file: changed", "  line ends  LF  ->  CRLF"]


def test_tells_three_versions_beside_each_other() -> None:
    assert list(merge_lines(table(RUN, OURS, THEIRS), 80)) == [
        "section M1: changed by you and on disk",
        "                        as it was   yours       on disk",
        "  length                14.5 m      15 m        16 m",
        "  fittings, elbow 90    4           5           4",
        "  item Meter, drop      3 kPa       4 kPa       3 kPa",
        "  comments or spelling  # measured  # measured  # guessed",
    ]
    assert list(merge_lines(table(None, OURS, THEIRS), 80)) == [
        "section M1: not the same in your version and on disk",
        "                        yours       on disk",
        "  length                15 m        16 m",
        "  fittings, elbow 90    5           4",
        "  item Meter, drop      4 kPa       3 kPa",
        "  comments or spelling  # measured  # guessed",
    ]


def test_says_who_did_what() -> None:
    gone = apply_to_text(RUN, RemoveTable(("section", "M3")))
    other = replaced('from = "M1"\naccept = {}', 'from = "M2"\naccept = {}')
    assert [
        merge_lines(table(*texts))[0]
        for texts in (
            (RUN, gone, RUN),
            (RUN, RUN, gone),
            (gone, RUN, gone),
            (gone, gone, RUN),
            (RUN, gone, gone),
            (RUN, gone, other),
            (gone, RUN, other),
            (None, gone, RUN),
            (None, RUN, gone),
            (RUN, OURS, OURS),
        )
    ] == [
        "section M3: removed by you",
        "section M3: removed on disk",
        "section M3: added by you",
        "section M3: added on disk",
        "section M3: removed by you and on disk alike",
        "section M3: removed by you, changed on disk",
        "section M3: not the same in your version and on disk",
        "section M3: only on disk",
        "section M3: only in your version",
        "section M1: changed by you and on disk alike",
    ]


def test_says_how_many_lines_are_left_out() -> None:
    changes = compare(RUN, OURS)
    assert difference_lines(changes, most=3)[2:] == ("and 2 more",)
    assert difference_lines(changes, most=4) == difference_lines(changes)
    assert merge_lines(table(RUN, OURS, THEIRS), most=3)[2:] == ("and 4 more",)


def test_shows_where_long_values_part() -> None:
    start = "As drawn on the plan of the second floor, "
    found = lines(f'[design]\nnote = "{start}east"\n', f'[design]\nnote = "{start}west"\n', 60)
    assert found[1] == "  note  ...r, east  ->  ...r, west"


def test_cuts_values_before_keys() -> None:
    found = merge_lines(table(RUN, OURS, replaced('"14.5 m"', '"16 metres and a half of a metre"')), 50)
    assert found[2].startswith("  length              14.5 m")
    assert found[2].endswith("...")
    narrow = merge_lines(table(RUN, OURS, replaced('"14.5 m"', '"16 metres and a half of a metre"')), 33)
    assert narrow[2].split()[1:] == ["14.5", "m", "15", "m", "16..."]


@settings(max_examples=60)
@given(st.sampled_from([1, 8, 20, 60, 80]), documents(), documents())
def test_keeps_to_the_width_and_to_plain_signs(width: int, before: str, after: str) -> None:
    said = list(difference_lines(compare(before, after), width))
    for one in merge(before[:0], before, after).tables:
        said += merge_lines(one, width)
    for line in said:
        assert line.isprintable()
        assert (
            sum(0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1 for c in line)
            <= width
        )


@given(st.text(), st.text())
def test_is_plain_whatever_the_files_hold(before: str, after: str) -> None:
    for line in difference_lines(compare(before, after)):
        assert line.isprintable()


def test_obeys_nothing_that_stands_in_a_file() -> None:
    before = '[section."\\u001b[2J"]\nnote = "a"\n'
    after = '[section."\\u001b[2J"]\nnote = "\\u202e\\u0000b" # \u200f\n'
    assert lines(before, after)[:2] == ["section \ufffd[2J: changed", "  note                  a  ->  \ufffd\ufffdb"]
    assert all(line.isprintable() for line in merge_lines(table(before, after, before)))
