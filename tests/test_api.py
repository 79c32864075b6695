"""The public API: read, evaluate, apply, save, and results as quantities."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pint
import pytest

import budget
from budget.units import Dimension
from tests.network.small import LIQUID

TEXT = (
    LIQUID
    + """
[source.P1]
reserve = "10 %"
[[source.P1.item]]
drop = "6 kPa"
[section.M1]
from = "P1"
bore = "40 mm"
length = "0 m"
[terminal.T1]
from = "M1"
flow = "1 L/s"
drop = "14 kPa"
"""
)


@pytest.fixture
def file(tmp_path: Path) -> Path:
    path = tmp_path / "run.toml"
    path.write_text(TEXT)
    return path


def test_every_public_name_exists() -> None:
    assert [name for name in budget.__all__ if not hasattr(budget, name)] == []
    assert sorted(budget.__all__) == list(budget.__all__)


def test_a_run_is_read_and_evaluated(file: Path) -> None:
    for path in (file, str(file)):
        run = budget.read(path)
        assert run.text == TEXT
        result = budget.evaluate(run.description)
        assert isinstance(result, budget.Budget)
        assert result.sources["P1"].required == pytest.approx(20_000.0)
        assert result.sources["P1"].duty == pytest.approx(22_000.0)
        assert isinstance(result.sections["M1"], budget.SectionResult)
        assert isinstance(result.terminals["T1"], budget.TerminalResult)


def test_the_lines_that_the_documentation_shows_work() -> None:
    example = Path(__file__).parent.parent / "examples" / "first-look.toml"
    run = budget.read(example)
    result = budget.evaluate(run.description)
    assert budget.quantity(result.sources["P1"].required, "pressure").to("kPa").magnitude == pytest.approx(
        result.sources["P1"].required / 1000
    )
    changed = budget.apply(run, budget.SetValue(("section", "M1", "length"), "9 m"))
    assert budget.evaluate(changed.description).sources["P1"].required > result.sources["P1"].required


def test_what_is_wrong_in_a_file_is_a_finding_and_not_an_exception(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_text(TEXT.replace('"40 mm"', '"40 kg/s"'))
    run = budget.read(path)
    found = budget.evaluate(run.description).findings
    assert [(finding.level, finding.code) for finding in found] == [(budget.Level.ERROR, "wrong-dimension")]
    path.write_text("length = 10 m\n")
    assert [finding.code for finding in budget.read(path).description.findings] == ["syntax"]


def test_a_file_that_can_t_be_read_is_an_exception(tmp_path: Path) -> None:
    with pytest.raises(budget.StorageError):
        budget.read(tmp_path / "gone.toml")
    latin = tmp_path / "latin.toml"
    latin.write_bytes(b"title = '\xfc'\n")
    with pytest.raises(budget.StorageError, match="UTF-8"):
        budget.read(latin)


def test_a_run_is_read_from_text() -> None:
    run = budget.reads(TEXT)
    assert (run.stamp, run.path) == (None, None)
    assert budget.evaluate(run.description).sources["P1"].required == pytest.approx(20_000.0)


def test_an_edit_gives_a_new_run_and_leaves_the_old(file: Path) -> None:
    run = budget.read(file)
    changed = budget.apply(run, budget.SetValue(("terminal", "T1", "drop"), "24 kPa"))
    assert budget.evaluate(changed.description).sources["P1"].required == pytest.approx(30_000.0)
    assert changed.text == TEXT.replace("14 kPa", "24 kPa")
    assert run.text == TEXT
    with pytest.raises(budget.EditError):
        budget.apply(run, budget.Unset(("terminal", "T9")))


@pytest.mark.parametrize(
    "edit",
    [
        budget.SetValue(("section", "M1", "length"), "3 m"),
        budget.SetValue(("section", "M1", "length"), budget.Literal("3")),
        budget.Unset(("source", "P1", "reserve")),
        budget.AddTable(("terminal", "T2"), {"from": "M1", "flow": "1 L/s", "drop": "2 kPa"}),
        budget.CopyTable(("terminal", "T1"), ("terminal", "T2")),
        budget.RemoveTable(("source", "P1", "item")),
        budget.RenameKey(("terminal", "T1"), "T7"),
        budget.MoveTable(("terminal", "T1"), before=("section", "M1")),
        budget.Several((budget.Unset(("source", "P1", "reserve")), budget.RenameKey(("terminal", "T1"), "T7"))),
    ],
)
def test_every_kind_of_edit_can_be_applied(edit: budget.Edit) -> None:
    changed = budget.apply(budget.reads(TEXT), edit)
    assert changed.text != TEXT
    assert not [f for f in budget.evaluate(changed.description).findings if f.level == budget.Level.ERROR]


def test_a_run_is_saved_to_its_file(file: Path) -> None:
    run = budget.apply(budget.read(file), budget.SetValue(("terminal", "T1", "drop"), "24 kPa"))
    saved = budget.save(run, file)
    assert file.read_text() == run.text
    again = budget.save(budget.apply(saved, budget.SetValue(("terminal", "T1", "drop"), "25 kPa")), file)
    assert file.read_text() == again.text


def test_a_run_is_saved_under_another_name(file: Path, tmp_path: Path) -> None:
    run = budget.read(file)
    saved = budget.save(run, tmp_path / "copy.toml")
    assert (tmp_path / "copy.toml").read_text() == TEXT
    assert saved.path == tmp_path / "copy.toml"
    (tmp_path / "copy.toml").write_text("format = 1\n")
    with pytest.raises(budget.ChangedOnDisk):
        budget.save(saved, tmp_path / "copy.toml")
    # The run that was read from the first file may be saved there still.
    budget.save(run, file)


def test_what_somebody_else_wrote_is_not_written_over(file: Path) -> None:
    run = budget.read(file)
    file.write_text("format = 1\n")
    with pytest.raises(budget.ChangedOnDisk):
        budget.save(run, file)
    assert file.read_text() == "format = 1\n"
    budget.save(run, file, over=True)
    assert file.read_text() == TEXT


def test_the_same_file_by_another_name_is_guarded_too(file: Path, tmp_path: Path) -> None:
    link = tmp_path / "link.toml"
    link.symlink_to(file.name)
    run = budget.read(file)
    file.write_text("format = 1\n")
    with pytest.raises(budget.ChangedOnDisk):
        budget.save(run, link)


def test_a_run_from_text_is_saved_where_one_says(tmp_path: Path) -> None:
    saved = budget.save(budget.reads(TEXT), str(tmp_path / "new.toml"))
    assert (tmp_path / "new.toml").read_text() == TEXT
    assert saved.stamp is not None


def test_a_run_whose_text_is_not_toml_is_not_saved(tmp_path: Path) -> None:
    with pytest.raises(budget.StorageError, match="was not written"):
        budget.save(budget.reads("length = 10 m\n"), tmp_path / "new.toml")
    assert not (tmp_path / "new.toml").exists()


@pytest.mark.parametrize(
    ("value", "dimension", "unit", "magnitude"),
    [
        (12_400.0, "pressure", "kPa", 12.4),
        (2989.067, "pressure", "ftH2O", 1.0),
        (0.00042, "flow", "L/s", 0.42),
        (0.00042, "flow", "m**3/h", 1.512),
        (0.42, "mass flow", "kg/h", 1512.0),
        (343.15, "temperature", "degC", 70.0),
        (20.0, "difference", "delta_degF", 36.0),
        (1.5, "velocity", "ft/s", 4.92126),
        (250.0, "gradient", "kPa/m", 0.25),
        (3200.0, "power", "kW", 3.2),
        (0.04, "length", "mm", 40.0),
        (0.001, "viscosity", "mPa*s", 1.0),
        (4186.8, "specific_heat", "Btu/(lb*delta_degF)", 1.0),
        (998.0, "density", "kg/m**3", 998.0),
        (90.0, "angle", "radian", 1.570796),
        (0.15, "fraction", "percent", 15.0),
    ],
)
def test_a_result_becomes_a_quantity(value: float, dimension: str, unit: str, magnitude: float) -> None:
    found = budget.quantity(value, dimension)
    assert isinstance(found, pint.Quantity)
    assert found.to(unit).magnitude == pytest.approx(magnitude, rel=2e-4)


def test_there_is_a_quantity_for_every_dimension() -> None:
    for dimension in Dimension:
        assert budget.quantity(1.0, dimension).magnitude == 1.0
    with pytest.raises(KeyError):
        budget.quantity(1.0, "colour")


def test_quantities_belong_to_the_caller_s_registry() -> None:
    length = budget.quantity(3.0, "length")
    assert (length + pint.get_application_registry().Quantity(1.0, "m")).to("m").magnitude == pytest.approx(4.0)  # type: ignore[no-untyped-call]


def test_pint_is_loaded_when_a_quantity_is_asked_for_and_not_before() -> None:
    code = (
        "import sys, budget; print('pint' in sys.modules); budget.quantity(1, 'length'); print('pint' in sys.modules)"
    )
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert run.stdout.split() == ["False", "True"]
