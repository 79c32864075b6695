"""The targets by name, each call timed: an input that takes too long is a fault as well."""

from __future__ import annotations

import contextlib
import signal
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from random import Random
from types import FrameType

from tests.description.mutations import TEXTS
from tests.description.tangles import tangle
from tests.fuzz.edits import edits
from tests.fuzz.reading import reading
from tests.fuzz.spans import spans
from tests.fuzz.telling import telling
from tests.fuzz.units import units

Target = Callable[[bytes], None]

BY_NAME: dict[str, Target] = {
    "reading": reading, "telling": telling, "spans": spans, "edits": edits, "units": units,
}  # fmt: skip
LONGEST = 1.0
"""Seconds of the processor that one input may take."""

GIVEN_UP = 15.0
"""Seconds of the processor after which an input is not waited for any more."""

TANGLES = 20
"""Runs in which anything hangs on anything, with which a search begins."""

CORPUS = Path(__file__).with_name("corpus")


class HangError(AssertionError):
    """An input that took too long."""


def run(target: Target, data: bytes) -> None:
    """Run a target. Raises HangError where it took longer than it may."""
    start = time.process_time()
    with _given_up():
        target(data)
    took = time.process_time() - start
    if took > LONGEST:
        raise HangError(f"it took {took:.1f} s, at most {LONGEST} s are allowed")


@contextlib.contextmanager
def _given_up() -> Iterator[None]:
    """Raise HangError in the midst of what would never end."""

    def give_up(_signal: int, _frame: FrameType | None) -> None:
        raise HangError(f"it was given up after {GIVEN_UP:.0f} s")

    before = signal.signal(signal.SIGPROF, give_up)
    signal.setitimer(signal.ITIMER_PROF, GIVEN_UP, 1.0)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_PROF, 0.0)
        signal.signal(signal.SIGPROF, before)


def corpus(name: str) -> list[Path]:
    """Return the files of our own that a target starts from, and those that it once failed on."""
    own = sorted((CORPUS / name).iterdir()) if (CORPUS / name).is_dir() else []
    return own + sorted((CORPUS / "reading").iterdir()) if name in ("spans", "telling") else own


def seeds(name: str) -> Iterator[bytes]:
    """Run through the input that a search starts from: the corpus, and whole runs where a file is read."""
    for path in corpus(name):
        yield path.read_bytes()
    if name != "units":
        for number, text in enumerate(TEXTS):
            yield text.encode() + (b"\0" + bytes(range(number, number + 40)) if name == "edits" else b"")
    if name in ("reading", "telling"):
        for number in range(TANGLES):
            yield tangle(Random(number)).encode()
