"""budget set and budget unset: one key changes, everything else stays, and a wrong change is refused."""

import os
import stat
from pathlib import Path

import pytest

from tests.commands.calls import RUN, Caller


def test_a_length_is_set_and_nothing_else_changes(call: Caller, run_file: Path) -> None:
    status, out, err = call("set", run_file, "section.M1.length", "9 m")
    assert (status, err) == (0, "")
    assert run_file.read_text() == RUN.replace('"7.5 m"', '"9 m"')
    place, before, after, required = out.splitlines()
    line = RUN[: RUN.index('"7.5 m"')].count("\n") + 1
    assert place == f"{run_file}:{line}"
    assert before == '- length = "7.5 m"   # measured on site'
    assert after == '+ length = "9 m"   # measured on site'
    assert required.startswith("P1: required ")
    assert " kPa -> " in required
    assert "(+0." in required


@pytest.mark.parametrize(
    ("key", "value", "line"),
    [
        ("section.M1.length", "9", "length = 9   # measured on site"),
        ("section.M1.paired", "true", "paired = true"),
        ("design.title", "Weir house", 'title = "Weir house"'),
        ("design.number", '"12"', 'number = "12"'),
        ('terminal."R 2".load', "1.7 kW", 'load = "1.7 kW"'),
        ("source.P1.item.0.drop", "7 kPa", 'drop = "7 kPa"'),
        ("source.P1.item[0].drop", "7 kPa", 'drop = "7 kPa"'),
        ("section.M1.fittings", '{ "elbow 90" = 2 }', 'fittings = { "elbow 90" = 2 }'),
        ("design.note", "", 'note = ""'),
    ],
)
def test_values_are_toml_where_they_can_be_and_texts_else(
    call: Caller, run_file: Path, key: str, value: str, line: str
) -> None:
    assert call("set", run_file, key, value).status == 0
    assert line in run_file.read_text().splitlines()


def test_a_key_is_taken_out_with_its_line(call: Caller, run_file: Path) -> None:
    status, out, _ = call("unset", run_file, "terminal.R1.title")
    assert status == 0
    assert run_file.read_text() == RUN.replace('title = "Hall"\n', "")
    assert '- title = "Hall"' in out
    assert "unchanged" in out


@pytest.mark.parametrize(
    ("command", "said"),
    [
        (("set", "section.M1.lenght", "9 m"), "unknown-key"),
        (("set", "section.M1.length", "9 kPa"), "wrong-dimension"),
        (("set", "section.M1.from", "M7"), "dangling"),
        (("set", "terminal.R1.drop", "-3"), "range"),
        (("set", "section.M1.takeoff", "sideways"), "choice"),
        (("set", "section.M9.length", "3 m"), "error"),
        (("set", "section..M1", "3 m"), "a key was due"),
        (("set", "section.M1.length.a", "3 m"), "not changed"),
        (("set", "source.P1.item.5.drop", "3 kPa"), "not changed"),
        (("unset", "section.M1.length"), "missing"),
        (("unset", "section.M1"), "dangling"),
        (("unset", "section.M1.nothing"), "not changed"),
    ],
)
def test_a_change_that_would_be_wrong_leaves_the_file_alone(
    call: Caller, run_file: Path, command: tuple[str, ...], said: str
) -> None:
    os.utime(run_file, ns=(10**18, 10**18))
    before = run_file.stat()
    status, out, err = call(command[0], run_file, *command[1:])
    after = run_file.stat()
    assert (status, out) == (2, "")
    assert said in err
    assert run_file.read_text() == RUN
    assert (after.st_mtime_ns, after.st_ino) == (before.st_mtime_ns, before.st_ino)
    assert len(list(run_file.parent.iterdir())) == 1


def test_an_error_that_was_there_before_does_not_stand_in_the_way(call: Caller, run_file: Path) -> None:
    run_file.write_text(RUN.replace('"2.4 kW"', '"1.4 parrots"'))
    assert call("set", run_file, "design.title", "Mill").status == 0
    assert call("set", run_file, "terminal.R1.load", "2 parrots").status == 2
    assert call("set", run_file, "terminal.R1.load", "2 kW").status == 0
    assert call("check", run_file).status == 0


def test_an_error_that_moves_in_its_list_is_not_new(call: Caller, run_file: Path) -> None:
    run_file.write_text(RUN.replace("[section.M1]", '[[source.P1.item]]\nname = "x"\nkv = -1\n\n[section.M1]'))
    assert call("unset", run_file, "source.P1.item.0").status == 0


def test_new_warnings_are_told(call: Caller, run_file: Path) -> None:
    status, out, _ = call("set", run_file, "source.P1.available", "1 kPa")
    assert status == 0
    assert ": warning nothing-in-hand: " in out


def test_line_ends_and_mode_are_kept(call: Caller, run_file: Path) -> None:
    run_file.write_bytes(RUN.replace("\n", "\r\n").encode())
    run_file.chmod(0o640)
    status, out, _ = call("set", run_file, "section.M1.length", "9 m")
    assert status == 0
    assert run_file.read_bytes() == RUN.replace('"7.5 m"', '"9 m"').replace("\n", "\r\n").encode()
    assert "\r" not in out
    assert stat.S_IMODE(run_file.stat().st_mode) == 0o640
    assert call("unset", run_file, "design.number").status == 0
    assert b"\n" not in run_file.read_bytes().replace(b"\r\n", b"")


def test_what_is_set_already_is_not_written(call: Caller, run_file: Path) -> None:
    os.utime(run_file, ns=(10**18, 10**18))
    status, out, _ = call("set", run_file, "section.M1.length", "7.5 m")
    assert status == 0
    assert "nothing changed" in out
    assert run_file.stat().st_mtime_ns == 10**18


def test_what_can_not_be_read_can_not_be_changed(call: Caller, tmp_path: Path) -> None:
    broken = tmp_path / "broken.toml"
    broken.write_text("a = [")
    for file in (broken, tmp_path / "none.toml", Path("-")):
        status, out, err = call("set", file, "a", "1")
        assert (status, out) == (2, "")
        assert err
    assert broken.read_text() == "a = ["
    assert not (tmp_path / "none.toml").exists()


def test_control_characters_in_changed_lines_are_not_printed(call: Caller, run_file: Path) -> None:
    run_file.write_text(RUN.replace('"Hall"', '"Hall" # \u202eevil'))
    out = call("unset", run_file, "terminal.R1.title").out
    assert "evil" in out
    assert "\u202e" not in out
