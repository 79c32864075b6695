"""The target `reading`: the bytes of a file, read, computed and reported as the commands do it."""

from __future__ import annotations

import json
import unicodedata

from budget.description import CODES, describe, read_bytes
from budget.network import evaluate
from budget.report.json import results
from budget.report.lines import finding_line
from budget.report.located import Located, locate
from budget.report.text import text_report
from tests.fuzz import spans


def reading(data: bytes) -> None:
    """Read, compute and report a file; look at every place and every line, and at the index of the text."""
    source = read_bytes(data)
    description = describe(source)
    budget = evaluate(description)
    found = locate(budget.findings, source, description)
    assert source.data is not None or found, "a file that can't be read has no finding"
    lines = source.text.split("\n")
    for one in found:
        _check(one, lines)
    report = text_report(description, budget, found)
    assert not _controls(report.replace("\n", "")), "a control character left in the report"
    json.dumps(results("0", "run.toml", description, budget, found), allow_nan=False)
    spans.compare(source)


def _check(one: Located, lines: list[str]) -> None:
    assert one.code in CODES, one
    assert one.message, one
    if lines != [""]:
        assert 1 <= one.line <= len(lines), one
        assert 1 <= one.column <= len(lines[one.line - 1]) + 1, one
    line = finding_line("run.toml", one)
    assert not _controls(line), repr(line)


def _controls(text: str) -> list[str]:
    """Return the characters that a terminal would obey."""
    return [c for c in text if unicodedata.category(c) in ("Cc", "Cf", "Cs", "Zl", "Zp")]
