"""The published figures beside this module: tables as CSV, worked examples as TOML, sources included."""

import csv
import tomllib
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

DATA = Path(__file__).with_name("data")


@cache
def table(name: str) -> list[dict[str, str]]:
    """Rows of a CSV table."""
    with (DATA / f"{name}.csv").open(newline="", encoding="utf-8") as file:
        return list(csv.DictReader(file))


def column(name: str, heading: str) -> NDArray[np.float64]:
    """One column of a CSV table as numbers; an empty cell is nan."""
    return np.array([float(row[heading] or "nan") for row in table(name)])


@cache
def examples() -> dict[str, dict[str, Any]]:
    """Worked examples by id, each with source, known_from, inputs, expected values and tolerance."""
    text = (DATA / "worked-examples.toml").read_text(encoding="utf-8")
    return {example["id"]: example for example in tomllib.loads(text)["example"]}
