"""Fittings and junctions as they are read: counted by name, of a kind with its parameters, and what a leg is."""

from __future__ import annotations

import json
from collections.abc import Mapping

import pytest

from budget.catalogue import Kind, kind, kind_names
from budget.description import Description, FittingCount, FittingUse, Run, describe, dotted, read_text

KINDS = [one for one in map(kind, kind_names()) if one is not None]
SIZES = {"round": "300 mm", "rectangular": "400x200", "oval": "oval 800x250"}


def described(kind_: Kind, fitting: str) -> Description:
    """A section that carries a fitting, of what its kind is for."""
    if kind_.carries == "duct":
        fluid, line, size = 'name = "air"\ntemperature = 20', "duct", SIZES[kind_.shapes[0]]
    else:
        fluid, line, size = 'name = "water"\ntemperature = 20', "pipe", "DN50"
    catalogue = "galvanised steel" if line == "duct" else "steel EN 10255 medium"
    return describe(
        read_text(
            f"format = 1\n[fluid]\n{fluid}\n[{line}.line]\ncatalogue = {json.dumps(catalogue)}\n[source.P1]\n"
            f'[section.M1]\nfrom = "P1"\n{line} = "line"\nsize = "{size}"\nlength = 1\n{fitting}\n'
            '[terminal.T1]\nfrom = "M1"\nflow = 1\ndrop = 1\n'
        )
    )


def written(values: Mapping[str, object]) -> str:
    return ", ".join(f"{key} = {json.dumps(value)}" for key, value in values.items())


def found(description: Description) -> list[tuple[str, str, str]]:
    return [(finding.code, dotted(finding.path), finding.message) for finding in description.findings]


def run_of(description: Description) -> Run:
    return description.sections["M1"].run


@pytest.mark.parametrize("kind_", KINDS, ids=lambda kind_: kind_.name)
def test_every_kind_of_the_catalogue_is_read_with_its_parameters(kind_: Kind) -> None:
    check = kind_.checks[0]
    entry = written({"kind": kind_.name, **check.values})
    description = described(kind_, f"fitting = [{{ {entry} }}]")
    assert found(description) == []
    (use,) = run_of(description).uses
    assert use == FittingUse(kind_.name, 1, dict(check.values), ("section", "M1", "fitting", 0, "kind"))


@pytest.mark.parametrize("kind_", KINDS, ids=lambda kind_: kind_.name)
def test_what_a_kind_needs_must_be_stated_and_what_it_does_not_know_must_not(kind_: Kind) -> None:
    needed = [parameter for parameter in kind_.parameters if parameter.default is None]
    by_name = described(kind_, f'fittings = {{ "{kind_.name}" = 2 }}')
    alone = described(kind_, f'[[section.M1.fitting]]\nkind = "{kind_.name}"')
    for description, place in ((by_name, f"section.M1.fittings.{_key(kind_.name)}"), (alone, "section.M1.fitting.0")):
        expected = [
            f"the fitting {kind_.name!r} needs {one.name}: {one.meaning}; state it in [[..fitting]]" for one in needed
        ]
        assert found(description) == [("missing", place, text) for text in expected]
        assert [use.count for use in run_of(description).uses] == ([] if needed else [2 if "fittings" in place else 1])
    stated = {"kind": kind_.name, **kind_.checks[0].values, "colour": 3}
    odd = described(kind_, f"fitting = [{{ {written(stated)} }}]")
    assert [(code, place) for code, place, _ in found(odd)] == [("unknown-key", "section.M1.fitting.0.colour")]
    assert run_of(odd).uses == ()


def _key(name: str) -> str:
    return json.dumps(name) if " " in name else name


@pytest.mark.parametrize("kind_", KINDS, ids=lambda kind_: kind_.name)
def test_a_parameter_with_choices_takes_only_those(kind_: Kind) -> None:
    for parameter in kind_.parameters:
        if not parameter.choices:
            continue
        words = isinstance(parameter.choices[0], str)
        values = {"kind": kind_.name, **kind_.checks[0].values, parameter.name: "odd" if words else 977}
        description = described(kind_, f"fitting = [{{ {written(values)} }}]")
        ((code, place, text),) = found(description)
        assert (code, place) == ("choice", f"section.M1.fitting.0.{parameter.name}")
        assert str(parameter.choices[0]) in text
        assert run_of(description).uses == ()


