"""budget new: a run to start from that is right as it stands, and never over a file that exists."""

import io
import sys
from pathlib import Path

import pytest

from budget.commands.starts import FLUIDS, start
from budget.description import Level, describe, read_text
from budget.network import evaluate
from tests.commands.calls import Caller


@pytest.mark.parametrize(("kind", "fluid"), [(kind, fluid) for kind, fluids in FLUIDS.items() for fluid in fluids])
def test_every_start_is_in_order(kind: str, fluid: str) -> None:
    for units in ("SI", "IP"):
        text = start(kind, fluid, "IP" if units == "IP" else "SI")
        description = describe(read_text(text))
        budget = evaluate(description)
        assert [finding for finding in budget.findings if finding.level is not Level.NOTE] == []
        (source,) = budget.sources.values()
        assert source.required > 0
        assert source.in_hand is not None
        assert source.in_hand > 0
        assert description.design.units == units
        assert description.fluid.name == fluid
        assert "# This is a design calculation." in text
        assert "competent, licensed" in " ".join(text.replace("#", "").split())
        assert not set("<>@") & set(text)
        assert max(map(len, text.splitlines())) <= 110


def test_a_file_is_written_and_never_over_another(call: Caller, tmp_path: Path) -> None:
    path = tmp_path / "new.toml"
    status, out, _ = call("new", path, "--kind", "air", "--units", "IP")
    assert status == 0
    assert str(path) in out
    assert path.read_text() == start("air", "air", "IP")
    assert call("check", path).status == 0
    dangling = tmp_path / "dangling"
    dangling.symlink_to(tmp_path / "nowhere")
    for taken in (path, tmp_path, dangling):
        assert call("new", taken).status == 2
    assert path.read_text() == start("air", "air", "IP")
    assert not (tmp_path / "nowhere").exists()
    assert "could not be written" in call("new", tmp_path / "no" / "folder.toml").err


def test_a_fluid_must_fit_its_kind(call: Caller, tmp_path: Path) -> None:
    status, _, err = call("new", tmp_path / "a.toml", "--kind", "heating", "--fluid", "air")
    assert status == 2
    assert "not air" in err
    assert call("new", tmp_path / "a.toml", "--fluid", "air").status == 0
    assert 'name = "air"' in (tmp_path / "a.toml").read_text()


class Typist(io.StringIO):
    """Somebody at a terminal who types these lines."""

    def isatty(self) -> bool:
        return True


def test_what_is_not_given_is_asked_for_at_a_terminal(
    call: Caller, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(sys, "stdin", Typist("parrot\nchi\nethylene\nip\n"))
    status, _, err = call("new", tmp_path / "a.toml")
    assert status == 0
    assert "write one of heating" in err
    assert (tmp_path / "a.toml").read_text() == start("chilled", "ethylene glycol", "IP")
    monkeypatch.setattr(sys, "stdin", Typist("\n\n\n"))
    call("new", tmp_path / "b.toml")
    assert (tmp_path / "b.toml").read_text() == start("heating", "water", "SI")


def test_leaving_the_questions_writes_nothing(call: Caller, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", Typist(""))
    assert call("new", tmp_path / "a.toml").status == 130
    assert not (tmp_path / "a.toml").exists()


def test_nobody_is_asked_without_a_terminal(call: Caller, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.StringIO("air\n"))
    assert call("new", tmp_path / "a.toml").status == 0
    assert (tmp_path / "a.toml").read_text() == start("heating", "water", "SI")
