"""Going on from one run to another: the list, what can't be opened, what is unsaved, and what fails on the way."""

from __future__ import annotations

import os
import threading
from collections.abc import Callable
from pathlib import Path

import pytest

from budget import screens
from budget.document import Document
from budget.screens import another, opening, signals
from budget.screens.app import BudgetApp
from budget.screens.config import Config
from budget.screens.opened import Opened, open_run
from budget.storage import StorageError
from budget.storage.keeping import Keeper
from budget.storage.processes import this_process
from budget.storage.recents import note_recent, recent_runs
from budget.storage.records import Record, find_records
from budget.storage.runs import runs_at_hand
from tests.screens.conftest import SMALL, Hands, Stage

OTHER = SMALL.replace('length = "7.5 m"', 'length = "6 m"')


@pytest.fixture(autouse=True)
def own(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("XDG_STATE_HOME", str(tmp_path / "state"))
    (tmp_path / "other.toml").write_text(OTHER)


async def edit(hands: Hands) -> None:
    await hands.at("M1")
    await hands.press("enter", "ctrl+u")
    await hands.type("9 m")
    await hands.press("enter")


async def choose(hands: Hands, path: str) -> None:
    """Write a path in the list and take it."""
    await hands.press("ctrl+t")
    await hands.type(path)
    await hands.press("enter")


def following(hands: Hands) -> str:
    """The file that the app was left for."""
    read = hands.app.following
    return read.path.name if hands.app._exit and read is not None else ""


# The list


def test_runs_at_hand_are_listed_with_when_and_what(play: Stage, tmp_path: Path) -> None:
    (tmp_path / "far").mkdir()
    (tmp_path / "far" / "attic.toml").write_text(OTHER)
    (tmp_path / "[b]bold.toml").write_text('format = 1\n[design]\ntitle = "\\u001b[31m[@click=x]"\n[source.P1]\n')
    note_recent(tmp_path / "far" / "attic.toml")

    async def act(hands: Hands) -> None:
        await hands.press("ctrl+t")
        assert hands.listed == ["attic.toml", "[b]bold.toml", "other.toml"]
        assert "open " in hands.listing("attic.toml")
        assert "Lockkeeper's cottage" in hands.listing("attic.toml")
        assert "changed " in hands.listing("[b]bold.toml")
        assert "\N{REPLACEMENT CHARACTER}[31m[@click=x]" in hands.listing("[b]bold.toml")
        assert str(tmp_path / "far" / "attic.toml")[-40:] in hands.screen_text.replace("\n ", "")
        await hands.type("far")  # the folder finds it, too
        assert hands.listed == ["attic.toml", "far"]
        await hands.press("escape")
        assert hands.screen == "ledger"

    play(act, size=(200, 30))


def test_the_list_is_there_while_a_disk_hangs(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    go_on, real = threading.Event(), runs_at_hand

    def hanging(*given: object) -> object:
        assert go_on.wait(20.0)
        return real(*given)  # type: ignore[arg-type]

    monkeypatch.setattr(another, "runs_at_hand", hanging)

    async def act(hands: Hands) -> None:
        hands.app.do("open_other")
        while not hands.app.front.size:
            await hands.pilot._wait_for_screen()
        assert "looking for runs" in hands.screen_text
        go_on.set()
        await hands.done()
        assert hands.listed == ["other.toml"]

    play(act)


def test_a_list_that_comes_late_is_not_put_before_other_hands(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    go_on = threading.Event()
    monkeypatch.setattr(another, "runs_at_hand", lambda *_: (go_on.wait(20.0), ())[1])

    async def act(hands: Hands) -> None:
        hands.app.do("open_other")
        hands.app.do("leave")
        hands.app.do("commands")
        listed = hands.listed
        go_on.set()
        await hands.done()
        assert hands.listed == listed

    play(act)


# Taking one


def test_the_one_that_is_taken_follows(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("ctrl+t", "enter")
        assert following(hands) == "other.toml"
        assert hands.app.return_value == 0
        assert not hands.app.discarding

    play(act)


@pytest.mark.parametrize(
    ("make", "told"),
    [
        (os.mkfifo, "x.toml is not a regular file"),
        (lambda path: path.mkdir(), "x.toml is not a regular file"),
        (lambda path: path.write_bytes(b"a\xff"), "byte 0xff is not UTF-8"),
        (lambda path: path.write_bytes(b"#" * (4 * 1024 * 1024 + 1)), "split the run"),
        (lambda path: path.symlink_to(path), "x.toml could not be read"),
        (lambda path: path.symlink_to("run.toml"), "x.toml is open already"),
        (lambda path: os.link(path.with_name("run.toml"), path), "x.toml is open already"),
        (lambda path: path.with_name("y.toml"), "there is no x.toml; budget new FILE writes"),
    ],
    ids=["fifo", "folder", "not UTF-8", "too large", "loop", "link to itself", "hard link to itself", "missing"],
)
def test_what_cant_be_opened_is_refused_and_nothing_is_asked(
    play: Stage, tmp_path: Path, make: Callable[[Path], object], told: str
) -> None:
    async def act(hands: Hands) -> None:
        make(tmp_path / "x.toml")
        await edit(hands)
        await choose(hands, "x.toml")
        assert told in " ".join(line.strip() for line in hands.lines(hands.app.foot))
        assert hands.screen == "ledger"
        assert not hands.app._exit
        assert 'length = "9 m"' in hands.text

    play(act)


@pytest.mark.parametrize(
    ("typed", "told"), [("a\0b", "no file has such a name"), ("~nobody-of-that-name/x.toml", "no such home folder")]
)
def test_a_name_that_can_be_no_file_is_refused(tmp_path: Path, typed: str, told: str) -> None:
    read = another._read(Path(typed), tmp_path / "run.toml")
    assert isinstance(read, str)
    assert told in read


def test_a_path_of_the_home_folder_is_understood(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("HOME", str(tmp_path))
    choice = another._written(tmp_path / "elsewhere" / "run.toml", "~/other.toml")
    assert choice is not None
    assert isinstance(choice.value, Path)
    read = another._read(choice.value, None)
    assert isinstance(read, Opened)
    assert read.path == tmp_path / "other.toml"


def test_a_fault_of_the_program_at_the_other_run_leaves_the_present_one(
    play: Stage, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(_path: Path) -> Opened:
        raise ZeroDivisionError("a fault\x1b[31m")

    monkeypatch.setattr(another, "open_run", broken)

    async def act(hands: Hands) -> None:
        await choose(hands, "other.toml")
        assert "internal error: ZeroDivisionError" in hands.foot
        assert not hands.app._exit

    play(act)


def test_hands_that_are_at_a_value_by_then_are_not_taken_away(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.at("M1")
        await hands.press("enter", "8")
        another._go_on(hands.app, open_run(Path(str(hands.app.document.path)).with_name("other.toml")))
        assert hands.place == "entry"
        assert not hands.app._exit

    play(act)


# What is unsaved


def test_what_is_unsaved_is_saved_first(play: Stage, tmp_path: Path) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        await choose(hands, "other.toml")
        assert hands.listed == [
            "save, and open the other", "keep the changes for the next time, and open the other",
            "open the other without saving", "stay",
        ]  # fmt: skip
        await hands.press("enter")
        assert following(hands) == "other.toml"
        assert 'length = "9 m"' in (tmp_path / "run.toml").read_text()

    play(act)


def test_what_is_unsaved_is_kept_or_thrown_away(play: Stage, tmp_path: Path) -> None:
    for answer, discarding in (("keep", False), ("without", True)):

        async def act(hands: Hands, answer: str = answer, discarding: bool = discarding) -> None:
            await edit(hands)
            await choose(hands, "other.toml")
            await hands.type(answer)
            await hands.press("enter")
            assert following(hands) == "other.toml"
            assert hands.app.discarding is discarding
            assert (tmp_path / "run.toml").read_text() == SMALL
            assert hands.app.keeper.kept or discarding

        play(act)


def test_one_can_stay(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await edit(hands)
        await choose(hands, "other.toml")
        await hands.press("escape")
        assert not hands.app._exit
        assert hands.app.following is None
        await hands.press("ctrl+q")
        assert hands.listed[0] == "save and quit"

    play(act)


def test_what_is_written_on_the_text_screen_is_taken_first(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("T")
        hands.app.text.load_text(SMALL.replace("7.5 m", "9 m"))
        await hands.press("ctrl+t")
        assert hands.app.document.dirty
        await hands.press("enter")
        assert hands.listed[0] == "save, and open the other"

    play(act)


# From one app to the next


def stay_with(path: Path, *, read_only: bool = False) -> tuple[opening._Stay, BudgetApp]:
    """Return a stay with the app of a run, in which somebody has edited it and asked for another."""
    stay = opening._Stay(opening.Terms(Config(), ascii_only=False, mouse=False, read_only=read_only))
    app = stay.app = stay.make(open_run(path))
    if not read_only:
        app.document.replace_text(OTHER, "an edit")
    app.keep_now()
    return stay, app


def kept(path: Path) -> list[Record]:
    return [record for record in find_records(path) if record.text is not None]


def test_what_is_kept_is_open_nowhere_and_can_be_recovered_at_once(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_text(SMALL)
    stay, app = stay_with(path)
    after = stay.next_after(app, open_run(tmp_path / "other.toml"))
    assert after.document.path == tmp_path / "other.toml"
    (record,) = kept(path)
    assert record.text == OTHER
    assert record.alive is False
    assert record.process != this_process()
    app.keep_now()  # a signal between the two
    assert [one.id for one in kept(path)] == [record.id]


def test_what_is_thrown_away_is_gone(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_text(SMALL)
    stay, app = stay_with(path)
    app.discarding = True
    stay.next_after(app, open_run(tmp_path / "other.toml"))
    assert find_records(path) == ()


@pytest.mark.parametrize("discarding", [False, True])
def test_where_it_fails_between_the_old_run_is_back_with_all_that_was_unsaved(tmp_path: Path, discarding: bool) -> None:
    path, other = tmp_path / "run.toml", tmp_path / "other.toml"
    path.write_text(SMALL)
    stay, app = stay_with(path)
    app.discarding = discarding
    following = open_run(other)
    other.unlink()
    back = stay.next_after(app, following)
    assert back is not app
    assert back.document is app.document
    assert back.document.dirty
    assert back.document.can_undo
    assert not back.discarding
    assert "could not be read" in back.first_words[0]
    (record,) = kept(path)
    assert record.id == back.keeper.id
    assert record.text == OTHER
    back.keeper.end()


def test_a_fault_between_brings_the_old_run_back(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "run.toml"
    path.write_text(SMALL)
    stay, app = stay_with(path)

    def broken(_run: Opened) -> Opened:
        raise ZeroDivisionError("a fault")

    monkeypatch.setattr(Opened, "up_to_date", broken)
    back = stay.next_after(app, open_run(tmp_path / "other.toml"))
    assert back.document is app.document
    assert "ZeroDivisionError" in back.first_words[0]


def test_where_the_old_run_cant_be_kept_anew_its_record_stays(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path, other = tmp_path / "run.toml", tmp_path / "other.toml"
    path.write_text(SMALL)
    stay, app = stay_with(path)
    following = open_run(other)
    other.unlink()
    monkeypatch.setattr(Keeper, "keep_now", lambda *_: False)
    stay.next_after(app, following)
    (record,) = kept(path)
    assert record.text == OTHER


def test_a_file_that_was_changed_meanwhile_is_read_anew(tmp_path: Path) -> None:
    read = open_run(tmp_path / "other.toml")
    assert read.up_to_date() is read
    (tmp_path / "other.toml").write_text(SMALL)
    assert read.up_to_date().document.snapshot.text == SMALL
    (tmp_path / "other.toml").unlink()
    with pytest.raises(StorageError):
        read.up_to_date()


def test_read_only_holds_only_where_it_was_asked_for(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_text(SMALL)
    stay, app = stay_with(path, read_only=True)
    assert stay.next_after(app, open_run(tmp_path / "other.toml")).document.read_only == "opened read-only"
    stay, app = stay_with(path)
    app.document.read_only = "opened read-only: the run is open elsewhere"
    assert stay.next_after(app, open_run(tmp_path / "other.toml")).document.read_only == ""


def test_a_signal_goes_to_the_app_that_is_open_now(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "run.toml"
    path.write_text(SMALL)
    stay, app = stay_with(path)
    app.keeper.end(discard=True)
    stay.app = stay.make(open_run(tmp_path / "other.toml"))
    stay.app.document.replace_text(SMALL, "an edit")
    closed: list[int] = []
    monkeypatch.setattr(stay.app, "close_with", closed.append)
    monkeypatch.setattr(app, "close_with", lambda _: closed.append(-1))
    monkeypatch.setattr(signals.Guard, "hurry", lambda *_: None)
    stay.guard.trigger(15)
    assert closed == [143]
    assert [record.path.name for record in kept(tmp_path / "other.toml")] == ["other.toml"]
    assert find_records(path) == ()


def test_what_was_opened_or_saved_under_another_name_is_remembered(play: Stage) -> None:
    async def act(hands: Hands) -> None:
        await hands.press("down")
        hands.app.do("save_as")
        await hands.press("ctrl+u")
        await hands.type("copy.toml")
        await hands.press("enter", "down")
        assert [one.path.name for one in recent_runs()] == ["copy.toml", "run.toml"]

    play(act)


# Without a file


@pytest.fixture
def asked(monkeypatch: pytest.MonkeyPatch) -> list[tuple[Path, str]]:
    """What `budget edit` would open, and say of it."""
    seen: list[tuple[Path, str]] = []

    def open_app(path: Path, *_: object, first_words: str, **__: object) -> int:
        seen.append((path, first_words))
        return 0

    monkeypatch.setattr(screens, "objection_here", lambda **_: "")
    monkeypatch.setattr(opening, "open_app", open_app)
    return seen


def test_without_a_file_the_latest_that_is_there_is_opened(tmp_path: Path, asked: list[tuple[Path, str]]) -> None:
    for name in ("other", "gone"):
        note_recent(tmp_path / f"{name}.toml")
    assert screens.run(None) == 0
    ((path, words),) = asked
    assert path == tmp_path / "other.toml"
    assert words == f"the run that was open last: {path}"


def test_without_a_file_and_without_a_recent_one_it_says_what_to_write(
    asked: list[tuple[Path, str]], capsys: pytest.CaptureFixture[str]
) -> None:
    assert screens.run(None) == 2
    assert asked == []
    told = capsys.readouterr().err
    assert told.count("\n") == 1
    assert "budget edit FILE" in told
    assert "budget new FILE" in told


def test_the_first_words_stand_at_the_foot(play: Stage, monkeypatch: pytest.MonkeyPatch) -> None:
    real = BudgetApp.__init__

    def begin(app: BudgetApp, document: Document, *given: object, **named: object) -> None:
        real(app, document, *given, **named)  # type: ignore[arg-type]
        app.first_words = ("the run that was open last: \x1b[31mrun", "note")

    monkeypatch.setattr(BudgetApp, "__init__", begin)

    async def act(hands: Hands) -> None:
        assert hands.foot == "the run that was open last: \N{REPLACEMENT CHARACTER}[31mrun"

    play(act)
