"""Whatever the disk does, the app says what happened, keeps what is unsaved, and saves when the cause is gone."""

from __future__ import annotations

import asyncio
import os
from pathlib import Path

import pytest

from budget.storage.records import find_records
from tests.screens.conftest import SMALL, Hands, Stage
from tests.screens.test_saving import answer, answers, edit, exited, path_of
from tests.storage.situations import fill, mode_of, mount, small_disk, with_own_mounts
from tests.storage.test_files import NOBODY, as_nobody, open_folder

__all__ = ["open_folder"]


@pytest.fixture
def tmp_path(open_folder: Path) -> Path:
    """The folder of the run, which somebody without privileges reaches and owns.

    Not one of pytest's: another run of the tests closes the folder around those as it begins.
    """
    return open_folder


def unprivileged(folder: Path, act: object, play: Stage) -> None:
    """Play without privileges; what the app keeps of its own goes to the same folder.

    The modules that it needs are read before, as somebody without privileges may not be let into their folder.
    """
    play(edit)
    if os.geteuid() == 0:
        os.chown(folder / "run.toml", NOBODY, NOBODY)

    def stage() -> None:
        os.environ["XDG_STATE_HOME"] = str(folder / "state")
        play(act)

    as_nobody(stage)


async def told(hands: Hands, words: str) -> None:
    """Wait until the head or the list says something."""
    until = asyncio.get_running_loop().time() + 8.0
    while words not in f"{hands.budget}\n{hands.foot}\n{hands.screen_text}":
        assert asyncio.get_running_loop().time() < until, f"{hands.budget}\n{hands.foot}\n{hands.screen_text}"
        await hands.pilot.pause(0.05)


async def saved(hands: Hands, value: str = "9") -> None:
    """Save, now that nothing stands in the way."""
    await hands.press("escape", "ctrl+s")
    assert f'length = "{value} m"' in path_of(hands).read_text()
    assert "not saved" not in hands.budget
    assert not exited(hands)


def kept(hands: Hands) -> list[str | None]:
    return [record.text for record in find_records(path_of(hands))]


