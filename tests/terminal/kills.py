"""The app killed outright at some moment of edits and saves: by hand, as many times as one likes.

`python -m tests.terminal.kills --runs 300` prints a table; each run is told by its seed.
"""

from __future__ import annotations

import argparse
import os
import random
import signal
import sys
import tempfile
import time
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from tests.terminal.parallel import many
from tests.terminal.traced import SMALL, Note, Run

PROMISE = 5.0
"""Seconds after which a committed edit is not lost any more."""

LAST = 9.0
"""Seconds after which it is killed at the latest."""

MANNERS = ("now and then", "without a pause", "writing text", "at a save", "at a record", "hard link")


@dataclass(slots=True)
class Outcome:
    """How one run was left."""

    manner: str
    seed: int
    edits: int = 0
    saves: int = 0
    lost: float = 0.0
    """Seconds between the first edit that is lost and the kill; 0 where none is."""
    left: bool = False
    """Whether a temporary file was left."""
    problems: list[str] = field(default_factory=list)


def kill(manner: str, seed: int, *, again: bool = False, last: float = LAST) -> Outcome:
    """Edit and save for a while, kill the app, and look at what is left; `again` opens the run once more."""
    outcome = Outcome(manner, seed)
    with tempfile.TemporaryDirectory(prefix="kill-") as folder:
        try:
            _kill(outcome, Path(folder), random.Random(seed), again=again, last=last)
        except Exception as wrong:  # noqa: BLE001 - one of many runs; what went wrong is told in the table
            outcome.problems.append(f"{type(wrong).__name__}: {wrong}")
    return outcome


def _kill(outcome: Outcome, folder: Path, chance: random.Random, *, again: bool, last: float) -> None:
    if outcome.manner == "hard link":
        (folder / "run.toml").write_text(SMALL)
        (folder / "other.toml").hardlink_to(folder / "run.toml")
    aimed = outcome.manner in ("at a save", "at a record")
    run = Run(folder, shell=False, slow=chance.choice((0.05, 0.2)) if aimed else 0.0)
    driver = _Driver(run, chance)
    try:
        driver.play(outcome.manner, last)
        os.kill(run.pid, signal.SIGKILL)
        killed = time.monotonic()
        run.wait_for_end(read=True)
        outcome.problems += driver.problems(killed)
        _check(run, outcome, killed)
    finally:
        run.close()
    if again and not outcome.problems:
        _check_again(run, outcome)


class _Driver:
    """Types edits and saves, and remembers when the screen showed them."""

    def __init__(self, run: Run, chance: random.Random) -> None:
        self._run, self._chance, self._session = run, chance, run.session
        self._shown: list[tuple[float, str]] = []

    def play(self, manner: str, last: float) -> None:
        """Edit and save in some manner, up to the moment of the kill, after so many seconds at the latest."""
        self._session.press("down", "down")
        self._until = time.monotonic() + self._chance.uniform(0.0, last)
        if manner == "writing text":
            self._session.send("T")
            self._session.settle(0.2)
        while time.monotonic() < self._until:
            if manner == "writing text":
                self._write()
            elif manner == "without a pause":
                self._edit()
                self._wait(self._chance.uniform(0.05, 0.5))
            else:
                self._edit()
                if self._chance.random() < 0.4:
                    self._session.send("ctrl+s")
                self._wait(self._chance.choice((0.0, 0.3, 1.3, 2.0)) * self._chance.random())
        if manner == "at a save":
            self._aim(self._run.folder, ".run.toml.*.saving", "ctrl+s")
        elif manner == "at a record":
            self._aim(self._run.folder / "state" / "budget" / "unsaved", ".*.saving")
        elif manner == "hard link":
            self._edit()
            self._session.send("ctrl+s")
            time.sleep(self._chance.uniform(0.0, 0.06))

    def problems(self, killed: float) -> list[str]:
        """Compare what the screen showed with what the app says that it held: it must have held it before."""
        notes = self._run.texts("committed")
        return [
            f"{value} stood on the screen and in no text"
            for shown, value in self._shown
            if not any(note.time <= shown <= killed and value in note.text for note in notes)
        ]

    def _edit(self) -> None:
        value = f"{self._chance.uniform(1, 60):.5f}"
        self._run.edit(value)
        if self._chance.random() < 0.3:
            until = time.monotonic() + 1.0
            while not (shown := self._shows(value)) and time.monotonic() < until:
                self._session.read(0.01)
            self._session.settle(0.05, 0.5)  # half a frame may have come, and the field is painted last
            if shown and self._shows(value):
                self._shown.append((time.monotonic(), f'"{value} m"'))

    def _shows(self, value: str) -> bool:
        """Whether the row shows a length, and no field is open any more: what is in one is shown before it is taken."""
        row = next((line.split() for line in self._session.lines if line.startswith("» M1")), [])
        hidden = any(
            words in self._session.text for words in ("length =", "saved /")
        )  # a field, or what is told over it
        return row[4:5] == [f"{float(value):.1f}"] and not hidden

    def _write(self) -> None:
        self._session.send(self._chance.choice(("#", " a", "b ", "cd", "#e\r#")))
        self._wait(self._chance.uniform(0.02, 0.4))

    def _wait(self, seconds: float) -> None:
        until = min(time.monotonic() + seconds, self._until)
        while (left := until - time.monotonic()) > 0:
            self._session.read(left)

    def _aim(self, folder: Path, pattern: str, *keys: str) -> None:
        """Edit, and wait until a temporary file is there: on a busy machine one may come and go unseen."""
        for _ in range(5):
            self._edit()
            self._session.send(*keys)
            until = time.monotonic() + 2.5
            while time.monotonic() < until:
                if any(folder.glob(pattern)):
                    time.sleep(self._chance.choice((0.0, 0.0, 0.001, 0.02, 0.1)))
                    return
                self._session.read(0.0)
        raise TimeoutError("nothing was written")


