"""What changed between two versions of a run, as lines of text and as JSON."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from budget.catalogue import CATALOGUE_VERSION
from budget.description.differences import TableChanges
from budget.description.finding import dotted
from budget.report.changes import Changes, FigureChange, Kind, RowChanges
from budget.report.differences import clipped, difference_lines
from budget.report.json import FORMAT
from budget.report.located import Located
from budget.report.plain import plain
from budget.report.table import WIDE, Column, table

TITLES: Mapping[Kind, str] = {
    "source": "Sources",
    "terminal": "Terminals",
    "device": "Balancing devices",
    "section": "Sections",
    "link": "Links",
}

_INDENT = "  "
_WIDEST = 30
"""Columns that an ID or a text takes in a table of figures; the rest of it is cut off."""

_COLUMNS = (
    Column("", left=True),
    Column("", left=True),
    Column("before"),
    Column("after"),
    Column("change"),
    Column("", left=True, optional=True),
)


def changes_lines(changes: Changes, width: int = WIDE, first: tuple[Kind, ...] = ()) -> tuple[str, ...]:
    """Return all that changed: keys table by table, figures by what they belong to, findings; none for nothing.

    No line is wider than `width` columns. The figures of the kinds in `first` stand before the keys.
    """
    parts = [_figures(changes, kind) for kind in first]
    keys = [_INDENT + line for line in difference_lines(changes.keys, width - len(_INDENT))]
    parts.append(["Keys", *keys] if keys else [])
    parts += [_figures(changes, kind) for kind in TITLES if kind not in first]
    parts += [_findings("New findings", changes.new, width), _findings("Findings that are gone", changes.gone, width)]
    lines = "\n\n".join("\n".join(part) for part in parts if part)
    return tuple(clipped(line, width) for line in lines.split("\n")) if lines else ()


def _figures(changes: Changes, kind: Kind) -> list[str]:
    rows = [cells for row in changes.rows if row.kind == kind for cells in _cells(row)]
    return [TITLES[kind], *table(_COLUMNS, rows, _INDENT)] if rows else []


def _cells(row: RowChanges) -> Iterator[tuple[str, ...]]:
    id_ = clipped(plain(row.id), _WIDEST)
    if row.standing != "changed":
        yield (id_, row.standing, "", "", "", "")
    for one in row.figures:
        yield (id_, one.title, clipped(one.before, _WIDEST), clipped(one.after, _WIDEST), one.difference, one.unit)


def _findings(title: str, findings: Iterable[Located], width: int) -> list[str]:
    lines = []
    for one in findings:
        place = ".".join(filter(None, (one.table, one.key)))
        text = f"{one.level.value} {one.code}: {plain(place)}: {plain(one.message)}"
        lines += textwrap.wrap(
            text, max(width, 20), initial_indent=_INDENT, subsequent_indent=_INDENT * 2, break_on_hyphens=False
        )
    return [title, *lines] if lines else []


def changes_object(version: str, file: str, before: Mapping[str, str], changes: Changes) -> dict[str, Any]:
    """Return all that changed as one JSON object; `before` names the version that `file` is compared with.

    Figures are in SI base units and named as the results are named; null stands for what can't be computed.
    """
    figures: dict[str, dict[str, Any]] = {f"{kind}s": {} for kind in TITLES}
    for row in changes.rows:
        figures[f"{row.kind}s"][row.id] = {
            "standing": row.standing,
            "figures": {one.name: _figure(one) for one in row.figures},
        }
    return {
        "format": FORMAT,
        "program": {"version": version, "catalogue": CATALOGUE_VERSION},
        "file": file,
        "before": dict(before),
        "changed": bool(changes),
        "keys": [_table(one) for one in changes.keys],
        **figures,
        "findings": {
            "new": [_finding(one) for one in changes.new],
            "gone": [_finding(one) for one in changes.gone],
        },
    }


def _figure(one: FigureChange) -> dict[str, Any]:
    values: dict[str, Any] = {"before": one.was, "after": one.now}
    if isinstance(one.was, float) and isinstance(one.now, float):
        values["difference"] = one.now - one.was
    return values


def _table(one: TableChanges) -> dict[str, Any]:
    changes = [
        {"key": dotted(change.path), "about": change.about, "before": change.before, "after": change.after}
        for change in one.changes
    ]
    return {"table": dotted(one.table), "kind": one.kind, "changes": changes, "lines": list(one.lines)}


def _finding(one: Located) -> dict[str, Any]:
    return {
        "level": one.level.value,
        "code": one.code,
        "message": one.message,
        "table": one.table,
        "key": one.key,
    }
