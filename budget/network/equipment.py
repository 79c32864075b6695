"""Items and balancing devices in their places, as rows for computing."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Sequence

import numpy as np

from budget.description import (
    Description,
    Device,
    Finding,
    Item,
    Link,
    Path,
    Quantity,
    Section,
    Source,
    Terminal,
    error,
)
from budget.description.schema import HEADINGS
from budget.network.arrays import DeviceUse, Floats, Ints, Items, Terminals
from budget.network.media import Media, pascals, volume
from budget.network.topology import Leg, Topology

K, KV, DROP, LENGTH = range(4)
"""Forms in which the drop of an item is stated."""

ITEM = 4
"""Keys that lead to an item: the kind of its owner, the owner, `item`, its number."""


class EquipmentRows:
    """Collects the items and devices of sections, terminals and sources."""

    def __init__(
        self,
        description: Description,
        topology: Topology,
        media: list[Media],
        terminals: Terminals,
        broken: dict[Path, set[str]],
        findings: list[Finding],
    ) -> None:
        """Keep what the rows need to know of their surroundings."""
        self.description = description
        self.topology = topology
        self.media = media
        self.terminals = terminals
        self.broken = broken
        self.findings = findings
        self._broken_items = {finding.path[:ITEM] for finding in description.findings if finding.level == "error"}
        self._first_terminal = len(topology.legs)
        self._first_source = self._first_terminal + len(terminals)
        self._numbers: dict[str, list[float]] = defaultdict(list)
        self._items: list[Item] = []

    def items(self) -> Items:
        """Return every item of the run."""
        for id_, legs in self.topology.section_legs.items():
            section = self.description.sections[id_]
            density = self._leg_density(legs[0])
            for item in self._items_of(section):
                self._add(item, legs[0], density, legs[0], math.nan)
        for number, id_ in enumerate(self.terminals.ids):
            terminal = self.description.terminals[id_]
            reference, neck = self._terminal_reference(terminal, number)
            for item in self._items_of(terminal):
                self._need_reference(item, reference, neck)
                density = float(self.terminals.density[number])
                self._add(item, self._first_terminal + number, density, reference, neck)
        for number, source in enumerate(self.description.sources.values()):
            for item in self._items_of(source):
                self._add(item, self._first_source + number, self.media[number].supply.density, -1, math.nan)
        return self._collected()

    def link_items(self, legs: Sequence[Leg]) -> Items:
        """Return the items of the links, each on the first leg of its link; carriers are numbers of these legs."""
        self._numbers, self._items = defaultdict(list), []
        for number, leg in enumerate(legs):
            if leg.first:
                media = self.media[leg.source]
                density = (media.supply if leg.outward else media.back).density
                for item in self._items_of(self.description.links[leg.owner]):
                    self._add(item, number, density, number, math.nan)
        return self._collected()

    def _collected(self) -> Items:
        rows = self._numbers

        def whole(key: str) -> Ints:
            return np.array(rows[key], dtype=np.int64)

        def real(key: str) -> Floats:
            return np.array(rows[key], dtype=np.float64)

        return Items(
            carrier=whole("carrier"),
            form=whole("form"),
            value=real("value"),
            at=real("at"),
            exponent=real("exponent"),
            parallel=real("parallel"),
            density=real("density"),
            reference=whole("reference"),
            neck=real("neck"),
            heading=whole("heading"),
            inside=np.array([item.inside for item in self._items], dtype=np.bool_),
            items=tuple(self._items),
        )

    def devices(self) -> tuple[DeviceUse, ...]:
        """Return every balancing device of the run: on sections in file order, then on terminals."""
        uses = []
        for id_ in self.description.sections:
            section = self.description.sections[id_]
            legs = self.topology.section_legs.get(id_)
            if legs and section.balance:
                device = self.description.devices[section.balance]
                uses.append(self._use(device, section, legs[0], legs[0], False, legs[0], math.nan))
        for number, id_ in enumerate(self.terminals.ids):
            terminal = self.description.terminals[id_]
            if terminal.balance:
                device = self.description.devices[terminal.balance]
                reference, neck = self._terminal_reference(terminal, number)
                carrier = self._first_terminal + number
                uses.append(self._use(device, terminal, carrier, number, True, reference, neck))
        return tuple(uses)

    def _use(
        self,
        device: Device,
        owner: Section | Terminal,
        carrier: int,
        number: int,
        terminal: bool,
        reference: int,
        neck: float,
    ) -> DeviceUse:
        density = float(self.terminals.density[number]) if terminal else self._leg_density(number)
        if device.k and reference < 0 and math.isnan(neck):
            text = "its damper has no duct whose velocity it refers to; state neck, or a run-out's size"
            self.findings.append(error("no-reference", text, (*owner.path, "balance")))

        def pa(quantity: Quantity | None, otherwise: float) -> float:
            return otherwise if quantity is None else pascals(quantity, density)

        bad = self.broken.get(("device", device.name), set())
        return DeviceUse(
            device=device,
            carrier=carrier,
            terminal=terminal,
            number=number,
            density=density,
            reference=reference,
            neck=neck,
            least_drop=math.nan if bad else pa(device.least_drop, 0.0),
            greatest_drop=pa(device.greatest_drop, math.inf),
            least_signal=pa(device.least_signal, 0.0),
            open_kv=max((kv for _, kv in device.kv), default=math.nan),
            open_k=min((k for _, k in device.k), default=math.nan),
            zone=-1,
        )

    def _items_of(self, owner: Section | Terminal | Source | Link) -> tuple[Item, ...]:
        """Return what stands in line on an owner; where its list could not be read, one item of unknown drop."""
        place: Path = (*owner.path, "item")
        if "item" in self.broken.get(owner.path, set()) and any(
            finding.path == place and finding.level == "error" for finding in self.description.findings
        ):
            return (Item(place, "item"),)
        return owner.items

    def _leg_density(self, leg: int) -> float:
        found = self.topology.legs[leg]
        media = self.media[found.source]
        return (media.supply if found.outward else media.back).density

    def _terminal_reference(self, terminal: Terminal, number: int) -> tuple[int, float]:
        """Return the leg that losses on a terminal refer to, its run-out or what it hangs on, and its neck area.

        A coefficient refers to the neck where there is one; an equivalent length always to the leg.
        """
        neck = float(self.terminals.neck[number])
        run_out = self.topology.run_out_legs.get(terminal.id)
        if run_out:
            return run_out[0], neck
        out = self.topology.outward.get(terminal.id)
        return (out if out is not None else self.topology.back.get(terminal.id, -1)), neck

    def _need_reference(self, item: Item, reference: int, neck: float) -> None:
        lost = item.k is not None and reference < 0 and math.isnan(neck)
        if lost or (item.equivalent_length is not None and reference < 0):
            key = "k" if item.k is not None else "equivalent_length"
            text = f"{key} has no pipe or duct that it refers to; state kv or drop, or give the terminal a size"
            self.findings.append(error("no-reference", text, (*item.path, key)))

    def _add(self, item: Item, carrier: int, density: float, reference: int, neck: float) -> None:
        form, value = self._form(item, density)
        if self._is_broken(item):
            value = math.nan
        rows = self._numbers
        rows["carrier"].append(carrier)
        rows["form"].append(form)
        rows["value"].append(value)
        rows["at"].append(math.nan if item.at is None else volume(item.at, density))
        rows["exponent"].append(item.exponent)
        rows["parallel"].append(item.parallel)
        rows["density"].append(density)
        rows["reference"].append(reference)
        rows["neck"].append(neck)
        rows["heading"].append(HEADINGS.index(self._heading(item, carrier)))
        self._items.append(item)

    def _is_broken(self, item: Item) -> bool:
        return item.path in self._broken_items

    def _form(self, item: Item, density: float) -> tuple[int, float]:
        if item.k is not None:
            return K, item.k
        if item.kv is not None:
            return KV, item.kv
        if item.equivalent_length is not None:
            return LENGTH, item.equivalent_length
        tested = 1.0 if item.tested_density is None else density / item.tested_density
        if item.clean is not None and item.final is not None:
            clean, final = pascals(item.clean, density), pascals(item.final, density)
            stated = {"clean": clean, "final": final, "mean": 0.5 * (clean + final)}[item.state]
            return DROP, stated * tested
        return DROP, math.nan if item.drop is None else pascals(item.drop, density) * tested

    def _heading(self, item: Item, carrier: int) -> str:
        if item.heading is not None:
            return item.heading
        if carrier >= self._first_source:
            return "plant"
        return "control" if item.control else "distribution"