def _check(run: Run, outcome: Outcome, killed: float) -> None:
    begun = Note(run.notes[0].time, "committed", SMALL)
    commits = [begun, *run.texts("committed")]
    asked = [note.text for note in run.texts("saving")]
    outcome.edits, outcome.saves = len(commits) - 1, len(run.texts("saved"))
    on_disk = run.file.read_bytes()
    whole = {text.encode() for text in (SMALL, *asked)}
    if on_disk not in whole:
        outcome.problems.append("the file is not whole")
    outcome.problems += [record for record in run.records if isinstance(record, str)]
    held = [on_disk.decode(), *run.kept]
    latest = max(number for number, note in enumerate(commits) if note.text in held)
    if latest + 1 < len(commits):
        outcome.lost = killed - commits[latest + 1].time
        if outcome.lost > PROMISE:
            outcome.problems.append(f"an edit of {outcome.lost:.2f} s before is lost")
    outcome.left = bool(_temporary(run))


def _temporary(run: Run) -> list[Path]:
    return [*run.folder.glob(".*.saving"), *(run.folder / "state" / "budget" / "unsaved").glob(".*.saving")]


def _check_again(run: Run, outcome: Outcome) -> None:
    """Open the run once more, when what was left behind is two hours old."""
    for file in _temporary(run):
        os.utime(file, (time.time() - 7200,) * 2)
    on_disk = run.file.read_bytes().decode()
    offered = [text for text in run.kept if text != on_disk]
    once_more = Run(run.folder, shell=False, wait="were left behind" if offered else "required")
    try:
        if offered:
            once_more.session.send("enter")
            once_more.session.wait_for("recovered, not saved yet")
            if once_more.committed != offered[0]:
                outcome.problems.append("another text was recovered")
        until = time.monotonic() + 3.0
        while _temporary(run) and time.monotonic() < until:
            once_more.session.read(0.02)
        outcome.problems += [f"{file.name} was not swept" for file in _temporary(run)]
    finally:
        once_more.close()


# Many at once


def several(runs: int, *, first: int = 0, at_once: int = 6) -> list[Outcome]:
    """Do a number of runs, in each manner in turn; every fourth is opened again."""
    jobs = [(_one, (MANNERS[seed % len(MANNERS)], seed)) for seed in range(first, first + runs)]
    return many(jobs, at_once)


def _one(manner: str, seed: int) -> Outcome:
    return kill(manner, seed, again=seed % 4 == 0)


def table(outcomes: Sequence[Outcome]) -> list[str]:
    """Lay out how the runs were left, one line a manner."""
    lines = [f"{'killed':<18}{'runs':>6}{'well':>6}{'edits':>8}{'saves':>8}{'left over':>11}{'lost at most, s':>17}"]
    for manner in dict.fromkeys(outcome.manner for outcome in outcomes):
        of = [outcome for outcome in outcomes if outcome.manner == manner]
        counts = (sum(one.edits for one in of), sum(one.saves for one in of), sum(one.left for one in of))
        well = sum(not outcome.problems for outcome in of)
        lost = max(outcome.lost for outcome in of)
        lines.append(f"{manner:<18}{len(of):>6}{well:>6}{counts[0]:>8}{counts[1]:>8}{counts[2]:>11}{lost:>17.2f}")
    return lines


def main() -> int:
    """Do as many runs as are asked for and print what came out."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--runs", type=int, default=30)
    parser.add_argument("--first", type=int, default=0, help="the first seed")
    parser.add_argument("--at-once", type=int, default=6)
    options = parser.parse_args()
    outcomes = several(options.runs, first=options.first, at_once=options.at_once)
    for outcome in outcomes:
        if outcome.problems:
            print(f"{outcome.manner}, seed {outcome.seed}: {'; '.join(outcome.problems)}")
    print("\n".join(table(outcomes)))
    return int(any(outcome.problems for outcome in outcomes))


if __name__ == "__main__":
    sys.exit(main())
