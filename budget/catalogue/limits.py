"""Usual limits of velocity, friction rate, authority and balancing: to be read, never applied unasked."""

from dataclasses import dataclass
from functools import cache

from budget.catalogue.loader import load


@dataclass(frozen=True, slots=True)
class Limit:
    """One usual limit: its group, what it is of, the figure with its unit, and its source."""

    group: str
    what: str
    value: str
    source: str
    known_from: str
    confidence: str
    note: str


@cache
def limits() -> tuple[Limit, ...]:
    """All usual limits, in catalogue order. Where no standard is named the source says common practice."""
    return tuple(
        Limit(
            group["name"],
            what,
            value,
            group["source"],
            group["known_from"],
            group["confidence"],
            group.get("note", ""),
        )
        for group in load("limits")["group"]
        for what, value in group["rows"]
    )
