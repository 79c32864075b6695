"""The commissioning schedule as text, as CSV and as JSON."""

from __future__ import annotations

import csv
import dataclasses
import io
import math
import re
from collections.abc import Iterable, Iterator
from typing import Any

from budget.description import Description
from budget.network.commissioning import Next
from budget.report.caution import CAUTION
from budget.report.figures import NONE, Figures, plain_number
from budget.report.json import results
from budget.report.located import Located
from budget.report.plain import plain
from budget.report.schedule import Row, Schedule
from budget.report.table import Column, labelled, table, wrapped
from budget.units import Dimension

BLANK = "________"
"""Room to write in what is measured."""

LONGEST = 20
"""Columns that an ID, a device or a size may take in the text; CSV and JSON have it whole."""

_FORMULA = re.compile("(^|;)(?=\\s*[=+@\uff1d\uff0b\uff0d\uff20-])")
"""Where a spreadsheet begins a formula; four of the signs are full-width."""

TOLD = (
    "order", "id", "kind", "source", "branch", "location", "title", "design_flow", "device", "size", "setting", "drop",
    "signal", "tolerance", "remarks",
)  # fmt: skip
"""Fields of a row that JSON has under the same names."""


def schedule_text(description: Description, found: Schedule, figures: Figures, findings: Iterable[Located]) -> str:
    """Return the schedule as text of at most 100 columns but for long names: title, rows by branch, next step."""
    design = description.design
    head = wrapped(plain(design.title) or "Untitled run")
    head += labelled(
        [
            ("number", plain(design.number)),
            ("revision", plain(design.revision)),
            ("tolerance", f"{100.0 * description.limits.tolerance:g} % of the design flow, either way"),
        ]
    )
    parts = [head]
    if found.next is not None:
        parts.append(["Next step", *wrapped(next_text(description, found.next, figures), "  ", "  ")])
    parts.append(["Order of work", *_lines(description, found, figures)])
    said = [f"{one.level.value} {one.code}: {plain(one.table)}: {plain(one.message)}" for one in findings]
    parts.append(["Findings", *(line for text in said for line in wrapped(text, "  ", "    "))] if said else [])
    parts.append(["Caution", *wrapped(CAUTION, "  ", "  ")])
    return "\n\n".join("\n".join(lines) for lines in parts if lines) + "\n"


def _lines(description: Description, found: Schedule, figures: Figures) -> Iterator[str]:
    pressure = figures.unit(Dimension.PRESSURE)
    columns = [
        Column("no."),
        Column("ID", left=True),
        Column("device", left=True),
        Column("size", left=True),
        Column("flow", figures.unit(Dimension.FLOW)),
        Column("setting"),
        Column("drop", pressure),
        Column("signal", pressure),
    ]
    cells = [
        (
            str(row.order),
            _cut(row.id),
            _cut(row.device) or NONE,
            _cut(row.size) or NONE,
            figures.flow(row.design_flow, row.mass_flow),
            plain_number(row.setting),
            figures.pressure(row.drop, row.density),
            figures.pressure(row.signal, row.density),
        )
        for row in found.rows
    ]
    lines = table(columns, cells)
    heads = len(lines) - len(cells)
    yield from lines[:heads]
    branch = None
    for row, line in zip(found.rows, lines[heads:], strict=True):
        if row.branch != branch:
            branch = row.branch
            yield ""
            yield from wrapped(_branch_title(description, branch), "  ", "    ")
        yield line
        said = "; ".join(plain(text) for text in (row.title, row.location, *row.remarks) if text)
        yield from wrapped(said, "       ", "       ") if said else ()
        yield "       " + _measured_text(row, figures)


def _branch_title(description: Description, branch: str) -> str:
    if not branch:
        return "Source"
    part = description.sections.get(branch) or description.sources[branch]
    what = "Branch" if branch in description.sections else "On source"
    return f"{what} {plain(branch)}" + (f": {plain(part.title)}" if part.title else "")


def _cut(text: str) -> str:
    text = plain(text)
    return text if len(text) <= LONGEST else text[: LONGEST - 3].rstrip() + "..."


def _measured_text(row: Row, figures: Figures) -> str:
    if row.reading is None:
        return f"measured flow {BLANK}  signal {BLANK}  date {BLANK}  signed {BLANK}"
    said = [f"measured flow {_measured_flow(row, figures) or NONE} {figures.unit(Dimension.FLOW)}"]
    if row.judged is not None:
        said.append(f"{100.0 * row.judged.share:.0f} %, {row.judged.verdict}")
    if row.measured_signal is not None:
        said.append(f"signal {_signal(row, figures)} {figures.unit(Dimension.PRESSURE)}")
    said.append(f"date {row.reading.date or BLANK}")
    return "  ".join([*said, f"signed {BLANK}"])


def _measured_flow(row: Row, figures: Figures) -> str:
    if row.judged is None:
        return ""
    return figures.flow(row.judged.flow, row.judged.share * row.mass_flow)


