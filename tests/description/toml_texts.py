"""Random TOML documents in every spelling that the language has, for property tests."""

import datetime as dt
import re
from typing import Any

from hypothesis import strategies as st

Draw = Any

NAMES = st.one_of(
    st.sampled_from(["a", "b", "M1", "FCU-201", "item", "fitting", "from", "1", "0", "kv"]),
    st.sampled_from(["FCU 1", "a.b", 'say "x"', "it's", "", "Ä", "#", "=", "[x]", "a\\b"]),
    st.text(alphabet="ab é.\"'\\#[]{}=,\t", max_size=4),
)
STRINGS = st.one_of(
    st.sampled_from(["", "12.4 m", "DN40", "# no comment", "]", "}", 'a"b', "it's", "\\", "a\nb", "\x1b", "'''"]),
    st.text(alphabet="ab\"'\\\n\té\u2028#,]}=\x7f\u0000😀", max_size=8),
)
SCALARS = st.one_of(
    STRINGS,
    st.integers(min_value=-(2**40), max_value=2**40),
    st.floats(allow_nan=False, width=32),
    st.booleans(),
    st.sampled_from(
        [
            dt.date(2024, 2, 29),
            dt.time(7, 32, 1),
            dt.datetime(1979, 5, 27, 7, 32, 0),  # noqa: DTZ001 (a local one)
            dt.datetime(1979, 5, 27, 7, 32, 0, tzinfo=dt.UTC),
        ]
    ),
)
VALUES = st.recursive(
    SCALARS,
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(NAMES, inner, max_size=3),
    max_leaves=6,
)
TREES = st.dictionaries(
    NAMES,
    st.one_of(
        VALUES,
        st.dictionaries(NAMES, VALUES, max_size=4),
        st.dictionaries(NAMES, st.dictionaries(NAMES, VALUES, max_size=4), max_size=3),
        st.lists(st.dictionaries(NAMES, VALUES, max_size=3), min_size=1, max_size=3),
        st.dictionaries(
            NAMES, st.lists(st.dictionaries(NAMES, VALUES, max_size=3), min_size=1, max_size=2), max_size=2
        ),
    ),
    max_size=5,
)
COMMENTS = ["", "", "", " # note", "# [x]", '#"', "# a = 1", "\t# é"]


@st.composite
def documents(draw: Draw, trees: st.SearchStrategy[dict[str, Any]] = TREES) -> str:
    """Draw a document; a few of them are refused by the language (a table defined twice, for example)."""
    return _Writer(draw).document(draw(trees))


