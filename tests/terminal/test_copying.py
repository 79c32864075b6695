"""What a terminal is sent for its clipboard: the copied table in base64, and nothing that stands in the file raw."""

from __future__ import annotations

import base64
import re
import time
from pathlib import Path

from tests.hostile.payloads import PAYLOADS
from tests.terminal.conftest import SMALL, Open

CLIPBOARD = re.compile(rb"\x1b\]52;([^;]*);([^\x07\x1b]*)(\x07|\x1b\\)")
HOSTILE = ("clipboard", "clear", "address", "c1", "heading", "break", "tab", "override")


def test_the_clipboard_gets_the_table_and_nothing_of_the_file_gets_out_raw(opened: Open, tmp_path: Path) -> None:
    title = "".join(PAYLOADS[name] for name in HOSTILE)
    quoted = "".join(f"\\U{ord(c):08x}" for c in title)
    session = opened(SMALL.replace('title = "Hall"', f'title = "{quoted}"'))
    before = len(session.received)
    session.send("C")
    session.wait_for("9 rows copied")
    sent = session.received[before:]
    found = CLIPBOARD.findall(session.received)
    assert [(target, end) for target, _, end in found] == [(b"c", b"\x07")]
    text = base64.b64decode(found[0][1], validate=True).decode()
    file = tmp_path / "state-0" / "budget" / "copied.tsv"
    assert file.read_text(encoding="utf-8") == text
    lines = text.split("\n")
    assert lines[0].startswith("section or terminal\tsize\tlength [m]")
    assert [line.split("\t")[0] for line in lines[1:]] == [
        "P1",
        "· Boiler",
        "M1",
        "B1",
        "R1",
        "R2",
        "B2",
        "R3",
        "R4",
        "",
    ]
    assert {line.count("\t") for line in lines[:-1]} == {12}
    assert all(c.isprintable() for c in text if c not in "\t\n")
    rest = CLIPBOARD.sub(b"", sent)
    assert b"\x1b]" not in rest
    assert b"\x07" not in rest
    for name in HOSTILE:
        assert PAYLOADS[name].encode() not in session.received


def test_a_large_table_is_not_sent_but_written(opened: Open, tmp_path: Path) -> None:
    rooms = "".join(f'[terminal.X{n}]\ntitle = "{"Room " * 40}{n}"\nfrom = "B1"\nload = "1 kW"\n' for n in range(400))
    session = opened(SMALL + rooms, wait="")
    session.wait_for("required", limit=30.0)
    session.send("C")
    session.wait_for("too many rows for a clipboard")
    assert b"\x1b]52" not in session.received
    file = tmp_path / "state-0" / "budget" / "copied.tsv"
    until = time.monotonic() + 10.0
    while not file.exists() and time.monotonic() < until:
        session.read(0.05)
    assert file.read_text(encoding="utf-8").count("\n") == 410
