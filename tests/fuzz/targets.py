"""The targets by name, each call timed: an input that takes too long is a fault as well."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from pathlib import Path

from tests.description.mutations import TEXTS
from tests.fuzz.edits import edits
from tests.fuzz.reading import reading
from tests.fuzz.spans import spans
from tests.fuzz.units import units

Target = Callable[[bytes], None]

BY_NAME: dict[str, Target] = {"reading": reading, "spans": spans, "edits": edits, "units": units}
LONGEST = 1.0
"""Seconds of the processor that one input may take."""

CORPUS = Path(__file__).with_name("corpus")


class HangError(AssertionError):
    """An input that took too long."""


def run(target: Target, data: bytes) -> None:
    """Run a target. Raises HangError where it took longer than it may."""
    start = time.process_time()
    target(data)
    took = time.process_time() - start
    if took > LONGEST:
        raise HangError(f"it took {took:.1f} s, at most {LONGEST} s are allowed")


def corpus(name: str) -> list[Path]:
    """Return the files of our own that a target starts from, and those that it once failed on."""
    own = sorted((CORPUS / name).iterdir())
    return own + sorted((CORPUS / "reading").iterdir()) if name == "spans" else own


def seeds(name: str) -> Iterator[bytes]:
    """Run through the input that a search starts from: the corpus, and whole runs where a file is read."""
    for path in corpus(name):
        yield path.read_bytes()
    if name != "units":
        for number, text in enumerate(TEXTS):
            yield text.encode() + (b"\0" + bytes(range(number, number + 40)) if name == "edits" else b"")
