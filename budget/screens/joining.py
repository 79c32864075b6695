"""Lists for what a section is at its junction: take-off, family, angle, and the change of area that follows."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass
from typing import TYPE_CHECKING

from budget.catalogue.provenance import how_known
from budget.description import schema
from budget.description.edits import Edit, EditError, SetValue, Several, Unset
from budget.description.finding import Path
from budget.description.model import Description, Section, Terminal
from budget.document import Snapshot
from budget.network.results import LossResult
from budget.report.figures import NONE, Figures, plain_number
from budget.report.plain import plain
from budget.screens.chooser import Choice, Offer
from budget.screens.fitting_words import velocity
from budget.screens.runs import density_of, result_of
from budget.screens.writing import is_stated, objection, written
from budget.units import Dimension

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

KEYS = ("takeoff", "junction", "angle", "transition")
TITLES = {
    "takeoff": "takeoff of {}: drop at each leg", "junction": "junction family of {}: drop at each leg",
    "angle": "angle of the junction of {}: drop at each leg",
    "transition": "change of area toward {}: drop at each leg",
}  # fmt: skip
STATED = ("straight", "branch")
ANGLES = (30, 45, 60, 90)
INCLUDED_ANGLES = (15, 20, 30, 45, 60, 90)
_MOST_OTHERS = 2

Part = Section | Terminal


@dataclass(frozen=True, slots=True, eq=False)
class Way:
    """One way to state it: what it is called, and the edit that states it."""

    label: str
    edit: Edit
    now: bool = False


def joints(app: BudgetApp, path: Path) -> Offer | None:
    """Offer what can be stated at a junction, each way with the drop that it gives on this leg and on the other."""
    snapshot, table, key = app.document.snapshot, path[:2], str(path[2])
    description = snapshot.description
    part = part_of(description, str(table[1]))
    if part is None or part.run is None or not isinstance(part, Section | Terminal):
        return None
    others = meeting(description, part)
    figures = Figures(description)
    trying = Trying(app, path, others)
    unit = figures.unit(Dimension.PRESSURE)
    heads = ("", *(f"at {plain(one.id)} {unit}" for one in (part, *others[:_MOST_OTHERS])), f"required {unit}", "")
    ways = list(_ways(snapshot, path, part, others))
    choices = [Choice((way.label, "now" if way.now else ""), way, "index" if way.now else "") for way in ways]

    def write(text: str) -> Choice | None:
        if key not in ("angle", "transition"):
            return None
        value = float(text) if text.replace(".", "", 1).isdigit() else text
        whole = int(value) if isinstance(value, float) and value.is_integer() else value
        return Choice((plain(text), "as written"), Way(plain(text), SetValue(path, whole)))

    hung = plain(part.from_ or part.to or "nothing")
    return Offer(
        TITLES[key].format(hung if key == "transition" else plain(part.id)), heads, choices, trying.take,
        more=trying.figures_of, pace=app.trials.pace, beneath=trying.beneath, write=write,
        start=next((place for place, way in enumerate(ways) if way.now), 0),
    )  # fmt: skip


def part_of(description: Description, id_: str) -> Part | None:
    """Return a section or terminal by its ID."""
    return description.sections.get(id_) or description.terminals.get(id_)


def meeting(description: Description, part: Part) -> tuple[Part, ...]:
    """Return the other sections and terminals that hang on what a part hangs on."""
    hung = {part.from_, part.to} - {None}
    parts: tuple[Part, ...] = (*description.sections.values(), *description.terminals.values())
    return tuple(other for other in parts if other.id != part.id and {other.from_, other.to} & hung)


def hangs_on_section(description: Description, part: Part) -> bool:
    """Whether a part hangs on a section, so that it can be a leg of a junction and have a change of area."""
    return bool({part.from_, part.to} & description.sections.keys())


class Trying:
    """The ways of a list, each tried out once when it is looked at."""

    def __init__(self, app: BudgetApp, path: Path, others: tuple[Part, ...]) -> None:
        """Nothing was tried yet."""
        self.app, self.path, self.others = app, path, others
        self.before = app.document.snapshot
        self.figures = Figures(self.before.description)
        self._tried: dict[Way, tuple[Snapshot | None, str]] = {}

    def figures_of(self, value: object) -> tuple[str, ...]:
        """Return the drop of this leg and of the others, and what the source requires then."""
        after, wrong = self._try(_way(value))
        tables = [self.path[:2], *(other.path for other in self.others[:_MOST_OTHERS])]
        if after is None or wrong:
            return (NONE,) * (len(tables) + 1)
        source = after.budget.sources.get(self.app.ledger.source)
        required = self.figures.text(source.required if source else None, Dimension.PRESSURE)
        return (*(self._drop(after, table) for table in tables), required)

    def beneath(self, value: object) -> tuple[str, ...]:
        """Say of every leg what its joint is, with coefficient, drop and source; or what is wrong with the way."""
        after, wrong = self._tried.get(_way(value), (None, ""))
        if wrong:
            return (plain(wrong),)
        return () if after is None else tuple(self._said(after))

    def take(self, value: object) -> None:
        """State it, as one step; what can't stand is told and left out."""
        way = _way(value)
        after, wrong = self._try(way)
        if wrong or after is None:
            self.app.say(plain(wrong), "error")
            return
        self.app.apply(way.edit, f"{self.path[2]} of {self.path[1]}")
        what = f"{self.path[2]} of {plain(str(self.path[1]))}: {way.label}"
        self.app.say(f"{what}; {self.app.keys('undo')} takes it back")

    def _try(self, way: Way) -> tuple[Snapshot | None, str]:
        if way not in self._tried:
            try:
                after = self.app.trials.preview(way.edit)
                tables = (self.path[:2], *(other.path for other in self.others[:_MOST_OTHERS]))
                paths = [(*table, key) for table in tables for key in KEYS]
                wrong = next(filter(None, (objection(self.before, after, path) for path in paths)), "")
                self._tried[way] = (after, wrong)
            except EditError as refused:
                self._tried[way] = (None, str(refused))
        return self._tried[way]

    def _drop(self, after: Snapshot, table: Path) -> str:
        run = result_of(after, table)
        drop = math.fsum((run.junction, run.transition)) if run is not None else None
        return self.figures.pressure(drop, density_of(after, table))

    def _said(self, after: Snapshot) -> Iterator[str]:
        origins: dict[str, None] = {}
        for table in (self.path[:2], *(other.path for other in self.others[:_MOST_OTHERS])):
            run, density = result_of(after, table), density_of(after, table)
            for leg in run.legs if run is not None else ():
                for joint in leg.joints:
                    yield f"{plain(str(table[1]))}, {leg.leg}: {joint_text(joint, self.figures, density)}"
                    origins[f"{joint.method}: {plain(joint.source)}, {how_known(joint.known_from)}"] = None
        yield from origins or ("no loss is counted at the junction",)


