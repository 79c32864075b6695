"""Results as one JSON object, named and shaped as they are documented."""

from __future__ import annotations

import json
from typing import Any

import pytest

from budget.catalogue import CATALOGUE_VERSION
from budget.description import read_text
from budget.document import take
from budget.report.json import results
from tests.network.small import GAS, LIQUID

DOCUMENTED = {
    "source": (
        "kind flow mass_flow required static reserve duty duty_flow available in_hand index discharge_required "
        "suction_required items static_pressure external_total external_static hydraulic_power shaft_power "
        "electrical_power sfp leakage spent budget"
    ),
    "run": (
        "flow mass_flow bore width height hydraulic_diameter area k_total friction fittings junction transition items "
        "static drop leakage"
    ),
    "section": "cumulative differential margin index serves authority authority_low device legs",
    "leg": "leg mass_flow velocity velocity_pressure reynolds regime friction_factor gradient friction junction",
    "terminal": (
        "flow mass_flow circuit drop items static run_out differential margin excess index path authority "
        "authority_low device"
    ),
}
SOURCE, RUN, OF_SECTION, LEG, TERMINAL = (set(keys.split()) for keys in DOCUMENTED.values())
SECTION = RUN | OF_SECTION
DEVICE = {"name", "base", "take_up", "drop", "setting", "signal"}
FLUID = {"name", "density", "viscosity", "specific_heat", "return_density", "return_viscosity"}
FINDING = {"level", "code", "message", "table", "key", "line", "column"}

RUN_TEXT = (
    LIQUID
    + """
[device.DRV]
kv = [[0, 0.001], [4, 1000]]
least_drop = 1
[device.PIV]
holds = "flow"
least_drop = 5
[budget]
plant = 5
[source]
P1 = { item = [{ drop = 6 }] }
[section]
M1 = { from = "P1", bore = 40, length = 2, balance = "DRV" }
[terminal]
T1 = { from = "M1", flow = 0.5, drop = 10, bore = 20, length = 1 }
T2 = { from = "M1", flow = 0.5, drop = 6, balance = "PIV" }
"""
)


def printed(text: str) -> dict[str, Any]:
    """Results as they are read again from JSON."""
    snapshot = take(read_text(text))
    budget = snapshot.budget if snapshot.readable else None
    found = results("1.2.3", "run.toml", snapshot.description, budget, snapshot.findings)
    loaded: dict[str, Any] = json.loads(json.dumps(found, allow_nan=False))
    return loaded


def test_the_object_holds_what_is_documented_and_nothing_else() -> None:
    found = printed(RUN_TEXT)
    assert set(found) == {
        "format", "program", "file", "design", "fluid", "sources", "sections", "terminals", "findings",
    }  # fmt: skip
    assert found["format"] == 1
    assert found["file"] == "run.toml"
    assert found["program"] == {"version": "1.2.3", "catalogue": CATALOGUE_VERSION}
    assert found["design"]["title"] == "Small run"
    assert set(found["design"]) == {"title", "number", "revision", "note", "units"}
    assert set(found["fluid"]) == FLUID


def test_every_record_has_its_documented_keys() -> None:
    found = printed(RUN_TEXT)
    assert set(found["sources"]["P1"]) == SOURCE
    assert set(found["sections"]["M1"]) == SECTION
    assert {key for leg in found["sections"]["M1"]["legs"] for key in leg} == LEG
    assert set(found["terminals"]["T1"]) == TERMINAL
    assert set(found["terminals"]["T1"]["run_out"]) == RUN | {"legs"}
    assert {key for finding in found["findings"] for key in finding} == FINDING


def test_records_stand_in_the_order_of_the_file() -> None:
    found = printed(RUN_TEXT)
    assert list(found["terminals"]) == ["T1", "T2"]
    assert found["sections"]["M1"]["serves"] == ["T1", "T2"]
    assert found["terminals"]["T1"]["path"] == ["M1", "M1"]


def test_figures_are_in_si_base_units() -> None:
    found = printed(RUN_TEXT)
    assert found["sources"]["P1"]["items"] == pytest.approx(6000.0)
    assert found["sources"]["P1"]["flow"] == pytest.approx(0.001)
    assert found["sources"]["P1"]["budget"] == {"plant": 5000.0}
    assert found["sections"]["M1"]["bore"] == pytest.approx(0.04)
    assert found["fluid"]["viscosity"] == pytest.approx(0.001)
    assert sum(found["sources"]["P1"]["spent"].values()) == pytest.approx(found["sources"]["P1"]["required"])


