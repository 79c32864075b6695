"""budget changes: what a diff means, against another file, standard input or a revision of git."""

from __future__ import annotations

import io
import json
import os
import sys
from pathlib import Path

import pytest

from tests.commands.calls import RUN, Caller
from tests.description.test_library import RUN as WITH_LIBRARY
from tests.description.test_library import VALVES
from tests.storage.repositories import Repository, needs_git

LONGER = RUN.replace('"7.5 m"', '"9 m"')


@pytest.fixture
def other(tmp_path: Path) -> Path:
    path = tmp_path / "other.toml"
    path.write_text(LONGER)
    return path


@pytest.fixture
def repository(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Repository:
    """A repository with two revisions of a run."""
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", os.devnull)
    found = Repository(tmp_path / "project")
    found.commit("Begin", run=RUN)
    found.commit("Lengthen the main", run=LONGER)
    return found


def typed(text: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stdin", io.TextIOWrapper(io.BytesIO(text.encode())))


def test_two_files_are_compared_the_older_one_second(call: Caller, run_file: Path, other: Path) -> None:
    status, out, err = call("changes", other, run_file)
    assert (status, err) == (0, "")
    lines = out.splitlines()
    assert lines[0] == f"{other}: {run_file} -> as it is"
    assert lines[1].startswith("both versions are computed by budget ")
    assert "    length  7.5 m  ->  9 m" in lines
    (required,) = [line.split() for line in lines if line.split()[:2] == ["P1", "required"]]
    assert float(required[3]) - float(required[2]) == pytest.approx(float(required[4]))
    assert required[5] == "kPa"
    back = call("changes", run_file, other).out
    assert "    length  9 m  ->  7.5 m" in back
    assert required[4].replace("+", "-") in back


def test_what_is_the_same_says_so(call: Caller, run_file: Path) -> None:
    status, out, _ = call("changes", run_file, run_file)
    assert status == 0
    assert out.splitlines()[2:] == ["nothing differs"]
    assert json.loads(call("changes", run_file, run_file, "--json").out)["changed"] is False


def test_the_status_is_that_of_the_newer_version(call: Caller, run_file: Path, other: Path) -> None:
    other.write_text(RUN.replace('"25 kPa"', '"1 kPa"'))
    assert call("changes", other, run_file).status == 1
    assert call("changes", run_file, other).status == 0
    other.write_text(RUN.replace('"2.4 kW"', '"2.4 parrots"'))
    status, out, _ = call("changes", other, run_file)
    assert status == 2
    assert "New findings" in out
    assert call("changes", run_file, other).status == 0


@pytest.mark.parametrize("place", [0, 1])
def test_a_version_that_can_not_be_read_is_told(call: Caller, run_file: Path, tmp_path: Path, place: int) -> None:
    broken = tmp_path / "broken.toml"
    broken.write_text("a = [")
    for file, said in ((broken, "not TOML"), (tmp_path / "none.toml", "No such file")):
        files = [run_file, run_file]
        files[place] = file
        status, out, err = call("changes", *files)
        assert (status, out) == (2, "")
        assert said in err
        assert file.name in err


def test_standard_input_is_an_older_version_beside_the_same_libraries(
    call: Caller, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    for name in ("project/.git", "project/office", "project/runs"):
        (tmp_path / name).mkdir(parents=True)
    run = tmp_path / "project" / "runs" / "run.toml"
    run.write_text(WITH_LIBRARY)
    (tmp_path / "project" / "office" / "valves.toml").write_text(VALVES)
    typed(WITH_LIBRARY.replace('"9 m"', '"7 m"'), monkeypatch)
    status, out, _ = call("changes", run, "-")
    assert status == 0
    assert out.splitlines()[0] == f"{run}: standard input -> as it is"
    assert "    length  7 m  ->  9 m" in out
    assert "findings" not in out.lower()
    typed(WITH_LIBRARY, monkeypatch)
    assert "nothing differs" in call("changes", run, "-").out


def test_standard_input_may_be_the_newer_one(call: Caller, run_file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    typed(LONGER, monkeypatch)
    assert "    length  7.5 m  ->  9 m" in call("changes", "-", run_file).out


@pytest.mark.parametrize(
    ("words", "said"),
    [
        (("-",), "standard input has no other version"),
        (("-", "-"), "standard input has no other version"),
        (("-", "--revision", "HEAD"), "standard input has no other version"),
        (("run.toml", "other.toml", "--revision", "HEAD"), "leave one of them out"),
    ],
)
def test_what_can_not_be_asked_together_is_refused(call: Caller, words: tuple[str, ...], said: str) -> None:
    status, out, err = call("changes", *words)
    assert (status, out) == (2, "")
    assert said in err


# Git


@needs_git
def test_the_file_is_compared_with_what_was_committed_last(call: Caller, repository: Repository) -> None:
    run = repository.folder / "run.toml"
    assert "nothing differs" in call("changes", run).out
    run.write_text(LONGER.replace('"2.6 kW"', '"2.8 kW"').replace("\n", "\r\n"), newline="")
    lines = call("changes", run).out.splitlines()
    assert lines[0] == f"{run}: HEAD ({repository.git('rev-parse', 'HEAD')[:10]}) -> as it is"
    assert "    load  2.6 kW  ->  2.8 kW" in lines
    assert "length" not in "".join(lines)
    assert "line ends" not in "".join(lines)


@needs_git
def test_any_revision_can_be_named(call: Caller, repository: Repository) -> None:
    run = repository.folder / "run.toml"
    assert "    length  7.5 m  ->  9 m" in call("changes", run, "--revision", "HEAD~1").out
    found = json.loads(call("changes", run, "--revision=main^", "--json").out)
    assert found["before"] == {"revision": "main^", "commit": repository.git("rev-parse", "HEAD~1")}
    assert found["file"] == str(run)
    assert found["sources"]["P1"]["figures"]["required"]["difference"] > 0


@needs_git
@pytest.mark.parametrize("revision", ["nowhere", "--help", ""])
def test_a_revision_that_is_none_is_refused(call: Caller, repository: Repository, revision: str) -> None:
    status, out, err = call("changes", repository.folder / "run.toml", f"--revision={revision}")
    assert (status, out) == (2, "")
    assert f"there is no revision {revision!r}" in err


@needs_git
def test_a_library_is_read_from_the_revision_where_it_is_there(call: Caller, repository: Repository) -> None:
    (repository.folder / "office").mkdir()
    (repository.folder / "runs").mkdir()
    run, library = repository.folder / "runs" / "run.toml", repository.folder / "office" / "valves.toml"
    run.write_text(WITH_LIBRARY)
    repository.commit("A run without its library")
    library.write_text(VALVES)
    out = call("changes", run).out
    assert "the library ../office/valves.toml is not in HEAD; it is read from disk" in out
    assert "nothing differs" in out
    repository.commit("Its library too")
    library.write_text(VALVES.replace("k = 0.8", "k = 8"))
    out = call("changes", run).out
    assert "is read from disk" not in out
    assert [line.split()[:2] for line in out.splitlines() if line.startswith("  M1")] == [["M1", "drop"]]
    assert "Keys" not in out


@needs_git
def test_outside_of_a_repository_it_is_refused(call: Caller, run_file: Path) -> None:
    status, out, err = call("changes", run_file)
    assert (status, out) == (2, "")
    assert "is in no git repository; compare it with another file" in err