def joint_text(joint: LossResult, figures: Figures, density: float | None) -> str:
    """Spell one loss at a junction: what it is, coefficient, drop or gain, and the velocity it is on."""
    drop = figures.pressure(joint.drop, density, unit=True)
    gain = ", a gain" if joint.drop < 0.0 else ""
    return f"{joint.name}: K {plain_number(joint.k)}, {drop}{gain}, {velocity(joint, figures)}"


def _ways(snapshot: Snapshot, path: Path, part: Part, others: tuple[Part, ...]) -> Iterator[Way]:
    key, stated = str(path[2]), written(snapshot.text, path)
    if key == "takeoff":
        yield from _takeoffs(path, part, others)
    elif key == "junction":
        for family in schema.JUNCTIONS:
            yield Way(family, SetValue(path, family), part.run is not None and part.run.junction == family)
    else:
        words = ("abrupt",) if key == "transition" else ()
        now = part.run.transition if part.run is not None and key == "transition" else None
        if key == "angle" and part.run is not None:
            now = part.run.angle
        for value in (*words, *(INCLUDED_ANGLES if words else ANGLES)):
            yield Way(value if isinstance(value, str) else f"{value} deg", SetValue(path, value), now == value)
    if stated and is_stated(snapshot.text, path):
        yield Way("not stated", Unset(path))


def _takeoffs(path: Path, part: Part, others: tuple[Part, ...]) -> Iterator[Way]:
    """Yield the words for this leg alone, then with the one that goes with them on the other leg."""
    for word in ("straight", "branch", "none"):
        yield Way(word, SetValue(path, word), part.takeoff == word)
    if len(others) != 1:
        return
    other = others[0]
    for word, counterpart in (("straight", "branch"), ("branch", "straight"), ("none", "none")):
        if other.takeoff != counterpart:
            edits = (SetValue(path, word), SetValue((*other.path, "takeoff"), counterpart))
            yield Way(f"{word}, and {plain(other.id)} {counterpart}", Several(edits))


def _way(value: object) -> Way:
    assert isinstance(value, Way)  # noqa: S101 - the list is made of nothing else
    return value
