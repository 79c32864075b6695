"""What a designer must look at: each finding comes at its limit and not just below it."""

from __future__ import annotations

import pytest

from budget.description import Finding, Level, read_text
from budget.document import take
from budget.network.review import accept
from tests.network.small import GAS, LIQUID, budget_of, description_of, findings_of, places, shown

PIPE = (
    LIQUID
    + """
[limits]
LIMITS
[source]
P1 = { SOURCE }
[section]
M1 = { from = "P1", bore = 40, length = 1, MAIN }
[terminal]
T1 = { from = "M1", flow = 1.256637061, TERMINAL drop = 10 }
"""
)
"""1 m/s in 40 mm: Re = 40 000, 279.6 Pa/m."""


def pipe(limits: str = "", main: str = "keep = true", terminal: str = "", source: str = "running = 1") -> str:
    text = PIPE.replace("LIMITS", limits).replace("MAIN", main).replace("TERMINAL", terminal)
    return text.replace("SOURCE", source)


def warnings_of(text: str) -> list[tuple[str, str]]:
    return places(findings_of(text), "warning")


def test_a_sound_run_has_nothing_to_look_at() -> None:
    assert findings_of(pipe()) == ()


def test_a_velocity_above_its_limit_is_found_at_the_size() -> None:
    assert warnings_of(pipe('velocity = "0.999 m/s"')) == [("velocity", "section.M1.bore")]
    assert warnings_of(pipe('velocity = "1.001 m/s"')) == []
    assert [finding.message for finding in shown(pipe('velocity = "0.9 m/s"'), "velocity")] == [
        "velocity 1.00 m/s is above its limit, 0.90 m/s"
    ]


def test_a_gradient_above_its_limit_is_found() -> None:
    gradient = budget_of(pipe()).sections["M1"].run.legs[0].gradient
    assert warnings_of(pipe(f"gradient = {gradient - 0.1}")) == [("gradient", "section.M1.bore")]
    assert warnings_of(pipe(f"gradient = {gradient + 0.1}")) == []


def test_a_velocity_below_the_least_is_found() -> None:
    assert warnings_of(pipe('least_velocity = "1.001 m/s"')) == [("slow", "section.M1.bore")]
    assert warnings_of(pipe('least_velocity = "0.999 m/s"')) == []


def test_only_the_worst_leg_of_a_section_is_named() -> None:
    text = pipe('velocity = "0.9 m/s"').replace(
        'name = "custom"\ndensity = 1000\nviscosity = 1\nspecific_heat = 4\n', 'name = "water"\n'
    )
    assert [finding.message for finding in shown(text, "velocity")] == [
        "velocity 1.00 m/s is above its limit, 0.90 m/s"
    ]


@pytest.mark.parametrize(
    ("limits", "main", "limit"),
    [
        ('velocity = "0.9 m/s"', "keep = true", "0.90"),
        # Its bore comes before what is general.
        (
            'velocity = "0.1 m/s"\nvelocity_by_bore = [["40 mm", "0.8 m/s"], ["50 mm", "0.7 m/s"]]',
            "keep = true",
            "0.80",
        ),
        (
            'velocity = "0.1 m/s"\nvelocity_by_bore = [["39 mm", "0.8 m/s"], ["50 mm", "0.7 m/s"]]',
            "keep = true",
            "0.70",
        ),
        # Beyond the last bore: what is general.
        ('velocity = "0.9 m/s"\nvelocity_by_bore = [["39 mm", "0.8 m/s"]]', "keep = true", "0.90"),
        # Its class comes before its bore.
        (
            'velocity_by_bore = [["50 mm", "0.8 m/s"]]\nbranch = { velocity = "0.6 m/s" }',
            'class = "branch"',
            "0.60",
        ),
        ('velocity_by_bore = [["50 mm", "0.8 m/s"]]\nmain = { velocity = "0.6 m/s" }', 'class = "branch"', "0.80"),
        # Its own comes before everything.
        (
            'velocity = "2 m/s"\nbranch = { velocity = "0.6 m/s" }',
            'class = "branch", limit_velocity = "0.5 m/s"',
            "0.50",
        ),
    ],
)
def test_the_nearest_limit_holds(limits: str, main: str, limit: str) -> None:
    found = shown(pipe(limits, main), "velocity")
    assert [finding.message for finding in found] == [f"velocity 1.00 m/s is above its limit, {limit} m/s"]


