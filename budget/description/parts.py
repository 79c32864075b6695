"""Sources, sections, terminals and what stands in line on them, from their tables."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from budget.description.codes import CODES
from budget.description.finding import Path, warning
from budget.description.fittings import check_leakage, check_takeoff, read_fittings
from budget.description.model import Geometry, Item, Line, Link, Run, Section, Source, Terminal
from budget.description.schema import RUN
from budget.description.scope import Scope
from budget.description.sizes import read_duct_size, read_pipe_size
from budget.description.values import Reading, nearest
from budget.physics.fittings import CV_PER_KV

_DROP_KEYS = {
    "at": ("drop", "clean"),
    "exponent": ("drop", "clean"),
    "tested_density": ("drop", "clean"),
    "state": ("clean",),
}
"""Keys of an item that say more about a drop, and with which forms of it."""

_ITEM_FORMS = ("k", "kv", "cv", "drop", "equivalent_length", "clean")
_TEXTS = ("title", "note", "location")
_RUN_OUT_KEYS = (*(key for key in RUN if key not in ("takeoff", "junction", "angle", "class")),)


def read_source(reading: Reading, id_: str, values: dict[str, Any], path: Path, scope: Scope) -> Source:
    """Read a pump or a fan."""
    items = _items(scope, values, path)
    for item in items:
        if item.control:
            text = "a control item stands on a section or terminal; remove control"
            reading.wrong("contradiction", text, (*item.path, "control"))
        for key in ("k", "equivalent_length"):
            if getattr(item, key) is not None:
                text = f"{key} has no velocity to refer to on a source; state kv or drop"
                reading.wrong("no-reference", text, (*item.path, key))
    outlet = read_duct_size(reading, values["outlet"], (*path, "outlet"), remark=False) if "outlet" in values else None
    if outlet is not None and not reading.gas:
        reading.wrong("contradiction", "an outlet belongs to a fan; remove it", (*path, "outlet"))
    if values.get("open") and reading.gas:
        reading.wrong("contradiction", "a gas has no open circuit; remove open", (*path, "open"))
    if values.get("controls") == "differential" and "set_point" not in values:
        reading.wrong("missing", "it controls a differential; state its set_point", (*path, "set_point"))
    for key, owner in (("set_point", 'controls = "differential"'), ("sensor", 'controls = "differential"')):
        if key in values and values.get("controls") != "differential":
            reading.wrong("contradiction", f"{key} belongs to {owner}; state that, or remove it", (*path, key))
    for key in ("curve_density", "curve_is"):
        if key in values and "curve" not in values:
            reading.wrong("contradiction", f"{key} without a curve; state curve, or remove it", (*path, key))
    known = Source.__dataclass_fields__
    kept = {key: value for key, value in values.items() if key in known and key not in ("item", "outlet")}
    return Source(id=id_, path=path, items=items, outlet=outlet, **kept)


def read_section(reading: Reading, id_: str, values: dict[str, Any], path: Path, scope: Scope) -> Section:
    """Read a section."""
    if "from" in values and "to" in values:
        reading.wrong("contradiction", "from and to are both stated; a section has one of them", (*path, "to"))
        values.pop("to")
    _check_connected(reading, values, path)
    run = _run(scope, values, path)
    return Section(
        id=id_,
        path=path,
        from_=values.get("from"),
        to=values.get("to"),
        run=run,
        items=_items(scope, values, path),
        balance=scope.check_device(values, path, terminal=False),
        setting=values.get("setting"),
        rise=values.get("rise", 0.0),
        takeoff=values.get("takeoff", scope.defaults.get("takeoff")),
        takeoff_stated="takeoff" in values,
        accept=_accept(scope, values, path),
        **{key: values[key] for key in _TEXTS if key in values},
    )


_NOT_ON_LINKS = {
    "takeoff": "a junction in a ring is not counted; remove it, and state k as an item",
    "transition": "no section is nearer the source than the other; remove it, and state k as an item",
    "diversity": "its flow comes from solving the network; remove it",
    "rise": "its height is that of the sections that it joins; remove it",
    "balance": "what it takes up would move the flows of the ring; remove it, and state its Kv as an item",
    "setting": "a link has no device; remove it, and state its Kv as an item",
}
"""Keys of a section that a link can't have, and what to do instead."""


