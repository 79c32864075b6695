"""Tables by name: what stands once, what stands by ID, and the fittings and devices of one's own."""

from __future__ import annotations

import math
import unicodedata
from collections.abc import Callable, Mapping
from itertools import pairwise
from typing import Any

from budget.catalogue import fitting_names, kinds_by_name
from budget.description.finding import Path, dotted, warning
from budget.description.limits import LONGEST_ID
from budget.description.model import Case, Device, OwnFitting, SourceCase
from budget.description.schema import FORMAT, KEYED, SINGLE
from budget.description.values import Reading, what_is
from budget.physics.fittings import CV_PER_KV


def single(reading: Reading, data: Mapping[str, Any], table: str) -> dict[str, Any]:
    """Read a table that stands once; empty where it is not there."""
    return reading.table(data[table], SINGLE[table], (table,)) if table in data else {}


def keyed(
    reading: Reading,
    data: Mapping[str, Any],
    table: str,
    build: Callable[..., Any],
    *context: Any,
) -> dict[str, Any]:
    """Read the tables of one name by their IDs, each made by `build(reading, id, values, path, *context)`."""
    entries = data.get(table, {})
    if not isinstance(entries, dict):
        reading.wrong("type", f"{table} must hold tables with an ID each; write [{table}.ID]", (table,))
        return {}
    built = {}
    for id_, entry in entries.items():
        path: Path = (table, id_)
        if not isinstance(entry, dict):
            reading.wrong("type", f"{id_!r} must be a table; write [{dotted(path)}], or correct the key", path)
            continue
        values = reading.table(entry, KEYED[table], path)
        built[id_] = build(reading, id_, values, path, *context)
    return built


def check_format(reading: Reading, data: Mapping[str, Any]) -> None:
    """Find a file that does not say, or says too late, which format it has."""
    stated = data.get("format")
    if stated is None:
        reading.wrong("format", f"the format is not stated; write format = {FORMAT} as the first line", ())
    elif stated != FORMAT or isinstance(stated, bool):
        reading.wrong("format", f"{what_is(stated)} is no format known here; write format = {FORMAT}", ("format",))
    elif next(iter(data)) != "format":
        reading.wrong("format", "format must be the first line; move it up", ("format",))


def check_id(reading: Reading, path: Path) -> None:
    """Find an ID or name that can't be shown or typed."""
    id_ = str(path[-1])
    if not id_.strip() or len(id_) > LONGEST_ID:
        reading.wrong("id", f"an ID has 1 to {LONGEST_ID} characters, not all blank; rename it", path)
    if any(unicodedata.category(c) in ("Cc", "Cf", "Cs", "Zl", "Zp") for c in id_):
        reading.wrong("control-character", "the ID has a control character; rename it without", path)


def own_fitting(reading: Reading, id_: str, values: dict[str, Any], path: Path) -> OwnFitting:
    """Read a fitting of one's own."""
    if "k" not in values and not reading.faulty((*path, "k")):
        reading.wrong("missing", f"the fitting {id_!r} has no loss coefficient; write k = 0.75", path)
    # A kind that needs parameters can't be meant by a name alone.
    if id_ in fitting_names() or id_ in kinds_by_name():
        reading.wrong("contradiction", f"{id_!r} is a fitting of the catalogue too; give one's own another name", path)
    return OwnFitting(id_, values.get("k", math.nan), values.get("source", ""))


def device(reading: Reading, id_: str, values: dict[str, Any], path: Path) -> Device:
    """Read a balancing device."""
    tables = [key for key in ("kv", "cv", "k") if key in values]
    if len(tables) > 1:
        reading.wrong("contradiction", f"{' and '.join(tables)} are both stated; keep one", (*path, tables[1]))
    kv = values.get("kv", ())
    if "cv" in values:
        kv = tuple((setting, cv / CV_PER_KV) for setting, cv in values["cv"])
    holds = values.get("holds")
    if not tables and holds is None and not any(reading.faulty((*path, key)) for key in ("kv", "cv", "k", "holds")):
        reading.wrong("missing", f"the device {id_!r} has no setting table; write kv, cv, k or holds", path)
    if holds is not None and "least_drop" not in values and not tables and not reading.faulty(path):
        reading.findings.append(
            warning("no-drop", f"the device {id_!r} has no least_drop; its base drop counts as nothing", path)
        )
    for key, owner in (("greatest_drop", "flow"), ("set_point", "differential")):
        if key in values and holds != owner and not reading.faulty((*path, "holds")):
            reading.wrong("contradiction", f'{key} belongs to holds = "{owner}"; remove it', (*path, key))
    least, greatest = values.get("least_drop"), values.get("greatest_drop")
    if least and greatest and least.basis is greatest.basis and greatest.value < least.value:
        reading.wrong("contradiction", "greatest_drop is below least_drop; correct one", (*path, "greatest_drop"))
    for key in tables:
        curve = [second for _, second in values[key]]
        steps = [later - earlier for earlier, later in pairwise(curve)]
        if steps and not (all(step > 0 for step in steps) or all(step < 0 for step in steps)):
            reading.wrong("order", f"{key} must rise or fall all the way; correct the table", (*path, key))
    return Device(
        name=id_,
        kv=kv,
        k=values.get("k", ()) if not kv else (),
        **{
            key: values[key]
            for key in ("signal_kv", "least_signal", "least_drop", "greatest_drop", "holds", "set_point", "source")
            if key in values
        },
    )


def case(_reading: Reading, id_: str, values: dict[str, Any], path: Path) -> Case:
    """Read a case of the flows as installed."""
    return Case(
        id=id_,
        path=path,
        title=values.get("title", ""),
        note=values.get("note", ""),
        off=tuple(values.get("off", ())),
        share=values.get("share", {}),
        stroke=values.get("stroke", {}),
        sources={name: SourceCase(**stated) for name, stated in values.get("source", {}).items()},
    )
