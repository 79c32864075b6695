"""`budget new`: a small run to start from, with what is not said asked for where somebody is there to answer."""

from __future__ import annotations

import argparse
import sys
from collections.abc import Sequence
from pathlib import Path

from budget.commands.dispatch import OK, REFUSED, say
from budget.commands.starts import FLUIDS, KINDS, start
from budget.report.plain import plain
from budget.storage import StorageError, save

FLUID_NAMES = tuple(dict.fromkeys(name for names in FLUIDS.values() for name in names))
SYSTEMS = ("SI", "IP")


def add_arguments(parser: argparse.ArgumentParser) -> None:
    """Take the file and what the run is."""
    parser.add_argument("file", metavar="FILE", help="the file to write; it must not exist")
    parser.add_argument("--kind", choices=KINDS, help="the circuit; asked for at a terminal, else heating")
    parser.add_argument("--fluid", choices=FLUID_NAMES, help="asked for at a terminal, else water, or air")
    parser.add_argument("--units", choices=SYSTEMS, help="asked for at a terminal, else SI")


def run(options: argparse.Namespace) -> int:
    """Write the run; 2 where the file exists or can't be written."""
    path = Path(options.file)
    if path.exists() or path.is_symlink():
        say(f"{path} exists already; name another file")
        return REFUSED
    kind = options.kind or ("air" if options.fluid == "air" else _ask("kind of circuit", KINDS))
    if options.fluid is not None and options.fluid not in FLUIDS[kind]:
        say(f"a run of kind {kind} holds {' or '.join(FLUIDS[kind])}, not {options.fluid}")
        return REFUSED
    fluid = options.fluid or _ask("fluid", FLUIDS[kind])
    units = options.units or _ask("units", SYSTEMS)
    content = start(kind, fluid, "IP" if units == "IP" else "SI").encode("utf-8")
    try:
        save(path, content, None)  # refuses what came up in the meantime
    except StorageError as wrong:
        say(str(wrong))
        return REFUSED
    name = plain(options.file)
    print(f"{name} was written; open it with: budget edit {name}")
    return OK


def _ask(what: str, choices: Sequence[str]) -> str:
    """Return what somebody at the terminal chooses, the first where nobody is there or nothing is typed."""
    if len(choices) == 1 or sys.stdin is None or not sys.stdin.isatty():
        return choices[0]
    while True:
        print(f"{what} ({', '.join(choices)}) [{choices[0]}]: ", end="", file=sys.stderr, flush=True)
        line = sys.stdin.readline()
        if not line:
            raise KeyboardInterrupt
        typed = line.strip().lower()
        if not typed:
            return choices[0]
        begun = [choice for choice in choices if choice.lower().startswith(typed)]
        if len(begun) == 1:
            return begun[0]
        print(f"write one of {', '.join(choices)}", file=sys.stderr)
