"""What hangs on what: the paths of terminals, and every way in which a run can be connected wrongly."""

from __future__ import annotations

import pytest

from tests.network.small import GAS, LIQUID, budget_of, errors_of, evaluated_of, findings_of, places, topology_of

PAIRED_TREE = (
    LIQUID
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 1 }
B1 = { from = "M1", bore = 40, length = 1 }
[terminal]
T1 = { from = "B1", flow = 0.1, drop = 1 }
T2 = { from = "M1", flow = 0.2, drop = 1 }
"""
)
REVERSE_RETURN = (
    LIQUID
    + """
[source]
P1 = {}
[section]
M1 = { from = "P1", bore = 50, length = 1 }
S1 = { from = "M1", bore = 40, length = 1, paired = false }
S2 = { from = "S1", bore = 40, length = 1, paired = false }
R2 = { to = "M1", bore = 40, length = 1 }
R1 = { to = "R2", bore = 40, length = 1 }
[terminal]
T1 = { from = "S1", to = "R1", flow = 0.1, drop = 1 }
T2 = { from = "S2", to = "R2", flow = 0.2, drop = 1 }
"""
)


def messages(text: str) -> dict[tuple[str, str], str]:
    found = findings_of(text)
    return dict(zip(places(found), (f.message for f in found if f.level == "error"), strict=True))


def test_a_terminal_returns_by_the_paired_legs_that_feed_it() -> None:
    terminals = budget_of(PAIRED_TREE).terminals
    assert terminals["T1"].path == ("M1", "B1", "B1", "M1")
    assert terminals["T2"].path == ("M1", "M1")


def test_a_reverse_return_leads_by_its_own_chain_into_the_riser_s_return_leg() -> None:
    budget = budget_of(REVERSE_RETURN)
    assert budget.terminals["T1"].path == ("M1", "S1", "R1", "R2", "M1")
    assert budget.terminals["T2"].path == ("M1", "S1", "S2", "R2", "M1")
    # R1 carries T1 alone, R2 both: 0.1 and 0.3 L/s.
    assert budget.sections["R1"].run.flow == pytest.approx(0.0001)
    assert budget.sections["R2"].run.flow == pytest.approx(0.0003)
    assert budget.sections["R1"].serves == ("T1",)


def test_a_terminal_may_return_to_the_source_itself() -> None:
    text = LIQUID + (
        '[source]\nP1 = {}\n[section]\nM1 = { from = "P1", bore = 50, length = 1, paired = false }\n'
        '[terminal]\nT1 = { from = "M1", to = "P1", flow = 0.1, drop = 1 }\n'
    )
    assert budget_of(text).terminals["T1"].path == ("M1",)


def test_a_terminal_may_hang_on_the_source_itself() -> None:
    text = LIQUID + '[source]\nP1 = {}\n[terminal]\nT1 = { from = "P1", flow = 0.1, drop = 1 }\n'
    budget = budget_of(text)
    assert budget.terminals["T1"].path == ()
    assert budget.sources["P1"].required == pytest.approx(1000.0)


def test_each_leg_carries_the_terminals_whose_path_uses_it() -> None:
    text = LIQUID + (
        "[source]\nP1 = {}\n[section]\n"
        'A = { from = "P1", bore = 50, length = 1 }\nB = { from = "P1", bore = 50, length = 1 }\n'
        '[terminal]\nT1 = { from = "A", to = "B", flow = 0.1, drop = 1 }\n'
        'T2 = { from = "B", flow = 0.2, drop = 1 }\nT3 = { from = "A", flow = 0.4, drop = 1 }\n'
    )
    budget = budget_of(text)
    assert budget.terminals["T1"].path == ("A", "B")
    flows = {id_: [leg.mass_flow for leg in budget.sections[id_].run.legs] for id_ in "AB"}
    # Supply of A: T1 and T3; its return: T3. Supply of B: T2; its return: T1 and T2.
    assert flows["A"] == pytest.approx([0.5, 0.4])
    assert flows["B"] == pytest.approx([0.2, 0.3])
    assert budget.sections["A"].serves == ("T1", "T3")
    assert budget.sections["B"].serves == ("T1", "T2")


def test_the_order_of_sections_in_the_file_is_free() -> None:
    lines = PAIRED_TREE.splitlines()
    at = lines.index("[section]")
    lines[at + 1], lines[at + 2] = lines[at + 2], lines[at + 1]
    budget = budget_of("\n".join(lines))
    assert list(budget.sections) == ["B1", "M1"]
    assert budget.terminals["T1"].path == ("M1", "B1", "B1", "M1")


def test_a_leg_stands_behind_the_one_it_joins() -> None:
    for text in (PAIRED_TREE, REVERSE_RETURN):
        topology = topology_of(text)
        assert all(leg.parent < number for number, leg in enumerate(topology.legs))


def test_an_unpaired_section_on_the_way_back_is_named() -> None:
    text = PAIRED_TREE.replace('M1 = { from = "P1",', 'M1 = { from = "P1", paired = false,')
    found = messages(text)
    assert set(found) == {("unpaired", "terminal.T1.from"), ("unpaired", "terminal.T2.from")}
    assert "'M1'" in found["unpaired", "terminal.T1.from"]


def test_of_several_unpaired_sections_the_nearest_to_the_terminal_is_named() -> None:
    text = PAIRED_TREE.replace("paired = true", "paired = false")
    assert "'B1'" in messages(text)["unpaired", "terminal.T1.from"]


def test_a_terminal_can_t_return_to_an_unpaired_section() -> None:
    text = REVERSE_RETURN.replace('T1 = { from = "S1", to = "R1"', 'T1 = { from = "S1", to = "S2"')
    found = messages(text)
    assert "'S2'" in found["unpaired", "terminal.T1.to"]


def test_a_section_can_t_discharge_into_an_unpaired_section() -> None:
    text = REVERSE_RETURN.replace('R2 = { to = "M1"', 'R2 = { to = "S1"')
    found = messages(text)
    # Terminals that return by it say nothing more of their own, nor does what they hang on.
    assert list(found) == [("unpaired", "section.R2.to")]
    assert "'S1'" in found["unpaired", "section.R2.to"]


@pytest.mark.parametrize(
    ("old", "new", "place"),
    [
        ('B1 = { from = "M1"', 'B1 = { from = "M11"', "section.B1.from"),
        ('T2 = { from = "M1"', 'T2 = { from = "M11"', "terminal.T2.from"),
        ('T2 = { from = "M1"', 'T2 = { from = "M1", to = "M11"', "terminal.T2.to"),
    ],
)
def test_an_id_that_does_not_exist_is_named_with_the_nearest(old: str, new: str, place: str) -> None:
    found = messages(PAIRED_TREE.replace(old, new))
    assert list(found) == [("dangling", place)]
    assert "'M11'" in found["dangling", place]
    assert "'M1'" in found["dangling", place]


def test_a_return_section_that_leads_nowhere_is_found() -> None:
    text = REVERSE_RETURN.replace('R2 = { to = "M1"', 'R2 = { to = "M9"')
    assert errors_of(text) == [("dangling", "section.R2.to")]


def test_a_cycle_names_its_sections_once() -> None:
    text = PAIRED_TREE.replace('M1 = { from = "P1"', 'M1 = { from = "B2"').replace(
        "[terminal]", 'B2 = { from = "B1", bore = 40, length = 1 }\n[terminal]'
    )
    found = messages(text)
    cycles = {place: message for (code, place), message in found.items() if code == "cycle"}
    assert list(cycles) == ["section.M1.from"]
    assert cycles["section.M1.from"].startswith("'M1' -> 'B2' -> 'B1' -> 'M1' ")


def test_a_section_that_hangs_on_itself_is_a_cycle() -> None:
    text = PAIRED_TREE.replace('B1 = { from = "M1"', 'B1 = { from = "B1"')
    assert messages(text)["cycle", "section.B1.from"].startswith("'B1' -> 'B1' ")


def test_what_hangs_on_a_cycle_is_left_out_and_the_rest_is_computed() -> None:
    text = PAIRED_TREE.replace('B1 = { from = "M1"', 'B1 = { from = "B1"')
    budget = evaluated_of(text)
    assert list(budget.terminals) == ["T2"]
    assert budget.terminals["T2"].path == ("M1", "M1")


def test_a_cycle_of_return_sections_is_found() -> None:
    text = REVERSE_RETURN.replace('R2 = { to = "M1"', 'R2 = { to = "R1"')
    assert ("cycle", "section.R2.to") in errors_of(text)


@pytest.mark.parametrize(
    ("old", "new", "place"),
    [
        ('S2 = { from = "S1"', 'S2 = { from = "T1"', "section.S2.from"),
        ('S2 = { from = "S1"', 'S2 = { from = "R1"', "section.S2.from"),
        ('R1 = { to = "R2"', 'R1 = { to = "T2"', "section.R1.to"),
        ('T1 = { from = "S1"', 'T1 = { from = "T2"', "terminal.T1.from"),
        ('T1 = { from = "S1"', 'T1 = { from = "R1"', "terminal.T1.from"),
        ('T1 = { from = "S1", to = "R1"', 'T1 = { from = "S1", to = "T2"', "terminal.T1.to"),
    ],
)
def test_a_connection_to_something_that_can_t_take_it_is_refused(old: str, new: str, place: str) -> None:
    assert old in REVERSE_RETURN
    assert ("wrong-connection", place) in errors_of(REVERSE_RETURN.replace(old, new))


def test_from_and_to_of_different_sources_are_refused() -> None:
    text = LIQUID + (
        '[source]\nP1 = {}\nP2 = {}\n[terminal]\nT1 = { from = "P1", to = "P2", flow = 0.1, drop = 1 }\n'
        'T2 = { from = "P1", flow = 0.1, drop = 1 }\nT3 = { from = "P2", flow = 0.1, drop = 1 }\n'
    )
    assert errors_of(text) == [("wrong-connection", "terminal.T1.to")]


def test_a_liquid_reaches_its_terminal_by_from() -> None:
    text = REVERSE_RETURN.replace('T1 = { from = "S1", to = "R1"', 'T1 = { to = "R1"')
    assert ("missing", "terminal.T1.from") in errors_of(text)


FAN = (
    GAS
    + """
