"""The fluid on each leg of each source, and what is doubtful about it."""

from __future__ import annotations

import math

import pytest

from budget.network.media import Media, leg_temperatures, media_of, medium_at
from budget.physics import fluids
from tests.network.small import LIQUID, budget_of, description_of, errors_of, evaluated_of, findings_of, places

REST = """
[defaults]
pipe = "steel"
paired = true
[pipe.steel]
roughness = 0.05
[source]
P1 = { SOURCE }
[terminal]
T1 = { from = "P1", FLOW, drop = 1 }
"""


def run(fluid: str, source: str = "", flow: str = "flow = 0.1") -> str:
    body = REST.replace("SOURCE", source).replace("FLOW", flow)
    return f'format = 1\n[design]\ntitle = "Small run"\n[fluid]\n{fluid}\n{body}'


def media(fluid: str, source: str = "") -> Media:
    return media_of(description_of(run(fluid, source)))[0][0]


def doubts(fluid: str, source: str = "") -> list[tuple[str, str]]:
    found = list(findings_of(run(fluid, source)))
    return [*places(found, "error"), *places(found, "warning")]


WATER = 'name = "water"\ntemperature = "70 degC"\nreturn_temperature = "50 degC"'


def test_water_has_the_properties_of_each_leg_s_temperature() -> None:
    found = media(WATER)
    # IAPWS-IF97 at 1 bar (steam tables): 977.76 and 988.03 kg/m3, 0.4039 and 0.5468 mPa s, 4.190 and 4.181 kJ/(kg K).
    assert found.supply.density == pytest.approx(977.76, rel=5e-4)
    assert found.back.density == pytest.approx(988.03, rel=5e-4)
    assert found.supply.viscosity == pytest.approx(0.4039e-3, rel=3e-3)
    assert found.back.viscosity == pytest.approx(0.5468e-3, rel=3e-3)
    assert found.supply.specific_heat == pytest.approx(4190.0, rel=1e-3)
    assert found.back.specific_heat == pytest.approx(4181.0, rel=1e-3)


def test_the_return_leg_is_as_warm_as_the_supply_where_nothing_else_is_said() -> None:
    found = media('name = "water"\ntemperature = "70 degC"')
    assert found.back == found.supply


def test_a_source_overrides_the_temperatures_of_the_fluid() -> None:
    found = description_of(run(WATER, 'temperature = "60 degC", return_temperature = "40 degC"'))
    assert leg_temperatures(found.fluid, found.sources["P1"]) == pytest.approx((333.15, 313.15))
    half = description_of(run(WATER, 'temperature = "60 degC"'))
    assert leg_temperatures(half.fluid, half.sources["P1"]) == pytest.approx((333.15, 323.15))
    other = description_of(run(WATER, 'return_temperature = "40 degC"'))
    assert leg_temperatures(other.fluid, other.sources["P1"]) == pytest.approx((343.15, 313.15))


def test_a_source_may_state_the_only_return_temperature() -> None:
    found = description_of(run('name = "water"\ntemperature = "70 degC"', 'return_temperature = "40 degC"'))
    assert leg_temperatures(found.fluid, found.sources["P1"]) == pytest.approx((343.15, 313.15))


def test_a_glycol_is_mixed_by_mass_or_by_volume() -> None:
    text = 'name = "propylene glycol"\ntemperature = 20\nconcentration = "30 %"\nconcentration_by = "{}"'
    by_mass, by_volume = media(text.format("mass")).supply, media(text.format("volume")).supply
    # MEGlobal and ASHRAE tables at 20 degC: 1024 kg/m3 for 30 % by mass; for 30 % by volume 1027 kg/m3.
    assert by_mass.density == pytest.approx(1024.0, rel=3e-3)
    assert by_volume.density == pytest.approx(1027.0, rel=3e-3)
    assert by_mass.viscosity != by_volume.viscosity


def test_a_glycol_without_its_concentration_has_no_properties() -> None:
    text = run('name = "propylene glycol"\ntemperature = 20\nconcentration = "30 %"')
    assert math.isnan(media_of(description_of(text))[0][0].supply.density)
    assert errors_of(text) == [("missing", "fluid.concentration_by")]
    assert math.isnan(evaluated_of(text).terminals["T1"].mass_flow)


