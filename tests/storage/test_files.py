"""Reading takes regular files alone; saving keeps what belongs to a file and writes over nobody's changes."""

from __future__ import annotations

import os
import socket
import stat
import sys
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from budget.description.source import LARGEST_FILE
from budget.storage import ChangedOnDisk, StorageError, load, load_text, save
from tests.storage.contents import NEW, OLD, SHORT, leftovers
from tests.storage.forking import in_child

NOBODY = 65534


def as_nobody(act: Callable[[], None]) -> None:
    """Run an act where permissions hold: in a child process without privileges, unless there are none to drop."""
    if os.geteuid() != 0:
        act()
        return

    def drop() -> None:
        os.setgroups([])
        os.setgid(NOBODY)
        os.setuid(NOBODY)

    done, message = in_child(drop, act)
    assert done == 2, message


@pytest.fixture
def open_folder() -> Iterator[Path]:
    """A folder that a user without privileges reaches and owns."""
    with tempfile.TemporaryDirectory() as name:
        hand_over(Path(name))
        yield Path(name)


def hand_over(path: Path) -> None:
    if os.geteuid() == 0:
        os.chown(path, NOBODY, NOBODY)


# Reading


def test_a_file_is_read_with_its_stamp(file: Path) -> None:
    content, stamp = load(file)
    assert content == OLD
    assert (stamp.size, stamp.inode) == (len(OLD), file.stat().st_ino)


def test_a_missing_file_is_an_error_that_names_it(tmp_path: Path) -> None:
    with pytest.raises(StorageError, match=r"gone\.toml could not be read: No such file"):
        load(tmp_path / "gone.toml")


def test_a_folder_is_not_read(tmp_path: Path) -> None:
    with pytest.raises(StorageError, match="is not a regular file; name the run's TOML file"):
        load(tmp_path)


def test_a_folder_that_is_refused_leaves_nothing_open(tmp_path: Path) -> None:
    def opened() -> int:
        return len(os.listdir("/proc/self/fd"))  # noqa: PTH208 - links that are gone by the time one asks

    if not Path("/proc/self/fd").exists():
        pytest.skip("the system doesn't list open files")
    before = opened()
    for _ in range(5):
        with pytest.raises(StorageError):
            load(tmp_path)
    assert opened() == before


