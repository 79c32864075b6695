"""From a text to a typed run: defaults, units, lines, devices, items, order."""

from __future__ import annotations

import pytest

from budget.description import Basis, Description, Level, describe, read_text
from budget.description.codes import CODES
from budget.units import Dimension, Quantity
from tests.description.sound import SOUND, SOUND_AIR, SOUND_OPEN


def read(text: str) -> Description:
    return describe(read_text(text))


def sound(old: str, new: str, base: str = SOUND) -> Description:
    """Read a sound run with a change that leaves it without an error."""
    assert old in base
    found = read(base.replace(old, new, 1))
    assert [one for one in found.findings if one.level is Level.ERROR] == []
    return found


def is_near(quantity: Quantity | None, value: float, basis: Basis = Basis.PLAIN) -> bool:
    return quantity is not None and quantity.value == pytest.approx(value) and quantity.basis is basis


def test_a_run_is_read_whole() -> None:
    run = read(SOUND)
    assert not run.findings
    assert run.design.title == "Test bench"
    assert run.display == {"flow": "L/s"}
    assert run.fluid.name == "water"
    assert run.fluid.temperature == pytest.approx(343.15)
    assert run.fluid.return_temperature == pytest.approx(328.15)
    assert run.limits.velocity == 1.5
    assert list(run.limits.velocity_by_bore) == [(0.02, 0.9), (0.05, 1.2)]
    assert run.limits.classes == {"branch": {"velocity": 1.1}}
    assert run.budget == {"plant": Quantity(40_000.0, Dimension.PRESSURE)}
    assert set(run.lines) == {("pipe", "steel"), ("pipe", "own"), ("duct", "sheet")}
    assert run.fittings["swing joint"].k == 0.75
    assert list(run.devices["V1"].kv) == [(1, 0.05), (2, 0.6), (3, 2.4)]
    assert run.devices["H1"].holds == "differential"
    assert run.devices["F1"].greatest_drop == Quantity(400_000.0, Dimension.PRESSURE)


def test_sources_sections_and_terminals_are_in_si() -> None:
    run = read(SOUND)
    pump, main, terminal = run.sources["P1"], run.sections["M1"], run.terminals["T1"]
    assert pump.available == Quantity(150_000.0, Dimension.PRESSURE)
    assert pump.reserve == pytest.approx(0.1)
    assert pump.efficiency == 0.6
    assert pump.curve[1] == (Quantity(0.002, Dimension.FLOW), Quantity(60_000.0, Dimension.PRESSURE))
    assert pump.items[0].drop == Quantity(12_000.0, Dimension.PRESSURE)
    assert (main.from_, main.to) == ("P1", None)
    assert main.run.length == 14.5
    assert main.run.geometry is not None
    assert main.run.geometry.bore == 0.036
    assert [(one.name, one.count) for one in main.run.fittings] == [("elbow 90", 4), ("swing joint", 1)]
    assert main.items[0].kv == 21.0
    assert main.items[0].path == ("section", "M1", "item", 0)
    assert is_near(terminal.flow, 0.00012)
    assert terminal.run is not None
    assert terminal.run.length == 6.2
    assert terminal.items[0].control == "two-port"
    assert (terminal.balance, run.terminals["T2"].run) == ("V1", None)


def test_what_is_not_stated_has_its_default() -> None:
    run = read('format = 1\n[fluid]\nname = "air"\ntemperature = 20\n[source.F]\n[[source.F.item]]\ndrop = 3')
    fan = run.sources["F"]
    assert run.design.units == "SI"
    assert (run.fluid.humidity, run.fluid.altitude) == (0.5, 0.0)
    assert (run.limits.authority, run.limits.authority_note, run.limits.tolerance) == (0.3, 0.5, 0.1)
    assert run.limits.velocity is None
    assert (fan.open, fan.reserve, fan.flow_reserve, fan.running, fan.controls) == (False, 0.0, 0.0, 1, "fixed")
    assert (fan.available, fan.efficiency) == (None, None)
    item = fan.items[0]
    assert (item.name, item.exponent, item.parallel, item.state, item.inside) == ("item", 2.0, 1, "mean", False)