def test_a_device_has_kv_or_k() -> None:
    found = printed(RUN_TEXT)
    device = found["sections"]["M1"]["device"]
    assert set(device) == DEVICE | {"kv"}
    assert device["base"] == pytest.approx(1000.0)
    assert found["terminals"]["T1"]["device"] is None
    holding = found["terminals"]["T2"]["device"]
    assert (holding["kv"], holding["setting"], holding["signal"]) == (None, None, None)


def test_a_damper_has_k() -> None:
    text = GAS + (
        "[device.VD]\nk = [[0, 0.2], [60, 40]]\n[source]\nF1 = {}\n[section]\n"
        'D1 = { from = "F1", size = "200 mm", length = 1, balance = "VD" }\n'
        '[terminal]\nS1 = { from = "D1", flow = 90, drop = 5 }\n'
    )
    device = printed(text)["sections"]["D1"]["device"]
    assert set(device) == DEVICE | {"k"}
    assert device["signal"] is None


def test_what_does_not_exist_is_null() -> None:
    found = printed(RUN_TEXT)
    source = found["sources"]["P1"]
    for key in (
        "available",
        "in_hand",
        "discharge_required",
        "static_pressure",
        "external_total",
        "shaft_power",
        "sfp",
    ):
        assert source[key] is None, key
    assert found["sections"]["M1"]["width"] is None
    assert found["terminals"]["T2"]["run_out"] is None


def test_what_can_t_be_computed_is_null() -> None:
    found = printed(RUN_TEXT.replace("length = 2", 'length = "far"'))
    assert found["sections"]["M1"]["friction"] is None
    assert found["sections"]["M1"]["legs"][0]["friction"] is None
    assert found["sources"]["P1"]["required"] is None
    assert found["sections"]["M1"]["legs"][0]["velocity"] > 0
    wrong = [finding for finding in found["findings"] if finding["level"] == "error"]
    assert [(finding["code"], finding["table"], finding["key"]) for finding in wrong] == [
        ("not-a-quantity", "section.M1", "length")
    ]


def test_a_file_that_is_not_toml_gives_its_findings_alone() -> None:
    found = printed("length = 12.4 m\n")
    assert set(found) == {"format", "program", "file", "findings"}
    assert [(finding["line"], finding["code"]) for finding in found["findings"]] == [(1, "syntax")]


def test_findings_have_their_place() -> None:
    lines = RUN_TEXT.splitlines()
    at = lines.index("[source]")
    found = printed("\n".join([*lines[:at], "[colour]", "red = 1", *lines[at:]]))["findings"]
    finding = next(finding for finding in found if finding["code"] == "unknown-table")
    assert (finding["table"], finding["key"], finding["line"], finding["column"]) == ("colour", "", at + 1, 2)


WATER = LIQUID.replace('name = "custom"\ndensity = 1000\nviscosity = 1\nspecific_heat = 4\n', 'name = "water"\n')
TWO_SOURCES = (
    WATER
    + """
[source]
P1 = { temperature = "60 degC" }
P2 = {}
[terminal]
T1 = { from = "P1", flow = 0.5, drop = 10 }
T2 = { from = "P2", flow = 0.5, drop = 10 }
"""
)


def test_a_source_that_overrides_the_fluid_has_its_own() -> None:
    found = printed(TWO_SOURCES)
    assert found["fluid"]["density"] == pytest.approx(977.77, rel=1e-4)  # 70 degC
    assert found["sources"]["P1"]["fluid"]["density"] == pytest.approx(983.2, rel=1e-4)  # 60 degC
    assert found["sources"]["P1"]["fluid"]["return_density"] == pytest.approx(988.03, rel=1e-4)  # 50 degC
    assert "fluid" not in found["sources"]["P2"]


def test_the_design_s_fluid_is_as_stated_where_every_source_overrides_it() -> None:
    found = printed(TWO_SOURCES.replace("P2 = {}", 'P2 = { temperature = "50 degC" }'))
    assert found["fluid"]["density"] == pytest.approx(977.77, rel=1e-4)
    assert found["fluid"]["return_density"] == pytest.approx(988.03, rel=1e-4)


def test_a_run_without_a_source_has_its_fluid_all_the_same() -> None:
    found = printed(WATER)
    assert found["fluid"]["name"] == "water"
    assert found["fluid"]["density"] == pytest.approx(977.77, rel=1e-4)
    assert found["sources"] == {}
