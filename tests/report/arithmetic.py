"""Working out again what a calculation prints: numbers with their units, as they stand, in SI."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from budget.units import Basis, Dimension, factors

OWN_UNITS = {"m2": 1.0, "ft2": 0.3048**2, "m/s2": 1.0, "ft/s2": 0.3048, "W/(m3/s)": 1.0}
"""Units of a calculation that no quantity of a file has."""

UNITS: dict[str, float] = {
    one.unit: one.factor
    for one in reversed(factors())
    if one.unit and one.basis in (Basis.PLAIN, Basis.MASS) and one.dimension is not Dimension.TEMPERATURE
} | OWN_UNITS

_UNIT = "|".join(map(re.escape, sorted(UNITS, key=len, reverse=True)))
_TOKEN = re.compile(rf"(?<![\w.])(\d+(?:\.\d+)?)(?: ({_UNIT})(?![\w/(]))?")
_FUNCTIONS = {"sqrt": math.sqrt, "log10": math.log10, "exp": math.exp, "max": max, "abs": abs, "pi": math.pi}
_SUM = re.compile(r"-?n( [+-] n)*")


@dataclass(frozen=True)
class Worked:
    """A value in SI and by how much the rounding of the printed numbers can move it."""

    value: float
    slack: float


def worked_out(numbers: str) -> Worked:
    """Work out numbers as printed. One that is written with fewer than five digits is exact, but in a sum."""
    values: list[float] = []
    steps: list[float] = []
    exact: list[bool] = []

    def take(found: re.Match[str]) -> str:
        digits, unit = found.groups()
        scale = UNITS[unit] if unit else 1.0
        decimals = len(digits.partition(".")[2])
        values.append(float(digits) * scale)
        steps.append(0.5 * 10.0**-decimals * scale)
        exact.append(len(digits.replace(".", "").lstrip("0")) < 5)
        return f"n[{len(values) - 1}]"

    formula = _TOKEN.sub(take, numbers)
    if not _SUM.fullmatch(re.sub(r"n\[\d+\]", "n", formula)):
        steps = [0.0 if known else step for step, known in zip(steps, exact, strict=True)]
    formula = re.sub(r"\|([^|]*)\|", r"abs(\1)", formula).replace(" x ", " * ").replace("^", "**")
    assert not re.search(r"[A-Za-z]", re.sub(r"n\[|" + "|".join(_FUNCTIONS), "", formula)), numbers
    code = compile(formula, "numbers", "eval")

    def value(at: list[float]) -> float:
        return float(eval(code, {"__builtins__": {}, "n": at, **_FUNCTIONS}))

    slack = 0.0
    for place, step in enumerate(steps):
        if step:
            up, down = list(values), list(values)
            up[place] += step
            down[place] -= step
            slack += 0.5 * abs(value(up) - value(down))
    return Worked(value(values), slack)


def read(result: str) -> Worked:
    """Read a result as printed, with half of its last digit."""
    text = re.sub(r" \([^()]* of the fluid\)$", "", result)
    found = re.fullmatch(rf"(-?)(\d+(?:\.\d+)?)(?: ({_UNIT}))?", text)
    assert found, result
    sign, digits, unit = found.groups()
    scale = UNITS[unit] if unit else 1.0
    value = float(sign + digits) * scale
    return Worked(value, 0.5 * 10.0 ** -len(digits.partition(".")[2]) * scale)


def agrees(numbers: str, result: str) -> bool:
    """Whether printed numbers, worked out, give the printed result within what rounding leaves open."""
    left, right = worked_out(numbers), read(result)
    return abs(left.value - right.value) <= 1.01 * (left.slack + right.slack) + 1e-9 * abs(right.value)