def read_link(reading: Reading, id_: str, values: dict[str, Any], path: Path, scope: Scope) -> Link:
    """Read a link; that what it joins is there and fits is found where the run is connected."""
    for key in ("from", "to"):
        if key not in values and not reading.faulty((*path, key)):
            reading.wrong("missing", f"{key} is not stated; name the section that the link joins", path)
    for key, remedy in _NOT_ON_LINKS.items():
        if key in values:
            reading.wrong("contradiction", f"{key} on a link: {remedy}", (*path, key))
            values.pop(key)
    items = _items(scope, values, path)
    for item in items:
        if item.control:
            text = "a control item stands on a section or terminal; remove control"
            reading.wrong("contradiction", text, (*item.path, "control"))
    return Link(
        id=id_,
        path=path,
        from_=values.get("from"),
        to=values.get("to"),
        run=_run(scope, values, path),
        items=items,
        accept=_accept(scope, values, path),
        **{key: values[key] for key in _TEXTS if key in values},
    )


def read_terminal(reading: Reading, id_: str, values: dict[str, Any], path: Path, scope: Scope) -> Terminal:
    """Read a terminal, with its run-out where it has a size or bore."""
    _one_of(reading, values, ("flow", "load"), path)
    _one_of(reading, values, ("drop", "static_drop"), path)
    _check_connected(reading, values, path)
    for key in ("at", "exponent"):
        if key in values and not any(k in values or reading.faulty((*path, k)) for k in ("drop", "static_drop")):
            reading.wrong("contradiction", f"{key} without a drop; state drop, or remove it", (*path, key))
    neck = read_duct_size(reading, values["neck"], (*path, "neck"), remark=False) if "neck" in values else None
    if "static_drop" in values and "neck" not in values:
        reading.wrong("missing", "static_drop holds at a neck; state neck", (*path, "static_drop"))
    for key in ("static_drop", "neck"):
        if key in values and not reading.gas:
            reading.wrong("contradiction", f"{key} belongs to air terminals; remove it, state drop", (*path, key))
    run = None
    if "size" in values or "bore" in values:
        run = _run(scope, values, path)
    else:
        sized = reading.faulty((*path, "size")) or reading.faulty((*path, "bore"))
        for key in values:
            if key in _RUN_OUT_KEYS and not sized:
                reading.wrong("missing", f"{key} describes a run-out, which needs a size; state size", (*path, key))
    items = _items(scope, values, path)
    drops = ("drop", "static_drop", "outlet_pressure")
    if not items and not any(key in values or reading.faulty((*path, key)) for key in drops):
        reading.findings.append(
            warning("no-drop", "the terminal has no drop; its own pressure drop counts as nothing", path)
        )
    kept = ("flow", "load", "return_temperature", "drop", "at", "exponent", "static_drop", "rise", "outlet_pressure")
    return Terminal(
        id=id_,
        path=path,
        from_=values.get("from"),
        to=values.get("to"),
        neck=neck,
        run=run,
        items=items,
        balance=scope.check_device(values, path, terminal=True),
        setting=values.get("setting"),
        takeoff=values.get("takeoff", scope.defaults.get("takeoff")),
        takeoff_stated="takeoff" in values,
        accept=_accept(scope, values, path),
        **{key: values[key] for key in (*_TEXTS, *kept) if key in values},
    )


def _run(scope: Scope, values: Mapping[str, Any], path: Path) -> Run:
    reading, defaults = scope.reading, scope.defaults
    line = scope.line_of(values, path)
    if "length" not in values and not reading.faulty((*path, "length")):
        reading.wrong("missing", 'the length is not stated; write length = "12 m"', (*path, "length"))
    if "compression" in values and not (line and line.flexible):
        reading.wrong("contradiction", "compression belongs to flexible duct; remove it", (*path, "compression"))
    check_takeoff(scope, values, path)
    fittings, uses = read_fittings(scope, values, line, path)
    method = values.get("fitting_method", defaults.get("fitting_method", "by size"))
    return Run(
        line=line,
        geometry=_geometry(scope, values, line, path),
        length=values.get("length"),
        paired=values.get("paired", defaults.get("paired", False)),
        paired_stated="paired" in values,
        compression=values.get("compression", line.compression if line else 0.0),
        fittings=fittings,
        uses=uses,
        fitting_method=method,
        junction=values.get("junction", defaults.get("junction", "tee-crane")),
        angle=values.get("angle", defaults.get("angle", 90.0)),
        own_junction=frozenset(values).intersection(("junction", "angle")),
        transition=values.get("transition"),
        leakage=check_leakage(scope, values, line, path),
        limit_velocity=values.get("limit_velocity"),
        limit_gradient=values.get("limit_gradient"),
        class_=values.get("class", defaults.get("class")),
        diversity=values.get("diversity"),
    )


