"""The search itself: atheris changes input, led by the branches of our readers that it reaches.

A fault is written to a file under the name of what failed, once for each place in the source, and the search goes on.
"""

from __future__ import annotations

import hashlib
import sys
import tempfile
import traceback
from pathlib import Path

SLOWEST = 20
"""Seconds after which one input is given up, and the search with it."""

LONGEST_INPUT = 8192


def search(name: str, seconds: int, faults: Path, found: Path) -> None:
    """Search for so many seconds; the process ends with it."""
    import atheris

    with atheris.instrument_imports(include=["budget", "tomllib"]):
        import tomllib

        import budget.description
        import budget.units

        if name == "telling":
            import budget.network.commissioning
            import budget.report.schedule

        assert tomllib
        assert budget.units
    from tests.fuzz.targets import BY_NAME, HangError, run, seeds

    target, known = BY_NAME[name], set()

    def one(data: bytes) -> None:
        try:
            run(target, data)
        except Exception as wrong:  # noqa: BLE001 (whatever it is, it is a fault)
            place = "hang" if isinstance(wrong, HangError) else place_of(wrong)
            if place in known:
                return
            known.add(place)
            digest = hashlib.sha256(data).hexdigest()[:8]
            path = faults / f"{name}-{place}-{digest}"
            path.write_bytes(data)
            print(f"{path}: {type(wrong).__name__}: {str(wrong)[:500]!r}", flush=True)

    def mutated(data: bytes, longest: int, seed: int) -> bytes:
        """Change mostly the choices, and the text in one of four."""
        text, _, choices = data.rpartition(b"\0")
        if seed % 4:
            choices = atheris.Mutate(choices, max(1, longest - len(text) - 1))
        else:
            text = atheris.Mutate(text, max(1, longest - len(choices) - 1))
        return (text + b"\0" + choices)[:longest]

    with tempfile.TemporaryDirectory() as start:
        for number, seed in enumerate(seeds(name)):
            (Path(start) / str(number)).write_bytes(seed)
        arguments = [
            *(
                sys.argv[0],
                str(found),
                start,
                f"-max_total_time={seconds}",
                f"-timeout={SLOWEST}",
                "-rss_limit_mb=2048",
            ),
            *(f"-max_len={LONGEST_INPUT}", f"-dict={Path(__file__).with_name('tokens.dict')}"),
            *(f"-artifact_prefix={faults}/", "-print_final_stats=1", "-verbosity=1"),
        ]
        atheris.Setup(arguments, one, **({"custom_mutator": mutated} if name == "edits" else {}))
        atheris.Fuzz()


def place_of(wrong: BaseException) -> str:
    """Name the kind of an exception and the last line of ours that it went through."""
    last = traceback.extract_tb(wrong.__traceback__)[-1]
    return f"{type(wrong).__name__}-{Path(last.filename).stem}-{last.lineno}"


if __name__ == "__main__":
    search(sys.argv[1], int(sys.argv[2]), Path(sys.argv[3]), Path(sys.argv[4]))
