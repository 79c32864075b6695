"""Texts that would do something if they were obeyed, and how to tell whether one got through."""

from __future__ import annotations

from collections.abc import Mapping

PAYLOADS: Mapping[str, str] = {
    "action": "[@click=app.quit]x[/]",
    "bold": "[bold]loud",
    "closing": "[/] [/bold] \\[/]",
    "link": "[link=file:///etc/passwd]read[/link]",
    "colour": "\x1b[31mred\x1b[0m",
    "clear": "\x1b[2J\x1b[H\x1bc",
    "mode": "\x1b[?1049l\x1b[?25h\x1b[8m",
    "ask": "\x1b[6n\x1b[c\x1bZ",
    "clipboard": "\x1b]52;c;aGVsbG8=\x07",
    "address": "\x1b]8;;http://example.invalid/\x1b\\here\x1b]8;;\x1b\\",
    "heading": "\x1b]0;mine\x07",
    "string": "\x1bPq\x1b\\\x1b_G\x1b\\",
    "c1": "\x9b31m\x90q\x9d52;c;aGVsbG8=\x9c",
    "nul": "a\x00b",
    "del": "a\x7fb",
    "bell": "a\x07b",
    "backspace": "rm\x08\x08ls",
    "return": "safe\rhidden",
    "break": "one\ntwo\x0bthree\x0cfour\x85five\u2028six\u2029seven",
    "tab": "a\tb",
    "override": "\u202eabc\u202dabc\u202c",
    "isolate": "\u2066abc\u2067abc\u2068abc\u2069",
    "mark": "\u200eabc\u200fabc\u061c",
    "zero width": "a\u200bb\u200cc\u200dd\u2060e\ufefff\u00adg",
    "tags": "a\U000e0001\U000e0041\U000e007fb",
    "selectors": "a" + "\ufe0f" * 30 + "\U000e0100" * 30,
    "storm": "Z" + "\u0301\u0316\u0338\u20dd" * 50 + "e",
    "private": "a\ue000b\U000f0000c\ufffed",
    "format": "{0} {1} {x.__class__} {} %s %(x)s %n ${HOME}",
    "brace": "{0",
    "link formula": '=HYPERLINK("http://example.invalid/","x")',
    "call formula": "=cmd|' /C calc'!A0",
    "plus": "+1",
    "minus": "-1+2",
    "at": "@SUM(A1:A9)",
    "tab formula": "\t=1+1",
    "return formula": "\r=1+1",
    "blank formula": " \xa0=1+1",
    "split formula": "a;=1+1",
    "pipe": "a|b||c",
    "ticks": "`id` $(id)",
    "script": "<script>alert(1)</script>&amp;",
    "quotes": "'\"'''\"\"\"\\",
    "comment": "# ]] = { }",
    "long": "x" * 5000,
    "wide": "漢" * 300,
    "words": "word " * 400,
    "blank": " ",
}
"""By name."""

MESS = "".join(text for name, text in PAYLOADS.items() if len(text) < 200 and name != "blank")
"""All short ones in one."""

FORMULA = ("=", "+", "-", "@")
"""Signs with which a spreadsheet begins a formula."""


def printable(text: str) -> str:
    """Return a payload as it may stand in an ID: without what an ID must not have, and not too long."""
    return "".join(c for c in text if c.isprintable() and c != "\ufe0f")[:40]


def obeyed(output: str) -> set[str]:
    """Return what a terminal would obey, or not show, in what was printed; lines end as they may."""
    return {c for c in output if not c.isprintable() and c != "\n"}


def piled(output: str) -> bool:
    """Whether marks are piled upon a letter."""
    return any(mark * 8 in output for mark in ("\ufe0f", "\U000e0100")) or "\u0301\u0316\u0338\u20dd" * 2 in output
