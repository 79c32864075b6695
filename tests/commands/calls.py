"""Calling the command line in this process, and a run to call it with."""

from pathlib import Path
from typing import NamedTuple

import pytest

from budget.commands import main

RUN = """\
format = 1
# A pump, a main and two radiators.

[design]
title = "Ferry house"
number = "H-7"

[fluid]
name = "water"
temperature = "70 degC"
return_temperature = "50 degC"

[defaults]
pipe = "copper"
paired = true
takeoff = "none"

[pipe.copper]
catalogue = "copper EN 1057 table X"

[device."LV 15"]
kv = [[0, 0.08], [1, 0.16], [2, 0.35], [3, 0.60], [4, 0.85]]

[source.P1]
title = "Boiler pump"
available = "25 kPa"
reserve = "10 %"

[[source.P1.item]]
name = "Boiler"
drop = "6 kPa"

[section.M1]
from = "P1"
size = "22 mm"
length = "7.5 m"   # measured on site
fittings = { "elbow 90" = 4 }

[terminal.R1]
title = "Hall"
from = "M1"
load = "2.4 kW"
drop = "1.2 kPa"
size = "15 mm"
length = "3.0 m"
balance = "LV 15"

[terminal."R 2"]
from = "M1"
load = "2.6 kW"
drop = "1.4 kPa"
size = "15 mm"
length = "9.0 m"
balance = "LV 15"
"""


class Called(NamedTuple):
    """What a call led to."""

    status: int
    out: str
    err: str


class Caller:
    """Calls the command line and takes what it prints."""

    def __init__(self, capsys: pytest.CaptureFixture[str]) -> None:
        self.capsys = capsys

    def __call__(self, *arguments: str | Path) -> Called:
        self.capsys.readouterr()
        status = main([str(argument) for argument in arguments])
        out, err = self.capsys.readouterr()
        assert "Traceback" not in out + err
        return Called(status, out, err)
