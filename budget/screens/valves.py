"""Control valves and balancing devices to pick from, each with what it would do; worked out beside the keyboard."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import TYPE_CHECKING, TypeVar

from budget.description.edits import Edit, SetValue, Several, Unset
from budget.description.finding import Path
from budget.document import Snapshot
from budget.network.proposals import AUTHORITY, DeviceChoice, KvChoice, KvProposal, propose_devices, propose_kv
from budget.report.figures import NONE, Figures, plain_number
from budget.report.plain import plain
from budget.screens.chooser import Choice, Offer
from budget.screens.writing import is_stated
from budget.units import Dimension

if TYPE_CHECKING:
    from budget.screens.app import BudgetApp

T = TypeVar("T")

INSTEAD = ("cv", "k", "drop", "at", "exponent", "equivalent_length", "clean", "final", "state", "tested_density")
"""Keys of an item that give way to a Kv."""


def propose(app: BudgetApp, id_: str) -> None:
    """Work out sizes for the control item of a section or terminal, then offer them."""
    snapshot = app.document.snapshot
    path = control_item(snapshot, id_)
    if path is None:
        app.say(f"{plain(id_)} has no control item", "note")
        return

    def offer(found: KvProposal | None) -> None:
        if found is None:
            app.say(f"the control item of {plain(id_)} has no authority at design flow", "note")
        else:
            app.offer(_sizes(app, snapshot, path, found))

    _beside(app, id_, lambda: propose_kv(snapshot.budget.run, id_), offer)


def propose_device(app: BudgetApp, id_: str) -> None:
    """Work out where each device of the run would be set on a section or terminal, then offer them."""
    snapshot = app.document.snapshot
    if not snapshot.description.devices:
        app.say("the run has no device; write [device.NAME] on the Text screen, or name a library", "note")
        return
    work = lambda: propose_devices(snapshot.budget.run, id_)  # noqa: E731 - what is done beside the keyboard
    _beside(app, id_, work, lambda found: app.offer(_devices(app, snapshot, id_, found)))


def _beside(app: BudgetApp, id_: str, work: Callable[[], T], offer: Callable[[T], None]) -> None:
    """Work something out; it is offered where nothing else was done meanwhile."""
    snapshot, place = app.document.snapshot, app.at

    def done(found: T) -> None:
        if app.document.snapshot is snapshot and app.at == place and app.entry is None:
            app.say("")
            offer(found)

    app.say(f"working out what would do for {plain(id_)}...", "note")
    app.valves.start(lambda _: work(), done, lambda reason: app.say(reason, "error"))


def control_item(snapshot: Snapshot, id_: str) -> Path | None:
    """Return the keys of the first control item of a section or terminal, None where it has none."""
    part = snapshot.description.terminals.get(id_) or snapshot.description.sections.get(id_)
    return None if part is None else next((item.path for item in part.items if item.control), None)


def edit_of(text: str, path: Path, kv: float) -> Edit:
    """Return the edit that gives an item a Kv in place of what it states now."""
    away = tuple(Unset((*path, key)) for key in INSTEAD if is_stated(text, (*path, key)))
    put = SetValue((*path, "kv"), kv)
    return Several((*away, put)) if away else put


def _sizes(app: BudgetApp, snapshot: Snapshot, path: Path, found: KvProposal) -> Offer:
    figures = Figures(snapshot.description)
    result = snapshot.budget.terminals.get(found.id) or snapshot.budget.sections[found.id]
    density = snapshot.budget.sources[result.source].fluid.density
    pressure = figures.unit(Dimension.PRESSURE)

    def choice(one: KvChoice, said: str) -> Choice:
        drop, required = (figures.pressure(value, density) for value in (one.drop, one.required))
        return Choice((plain_number(one.kv), drop, plain_number(one.authority, 2), required, said), one.kv)

    choices = [choice(one, "") for one in found.choices]
    start = max((n for n, one in enumerate(found.choices) if one.authority >= found.wanted), default=0)
    if found.exact is not None:
        choices.append(choice(found.exact, f"reaches {plain_number(found.wanted, 2)} exactly"))
    choices.append(choice(found.present, "as it is"))

    def take(kv: object) -> None:
        if isinstance(kv, float) and kv != found.present.kv:
            text = app.document.snapshot.text
            app.apply(edit_of(text, path, float(plain_number(kv, 4))), f"Kv of {plain(found.item)} of {found.id}")

    title = f"{plain(found.item)} of {plain(found.id)}, authority {AUTHORITY:g} or more"
    heads = ("Kv", f"drop {pressure}", "authority", f"required {pressure}", "")
    return Offer(title, heads, choices, take, start=start)


def _devices(app: BudgetApp, snapshot: Snapshot, id_: str, found: tuple[DeviceChoice, ...]) -> Offer:
    description, figures = snapshot.description, Figures(snapshot.description)
    result = snapshot.budget.terminals.get(id_) or snapshot.budget.sections.get(id_)
    part = description.terminals.get(id_) or description.sections[id_]
    # What hangs on no source is in no budget, and nothing could be tried on it.
    density = snapshot.budget.sources[result.source].fluid.density if result is not None else math.nan
    pressure = figures.unit(Dimension.PRESSURE)

    def choice(one: DeviceChoice) -> Choice:
        said = "" if one.suits else "outside its table" if not one.in_table else "signal too small"
        base, drop, signal, required = (
            figures.pressure(value, density) for value in (one.base, one.drop, one.signal, one.required)
        )
        role = "index" if one.name == part.balance else ""
        return Choice((plain(one.name), base, drop, plain_number(one.setting), signal, required, said), one.name, role)

    known = {one.name for one in found}
    choices = [choice(one) for one in found]
    for device in description.devices.values():
        if device.name not in known:
            said = f"holds {device.holds}" if device.holds else "can't be tried here"
            choices.append(Choice((plain(device.name), *[NONE] * 5, said), device.name))
    start = next((place for place, one in enumerate(choices) if one.value == part.balance), 0)

    def take(name: object) -> None:
        if isinstance(name, str) and name != part.balance:
            app.apply(SetValue((*part.path, "balance"), name), f"balance of {id_}")

    heads = ("device", f"open {pressure}", "drop", "setting", "signal", f"required {pressure}", "")
    return Offer(f"device of {plain(id_)}", heads, choices, take, start=start)
