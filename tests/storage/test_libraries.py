"""Libraries are read relative to the run's file, and only within its repository or the settings folder."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

import budget
from budget.commands import main
from budget.description import SourceText, describe, read_text
from budget.description.source import LARGEST_FILE
from budget.document import Document
from budget.storage import read_libraries
from budget.storage.libraries import MOST
from tests.description.test_library import RUN, VALVES

WRITTEN = "../office/valves.toml"


@pytest.fixture
def project(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A repository with a folder of runs and an office's library, and a settings folder outside it."""
    monkeypatch.setenv("XDG_CONFIG_HOME", str(tmp_path / "settings"))
    for folder in ("project/.git", "project/runs", "project/office", "settings/budget", "elsewhere"):
        (tmp_path / folder).mkdir(parents=True)
    for folder in ("project/office", "settings/budget", "elsewhere"):
        (tmp_path / folder / "valves.toml").write_text(VALVES)
    (tmp_path / "project/runs/run.toml").write_text(RUN)
    return tmp_path / "project"


def naming(*written: str) -> SourceText:
    spelled = ", ".join(f"'{one}'" if "'" not in one else f'"{one}"' for one in written)
    return read_text(RUN.replace(f'"{WRITTEN}"', spelled))


def fault(project: Path, written: str) -> str:
    """Why a library that the run names is not read; "" where it is."""
    path = project / "runs" / "run.toml"
    (library,) = read_libraries(naming(written), path)
    assert library.written == written
    assert (library.source is None) == bool(library.fault)
    found = [one for one in describe(naming(written), (library,)).findings if one.code == "library"]
    assert bool(found) == bool(library.fault)
    assert all(library.fault in one.message and one.path == ("library", 0) for one in found)
    return library.fault


