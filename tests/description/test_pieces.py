"""A text in pieces: nothing lost, every comment with what it speaks of."""

from hypothesis import given

from budget.description.pieces import cut, line_ends, owner_of, weave, with_line_ends
from tests.description.mutations import TEXTS
from tests.description.toml_texts import documents

RUN = """\
# The heating of an invented house.
format = 1

# ---- Plant ----

# The pump in the cellar.
[source.P1]
available = "65 kPa"
# It is an old one.

[[source.P1.item]]
kv = 21.0

[section.M1]  # riser
from = "P1"

[limits.main]
velocity = "1 m/s"
"""


@given(documents())
def test_puts_any_text_together_again(text: str) -> None:
    found = cut(text)
    assert found is None or found.text == text
    assert found is None or all(piece.text == piece.text.strip(" \t\r\n") for piece in found.pieces)


def test_cuts_at_headers_and_around_comments_that_stand_alone() -> None:
    found = cut(RUN)
    assert found is not None
    assert [(key.owner, key.number) for key in found.by_key] == [
        ((), 0),
        (None, 0),
        (("source", "P1"), 0),
        (("source", "P1"), 1),
        (("section", "M1"), 0),
        (("limits",), 0),
    ]
    assert found.pieces[1].text == "# ---- Plant ----"
    assert found.pieces[2].text == ('# The pump in the cellar.\n[source.P1]\navailable = "65 kPa"\n# It is an old one.')


def test_has_every_table_of_the_examples() -> None:
    for text in TEXTS:
        found = cut(text)
        assert found is not None
        assert found.text == text
        assert sum(piece.table is not None for piece in found.pieces) == len(
            [table for table in found.source.spans.all_tables() if table.number or table.statements]
        )


def test_cuts_no_text_that_is_not_toml() -> None:
    assert cut("<<<<<<< a\n") is None
    assert cut("a = " + "[" * 70 + "]" * 70) is None


def test_knows_whose_header_it_is() -> None:
    assert owner_of(("section", "M1", "item", 0)) == ("section", "M1")
    assert owner_of(("section", 0)) == ("section",)
    assert owner_of(("limits", "main")) == ("limits",)
    assert owner_of(("unheard", "of")) == ("unheard",)


def test_weaves_what_others_have_behind_its_neighbour() -> None:
    found = [cut("".join(f"[section.{name}]\n" for name in names)) for names in ("ABCD", "XAYZBD", "QD")]
    orders = [list(one.by_key) for one in found if one is not None]
    wanted = {key for order in orders for key in order if key.owner != ("section", "B")}
    woven = weave(orders[0], orders[1:], wanted)
    assert "".join(str(key.owner[1]) for key in woven if key.owner) == "QXAYZCD"


def test_tells_how_lines_end() -> None:
    assert [line_ends(text) for text in ("a", "a\n", "a\r\nb\r\n", "a\nb\r\n")] == ["", "LF", "CRLF", "mixed"]
    assert with_line_ends("a\nb\r\n", "CRLF") == "a\r\nb\r\n"
    assert with_line_ends("a\nb\r\n", "LF") == "a\nb\n"