def test_defaults_are_taken_where_a_run_says_nothing_else() -> None:
    run = read(SOUND)
    assert run.sections["M1"].run.paired
    assert not run.sections["M1"].run.paired_stated
    assert not run.sections["B2"].run.paired
    assert run.sections["B2"].run.paired_stated
    line = run.sections["B2"].run.line
    assert line is not None
    assert line.name == "own"
    assert line.roughness == pytest.approx(1e-5)
    assert run.terminals["T2"].takeoff == "none"
    other = sound('takeoff = "none"', 'takeoff = "none"\nfitting_method = "crane"\nclass = "branch"')
    assert other.sections["M1"].run.fitting_method == "crane"
    assert other.sections["M1"].run.class_ == "branch"
    assert run.sections["M1"].run.fitting_method == "by size"
    assert run.sections["M1"].run.class_ is None


def test_a_section_may_change_from_the_default_pipe_to_a_duct() -> None:
    run = sound('pipe = "own"\nsize = "B"', 'duct = "sheet"\nsize = "80 mm"')
    line = run.sections["B2"].run.line
    assert line is not None
    assert (line.kind, line.name) == ("duct", "sheet")


LIQUID = 'format = 1\n[design]\nunits = "{units}"\n[fluid]\nname = "{fluid}"\ntemperature = 50\n{more}\n'
SYSTEMS = [("SI", "water"), ("IP", "water"), ("SI", "air"), ("IP", "air")]
BARE = (
    # key in its table, SI liquid, IP liquid, SI gas, IP gas: what 10 is in SI base units
    ("[source.P]\navailable = 10", "source", "available", (10_000.0, 29_890.67, 10.0, 2_490.889)),
    ("[source.P]\ntemperature = 10", "source", "temperature", (283.15, 260.9278, 283.15, 260.9278)),
    ("[section.S]\nlength = 10", "section", "length", (10.0, 3.048, 10.0, 3.048)),
    ("[section.S]\nrise = 10", "section", "rise", (10.0, 3.048, 10.0, 3.048)),
    ("[terminal.T]\nflow = 10", "terminal", "flow", (0.01, 0.000630902, 0.01, 0.004719474)),
    ("[terminal.T]\nload = 10", "terminal", "load", (10_000.0, 2_930.711, 10_000.0, 2_930.711)),
    ("[limits]\nvelocity = 10", "limits", "velocity", (10.0, 3.048, 10.0, 0.0508)),
    ("[limits]\ngradient = 10", "limits", "gradient", (10.0, 980.665, 10.0, 81.72208)),
)


@pytest.mark.parametrize(("text", "table", "key", "wanted"), BARE, ids=[row[2] for row in BARE])
@pytest.mark.parametrize(("units", "fluid"), SYSTEMS)
def test_a_bare_number_is_in_the_unit_of_the_design(
    text: str, table: str, key: str, wanted: tuple[float, ...], units: str, fluid: str
) -> None:
    more = "[pipe.p]\nroughness = 0\n[defaults]\npipe = 'p'\n" + text + ("\nbore = 20" if table == "section" else "")
    run = read(LIQUID.format(units=units, fluid=fluid, more=more))
    owner: object = run.limits
    if table != "limits":
        owner = next(iter(getattr(run, table + "s").values()))
    value = getattr(owner, key) if key != "length" else owner.run.length  # type: ignore[attr-defined]
    place = SYSTEMS.index((units, fluid))
    assert getattr(value, "value", value) == pytest.approx(wanted[place], rel=1e-6)


@pytest.mark.parametrize(("units", "metres"), [("SI", 0.02), ("IP", 0.508)])
def test_a_bare_bore_and_roughness_are_small_lengths(units: str, metres: float) -> None:
    more = "[pipe.p]\nroughness = 0.02\nsizes = { A = 20 }\n[section.S]\nfrom = 'P'\npipe = 'p'\nbore = 20\nlength = 1"
    run = read(LIQUID.format(units=units, fluid="water", more=more))
    line, geometry = run.lines["pipe", "p"], run.sections["S"].run.geometry
    assert geometry is not None
    assert geometry.bore == pytest.approx(metres)
    assert line.own_sizes["A"] == pytest.approx(metres)
    assert line.roughness == pytest.approx(metres / 1000.0)


