"""Reading a catalogue file, once."""

import tomllib
from collections.abc import Mapping
from functools import cache
from pathlib import Path
from typing import Any


@cache
def load(name: str) -> Mapping[str, Any]:
    """Tables of the catalogue file `name` (without .toml). Raises FileNotFoundError where there is none."""
    return tomllib.loads(Path(__file__).with_name(f"{name}.toml").read_text(encoding="utf-8"))