[source]
F1 = {}
[section]
D1 = { from = "F1", size = "300x200", length = 1 }
E1 = { to = "F1", size = "300x200", length = 1 }
[terminal]
S = { from = "D1", flow = 100, drop = 10 }
X = { to = "E1", flow = 100, drop = 10 }
"""
)


def test_a_fan_has_a_discharge_and_a_suction_side() -> None:
    budget = budget_of(FAN)
    assert [leg.leg for leg in budget.sections["D1"].run.legs] == ["discharge"]
    assert [leg.leg for leg in budget.sections["E1"].run.legs] == ["suction"]
    assert budget.terminals["X"].path == ("E1",)
    assert budget.sources["F1"].index == ("S", "X")


def test_an_air_terminal_is_on_one_side() -> None:
    text = FAN.replace('S = { from = "D1",', 'S = { from = "D1", to = "E1",')
    assert errors_of(text) == [("contradiction", "terminal.S.to")]


def test_the_suction_side_of_a_gas_is_not_reached_through_the_discharge_side() -> None:
    assert errors_of(FAN.replace('X = { to = "E1"', 'X = { to = "D1"')) == [
        ("wrong-connection", "terminal.X.to"),
        ("no-terminal", "section.E1"),
    ]
    found = errors_of(FAN.replace('E1 = { to = "F1"', 'E1 = { to = "D1"'))
    assert found == [("wrong-connection", "section.E1.to")]


def test_nothing_of_a_gas_is_paired() -> None:
    text = FAN.replace('size = "300x200", length = 1 }', 'size = "300x200", length = 1, paired = true }')
    assert errors_of(text) == [("paired", "section.D1.paired"), ("paired", "section.E1.paired")]
    run_out = FAN.replace("S = {", 'S = { size = "200 mm", length = 1, paired = true,')
    assert errors_of(run_out) == [("paired", "terminal.S.paired")]


def test_a_run_out_of_a_gas_is_on_its_terminal_s_side() -> None:
    text = FAN.replace("X = {", 'X = { size = "200 mm", length = 1,').replace(
        "S = {", 'S = { size = "200 mm", length = 1,'
    )
    terminals = budget_of(text).terminals
    sides = {id_: [leg.leg for leg in terminals[id_].run_out.legs] for id_ in "SX"}  # type: ignore[union-attr]
    assert sides == {"S": ["discharge"], "X": ["suction"]}


LIFT = (
    LIQUID.replace("paired = true\n", "")
    + """
