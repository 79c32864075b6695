"""Earlier versions are read from a repository, whatever its settings say, and nothing is started or reached by them."""

from __future__ import annotations

import os
import shutil
import time
from pathlib import Path

import pytest

from budget.description.source import LARGEST_FILE
from budget.storage import StorageError, revisions
from budget.storage.revisions import list_revisions, read_past
from tests.description.test_library import RUN as WITH_LIBRARY
from tests.description.test_library import VALVES
from tests.storage.repositories import Repository, needs_git

pytestmark = needs_git

OLD, NEW = "format = 1 # old\n", "format = 1 # new\n"


@pytest.fixture
def repository(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Repository:
    """A repository with two revisions of a run, read without the settings of whoever runs the tests."""
    monkeypatch.setenv("GIT_CONFIG_GLOBAL", os.devnull)
    monkeypatch.setenv("GIT_CONFIG_SYSTEM", os.devnull)
    found = Repository(tmp_path / "project")
    found.commit("Begin", run=OLD)
    found.commit("Go on", run=NEW)
    return found


@pytest.fixture
def run_file(repository: Repository) -> Path:
    return repository.folder / "run.toml"


def text_in(path: Path, revision: str) -> str:
    return read_past(path, revision).source.text


def refusal(path: Path, revision: str = "HEAD") -> str:
    with pytest.raises(StorageError) as refused:
        read_past(path, revision)
    return str(refused.value)


# What is read


def test_a_revision_is_named_as_git_names_it(repository: Repository, run_file: Path) -> None:
    repository.git("tag", "issue-1", "HEAD~1")
    first = repository.git("rev-parse", "HEAD~1")
    run_file.write_text("format = 1 # not committed\n")
    for name in ("HEAD~1", "main^", "issue-1", first, first[:9], "main@{1}", "HEAD^{/Begin}"):
        assert text_in(run_file, name) == OLD
        assert read_past(run_file, name).revision == first
    assert text_in(run_file, "HEAD") == NEW


def test_a_file_in_a_folder_beneath_is_found_from_wherever_one_is(
    repository: Repository, monkeypatch: pytest.MonkeyPatch
) -> None:
    inner = repository.folder / "-runs *" / ":(top)x"
    inner.mkdir(parents=True)
    for name in ("-run.toml", "*.toml", "ä \\ \udcff.toml", ":!run.toml"):
        (inner / name).write_text(OLD)
    (inner / "b.toml").write_text("")
    repository.commit("Add folders")
    for name in ("-run.toml", "*.toml", "ä \\ \udcff.toml", ":!run.toml"):
        (inner / name).write_text(NEW)
        assert text_in(inner / name, "HEAD") == OLD
        assert [one.subject for one in list_revisions(inner / name)] == ["Add folders"]
    monkeypatch.chdir(inner)
    assert text_in(Path("-run.toml"), "HEAD") == OLD


def test_a_link_leads_to_the_real_file_and_its_repository(repository: Repository, run_file: Path) -> None:
    link = repository.folder.parent / "link.toml"
    link.symlink_to(run_file)
    assert text_in(link, "HEAD~1") == OLD
    assert len(list_revisions(link)) == 2


def test_what_was_a_link_or_no_file_is_told(repository: Repository, run_file: Path) -> None:
    run_file.unlink()
    run_file.symlink_to("other.toml")
    repository.commit("Link", other=OLD)
    run_file.unlink()
    run_file.mkdir()
    (run_file / "inner.toml").write_text(OLD)
    repository.commit("Folder")
    shutil.rmtree(run_file)
    run_file.write_text(NEW)
    assert "run.toml is no regular file in revision HEAD~1; name" in refusal(run_file, "HEAD~1")
    assert "run.toml is no regular file in revision HEAD; name" in refusal(run_file, "HEAD")


def test_a_file_that_is_gone_from_disk_is_read_from_a_revision(run_file: Path) -> None:
    run_file.unlink()
    assert text_in(run_file, "HEAD~1") == OLD


def test_what_is_checked_out_with_other_line_ends_is_read_as_it_was_committed(
    repository: Repository, run_file: Path
) -> None:
    repository.git("config", "core.autocrlf", "true")
    run_file.unlink()
    repository.git("checkout", "--", "run.toml")
    assert run_file.read_bytes() == NEW.replace("\n", "\r\n").encode()
    assert text_in(run_file, "HEAD") == NEW


def test_the_variables_of_a_hook_lead_to_no_other_repository(
    run_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    other = Repository(tmp_path / "other")
    other.commit("Other", run="other")
    monkeypatch.setenv("GIT_DIR", str(other.folder / ".git"))
    monkeypatch.setenv("GIT_WORK_TREE", str(other.folder))
    assert text_in(run_file, "HEAD") == NEW


def test_libraries_are_those_of_the_revision_where_it_has_them(repository: Repository) -> None:
    runs, office = repository.folder / "runs", repository.folder / "office"
    runs.mkdir()
    office.mkdir()
    run = runs / "run.toml"
    run.write_text(WITH_LIBRARY.replace('["../office/valves.toml"]', '["../office/valves.toml", "own.toml"]'))
    (office / "valves.toml").write_text(VALVES)
    repository.commit("Begin with a library")
    (office / "valves.toml").write_text(VALVES.replace("k = 0.8", "k = 1.6"))
    (runs / "own.toml").write_text("format = 1\n")
    past = read_past(run, "HEAD")
    assert [one.source.text if one.source else one.fault for one in past.libraries] == [VALVES, "format = 1\n"]
    assert past.from_disk == ("own.toml",)
    (office / "valves.toml").unlink()
    assert read_past(run, "HEAD").libraries == past.libraries
    (runs / "own.toml").unlink()
    gone = read_past(run, "HEAD")
    assert "could not be read" in gone.libraries[1].fault
    assert gone.from_disk == ()


# The list


def test_revisions_that_touched_the_file_are_listed_the_latest_first(repository: Repository, run_file: Path) -> None:
    repository.commit("Something else", other=OLD)
    subject = "\x1b[31mred\x1b[0m [bold] \u202e 配管"
    last = repository.commit(subject, run=OLD)
    found = list_revisions(run_file)
    assert [one.subject for one in found] == [subject, "Go on", "Begin"]
    assert found[0].id == last
    assert last.startswith(found[0].short)
    assert len(found[0].date) == len("2026-01-31")
    assert [one.subject for one in list_revisions(run_file, 2)] == [subject, "Go on"]


def test_where_nothing_was_committed_nothing_is_listed(tmp_path: Path) -> None:
    Repository(tmp_path)
    (tmp_path / "run.toml").write_text(OLD)
    assert list_revisions(tmp_path / "run.toml") == ()
    assert "there is no revision 'HEAD'" in refusal(tmp_path / "run.toml")


def test_a_subject_beyond_all_bounds_ends_the_list(repository: Repository, run_file: Path) -> None:
    message = repository.folder.parent / "message"
    message.write_text("x" * (LARGEST_FILE + 1))
    run_file.write_text(OLD)
    repository.git("commit", "--quiet", "--all", f"--file={message}")
    repository.commit("Short again", run=NEW)
    assert [one.subject for one in list_revisions(run_file)] == ["Short again"]


# What is refused


@pytest.mark.parametrize(
    "written", ["nowhere", "--help", "-h", "--all", "", " ", "HEAD:run.toml", "HEAD..main", "HEAD\n", "a\0b", "\udcff"]
)
def test_what_names_no_revision_is_refused(run_file: Path, written: str) -> None:
    assert refusal(run_file, written).startswith(f"there is no revision {written!r} in the repository of {run_file}; ")


def test_a_file_that_the_revision_does_not_have_is_told(repository: Repository) -> None:
    late = repository.folder / "late.toml"
    late.write_text(NEW)
    assert refusal(late) == f"{late} is not in revision HEAD; name one that has it"
    assert list_revisions(late) == ()


def test_outside_of_a_repository_it_says_so(tmp_path: Path) -> None:
    assert "run.toml is in no git repository; compare it with another file" in refusal(tmp_path / "run.toml")
    assert "could not be asked" in refusal(tmp_path / "nowhere" / "run.toml")


def test_a_version_that_is_too_large_is_not_read(repository: Repository, run_file: Path) -> None:
    repository.commit("Much", run=b"#" * (LARGEST_FILE + 1))
    assert "has more than 4.2 MB in revision HEAD" in refusal(run_file)
    repository.commit("As much as there may be", run=b"#" * LARGEST_FILE)
    assert len(text_in(run_file, "HEAD")) == LARGEST_FILE


def test_without_git_it_says_so(run_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PATH", str(tmp_path))
    assert refusal(run_file) == "git was not found; install it, or compare with another file"


def instead_of_git(folder: Path, script: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Put a script before git on the path; it finds the real one as $GIT."""
    real, path = shutil.which("git"), folder / "bin" / "git"
    path.parent.mkdir()
    path.write_text(f"#!/bin/sh\nGIT='{real}'\n{script}\n")
    path.chmod(0o755)
    monkeypatch.setenv("PATH", f"{path.parent}{os.pathsep}{os.environ['PATH']}")


def test_a_repository_of_another_user_is_refused_in_the_words_of_git(
    run_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    instead_of_git(tmp_path, 'GIT_TEST_ASSUME_DIFFERENT_OWNER=1 exec "$GIT" "$@"', monkeypatch)
    said = refusal(run_file)
    assert said.startswith(f"git refused to read {run_file}: detected dubious ownership in repository at ")
    assert "\n" not in said
    assert "safe.directory" in said


def test_a_repository_that_is_damaged_is_told(repository: Repository, run_file: Path) -> None:
    blob = repository.git("rev-parse", "HEAD:run.toml")
    (repository.folder / ".git" / "objects" / blob[:2] / blob[2:]).unlink()
    assert f"git refused to read {run_file}: " in refusal(run_file)
    (repository.folder / ".git" / "config").write_text("[core\n")
    assert "bad config line 1" in refusal(run_file)


def test_git_that_hangs_is_ended_with_what_it_started(
    run_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    instead_of_git(tmp_path, f"echo $$ > {tmp_path}/pid; sleep 600 & echo $! >> {tmp_path}/pid; wait", monkeypatch)
    monkeypatch.setattr(revisions, "WITHIN", 0.3)
    began = time.monotonic()
    assert refusal(run_file) == f"git did not answer about {run_file} within 0.3 s; try again"
    assert time.monotonic() - began < 5.0
    for number in (tmp_path / "pid").read_text().split():
        until = time.monotonic() + 5.0
        while (state := state_of(number)) not in ("", "Z"):
            assert time.monotonic() < until, f"process {number} is still there: {state}"
            time.sleep(0.01)


def state_of(number: str) -> str:
    """Return how a process stands, "" for one that is gone."""
    try:
        os.kill(int(number), 0)
        return Path(f"/proc/{number}/stat").read_text().rpartition(")")[2].split()[0]
    except OSError:
        return ""


def test_output_without_an_end_is_cut_off(run_file: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    instead_of_git(tmp_path, 'case "$*" in *cat-file*) exec yes;; *) exec "$GIT" "$@";; esac', monkeypatch)
    assert len(text_in(run_file, "HEAD")) == LARGEST_FILE


# A repository that came from somebody else


def test_nothing_that_a_repository_names_is_started(repository: Repository, run_file: Path, tmp_path: Path) -> None:
    ran = tmp_path / "ran"
    script = tmp_path / "script"
    script.write_text(f"#!/bin/sh\necho $0 \"$@\" >> '{ran}'\ncat\n")
    script.chmod(0o755)
    (repository.folder / ".gitattributes").write_text("*.toml diff=own filter=own\n")
    repository.commit("Name attributes")
    settings = {
        "core.fsmonitor": script, "core.pager": script, "core.sshCommand": script, "core.askPass": script,
        "core.editor": script, "core.gitProxy": script, "diff.external": script, "diff.own.textconv": script,
        "diff.own.command": script, "filter.own.smudge": script, "filter.own.clean": script,
        "filter.own.process": script, "gpg.program": script, "log.showSignature": "true", "pager.log": script,
        "pager.cat-file": script, "alias.log": f"!{script}", "alias.cat-file": f"!{script}",
        "alias.rev-parse": f"!{script}", "alias.ls-tree": f"!{script}", "credential.helper": f"!{script}",
        "core.hooksPath": tmp_path / "hooks", "color.ui": "always",
    }  # fmt: skip
    for name, value in settings.items():
        repository.git("config", name, str(value), check=False)
    (tmp_path / "hooks").mkdir()
    for hook in ("post-checkout", "reference-transaction", "post-index-change", "pre-commit", "fsmonitor-watchman"):
        (tmp_path / "hooks" / hook).symlink_to(script)
    ran.unlink(missing_ok=True)
    assert text_in(run_file, "HEAD~1") == NEW
    assert text_in(run_file, "HEAD~2") == OLD
    assert [one.subject for one in list_revisions(run_file)] == ["Go on", "Begin"]
    assert not ran.exists(), ran.read_text()
    # The trap is armed: where git is asked without care, it does start them.
    repository.git("diff", "HEAD~2", "--", "run.toml", check=False)
    assert ran.exists()


def test_a_signature_is_not_looked_into(repository: Repository, run_file: Path, tmp_path: Path) -> None:
    script = tmp_path / "script"
    script.write_text(f"#!/bin/sh\necho x >> '{tmp_path / 'ran'}'\n")
    script.chmod(0o755)
    commit = repository.git("cat-file", "commit", "HEAD")
    head, _, message = commit.partition("\n\n")
    signed = f"{head}\ngpgsig -----BEGIN PGP SIGNATURE-----\n \n x\n -----END PGP SIGNATURE-----\n\n{message}\n"
    (tmp_path / "commit").write_text(signed)
    made = repository.git("hash-object", "-t", "commit", "-w", str(tmp_path / "commit"))
    repository.git("update-ref", "refs/heads/main", made)
    repository.git("config", "gpg.program", str(script))
    repository.git("config", "log.showSignature", "true")
    assert [one.subject for one in list_revisions(run_file)] == ["Go on", "Begin"]
    assert not (tmp_path / "ran").exists()
    repository.git("log", "-1", check=False)
    assert (tmp_path / "ran").exists()


def test_what_is_missing_from_a_partial_clone_is_not_fetched(
    repository: Repository, run_file: Path, tmp_path: Path
) -> None:
    ran = tmp_path / "ran"
    blob = repository.git("rev-parse", "HEAD:run.toml")
    for name, value in {
        "core.repositoryFormatVersion": "1", "extensions.partialClone": "origin", "remote.origin.promisor": "true",
        "remote.origin.url": f"ext::sh -c touch% {ran}", "protocol.allow": "always", "protocol.ext.allow": "always",
    }.items():  # fmt: skip
        repository.git("config", name, value)
    (repository.folder / ".git" / "objects" / blob[:2] / blob[2:]).unlink()
    assert "git refused to read" in refusal(run_file)
    assert not ran.exists()
    repository.git("cat-file", "blob", blob, check=False)  # without care it reaches out
    assert ran.exists()


def test_a_repository_that_hides_in_a_folder_of_another_is_not_taken(repository: Repository) -> None:
    """A folder that looks like a bare repository could come with a checkout, settings and all."""
    inner = repository.folder / "inner"
    inner.mkdir()
    for name in ("objects", "refs"):
        (inner / name).mkdir()
    (inner / "HEAD").write_text("ref: refs/heads/main\n")
    (inner / "config").write_text("[core]\nrepositoryFormatVersion = 0\nbare = true\n")
    (inner / "run.toml").write_text(OLD)
    assert "git refused to read" in refusal(inner / "run.toml")


def test_nothing_is_written(repository: Repository, run_file: Path) -> None:
    def seen() -> dict[str, tuple[int, bytes]]:
        files = [path for path in repository.folder.rglob("*") if path.is_file()]
        return {str(path): (path.stat().st_mtime_ns, path.read_bytes()) for path in files}

    os.utime(run_file, ns=(10**18, 10**18))
    before = seen()
    read_past(run_file, "HEAD~1")
    list_revisions(run_file)
    assert seen() == before
