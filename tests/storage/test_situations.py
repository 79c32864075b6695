"""Whatever the disk does, a file holds its old bytes or its new ones, what is unsaved stays so, and a later save works.

Every situation is made for real, by a user for whom permissions hold where root would not notice.
"""

from __future__ import annotations

import os
import resource
from pathlib import Path

import pytest

from budget.document import Document
from budget.storage import StorageError
from tests.storage.contents import OLD, leftovers
from tests.storage.situations import LONG, Editing, acl_of, fill, mode_of, mount, opened, small_disk, with_own_mounts
from tests.storage.test_files import NOBODY, as_nobody

# Full disks


@pytest.mark.parametrize("leave", [0, 8192])
def test_a_full_disk_takes_nothing_and_harms_nothing(tmp_path: Path, leave: int) -> None:
    def act() -> None:
        disk = small_disk(tmp_path / "disk")
        (disk / "state").mkdir()
        path = disk / "run.toml"
        path.write_bytes(OLD)
        run = Editing(path, disk / "state")
        filler = fill(disk, leave)
        assert run.refused() == "run.toml could not be written: No space left on device"
        assert path.read_bytes() == OLD
        assert leftovers(disk) == leftovers(disk / "state") == []
        assert run.keeper.problem == "No space left on device"
        filler.unlink()
        assert run.keeper.keep_now()
        assert run.kept == run.text
        run.works()

    with_own_mounts(act)


def test_where_the_disk_is_full_what_is_unsaved_is_kept_on_another(tmp_path: Path) -> None:
    def act() -> None:
        disk = small_disk(tmp_path / "disk")
        path = disk / "run.toml"
        path.write_bytes(OLD)
        run = Editing(path, tmp_path)
        filler = fill(disk)
        assert "No space left" in run.refused()
        assert run.kept == run.text
        assert path.read_bytes() == OLD
        filler.unlink()
        run.works()

    with_own_mounts(act)


@pytest.mark.parametrize("leave", [0, 8192])
def test_a_full_disk_harms_no_file_that_is_written_over(tmp_path: Path, leave: int) -> None:
    def act() -> None:
        disk = small_disk(tmp_path / "disk")
        path = disk / "run.toml"
        path.write_bytes(OLD)
        (disk / "other.toml").hardlink_to(path)
        run = Editing(path, tmp_path)
        filler = fill(disk, leave)
        assert "No space left" in run.refused()
        assert path.read_bytes() == OLD
        assert run.kept == run.text
        filler.unlink()
        run.works()
        assert (disk / "other.toml").read_bytes() == LONG

    with_own_mounts(act)


def test_a_disk_that_takes_no_more_files_harms_nothing(tmp_path: Path) -> None:
    def act() -> None:
        disk = small_disk(tmp_path / "disk", "size=1m,nr_inodes=4")
        path = disk / "run.toml"
        path.write_bytes(OLD)
        (disk / "one").touch()
        (disk / "two").touch()
        run = Editing(path, tmp_path)
        assert "No space left" in run.refused()
        assert path.read_bytes() == OLD
        (disk / "two").unlink()
        run.works()

    with_own_mounts(act)


def test_a_limit_that_is_met_in_the_middle_of_a_file_harms_nothing(place: Path) -> None:
    def act() -> None:
        for hard in (False, True):
            if hard:
                (place / "work" / "other.toml").hardlink_to(place / "work" / "run.toml")
            (place / "work" / "run.toml").write_bytes(OLD)
            run = opened(place)
            assert run.keeper.keep_now()
            limit = resource.getrlimit(resource.RLIMIT_FSIZE)
            resource.setrlimit(resource.RLIMIT_FSIZE, (20_000, limit[1]))
            assert run.refused() == "run.toml could not be written: File too large"
            assert run.path.read_bytes() == OLD
            assert leftovers(run.path.parent) == []
            resource.setrlimit(resource.RLIMIT_FSIZE, limit)
            run.works()

    as_nobody(act)


# What may not be written