def _geometry(scope: Scope, values: Mapping[str, Any], line: Line | None, path: Path) -> Geometry | None:
    reading = scope.reading
    if "size" in values and "bore" in values:
        reading.wrong("contradiction", "size and bore are both stated; keep one", (*path, "bore"))
    if "bore" in values:
        if line is not None and line.kind == "duct":
            reading.wrong("contradiction", "bore belongs to a pipe; write size for a duct", (*path, "bore"))
            return None
        bore = values["bore"]
        return Geometry("round", bore, bore, bore, f"{bore * 1000:g} mm bore")
    if "size" not in values:
        if not (reading.faulty((*path, "bore")) or reading.faulty((*path, "size"))):
            reading.wrong("missing", "the size is not stated; write size (or bore, for a pipe)", (*path, "size"))
        return None
    if line is None:
        return None
    if line.kind == "pipe":
        return read_pipe_size(reading, values["size"], line, (*path, "size"))
    return read_duct_size(reading, values["size"], (*path, "size"))


def _items(scope: Scope, values: Mapping[str, Any], path: Path) -> tuple[Item, ...]:
    items = []
    for place, entry in enumerate(values.get("item", ())):
        items.append(_item(scope.reading, entry, (*path, "item", place)))
    controls = [item for item in items if item.control]
    for extra in controls[1:]:
        scope.reading.wrong(
            "contradiction", "a section or terminal has one control item; remove control here", (*extra.path, "control")
        )
    return tuple(items)


def _item(reading: Reading, entry: Mapping[str, Any], path: Path) -> Item:
    forms = [key for key in _ITEM_FORMS if key in entry]
    if not forms and not reading.faulty(path):
        text = "the item has no drop; state k, kv, cv, drop, clean and final, or equivalent_length"
        reading.wrong("missing", text, path)
    if len(forms) > 1:
        reading.wrong("contradiction", f"{' and '.join(forms)} are both stated; keep one", (*path, forms[1]))
        forms = forms[:1]
    if ("clean" in entry) != ("final" in entry):
        missing = "final" if "clean" in entry else "clean"
        reading.wrong("missing", f"a filter needs clean and final; state {missing}", (*path, missing))
    for key, owners in _DROP_KEYS.items():
        if key in entry and not set(forms) & set(owners) and not reading.faulty(path):
            reading.wrong("contradiction", f"{key} without {owners[0]}; remove it", (*path, key))
    for key in ("characteristic", "rangeability"):
        if key in entry and "control" not in entry:
            reading.wrong("contradiction", f"{key} belongs to a control item; state control", (*path, key))
    kept = {key: value for key, value in entry.items() if key in Item.__dataclass_fields__}
    for key in _ITEM_FORMS:
        if key not in forms:
            kept.pop(key, None)
    kept.setdefault("name", "item")
    if "cv" in forms:
        kept["kv"] = entry["cv"] / CV_PER_KV
    return Item(path=path, **kept)


def _check_connected(reading: Reading, values: Mapping[str, Any], path: Path) -> None:
    if not any(key in values or reading.faulty((*path, key)) for key in ("from", "to")):
        reading.wrong("missing", "neither from nor to is stated; name what it hangs on", (*path, "from"))


def _one_of(reading: Reading, values: dict[str, Any], keys: tuple[str, str], path: Path) -> None:
    if all(key in values for key in keys):
        reading.wrong("contradiction", f"{keys[0]} and {keys[1]} are both stated; keep one", (*path, keys[1]))
        values.pop(keys[1])


def _accept(scope: Scope, values: Mapping[str, Any], path: Path) -> dict[str, str]:
    accepted = {}
    for code, reason in values.get("accept", {}).items():
        place: Path = (*path, "accept", code)
        if code not in CODES:
            hint = nearest(code, CODES, 3)
            scope.reading.wrong("unknown-code", f"{code!r} is not a finding code; {hint}", place)
        elif CODES[code].level == "error":
            text = f"{code!r} is an error, which can't be accepted; mend it and remove this"
            scope.reading.wrong("unknown-code", text, place)
        else:
            accepted[code] = reason
    return accepted
