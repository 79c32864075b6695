"""The rules of the house: what may import what, which codes there are, and what stands at the top."""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path
from typing import NamedTuple

import pytest

from budget.description import CODES

ROOT = Path(__file__).parent.parent
PACKAGE = ROOT / "budget"
HEADLESS = (
    "budget.units",
    "budget.description",
    "budget.catalogue",
    "budget.physics",
    "budget.network",
    "budget.storage",
    "budget.report",
    "budget.document",
)


def modules_of(package: str) -> list[str]:
    """A package with all its modules."""
    path = ROOT / package.replace(".", "/")
    inner = sorted(p.stem for p in path.glob("*.py") if p.stem != "__init__") if path.is_dir() else []
    return [package, *(f"{package}.{name}" for name in inner)]


@pytest.mark.parametrize("package", HEADLESS)
def test_a_headless_package_loads_no_screens_and_nothing_slow(package: str) -> None:
    heavy = ("textual", "rich", "scipy", "pint")
    code = f"import sys, {', '.join(modules_of(package))}; print([m for m in {heavy} if m in sys.modules])"
    run = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=ROOT)
    assert run.stdout.strip() == "[]"


def test_imports_point_one_way() -> None:
    linter = Path(sys.executable).parent / "lint-imports"
    if not linter.exists():
        pytest.skip("import-linter is not installed")
    run = subprocess.run([linter, "--no-cache"], capture_output=True, text=True, check=False, cwd=ROOT)
    assert run.returncode == 0, run.stdout
    assert "0 broken" in run.stdout


class Use(NamedTuple):
    """A finding that the source makes: where, of which code, at which level."""

    place: str
    code: str
    level: str


MAKERS = {"error": "error", "warning": "warning", "note": "note"}
ERRORS = ("wrong", "_wrong", "_refused")
"""Functions that keep an error: of a reading, a section, a terminal, a text."""


def uses_in(path: Path) -> Iterator[Use]:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    imported = {
        alias.asname or alias.name
        for node in ast.walk(tree)
        if isinstance(node, ast.ImportFrom) and (node.module or "").startswith("budget.description")
        for alias in node.names
    }
    for node in ast.walk(tree):
        if not isinstance(node, ast.Call) or not node.args:
            continue
        called = node.func.id if isinstance(node.func, ast.Name) else getattr(node.func, "attr", "")
        level = MAKERS.get(called) if isinstance(node.func, ast.Name) and called in imported else None
        if called in ERRORS:
            level = "error"
        if level is None:
            continue
        for code in constants(node.args[0]):
            yield Use(f"{path.relative_to(ROOT)}:{node.lineno}", code, level)


def constants(node: ast.expr) -> list[str]:
    """The texts that an argument may be: itself, or either side of a choice."""
    if isinstance(node, ast.IfExp):
        return constants(node.body) + constants(node.orelse)
    return [node.value] if isinstance(node, ast.Constant) and isinstance(node.value, str) else []


def uses() -> list[Use]:
    return [use for path in sorted(PACKAGE.rglob("*.py")) for use in uses_in(path)]


def test_findings_are_found_in_the_source() -> None:
    found = uses()
    assert len(found) > 100
    assert {use.level for use in found} == {"error", "warning", "note"}


def test_every_code_that_the_source_uses_is_listed_with_its_level() -> None:
    unlisted = [use for use in uses() if use.code not in CODES]
    assert unlisted == []
    differing = [use for use in uses() if CODES[use.code].level != use.level]
    assert differing == []


def test_every_listed_code_is_used() -> None:
    written: set[str] = set()
    for path in PACKAGE.rglob("*.py"):
        if path.name != "codes.py":
            tree = ast.parse(path.read_text(encoding="utf-8"))
            written |= {n.value for n in ast.walk(tree) if isinstance(n, ast.Constant) and isinstance(n.value, str)}
    assert [code for code in CODES if code not in written] == []


def test_levels_and_meanings_are_whole() -> None:
    assert {code.level for code in CODES.values()} == {"error", "warning", "note"}
    assert [name for name, code in CODES.items() if not code.meaning.endswith(".")] == []