def test_on_a_full_disk_it_says_so_and_goes_on(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        filler = fill(tmp_path)
        await edit(hands)
        await hands.press("ctrl+s")
        assert "run.toml could not be written: No space left on device" in hands.lines()[0]
        assert answers(hands) == ["save under another name", "try again", "stay"]
        assert path_of(hands).read_text() == SMALL
        assert "not saved" in hands.budget
        await hands.press("escape")
        hands.app.look_again()
        await told(hands, "not kept for recovery")
        filler.unlink()
        await told(hands, "not saved  ")
        assert hands.app.keep_now()
        assert kept(hands) == [hands.text]
        await saved(hands)

    def stage() -> None:
        small_disk(tmp_path)
        os.environ["XDG_STATE_HOME"] = str(tmp_path / "state")
        play(act)

    with_own_mounts(stage)


def test_a_file_system_that_is_mounted_to_be_read_offers_another_place(play: Stage, tmp_path: Path) -> None:
    (tmp_path / "elsewhere").mkdir()

    async def act(hands: Hands) -> None:
        await edit(hands)
        mount("-o", "remount,ro", str(tmp_path))
        await hands.press("ctrl+s")
        assert "run.toml is not writable" in hands.lines()[0]
        await answer(hands, "another name")
        await hands.press("ctrl+u")
        await hands.type("another.toml")
        await hands.press("enter")
        assert "Read-only file system" in hands.lines()[0]
        assert path_of(hands).read_text() == SMALL
        mount("-o", "remount,rw", str(tmp_path))
        await saved(hands)

    def stage() -> None:
        small_disk(tmp_path)
        play(act)

    with_own_mounts(stage)


def test_a_write_protected_file_is_saved_when_it_may_be_written(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        with mode_of(path_of(hands), 0o444):
            await hands.press("ctrl+s")
            assert "run.toml is not writable" in hands.lines()[0]
            assert path_of(hands).read_text() == SMALL
            assert hands.app.keep_now()
            assert kept(hands) == [hands.text]
        await saved(hands)

    unprivileged(tmp_path, act, play)


def test_a_folder_that_is_closed_does_not_end_the_app(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        hands.app.keep_now()
        with mode_of(tmp_path, 0o000):
            await hands.press("ctrl+s")
            assert "Permission denied" in hands.lines()[0]
            await hands.press("escape")
            hands.app.look_again()
            await hands.done()
            await hands.press("down")
            assert not exited(hands)
        await saved(hands)

    unprivileged(tmp_path, act, play)


@pytest.mark.parametrize("what", ["folder", "pipe"])
def test_what_is_no_file_any_more_is_not_written_over(play: Stage, what: str) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        path = path_of(hands)
        path.unlink()
        if what == "folder":
            path.mkdir()
        else:
            os.mkfifo(path)
        await hands.press("ctrl+s")
        assert "run.toml is not a regular file" in hands.lines()[0]
        await hands.press("escape", "down")
        assert not path.is_file()
        assert "not saved" in hands.budget
        if what == "folder":
            path.rmdir()
        else:
            path.unlink()
        await hands.press("ctrl+s")
        await answer(hands, "anew")
        assert path.read_text() == hands.text

    play(act)


def test_a_folder_that_was_removed_leaves_the_run_unsaved(play: Stage, tmp_path: Path) -> None:
    moved = tmp_path.with_name(f"{tmp_path.name}-moved")

    async def act(hands: Hands) -> None:
        await edit(hands)
        tmp_path.rename(moved)
        await hands.press("ctrl+s")
        assert "gone from disk" in hands.lines()[0]
        await answer(hands, "anew")
        assert "No such file or directory" in hands.lines()[0]
        assert "not saved" in hands.budget
        moved.rename(tmp_path)
        await hands.press("escape", "ctrl+s")
        await answer(hands, "write over")
        await saved(hands)

    play(act)


@pytest.mark.parametrize("name", ["n" * 256, "no/such/folder.toml", "run.toml/inside"])
def test_another_name_that_no_file_can_have_is_told(play: Stage, name: str) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        hands.app.do("save_as")
        await hands.press("ctrl+u")
        await hands.type(name)
        await hands.press("enter")
        assert "could not be written" in hands.lines()[0]
        assert "save under another name" in answers(hands)
        await saved(hands)

    play(act)


# A full disk at the end, links, and the Text screen


def test_what_can_not_be_kept_for_the_next_time_does_not_end_the_app(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        filler = fill(tmp_path)
        await edit(hands)
        await hands.press("ctrl+q")
        await answer(hands, "next time")
        assert not exited(hands)
        assert "could not be kept: No space left on device" in hands.foot
        filler.unlink()
        await hands.press("ctrl+q")
        await answer(hands, "next time")
        assert exited(hands)
        assert kept(hands) == [hands.text]

    def stage() -> None:
        small_disk(tmp_path)
        os.environ["XDG_STATE_HOME"] = str(tmp_path / "state")
        play(act)

    with_own_mounts(stage)


def test_a_loop_of_links_offers_another_name(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        path = path_of(hands)
        path.unlink()
        path.symlink_to(path.name)
        await hands.press("ctrl+s")
        assert "a loop of symbolic links" in hands.lines()[0]
        hands.app.look_again()
        await hands.done()
        assert not exited(hands)
        path.unlink()
        await hands.press("escape", "ctrl+s")
        await answer(hands, "anew")
        await saved(hands)

    play(act)


def written(hands: Hands) -> list[str]:
    return [hands.app.written] if hands.app.written is not None else []


@pytest.mark.parametrize("keys", [("f2",), ("ctrl+p", *"Ledger", "enter")])
def test_the_way_to_the_ledger_takes_what_is_written_or_asks(play: Stage, keys: tuple[str, ...]) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("T")
        await hands.type("# by hand ")
        await hands.press("enter", *keys)
        assert hands.screen == "ledger"
        assert "# by hand \n" in hands.text
        assert written(hands) == []
        await hands.press("T", "x", *keys)
        assert hands.screen == "list"
        assert len(written(hands)) == 1
        hands.app.keep_now()
        assert kept(hands) == written(hands)
        await answer(hands, "mend")
        assert hands.screen == "text"
        assert kept(hands) == written(hands)

    play(act)