class _Writer:
    """Spells a tree, asking for a choice wherever the language leaves one."""

    def __init__(self, draw: Draw) -> None:
        self.draw = draw
        self.newline = draw(st.sampled_from(["\n", "\r\n"]))

    def one_of(self, *choices: Any) -> Any:
        return self.draw(st.sampled_from(choices))

    def document(self, tree: dict[str, Any]) -> str:
        atoms = self.table((), tree, "")
        root, rest = atoms[0], atoms[1:]
        text = root + "".join(self.draw(st.permutations(rest)))
        text = self.gap() + text + self.gap()
        return text.removesuffix(self.newline) if self.one_of(False, False, True) else text

    def table(self, path: tuple[str, ...], tree: dict[str, Any], header: str) -> list[str]:
        """Return the table and its sub-tables as parts whose order is free, its own part first."""
        body, parts = "", []
        for name, value in tree.items():
            inner = (*path, name)
            if isinstance(value, dict) and self.one_of(True, True, False):
                if value and self.one_of(True, False):
                    body += self.dotted((name,), value)
                else:
                    parts += self.table(inner, value, f"[{self.key(inner)}]")
            elif (
                isinstance(value, list)
                and value
                and all(isinstance(element, dict) for element in value)
                and self.one_of(True, True, False)
            ):
                elements = ["".join(self.table(inner, e, f"[[{self.key(inner)}]]")) for e in value]
                parts.append("".join(elements))
            else:
                body += self.statement((name,), value)
        if header and (body or not parts or header.startswith("[[") or self.one_of(True, False)):
            body = self.gap() + self.indent() + header + self.one_of(*COMMENTS) + self.newline + body
        return [body, *parts]

    def dotted(self, names: tuple[str, ...], tree: dict[str, Any]) -> str:
        text = ""
        for name, value in tree.items():
            if isinstance(value, dict) and value and self.one_of(True, False):
                text += self.dotted((*names, name), value)
            else:
                text += self.statement((*names, name), value)
        return text

    def statement(self, names: tuple[str, ...], value: Any) -> str:
        sign = self.one_of("=", " = ", "   =\t")
        text = self.indent() + self.key(names) + sign + self.value(value)
        return str(self.gap() + text + self.one_of(*COMMENTS) + self.newline)

    def gap(self) -> str:
        return str(self.one_of("", "", "", self.newline, f"# [a]{self.newline}", f"{self.newline}  # é{self.newline}"))

    def indent(self) -> str:
        return str(self.one_of("", "", "  ", "\t"))

    def key(self, names: tuple[str, ...]) -> str:
        return str(self.one_of(".", ".", " . ", ".\t")).join(self.name(name) for name in names)

    def name(self, name: str) -> str:
        if re.fullmatch("[A-Za-z0-9_-]+", name) and self.one_of(True, True, False):
            return name
        if "'" not in name and _is_literal(name) and self.one_of(True, False):
            return f"'{name}'"
        return self.basic(name)

    def value(self, value: Any) -> str:
        if isinstance(value, bool):
            return str(value).lower()
        if isinstance(value, str):
            return self.string(value)
        if isinstance(value, int):
            return str(self.one_of(str(value), f"{value:_}", hex(value) if value >= 0 else str(value)))
        if isinstance(value, float):
            return str(value)
        if isinstance(value, list):
            return self.array(value)
        if isinstance(value, dict):
            return self.inline_table(value)
        return str(self.one_of(value.isoformat(), str(value)))

    def string(self, value: str) -> str:
        choices = [self.basic(value)]
        if "'" not in value and _is_literal(value):
            choices.append(f"'{value}'")
        lines = value.replace("\n", self.newline)
        if "'''" not in value and not value.endswith("'") and _is_literal(value.replace("\n", "")):
            choices.append(f"'''{self.newline}{lines}'''")
        many = self.basic(value)[1:-1].replace("\\n", self.newline).replace('\\"\\"a', '""a')
        choices.append(f'"""{self.newline}{many}"""')
        choices.append(f'"""{self.newline}{many}\\{self.newline}  {self.newline} """')
        return str(self.one_of(*choices))

    def basic(self, value: str) -> str:
        escaped = value.replace("\\", "\\\\").replace('"', '\\"').replace("\n", "\\n")
        escaped = re.sub(r"[\x00-\x08\x0b-\x1f\x7f]", lambda found: f"\\u{ord(found[0]):04x}", escaped)
        accented = str(self.one_of("é", "\\u00e9", "\\U000000E9"))
        return '"' + escaped.replace("é", accented) + '"'

    def array(self, values: list[Any]) -> str:
        space = self.one_of("", " ", f"{self.newline}  ", f" # ]{self.newline}")
        text = ("," + space).join(self.value(value) for value in values)
        return f"[{space}{text}{self.one_of('', ',') if values else ''}{space}]"

    def inline_table(self, tree: dict[str, Any]) -> str:
        space = self.one_of("", " ")
        return f"{{{space}{f',{space}'.join(self.inline_entries((), tree))}{space}}}"

    def inline_entries(self, names: tuple[str, ...], tree: dict[str, Any]) -> list[str]:
        entries = []
        for name, value in tree.items():
            inner = (*names, name)
            if isinstance(value, dict) and value and self.one_of(True, False):
                entries += self.inline_entries(inner, value)
            else:
                entries.append(f"{self.key(inner)}{self.one_of('=', ' = ')}{self.value(value)}")
        return entries


def _is_literal(text: str) -> bool:
    return all(c == "\t" or (c >= " " and c != "\x7f") for c in text)
