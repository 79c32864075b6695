"""Fittings of a section with their coefficients: by name, of one's own, and of a kind with parameters."""

from __future__ import annotations

import math

import pytest

from budget.network import LossResult
from budget.physics.elbows import reynolds_factor
from tests.network.small import GAS, LIQUID, budget_of, errors_of, evaluated_of, findings_of, places

PIPE = (
    LIQUID.replace("paired = true\n", "")
    + """
[fitting."swing joint"]
k = 0.75
source = "maker's sheet"
[source]
P1 = { open = true }
[section]
M1 = { from = "P1", bore = 50, length = 0, FITTINGS }
[terminal]
T1 = { from = "M1", flow = 1, drop = 5 }
"""
)
DUCT = (
    GAS
    + """
[source]
F1 = {}
[section]
D1 = { from = "F1", size = "SIZE", length = 0, FITTINGS }
[terminal]
S1 = { from = "D1", flow = 400, drop = 10 }
"""
)
PRESSURE = 500.0 * (0.001 / (math.pi / 4 * 0.05**2)) ** 2


def pipe(fittings: str) -> str:
    return PIPE.replace("FITTINGS", fittings)


def duct(fittings: str, size: str = "400x200") -> str:
    return DUCT.replace("FITTINGS", fittings).replace("SIZE", size)


def losses_of(text: str) -> tuple[LossResult, ...]:
    (section,) = budget_of(text).sections.values()
    (leg,) = section.run.legs
    assert section.run.fittings == pytest.approx(math.fsum(loss.drop for loss in leg.losses))
    assert section.run.k_total == pytest.approx(math.fsum(loss.count * loss.k for loss in leg.losses))
    return leg.losses


def k_of(text: str) -> float:
    (loss,) = losses_of(text)
    return loss.k


def test_a_fitting_of_a_kind_has_the_coefficient_of_its_parameters() -> None:
    (loss,) = losses_of(pipe('fitting = [{ kind = "bend", radius_ratio = 4, count = 2 }]'))
    f_t = 0.25 / math.log10(3.7 * 0.05 / 4.5e-5) ** 2
    # Crane: 14 fT for r/d 4, with fT of fully turbulent flow in clean steel pipe.
    assert loss.k == pytest.approx(14 * f_t, rel=0.02)
    assert (loss.name, loss.count, loss.method) == ("bend", 2, "by kind")
    assert loss.drop == pytest.approx(2 * loss.k * PRESSURE)
    assert loss.reference == "velocity in the section"
    assert loss.source
    assert loss.known_from


@pytest.mark.parametrize(
    ("fitting", "like"),
    [
        ('kind = "bend", radius_ratio = 4, angle = "90 deg"', 'kind = "bend", radius_ratio = 4'),
        ('kind = "bend", radius_ratio = 4, angle = 180', 'kind = "bend", radius_ratio = 4, angle = "180 deg"'),
        ('kind = "Bend", radius_ratio = 4', 'kind = "bend", radius_ratio = 4.0'),
        (
            'kind = "tilting disc check valve", disc_angle = "5 deg"',
            'kind = "tilting disc check valve", disc_angle = 5',
        ),
        ('kind = "swing check valve clearway", count = 1', 'kind = "swing check valve clearway"'),
    ],
)
def test_a_parameter_is_a_quantity_or_a_plain_number(fitting: str, like: str) -> None:
    assert k_of(pipe(f"fitting = [{{ {fitting} }}]")) == pytest.approx(k_of(pipe(f"fitting = [{{ {like} }}]")))


def test_a_rated_drop_is_read_in_any_unit_of_pressure_and_scales_with_the_velocity() -> None:
    rated = 'kind = "filter rated", rated_drop = {drop}, rated_velocity = {velocity}'
    plain = duct("fitting = [{ " + rated.format(drop="60", velocity="2.5") + " }]")
    units = duct("fitting = [{ " + rated.format(drop='"0.6 mbar"', velocity='"492.126 fpm"') + " }]")
    assert k_of(plain) == pytest.approx(60.0 / (0.6 * 2.5**2))
    assert k_of(units) == pytest.approx(k_of(plain), rel=1e-5)
    # 0.4 m3/s through 400x200 is 5 m/s: twice the rated velocity, four times the drop.
    assert losses_of(plain)[0].drop == pytest.approx(240.0)