def test_a_library_is_read_relative_to_the_run(project: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    assert fault(project, WRITTEN) == ""
    monkeypatch.chdir(project / "runs")
    (library,) = read_libraries(naming(WRITTEN), Path("run.toml"))
    assert library.source is not None
    assert library.source.text == VALVES


def test_every_library_is_read_in_the_order_of_the_run(project: Path) -> None:
    (project / "runs" / "own.toml").write_text("format = 1\n")
    read = read_libraries(naming("own.toml", WRITTEN), project / "runs" / "run.toml")
    assert [library.written for library in read] == ["own.toml", WRITTEN]
    assert all(library.source is not None for library in read)


def test_the_settings_folder_may_hold_a_library(project: Path) -> None:
    assert fault(project, "../../settings/budget/valves.toml") == ""
    (project / "office" / "mine.toml").symlink_to(project.parent / "settings" / "budget" / "valves.toml")
    assert fault(project, "../office/mine.toml") == ""


def test_nothing_outside_the_repository_is_read(project: Path) -> None:
    outside = "lies outside the run's repository"
    assert outside in fault(project, "../../elsewhere/valves.toml")
    assert outside in fault(project, "../../settings/valves.toml")
    (project / "office" / "link.toml").symlink_to(project.parent / "elsewhere" / "valves.toml")
    assert outside in fault(project, "../office/link.toml")
    (project / "away").symlink_to(project.parent / "elsewhere")
    assert outside in fault(project, "../away/valves.toml")
    assert outside in fault(project, "../../project-2/valves.toml")


def test_without_a_repository_the_run_keeps_to_its_own_folder(project: Path) -> None:
    (project / ".git").rmdir()
    assert "lies outside" in fault(project, WRITTEN)
    (project / "runs" / "valves.toml").write_text(VALVES)
    assert fault(project, "valves.toml") == ""


def test_a_worktree_has_a_file_in_place_of_the_folder(project: Path) -> None:
    (project / ".git").rmdir()
    (project / ".git").write_text("gitdir: elsewhere\n")
    assert fault(project, WRITTEN) == ""


def test_a_run_that_is_a_link_counts_where_it_really_is(project: Path) -> None:
    link = project.parent / "elsewhere" / "run.toml"
    link.symlink_to(project / "runs" / "run.toml")
    (library,) = read_libraries(naming(WRITTEN), link)
    assert library.source is not None


@pytest.mark.parametrize(
    ("written", "said"),
    [
        ("/etc/hosts", "absolute path"),
        ("C:\\valves.toml", "absolute path"),
        ("c:valves.toml", "absolute path"),
        ("\\\\server\\share\\valves.toml", "absolute path"),
        ("https://example.com/valves.toml", "is an address"),
        ("file:valves.toml", "is an address"),
        ("", "is no path"),
        ("  ", "is no path"),
        ("missing.toml", "could not be read: No such file or directory; correct the path"),
        ("run.toml/x.toml", "could not be read: Not a directory"),
        ("../office", "is not a regular file"),
        ("run.toml", "is the run itself"),
        ("../runs/../runs/run.toml", "is the run itself"),
        ("x" * 300 + ".toml", "could not be read: File name too long"),
        ("~/valves.toml", "could not be read: No such file"),
    ],
)
def test_a_path_that_leads_nowhere_is_a_finding(project: Path, written: str, said: str) -> None:
    assert said in fault(project, written)


def test_control_characters_in_a_path_are_a_finding(project: Path) -> None:
    for character in ("\\u0000", "\\n", "\\u202E"):
        source = read_text(RUN.replace(WRITTEN, f"a{character}b.toml"))
        (library,) = read_libraries(source, project / "runs" / "run.toml")
        assert "is no path" in library.fault


def test_what_is_no_regular_file_does_not_hang(project: Path) -> None:
    os.mkfifo(project / "office" / "pipe.toml")
    assert "not a regular file" in fault(project, "../office/pipe.toml")
    (project / "office" / "loop.toml").symlink_to("loop.toml")
    assert "symbolic links" in fault(project, "../office/loop.toml")


def test_a_library_that_is_too_large_is_not_read(project: Path) -> None:
    (project / "office" / "large.toml").write_bytes(b"format = 1\n#" + b"x" * LARGEST_FILE)
    assert "4.2 MB" in fault(project, "../office/large.toml")


def test_what_a_device_gives_is_not_read(project: Path) -> None:
    (project / "office" / "zero.toml").symlink_to("/dev/zero")
    assert "lies outside" in fault(project, "../office/zero.toml")


def test_a_library_that_is_nested_too_deep_is_a_finding(project: Path) -> None:
    (project / "office" / "deep.toml").write_text("format = 1\nx = " + "[" * 100_000)
    source = naming("../office/deep.toml")
    found = describe(source, read_libraries(source, project / "runs" / "run.toml")).findings
    said = [one.message for one in found if one.code == "library"]
    assert len(said) == 1
    assert said[0].startswith("../office/deep.toml:2:5: brackets or dotted keys are nested more than 32 deep")


def test_libraries_that_are_too_large_together_are_not_read(project: Path) -> None:
    for number in range(6):
        (project / "office" / f"{number}.toml").write_bytes(b"format = 1\n#" + b"x" * (LARGEST_FILE - 20))
    source = naming(*(f"../office/{number}.toml" for number in range(6)), WRITTEN)
    read = read_libraries(source, project / "runs" / "run.toml")
    assert [library.source is not None for library in read] == [True, True, True, True, False, False, False]
    assert "more than 16.8 MB of libraries" in read[4].fault


def test_bytes_that_are_no_text_are_a_finding(project: Path) -> None:
    (project / "office" / "bytes.toml").write_bytes(b"format = 1\n# \xff\n")
    description = describe(
        naming("../office/bytes.toml"),
        read_libraries(naming("../office/bytes.toml"), project / "runs" / "run.toml"),
    )
    found = [one for one in description.findings if one.code == "library"]
    assert [one.message.partition(";")[0] for one in found] == ["../office/bytes.toml:2:3: byte 0xff is not UTF-8"]


def test_only_so_many_are_read(project: Path) -> None:
    many = read_libraries(naming(*(f"{n}.toml" for n in range(MOST + 1))), project / "runs" / "run.toml")
    assert "one too many" in many[-1].fault
    assert "No such file" in many[-2].fault


def test_a_run_without_a_file_has_no_libraries() -> None:
    (library,) = read_libraries(naming(WRITTEN), None)
    assert library.source is None
    assert "save it to a file first" in library.fault
    assert "absolute path" in read_libraries(naming("/a.toml"), None)[0].fault
    assert budget.reads(RUN).description.findings[0].code == "library"


def test_the_public_interface_reads_libraries(project: Path) -> None:
    path = project / "runs" / "run.toml"
    run = budget.read(path)
    assert run.description.findings == ()
    assert run.description.devices["DRV 20"].origin == WRITTEN
    longer = budget.apply(run, budget.SetValue(("section", "M1", "length"), "12 m"))
    assert longer.libraries is run.libraries
    assert longer.description.findings == ()
    without = budget.apply(run, budget.Unset(("library",)))
    assert without.libraries == ()
    assert "unknown-device" in {one.code for one in without.description.findings}
    moved = budget.save(longer, project / "run.toml")
    assert [one.code for one in moved.description.findings][:1] == ["library"]


def test_a_document_keeps_its_libraries_while_it_is_edited(project: Path) -> None:
    document = Document.open(project / "runs" / "run.toml")
    assert document.snapshot.description.findings == ()
    office = project / "office" / "valves.toml"
    office.write_text(VALVES.replace("least_drop = 3", "least_drop = 9"))
    edit = budget.SetValue(("section", "M1", "length"), "12 m")
    assert least(document.preview(edit).description) == 3000.0
    document.apply(edit, "length")
    assert least(document.snapshot.description) == 3000.0  # what is on disk is not looked at on each edit
    before = document.snapshot.revision
    document.save()
    assert least(document.snapshot.description) == 9000.0
    assert document.snapshot.revision == before + 1
    assert not document.dirty


def test_a_document_reads_libraries_anew_when_the_run_names_others(project: Path) -> None:
    document = Document.open(project / "runs" / "run.toml")
    (project / "office" / "more.toml").write_text(VALVES.replace("least_drop = 3", "least_drop = 5"))
    edit = budget.SetValue(("library",), ["../office/more.toml"])
    assert least(document.preview(edit).description) == 5000.0
    assert least(document.snapshot.description) == 3000.0
    document.apply(edit, "library")
    assert least(document.snapshot.description) == 5000.0
    document.undo()
    assert least(document.snapshot.description) == 3000.0
    document.replace_text(document.snapshot.text + "\n[", "typing")
    document.replace_text(document.snapshot.text.removesuffix("\n["), "typing")
    assert document.snapshot.description.findings == ()


def test_a_document_takes_libraries_as_they_are_by_now_when_it_is_told_to(project: Path) -> None:
    document = Document.open(project / "runs" / "run.toml")
    first, known = document.snapshot, document.look_at_libraries()
    assert document.look_at_libraries() is known
    assert not document.take_libraries(known)
    assert document.snapshot is first
    office = project / "office" / "valves.toml"
    office.write_text(VALVES.replace("least_drop = 3", "least_drop = 9"))
    assert document.take_libraries(document.look_at_libraries())
    assert least(document.snapshot.description) == 9000.0
    office.unlink()
    assert document.take_libraries(document.look_at_libraries())
    assert "library" in {one.code for one in document.snapshot.findings}


def test_libraries_seen_for_other_names_are_not_taken(project: Path) -> None:
    document = Document.open(project / "runs" / "run.toml")
    seen = document.look_at_libraries()
    document.apply(budget.Unset(("library",)), "library")
    assert not document.take_libraries(seen)
    assert "unknown-device" in {one.code for one in document.snapshot.findings}


def least(description: budget.Description) -> float:
    quantity = description.devices["DRV 20"].least_drop
    assert quantity is not None
    return quantity.value


def test_the_commands_read_libraries(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = str(project / "runs" / "run.toml")
    assert main(["check", path]) == 0
    assert main(["report", path]) == 0
    assert f"DRV 20: from {WRITTEN}" in capsys.readouterr().out
    assert main(["set", path, "section.M1.length", "12 m"]) == 0
    assert main(["set", path, "library", '["../office/none.toml"]']) == 2
    assert "No such file" in capsys.readouterr().err
