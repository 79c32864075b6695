"""Saving beside the keyboard, a file that others change, unsaved changes that were left behind, and the way out."""

from __future__ import annotations

import asyncio
import dataclasses
import os
from pathlib import Path

import pytest
from textual import events

from budget.document import Saving
from budget.screens import watching
from budget.screens.app import BudgetApp
from budget.storage import Stamp, StorageError
from budget.storage.processes import Process, this_process
from budget.storage.records import Record, find_records, new_record, write_record
from tests.screens.conftest import SMALL, Hands, Stage

ELSEWHERE = SMALL.replace('length = "7.5 m"', 'length = "6 m"')


def path_of(hands: Hands) -> Path:
    assert hands.app.document.path is not None
    return hands.app.document.path


async def look(hands: Hands) -> None:
    """Let the app look at its file, as it does every few seconds."""
    watching.look(hands.app)
    await hands.done()
    for _ in range(3):
        await hands.pilot._wait_for_screen()


async def asked(hands: Hands) -> None:
    """Wait until the app asks of its own accord."""
    until = asyncio.get_running_loop().time() + 5.0
    while hands.place != "list" or not hands.app.front.size:
        assert asyncio.get_running_loop().time() < until, "it did not ask"
        await hands.pilot.pause(0.01)


async def edit(hands: Hands, value: str = "9") -> None:
    await hands.at("M1")
    await hands.press("enter", "ctrl+u")
    await hands.type(f"{value} m")
    await hands.press("enter")
    assert f'length = "{value} m"' in hands.text


def exited(hands: Hands) -> bool:
    return hands.app._exit


def answers(hands: Hands) -> list[str]:
    return hands.listed


async def answer(hands: Hands, text: str) -> None:
    await hands.type(text)
    await hands.press("enter")


def left_behind(path: Path, text: str | None, **changes: object) -> Record:
    """Leave a record as a process that is gone did."""
    gone = dataclasses.replace(this_process(), boot="an earlier start of the machine")
    record = dataclasses.replace(new_record(path, "0" * 64), text=text, process=gone, cursor=("section", "B2"))
    record = dataclasses.replace(record, **changes)  # type: ignore[arg-type]
    write_record(record)
    return record


def test_the_small_run_is_what_these_tests_change() -> None:
    assert SMALL.count('length = "7.5 m"') == 1


# Saving