def test_nothing_else_stands_at_the_top() -> None:
    if not (ROOT / ".git").exists():
        pytest.skip("the sources are not a checkout")
    run = subprocess.run(["git", "ls-files"], capture_output=True, text=True, check=True, cwd=ROOT)
    top = {line.partition("/")[0].strip('"') for line in run.stdout.splitlines()}
    expected = {"README.md", "DEVELOPERS.md", "pyproject.toml", "budget", "tests", "examples", "themes"}
    assert {name for name in top if not name.startswith(".")} == expected


REACHES_OUT = {
    "socket",
    "ssl",
    "http",
    "ftplib",
    "smtplib",
    "urllib.request",
    "xmlrpc",
    "asyncio.streams",
    "webbrowser",
}
RUNS_DATA = {"pickle", "marshal", "shelve", "dill", "code", "codeop", "ctypes", "runpy"}
CALLS = {"eval", "exec", "compile", "__import__"}
OF_OS = {"system", "popen"}
OF_OS_AT_THE_START = ("exec", "spawn", "posix_spawn")
STARTERS = ("budget/screens/outside.py", "budget/storage/revisions.py")
"""They alone start a program: the editor that the user has named in the environment, and git."""


def reaches(path: Path) -> Iterator[str]:
    """What a module does that could reach a network, start a program or run what a file says."""
    name = str(path.relative_to(ROOT))
    tree = ast.parse(path.read_text(encoding="utf-8"))
    for_types = {
        inner
        for node in ast.walk(tree)
        if isinstance(node, ast.If) and isinstance(node.test, ast.Name) and node.test.id == "TYPE_CHECKING"
        for inner in ast.walk(node)
    }
    for node in ast.walk(tree):
        if node in for_types:
            continue
        imported: list[str] = []
        if isinstance(node, ast.Import):
            imported = [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom) and not node.level:
            imported = [node.module or "", *(f"{node.module}.{alias.name}" for alias in node.names)]
        refused = REACHES_OUT | RUNS_DATA | ({"subprocess"} if name not in STARTERS else set())
        for module in imported:
            parts = module.split(".")
            if any(".".join(parts[:size]) in refused for size in range(1, len(parts) + 1)):
                yield f"{name}:{getattr(node, 'lineno', 0)}: imports {module}"
            if parts[0] == "os" and len(parts) > 1 and starts_a_program(parts[1]):
                yield f"{name}:{getattr(node, 'lineno', 0)}: imports {module}"
        if isinstance(node, ast.Call):
            called = node.func
            if isinstance(called, ast.Name) and called.id in CALLS:
                yield f"{name}:{node.lineno}: calls {called.id}"
            if any(word.arg == "shell" for word in node.keywords):
                yield f"{name}:{node.lineno}: asks for a shell"
        if isinstance(node, ast.Attribute) and isinstance(node.value, ast.Name):
            if node.value.id == "os" and starts_a_program(node.attr):
                yield f"{name}:{node.lineno}: uses os.{node.attr}"
            if node.value.id == "asyncio" and node.attr.startswith(("open_", "start_", "create_subprocess")):
                yield f"{name}:{node.lineno}: uses asyncio.{node.attr}"


def starts_a_program(name: str) -> bool:
    return name in OF_OS or name.startswith(OF_OS_AT_THE_START)


def test_no_module_reaches_a_network_starts_a_shell_or_runs_what_a_file_says() -> None:
    assert [found for path in sorted(PACKAGE.rglob("*.py")) for found in reaches(path)] == []


@pytest.mark.parametrize(
    "text",
    [
        "import socket",
        "from urllib import request",
        "import urllib.request as u",
        "from http.client import HTTPConnection",
        "import pickle",
        "import subprocess",
        "from os import system",
        "import os\nos.popen('ls')",
        "import os\nos.execv('ls', [])",
        "eval('1')",
        "exec('1')",
        "compile('1', '', 'eval')",
        "run('ls', shell=True)",
        "import asyncio\nasyncio.open_connection('a', 1)",
    ],
)
def test_a_module_that_does_is_found(text: str, monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setattr("tests.test_house.ROOT", tmp_path)
    (tmp_path / "module.py").write_text(text)
    assert len(set(reaches(tmp_path / "module.py"))) >= 1
    (tmp_path / "module.py").write_text("import os, re, urllib.parse\nre.compile('a')\nos.replace('a', 'b')\n")
    assert list(reaches(tmp_path / "module.py")) == []
