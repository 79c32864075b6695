"""Going from one run to another in one process: nothing is doubled, and the guard acts on the run that is open now."""

from __future__ import annotations

import json
import os
import signal
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from tests.terminal.endings import LIMIT, RESTORED
from tests.terminal.traced import Run, sizeless, stty

OTHER = """format = 1
[design]
title = "Ferry house"
[fluid]
name = "water"
temperature = "70 degC"
return_temperature = "50 degC"
[defaults]
pipe = "copper"
[pipe.copper]
catalogue = "copper EN 1057"
[source.P1]
[section.F1]
from = "P1"
size = "18 mm"
length = "5 m"
[terminal.Ferry]
from = "F1"
load = "2 kW"
drop = "1 kPa"
"""

INSIDE = """
import gc, threading
from budget.screens import doing

def inside(app):
    gc.collect()
    stop, stops = signal.getsignal(signal.SIGTSTP), []
    while callable(stop):
        stops.append(stop.__qualname__)
        cells = [cell.cell_contents for cell in stop.__closure__ or ()]
        stop = next((one for one in cells if hasattr(one, "__self__") and "sigtstp" in one.__qualname__), None)
    told = {
        "threads": sorted(thread.name.rstrip("0123456789-") for thread in threading.enumerate()),
        "guards": sorted({id(signal.getsignal(n).__self__) for n in (15, 1, 2, 3)}),
        "stops": stops,
        "file": app.document.path.name,
    }
    name = os.environ["INSIDE"]
    with open(name + ".new", "w") as file:
        json.dump(told, file)
    os.replace(name + ".new", name)

import signal
doing.DOINGS["fold"] = inside
"""
"""The space bar writes down what the process holds."""

BROKEN = """
from budget.screens.opened import Opened
from budget.storage import StorageError
def broken(run):
    raise StorageError(f"{run.path.name} is gone by now")
Opened.up_to_date = broken
"""


@pytest.fixture
def begin(tmp_path: Path) -> Iterator[Callable[..., Run]]:
    """Start the app under a shell, with another run beside its own."""
    (tmp_path / "other.toml").write_text(OTHER)
    runs: list[Run] = []

    def start(fault: str = INSIDE) -> Run:
        run = Run(tmp_path, shell=True, fault=fault, environment={"INSIDE": str(tmp_path / "inside")})
        runs.append(run)
        run.session.press("down", "down")
        return run

    yield start
    for run in runs:
        run.close()


def inside(run: Run, like: dict[str, object] | None = None) -> dict[str, object]:
    """What the process holds now, when nothing is under way in it; where it is to be like before, as soon as it is."""
    file, until = run.folder / "inside", time.monotonic() + 8.0
    while True:
        file.unlink(missing_ok=True)
        run.session.send("space")
        while not file.exists() and time.monotonic() < until:
            run.session.read(0.01)
        told: dict[str, object] = json.loads(file.read_text())
        same = like is None or {**told, "file": ""} == {**like, "file": ""}
        if (same and "(run)" not in str(told["threads"])) or time.monotonic() > until:
            return told


def edit(run: Run, value: str) -> str:
    before = run.edit(value)
    assert run.wait_for_commit(before + 1)
    return run.committed


def open_other(run: Run, name: str, wait: str) -> None:
    run.session.press("ctrl+t")
    run.session.wait_for("Open another run")
    run.session.press(name)
    run.session.send("enter")
    run.session.wait_for(wait)


def records(run: Run) -> dict[str, str | None]:
    """The text that is kept of each file."""
    return {record.path.name: record.text for record in run.records if not isinstance(record, str)}


def test_what_is_kept_of_the_first_stands_and_a_signal_keeps_the_second(begin: Callable[..., Run]) -> None:
    run = begin()
    slave = run.open_slave()
    first = inside(run)
    kept = edit(run, "8.25")
    open_other(run, "other", "The run is not saved")
    run.session.press("keep")
    run.session.send("enter")
    run.session.wait_for("F1")
    second = inside(run, like=first)
    assert (first["file"], second["file"]) == ("run.toml", "other.toml")
    assert {**second, "file": ""} == {**first, "file": ""}
    assert second["stops"] == ["keep_before_stops.<locals>.keep_and_stop", "LinuxDriver._sigtstp_application"]
    run.session.press("down")
    more = edit(run, "6.5")
    assert 'length = "6.5 m"' in more
    os.kill(run.pid, signal.SIGTERM)
    assert 0.0 <= run.wait_for_end(read=True) <= LIMIT
    assert run.status == 128 + signal.SIGTERM
    assert records(run) == {"run.toml": kept, "other.toml": more}
    assert sizeless(stty(slave)) == sizeless(str(run.told["before"]))
    for mode in RESTORED:
        assert mode in run.session.received
    run.session.settle()
    assert "other.toml" in run.session.received.decode().rpartition("ended by a signal")[2]
    os.close(slave)


@pytest.mark.long
def test_one_after_the_other_and_out_leaves_nothing(begin: Callable[..., Run]) -> None:
    run = begin()
    slave = run.open_slave()
    first = inside(run)
    for name, shown in (("other", "F1"), ("run.toml", "B2")):
        open_other(run, name, shown)
        assert {**inside(run, like=first), "file": ""} == {**first, "file": ""}
    run.session.send("ctrl+q")
    assert 0.0 <= run.wait_for_end(read=True) <= LIMIT
    assert run.status == 0
    assert run.records == []
    assert sizeless(stty(slave)) == sizeless(str(run.told["before"]))
    os.close(slave)


@pytest.mark.long
def test_where_the_other_is_gone_by_then_the_old_run_is_back(begin: Callable[..., Run]) -> None:
    run = begin(INSIDE + BROKEN)
    kept = edit(run, "8.25")
    open_other(run, "other", "The run is not saved")
    run.session.press("without")
    run.session.send("enter")
    run.session.wait_for("other.toml is gone by now")
    assert "» M1" in run.session.text
    assert "not saved" in run.session.text
    assert inside(run)["file"] == "run.toml"
    run.session.press("down", "u")
    assert "7.5" in run.session.text
    edit(run, "8.25")
    os.kill(run.pid, signal.SIGTERM)
    assert 0.0 <= run.wait_for_end(read=True) <= LIMIT
    assert run.status == 128 + signal.SIGTERM
    assert records(run) == {"run.toml": kept}
