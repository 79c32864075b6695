"""`python -m tests.fuzz TARGET`: search for input that a target fails on, with atheris (`pip install '.[fuzz]'`)."""

from __future__ import annotations

import argparse
import importlib.util
import subprocess
import sys
import tempfile
from pathlib import Path

from tests.fuzz import TARGETS

MISSING = 3
"""Exit status where atheris is not installed."""

ROUND = 300
"""Seconds of one round of the search."""


def main() -> int:
    """Return 0 where nothing was found, 1 with the names of the files that fail."""
    parser = argparse.ArgumentParser(prog="python -m tests.fuzz", description=__doc__)
    parser.add_argument("target", choices=TARGETS)
    parser.add_argument("--seconds", type=int, default=60)
    parser.add_argument("--keep", type=Path, help="folder for faults and for the input that reached something new")
    options = parser.parse_args()
    if importlib.util.find_spec("atheris") is None:
        print("atheris is not installed; there is none for every Python")
        return MISSING
    folder = options.keep or Path(tempfile.mkdtemp(prefix=f"fuzz-{options.target}-"))
    faults, found = folder / "faults", folder / "found"
    for place in (faults, found):
        place.mkdir(parents=True, exist_ok=True)
    before = set(faults.iterdir())
    left, failed = options.seconds, False
    while left > 0 and not failed:
        # The search ends its process itself, and its memory grows: it has one of its own, and one after the other.
        seconds = min(left, ROUND)
        command = [sys.executable, "-m", "tests.fuzz.search", options.target, str(seconds), str(faults), str(found)]
        failed = subprocess.run(command, check=False).returncode != 0
        left -= seconds
    new = sorted(set(faults.iterdir()) - before)
    for path in new:
        print(f"fault: {path}")
    print(f"{options.target}: {len(new)} faults in {options.seconds} s")
    return 1 if new or failed else 0


if __name__ == "__main__":
    sys.exit(main())
