"""Worked examples written as runs, and what is read from their results.

Where an example fixes its friction factor, the pipe is given the roughness at which fully turbulent flow has that
factor, and the liquid next to no viscosity.
"""

import json
from collections.abc import Callable, Mapping
from math import pi, sqrt
from pathlib import Path
from typing import Any

import pytest

from budget.commands import main

G = 9.80665
FOOT = 0.3048
INCH = 0.0254
GPM = 3.785411784e-3 / 60
PSI = 6894.757293168
HORSEPOWER = 745.6998715822702
THIN = 1e-9
"""Pa s at which every flow is fully turbulent."""
STEEL = 0.0457e-3
"""Roughness of clean steel pipe, m, of the books."""

Results = Any
Check = Callable[[str], Results]
"""A run as text to what `budget check --json` prints of it."""


class Checker:
    """Calls `budget check --json` in this process."""

    def __init__(self, folder: Path, capsys: pytest.CaptureFixture[str]) -> None:
        self.file, self.capsys = folder / "example.toml", capsys

    def __call__(self, text: str) -> Results:
        self.file.write_text(text, encoding="utf-8")
        self.capsys.readouterr()
        status = main(["check", "--json", str(self.file)])
        printed: Results = json.loads(self.capsys.readouterr().out)
        errors = [finding for finding in printed["findings"] if finding["level"] == "error"]
        assert errors == []
        assert status in (0, 1)
        return printed


def area(bore: float) -> float:
    """Area of a bore, m2."""
    return pi / 4 * bore**2


def roughness_at(factor: float, bore: float) -> float:
    """Roughness in m at which fully turbulent flow has that friction factor: 1/sqrt(f) = -2 log10(e / 3.7 D)."""
    return float(3.7 * bore * 10 ** (-0.5 / sqrt(factor)))


def liquid(rho: float, mu: float) -> str:
    """The head of a run of a liquid with these properties, kg/m3 and Pa s, in an open circuit."""
    return (
        f'format = 1\n[fluid]\nname = "custom"\ndensity = "{rho!r} kg/m3"\nviscosity = "{mu!r} Pa s"\n'
        '[defaults]\nfitting_method = "crane"\ntakeoff = "none"\n'
    )


def chain(
    rho: float, mu: float, flow: float, sections: Mapping[str, tuple[float, str]], source: str = "", rise: float = 0.0
) -> str:
    """A run of sections one behind the other, each with the roughness of its pipe in m and its other keys."""
    parts = [liquid(rho, mu), f"[source.P]\nopen = true\n{source}\n"]
    before = "P"
    for id_, (roughness, keys) in sections.items():
        parts.append(f'[pipe."of {id_}"]\nroughness = "{roughness * 1000!r} mm"\n')
        parts.append(f'[section.{id_}]\nfrom = "{before}"\npipe = "of {id_}"\n{keys}\n')
        before = id_
    parts.append(f'[terminal.T]\nfrom = "{before}"\nflow = "{flow!r} m3/s"\ndrop = "0 Pa"\nrise = "{rise!r} m"\n')
    return "".join(parts)


def bore(metres: float) -> str:
    """The key of a bore."""
    return f'bore = "{metres * 1000!r} mm"'


def length(metres: float) -> str:
    """The key of a length."""
    return f'length = "{metres!r} m"'


def solve(excess: Callable[[float], float], low: float, high: float) -> float:
    """Where a rising function is nothing, by bisection."""
    assert excess(low) < 0.0 < excess(high)
    for _ in range(30):
        middle = 0.5 * (low + high)
        low, high = (middle, high) if excess(middle) < 0.0 else (low, middle)
    return 0.5 * (low + high)


def required(results: Results) -> float:
    """The required pressure of the source, Pa."""
    return float(results["sources"]["P"]["required"])


def leg(results: Results, id_: str, number: int = 0) -> Results:
    """A leg of a section."""
    return results["sections"][id_]["legs"][number]