@pytest.mark.parametrize(
    ("fitting", "code", "key"),
    [
        ('kind = "bend"', "missing", ""),
        ("count = 2", "missing", ""),
        ('kind = "bent", radius_ratio = 4', "unknown-fitting", ".kind"),
        ('kind = "bend", radius_ratio = 4, radius = 2', "unknown-key", ".radius"),
        ('kind = "bend", radius_ratio = "4 m"', "type", ".radius_ratio"),
        ('kind = "bend", radius_ratio = nan', "not-finite", ".radius_ratio"),
        ('kind = "bend", radius_ratio = 4, angle = "1 m"', "wrong-dimension", ".angle"),
        ('kind = "bend", radius_ratio = 4, count = 1.5', "type", ".count"),
        ('kind = "mitre bend welded", welds = 6', "choice", ".welds"),
        ('kind = "mitre bend welded", welds = "two"', "type", ".welds"),
        ('kind = "stop check valve", pattern = "gate"', "choice", ".pattern"),
        ('kind = "elbow gored"', "unknown-fitting", ".kind"),
        ('kind = "swing joint", k = 3', "unknown-key", ".k"),
        ('kind = "elbow 90", angle = 45', "unknown-key", ".angle"),
    ],
)
def test_what_is_wrong_with_a_fitting_is_found_and_takes_its_loss(fitting: str, code: str, key: str) -> None:
    text = pipe(f"fitting = [{{ {fitting} }}]")
    assert errors_of(text) == [(code, f"section.M1.fitting.0{key}")]
    run = evaluated_of(text).sections["M1"].run
    assert math.isnan(run.fittings)
    assert math.isnan(run.k_total)
    assert not math.isnan(run.friction)


def test_a_fitting_that_can_t_be_read_leaves_the_others_beside_it() -> None:
    text = pipe('fittings = { "elbow 90" = 1 }, fitting = [{ kind = "bend" }, { kind = "bend", radius_ratio = 4 }]')
    (leg,) = evaluated_of(text).sections["M1"].run.legs
    assert [loss.name for loss in leg.losses] == ["elbow 90", "bend"]
    assert all(loss.k > 0.0 for loss in leg.losses)
    assert math.isnan(evaluated_of(text).sections["M1"].run.drop)


@pytest.mark.parametrize(
    ("text", "kind", "carrier"),
    [
        (pipe('fitting = [{ kind = "damper round blade" }]'), "damper round blade", "a duct, this is a pipe"),
        (duct('fitting = [{ kind = "bend", radius_ratio = 4 }]'), "bend", "a pipe, this is a duct"),
        (duct('fittings = { "return bend long" = 1 }'), "return bend long", "a pipe, this is a duct"),
    ],
)
def test_a_kind_fits_a_pipe_or_a_duct(text: str, kind: str, carrier: str) -> None:
    (found,) = (finding for finding in findings_of(text) if finding.level == "error")
    assert found.code == "unknown-fitting"
    assert found.message.startswith(f"{kind!r} is a fitting of {carrier}; ")


def test_a_kind_fits_some_shapes_only() -> None:
    for size, found in (("200 mm", []), ("400x200", [("unknown-fitting", "section.D1.fitting.0.kind")])):
        text = duct('fitting = [{ kind = "elbow gored", radius_ratio = 1.5 }]', size)
        assert errors_of(text) == found
        assert math.isnan(evaluated_of(text).sections["D1"].run.fittings) is bool(found)
    (finding,) = (f for f in findings_of(duct('fitting = [{ kind = "elbow gored" }]')) if f.level == "error")
    assert finding.message == "'elbow gored' has no figures for a rectangular section, only round"


def test_the_plane_of_a_bend_decides_in_a_duct_that_is_not_square() -> None:
    elbow = 'kind = "elbow smooth rectangular", radius_ratio = 1, plane = "{}"'
    hard = duct("fitting = [{ " + elbow.format("height") + " }]", "400x100")
    easy = duct("fitting = [{ " + elbow.format("width") + " }]", "400x100")
    assert k_of(hard) != pytest.approx(k_of(easy), rel=0.01)
    # Turned by a quarter it is the same duct.
    assert k_of(duct("fitting = [{ " + elbow.format("width") + " }]", "100x400")) == pytest.approx(k_of(hard))


