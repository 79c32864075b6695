"""Whatever stands in a file, the command line prints plain text; JSON and CSV hold the text and do nothing."""

from __future__ import annotations

import csv
import io
import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from budget.description.schema import KEYED, SINGLE, Text
from tests.commands.calls import Called, Caller
from tests.hostile.payloads import FORMULA, MESS, PAYLOADS, obeyed, piled
from tests.hostile.runs import BASE, ENTRIES, READINGS, Place, filled, free_places, names, places, put, renamed, spelled


def write(folder: Path, data: Mapping[str, Any], name: str = "run.toml") -> Path:
    path = folder / name
    path.write_text(spelled(data), encoding="utf-8", newline="")
    return path


def harmless(called: Called) -> Called:
    """Fail where anything printed would be obeyed, or the command failed itself."""
    for said in (called.out, called.err):
        assert obeyed(said) == set()
        assert not piled(said)
    assert called.status in (0, 1, 2), called.err
    return called


def cells(called: Called) -> list[list[str]]:
    """Read a CSV, and fail where a cell begins a formula; lines end as RFC 4180 has it."""
    assert called.out.count("\r") == called.out.count("\n")
    harmless(Called(called.status, called.out.replace("\r\n", "\n"), called.err))
    rows = list(csv.reader(io.StringIO(called.out)))
    for row in rows[1:]:
        for cell in row:
            for part in cell.split(";"):
                number = part.lstrip().removeprefix("-").replace(".", "", 1).isdigit()
                assert number or not part.lstrip().startswith(FORMULA), cell
    return rows


def everything(call: Caller, path: Path, new: Mapping[str, str], readings: Path) -> dict[str, Called]:
    """Call every command that reads a run; return what each printed."""
    ids = [new.get(id_, id_) for id_ in ("P1", "M1", "T1")]
    told = {
        "check": call("check", path),
        "check json": call("check", path, "--json"),
        "report": call("report", path),
        "balance": call("balance", path, "--readings", readings),
        "balance json": call("balance", path, "--json", "--readings", readings),
        "flows": call("flows", path),
        "flows json": call("flows", path, "--json", f"--case={new.get('night', 'night')}"),
        "changes": call("changes", path, readings),
        "changes back": call("changes", readings, path),
        "changes json": call("changes", path, readings, "--json"),
        "propose": call("balance", path, f"--propose={ids[2]}"),
        **{f"explain {id_}": call("explain", path, "--", id_) for id_ in ids},
        "no such id": call("explain", path, "--", f"{ids[0]}x"),
        "no such case": call("flows", path, f"--case={ids[0]}x"),
    }
    for called in told.values():
        harmless(called)
    cells(call("balance", path, "--csv", "--readings", readings))
    return told


@pytest.mark.parametrize(
    "payload",
    [
        pytest.param(MESS, id="all of them"),
        *(pytest.param(text, id=name, marks=pytest.mark.long) for name, text in PAYLOADS.items()),
    ],
)
def test_a_text_in_every_free_place_is_printed_plain(payload: str, call: Caller, tmp_path: Path) -> None:
    new = names(payload)
    path = write(tmp_path, filled(payload))
    readings = write(tmp_path, renamed(put(READINGS, (("reading", "T1", "note"), payload)), new), "readings.toml")
    told = everything(call, path, new, readings)
    found = json.loads(told["check json"].out)
    assert found["design"]["title"] == payload
    assert found["design"]["note"] == payload
    assert set(found["sections"]) == {new[id_] for id_ in ("M1", "B1", "B2", "C2")}
    assert found["terminals"][new["T1"]]["device"]["name"] == new["V1"]
    rows = json.loads(told["balance json"].out)["schedule"]
    assert [row for row in rows if row["title"] == payload and row["location"] == payload]
    assert [row for row in rows if row["measured"] and row["measured"]["note"] == payload]
    flows = json.loads(told["flows json"].out)
    assert set(flows["terminals"]) == {new[id_] for id_ in ("T1", "T2", "T3")}
    assert [one for one in found["findings"] if one["level"] == "error"] == []


