"""Ends of the app by signals and lost terminals, with edits that are not saved: by hand, as many as one likes.

`python -m tests.terminal.endings --runs 100` prints a table; each run is told by its seed.
"""

from __future__ import annotations

import argparse
import json
import os
import random
import signal
import statistics
import sys
import tempfile
import time
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

from budget.storage.records import Record
from tests.terminal.parallel import many
from tests.terminal.traced import NAMED, SMALL, Run, budget, sizeless, stty

LIMIT = 3.5
"""Seconds in which the process is gone."""

RESTORED = tuple(f"\x1b[?{mode}".encode() for mode in ("1049l", "25h", "2004l", "1004l"))
RESTORED_AFTER_A_STALL = (*RESTORED, b"\x1b[?1000l", b"\x1b[?1003l", b"\x1b[?2048l")

ENDINGS = ("SIGTERM", "SIGHUP", "closed", "SIGTERM stalled", "SIGHUP stalled", "closed stalled")
LATE = "from budget.storage import keeping; keeping.PAUSE = keeping.LATEST = 60.0"
"""Lets unsaved work be kept no more than once a minute, where nothing else has it kept."""

FIRST = SMALL.replace(NAMED, "Cellar pump")

MORE = ("SIGINT", "SIGQUIT")
WORKS = ("cell", "cells at once", "kept already", "undo", "text", "field", "save")


@dataclass(slots=True)
class Outcome:
    """How one run ended."""

    ending: str
    work: str
    seed: int
    seconds: float = 0.0
    problems: list[str] = field(default_factory=list)


def end(ending: str, work: str, seed: int, *, again: bool = False, folder: Path | None = None) -> Outcome:
    """Make edits, end the app, and look at what is left; `again` opens the run once more."""
    outcome = Outcome(ending, work, seed)
    with tempfile.TemporaryDirectory(prefix="ending-") as made:
        try:
            _end(outcome, folder or Path(made), random.Random(seed), again=again)
        except Exception as wrong:  # noqa: BLE001 - one of many runs; what went wrong is told in the table
            outcome.problems.append(f"{type(wrong).__name__}: {wrong}")
    return outcome


def _end(outcome: Outcome, folder: Path, chance: random.Random, *, again: bool) -> None:
    how, _, stalled = outcome.ending.partition(" ")
    # A lost terminal is told to the leader of its session by a signal, and to nobody else.
    shell = how != "closed" or chance.random() < 0.5
    # Half of the runs keep nothing of themselves in time: it is the signal that has it kept.
    fault = LATE if chance.random() < 0.5 else ""
    # In half of the runs another one was open before, in the same process.
    first = FIRST if chance.random() < 0.5 else ""
    run = Run(folder, shell=shell, slow=0.1 if outcome.work == "save" else 0.0, fault=fault, first=first)
    try:
        slave = run.open_slave()
        try:
            _act(run, outcome, slave, chance, stalled=bool(stalled))
            received = len(run.session.received)
            if how == "closed":
                run.session.hang_up()
            else:
                os.kill(run.pid, signal.Signals[how])
            outcome.seconds = run.wait_for_end(read=not stalled)
            if how != "closed":
                while run.session.read(0.05):
                    pass
                _check_terminal(run, outcome, slave, received, stalled=bool(stalled))
        finally:
            os.close(slave)
        _check_end(run, outcome, signal.SIGHUP if how == "closed" else signal.Signals[how])
        _check_kept(run, outcome)
    finally:
        run.close()
    if again and not outcome.problems:
        _check_again(run, outcome)


# What is done before the end