def test_a_wider_limit_of_one_s_own_silences_the_general_one() -> None:
    assert (
        warnings_of(pipe('velocity = "0.5 m/s"\ngradient = 10', 'limit_velocity = "2 m/s", limit_gradient = 900')) == []
    )


def test_gradient_and_least_velocity_are_limited_by_class_too() -> None:
    text = pipe('gradient = 900\nbranch = { gradient = 100, least_velocity = "1.5 m/s" }', 'class = "branch"')
    assert warnings_of(text) == [("gradient", "section.M1.bore"), ("slow", "section.M1.bore")]


def test_a_run_out_has_a_class_of_its_own() -> None:
    text = pipe('run-out = { velocity = "0.5 m/s" }', terminal='size = "s", bore = 40, length = 1,').replace(
        'size = "s", ', ""
    )
    assert warnings_of(text) == [("velocity", "terminal.T1.bore")]


def test_a_size_of_a_catalogue_line_is_doubted_at_its_size() -> None:
    text = (
        pipe('velocity = "0.5 m/s"')
        .replace("roughness = 0.05", 'catalogue = "steel EN 10255 medium"')
        .replace("bore = 40", 'size = "DN32"')
    )
    assert warnings_of(text) == [("velocity", "section.M1.size")]


@pytest.mark.parametrize(("reynolds", "found"), [(2299.9, False), (2300.1, True), (3999.9, True), (4000.1, False)])
def test_a_transitional_flow_is_doubted(reynolds: float, found: bool) -> None:
    # Re = 4 m/(pi D mu): in 40 mm with 1 mPa s, m = Re x pi x 0.04 x 1e-3/4 kg/s, as many L/s
    flow = reynolds * 3.14159265359 * 0.04 * 1e-3 / 4
    text = pipe().replace("flow = 1.256637061", f"flow = {flow:.9f}")
    assert warnings_of(text) == ([("transitional", "section.M1.bore")] if found else [])


