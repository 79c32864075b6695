"""The budget of a run: `evaluate` a description, and read its results and findings."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping
from functools import cached_property
from typing import TypeVar

from budget.description import Description, Finding
from budget.network.authority import authorities
from budget.network.computed import Computed, compute
from budget.network.duty import fluid_result, source_result
from budget.network.layout import lay_out
from budget.network.link_records import link_result
from budget.network.media import design_media
from budget.network.records import Records
from budget.network.results import FluidResult, LinkResult, SectionResult, SourceResult, TerminalResult
from budget.network.review import accept, review

T = TypeVar("T")


def evaluate(description: Description) -> Budget:
    """Work out every section's flow and drop, the index circuit, the duty, and each branch's margin."""
    return Budget(compute(lay_out(description)))


class Budget:
    """What was computed for a run. Records are made when they are first asked for."""

    def __init__(self, run: Computed) -> None:
        """Keep the arrays that every record is read from."""
        self.run = run
        """The arrays behind the records."""
        self._numbers = {id_: number for number, id_ in enumerate(run.layout.description.sources)}

    @cached_property
    def _authority(self) -> dict[int, tuple[float | None, float | None]]:
        return authorities(self.run)

    @cached_property
    def _records(self) -> Records:
        return Records(self.run, self._authority)

    @cached_property
    def fluid(self) -> FluidResult | None:
        """The fluid at the design's own temperatures, which a source may override; None where none is stated."""
        stated = self.run.layout.description.fluid
        return fluid_result(design_media(stated)) if stated.name is not None else None

    @cached_property
    def sources(self) -> Mapping[str, SourceResult]:
        """What each pump or fan must deliver, by ID."""
        return _Lazy(tuple(self._numbers), lambda id_: source_result(self.run, self._numbers[id_]))

    @cached_property
    def sections(self) -> Mapping[str, SectionResult]:
        """Each section that hangs on a source, by ID, in file order."""
        topology = self.run.layout.topology
        known = (id_ for id_ in self.run.layout.description.sections if id_ in topology.section_legs)
        return _Lazy(known, self._records.section)

    @cached_property
    def links(self) -> Mapping[str, LinkResult]:
        """Each link that could be joined, by ID, in file order."""
        return _Lazy(self.run.layout.links.of, lambda id_: link_result(self.run, id_))

    @cached_property
    def terminals(self) -> Mapping[str, TerminalResult]:
        """Each terminal that hangs on a source, by ID, in file order."""
        return _Lazy(self.run.layout.terminals.ids, self._records.terminal)

    @cached_property
    def index(self) -> frozenset[str]:
        """The IDs of the sections and terminals on the index circuit of their source; no record is made for it."""
        layout, circuits = self.run.layout, self.run.circuits
        of_legs = layout.topology.section_legs.items()
        sections = frozenset(id_ for id_, legs in of_legs if any(circuits.leg_index[leg] for leg in legs))
        return sections.union(id_ for id_, on in zip(layout.terminals.ids, circuits.index, strict=True) if on)

    @cached_property
    def findings(self) -> tuple[Finding, ...]:
        """Everything that is wrong or doubtful, from reading, connecting and computing."""
        run = self.run
        description = run.layout.description
        found = (*description.findings, *run.layout.findings, *review(run, self._authority))
        return accept(found, description)


class _Lazy(Mapping[str, T]):
    """A mapping whose values are made when they are first asked for."""

    def __init__(self, keys: Iterable[str], make: Callable[[str], T]) -> None:
        self._keys = dict.fromkeys(keys)
        self._make = make
        self._made: dict[str, T] = {}

    def __getitem__(self, key: str) -> T:
        if key not in self._keys:
            raise KeyError(key)
        if key not in self._made:
            self._made[key] = self._make(key)
        return self._made[key]

    def __iter__(self) -> Iterator[str]:
        return iter(self._keys)

    def __len__(self) -> int:
        return len(self._keys)