def test_the_fluid_itself_and_its_mass_keep_their_basis() -> None:
    run = sound('available = "150 kPa"', 'available = "15 m"')
    assert is_near(run.sources["P1"].available, 15.0, Basis.HEAD)
    run = sound('flow = "0.12 L/s"', 'flow = "432 kg/h"')
    assert is_near(run.terminals["T1"].flow, 0.12, Basis.MASS)
    fluid = 'name = "custom"\ndensity = 900\nviscosity = "20 cSt"\nspecific_heat = 2\n'
    run = sound('name = "water"\n', fluid)
    assert is_near(run.fluid.viscosity, 2e-5, Basis.KINEMATIC)
    assert run.fluid.specific_heat == 2000.0


@pytest.mark.parametrize(("fluid", "gas"), [("name = 'air'", True), ("name = 'water'", False), ("", False)])
def test_air_is_a_gas(fluid: str, gas: bool) -> None:
    assert read(f"[fluid]\n{fluid}").fluid.gas is gas


@pytest.mark.parametrize(("density", "gas"), [(1.2, True), (49.9, True), (50, False), (998, False)])
def test_a_custom_fluid_below_50_kg_m3_is_a_gas(density: float, gas: bool) -> None:
    assert read(f"[fluid]\nname = 'custom'\ndensity = {density}").fluid.gas is gas


def test_fractions_are_plain_or_in_per_cent() -> None:
    assert sound('reserve = "10 %"', "reserve = 0.1").sources["P1"].reserve == pytest.approx(0.1)
    glycol = 'name = "ethylene glycol"\nconcentration = "30 %"\nconcentration_by = "volume"'
    fluid = sound('name = "water"', glycol).fluid
    assert fluid.concentration == pytest.approx(0.3)
    assert fluid.concentration_by == "volume"


def test_a_line_of_the_catalogue_may_have_a_roughness_of_its_own() -> None:
    listed = read(SOUND).lines["pipe", "steel"]
    assert listed.roughness == pytest.approx(4.5e-5)
    assert listed.source
    rough = sound('10255 medium"', '10255 medium"\nroughness = "0.2 mm"').lines["pipe", "steel"]
    assert rough.catalogue == listed.catalogue
    assert rough.roughness == pytest.approx(2e-4)


def test_flexible_duct_is_as_compressed_as_its_line_unless_it_says_so() -> None:
    flex = 'catalogue = "flexible"'
    run = sound(flex, flex + '\ncompression = "12 %"', SOUND_AIR).terminals["G2"].run
    assert run is not None
    assert run.compression == pytest.approx(0.12)
    own = sound('length = "2 m"', 'length = "2 m"\ncompression = 0.2', SOUND_AIR).terminals["G2"].run
    assert own is not None
    assert own.compression == 0.2


def test_cv_is_read_as_kv() -> None:
    run = sound("kv = [[1, 0.05], [2, 0.6], [3, 2.4]]", "cv = [[1, 1.156], [2, 11.56]]")
    assert [setting for setting, _ in run.devices["V1"].kv] == [1, 2]
    assert [kv for _, kv in run.devices["V1"].kv] == pytest.approx([1.0, 10.0])
    run = sound("kv = 21.0", "cv = 23.12")
    assert run.sections["M1"].items[0].kv == pytest.approx(20.0)


def test_a_damper_has_loss_coefficients_and_no_kv() -> None:
    damper = read(SOUND_AIR).devices["D1"]
    assert (damper.k, damper.kv) == (((0, 0.2), (30, 4.0), (60, 90.0)), ())


def test_a_filter_has_a_clean_and_a_final_drop() -> None:
    run = sound('drop = "12 kPa"\n\n[section', 'clean = "2 kPa"\nfinal = "6 kPa"\nstate = "final"\n\n[section')
    found = run.sources["P1"].items[0]
    assert is_near(found.clean, 2000.0)
    assert is_near(found.final, 6000.0)
    assert found.state == "final"
    assert found.drop is None