@pytest.mark.parametrize("payload", [MESS, *(PAYLOADS[name] for name in ("format", "brace", "long"))])
def test_a_text_where_something_else_was_due_is_told_plain(payload: str, call: Caller, tmp_path: Path) -> None:
    """Each table in which every value is wrong: findings quote what stands there."""
    for table in (*SINGLE, *KEYED):
        inner = [(place, payload) for place, _ in places() if place[0] == table]
        path = write(tmp_path, put(BASE, *inner))
        found = json.loads(harmless(call("check", path, "--json")).out)
        assert [one for one in found["findings"] if one["table"].startswith(table)]
        harmless(call("check", path))
        harmless(call("report", path))


@pytest.mark.long
@pytest.mark.parametrize(("place", "spec"), list(places()), ids=lambda value: str(value)[:60])
def test_one_text_in_one_place_is_printed_plain(place: Place, spec: Any, call: Caller, tmp_path: Path) -> None:
    readings = write(tmp_path, READINGS, "readings.toml")
    for payload in (MESS, PAYLOADS["format"]):
        path = write(tmp_path, put(BASE, (place, payload)))
        told = everything(call, path, {}, readings)
        found = json.loads(told["check json"].out)
        assert isinstance(spec, Text) or [one for one in found["findings"] if one["level"] == "error"]


@pytest.mark.parametrize("payload", [MESS, PAYLOADS["format"], PAYLOADS["long"]])
def test_a_text_as_a_key_is_told_plain(payload: str, call: Caller, tmp_path: Path) -> None:
    readings = write(tmp_path, {payload: 1, "reading": {payload: {"flow": 1}, "T1": {payload: 1}}}, "readings.toml")
    keys: list[Place] = [(payload,), *((name, payload) for name in SINGLE)]
    keys += [(name, ENTRIES[name], payload) for name in KEYED]
    keys += [("section", "M1", inner, payload) for inner in ("fittings", "accept")]
    keys += [("section", "M1", inner, 0, payload) for inner in ("item", "fitting")]
    keys += [("case", "night", inner, payload) for inner in ("share", "stroke", "source")]
    for key in keys:
        path = write(tmp_path, put(BASE, (key, 1)))
        status, out, _ = harmless(call("check", path))
        assert status == 2
        assert ": error " in out
        harmless(call("check", path, "--json"))
        harmless(call("balance", path, "--readings", readings))


CONTROLS = [name for name, text in PAYLOADS.items() if obeyed(text) - set("\xa0\ue000\U000f0000\ufffe")]


@pytest.mark.parametrize(
    ("name", "table"),
    [
        pytest.param(name, table, marks=() if name == CONTROLS[place % len(CONTROLS)] else pytest.mark.long)
        for name in CONTROLS
        for place, table in enumerate(KEYED)
    ],
)
def test_an_id_with_a_control_character_is_refused(name: str, table: str, call: Caller, tmp_path: Path) -> None:
    id_ = f"a{PAYLOADS[name][:60]}"
    path = write(tmp_path, renamed(BASE, {ENTRIES[table]: id_}) if table != "link" else put(BASE, ((table, id_), {})))
    status, out, _ = harmless(call("check", path))
    assert status == 2
    assert "error control-character: the ID has a control character; rename it without" in out


@pytest.mark.parametrize("unit", ["L/s\u001f", "\u001eL/s", "L/s\n", "\u2028L/s", "L\u00a0/\u3000s", "\tL/s\x85"])
def test_a_unit_with_blanks_of_any_kind_is_printed_plain(unit: str, call: Caller, tmp_path: Path) -> None:
    readings = write(tmp_path, READINGS, "readings.toml")
    path = write(tmp_path, put(BASE, (("display", "flow"), unit), (("display", "power"), "kW\u001f\n")))
    told = everything(call, path, {}, readings)
    assert "L/s" in told["report"].out.replace(" ", "")


