"""`budget check` of the 40-terminal example against starting Python and importing NumPy."""

from __future__ import annotations

import subprocess
import sys
import time
from pathlib import Path

from tests.bench.timing import alternating

EXAMPLE = Path(__file__).parents[2] / "examples" / "three-floor-heating.toml"


def _seconds(*arguments: str) -> float:
    start = time.perf_counter()
    subprocess.run([sys.executable, *arguments], check=True, stdout=subprocess.DEVNULL)
    return time.perf_counter() - start


def report() -> str:
    """Return the ratio, and the times behind it."""
    check, numpy = alternating(
        lambda: _seconds("-m", "budget", "check", str(EXAMPLE)), lambda: _seconds("-c", "import numpy")
    )
    return (
        f"budget check of the 40-terminal example / python -c 'import numpy': {check / numpy:.2f} "
        f"(at most 2.8; {check * 1e3:.0f} ms / {numpy * 1e3:.0f} ms)"
    )
