"""What the terminal can do, looked at before the app takes it over."""

from __future__ import annotations

import locale
import os
import sys
from collections.abc import Mapping

COLOUR_SYSTEMS = ("auto", "standard", "256", "truecolor", "windows")


def objection(environment: Mapping[str, str], *, terminals: bool, encoding: str, ascii_only: bool) -> str:
    """Say in one line why the app can't run here, "" where it can.

    `terminals` says whether both the standard input and the standard error are terminals, `encoding` is that of the
    locale.
    """
    if not terminals:
        return "the app needs a terminal for input and for output; use `budget check` in a pipe"
    if environment.get("TERM", "") in ("", "dumb"):
        return f'TERM is "{environment.get("TERM", "")}": the app needs a terminal that can place the cursor'
    if not ascii_only and encoding.lower().replace("-", "").replace("_", "") != "utf8":
        return f"the encoding is {encoding}, not UTF-8; set LC_ALL=C.UTF-8, or ask for --ascii"
    return ""


def objection_here(*, ascii_only: bool) -> str:
    """Say why the app can't run in this terminal, "" where it can."""
    standard = (sys.__stdin__, sys.__stderr__)
    terminals = all(stream is not None and not stream.closed and stream.isatty() for stream in standard)
    encoding = locale.getpreferredencoding(False)
    return objection(os.environ, terminals=terminals, encoding=encoding, ascii_only=ascii_only)


def prepare(environment: dict[str, str] | os._Environ[str]) -> None:
    """Set the switches of the toolkit before it is imported: no animation, no colour system that it does not know."""
    environment["TEXTUAL_ANIMATIONS"] = "none"
    environment["TEXTUAL_SMOOTH_SCROLL"] = "0"
    if environment.get("TEXTUAL_COLOR_SYSTEM", "auto") not in COLOUR_SYSTEMS:
        environment["TEXTUAL_COLOR_SYSTEM"] = "auto"
    if environment.get("TERM") == "linux":
        environment["TEXTUAL_DISABLE_KITTY_KEY"] = "1"
