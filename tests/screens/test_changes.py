"""What changed since the file was saved and since a git revision, in figures as well."""

from __future__ import annotations

import os
import threading
from pathlib import Path

import pytest
from textual import events

from budget.document import Snapshot
from budget.screens import changes
from budget.storage import StorageError
from budget.storage.revisions import Revision
from tests.hostile.payloads import MESS, obeyed
from tests.hostile.test_screens import painted
from tests.screens.conftest import SMALL, Hands, Stage
from tests.screens.test_saving import edit
from tests.storage.repositories import Repository, needs_git

ELSEWHERE = SMALL.replace('length = "7.5 m"', 'length = "6 m"')


@pytest.fixture
def repository(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Repository:
    """The folder of the run under version control, with two revisions of it."""
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", os.devnull)
    found = Repository(tmp_path)
    found.commit("Begin at 6 m", run=ELSEWHERE)
    found.commit("Lengthen the main", run=SMALL)
    return found


async def ask(hands: Hands) -> None:
    """Ask for the changes since a revision, from the command list."""
    await hands.press("colon")
    await hands.type("git revision")
    await hands.press("enter")
    await hands.done()
    await hands.pilot.pause()


async def take(hands: Hands) -> None:
    await hands.press("enter")
    await hands.done()
    await hands.pilot.pause()


def required(snapshot: Snapshot) -> float:
    return snapshot.budget.sources["P1"].required / 1000


def test_since_the_save_figures_are_told_with_the_keys(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        was = required(hands.app.document.snapshot)
        await edit(hands, "90")
        now = required(hands.app.document.snapshot)
        await hands.press("D")
        await hands.pilot.pause()
        lines = hands.lines()
        (told,) = [line.split() for line in lines if line.split()[:2] == ["P1", "required"]]
        assert told[2:4] == [f"{was:.2f}", f"{now:.2f}"]
        assert told[4].startswith("+")
        heads = [line for line in lines[1:] if line.startswith(" ") and not line.startswith("  ")]
        assert [head.strip() for head in heads][:3] == ["Sources", "Keys", "Sections"]
        for words in ("duty", "in hand", "length  7.5 m  ->  90 m"):
            assert words in hands.screen_text
        await hands.press("escape")
        assert hands.place == "ledger"

    play(act, size=(80, 50))


@pytest.mark.parametrize("size", [(60, 20), (80, 24), (140, 40)])
def test_no_line_is_cut_off_by_the_screen(play: Stage, size: tuple[int, int]) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands, "90")
        await hands.press("D")
        await hands.pilot.pause()
        assert "Sources" in hands.screen_text
        assert "…" not in hands.screen_text

    play(act, size=size)


def test_where_a_text_is_no_toml_its_keys_are_told_all_the_same(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        hands.app.document.replace_text(SMALL + "[", "break it")
        hands.app.show(hands.app.document.snapshot)
        await hands.press("D")
        await hands.pilot.pause()
        assert "line by line" in hands.screen_text
        assert "Sources" not in hands.screen_text

    play(act)


@needs_git
@pytest.mark.usefixtures("repository")
def test_a_revision_is_picked_from_those_that_touched_the_file(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await ask(hands)
        assert [choice.cells[2] for choice in hands.app.choosers["list"].kept] == ["Lengthen the main", "Begin at 6 m"]
        await take(hands)
        assert "nothing differs" in hands.screen_text
        await hands.press("escape")
        await ask(hands)
        await hands.press("down")
        await take(hands)
        assert "Begin at 6 m" in hands.lines()[0]
        assert "length  6 m  ->  7.5 m" in hands.screen_text
        assert "required" in hands.screen_text
        await hands.press("escape")
        assert hands.place == "ledger"
        assert not hands.app.document.dirty

    play(act)


@needs_git
@pytest.mark.usefixtures("repository")
def test_what_is_unsaved_is_compared_with_a_revision_that_is_written(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands, "9")
        await ask(hands)
        await hands.type("HEAD")
        await hands.send(events.Key("tilde", "~"))
        await hands.press("1")
        assert hands.listed == ["HEAD~1"]
        await take(hands)
        assert "Changes since HEAD~1" in hands.lines()[0]
        assert "length  6 m  ->  9 m" in hands.screen_text

    play(act)


@needs_git
@pytest.mark.usefixtures("repository")
def test_a_revision_that_is_none_is_told_at_the_foot(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await ask(hands)
        await hands.type("nowhere")
        await take(hands)
        assert hands.foot.startswith("there is no revision 'nowhere' in the repository of run.toml;")
        assert hands.place == "ledger"

    play(act)


def test_outside_of_a_repository_the_foot_says_so(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await ask(hands)
        assert hands.place == "ledger"
        assert hands.foot.startswith("run.toml is in no git repository") or "git was not found" in hands.foot

    play(act)


def test_a_run_without_a_file_has_no_revisions(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        hands.app.document.path = None
        hands.app.do("show_changes_since")
        await hands.done()
        assert "save it first" in hands.app.foot.message

    play(act)


def test_keys_are_dealt_with_while_git_thinks(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    go_on = threading.Event()

    def slow(_path: Path) -> tuple[Revision, ...]:
        assert go_on.wait(20.0)
        return (Revision("0" * 40, "0000000", "2026-01-31", "Begin"),)

    async def act(hands: Hands) -> None:
        monkeypatch.setattr(changes, "list_revisions", slow)
        await hands.at("M1")
        hands.app.do("show_changes_since")
        hands.app.do("edit")
        assert hands.place == "entry"
        go_on.set()
        await hands.done()
        await hands.pilot.pause()
        assert hands.place == "entry"  # what is being written is not taken away
        await hands.press("escape")
        assert hands.place == "ledger"

    play(act)


def test_what_git_says_is_shown_plain(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    def listed(_path: Path) -> tuple[Revision, ...]:
        return (Revision("0" * 40, MESS, MESS, MESS),)

    def refused(_path: Path, revision: str) -> object:
        raise StorageError(f"git refused {revision}: {MESS}")

    async def act(hands: Hands) -> None:
        monkeypatch.setattr(changes, "list_revisions", listed)
        monkeypatch.setattr(changes, "read_past", refused)
        hands.app.do("show_changes_since")
        await hands.done()
        await hands.pilot.pause()
        marked = hands.app.choosers["list"].marked
        assert marked is not None
        assert obeyed("".join(marked.cells)) == set()
        await take(hands)
        assert hands.app.foot.message.startswith("git refused 000")
        assert obeyed(hands.app.foot.message) == set()

    play(act)


@needs_git
def test_a_hostile_subject_and_version_reach_the_screen_plain(play: Stage, repository: Repository) -> None:
    subject = "\x1b]0;mine\x07[bold]\u202e"
    repository.commit(subject, run=SMALL.replace("# ", "# \u202e[@click=app.quit] ", 1))

    async def act(hands: Hands) -> None:
        await ask(hands)
        assert "[bold]" in painted(hands)
        await take(hands)
        assert "[bold]" in hands.lines()[0]
        assert "[@click=app.quit]" in painted(hands)

    play(act)
