"""What is stated of legs that meet: where it fits, where it does not, and where nothing need be said."""

from __future__ import annotations

import pytest

from tests.network.small import LIQUID, findings_of, places

TEE = (
    LIQUID
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 0 }
B1 = { from = "M1", bore = 40, length = 0, takeoff = "straight" }
B2 = { from = "M1", bore = 25, length = 0, takeoff = "branch" }
[terminal]
T1 = { from = "B1", flow = 0.8, drop = 5 }
T2 = { from = "B2", flow = 0.2, drop = 5 }
"""
)
UNSTATED = (
    TEE.replace('takeoff = "none"\n', "").replace(', takeoff = "straight"', "").replace(', takeoff = "branch"', "")
)


def said(text: str) -> list[tuple[str, str, str]]:
    """Level, code and place of everything that is said of junctions."""
    found = findings_of(text)
    return [(f.level.value, f.code, ".".join(map(str, f.path))) for f in found if f.code in ("takeoff", "junction")]


def errors(*places_: str) -> list[tuple[str, str, str]]:
    return [("error", "takeoff", place) for place in places_]


def warnings(*places_: str) -> list[tuple[str, str, str]]:
    return [("warning", "junction", place) for place in places_]


def messages(text: str) -> set[str]:
    return {finding.message for finding in findings_of(text) if finding.code == "takeoff"}


def stated(first: str | None, second: str | None, default: str | None = None) -> str:
    """The tee with so stated takeoffs of B1 and B2."""
    text = UNSTATED
    for id_, takeoff in (("B1", first), ("B2", second)):
        if takeoff is not None:
            text = text.replace(f"{id_} = {{", f'{id_} = {{ takeoff = "{takeoff}",')
    return text.replace("[defaults]", f'[defaults]\ntakeoff = "{default}"') if default else text


B1, B2 = "section.B1.takeoff", "section.B2.takeoff"


@pytest.mark.parametrize(
    ("first", "second", "default", "found"),
    [
        ("straight", "branch", None, []),
        ("branch", "straight", None, []),
        ("none", "none", None, []),
        ("none", "branch", None, []),
        ("straight", "none", None, []),
        (None, None, None, warnings(B1, B2)),
        (None, "branch", None, warnings(B1)),
        ("straight", None, None, warnings(B2)),
        ("branch", "branch", None, errors(B1, B2)),
        ("straight", "straight", None, errors(B1, B2)),
        (None, None, "none", []),
        (None, "branch", "none", []),
        # A trunk by default: the branches say so.
        (None, "branch", "straight", []),
        ("straight", None, "branch", []),
        ("none", None, "straight", []),
        # By default both go straight on, which is no junction: nobody has said which is the branch.
        (None, None, "straight", warnings(B1, B2)),
        (None, None, "branch", warnings(B1, B2)),
        ("straight", None, "straight", [*errors(B1), *warnings(B2)]),
    ],
)
def test_of_two_legs_one_is_the_branch_and_one_goes_straight_on(
    first: str | None, second: str | None, default: str | None, found: list[tuple[str, str, str]]
) -> None:
    assert said(stated(first, second, default)) == found


def test_a_symmetrical_split_is_stated_by_its_coefficient() -> None:
    (text,) = messages(stated("branch", "branch"))
    assert text.endswith('of a symmetrical split state "none", and k')
    split = stated("none", "none").replace("bore = 25", "bore = 40, item = [{ k = 0.8 }]")
    assert said(split) == []


def test_a_trunk_by_default_is_quiet_wherever_nothing_meets() -> None:
    text = stated(None, "branch", "straight").replace(
        "[terminal]",
        'C1 = { from = "B1", bore = 40, length = 0 }\n'
        'C2 = { from = "C1", bore = 40, length = 0 }\n[terminal]\n'
        'T3 = { from = "C2", flow = 0.1, drop = 5, bore = 40, length = 1 }',
    )
    assert said(text.replace('T1 = { from = "B1", flow = 0.8, drop = 5 }\n', "")) == []


def test_three_legs_make_no_junction() -> None:
    third = '\nB3 = { from = "M1", bore = 25, length = 0 }\n[terminal]\nT3 = { from = "B3", flow = 0.2, drop = 5 }'
    three = stated("straight", "branch").replace("\n[terminal]", third)
    assert said(three) == [*errors(B1, B2), *warnings("section.B3.takeoff")]
    assert messages(three) == {
        f'takeoff {takeoff!r} does not fit: 3 legs meet, a junction has two; state "none", and k as an item'
        for takeoff in ("straight", "branch")
    }
    by_default = stated(None, None, "straight").replace("\n[terminal]", third)
    assert said(by_default) == warnings(B1, B2, "section.B3.takeoff")
    assert said(stated("none", "none", "none").replace("\n[terminal]", third)) == []


def test_at_a_source_there_is_no_junction() -> None:
    text = TEE.replace('from = "M1"', 'from = "P1"')
    assert said(text) == errors(B1, B2)
    assert messages(text) == {
        f'takeoff {takeoff!r} does not fit: at a source only "none" fits; state "none", and k for a header'
        for takeoff in ("straight", "branch")
    }
    assert said(UNSTATED.replace('from = "M1"', 'from = "P1"')) == []
    assert said(stated(None, None, "straight").replace('from = "M1"', 'from = "P1"')) == []


def test_a_terminal_without_a_size_can_t_be_a_part_of_a_junction() -> None:
    text = stated("straight", None).replace('T2 = { from = "B2"', 'T2 = { from = "M1"')
    text = text.replace('B2 = { from = "M1", bore = 25, length = 0 }\n', "")
    assert said(text) == [*errors(B1), *warnings("terminal.T2.takeoff")]
    assert messages(text) == {
        "takeoff 'straight' does not fit: 'T2' meets it without a size, which a junction needs; give it one"
    }
    sized = text.replace('T2 = { from = "M1"', 'T2 = { from = "M1", bore = 25, length = 1, takeoff = "branch"')
    assert said(sized) == []
    own = text.replace('T2 = { from = "M1"', 'T2 = { from = "M1", takeoff = "branch"')
    assert said(own) == errors(B1, "terminal.T2.takeoff")


def test_a_takeoff_where_nothing_else_meets_is_an_error() -> None:
    text = TEE.replace('T2 = { from = "B2"', 'T2 = { from = "B2", bore = 25, length = 1, takeoff = "branch"')
    assert said(text) == errors("terminal.T2.takeoff")
    assert messages(text) == {"takeoff 'branch' does not fit: no other leg meets it there; remove it"}
    assert said(text.replace('length = 1, takeoff = "branch"', 'length = 1, takeoff = "none"')) == []


RETURNS = (
    LIQUID.replace('paired = true\ntakeoff = "none"\n', "")
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 0, paired = true }
B1 = { from = "M1", bore = 40, length = 0, paired = true, takeoff = "straight" }
B2 = { from = "M1", bore = 25, length = 0, takeoff = "branch" }
R2 = { to = "P1", bore = 25, length = 0 }
[terminal]
T1 = { from = "B1", flow = 0.8, drop = 5 }
T2 = { from = "B2", to = "R2", flow = 0.2, drop = 5 }
"""
)