def _act(run: Run, outcome: Outcome, slave: int, chance: random.Random, *, stalled: bool) -> None:
    run.session.press("down", "down")
    for _ in range(chance.randrange(1, 3)):
        _edit(run, outcome, chance)
    doing = {
        "cell": _edit, "cells at once": _edit_at_once, "kept already": _keep, "undo": _undo, "text": _text,
        "field": _field, "save": _save,
    }[outcome.work]  # fmt: skip
    if stalled and outcome.work != "save":
        doing(run, outcome, chance)
        if not run.stall(slave, deep=chance.random() < 0.5):
            outcome.problems.append("the link did not stall")
        number = len(run.texts("committed"))
        if outcome.work not in ("text", "field") and chance.random() < 0.5:  # one more, as long as the app takes it
            run.session.send("=", f"length = {_value(chance)} m", "enter")
            until = time.monotonic() + 0.5
            while len(run.texts("committed")) == number and time.monotonic() < until:
                time.sleep(0.002)
    elif stalled:
        if not run.stall(slave, deep=chance.random() < 0.5):
            outcome.problems.append("the link did not stall")
        run.session.send("ctrl+s")
        time.sleep(chance.uniform(0.05, 0.4))
    else:
        doing(run, outcome, chance)
    time.sleep(chance.uniform(0.0, 0.01))


def _value(chance: random.Random) -> str:
    return f"{chance.uniform(1, 60):.5f}"


def _edit(run: Run, outcome: Outcome, chance: random.Random) -> None:
    value = _value(chance)
    before = run.edit(value)
    if not run.wait_for_commit(before + 1) or f'"{value} m"' not in run.committed:
        outcome.problems.append("an edit was not committed")


def _edit_at_once(run: Run, _outcome: Outcome, chance: random.Random) -> None:
    """Send edits without a pause; the app is in the midst of them when it ends."""
    before = len(run.texts("committed"))
    for _ in range(6):
        run.session.send("=", f"length = {_value(chance)} m", "enter")
    run.wait_for_commit(before + chance.randrange(1, 5))


def _keep(run: Run, outcome: Outcome, chance: random.Random) -> None:
    """Wait until about the time when what is unsaved is kept."""
    _edit(run, outcome, chance)
    until = time.monotonic() + chance.uniform(0.9, 1.2)
    while time.monotonic() < until:
        run.session.read(0.005)


def _undo(run: Run, outcome: Outcome, chance: random.Random) -> None:
    _edit(run, outcome, chance)
    before = len(run.texts("committed"))
    run.session.send("u")
    if not run.wait_for_commit(before + 1):
        outcome.problems.append("nothing was undone")


def _text(run: Run, outcome: Outcome, chance: random.Random) -> None:
    run.session.send("T")
    run.session.settle(0.2)
    written = f"# typed {_value(chance)}"
    run.session.send(written)
    until = time.monotonic() + 5.0
    while written not in run.committed and time.monotonic() < until:
        run.session.read(0.002)
    if written not in run.committed:
        outcome.problems.append("nothing was written on the Text screen")


def _field(run: Run, _outcome: Outcome, chance: random.Random) -> None:
    """Leave a field open; what is in it is not committed."""
    run.session.press("=")
    run.session.send(f"length = {_value(chance)} m")
    run.session.settle(chance.choice((0.0, 0.1)))


def _save(run: Run, outcome: Outcome, chance: random.Random) -> None:
    run.session.send("ctrl+s")
    until = time.monotonic() + 3.0
    while not list(run.folder.glob(".run.toml.*.saving")) and time.monotonic() < until:
        run.session.read(0.001)
    if time.monotonic() > until:
        outcome.problems.append("no save was seen")
    time.sleep(chance.uniform(0.0, 0.25))


# What is left after it


def _check_end(run: Run, outcome: Outcome, number: int) -> None:
    if not 0.0 <= outcome.seconds <= LIMIT:
        outcome.problems.append(f"it took {outcome.seconds:.1f} s")
    if run.status not in (128 + number, -number):
        outcome.problems.append(f"exit status {run.status}")
    faults = run.folder / "state" / "budget" / "log" / "faults.log"
    if faults.exists():
        outcome.problems.append(f"a fault was logged: {faults.read_text()[-300:]!r}")


def _check_kept(run: Run, outcome: Outcome) -> None:
    on_disk = run.file.read_bytes().decode()
    if on_disk not in (SMALL, *(note.text for note in run.texts("saving"))):
        outcome.problems.append("the file is not whole")
    damaged = [record for record in run.records if isinstance(record, str)]
    outcome.problems += damaged
    if run.committed not in (on_disk, *run.kept):
        held = [len(text) for text in run.kept]
        commits = [note.text for note in run.texts("committed")]
        ages = [len(commits) - commits.index(text) - 1 if text in commits else None for text in run.kept]
        outcome.problems.append(f"the last edit is lost; records of {held} letters, behind by {ages} edits")