BEND = next(kind_ for kind_ in KINDS if kind_.name == "bend")


@pytest.mark.parametrize(("angle", "read"), [("60", 60.0), ('"60 deg"', 60.0), ('"60"', 60.0), ("60.5", 60.5)])
def test_an_angle_may_have_its_unit(angle: str, read: float) -> None:
    description = described(BEND, f'fitting = [{{ kind = "bend", radius_ratio = 2, angle = {angle} }}]')
    assert found(description) == []
    assert run_of(description).uses[0].values == {"radius_ratio": 2.0, "angle": pytest.approx(read)}


def test_what_lies_beyond_the_published_range_is_read_as_it_stands() -> None:
    description = described(BEND, 'fitting = [{ kind = "bend", radius_ratio = 99 }]')
    assert found(description) == []
    assert run_of(description).uses[0].values == {"radius_ratio": 99.0}


def test_names_and_kinds_are_kept_apart_in_the_order_of_the_file() -> None:
    description = described(
        BEND,
        'fittings = { "gate valve" = 1, "return bend long" = 2 }\n'
        '[[section.M1.fitting]]\nkind = "bend"\nradius_ratio = 2\n[[section.M1.fitting]]\nkind = "elbow 90"\ncount = 3',
    )
    assert found(description) == []
    path = ("section", "M1")
    assert run_of(description).fittings == (
        FittingCount("gate valve", 1, (*path, "fittings", "gate valve")),
        FittingCount("elbow 90", 3, (*path, "fitting", 1, "kind")),
    )
    assert [(use.kind, use.count) for use in run_of(description).uses] == [("return bend long", 2), ("bend", 1)]


def test_a_fitting_of_another_carrier_is_offered_those_of_its_own() -> None:
    description = described(BEND, 'fitting = [{ kind = "elbow mitred" }]')
    ((code, place, text),) = found(description)
    assert (code, place) == ("unknown-fitting", "section.M1.fitting.0.kind")
    assert text.startswith("'elbow mitred' is a fitting of a duct, this is a pipe; ")


def test_a_misspelled_kind_is_told_the_nearest_of_all_names() -> None:
    description = described(BEND, 'fitting = [{ kind = "mitre bent", angle = 45 }]')
    ((code, _, text),) = found(description)
    assert code == "unknown-fitting"
    assert "'mitre bend'" in text


def test_family_and_angle_come_from_the_defaults_and_are_known_for_that() -> None:
    text = 'format = 1\n[defaults]\nangle = 45\njunction = "tee-idelchik"\n[section.M1]\nfrom = "P1"\n{}\n[source.P1]\n'
    run = describe(read_text(text.replace("{}", ""))).sections["M1"].run
    assert (run.junction, run.angle, run.own_junction) == ("tee-idelchik", 45.0, frozenset())
    run = describe(read_text(text.replace("{}", 'angle = "60 deg"'))).sections["M1"].run
    assert (run.junction, run.angle, run.own_junction) == ("tee-idelchik", 60.0, frozenset({"angle"}))
    run = describe(read_text("format = 1\n[section.M1]\n")).sections["M1"].run
    assert (run.junction, run.angle, run.transition) == ("tee-crane", 90.0, None)


@pytest.mark.parametrize(
    ("transition", "read"), [('"abrupt"', "abrupt"), ("30", 30.0), ('"30 deg"', 30.0), ('"270 deg"', None)]
)
def test_a_transition_is_abrupt_or_an_angle(transition: str, read: float | str | None) -> None:
    description = describe(read_text(f"format = 1\n[section.M1]\ntransition = {transition}\n"))
    assert description.sections["M1"].run.transition == read
    wrong = [finding.code for finding in description.findings if finding.path[-1] == "transition"]
    assert wrong == ([] if read is not None else ["range"])