def test_a_takeoff_may_fit_on_one_leg_and_have_nothing_to_say_on_the_other() -> None:
    # The return leg of B1 is alone: what B2 serves returns by another way.
    assert said(RETURNS) == []
    joined = RETURNS.replace('R2 = { to = "P1"', 'R2 = { to = "M1"')
    assert said(joined) == warnings("section.R2.takeoff")
    assert said(joined.replace('R2 = { to = "M1"', 'R2 = { to = "M1", takeoff = "branch"')) == []
    # Where the legs differ in what they are, sections say so one by one.
    assert said(joined.replace('R2 = { to = "M1"', 'R2 = { to = "M1", takeoff = "straight"')) == errors(
        B1, "section.R2.takeoff"
    )


def test_a_return_leg_that_carries_nothing_meets_nothing() -> None:
    text = RETURNS.replace('B2 = { from = "M1"', 'B2 = { from = "M1", paired = true')
    assert said(text) == []


def test_a_tee_among_the_fittings_states_the_junction() -> None:
    tees = {"B1": '{ "tee straight" = 1 }', "B2": '{ "tee branch" = 1 }'}
    text = UNSTATED
    for id_, fittings in tees.items():
        text = text.replace(f"{id_} = {{", f"{id_} = {{ fittings = {fittings},")
    assert said(text) == []
    listed = UNSTATED.replace("B2 = {", 'B2 = { fitting = [{ kind = "tee stub-in branch" }],')
    assert said(listed) == warnings(B1)


@pytest.mark.parametrize(
    ("fittings", "place"),
    [
        ('fittings = { "tee branch" = 1 }', 'section.B2.fittings."tee branch"'),
        ('fittings = { "tee stub-in branch" = 1 }', 'section.B2.fittings."tee stub-in branch"'),
        ('fitting = [{ kind = "tee branch" }]', "section.B2.fitting.0.kind"),
        (
            'fitting = [{ kind = "bend", radius_ratio = 3 }, { kind = "tee stub-in branch" }]',
            "section.B2.fitting.1.kind",
        ),
    ],
)
def test_a_junction_is_not_counted_twice(fittings: str, place: str) -> None:
    for text in (TEE, TEE.replace(', takeoff = "branch"', "").replace('takeoff = "none"', 'takeoff = "branch"')):
        found = findings_of(text.replace("B2 = {", f"B2 = {{ {fittings},"))
        assert places(found) == [("contradiction", place)]
    assert places(findings_of(UNSTATED.replace("B2 = {", f"B2 = {{ {fittings},"))) == []


def test_both_legs_of_a_junction_state_one_family_and_one_angle() -> None:
    alike = TEE.replace("takeoff = ", 'junction = "tee-idelchik", angle = 45, takeoff = ')
    alike = alike.replace('junction = "tee-idelchik", angle = 45, takeoff = "none"', 'takeoff = "none"')
    assert said(alike) == []
    for old, new, key in (("angle = 45", "angle = 60", "angle"), ("tee-idelchik", "tee-crane", "junction")):
        head, tail = alike.split("B2 = {")
        assert said(f"{head}B2 = {{{tail.replace(old, new)}") == errors(f"section.B2.{key}")


def test_a_finding_is_said_once_of_both_legs_of_a_paired_section() -> None:
    for text in (UNSTATED, stated("branch", "branch")):
        found = said(text)
        assert len(found) == len(set(found)) == 2
    wide = findings_of(TEE.replace("bore = 25", "bore = 65"))
    assert [finding.code for finding in wide].count("junction-range") == 1
