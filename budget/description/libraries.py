"""Libraries: files of pipe, duct, fitting and device tables that several runs share."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from budget.description.finding import Finding, Path, dotted
from budget.description.lines import read_lines
from budget.description.model import Device, Line, OwnFitting
from budget.description.schema import SINGLE
from budget.description.source import Source
from budget.description.tables import check_format, check_id, device, keyed, own_fitting
from budget.description.values import Reading, nearest

TABLES = ("pipe", "duct", "fitting", "device")
"""What may stand in a library, beside its format and units."""

NO_FILE = "was not read: its path starts at the run's file, and the run has none yet; save it to a file first"
"""Why there is nothing of a library where the run came from standard input, or was never saved."""

_UNITS = {"units": SINGLE["design"]["units"]}


@dataclass(frozen=True, slots=True)
class Library:
    """A library by the path that a run writes, with its text or the reason why there is none."""

    written: str
    source: Source | None = None
    fault: str = ""


@dataclass(frozen=True, slots=True)
class Tables:
    """What sections and terminals refer to: lines by kind and name, fittings of one's own and devices by name."""

    lines: dict[tuple[str, str], Line]
    fittings: dict[str, OwnFitting]
    devices: dict[str, Device]


def library_paths(source: Source) -> tuple[str, ...]:
    """Return the paths of the libraries that a run names, as written; none where they can't be read."""
    stated = source.data.get("library") if source.data is not None else None
    if not isinstance(stated, list) or not all(isinstance(written, str) for written in stated):
        return ()
    return tuple(stated)


def add_libraries(reading: Reading, source: Source, own: Tables, libraries: Sequence[Library]) -> Tables:
    """Return a run's own tables with those of the libraries that it names; what is wrong there is found here.

    A name that stands twice is an error that names both places, and what it stands for is unknown.
    """
    stated = (source.data or {}).get("library", [])
    if not isinstance(stated, list) or len(library_paths(source)) < len(stated):
        reading.wrong("type", 'library must be a list of paths; write ["../office/valves.toml"]', ("library",))
        return own
    shelf = _Shelf(reading, source, own)
    known = {library.written: library for library in libraries}
    for place, written in enumerate(stated):
        if written in stated[:place]:
            reading.wrong("library", f"{written!r} stands twice; remove one", ("library", place))
        else:
            shelf.add(known.get(written, Library(written, fault=NO_FILE)), ("library", place))
    return shelf.tables


class _Shelf:
    """Puts the tables of one library after the other beside those of the run."""

    def __init__(self, reading: Reading, source: Source, own: Tables) -> None:
        self.tables = Tables(dict(own.lines), dict(own.fittings), dict(own.devices))
        self._reading = reading
        self._run = source
        self._places: dict[tuple[str, str], str] = {}
        """By table and name, where each stands so far: a library and a line, or "" for the run."""
        for table, name in _names(source.data or {}):
            self._places[table, name] = ""

    def add(self, library: Library, path: Path) -> None:
        """Add the tables of a library; `path` is where the run names it."""
        written, source = library.written, library.source
        if source is None:
            self._reading.wrong("library", f"{written!r} {library.fault}", path)
            return
        if source.data is None:
            line, column = source.place
            self._reading.wrong("library", f"{written}:{line}:{column}: {source.findings[0].message}", path)
            return
        inside = Reading(gas=self._reading.gas)
        found = _read(inside, source.data)
        for finding in inside.findings:
            self._hand_on(finding, library, source, path)
        for table, name in _names(source.data):
            line, _ = source.locate((table, name), key=True)
            if (table, name) in self._places:
                self._meet(table, name, f"{written} line {line}", path)
                continue
            self._places[table, name] = f"{written} line {line}"
            self._put(found, table, name, written)

    def _hand_on(self, finding: Finding, library: Library, source: Source, path: Path) -> None:
        """Keep a finding of a library at the place where the run names it."""
        line, _ = source.locate(finding.path)
        where = f"{library.written}:{line}: " + (f"{dotted(finding.path)}: " if finding.path else "")
        moved = dataclasses.replace(finding, message=where + finding.message, path=path, within=finding.path)
        self._reading.findings.append(moved)

    def _meet(self, table: str, name: str, place: str, path: Path) -> None:
        """Find a name that stands twice; none of the two is taken."""
        before = self._places[table, name]
        if before:
            text = f"the {table} {name!r} of {place} is in {before} too; rename or remove one"
            self._reading.wrong("duplicate-id", text, path)
            self._reading.findings[-1] = dataclasses.replace(self._reading.findings[-1], within=(table, name))
        else:
            text = f"the {table} {name!r} is in {place} too; rename or remove one"
            self._reading.wrong("duplicate-id", text, (table, name))
        if (table, name) in self.tables.lines:
            line = self.tables.lines[table, name]
            self.tables.lines[table, name] = dataclasses.replace(line, roughness=None)
        elif table == "fitting" and name in self.tables.fittings:
            fitting = self.tables.fittings[name]
            self.tables.fittings[name] = dataclasses.replace(fitting, k=math.nan)

    def _put(self, found: Tables, table: str, name: str, origin: str) -> None:
        if (table, name) in found.lines:
            self.tables.lines[table, name] = dataclasses.replace(found.lines[table, name], origin=origin)
        elif table == "fitting" and name in found.fittings:
            self.tables.fittings[name] = dataclasses.replace(found.fittings[name], origin=origin)
        elif table == "device" and name in found.devices:
            self.tables.devices[name] = dataclasses.replace(found.devices[name], origin=origin)


def _read(reading: Reading, data: Mapping[str, Any]) -> Tables:
    """Read the tables of a library; bare numbers take its own units, a bare pressure is that of the run's fluid."""
    for key in data:
        if key == "library":
            text = "a library can't name another; name both in the run, or copy the tables"
            reading.wrong("library", text, ("library",))
        elif key not in ("format", "design", *TABLES):
            code = "unknown-table" if isinstance(data[key], dict | list) else "unknown-key"
            text = f"{key!r} can't stand in a library; {nearest(key, TABLES)}"
            reading.wrong(code, text, (key,))
    check_format(reading, data)
    reading.units = reading.table(data.get("design", {}), _UNITS, ("design",), "a library's design").get("units", "SI")
    for table, name in _names(data):
        check_id(reading, (table, name))
    return Tables(
        read_lines(reading, data),
        keyed(reading, data, "fitting", own_fitting),
        keyed(reading, data, "device", device),
    )


def _names(data: Mapping[str, Any]) -> list[tuple[str, str]]:
    """Return table and name of everything that a library could hold, in file order."""
    found = []
    for table in TABLES:
        entries = data.get(table, {})
        found += [(table, name) for name in entries] if isinstance(entries, dict) else []
    return found
