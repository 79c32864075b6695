"""Texts of runs in which anything hangs on anything, as whole files: IDs that stand twice, circles, loose ends."""

from __future__ import annotations

from collections.abc import Iterator
from random import Random

IDS = {
    "source": ("P1", "P2"),
    "section": ("M1", "M2", "M3", "M4"),
    "terminal": ("T1", "T2", "T3", "T4"),
    "link": ("X1",),
}
SHARED = ("P1", "M1", "T1")
"""IDs that a table of any kind may be given, and what may be hung on a thing of any kind."""

HEAD = """\
format = 1

[design]
title = "Tangle"
units = "SI"

[fluid]
name = "{fluid}"
temperature = "40 degC"

[pipe.own]
roughness = "0.01 mm"
sizes = {{ "A" = "22 mm", "B" = "28 mm" }}

[duct.sheet]
catalogue = "galvanised steel"

[device.V1]
kv = [[1, 0.05], [2, 0.6], [3, 2.4]]

[device.H1]
holds = "differential"
set_point = "40 kPa"
least_drop = "8 kPa"

[device.F1]
holds = "flow"
least_drop = "12 kPa"
greatest_drop = "400 kPa"

[defaults]
takeoff = "none"
{line} = "{kind}"
"""

CURVE = 'curve = [["0 L/s", "34 kPa"], ["1 L/s", "30 kPa"], ["2 L/s", "18 kPa"]]'


def tangle(random: Random) -> str:
    """Return a run of a few tables with names out of a small pool."""
    return "\n".join(_lines(random)) + "\n"


def _lines(random: Random) -> Iterator[str]:
    gas = random.random() < 0.25
    yield HEAD.format(fluid="air" if gas else "water", line="duct" if gas else "pipe", kind="sheet" if gas else "own")
    if not gas and random.random() < 0.7:
        yield "paired = true"
    upright = random.choice((1.0, random.random()))
    branches = random.randint(1, 4)
    for kind, number in (("source", 1), ("section", branches), ("terminal", branches), ("link", branches % 2)):
        ids = IDS[kind][:number]
        for id_ in dict.fromkeys(random.choice(SHARED) if random.random() > upright else id_ for id_ in ids):
            yield from _table(random, kind, id_, upright, gas=gas)
    if random.random() < 0.2:
        yield from ("", "[case.night]", f'off = ["{random.choice(SHARED)}"]')


def _table(random: Random, kind: str, id_: str, upright: float, *, gas: bool) -> Iterator[str]:
    yield from ("", f"[{kind}.{id_}]")
    if kind == "source":
        yield from (line for line in ('available = "60 kPa"', CURVE) if random.random() < 0.3)
        if random.random() > upright:
            yield "open = true"
        return
    side = 0.0 if random.random() < upright else random.random()
    if kind == "link" or side < 0.7:
        yield f'from = "{_hung(random, kind, id_, upright)}"'
    if kind == "link" or side > 0.5:
        yield f'to = "{_hung(random, kind, id_, upright)}"'
    yield from (f'size = "{random.choice(("200", "300") if gas else "AB")}"', 'length = "3 m"')
    if kind == "terminal":
        yield from ('flow = "0.2 L/s"', 'drop = "3 kPa"')
    if kind != "link" and not gas and random.random() < 0.4:
        yield f'balance = "{random.choice(("V1", "H1", "F1"))}"'
    if random.random() < 0.25 * (kind != "link"):
        yield from ("", f"[[{kind}.{id_}.item]]", 'name = "Valve"', 'drop = "2 kPa"', 'at = "0.2 L/s"')
        if random.random() < 0.5:
            yield 'control = "two-port"'


def _hung(random: Random, kind: str, id_: str, upright: float) -> str:
    """Name what a table hangs on: mostly a section on one before it in the file, a terminal on one of its own."""
    if random.random() > upright:
        return random.choice((*SHARED, "M2", "M3", "X9"))
    sections = IDS["section"]
    if kind == "section" and id_ in sections:
        return random.choice(("P1", *sections[: sections.index(id_)]))
    return f"M{id_[1:]}" if kind == "terminal" else random.choice(sections[:2])
