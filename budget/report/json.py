"""Results as one JSON object: SI base units, named as the results are named, null for what can't be computed."""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Iterable
from typing import Any

from budget.catalogue import CATALOGUE_VERSION
from budget.description import Description
from budget.network import (
    Budget,
    DeviceResult,
    RunResult,
    SectionResult,
    SourceResult,
    TerminalResult,
)
from budget.report.located import Located

FORMAT = 1

_TOLD_ELSEWHERE = ("losses", "joints")
"""Parts of a leg that the sums of its section hold."""


def results(
    version: str, file: str, description: Description, budget: Budget | None, findings: Iterable[Located]
) -> dict[str, Any]:
    """Return everything computed for one file; of an unreadable one the file and its findings alone."""
    shown = [_finding(finding) for finding in findings]
    program = {"version": version, "catalogue": CATALOGUE_VERSION}
    if budget is None:
        return {"format": FORMAT, "program": program, "file": file, "findings": shown}
    found = {
        "format": FORMAT,
        "program": program,
        "file": file,
        "design": dataclasses.asdict(description.design),
        "fluid": None if budget.fluid is None else dataclasses.asdict(budget.fluid),
        "sources": {id_: _source(description, result) for id_, result in budget.sources.items()},
        "sections": {id_: _section(result) for id_, result in budget.sections.items()},
        "terminals": {id_: _terminal(result) for id_, result in budget.terminals.items()},
        "findings": shown,
    }
    if budget.links:
        found["links"] = {id_: _run(result.run) for id_, result in budget.links.items()}
    cleaned: dict[str, Any] = _clean(found)
    return cleaned


def _clean(value: Any) -> Any:
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, dict):
        return {key: _clean(inner) for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [_clean(inner) for inner in value]
    return value


def _overrides(description: Description, id_: str) -> bool:
    source = description.sources[id_]
    return source.temperature is not None or source.return_temperature is not None


def _source(description: Description, result: SourceResult) -> dict[str, Any]:
    values = {
        key: getattr(result, key)
        for key in (
            "kind",
            "flow",
            "mass_flow",
            "required",
            "static",
            "reserve",
            "duty",
            "duty_flow",
            "available",
            "in_hand",
            "index",
            "discharge_required",
            "suction_required",
            "static_pressure",
            "external_total",
            "external_static",
            "hydraulic_power",
            "shaft_power",
            "electrical_power",
            "sfp",
            "leakage",
        )
    }
    values |= {"items": result.items_drop, "spent": dict(result.spent), "budget": dict(result.budget)}
    if _overrides(description, result.id):
        values["fluid"] = dataclasses.asdict(result.fluid)
    return values


def _run(run: RunResult) -> dict[str, Any]:
    values = {field.name: getattr(run, field.name) for field in dataclasses.fields(run) if field.name != "legs"}
    legs = [
        {field.name: getattr(leg, field.name) for field in dataclasses.fields(leg) if field.name not in _TOLD_ELSEWHERE}
        for leg in run.legs
    ]
    return values | {"legs": legs}


def _section(result: SectionResult) -> dict[str, Any]:
    run = _run(result.run)
    legs = run.pop("legs")
    return run | {
        "cumulative": result.cumulative,
        "differential": result.differential,
        "margin": result.margin,
        "index": result.index,
        "serves": result.serves,
        "authority": result.authority,
        "authority_low": result.authority_low,
        "device": _device(result.device),
        "legs": legs,
    }


def _terminal(result: TerminalResult) -> dict[str, Any]:
    return {
        "flow": result.flow,
        "mass_flow": result.mass_flow,
        "circuit": result.circuit,
        "drop": result.drop,
        "items": result.items_drop,
        "static": result.static,
        "run_out": None if result.run_out is None else _run(result.run_out),
        "differential": result.differential,
        "margin": result.margin,
        "excess": result.excess,
        "index": result.index,
        "path": result.path,
        "authority": result.authority,
        "authority_low": result.authority_low,
        "device": _device(result.device),
    }


def _device(device: DeviceResult | None) -> dict[str, Any] | None:
    if device is None:
        return None
    opening = "k" if device.k is not None else "kv"
    return {
        "name": device.name,
        "base": device.base,
        "take_up": device.take_up,
        "drop": device.drop,
        opening: device.k if device.k is not None else device.kv,
        "setting": device.setting,
        "signal": device.signal,
    }


def _finding(finding: Located) -> dict[str, Any]:
    return {
        "level": finding.level.value,
        "code": finding.code,
        "message": finding.message,
        "table": finding.table,
        "key": finding.key,
        "line": finding.line,
        "column": finding.column,
    }