TEE = (
    LIQUID.replace('takeoff = "none"\n', "")
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 1 }
B1 = { from = "M1", bore = 40, length = 1 }
B2 = { from = "M1", bore = 40, length = 1 }
[terminal]
T1 = { from = "B1", flow = 0.5, drop = 5 }
T2 = { from = "B2", flow = 0.5, drop = 5 }
"""
)


def test_legs_that_meet_without_a_junction_stated_are_found() -> None:
    assert warnings_of(TEE) == [("junction", "section.B1.takeoff"), ("junction", "section.B2.takeoff")]


def test_a_stated_junction_or_a_tee_fitting_is_enough() -> None:
    stated = TEE.replace("B1 = {", 'B1 = { takeoff = "none",').replace(
        "B2 = {", 'B2 = { fittings = { "tee branch" = 1 },'
    )
    assert [finding for finding in warnings_of(stated) if finding[0] == "junction"] == []


def test_a_section_that_goes_on_alone_needs_no_junction() -> None:
    text = TEE.replace('T2 = { from = "B2"', 'T2 = { from = "B1"').replace(
        'B2 = { from = "M1", bore = 40, length = 1 }\n', ""
    )
    # On B1 two terminals meet, on M1 nothing does; the source's own connections are no junctions.
    assert warnings_of(text) == [("junction", "terminal.T1.takeoff"), ("junction", "terminal.T2.takeoff")]


def test_run_outs_and_sections_meet_too() -> None:
    text = TEE.replace('T2 = { from = "B2"', 'T2 = { from = "M1", bore = 20, length = 1').replace(
        'B2 = { from = "M1", bore = 40, length = 1 }\n', ""
    )
    assert [found for found in warnings_of(text) if found[0] == "junction"] == [
        ("junction", "section.B1.takeoff"),
        ("junction", "terminal.T2.takeoff"),
    ]


def test_legs_that_meet_on_the_way_back_are_found() -> None:
    text = LIQUID.replace('takeoff = "none"\n', "") + (
        "[source]\nP1 = {}\n[section]\n"
        'R = { to = "P1", bore = 40, length = 1 }\nR1 = { to = "R", bore = 40, length = 1 }\n'
        'R2 = { to = "R", bore = 40, length = 1 }\n'
        '[terminal]\nT1 = { from = "P1", to = "R1", flow = 0.5, drop = 5 }\n'
        'T2 = { from = "P1", to = "R2", flow = 0.5, drop = 5 }\n'
    )
    assert warnings_of(text) == [("junction", "section.R1.takeoff"), ("junction", "section.R2.takeoff")]


def test_terminals_at_the_source_meet_at_no_junction() -> None:
    text = LIQUID.replace('takeoff = "none"\n', "") + (
        '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", flow = 0.5, drop = 5 }\n'
        'T2 = { from = "P1", flow = 0.5, drop = 5 }\n'
    )
    assert warnings_of(text) == []


FLEX = (
    GAS
    + '[source]\nF1 = {}\n[section]\nD1 = { from = "F1", duct = "flex", length = 2, KEYS }\n'
    + '[terminal]\nS1 = { from = "D1", flow = 90, drop = 5 }\n'
)


@pytest.mark.parametrize(
    ("keys", "found"),
    [
        ('size = "150 mm", compression = "30 %"', False),
        ('size = "250 mm", compression = "4 %"', False),
        ('size = "125 mm", compression = "4 %"', True),
        ('size = "315 mm", compression = "4 %"', True),
        ('size = "200 mm", compression = "31 %"', True),
        ('size = "200 mm", compression = "30 %"', False),
    ],
)
def test_flexible_duct_outside_what_was_measured_is_doubted(keys: str, found: bool) -> None:
    assert warnings_of(FLEX.replace("KEYS", keys)) == ([("flexible", "section.D1.size")] if found else [])


def test_a_duty_above_what_is_available_is_found() -> None:
    duty = budget_of(pipe()).sources["P1"].duty
    assert warnings_of(pipe(source=f'available = "{duty - 0.1} Pa"')) == [("nothing-in-hand", "source.P1.available")]
    assert warnings_of(pipe(source=f'available = "{duty + 0.1} Pa"')) == []
    text = pipe(source='available = "8 kPa"')
    assert [finding.message for finding in shown(text, "nothing-in-hand")] == [
        f"the duty, {duty / 1000:.2f} kPa, is {duty / 1000 - 8:.2f} kPa above what is available"
    ]


def test_more_spent_than_its_heading_allows_is_found() -> None:
    text = pipe().replace("[source]", "[budget]\nterminal = 9.999\nplant = 0\n[source]")
    assert warnings_of(text) == [("heading", "budget.terminal")]
    assert warnings_of(text.replace("9.999", "10")) == []
    # A thousandth of a pascal is rounding.
    assert warnings_of(text.replace("9.999", "9.9999995")) == []


FAN = GAS + (
    '[source]\nF1 = {}\n[terminal]\nS1 = { from = "F1", flow = 100, drop = 5 }\nX1 = { to = "F1", FLOW, drop = 5 }\n'
)


@pytest.mark.parametrize(
    ("flow", "found"),
    [("flow = 100.9", False), ("flow = 101.1", True), ("flow = 99.1", False), ("flow = 98.9", True)],
)
def test_sides_of_a_fan_that_differ_by_more_than_a_hundredth_are_found(flow: str, found: bool) -> None:
    assert warnings_of(FAN.replace("FLOW", flow)) == ([("air-balance", "source.F1")] if found else [])


BALANCED = (
    LIQUID
    + """