def test_a_write_protected_file_is_left_alone(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        with mode_of(run.path, 0o444):
            assert run.refused() == "run.toml is not writable; save under another name"
            assert run.path.read_bytes() == OLD
            run.save(place / "work" / "another.toml")
            assert (place / "work" / "another.toml").read_bytes() == LONG

    as_nobody(act)


def test_a_file_that_may_be_written_again_is_saved(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        with mode_of(run.path, 0o444):
            run.refused()
        run.works()

    as_nobody(act)


def test_in_a_write_protected_folder_the_file_is_written_over(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        inode = run.path.stat().st_ino
        with mode_of(place / "work", 0o555):
            run.works()
        assert run.path.stat().st_ino == inode

    as_nobody(act)


def test_a_folder_that_is_closed_is_told(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        with mode_of(place / "work", 0o000):
            assert "Permission denied" in run.refused()
            assert "Permission denied" in run.refused(over=True)
            assert "Permission denied" in run.document.look().why
        assert run.path.read_bytes() == OLD
        run.works()

    as_nobody(act)


def test_a_folder_for_records_that_is_closed_does_not_hinder_saving(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        with mode_of(place / "state", 0o500):
            assert not run.keeper.keep_now()
            assert run.keeper.problem == "Permission denied"
            run.works()

    as_nobody(act)


def test_a_file_system_that_is_mounted_to_be_read_is_told(tmp_path: Path) -> None:
    def act() -> None:
        (tmp_path / "work").mkdir()
        path = tmp_path / "work" / "run.toml"
        path.write_bytes(OLD)
        run = Editing(path, tmp_path)
        mount("--bind", str(tmp_path / "work"), str(tmp_path / "work"))
        mount("-o", "remount,bind,ro", str(tmp_path / "work"))
        run.document = Document.open(path)  # the folder is another one by now, as far as the system is concerned
        run.document.replace_text(run.text, "edit")
        assert run.refused() == "run.toml is not writable; save under another name"
        assert run.refused(over=True) == "run.toml is not writable; save under another name"
        with pytest.raises(StorageError, match=r"could not be written: Read-only file system"):
            run.save(tmp_path / "work" / "new.toml")
        assert path.read_bytes() == OLD
        mount("-o", "remount,bind,rw", str(tmp_path / "work"))
        run.works()

    with_own_mounts(act)


# Links


def test_all_names_of_a_file_stay_names_of_one_file(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        other = place / "other.toml"
        other.hardlink_to(run.path)
        run.works()
        assert other.samefile(run.path)
        assert other.read_bytes() == LONG

    as_nobody(act)


def test_a_link_to_another_file_system_is_followed(tmp_path: Path) -> None:
    def act() -> None:
        disk = small_disk(tmp_path / "disk")
        (disk / "real.toml").write_bytes(OLD)
        link = tmp_path / "run.toml"
        link.symlink_to(disk / "real.toml")
        run = Editing(link, tmp_path)
        run.works()
        assert link.is_symlink()
        assert (disk / "real.toml").read_bytes() == LONG
        assert run.kept is None or run.kept == run.text
        filler = fill(disk)
        run.document.replace_text(run.text + "# more\n" * 3000, "edit")
        run.text = run.document.snapshot.text
        assert "No space left" in run.refused()
        assert (disk / "real.toml").read_bytes() == LONG
        filler.unlink()
        run.works()

    with_own_mounts(act)


def test_links_that_lead_nowhere_or_round_are_told(place: Path) -> None:
    def act() -> None:
        run = opened(place)
        run.path.rename(place / "kept.toml")
        run.path.symlink_to(run.path.name)
        assert "loop of symbolic links" in run.refused()
        assert "loop of symbolic links" in run.refused(over=True)
        run.path.unlink()
        run.path.symlink_to("nowhere.toml")
        assert "is gone" in run.refused()
        run.save(over=True)
        assert run.path.is_symlink()
        assert (place / "work" / "nowhere.toml").read_bytes() == LONG
        run.path.unlink()
        run.path.symlink_to(place / "no" / "such" / "folder.toml")
        run.document.undo()
        run.text = run.document.snapshot.text
        assert run.refused(over=True) == "run.toml could not be written: No such file or directory"
        assert (place / "kept.toml").read_bytes() == OLD

    as_nobody(act)


# Owners and access rules


def own(path: Path, user: int, group: int, mode: int) -> None:
    if os.geteuid() != 0:
        pytest.skip("only root can give a file to somebody else")
    os.chown(path, user, group)
    path.chmod(mode)


@pytest.mark.parametrize(("user", "group", "mode"), [(1234, NOBODY, 0o666), (NOBODY, 1234, 0o664), (0, 0, 0o666)])
def test_a_file_of_others_stays_theirs(place: Path, user: int, group: int, mode: int) -> None:
    path = place / "work" / "run.toml"
    own(path, user, group, mode)
    as_nobody(lambda: opened(place).works())
    status = path.stat()
    assert (status.st_uid, status.st_gid, status.st_mode & 0o7777) == (user, group, mode)


@pytest.mark.parametrize("user", [0, NOBODY])
def test_in_a_folder_where_all_may_write_and_nobody_may_remove(place: Path, user: int) -> None:
    own(place / "work", 0, 0, 0o1777)
    own(place / "work" / "run.toml", user, user, 0o666)
    as_nobody(lambda: opened(place).works())
    assert (place / "work" / "run.toml").stat().st_uid == user


@pytest.mark.parametrize("written_over", [False, True])
def test_access_rules_and_notes_stay_with_the_file(place: Path, written_over: bool) -> None:
    path = place / "work" / "run.toml"
    rules = {"user.office": b"north", "system.posix_acl_access": acl_of(1234, 2345)}
    try:
        for name, value in rules.items():
            os.setxattr(path, name, value)
    except OSError as refused:
        pytest.skip(f"the file system keeps no such rules: {refused.strerror}")

    def act() -> None:
        run = opened(place)
        if written_over:
            (place / "other.toml").hardlink_to(path)
        run.works()
        assert {name: os.getxattr(path, name) for name in os.listxattr(path)} == rules

    as_nobody(act)


def test_rules_of_the_folder_do_not_come_to_a_file_that_has_none(place: Path) -> None:
    path = place / "work" / "run.toml"
    path.chmod(0o640)
    try:
        os.setxattr(path.parent, "system.posix_acl_default", acl_of(1234))
    except OSError as refused:
        pytest.skip(f"the file system keeps no such rules: {refused.strerror}")
    as_nobody(lambda: opened(place).works())
    assert os.listxattr(path) == []
    assert path.stat().st_mode & 0o777 == 0o640


def test_rules_that_another_file_can_not_have_are_not_lost(place: Path) -> None:
    path = place / "work" / "run.toml"
    own(path, NOBODY, NOBODY, 0o664)
    try:
        os.setxattr(path, "security.office", b"north")
    except OSError as refused:
        pytest.skip(f"the file system keeps no such rules: {refused.strerror}")
    as_nobody(lambda: opened(place).works())
    assert path.read_bytes() == LONG