def test_outside_what_was_published_the_nearest_figure_is_used_and_doubted() -> None:
    text = pipe('fitting = [{ kind = "bend", radius_ratio = 30 }]')
    assert places(findings_of(text), "warning") == [("fitting-range", "section.M1.fitting.0.kind")]
    (finding,) = (f for f in findings_of(text) if f.code == "fitting-range")
    assert finding.message == (
        "'bend' is outside what was published: radius_ratio 30 lay outside 1 to 20; the nearest figure is used"
    )
    assert k_of(text) == pytest.approx(k_of(text.replace("= 30", "= 20")))
    assert places(findings_of(text.replace("= 30", "= 20")), "warning") == []


def test_a_mitred_elbow_loses_more_at_a_low_reynolds_number() -> None:
    text = duct('fitting = [{ kind = "elbow mitred" }]', "400x400")
    ks = {}
    for flow in (60, 4000):
        (section,) = budget_of(text.replace("flow = 400", f"flow = {flow}")).sections.values()
        (leg,) = section.run.legs
        ks[flow] = leg.losses[0].k / float(reynolds_factor(leg.reynolds))
        assert section.run.fittings == pytest.approx(leg.losses[0].k * leg.velocity_pressure)
        assert (leg.losses[0].k > 1.2 * ks[flow]) is (flow == 60)
    assert ks[60] == pytest.approx(ks[4000])
    # SMACNA A-7 D: 1.2 at 90 degrees in a square duct.
    assert ks[60] == pytest.approx(1.2, rel=0.01)


def test_a_kind_that_needs_nothing_may_be_counted_by_name() -> None:
    (counted,) = losses_of(pipe('fittings = { "return bend long" = 3 }'))
    (listed,) = losses_of(pipe('fitting = [{ kind = "return bend long", count = 3 }]'))
    assert counted == listed
    assert counted.count == 3
    assert errors_of(pipe("fittings = { bend = 2 }")) == [("missing", "section.M1.fittings.bend")]


def test_own_and_catalogue_fittings_may_stand_in_either_place() -> None:
    (own,) = losses_of(pipe('fitting = [{ kind = "swing joint", count = 2 }]'))
    assert (own.k, own.count, own.method, own.source) == (0.75, 2, "own", "maker's sheet")
    assert losses_of(pipe('fittings = { "swing joint" = 2 }')) == (own,)
    assert losses_of(pipe('fitting = [{ kind = "elbow 90" }]')) == losses_of(pipe('fittings = { "elbow 90" = 1 }'))


def test_a_fitting_of_one_s_own_may_have_the_name_of_a_kind_that_needs_more_than_a_name() -> None:
    text = pipe('fitting = [{ kind = "bend" }], fittings = { bend = 1 }').replace('"swing joint"', "bend")
    assert [loss.k for loss in losses_of(text)] == [0.75, 0.75]
    other = pipe("fittings = {}").replace('"swing joint"', '"return bend long"')
    assert errors_of(other) == [("contradiction", 'fitting."return bend long"')]


def test_a_paired_section_has_its_kinds_on_both_legs() -> None:
    text = pipe('fitting = [{ kind = "bend", radius_ratio = 4 }], paired = true').replace("open = true", "")
    run = budget_of(text).sections["M1"].run
    assert len(run.legs) == 2
    assert run.fittings == pytest.approx(2 * run.k_total * PRESSURE)
    assert run.legs[0].losses == run.legs[1].losses


def test_a_run_out_has_kinds_too() -> None:
    bend = 'fitting = [{ kind = "bend", radius_ratio = 4 }]'
    text = pipe("fittings = {}").replace("flow = 1", f"flow = 1, bore = 50, length = 0, {bend}")
    run_out = budget_of(text).terminals["T1"].run_out
    assert run_out is not None
    assert run_out.k_total == pytest.approx(k_of(pipe(bend)))
