"""What changed between two versions of a run: figures as shown, and nothing where nothing did."""

from __future__ import annotations

import json
from decimal import Decimal

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from budget.description import read_text
from budget.document import Snapshot, take
from budget.report.changes import Changes, FigureChange, changes_between
from budget.report.changes_text import changes_lines, changes_object
from budget.report.figures import GRAVITY
from tests.commands.calls import RUN


def version(*replaced: tuple[str, str], text: str = RUN) -> Snapshot:
    """The run with some of its text replaced."""
    for before, after in replaced:
        assert text.count(before) >= 1, before
        text = text.replace(before, after)
    return take(read_text(text))


BASE = version()
LONGER = version(('"7.5 m"', '"9 m"'))


def row(changes: Changes, kind: str, id_: str) -> dict[str, FigureChange]:
    """The figures of a row that changed, by their names."""
    (found,) = [one for one in changes.rows if (one.kind, one.id) == (kind, id_)]
    assert found.standing == "changed"
    return {one.name: one for one in found.figures}


def test_a_longer_main_is_told_by_what_it_costs() -> None:
    changes = changes_between(BASE, LONGER)
    was, now = (one.budget.sources["P1"] for one in (BASE, LONGER))
    source = row(changes, "source", "P1")
    assert source["required"].was == was.required
    assert source["required"].now == now.required
    assert source["required"].before == f"{was.required / 1000:.2f}"
    assert source["required"].after == f"{now.required / 1000:.2f}"
    assert source["required"].unit == "kPa"
    assert Decimal(source["in_hand"].difference) < 0
    assert source["spent.distribution"].difference == source["required"].difference
    assert not {"index", "available", "duty_flow", "spent.plant", "spent.terminal"} & source.keys()
    assert set(row(changes, "section", "M1")) == {"drop"}
    assert [(one.kind, one.id) for one in changes.rows] == [("source", "P1"), ("section", "M1")]
    assert changes.keys[0].table == ("section", "M1")
    assert (changes.new, changes.gone) == ((), ())


def test_a_duty_is_told_as_a_head_too() -> None:
    changes = changes_between(BASE, version(('"7.5 m"', '"90 m"')))
    head = row(changes, "source", "P1")["duty_head"]
    source = BASE.budget.sources["P1"]
    assert head.was == pytest.approx(source.duty / (source.fluid.density * GRAVITY))
    assert (head.unit, head.before) == ("m", f"{head.was:.1f}")


def test_another_load_moves_flows_devices_and_the_index() -> None:
    changes = changes_between(BASE, version(('"2.4 kW"', '"4.8 kW"')))
    terminal = row(changes, "terminal", "R1")
    assert Decimal(terminal["flow"].difference) > 0
    assert terminal["flow"].unit == "L/s"
    source = row(changes, "source", "P1")
    assert (source["index"].before, source["index"].after, source["index"].difference) == ("R 2", "R1", "")
    assert {"duty_flow", "required", "reserve", "duty", "in_hand"} <= source.keys()
    assert row(changes, "device", "R 2")["setting"].before != row(changes, "device", "R 2")["setting"].after
    assert {"drop", "take_up"} <= row(changes, "device", "R 2").keys()
    assert {"flow", "drop", "velocity"} <= row(changes, "section", "M1").keys()


def test_a_size_is_told_as_it_is_called_and_another_device_by_its_name() -> None:
    after = version(('"22 mm"', '"28 mm"'), ('"LV 15"]', '"LV 20"]'), ('balance = "LV 15"', 'balance = "LV 20"'))
    changes = changes_between(BASE, after)
    size = row(changes, "section", "M1")["size"]
    assert ("22" in size.before, "28" in size.after, size.difference) == (True, True, "")
    assert (row(changes, "device", "R1")["name"].was, row(changes, "device", "R1")["name"].now) == ("LV 15", "LV 20")


def test_rows_that_come_and_go_are_told_as_such() -> None:
    more = version(("[terminal.R1]", '[section.S2]\nfrom = "M1"\nsize = "15 mm"\nlength = "1 m"\n\n[terminal.R1]'))
    more = version(
        ('from = "M1"\nload = "2.6 kW"', 'from = "S2"\nload = "2.6 kW"'),
        ('length = "3.0 m"\nbalance = "LV 15"', 'length = "3.0 m"'),
        text=more.text,
    )
    there, back = changes_between(BASE, more), changes_between(more, BASE)
    assert ("section", "S2", "added") in [(one.kind, one.id, one.standing) for one in there.rows]
    assert ("section", "S2", "removed") in [(one.kind, one.id, one.standing) for one in back.rows]
    assert ("device", "R1", "removed") in [(one.kind, one.id, one.standing) for one in there.rows]
    assert [one.figures for one in there.rows if one.standing != "changed"] == [(), ()]


def test_what_is_less_than_rounding_is_no_change() -> None:
    changes = changes_between(BASE, version(('"7.5 m"', '"7.5001 m"')))
    assert changes.rows == ()
    assert len(changes.keys) == 1


def test_what_can_not_be_computed_any_more_is_a_dash_and_null() -> None:
    after = version(('length = "7.5 m"   # measured on site\n', ""))
    changes = changes_between(BASE, after)
    required = row(changes, "source", "P1")["required"]
    assert (required.after, required.now, required.difference) == ("-", None, "")
    assert [one.code for one in changes.new] == ["missing"]
    assert [one.code for one in changes_between(after, BASE).gone] == ["missing"]
    assert json.loads(json.dumps(changes_object("0", "x", {}, changes), allow_nan=False))