def test_the_next_edit_does_not_wait_for_the_disk(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    async def act(hands: Hands) -> None:
        go_on = asyncio.Event()
        loop = asyncio.get_running_loop()
        real = Saving.write

        def slow(saving: Saving, *arguments: object) -> Stamp:
            asyncio.run_coroutine_threadsafe(go_on.wait(), loop).result(10)
            return real(saving, *arguments)  # type: ignore[arg-type]

        monkeypatch.setattr(Saving, "write", slow)
        await edit(hands)
        hands.app.do("save")
        hands.app.ledger.go_to(("section", "M1"), "length")
        hands.app.do("edit")
        hands.app.do("accept")
        assert hands.app.saving is not None
        assert 'length = "9 m"' not in path_of(hands).read_text()
        go_on.set()
        await hands.done()
        await hands.press("down")
        assert 'length = "9 m"' in path_of(hands).read_text()
        assert "not saved" not in hands.budget

    play(act)


def test_what_is_changed_while_it_is_saved_is_saved_by_the_next_one(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        hands.app.do("save")
        hands.app.document.undo()
        hands.app.do("save")
        await hands.press("down")
        await hands.done()
        await hands.press("up")
        assert path_of(hands).read_text() == SMALL
        assert not hands.app.document.dirty

    play(act)


def test_a_save_that_fails_offers_another_name(play: Stage, monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    def full(_saving: Saving, *_arguments: object) -> Stamp:
        raise StorageError("the run could not be written: No space left on device")

    async def act(hands: Hands) -> None:
        await edit(hands)
        with monkeypatch.context() as faulty:
            faulty.setattr(Saving, "write", full)
            await hands.press("ctrl+s")
        assert "No space left" in hands.lines()[0]
        assert answers(hands) == ["save under another name", "try again", "stay"]
        assert "not saved" in hands.budget
        await answer(hands, "another")
        await hands.press("ctrl+u")
        await hands.type("other.toml")
        await hands.press("enter")
        assert 'length = "9 m"' in (tmp_path / "other.toml").read_text()
        assert path_of(hands) == tmp_path / "other.toml"
        assert "not saved" not in hands.budget

    play(act)


def test_another_file_is_written_over_only_as_it_was_seen(play: Stage, tmp_path: Path) -> None:
    (tmp_path / "other.toml").write_text("format = 1\n")

    async def act(hands: Hands) -> None:
        hands.app.do("save_as")
        await hands.press("ctrl+u")
        await hands.type("other.toml")
        await hands.press("enter")
        assert "exists already" in hands.lines()[0]
        assert answers(hands) == ["write over it", "save under another name", "stay"]
        (tmp_path / "other.toml").write_text("format = 1 # somebody else's\n")
        await answer(hands, "over")
        assert "somebody" in (tmp_path / "other.toml").read_text()
        await answer(hands, "over")
        assert (tmp_path / "other.toml").read_text() == SMALL

    play(act)


# Others


def test_a_file_that_others_change_is_read_again_and_the_cursor_stays(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("R4")
        path_of(hands).write_text(ELSEWHERE)
        await look(hands)
        assert hands.text == ELSEWHERE
        assert "reloaded" in hands.foot
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "R4"
        assert "not saved" not in hands.budget
        await hands.press("u")
        assert hands.text == SMALL
        assert "not saved" in hands.budget

    play(act)


def test_a_library_that_others_change_is_read_again(play: Stage, tmp_path: Path) -> None:
    library = tmp_path / "fittings.toml"
    library.write_text('format = 1\n[fitting."pot strainer"]\nk = 5\n')
    text = SMALL.replace("format = 1\n", 'format = 1\nlibrary = ["fittings.toml"]\n', 1)
    text = text.replace(
        '{ "elbow 90" = 4, "gate valve" = 1 }', '{ "elbow 90" = 4, "gate valve" = 1, "pot strainer" = 1 }'
    )
    assert text.count("pot strainer") == 1

    async def act(hands: Hands) -> None:
        required = hands.app.document.snapshot.budget.sources["P1"].required
        library.write_text('format = 1\n[fitting."pot strainer"]\nk = 50\n')
        await look(hands)
        assert hands.app.document.snapshot.budget.sources["P1"].required > required
        assert "library" in hands.foot
        assert not hands.app.document.dirty

    play(act, text)


def test_what_is_being_written_is_not_taken_away_by_a_reload(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("enter", "8")
        path_of(hands).write_text(ELSEWHERE)
        await look(hands)
        assert hands.place == "entry"
        assert hands.text == SMALL
        await hands.press("escape")
        await look(hands)
        assert hands.text == ELSEWHERE

    play(act)


def test_coming_back_to_the_window_looks_at_the_file(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        path_of(hands).write_text(ELSEWHERE)
        await hands.send(events.AppFocus())
        await hands.press("down")
        assert hands.text == ELSEWHERE

    play(act)


def test_a_changed_run_is_marked_and_the_choice_comes_at_the_save(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        mine = hands.text
        path_of(hands).write_text(ELSEWHERE)
        await look(hands)
        assert "not saved, changed on disk" in hands.budget
        assert hands.text == mine
        await hands.press("ctrl+s")
        assert answers(hands) == [
            "see what differs and pick table by table",
            "save under another name",
            "write over what is on disk",
            "take what is on disk; yours stays one step back",
            "stay",
        ]
        await answer(hands, "stay")
        assert path_of(hands).read_text() == ELSEWHERE
        await hands.press("ctrl+s")
        await answer(hands, "write over")
        assert path_of(hands).read_text() == mine
        assert "changed on disk" not in hands.budget

    play(act)


def test_what_is_on_disk_can_be_taken_with_the_own_one_step_back(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        mine = hands.text
        path_of(hands).write_text(ELSEWHERE)
        await hands.press("ctrl+s")
        await answer(hands, "take what")
        assert hands.text == ELSEWHERE
        assert "not saved" not in hands.budget
        await hands.press("u")
        assert hands.text == mine

    play(act)


def test_tables_changed_on_either_side_are_put_together(play: Stage) -> None:
    other = SMALL.replace('title = "Boiler pump"', 'title = "Pump of somebody else"')
    assert other != SMALL

    async def act(hands: Hands) -> None:
        await edit(hands)
        path_of(hands).write_text(other)
        await hands.press("ctrl+s")
        await answer(hands, "table by table")
        assert [choice.cells for choice in hands.app.choosers["list"].kept] == [
            ("source.P1", "changed on disk", "on disk"),
            ("section.M1", "changed by you", "yours"),
            ("put it together", "and save it", ""),
        ]
        assert "Pump of somebody else" in hands.screen_text
        await hands.press("end", "enter")
        assert 'length = "9 m"' in hands.text
        assert "Pump of somebody else" in hands.text
        assert path_of(hands).read_text() == hands.text
        assert "not saved" not in hands.budget

    play(act)


def test_where_both_changed_a_table_somebody_picks(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        path_of(hands).write_text(ELSEWHERE)
        await hands.press("D")
        assert hands.app.choosers["list"].kept[0].cells == ("section.M1", "both differ", "yours")
        for value in ("9 m", "6 m", "7.5 m"):
            assert value in hands.screen_text
        for stands in ("on disk", "as it was"):
            await hands.press("enter")
            assert hands.app.choosers["list"].kept[0].cells[2] == stands
        await hands.press("enter", "enter", "end", "enter")
        assert 'length = "6 m"' in hands.text
        assert path_of(hands).read_text() == hands.text

    play(act)


def test_what_differs_from_the_file_is_listed_in_its_own_words(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("D")
        assert "nothing differs" in hands.screen_text
        await hands.press("escape")
        await edit(hands)
        await hands.press("D")
        assert "section M1" in hands.screen_text or "section.M1" in hands.screen_text
        assert "7.5 m" in hands.screen_text
        assert "9 m" in hands.screen_text
        await hands.press("escape")
        assert hands.place == "ledger"

    play(act)


def test_a_file_that_is_gone_is_told_and_written_anew(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        path_of(hands).unlink()
        await look(hands)
        assert "gone from disk" in hands.budget
        await hands.press("ctrl+s")
        assert answers(hands) == ["write it anew", "save under another name", "stay"]
        await answer(hands, "anew")
        assert path_of(hands).read_text() == SMALL
        assert "gone" not in hands.budget

    play(act)


def test_bytes_that_are_no_text_are_told_and_only_written_over_when_asked(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        path_of(hands).write_bytes(b"\xff\xfe")
        await look(hands)
        assert "UTF-8" in hands.foot
        assert hands.text == SMALL
        await edit(hands)
        await hands.press("ctrl+s")
        assert answers(hands) == ["save under another name", "write over what is on disk", "stay"]
        await answer(hands, "write over")
        assert path_of(hands).read_text() == hands.text

    play(act)


# What was left behind


def test_what_was_left_behind_opens_as_changed_with_the_file_one_step_back(play: Stage, tmp_path: Path) -> None:
    record = left_behind(tmp_path / "run.toml", ELSEWHERE)

    async def act(hands: Hands) -> None:
        await asked(hands)
        assert hands.lines()[0].strip().startswith(f"Unsaved changes of {record.time.astimezone():%H:%M} by ")
        assert answers(hands) == [
            "recover them",
            "see what differs from the file",
            "delete them",
            "ignore them for now",
        ]
        await hands.press("enter")
        await hands.done()
        assert hands.text == ELSEWHERE
        assert "not saved" in hands.budget
        assert hands.app.ledger.row is not None
        assert hands.app.ledger.row.id == "B2"
        (kept,) = find_records(tmp_path / "run.toml")
        assert kept.id == hands.app.keeper.id
        assert kept.text == ELSEWHERE
        await hands.press("u")
        assert hands.text == SMALL

    play(act)


def test_the_differences_are_seen_before_and_ignoring_leaves_the_record(play: Stage, tmp_path: Path) -> None:
    record = left_behind(tmp_path / "run.toml", ELSEWHERE)

    async def act(hands: Hands) -> None:
        await asked(hands)
        await answer(hands, "differs")
        assert "6 m" in hands.screen_text
        await hands.press("escape")
        assert "recover them" in answers(hands)
        await hands.press("escape")
        assert hands.text == SMALL
        hands.app.do("recover")
        await hands.done()
        await hands.press("down", "up")
        await answer(hands, "delete")
        assert record.id not in [one.id for one in find_records(tmp_path / "run.toml")]

    play(act)


def test_what_equals_the_file_is_dropped_without_a_question(play: Stage, tmp_path: Path) -> None:
    record = left_behind(tmp_path / "run.toml", SMALL)

    async def act(hands: Hands) -> None:
        until = asyncio.get_running_loop().time() + 5.0
        while record.id in [one.id for one in find_records(tmp_path / "run.toml")]:
            assert asyncio.get_running_loop().time() < until
            await hands.pilot.pause(0.01)
        assert hands.place == "ledger"
        assert record.id not in [one.id for one in find_records(tmp_path / "run.toml")]

    play(act)


@pytest.mark.parametrize(
    ("process", "told"),
    [
        (dataclasses.replace(this_process(), pid=os.getppid(), started=""), "The run is open elsewhere since"),
        (dataclasses.replace(this_process(), host="plantroom"), "The run is perhaps open elsewhere since"),
    ],
)
def test_a_run_that_is_open_elsewhere_is_opened_read_only_or_anyway(
    play: Stage, tmp_path: Path, process: Process, told: str
) -> None:
    left_behind(tmp_path / "run.toml", None, process=process, user="ann")

    async def act(hands: Hands) -> None:
        await asked(hands)
        assert hands.lines()[0].strip().startswith(told)
        assert "by ann" in hands.lines()[0]
        assert answers(hands) == ["open it read-only", "open it all the same", "quit"]
        await hands.press("enter")
        assert "read only" in hands.budget
        await hands.at("M1")
        for key in ("enter", "a", "x", "r"):
            await hands.press(key)
            assert hands.place == "ledger"
            assert "read-only" in hands.foot
        await hands.press("T", "#", "f2")
        assert hands.place == "ledger"
        assert hands.text == SMALL

    play(act)


def test_a_copy_of_what_is_read_only_can_be_changed(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        hands.app.document.read_only = "opened read-only"
        await hands.press("ctrl+s")
        await answer(hands, "another")
        await hands.press("ctrl+u")
        await hands.type("copy.toml")
        await hands.press("enter")
        assert (tmp_path / "copy.toml").read_text() == SMALL
        await edit(hands)

    play(act)


# Keeping


def test_every_change_is_noted_to_be_kept_and_saving_ends_that(play: Stage, tmp_path: Path) -> None:
    def kept() -> str | None:
        return find_records(tmp_path / "run.toml")[0].text

    async def act(hands: Hands) -> None:
        await edit(hands)
        assert hands.app.keep_now()
        assert kept() == hands.text
        await hands.press("u")
        hands.app.keep_now()
        assert kept() is None
        await hands.press("U", "ctrl+s")
        hands.app.keep_now()
        assert kept() is None

    play(act)


def test_what_is_written_on_the_text_screen_is_kept_before_it_is_taken(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("T", "#", "space", "x")
        from budget.screens import turning

        turning.text_written(hands.app)
        hands.app.keep_now()
        (record,) = find_records(tmp_path / "run.toml")
        assert record.text is not None
        assert "# x" in record.text
        assert hands.text == SMALL

    play(act)


def test_that_nothing_can_be_kept_is_told_once(play: Stage, monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    (tmp_path / "file").touch()

    async def act(hands: Hands) -> None:
        monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "file"))
        await edit(hands)
        assert not hands.app.keep_now()
        await look(hands)
        assert "could not be kept for recovery" in hands.foot
        assert "not kept for recovery" in hands.budget
        await hands.press("down")
        await look(hands)
        assert "could not" not in hands.foot

    play(act)


# The way out


def test_quitting_without_saving_discards_and_keeping_for_the_next_time_does_not(play: Stage) -> None:
    async def keep(hands: Hands) -> None:
        await edit(hands)
        await hands.press("ctrl+q")
        await answer(hands, "next time")
        assert exited(hands)
        assert not hands.app.discarding

    async def discard(hands: Hands) -> None:
        await edit(hands)
        await hands.press("ctrl+q")
        await answer(hands, "without")
        assert exited(hands)
        assert hands.app.discarding

    play(keep)
    play(discard)


def test_quitting_waits_for_a_save_that_is_under_way(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        hands.app.do("save")
        hands.app.do("quit")
        assert not exited(hands)
        until = asyncio.get_running_loop().time() + 5.0
        while not exited(hands) and asyncio.get_running_loop().time() < until:
            await asyncio.sleep(0.01)
        assert exited(hands)
        assert 'length = "9 m"' in path_of(hands).read_text()

    play(act)


def test_an_unexpected_error_keeps_what_is_unsaved_and_ends_with_its_own_status(play: Stage, tmp_path: Path) -> None:
    kept: list[BudgetApp] = []

    async def act(hands: Hands) -> None:
        kept.append(hands.app)
        await edit(hands)
        hands.app.call_later(lambda: 1 // 0)
        await hands.pilot.pause(0.2)

    with pytest.raises(ZeroDivisionError):
        play(act)
    (app,) = kept
    assert app.return_code == 70
    assert isinstance(app.failure, ZeroDivisionError)
    assert app.failure_log is not None
    log = app.failure_log.read_text()
    assert "ZeroDivisionError" in log
    assert "run.toml" not in log
    (record,) = find_records(tmp_path / "run.toml")
    assert 'length = "9 m"' in (record.text or "")