def test_air_is_thinner_on_a_mountain() -> None:
    found = media('name = "air"\ntemperature = 20\naltitude = "1500 m"\nhumidity = "0 %"').supply
    # ISO 2533: 84 556 Pa at 1500 m; 84 556/(287.05 x 293.15) = 1.0048 kg/m3 of dry air.
    assert found.density == pytest.approx(1.0048, rel=1e-3)


def test_humid_air_is_lighter_than_dry_air() -> None:
    dry, humid = (media(f'name = "air"\ntemperature = 30\nhumidity = "{part} %"').supply for part in (0, 100))
    # Vapour at 4246 Pa (30 degC): 0.378 x 4246/(287.05 x 303.15) = 0.01844 kg/m3 less.
    assert dry.density - humid.density == pytest.approx(0.01844, rel=5e-3)


def test_a_custom_fluid_is_as_stated_on_both_legs() -> None:
    found = media("name = 'custom'\ndensity = 900\nviscosity = '2 cP'\nspecific_heat = 3.5\ntemperature = 70")
    assert (found.supply.density, found.supply.viscosity, found.supply.specific_heat) == pytest.approx(
        (900.0, 0.002, 3500.0)
    )
    assert found.back == found.supply


def test_a_kinematic_viscosity_is_multiplied_by_the_density() -> None:
    found = media("name = 'custom'\ndensity = 900\nviscosity = '1 mm2/s'")
    assert found.supply.viscosity == pytest.approx(900e-6)  # 900 kg/m3 x 1e-6 m2/s


def test_a_load_gives_the_mass_flow() -> None:
    text = LIQUID + '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", load = 3.2, drop = 1 }\n'
    # 3200 W / (4000 J/(kg K) x 20 K) = 0.04 kg/s
    assert budget_of(text).terminals["T1"].mass_flow == pytest.approx(0.04)


def test_a_load_takes_the_mean_specific_heat_of_both_legs() -> None:
    terminal = budget_of(run(WATER, flow='load = "10 kW"')).terminals["T1"]
    heat = (float(fluids.water(343.15).specific_heat) + float(fluids.water(323.15).specific_heat)) / 2
    assert terminal.mass_flow == pytest.approx(10_000.0 / (heat * 20.0), rel=1e-12)
    assert terminal.flow == pytest.approx(terminal.mass_flow / float(fluids.water(343.15).density), rel=1e-12)


def test_a_terminal_may_state_its_own_return_temperature() -> None:
    text = LIQUID + (
        '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", load = 3.2, return_temperature = "60 degC", drop = 1 }\n'
    )
    # 3200 W / (4000 J/(kg K) x 10 K) = 0.08 kg/s
    assert budget_of(text).terminals["T1"].mass_flow == pytest.approx(0.08)


def test_a_cooling_load_counts_the_difference_the_other_way_round() -> None:
    text = LIQUID.replace("temperature = 70\nreturn_temperature = 50", "temperature = 6\nreturn_temperature = 12") + (
        '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", load = 2.4, drop = 1 }\n'
    )
    assert budget_of(text).terminals["T1"].mass_flow == pytest.approx(0.1)  # 2400/(4000 x 6)


def test_a_load_needs_a_temperature_difference() -> None:
    text = run('name = "water"\ntemperature = "70 degC"', flow='load = "3 kW"')
    assert errors_of(text) == [("no-difference", "terminal.T1.load")]
    assert math.isnan(evaluated_of(text).terminals["T1"].mass_flow)


def test_a_load_needs_a_specific_heat() -> None:
    text = LIQUID.replace("specific_heat = 4\n", "") + (
        '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", load = 3.2, drop = 1 }\n'
    )
    assert errors_of(text) == [("fluid", "terminal.T1.load")]


@pytest.mark.parametrize(
    ("fluid", "place"),
    [
        ('name = "water"\ntemperature = "150.1 degC"', "fluid.temperature"),
        ('name = "water"\ntemperature = "90 degC"\nreturn_temperature = "151 degC"', "fluid.return_temperature"),
        ('name = "air"\ntemperature = "60.1 degC"', "fluid.temperature"),
        ('name = "air"\ntemperature = "-20.1 degC"', "fluid.temperature"),
        (
            'name = "ethylene glycol"\ntemperature = "20 degC"\nconcentration = "61 %"\nconcentration_by = "mass"',
            "fluid.temperature",
        ),
        (
            'name = "ethylene glycol"\ntemperature = "20 degC"\nconcentration = "9 %"\nconcentration_by = "volume"',
            "fluid.temperature",
        ),
    ],
)
def test_properties_outside_their_range_are_a_warning(fluid: str, place: str) -> None:
    assert ("fluid-range", place) in doubts(fluid)