def test_what_is_called_is_told_plain(call: Caller, tmp_path: Path, run_file: Path) -> None:
    text = MESS.replace("\x00", "")
    folder = tmp_path / "\x1b[31m\u202e\udcff"
    folder.mkdir()
    path = folder / "run.toml"
    path.write_bytes(run_file.read_bytes())
    for arguments in (
        (text,), (f"--{text}",), (f"{text}.toml",), ("help", text),
        *((name, text) for name in ("check", "report", "flows", "balance", "edit", "unset", "set", "explain")),
        ("manual", text),
        *((name, f"--{text}") for name in ("check", "edit", "new", "config", "completion", "balance")),
        *(("list", kind, text) for kind in ("pipes", "ducts", "fittings", "fluids", "limits", "units", "examples")),
        ("list", text), ("completion", text), ("new", path, "--kind", text), ("new", path), ("check", path, text),
        ("changes", text), ("changes", path, text), ("changes", path, f"--revision={text}"), ("changes", path),
        ("changes", path, run_file), ("changes", run_file, path, "--json"),
        ("set", run_file, text, "1"), ("set", run_file, f"design.{text}", "1"), ("unset", run_file, text),
        ("set", path, "design.title", text), ("set", path, "design.note", '"\\u001b[31m"'),
        ("set", path, "design.units", text),
        ("unset", path, "design.title"), ("explain", text), ("explain", path, text), ("flows", path, "--case", text),
        ("balance", path, "--propose", text), ("balance", path, "--authority", text),
        ("balance", path, "--readings", text),
        ("balance", path, "--readings", path), ("report", path), ("check", path, "--json"),
        ("new", folder / "new.toml"), ("new", folder / "none" / "new.toml"), ("explain", f"{text}.toml"),
    ):  # fmt: skip
        harmless(call(*arguments))
    assert (folder / "new.toml").exists()
    assert json.loads(call("check", path, "--json").out)["file"] == str(path)


def test_the_change_of_a_hostile_file_is_shown_plain(call: Caller, tmp_path: Path) -> None:
    path = write(tmp_path, filled(MESS))
    path.write_text(
        f"# {PAYLOADS['override']}\u200b\n" + path.read_text("utf-8").replace("format = 1", "format = 1 # \u202e")
    )
    status, out, _ = harmless(call("set", path, "format", "1"))
    for value in (MESS.replace("\x00", ""), "=1", "{0}"):
        status, out, _ = harmless(call("set", path, "design.title", value))
        assert status == 0
        assert out.splitlines()[1].startswith("- title = ")
    assert json.loads(call("check", path, "--json").out)["design"]["title"] == "{0}"


def test_settings_are_told_plain(call: Caller, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    home = tmp_path / "\x1b[31m\u202e"
    monkeypatch.setenv("XDG_CONFIG_HOME", str(home))
    harmless(call("config", "--path"))
    harmless(call("config", "--check"))
    themes = home / "budget" / "themes"
    themes.mkdir(parents=True)
    (themes / "\x1b[2J\u202e[bold].toml").write_text("x = 1")
    for settings_text in (
        {"theme": MESS}, {MESS: 1}, {"keys": {MESS: MESS}}, {"keys": {"undo": MESS}}, {"theme": "\x1b[2J\u202e[bold]"},
        {"keys": MESS},
    ):  # fmt: skip
        write(home / "budget", settings_text, "config.toml")
        status, out, _ = harmless(call("config", "--check"))
        assert status == 2 or "\ufffd" in out
    (home / "budget" / "config.toml").write_text("\x1b[2J = \u202e")
    assert harmless(call("config", "--check")).status == 2


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(text=st.text(st.characters(exclude_categories=["Cs"]), max_size=60))
def test_any_text_is_printed_plain(text: str, call: Caller, tmp_path: Path) -> None:
    texts = [(place, text) for place in free_places()]
    path = write(tmp_path, put(BASE, *texts))
    harmless(call("report", path))
    harmless(call("check", path))
    rows = cells(call("balance", path, "--csv"))
    assert [row for row in rows if row[1] == "T1"]
    assert json.loads(harmless(call("check", path, "--json")).out)["design"]["title"] == text