def test_a_terminal_that_hangs_on_nothing_is_there_without_figures() -> None:
    after = version(('[terminal.R1]\ntitle = "Hall"\nfrom = "M1"', '[terminal.R1]\ntitle = "Hall"\nfrom = "M9"'))
    assert row(changes_between(BASE, after), "terminal", "R1")["flow"].after == "-"


def test_figures_are_in_the_units_of_the_newer_version() -> None:
    after = version(('title = "Ferry house"', 'title = "Ferry house"\nunits = "IP"'), ('"7.5 m"', '"9 m"'))
    required = row(changes_between(BASE, after), "source", "P1")["required"]
    assert required.unit == "ftH2O"
    assert required.was == BASE.budget.sources["P1"].required
    # The same figures in other units are no change.
    assert changes_between(BASE, version(('title = "Ferry house"', 'title = "Ferry house"\nunits = "IP"'))).rows == ()


def test_a_finding_with_another_figure_or_on_another_line_is_not_new() -> None:
    short = version(('"25 kPa"', '"1 kPa"'))
    shorter = version(('"25 kPa"', '"0.5 kPa"'), ("# A pump", "#\n# A pump"))
    changes = changes_between(BASE, short)
    assert [one.code for one in changes.new] == ["nothing-in-hand"]
    assert changes_between(short, shorter).new == changes_between(short, shorter).gone == ()
    assert [one.code for one in changes_between(shorter, BASE).gone] == ["nothing-in-hand"]


def test_line_ends_of_a_checkout_are_no_change() -> None:
    checked_out = take(read_text(RUN.replace("\n", "\r\n")))
    assert not changes_between(BASE, checked_out, checked_out=True)
    assert not changes_between(checked_out, BASE, checked_out=True)
    assert [one.about for one in changes_between(BASE, checked_out).keys[0].changes] == ["line ends"]


LENGTHS = st.floats(0.5, 60.0).map(lambda value: f'"{value:.2f} m"')


@settings(max_examples=25, deadline=None)
@given(lengths=st.tuples(LENGTHS, LENGTHS), loads=st.tuples(*[st.sampled_from(["1.9 kW", "2.4 kW", "3.3 kW"])] * 2))
def test_the_way_back_has_the_same_figures_with_other_signs(lengths: tuple[str, str], loads: tuple[str, str]) -> None:
    one, other = (
        version(('"7.5 m"', length), ('"2.4 kW"', f'"{load}"')) for length, load in zip(lengths, loads, strict=True)
    )
    assert not changes_between(one, one)
    there, back = changes_between(one, other), changes_between(other, one)
    assert bool(there) == (one.text != other.text)
    assert [(row.kind, row.id) for row in there.rows] == [(row.kind, row.id) for row in back.rows]
    for mine, its in zip(there.rows, back.rows, strict=True):
        assert [(f.name, f.before, f.after) for f in mine.figures] == [(f.name, f.after, f.before) for f in its.figures]
        for figure, opposite in zip(mine.figures, its.figures, strict=True):
            assert figure.difference == "" == opposite.difference or (
                Decimal(figure.difference) == -Decimal(opposite.difference) != 0
            )
    assert (there.new, there.gone) == (back.gone, back.new)


# As text and as JSON


def test_lines_tell_keys_then_figures_then_findings() -> None:
    lines = changes_lines(changes_between(BASE, version(('"7.5 m"', '"9 m"'), ('"25 kPa"', '"1 kPa"'))))
    heads = [line for line in lines if line and not line.startswith(" ")]
    assert heads == ["Keys", "Sources", "Sections", "New findings"]
    assert "    length  7.5 m  ->  9 m" in lines
    assert any(line.split()[:2] == ["P1", "required"] and line.endswith("kPa") for line in lines)
    assert any(line.startswith("  warning nothing-in-hand: source.P1.available: the duty") for line in lines)
    back = changes_lines(changes_between(LONGER, BASE), first=("source",))
    assert [line for line in back if line and not line.startswith(" ")] == ["Sources", "Keys", "Sections"]
    assert changes_lines(changes_between(BASE, BASE)) == ()


@pytest.mark.parametrize("width", [20, 40, 80])
def test_no_line_is_wider_than_there_is_room(width: int) -> None:
    long = "terminal of a name that goes on and on until nobody reads it any more, and then some"
    after = version(('"7.5 m"', '"90 m"'), ('"R 2"', f'"{long}"'), ('"25 kPa"', '"1 kPa"'))
    lines = changes_lines(changes_between(BASE, after), width)
    assert max(map(len, lines)) <= width
    assert all(line == line.rstrip() for line in lines)


def test_json_has_figures_in_si_by_the_names_of_the_results() -> None:
    changes = changes_between(BASE, version(('"7.5 m"', '"9 m"'), ('"R 2"', '"R 3"')))
    found = json.loads(json.dumps(changes_object("1.0", "run.toml", {"revision": "HEAD"}, changes), allow_nan=False))
    required = found["sources"]["P1"]["figures"]["required"]
    assert required["after"] - required["before"] == pytest.approx(required["difference"])
    assert required["before"] == BASE.budget.sources["P1"].required
    assert found["sources"]["P1"]["figures"]["index"] == {"before": "R 2", "after": "R 3"}
    assert found["terminals"]["R 3"] == {"standing": "added", "figures": {}}
    assert found["terminals"]["R 2"]["standing"] == "removed"
    assert found["changed"] is True
    assert {"table": "section.M1", "kind": "changed", "lines": []}.items() <= found["keys"][0].items()
    assert found["keys"][0]["changes"] == [
        {"key": "section.M1.length", "about": "value", "before": '"7.5 m"', "after": '"9 m"'}
    ]