[device.LOG]
kv = [[1, 1], [3, 4]]
KEYS
[source]
P1 = {}
[terminal]
T1 = { from = "P1", flow = "2 m3/h", drop = 0, balance = "LOG" }
T3 = { from = "P1", flow = 0.1, drop = DROP }
"""
)


def balanced(drop: str, keys: str = "") -> str:
    return BALANCED.replace("DROP", drop).replace("KEYS", keys)


def test_a_drop_outside_the_setting_table_is_found() -> None:
    assert warnings_of(balanced("400")) == []  # Kv 1: (2/1)^2 bar
    assert warnings_of(balanced("400.001")) == [("device-range", "terminal.T1.balance")]
    assert [finding.message for finding in shown(balanced("500"), "device-range")] == [
        "'LOG' can't be set to drop 500.00 kPa: outside its setting table; take another size"
    ]


def test_a_signal_too_small_to_be_read_is_found() -> None:
    assert warnings_of(balanced("100", "least_signal = 100.001")) == [("signal", "terminal.T1.balance")]
    assert warnings_of(balanced("100", "least_signal = 100")) == []
    # 2 m3/h through an orifice of Kv 4: 25 kPa
    assert warnings_of(balanced("100", "signal_kv = 4\nleast_signal = 25.001")) == [("signal", "terminal.T1.balance")]
    assert warnings_of(balanced("100", "signal_kv = 4\nleast_signal = 25")) == []


def test_excess_that_no_device_takes_up_is_found() -> None:
    text = LIQUID + (
        '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", flow = 0.1, drop = 10 }\n'
        'T2 = { from = "P1", flow = 0.1, drop = "DROP Pa" }\n'
    )
    assert warnings_of(text.replace("DROP", "9999.99")) == [("excess", "terminal.T2.balance")]
    assert warnings_of(text.replace("DROP", "9999.9995")) == []
    assert [finding.message for finding in shown(text.replace("DROP", "7500"), "excess")] == [
        "2.50 kPa remains and no device takes it up; the terminal is over-supplied"
    ]


def test_excess_behind_a_device_that_is_full_says_so() -> None:
    text = LIQUID + (
        '[device.PIV]\nholds = "flow"\nleast_drop = 5\ngreatest_drop = 8\n'
        '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", flow = 0.1, drop = 20 }\n'
        'T2 = { from = "P1", flow = 0.1, drop = 5, balance = "PIV" }\n'
    )
    assert [finding.message for finding in shown(text, "excess")] == [
        "7.00 kPa remains and its device can't take it up; the terminal is over-supplied"
    ]


def control(drop: str, limits: str = "") -> list[tuple[str, str, str]]:
    text = pipe(limits, terminal=f'item = [{{ drop = {drop}, control = "two-port" }}],')
    text = text.replace("length = 1,", "length = 0,") + 'T2 = { from = "P1", flow = 0.1, drop = 50 }\n'
    wanted = ("authority", "authority-low")
    return [(f.level, f.code, ".".join(map(str, f.path))) for f in findings_of(text) if f.code in wanted]


PLACE = "terminal.T1.item.0.control"


@pytest.mark.parametrize(
    ("drop", "found"),
    [
        # Beside the 10 kPa of the terminal: 0.3 at 4.2857, 0.5 at 10
        ("4.28", [("warning", "authority", PLACE)]),
        ("4.29", [("note", "authority-low", PLACE)]),
        ("9.99", [("note", "authority-low", PLACE)]),
        ("10.01", []),
    ],
)
def test_a_low_authority_is_found(drop: str, found: list[tuple[str, str, str]]) -> None:
    assert control(drop) == found


def test_the_limits_of_authority_are_the_run_s() -> None:
    assert control("10.01", "authority = 0.6\nauthority_note = 0.7") == [("warning", "authority", PLACE)]
    assert control("10.01", "authority_note = 0.7") == [("note", "authority-low", PLACE)]
    assert control("4.28", "authority = 0.2\nauthority_note = 0.2") == []


def test_settings_with_diversity_hold_for_the_diversified_flow() -> None:
    text = (
        BALANCED.replace("KEYS", "")
        .replace("DROP", "100")
        .replace("[terminal]", '[section]\nM1 = { from = "P1", bore = 50, length = 0, diversity = 0.9 }\n[terminal]')
    )
    text = text.replace('{ from = "P1", flow', '{ from = "M1", flow')
    assert places(findings_of(text), "note") == [("settings-diversified", "section.M1.diversity")]
    assert places(findings_of(text.replace("diversity = 0.9", "diversity = 1")), "note") == []
    without = text.replace(', balance = "LOG"', "")
    assert places(findings_of(without), "note") == []


def test_an_extract_terminal_that_gains_pressure_is_found() -> None:
    text = GAS + (
        '[source]\nF1 = {}\n[terminal]\nX1 = { to = "F1", flow = "0.0942477796 m3/s", neck = "200 mm", '
        'static_drop = "DROP Pa" }\n'
    )
    # 5.4 Pa in the neck
    assert warnings_of(text.replace("DROP", "5.3")) == [("extract-gain", "terminal.X1.static_drop")]
    assert warnings_of(text.replace("DROP", "5.5")) == []


def test_what_is_accepted_becomes_a_note_with_its_reason() -> None:
    found = findings_of(pipe('velocity = "0.9 m/s"', 'accept = { velocity = "short, agreed" }'))
    assert [(finding.level, finding.code) for finding in found] == [("note", "velocity")]
    assert shown(pipe('velocity = "0.9 m/s"', 'accept = { velocity = "short, agreed" }'), "velocity")[0].message == (
        "velocity 1.00 m/s is above its limit, 0.90 m/s (accepted: short, agreed)"
    )


def test_a_finding_is_accepted_where_it_stands_and_nowhere_else() -> None:
    text = TEE.replace("B1 = {", 'B1 = { accept = { junction = "as built" },')
    found = [(f.level, ".".join(map(str, f.path))) for f in findings_of(text) if f.code == "junction"]
    assert found == [("note", "section.B1.takeoff"), ("warning", "section.B2.takeoff")]


def test_a_finding_at_a_key_deep_inside_is_accepted_by_its_table() -> None:
    text = pipe(terminal='accept = { authority = "by the maker" }, item = [{ drop = 1, control = "two-port" }],')
    found = [(f.level, f.code) for f in findings_of(text) if f.code.startswith("authority")]
    assert found == [("note", "authority")]


def test_an_error_is_never_accepted() -> None:
    description = description_of(pipe(main='accept = { excess = "fine" }'))
    wrong = Finding(Level.ERROR, "excess", "an error of that code", ("section", "M1", "length"))
    settled = accept((wrong,), description)
    assert settled[0] == wrong
    assert [(finding.code, finding.path) for finding in settled[1:]] == [
        ("accept-unused", ("section", "M1", "accept", "excess"))
    ]


def test_a_note_that_is_accepted_stays_a_note_and_is_not_called_unused() -> None:
    text = pipe(
        terminal='accept = { authority-low = "agreed" }, item = [{ drop = 8, control = "two-port" }],',
        limits="authority = 0.2",
    )
    text = text.replace("length = 1,", "length = 0,")
    found = [(f.level, f.code, f.message.rpartition(" (")[2]) for f in findings_of(text)]
    assert found == [("note", "authority-low", "accepted: agreed)")]


def test_what_was_accepted_in_vain_is_noted_in_the_order_of_the_file() -> None:
    text = pipe(main='accept = { slow = "a", velocity = "b", gradient = "c", transitional = "d" }')
    assert places(findings_of(text), "note") == [
        ("accept-unused", f"section.M1.accept.{code}") for code in ("slow", "velocity", "gradient", "transitional")
    ]


@pytest.mark.parametrize("reason", ["{0}", "{", "}{", "{{x}}", "{figure!r}", "%s"])
def test_a_reason_is_shown_as_it_was_written(reason: str) -> None:
    figured = pipe('velocity = "0.9 m/s"', f'accept = {{ velocity = "{reason}" }}')
    assert shown(figured, "velocity")[0].message.endswith(f"0.90 m/s (accepted: {reason})")
    plain = TEE.replace("B1 = {", f'B1 = {{ accept = {{ junction = "{reason}" }},')
    assert shown(plain, "junction")[0].message.endswith(f"(accepted: {reason})")


@pytest.mark.parametrize("name", ["{0}", "DRV {25}", "{x!r}", "}", "{"])
def test_names_with_braces_are_shown_as_they_are(name: str) -> None:
    text = balanced("500").replace("[device.LOG]", f'[device."{name}"]').replace('"LOG"', f'"{name}"')
    assert shown(text, "device-range")[0].message.startswith(f"'{name}' can't be set to drop 500.00 kPa")
    headed = pipe().replace("[source]", "[budget]\nterminal = 1\n[source]").replace("P1", "PUMP")
    headed = headed.replace("PUMP =", f'"{name}" =').replace('"PUMP"', f'"{name}"')
    assert shown(headed, "heading")[0].message.startswith(f"terminal of {name} takes 10.00 kPa")
    held = LIQUID + (
        f'[device."{name}"]\nholds = "differential"\nset_point = 1\nleast_drop = 1\n'
        f'[source]\nP1 = {{}}\n[section]\nM1 = {{ from = "P1", bore = 40, length = 0, balance = "{name}" }}\n'
        '[terminal]\nT1 = { from = "M1", flow = 0.1, drop = 10 }\n'
    )
    assert shown(held, "set-point")[0].message.startswith(f"the set point of '{name}', 1.00 kPa, is below")


def test_findings_speak_in_the_units_of_the_design() -> None:
    text = pipe('velocity = "0.9 m/s"').replace(
        'title = "Small run"', 'title = "Small run"\n[display]\nvelocity = "ft/s"'
    )
    assert shown(text, "velocity")[0].message == "velocity 3.28 ft/s is above its limit, 2.95 ft/s"
    assert take(read_text(text)).level == "warning"