def test_a_fifo_does_not_hang_the_program(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    with pytest.raises(StorageError, match="not a regular file"):
        load(tmp_path / "pipe")


def test_a_device_and_a_socket_are_not_read(tmp_path: Path) -> None:
    with pytest.raises(StorageError, match="not a regular file"):
        load(Path("/dev/null"))
    with socket.socket(socket.AF_UNIX) as listening:
        listening.bind(str(tmp_path / "socket"))
        with pytest.raises(StorageError):
            load(tmp_path / "socket")


def test_of_a_file_that_is_too_large_no_more_than_needed_is_read(tmp_path: Path) -> None:
    path = tmp_path / "large.toml"
    path.write_bytes(b"#" * (LARGEST_FILE + 1000))
    content, _ = load(path)
    assert len(content) == LARGEST_FILE + 1
    with pytest.raises(StorageError, match="could not be read: the file has"):
        load_text(path)


def test_a_file_that_is_not_utf_8_is_not_opened_as_an_empty_one(tmp_path: Path) -> None:
    path = tmp_path / "latin.toml"
    path.write_bytes('title = "Büro"\n'.encode("latin-1"))
    with pytest.raises(StorageError, match="could not be read: byte 0xfc is not UTF-8"):
        load_text(path)
    path.write_bytes(b"\xef\xbb\xbf" + OLD)
    with pytest.raises(StorageError, match="byte order mark"):
        load_text(path)


def test_a_text_that_is_not_toml_is_opened_with_its_finding(tmp_path: Path) -> None:
    path = tmp_path / "broken.toml"
    path.write_bytes(b"length = 12.4 m\n")
    source, _ = load_text(path)
    assert source.text == "length = 12.4 m\n"
    assert source.data is None


def test_an_empty_file_is_a_text(tmp_path: Path) -> None:
    path = tmp_path / "empty.toml"
    path.write_bytes(b"")
    source, _ = load_text(path)
    assert (source.text, source.data) == ("", {})


def test_an_unreadable_file_is_an_error(open_folder: Path) -> None:
    path = open_folder / "run.toml"
    path.write_bytes(OLD)
    path.chmod(0o200)
    hand_over(path)

    def act() -> None:
        with pytest.raises(StorageError, match="Permission denied"):
            load(path)

    as_nobody(act)


# Saving


def test_saving_replaces_the_file_whole(file: Path) -> None:
    _, stamp = load(file)
    inode = file.stat().st_ino
    found = save(file, NEW, stamp)
    assert file.read_bytes() == NEW
    assert file.stat().st_ino != inode
    assert found == load(file)[1]
    assert leftovers(file.parent) == []


def test_a_shorter_text_leaves_nothing_of_the_old_one(file: Path) -> None:
    save(file, SHORT, load(file)[1])
    assert file.read_bytes() == SHORT


def test_what_was_saved_can_be_saved_again(file: Path) -> None:
    stamp = save(file, NEW, load(file)[1])
    stamp = save(file, OLD, stamp)
    save(file, NEW, stamp)
    assert file.read_bytes() == NEW


@pytest.mark.parametrize("mode", [0o600, 0o640, 0o664, 0o755])
def test_the_mode_is_kept(file: Path, mode: int) -> None:
    file.chmod(mode)
    save(file, NEW, load(file)[1])
    assert stat.S_IMODE(file.stat().st_mode) == mode


def test_a_new_file_has_the_mode_that_the_user_s_mask_leaves(tmp_path: Path) -> None:
    before = os.umask(0o027)
    try:
        save(tmp_path / "new.toml", NEW, None)
    finally:
        os.umask(before)
    assert stat.S_IMODE((tmp_path / "new.toml").stat().st_mode) == 0o640
    assert (tmp_path / "new.toml").read_bytes() == NEW


def test_the_owner_and_the_group_are_kept(file: Path) -> None:
    if os.geteuid() != 0:
        pytest.skip("only root can give a file to somebody else")
    os.chown(file, 1234, 2345)
    file.chmod(0o664)
    inode = file.stat().st_ino
    save(file, NEW, load(file)[1])
    status = file.stat()
    assert status.st_ino != inode
    assert (status.st_uid, status.st_gid, stat.S_IMODE(status.st_mode)) == (1234, 2345, 0o664)


def test_in_a_folder_that_passes_its_group_on_the_file_keeps_its_own(tmp_path: Path) -> None:
    if os.geteuid() != 0:
        pytest.skip("only root can make such a folder for another group")
    folder = tmp_path / "shared"
    folder.mkdir()
    os.chown(folder, 0, 3456)
    folder.chmod(0o2775)
    path = folder / "run.toml"
    path.write_bytes(OLD)
    os.chown(path, 0, 0)
    save(path, NEW, load(path)[1])
    assert path.stat().st_gid == 0


def test_a_symbolic_link_is_followed_and_stays_a_link(file: Path, tmp_path: Path) -> None:
    link = tmp_path / "link.toml"
    link.symlink_to(file.name)
    save(link, NEW, load(link)[1])
    assert link.is_symlink()
    assert file.read_bytes() == NEW


def test_a_link_to_nothing_yet_makes_the_file(tmp_path: Path) -> None:
    link = tmp_path / "link.toml"
    link.symlink_to("made.toml")
    save(link, NEW, None)
    assert link.is_symlink()
    assert (tmp_path / "made.toml").read_bytes() == NEW


def test_a_loop_of_links_is_an_error(tmp_path: Path) -> None:
    (tmp_path / "a.toml").symlink_to("b.toml")
    (tmp_path / "b.toml").symlink_to("a.toml")
    with pytest.raises(StorageError, match="loop of symbolic links"):
        save(tmp_path / "a.toml", NEW, None)
    with pytest.raises(StorageError):
        load(tmp_path / "a.toml")
    assert (tmp_path / "a.toml").is_symlink()


def test_a_hard_link_is_written_in_place(file: Path, tmp_path: Path) -> None:
    other = tmp_path / "other.toml"
    other.hardlink_to(file)
    inode = file.stat().st_ino
    save(file, NEW, load(file)[1])
    assert file.stat().st_ino == inode
    assert other.read_bytes() == file.read_bytes() == NEW
    save(file, SHORT, load(file)[1])
    assert other.read_bytes() == SHORT


def test_a_file_in_a_folder_that_can_t_be_written_is_written_in_place(open_folder: Path) -> None:
    path = open_folder / "run.toml"
    path.write_bytes(OLD)
    hand_over(path)
    open_folder.chmod(0o555)

    def act() -> None:
        inode = path.stat().st_ino
        save(path, NEW, load(path)[1])
        assert path.stat().st_ino == inode

    try:
        as_nobody(act)
        assert path.read_bytes() == NEW
    finally:
        open_folder.chmod(0o755)


def test_a_new_file_in_a_folder_that_can_t_be_written_is_an_error(open_folder: Path) -> None:
    open_folder.chmod(0o555)

    def act() -> None:
        with pytest.raises(StorageError, match="could not be written: Permission denied"):
            save(open_folder / "run.toml", NEW, None)

    try:
        as_nobody(act)
    finally:
        open_folder.chmod(0o755)


def test_a_file_of_another_owner_is_written_in_place(open_folder: Path) -> None:
    if os.geteuid() != 0:
        pytest.skip("only root can make a file of another owner")
    path = open_folder / "run.toml"
    path.write_bytes(OLD)
    path.chmod(0o666)

    def act() -> None:
        save(path, NEW, load(path)[1])

    as_nobody(act)
    assert path.read_bytes() == NEW
    assert path.stat().st_uid == 0


def test_a_file_whose_group_can_t_be_kept_is_written_in_place(open_folder: Path) -> None:
    if os.geteuid() != 0:
        pytest.skip("only root can give a file to a group that its owner is not in")
    path = open_folder / "run.toml"
    path.write_bytes(OLD)
    os.chown(path, NOBODY, 4567)

    def act() -> None:
        save(path, NEW, load(path)[1])

    as_nobody(act)
    assert path.read_bytes() == NEW
    assert path.stat().st_gid == 4567


def test_a_file_that_is_write_protected_is_not_replaced(open_folder: Path) -> None:
    path = open_folder / "run.toml"
    path.write_bytes(OLD)
    path.chmod(0o444)
    hand_over(path)

    def act() -> None:
        with pytest.raises(StorageError, match="not writable; save under another name"):
            save(path, NEW, load(path)[1])

    as_nobody(act)
    assert path.read_bytes() == OLD
    assert leftovers(open_folder) == []


# Conflicts


def test_what_somebody_else_wrote_is_not_written_over(file: Path) -> None:
    _, stamp = load(file)
    file.write_bytes(SHORT)
    with pytest.raises(ChangedOnDisk, match="was changed on disk"):
        save(file, NEW, stamp)
    assert file.read_bytes() == SHORT
    save(file, NEW, None, over=True)
    assert file.read_bytes() == NEW


def test_a_change_of_equal_size_and_time_in_another_file_is_noticed(file: Path, tmp_path: Path) -> None:
    _, stamp = load(file)
    status = file.stat()
    other = tmp_path / "other.toml"
    other.write_bytes(OLD.replace(b"Old", b"New"))
    os.utime(other, ns=(status.st_atime_ns, status.st_mtime_ns))
    other.replace(file)
    with pytest.raises(ChangedOnDisk):
        save(file, NEW, stamp)


def test_the_same_bytes_touched_or_written_anew_are_no_conflict(file: Path, tmp_path: Path) -> None:
    _, stamp = load(file)
    os.utime(file, ns=(1, 1))
    stamp = save(file, NEW, stamp)
    again = tmp_path / "again.toml"
    again.write_bytes(NEW)
    again.replace(file)
    save(file, OLD, stamp)
    assert file.read_bytes() == OLD


def test_a_file_that_is_gone_is_a_conflict(file: Path) -> None:
    _, stamp = load(file)
    file.unlink()
    with pytest.raises(ChangedOnDisk, match="is gone"):
        save(file, NEW, stamp)
    assert not file.exists()
    save(file, NEW, None)
    assert file.read_bytes() == NEW


# Refusals


@pytest.mark.parametrize(
    ("content", "why"),
    [
        (b"length = 12.4 m\n", "write a quantity in quotes"),
        (b"title = '\xfc'\n", "not UTF-8"),
        (b"\xef\xbb\xbfformat = 1\n", "byte order mark"),
        (b"#" * (LARGEST_FILE + 1), "at most"),
        (b"a = " + b"[" * 40 + b"]" * 40, "nested"),
    ],
)
def test_what_could_not_be_read_again_is_not_written(file: Path, content: bytes, why: str) -> None:
    with pytest.raises(StorageError, match=f"was not written: .*{why}"):
        save(file, content, load(file)[1])
    assert file.read_bytes() == OLD


def test_a_folder_a_fifo_and_a_device_are_not_written(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    for path in (tmp_path, tmp_path / "pipe", Path("/dev/null")):
        with pytest.raises(StorageError, match="not a regular file; save under another name"):
            save(path, NEW, None)
    assert stat.S_ISFIFO((tmp_path / "pipe").stat().st_mode)


def test_a_folder_that_does_not_exist_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(StorageError, match="could not be written: No such file"):
        save(tmp_path / "nowhere" / "run.toml", NEW, None)


def test_line_ends_and_every_byte_are_kept(file: Path) -> None:
    content = 'format = 1\r\n# Größe, 12 ℃\r\n\r\n[design]\r\ntitle = "π"'.encode()
    save(file, content, load(file)[1])
    assert file.read_bytes() == content
    assert load_text(file)[0].text.encode() == content


def test_the_tests_of_permissions_run_without_privileges() -> None:
    seen: list[int] = []

    def act() -> None:
        seen.append(os.geteuid())
        assert os.geteuid() != 0, sys.executable

    as_nobody(act)
    assert seen in ([], [os.geteuid()])