def _signal(row: Row, figures: Figures) -> str:
    return "" if row.measured_signal is None else figures.pressure(row.measured_signal, row.density)


def next_text(description: Description, what: Next, figures: Figures) -> str:
    """Say in a sentence what to do next."""
    id_, branch = plain(what.id), plain(what.branch)
    where = f"in branch {branch}" if what.branch in description.sections else f"on {branch}"
    share, target = f"{100.0 * what.share:.0f} %", f"{100.0 * what.target:.0f} %"
    flow = figures.text(what.flow, Dimension.FLOW, unit=True)
    match what.action:
        case "measure":
            return f"Measure {id_}: the others {where} can't be brought into proportion without it."
        case "adjust":
            return (
                f"Adjust {id_} {where} from {share} to {target}, {flow}: the share of {plain(what.reference)}, the "
                "least supplied one. It rises as the others are throttled: measure both again."
            )
        case "source":
            goal = f" to {target} of its design flow, {flow}," if target != "nan %" else ""
            return f"Set {id_}{goal} from {share}: all that hangs on it is in proportion."
        case "look":
            return f"Look after {id_}: {share} of its design flow, and no device there can put it right."
    return "Nothing: every flow that counts was measured and is within its tolerance."


def schedule_csv(found: Schedule, figures: Figures) -> str:
    """Return the schedule as CSV (RFC 4180), in the units of the design; no cell begins a formula in a spreadsheet."""
    flow, pressure = figures.unit(Dimension.FLOW), figures.unit(Dimension.PRESSURE)
    text = io.StringIO()
    writer = csv.writer(text)
    writer.writerow(
        [
            "order", "ID", "branch", "location", "title", f"design flow [{flow}]", "device", "size", "setting",
            f"drop [{pressure}]", f"expected signal [{pressure}]", "tolerance [%]", "remarks",
            f"measured flow [{flow}]", "percent of design", "verdict", f"measured signal [{pressure}]", "date",
            "signed",
        ]
    )  # fmt: skip
    for row in found.rows:
        share = "" if row.judged is None else f"{100.0 * row.judged.share:.1f}"
        writer.writerow(
            [
                row.order, harmless(row.id), harmless(row.branch), harmless(row.location), harmless(row.title),
                _figure(figures.flow(row.design_flow, row.mass_flow)), harmless(row.device), harmless(row.size),
                _figure(plain_number(row.setting, 4)), _figure(figures.pressure(row.drop, row.density)),
                _figure(figures.pressure(row.signal, row.density)), f"{100.0 * row.tolerance:g}",
                harmless("; ".join(row.remarks)), _figure(_measured_flow(row, figures)), share,
                row.judged.verdict if row.judged else "", _figure(_signal(row, figures)),
                row.reading.date if row.reading else "", "",
            ]
        )  # fmt: skip
    return text.getvalue()


def harmless(text: str) -> str:
    """Return a text as a cell that no spreadsheet takes for a formula: with an apostrophe before what begins one.

    So too behind a semicolon, by which some spreadsheets split the cells whatever quotes stand around them.
    """
    said = _FORMULA.sub(r"\1'", plain(text))
    return f"'{said}" if text.startswith(("\t", "\r", "\n")) and not said.startswith("'") else said


def _figure(text: str) -> str:
    return "" if text == NONE else text


def schedule_json(
    version: str,
    file: str,
    description: Description,
    found: Schedule | None,
    findings: Iterable[Located],
    readings: tuple[str, Iterable[Located]] | None = None,
) -> dict[str, Any]:
    """Return the schedule as one object in SI; of a run that can't be read the file and its findings alone.

    `readings` are the file of the readings and the findings that stand there.
    """
    shown = results(version, file, description, None, findings)
    if found is None:
        return shown
    what = None if found.next is None else {k: _known(v) for k, v in dataclasses.asdict(found.next).items()}
    said = {"tolerance": description.limits.tolerance, "schedule": [_object(row) for row in found.rows], "next": what}
    measured = None
    if readings is not None:
        name, there = readings
        measured = {"file": name, "findings": results(version, name, description, None, there)["findings"]}
    head = {key: shown[key] for key in ("format", "program", "file")}
    return {**head, **said, "readings": measured, "findings": shown["findings"]}


def _object(row: Row) -> dict[str, Any]:
    measured = None
    if row.reading is not None:
        measured = {
            "flow": row.judged.flow if row.judged else None,
            "share": row.judged.share if row.judged else None,
            "verdict": row.judged.verdict if row.judged else None,
            "signal": row.measured_signal,
            "setting": row.reading.setting,
            "date": row.reading.date or None,
            "note": row.reading.note,
        }
    return {key: _known(getattr(row, key)) for key in TOLD} | {"measured": measured}


def _known(value: Any) -> Any:
    return None if isinstance(value, float) and not math.isfinite(value) else value
