"""What a section or terminal can refer to: the design's lines, fittings, devices and defaults."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from itertools import chain
from typing import Any

from budget.catalogue import fitting_names
from budget.description.finding import Path
from budget.description.model import Device, Line, OwnFitting
from budget.description.values import Reading, nearest


@dataclass(frozen=True, slots=True)
class Scope:
    """The names that are known while sections and terminals are read."""

    reading: Reading
    lines: Mapping[tuple[str, str], Line]
    own_fittings: Mapping[str, OwnFitting]
    devices: Mapping[str, Device]
    defaults: Mapping[str, Any]

    def check_defaults(self) -> None:
        """Find what the defaults themselves have wrong."""
        path: Path = ("defaults",)
        if "pipe" in self.defaults and "duct" in self.defaults:
            self.reading.wrong("contradiction", "pipe and duct are both the default; keep one", (*path, "duct"))
        for kind in ("pipe", "duct"):
            if kind in self.defaults:
                self.line(kind, self.defaults[kind], (*path, kind))
        if self.reading.gas and self.defaults.get("paired"):
            self.reading.wrong("paired", "a gas has no return leg to pair; remove paired", (*path, "paired"))

    def line(self, kind: str, name: str, path: Path) -> Line | None:
        """Return the line of a local name; an error names the nearest where there is none."""
        found = self.lines.get((kind, name))
        if found is None:
            known = (local for local_kind, local in self.lines if local_kind == kind)
            some = any(local_kind == kind for local_kind, _ in self.lines)
            hint = nearest(name, known) if some else f"add [{kind}.{name}]"
            self.reading.wrong("unknown-line", f"{name!r} is not a {kind} of this design; {hint}", path)
        return found

    def line_of(self, values: Mapping[str, Any], path: Path) -> Line | None:
        """Return the line of a section or run-out: its own, else the default's."""
        if "pipe" in values and "duct" in values:
            self.reading.wrong("contradiction", "pipe and duct are both stated; keep one", (*path, "duct"))
        for origin, place in ((values, path), (self.defaults, None)):
            for kind in ("pipe", "duct"):
                if kind in origin:
                    if place is not None:
                        return self.line(kind, origin[kind], (*place, kind))
                    return self.lines.get((kind, origin[kind]))
        self.reading.wrong("missing", "neither pipe nor duct is stated, nor a default; state one", path)
        return None

    def check_device(self, values: Mapping[str, Any], path: Path, *, terminal: bool) -> str | None:
        """Return the name of the balancing device; an error names the nearest where it is not known."""
        name = values.get("balance")
        if name is None:
            if "setting" in values:
                self.reading.wrong("missing", "a setting without a device; state balance", (*path, "setting"))
            return None
        device = self.devices.get(name)
        if device is None:
            hint = nearest(name, self.devices) if self.devices else f'add [device."{name}"]'
            self.reading.wrong("unknown-device", f"{name!r} is not a device of this design; {hint}", (*path, "balance"))
            return None
        if terminal and device.holds == "differential":
            self.reading.wrong(
                "held-differently",
                "a device that holds a differential stands on a section; move it to the section that feeds this",
                (*path, "balance"),
            )
            return None
        table = device.kv or device.k
        if "setting" in values and table and not table[0][0] <= values["setting"] <= table[-1][0]:
            text = f"the table of {name!r} goes from {table[0][0]:g} to {table[-1][0]:g}; correct the setting"
            self.reading.wrong("range", text, (*path, "setting"))
        if "setting" in values and not table:
            self.reading.wrong("contradiction", f"{name!r} has no setting; remove setting", (*path, "setting"))
        return str(name)

    def known_fitting(self, name: str) -> bool:
        """Whether a fitting is one's own or the catalogue's."""
        return name in self.own_fittings or name in fitting_names()

    def nearest_fitting(self, name: str, kinds: Iterable[str] = ()) -> str:
        """Return the nearest known fittings, for a message."""
        return nearest(name, chain(self.own_fittings, fitting_names(), kinds), 3)