[source]
P1 = { open = true }
[section]
I1 = { to = "P1", bore = 50, length = 1 }
M1 = { from = "P1", bore = 50, length = 1 }
[terminal]
T1 = { from = "M1", to = "I1", flow = 0.1, outlet_pressure = 1 }
T2 = { from = "M1", flow = 0.1, outlet_pressure = 1 }
"""
)


def test_in_an_open_circuit_a_terminal_breaks_to_atmosphere() -> None:
    budget = budget_of(LIFT)
    assert budget.sources["P1"].kind == "open"
    assert budget.terminals["T1"].path == ("M1", "I1")
    assert budget.terminals["T2"].path == ("M1",)
    assert [leg.leg for leg in budget.sections["I1"].run.legs] == ["suction"]
    assert [leg.leg for leg in budget.sections["M1"].run.legs] == ["discharge"]
    assert budget.sections["I1"].serves == ("T1",)


def test_rise_and_outlet_pressure_count_in_an_open_circuit_only() -> None:
    text = PAIRED_TREE.replace("T1 = {", "T1 = { rise = 2, outlet_pressure = 3,").replace("B1 = {", "B1 = { rise = -1,")
    assert errors_of(text) == [
        ("rise", "section.B1.rise"),
        ("rise", "terminal.T1.rise"),
        ("rise", "terminal.T1.outlet_pressure"),
    ]
    assert evaluated_of(text).terminals["T1"].static == 0.0


RUN_OUT = 'T1 = { from = "B1", bore = 20, length = 2, '


def test_a_run_out_is_paired_as_its_sections_are() -> None:
    terminal = budget_of(PAIRED_TREE.replace('T1 = { from = "B1", ', RUN_OUT)).terminals["T1"]
    assert terminal.run_out is not None
    assert [leg.leg for leg in terminal.run_out.legs] == ["supply", "return"]
    assert terminal.path == ("M1", "B1", "B1", "M1")


def test_a_run_out_without_to_must_be_paired_in_a_closed_circuit() -> None:
    text = PAIRED_TREE.replace('T1 = { from = "B1", ', RUN_OUT + "paired = false, ")
    assert errors_of(text) == [("unpaired", "terminal.T1.paired")]


@pytest.mark.parametrize(("paired", "sides"), [("true", ["supply", "return"]), ("false", ["supply"])])
def test_a_run_out_with_to_has_a_return_leg_where_it_is_paired(paired: str, sides: list[str]) -> None:
    text = REVERSE_RETURN.replace(
        'T1 = { from = "S1", to = "R1",', f'T1 = {{ from = "S1", to = "R1", bore = 20, length = 2, paired = {paired},'
    )
    terminal = budget_of(text).terminals["T1"]
    assert terminal.run_out is not None
    assert [leg.leg for leg in terminal.run_out.legs] == sides
    assert terminal.path == ("M1", "S1", "R1", "R2", "M1")


def test_a_return_section_can_t_be_paired() -> None:
    text = REVERSE_RETURN.replace('R1 = { to = "R2",', 'R1 = { to = "R2", paired = true,')
    assert errors_of(text) == [("paired", "section.R1.paired")]
    # The default does not make it so.
    assert errors_of(REVERSE_RETURN) == []


def test_a_section_that_serves_no_terminal_is_found() -> None:
    text = PAIRED_TREE.replace("[terminal]", 'B2 = { from = "M1", bore = 40, length = 1 }\n[terminal]')
    found = messages(text)
    assert list(found) == [("no-terminal", "section.B2")]
    assert "'B2'" in found["no-terminal", "section.B2"]


def test_a_source_without_a_terminal_is_found() -> None:
    assert errors_of(PAIRED_TREE.replace("P1 = {}", "P1 = {}\nP2 = {}")) == [("no-terminal", "source.P2")]


def test_a_return_leg_that_carries_nothing_is_noted_where_the_pairing_was_stated() -> None:
    def unused(text: str) -> list[tuple[str, str]]:
        return [found for found in places(findings_of(text), "note") if found[0] == "return-unused"]

    assert unused(REVERSE_RETURN.replace("paired = false", "paired = true", 1)) == [
        ("return-unused", "section.S1.paired")
    ]
    # By default it is no choice of the designer's.
    assert unused(REVERSE_RETURN.replace(", paired = false", "", 1)) == []


def test_a_chain_leads_from_a_leg_to_its_source() -> None:
    topology = topology_of(REVERSE_RETURN)
    chain = topology.chain(topology.section_legs["R1"][0])
    assert [topology.legs[leg].owner for leg in chain] == ["R1", "R2", "M1"]
    assert topology.legs[chain[-1]].side == "return"