def _check_terminal(run: Run, outcome: Outcome, slave: int, received: int, *, stalled: bool) -> None:
    before, after = sizeless(str(run.told["before"])), sizeless(stty(slave))
    if before != after:
        outcome.problems.append(f"stty: {before!r} became {after!r}")
    came = run.session.received[received:]
    missing = [mode for mode in (RESTORED_AFTER_A_STALL if stalled else RESTORED) if mode not in came]
    if missing:
        outcome.problems.append(f"not restored: {missing}, of {len(came)} bytes")


def _check_again(run: Run, outcome: Outcome) -> None:
    """Open the run once more and take what was kept."""
    committed, on_disk = run.committed, run.file.read_bytes().decode()
    listed = json.loads(budget(run, "recover", "--json").stdout)["records"]
    offered = committed != on_disk
    if offered and not any(one["unsaved"] and one["file"] == str(run.file.resolve()) for one in listed):
        outcome.problems.append("budget recover does not list it")
    once_more = Run(run.folder, shell=False, wait="were left behind" if offered else "required")
    try:
        if offered:
            once_more.session.send("enter")
            once_more.session.wait_for("recovered, not saved yet")
            if once_more.committed != committed:
                outcome.problems.append("another text was recovered")
        once_more.session.send("ctrl+s")
        until = time.monotonic() + 5.0
        while run.file.read_bytes().decode() != committed and time.monotonic() < until:
            once_more.session.read(0.02)
        if run.file.read_bytes().decode() != committed:
            outcome.problems.append("what was recovered was not saved")
        once_more.session.settle(0.1)
        once_more.session.send("ctrl+q")
        if once_more.session.wait_for_end() != 0:
            outcome.problems.append("it did not leave well after recovering")
        left = [record for record in once_more.records if not isinstance(record, Record) or record.text is not None]
        if left:
            outcome.problems.append(f"{len(left)} records are left after the save")
    finally:
        once_more.close()


# Many at once


def several(ending: str, runs: int, *, first: int = 0, at_once: int = 6) -> list[Outcome]:
    """Do a number of runs of one ending, of each work in turn; every fifth is opened again."""
    jobs = [(_one, (ending, WORKS[seed % len(WORKS)], seed)) for seed in range(first, first + runs)]
    return many(jobs, at_once)


def _one(ending: str, work: str, seed: int) -> Outcome:
    return end(ending, work, seed, again=seed % 5 == 0)


def table(outcomes: Sequence[Outcome]) -> list[str]:
    """Lay out how the runs ended, one line an ending."""
    lines = [f"{'ending':<18}{'runs':>6}{'well':>6}{'median s':>10}{'longest s':>11}"]
    for ending in dict.fromkeys(outcome.ending for outcome in outcomes):
        of = [outcome for outcome in outcomes if outcome.ending == ending]
        seconds = [outcome.seconds for outcome in of]
        well = sum(not outcome.problems for outcome in of)
        lines.append(f"{ending:<18}{len(of):>6}{well:>6}{statistics.median(seconds):>10.2f}{max(seconds):>11.2f}")
    return lines


def main() -> int:
    """Do as many runs as are asked for and print what came out."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--runs", type=int, default=30)
    parser.add_argument("--first", type=int, default=0, help="the first seed")
    parser.add_argument("--at-once", type=int, default=6)
    parser.add_argument("--only", nargs="+", default=ENDINGS, choices=(*ENDINGS, *MORE))
    options = parser.parse_args()
    outcomes: list[Outcome] = []
    for ending in options.only:
        found = several(ending, options.runs, first=options.first, at_once=options.at_once)
        outcomes += found
        for outcome in found:
            if outcome.problems:
                print(f"{outcome.ending}, {outcome.work}, seed {outcome.seed}: {'; '.join(outcome.problems)}")
        print("\n".join(table(found)), flush=True)
    print()
    print("\n".join(table(outcomes)))
    return int(any(outcome.problems for outcome in outcomes))


if __name__ == "__main__":
    sys.exit(main())
