"""Everything that can be wrong with a file is found, at its place, in a sentence that says what to do."""

from __future__ import annotations

import time

import pytest

from budget.description import CODES
from budget.report.located import FAULTS_OF_KEYS
from tests.description import faults, wrong_fittings, wrong_runs
from tests.description.faults import Fault
from tests.description.reading import findings_in
from tests.description.sound import SOUND, SOUND_AIR, SOUND_OPEN

GROUPS = {
    name: group
    for module in (faults, wrong_fittings, wrong_runs)
    for name, group in vars(module).items()
    if isinstance(group, tuple) and group and isinstance(group[0], Fault)
}
FAULTS = [pytest.param(fault, id=f"{name}: {fault.name}") for name, group in GROUPS.items() for fault in group]


@pytest.mark.parametrize("text", [SOUND, SOUND_AIR, SOUND_OPEN], ids=["liquid", "air", "open"])
def test_a_sound_run_has_no_finding(text: str) -> None:
    assert findings_in(text.encode()) == ()


@pytest.mark.parametrize("fault", FAULTS)
def test_a_fault_is_found_where_it_stands(fault: Fault) -> None:
    text = fault.text
    start = time.process_time()
    found = findings_in(text.encode())
    took = time.process_time() - start
    assert took < 1.0
    wanted = (fault.level, fault.code, fault.table, fault.key)
    matching = [one for one in found if (one.level, one.code, one.table, one.key) == wanted]
    assert len(matching) == 1, [(one.level, one.code, one.table, one.key, one.message) for one in found]
    place = text.index(fault.at)
    if fault.code in FAULTS_OF_KEYS:  # these point at the key, which stands before what the fault names
        name = fault.key.split(".")[-1] or fault.table
        place = max(text.rfind(spelled, 0, place + len(fault.at)) for spelled in (name, f'"{name}"'))
    before = text[:place]
    assert (matching[0].line, matching[0].column) == (before.count("\n") + 1, len(before.split("\n")[-1]) + 1)
    assert fault.remedy in matching[0].message


def test_many_kinds_of_fault_are_told_apart_in_many_tables() -> None:
    faulty = [fault for group in GROUPS.values() for fault in group]
    pairs = {(fault.code, fault.table.split(".")[0]) for fault in faulty}
    assert len(pairs) >= 150
    covered = {fault.code for fault in faulty} | {code for _, code, _ in FILES}
    # A file that can't be opened has no text to change; the others are found by commands that do more than check.
    assert covered == set(CODES) - {"unreadable"} - AS_INSTALLED - MEASURED


AS_INSTALLED = {"not-settled", "flow-tolerance", "off-curve", "set-point-missed", "backward", "case-idle"}
MEASURED = {"reading", "measured-flow"}

FILES = (
    (b"\xef\xbb\xbfformat = 1\n", "encoding", (1, 1)),
    ("format = 1\n".encode("utf-16"), "encoding", (1, 1)),
    (SOUND.replace("Test bench", "Prüfstand").encode("latin-1"), "encoding", (4, 12)),
    (b"[" * 10_000_000, "too-large", (1, 1)),
    (b"format = 1\nx = " + b"[" * 100_000, "nesting", (2, 5)),
    (b"format = 1\nx = " + b"[{a = " * 50_000, "nesting", (2, 101)),
    (b"format = 1\nx = " + b"[[{a=" * 15 + b"1" + b"}]]" * 15, "nesting", (2, 57)),
    (b"format = 1\n" + b"a." * 1_000_000 + b"a = 1", "nesting", (2, 1)),
    (b"format = 1\n[" + b"'a'." * 100_000 + b"a]", "nesting", (2, 2)),
    (b"format = 1\nx = [" + b"{}," * 100_000 + b"]", "too-many", (2, 300_003)),
    (b"format = 1\n" + b"[[a]]\n" * 100_001, "too-many", (100_002, 1)),
    (b"format = 1\n[x]\ny = [" + b"1," * 100_001 + b"]", "too-many", (3, 5)),
    (b"format = 1\n[design]\n" + b"".join(b"a%d=1\n" % n for n in range(100_001)), "too-many", (2, 2)),
    (b'format = 1\n[design]\ntitle = "' + b"a" * 10_001 + b'"', "too-long", (3, 9)),
    (b"format = 1\n[design]\nx." + b"a" * 1_001 + b" = 1", "too-long", (3, 3)),
    (b"format = 1\n[section." + b"a" * 1_001 + b"]", "too-long", (2, 10)),
    (b"format = 1\n[section.M1\n", "syntax", (2, 12)),
    (b'format = 1\n[design]\ntitle = "a\n', "syntax", (3, 11)),
    (b"format = 1\n[design]\ntitle = \x00\n", "syntax", (3, 9)),
)


@pytest.mark.parametrize(("content", "code", "place"), FILES)
def test_a_file_that_can_not_be_read_is_refused_at_its_place(content: bytes, code: str, place: tuple[int, int]) -> None:
    start = time.process_time()
    found = findings_in(content)
    assert time.process_time() - start < 8.0
    assert [(one.level, one.code, (one.line, one.column)) for one in found] == [("error", code, place)]
    assert ";" in found[0].message


@pytest.mark.parametrize(
    "content", [b"", b"\n", b"format = 1", b"# nothing\r\n", b"format = 1\n[section.A]\n[terminal.B]"]
)
def test_a_file_with_little_in_it_is_told_what_it_lacks(content: bytes) -> None:
    found = findings_in(content)
    assert {"missing"} <= {one.code for one in found} <= {"missing", "format", "no-drop"}


def test_everything_that_is_wrong_is_found_at_once() -> None:
    text = SOUND.replace('"14.5 m"', '"14,5 m"').replace('"DN20"', '"DN21"').replace('"6 kW"', '"6 kg"')
    found = findings_in(text.encode())
    assert [one.code for one in found] == ["decimal-comma", "unknown-size", "unknown-unit"]


def test_lines_are_counted_as_an_editor_counts_them() -> None:
    text = SOUND.replace("Test bench", "Test\u2028bench\x0b".replace("\x0b", "")).replace("\n", "\r\n")
    (found,) = findings_in(text.replace('"14.5 m"', '"14.5 kPa"').encode())
    assert (found.line, found.column) == (71, 10)