def test_an_open_circuit_has_rises() -> None:
    run = sound('drop = "11 kPa"', 'drop = "11 kPa"\nrise = "-2 m"\noutlet_pressure = "0.2 bar"', SOUND_OPEN)
    assert run.sources["P1"].open
    assert run.terminals["T3"].rise == -2.0
    assert run.terminals["T3"].outlet_pressure == Quantity(20_000.0, Dimension.PRESSURE)


def test_an_air_terminal_has_a_neck() -> None:
    terminal = read(SOUND_AIR).terminals["G1"]
    assert terminal.static_drop == Quantity(18.0, Dimension.PRESSURE)
    assert terminal.neck is not None
    assert terminal.neck.bore == 0.25
    extract = sound('static_drop = "18 Pa"', 'static_drop = "-18 Pa"', SOUND_AIR).terminals["G1"]
    assert extract.static_drop == Quantity(-18.0, Dimension.PRESSURE)


def test_the_order_is_that_of_the_file_whatever_the_tables() -> None:
    text = "[terminal.B]\n[section.Z]\n[source.P]\n[section.A]\n[terminal.'1']\n[[section.Z.item]]\n[source.O]"
    run = read(text)
    assert run.order == ("B", "Z", "P", "A", "1", "O")
    assert run.rank() == {"B": 0, "Z": 1, "P": 2, "A": 3, "1": 4, "O": 5}
    inline = read('section = { M1 = { from = "P1" } }\nterminal.T1.from = "M1"\n[source.P1]')
    assert inline.order == ("M1", "T1", "P1")


def test_titles_notes_and_locations_stand_on_anything() -> None:
    for table in ("source.P1", "section.B2", "terminal.T2"):
        run = sound(f"[{table}]", f'[{table}]\nnote = "n"\nlocation = "l"')
        kind, id_ = table.split(".")
        owner = getattr(run, kind + "s")[id_]
        assert (owner.note, owner.location) == ("n", "l")


def test_only_what_is_no_error_is_accepted() -> None:
    run = sound('size = "DN32"', 'size = "DN32"\naccept = { velocity = "short", slow = "" }')
    assert run.sections["M1"].accept == {"velocity": "short", "slow": ""}
    errors = [code for code, meaning in CODES.items() if meaning.level == "error"]
    for code in errors:
        run = read(SOUND.replace('size = "DN32"', f'size = "DN32"\naccept = {{ {code} = "x" }}'))
        assert run.sections["M1"].accept == {}
        assert [one.code for one in run.findings] == ["unknown-code"]


def test_a_broken_value_leaves_the_rest_readable() -> None:
    run = read(SOUND.replace('"14.5 m"', '"14,5 m"'))
    assert [one.path for one in run.findings] == [("section", "M1", "length")]
    assert run.sections["M1"].run.length is None
    assert run.sections["M1"].run.geometry is not None
    assert run.sections["M1"].items[0].kv == 21.0


def test_each_fault_is_told_once() -> None:
    for broken in ('kv = [[1, "x"]]', "kv = 4", "kv = [[1, 2], [1, 3]]", "kv = [[1, nan]]"):
        run = read(SOUND.replace("kv = [[1, 0.05], [2, 0.6], [3, 2.4]]", broken))
        assert len(run.findings) == 1, broken
    for old, new in (
        ('size = "DN20"', "size = []"),
        ('drop = "9 kPa"', 'drop = "9 s"'),
        ('from = "P1"', "from = 1"),
        ('holds = "flow"', 'holds = "flux"'),
        ('drop = "12 kPa"\n\n', 'drop = "12 s"\nat = "1 L/s"\n\n'),
        ("control = ", "characteristic = 5\ncontrol = "),
    ):
        assert len(read(SOUND.replace(old, new)).findings) == 1, new


def test_many_faults_are_found_in_reasonable_time() -> None:
    text = SOUND + "".join(f"\n[section.X{n}]\n[[section.X{n}.item]]\n" for n in range(3000))
    run = read(text)
    assert len(run.findings) == 4 * 3000
