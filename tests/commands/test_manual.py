"""The manual: every topic has a page, and what a page repeats is what the program knows."""

import re
from collections.abc import Iterator, Mapping
from pathlib import Path

import pytest

from budget.commands.manual import TOPICS, page, titles
from budget.description import CODES, describe, read_text
from budget.description.schema import KEYED, SINGLE, TOP, Array, Inline, Spec, Table
from tests.commands.calls import Caller
from tests.commands.pages import PAGES, renewed


def test_every_topic_is_listed_with_its_title(call: Caller) -> None:
    status, out, _ = call("manual")
    assert status == 0
    assert [line.split()[0] for line in out.splitlines()] == list(TOPICS)
    assert all(title for title in titles().values())


def test_every_page_is_a_topic_and_every_topic_has_a_page() -> None:
    folder = Path(__file__).parents[2] / "budget" / "manual"
    assert {path.stem for path in folder.glob("*.md")} == set(TOPICS)


@pytest.mark.parametrize("topic", TOPICS)
def test_a_page_is_printed_as_it_stands(call: Caller, topic: str) -> None:
    status, out, _ = call("manual", topic)
    assert status == 0
    assert out == page(topic)
    assert out.startswith("# ")
    assert out.endswith("\n")
    assert not re.search(r"[ \t]$", out, re.MULTILINE)
    assert max(len(line) for line in out.splitlines() if not line.startswith("|")) <= 100


def test_the_beginning_of_a_topic_is_enough(call: Caller) -> None:
    assert call("manual", "acc").out == page("accuracy-and-caution")
    assert call("manual", "fi").status == 2


@pytest.mark.parametrize("part", PAGES)
def test_codes_units_and_keys_are_those_of_the_program(part: str) -> None:
    assert page(PAGES[part]) == renewed(part), "write them anew: python -m tests.commands.pages"


def keys(specs: Mapping[str, Spec]) -> Iterator[str]:
    for key, spec in specs.items():
        yield key
        if isinstance(spec, Table | Array):
            yield from keys(spec.keys)
        elif isinstance(spec, Inline) and isinstance(spec.value, Table):
            yield from keys(spec.value.keys)


def test_the_page_on_the_file_names_every_table_and_key() -> None:
    text = page("file")
    for table in TOP:
        assert f"[{table}" in text or f"`{table}`" in text
    for table, specs in (SINGLE | KEYED).items():
        for key in keys(specs):
            assert f"`{key}`" in text or f".{key}]]" in text, (table, key)


def test_topics_commands_and_codes_that_pages_name_exist() -> None:
    for topic in TOPICS:
        text = " ".join(page(topic).split())
        for named in re.findall(r"`budget manual ([a-z-]+)`", text):
            assert named in TOPICS
        for named in re.findall(r"[Cc]ode `([a-z-]+)`", text):
            assert named in CODES or named == "unreadable"


def test_the_caution_is_in_the_manual() -> None:
    text = " ".join(page("accuracy-and-caution").split())
    from budget.report.caution import CAUTION

    assert CAUTION in text


def test_the_first_example_of_the_manual_is_in_order() -> None:
    indented = re.findall(r"(?:^    .*\n|^\n(?=    ))+", page("start"), re.MULTILINE)
    run = next(block for block in indented if "format = 1" in block)
    description = describe(read_text(re.sub(r"^    ", "", run, flags=re.MULTILINE)))
    assert description.findings == ()
    assert list(description.terminals) == ["R1"]