@pytest.mark.parametrize(
    "fluid",
    [
        'name = "water"\ntemperature = "150 degC"',
        'name = "air"\ntemperature = "60 degC"',
        'name = "air"\ntemperature = "-20 degC"',
        'name = "air"\ntemperature = "-4 degF"',
        'name = "ethylene glycol"\ntemperature = "20 degC"\nconcentration = "60 %"\nconcentration_by = "mass"',
        'name = "propylene glycol"\ntemperature = "20 degC"\nconcentration = "10 %"\nconcentration_by = "volume"',
        "name = 'custom'\ndensity = 900\nviscosity = 1\ntemperature = 300",
    ],
)
def test_the_ends_of_a_range_belong_to_it(fluid: str) -> None:
    assert [code for code, _ in doubts(fluid) if code not in ("missing", "paired")] == []


def test_a_temperature_of_a_source_is_doubted_at_the_source() -> None:
    found = doubts(WATER, 'temperature = "155 degC", return_temperature = "2 degC"')
    assert found == [
        ("fluid-range", "source.P1.temperature"),
        ("near-freezing", "source.P1.return_temperature"),
    ]


def test_a_doubt_about_the_fluid_is_told_once_for_all_sources() -> None:
    text = (
        run('name = "water"\ntemperature = "2 degC"')
        .replace("P1 = {  }", "P1 = {}\nP2 = {}")
        .replace("[terminal]", '[terminal]\nT2 = { from = "P2", flow = 0.1, drop = 1 }')
    )
    assert [place for code, place in places(findings_of(text), "warning") if code == "near-freezing"] == [
        "fluid.temperature"
    ]


@pytest.mark.parametrize(
    ("celsius", "code"), [(-0.1, "frozen"), (0.0, "near-freezing"), (2.9, "near-freezing"), (3.0, None)]
)
def test_water_within_3_k_of_freezing_is_a_warning_and_below_it_an_error(celsius: float, code: str | None) -> None:
    found = dict(doubts(f'name = "water"\ntemperature = "{celsius} degC"'))
    found.pop("fluid-range", None)
    assert found == ({} if code is None else {code: "fluid.temperature"})


@pytest.mark.parametrize(("celsius", "code"), [(-13.5, "frozen"), (-11.0, "near-freezing"), (-9.0, None)])
def test_a_glycol_freezes_at_the_point_of_its_mixture(celsius: float, code: str | None) -> None:
    # 30 % propylene glycol by mass freezes at -12.8 degC (ASHRAE tables give -13).
    fluid = f'name = "propylene glycol"\ntemperature = {celsius}\nconcentration = "30 %"\nconcentration_by = "mass"'
    assert doubts(fluid) == ([] if code is None else [(code, "fluid.temperature")])


def test_the_freezing_point_in_fahrenheit_is_not_frozen() -> None:
    assert doubts('name = "water"\ntemperature = "32 degF"') == [("near-freezing", "fluid.temperature")]


def test_a_doubt_names_the_temperature_and_the_freezing_point() -> None:
    text = run('name = "propylene glycol"\ntemperature = {}\nconcentration = "30 %"\nconcentration_by = "mass"')
    found = {f.code: f.message for t in (-11, -14) for f in findings_of(text.replace("{}", str(t)))}
    assert found["near-freezing"] == "-11 degC is within 3 K of freezing at -12.8 degC"
    assert found["frozen"].startswith("-14 degC is below the freezing point, -12.8 degC")


def test_a_frozen_fluid_is_computed_all_the_same() -> None:
    budget = evaluated_of(run('name = "water"\ntemperature = "-1 degC"'))
    assert budget.sources["P1"].required == pytest.approx(1000.0)


def test_no_temperature_gives_no_properties_and_one_finding() -> None:
    text = run('name = "water"')
    assert errors_of(text) == [("missing", "fluid.temperature")]
    assert math.isnan(medium_at(description_of(text).fluid, math.nan).density)


def test_a_temperature_that_boils_the_formula_gives_no_properties() -> None:
    fluid = description_of(run(WATER)).fluid
    assert math.isnan(medium_at(fluid, 5000.0).density)
