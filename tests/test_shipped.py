"""What is shipped is found, and a wheel holds it."""

from __future__ import annotations

import shutil
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

from budget.shipped import shipped

ROOT = Path(__file__).parents[1]


@pytest.mark.parametrize(("folder", "name"), [("examples", "first-look.toml"), ("themes", "dark.toml")])
def test_a_shipped_folder_is_found(folder: str, name: str) -> None:
    assert (shipped(folder) / name).is_file()


@pytest.mark.long
def test_a_wheel_holds_examples_themes_manual_and_catalogue(tmp_path: Path) -> None:
    tree = tmp_path / "tree"
    for name in ("budget", "examples", "themes"):
        shutil.copytree(ROOT / name, tree / name, ignore=shutil.ignore_patterns("__pycache__"))
    for name in ("pyproject.toml", "README.md", "DEVELOPERS.md"):
        shutil.copy(ROOT / name, tree)
    subprocess.run(
        [sys.executable, "-m", "pip", "wheel", "--quiet", "--no-deps", "--wheel-dir", str(tmp_path), str(tree)],
        check=True,
    )
    names = set(zipfile.ZipFile(next(tmp_path.glob("*.whl"))).namelist())
    for folder, inside in (("examples", "budget/examples"), ("themes", "budget/themes")):
        for file in (ROOT / folder).rglob("*.toml"):
            assert f"{inside}/{file.relative_to(ROOT / folder)}" in names
    assert {"budget/py.typed", "budget/manual/file.md", "budget/catalogue/pipes.toml"} <= names
