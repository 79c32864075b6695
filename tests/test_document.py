"""The open run: edits as steps, previews that change nothing, undo with marks, and saving."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from budget.description import Level, read_text
from budget.description.edits import EditError, Literal, RenameKey, SetValue, Several, Unset
from budget.document import Document, take
from budget.storage import ChangedOnDisk, StorageError
from tests.network.small import LIQUID

TEXT = (
    LIQUID
    + """
[source.P1]

# The main along the corridor.
[section.M1]
from = "P1"
bore = "40 mm"
length = "10 m"   # measured

[terminal.T1]
from = "M1"
flow = "1 L/s"
drop = "5 kPa"
"""
)
LENGTH = ("section", "M1", "length")


@pytest.fixture
def document() -> Document:
    return Document.of(TEXT)


@pytest.fixture
def file(tmp_path: Path) -> Path:
    path = tmp_path / "run.toml"
    path.write_text(TEXT)
    return path


def level(document: Document) -> Level | None:
    return document.snapshot.level


def is_dirty(document: Document) -> bool:
    return document.dirty


def is_readable(document: Document) -> bool:
    return document.snapshot.readable


def required(document: Document) -> float:
    return document.snapshot.budget.sources["P1"].required


def test_a_snapshot_holds_everything_that_follows_from_the_text(document: Document) -> None:
    snapshot = document.snapshot
    assert snapshot.text == TEXT
    assert snapshot.readable
    assert snapshot.description.sections["M1"].run.length == 10.0
    assert snapshot.budget.sections["M1"].run.friction > 0
    assert (snapshot.findings, snapshot.level, snapshot.revision) == ((), None, 0)


def test_an_edit_changes_its_value_and_what_follows_from_it(document: Document) -> None:
    friction = document.snapshot.budget.sections["M1"].run.friction
    shown = document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    assert shown is document.snapshot
    assert shown.text == TEXT.replace('"10 m"', '"20 m"')
    assert shown.budget.sections["M1"].run.friction == pytest.approx(2 * friction)
    assert shown.revision == 1


def test_an_edit_that_can_t_be_made_changes_nothing(document: Document) -> None:
    before = document.snapshot
    with pytest.raises(EditError):
        document.apply(Unset(("section", "M9")), "remove M9")
    with pytest.raises(EditError):
        document.apply(Several((SetValue(LENGTH, "20 m"), RenameKey(("section", "M9"), "M8"))), "both")
    assert document.snapshot is before
    assert not document.can_undo


def test_an_edit_to_the_same_value_is_no_step(document: Document) -> None:
    before = document.snapshot
    assert document.apply(SetValue(LENGTH, "10 m"), "length of M1") is before
    assert not document.can_undo


def test_the_level_is_the_highest_of_the_findings(document: Document) -> None:
    document.apply(Unset(("terminal", "T1", "drop")), "drop of T1")
    assert level(document) is Level.WARNING
    document.apply(Unset(LENGTH), "length of M1")
    assert level(document) is Level.ERROR
    assert [finding.code for finding in document.snapshot.findings] == ["missing", "no-drop"]


def test_a_preview_leaves_the_document_alone(document: Document) -> None:
    before = document.snapshot
    shown = document.preview(SetValue(LENGTH, "20 m"))
    assert shown.budget.sections["M1"].run.friction == pytest.approx(2 * before.budget.sections["M1"].run.friction)
    assert document.snapshot is before
    assert not document.can_undo
    assert document.snapshot.text == TEXT


def test_a_preview_shows_what_would_be_wrong(document: Document) -> None:
    shown = document.preview(SetValue(LENGTH, "ten metres"))
    assert [finding.code for finding in shown.findings] == ["not-a-quantity"]
    assert shown.level is Level.ERROR
    with pytest.raises(EditError):
        document.preview(Unset(("section", "M9")))


def test_a_preview_of_what_is_no_value_is_refused(document: Document) -> None:
    with pytest.raises(EditError):
        document.preview(SetValue(LENGTH, Literal("12 m")))


def test_undo_and_redo_give_the_texts_back(document: Document) -> None:
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    document.apply(SetValue(("terminal", "T1", "flow"), "2 L/s"), "flow of T1")
    last = document.snapshot.text
    document.undo()
    assert document.snapshot.text == TEXT.replace('"10 m"', '"20 m"')
    document.undo()
    assert document.snapshot.text == TEXT
    assert not document.can_undo
    document.redo()
    document.redo()
    assert document.snapshot.text == last
    assert not document.can_redo


def test_undo_and_redo_return_the_mark_of_the_step(document: Document) -> None:
    document.apply(SetValue(LENGTH, "20 m"), "length of M1", mark="at M1")
    document.apply(SetValue(("terminal", "T1", "flow"), "2 L/s"), "flow of T1", mark="at T1")
    assert document.undo() == "at T1"
    assert document.undo() == "at M1"
    assert document.redo() == "at M1"
    assert document.redo() == "at T1"


def test_with_nothing_to_undo_or_redo_nothing_happens(document: Document) -> None:
    before = document.snapshot
    assert document.undo() is None
    assert document.redo() is None
    assert document.snapshot is before
    document.apply(SetValue(LENGTH, "20 m"), "length of M1", mark="at M1")
    after = document.snapshot
    assert document.redo() is None
    assert document.snapshot is after


def test_a_new_step_drops_what_was_undone(document: Document) -> None:
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    document.undo()
    document.apply(SetValue(LENGTH, "30 m"), "length of M1")
    assert not document.can_redo
    document.undo()
    assert document.snapshot.text == TEXT


def test_the_steps_are_named(document: Document) -> None:
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    assert document.history.label == "length of M1"
    document.undo()
    assert document.history.redo_label == "length of M1"


def test_every_change_is_a_revision_of_its_own(document: Document) -> None:
    revisions = [document.snapshot.revision]
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    revisions.append(document.snapshot.revision)
    document.undo()
    revisions.append(document.snapshot.revision)
    document.redo()
    revisions.append(document.snapshot.revision)
    assert revisions == [0, 1, 2, 3]


def test_several_edits_are_one_step(document: Document) -> None:
    both = Several((SetValue(LENGTH, "20 m"), SetValue(("terminal", "T1", "flow"), "2 L/s")))
    document.apply(both, "length and flow")
    document.undo()
    assert document.snapshot.text == TEXT


def test_a_text_that_can_t_be_read_keeps_the_last_budget(document: Document) -> None:
    before = document.snapshot
    broken = TEXT.replace('"10 m"', "10 m")
    shown = document.replace_text(broken, "typed")
    assert shown.text == broken
    assert not shown.readable
    assert shown.budget is before.budget
    assert shown.description is before.description
    line = broken.splitlines().index("length = 10 m   # measured") + 1
    assert [(finding.code, finding.line) for finding in shown.findings] == [("syntax", line)]
    assert shown.level is Level.ERROR
    # The next text that can be read is worked out again; undo leads through both.
    document.replace_text(TEXT.replace('"10 m"', '"20 m"'), "typed")
    assert is_readable(document)
    assert required(document) > before.budget.sources["P1"].required
    document.undo()
    assert not is_readable(document)
    document.undo()
    assert is_readable(document)
    assert document.snapshot.text == TEXT


def test_a_run_that_could_never_be_read_has_an_empty_budget() -> None:
    snapshot = take(read_text("length = 10 m\n"))
    assert not snapshot.readable
    assert dict(snapshot.budget.sections) == {}
    assert [finding.code for finding in snapshot.findings] == ["syntax"]


# Files


def test_an_opened_file_is_clean_until_it_is_edited(file: Path) -> None:
    document = Document.open(file)
    assert document.path == file
    assert not is_dirty(document)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    assert is_dirty(document)
    document.undo()
    assert not is_dirty(document)


def test_a_text_without_a_file_is_not_saved(document: Document) -> None:
    assert is_dirty(document)
    with pytest.raises(ValueError, match="give a path"):
        document.save()


def test_saving_writes_the_text_and_makes_the_document_clean(file: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    document.save()
    assert file.read_text() == TEXT.replace('"10 m"', '"20 m"')
    assert not is_dirty(document)
    assert document.can_undo
    document.undo()
    assert is_dirty(document)
    document.save()
    assert file.read_text() == TEXT


def test_saving_a_new_text_gives_it_its_file(document: Document, tmp_path: Path) -> None:
    document.save(tmp_path / "new.toml")
    assert document.path == tmp_path / "new.toml"
    assert not is_dirty(document)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    document.save()
    assert '"20 m"' in (tmp_path / "new.toml").read_text()


def test_saving_under_another_name_leaves_the_first_file(file: Path, tmp_path: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    document.save(tmp_path / "copy.toml")
    assert file.read_text() == TEXT
    assert document.path == tmp_path / "copy.toml"
    document.apply(SetValue(LENGTH, "30 m"), "length of M1")
    document.save()
    assert '"30 m"' in (tmp_path / "copy.toml").read_text()


def test_what_somebody_else_wrote_is_written_over_only_when_asked(file: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    other = TEXT.replace('"10 m"', '"11 m"')
    file.write_text(other)
    with pytest.raises(ChangedOnDisk):
        document.save()
    assert file.read_text() == other
    assert is_dirty(document)
    document.save(over=True)
    assert '"20 m"' in file.read_text()
    assert not is_dirty(document)


# What others do to the file


def test_a_document_without_changes_follows_its_file_one_step_forth(file: Path) -> None:
    document = Document.open(file)
    other = TEXT.replace('"10 m"', '"11 m"')
    file.write_text(other)
    assert document.meet(document.look(), "here")
    assert document.snapshot.text == other
    assert not is_dirty(document)
    assert document.undo() == "here"
    assert document.snapshot.text == TEXT
    assert is_dirty(document)
    document.save()
    assert file.read_text() == TEXT


def test_a_changed_document_keeps_its_changes_and_tells_of_the_file(file: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    mine = document.snapshot.text
    file.write_text(TEXT.replace('"10 m"', '"11 m"'))
    seen = document.look()
    assert not document.meet(seen)
    assert document.snapshot.text == mine
    assert document.on_disk.what == "changed"
    with pytest.raises(ChangedOnDisk):
        document.save()
    document.acknowledge(seen)
    assert document.saved_text == file.read_text()
    document.save()
    assert file.read_text() == mine


def test_only_what_was_seen_is_written_over(file: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    file.write_text(TEXT.replace('"10 m"', '"11 m"'))
    document.acknowledge(document.look())
    file.write_text(TEXT.replace('"10 m"', '"12 m"'))
    with pytest.raises(ChangedOnDisk):
        document.save()
    assert '"12 m"' in file.read_text()


def test_what_is_on_disk_can_be_taken_and_the_own_text_is_one_step_back(file: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    mine = document.snapshot.text
    file.write_text(TEXT.replace('"10 m"', '"11 m"'))
    assert document.take_from_disk(document.look())
    assert not is_dirty(document)
    document.undo()
    assert document.snapshot.text == mine


def test_the_same_change_on_both_sides_is_no_conflict(file: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    file.write_text(document.snapshot.text)
    assert not document.meet(document.look())
    assert document.on_disk.what == "same"
    assert not is_dirty(document)


def test_a_touch_is_no_change(file: Path) -> None:
    document = Document.open(file)
    os.utime(file, (1, 1))
    seen = document.look()
    assert seen.what == "same"
    document.meet(seen)
    assert document.stamp == seen.stamp
    assert document.stamp is not None
    assert document.stamp.modified == 1_000_000_000


def test_a_file_that_is_gone_makes_the_document_unsaved_until_it_is_written_anew(file: Path) -> None:
    document = Document.open(file)
    file.unlink()
    document.meet(document.look())
    assert document.on_disk.what == "gone"
    assert is_dirty(document)
    with pytest.raises(ChangedOnDisk) as raised:
        document.save()
    assert raised.value.what == "gone"
    document.acknowledge(document.look())
    document.save()
    assert file.read_text() == TEXT
    assert not is_dirty(document)


def test_a_file_that_comes_back_as_it_was_is_no_change(file: Path) -> None:
    document = Document.open(file)
    file.unlink()
    document.meet(document.look())
    file.write_text(TEXT)
    document.meet(document.look())
    assert not is_dirty(document)


def test_what_can_t_be_read_any_more_is_told_and_not_taken(file: Path) -> None:
    document = Document.open(file)
    file.write_bytes(b"\xff\xfe")
    assert not document.meet(document.look())
    assert document.snapshot.text == TEXT
    assert "UTF-8" in document.on_disk.why


def test_another_file_that_exists_is_not_written_over(file: Path, tmp_path: Path) -> None:
    document = Document.open(file)
    (tmp_path / "other.toml").write_text("format = 1\n")
    with pytest.raises(ChangedOnDisk) as raised:
        document.save(tmp_path / "other.toml")
    assert raised.value.what == "there"
    assert document.path == file
    assert (tmp_path / "other.toml").read_text() == "format = 1\n"


def test_what_is_changed_while_it_is_saved_stays_unsaved(file: Path) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    saving = document.prepare()
    document.apply(SetValue(LENGTH, "30 m"), "length of M1")
    document.saved(saving, saving.write(), ())
    assert '"20 m"' in file.read_text()
    assert is_dirty(document)
    document.undo()
    assert not is_dirty(document)


def test_of_a_document_that_is_read_only_nothing_is_changed(file: Path) -> None:
    document = Document.open(file)
    document.read_only = "it is open elsewhere"
    with pytest.raises(EditError, match="open elsewhere"):
        document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    with pytest.raises(EditError, match="open elsewhere"):
        document.replace_text("", "typed")
    assert document.snapshot.text == TEXT
    file.write_text(TEXT.replace('"10 m"', '"11 m"'))
    assert document.meet(document.look())


def test_half_a_character_is_refused_where_it_stands(file: Path) -> None:
    document = Document.open(file)
    document.replace_text(TEXT + "# \ud800\n", "typed")
    with pytest.raises(StorageError, match=f"line {TEXT.count(chr(10)) + 1} holds half a character"):
        document.save()
    assert file.read_text() == TEXT


def test_a_text_that_can_t_be_read_is_not_saved(file: Path) -> None:
    document = Document.open(file)
    document.replace_text("length = 10 m\n", "typed")
    with pytest.raises(StorageError, match="was not written"):
        document.save()
    assert file.read_text() == TEXT
    assert is_dirty(document)


def test_a_fault_while_saving_leaves_the_document_changed(file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    document = Document.open(file)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")

    def full(_path: Path, _target: Path) -> Path:
        raise OSError(28, "No space left on device")

    with monkeypatch.context() as faulty:
        faulty.setattr(Path, "replace", full)
        with pytest.raises(StorageError):
            document.save()
    assert is_dirty(document)
    assert file.read_text() == TEXT
    document.save()
    assert not is_dirty(document)


def test_line_ends_are_kept(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_bytes(TEXT.replace("\n", "\r\n").encode())
    document = Document.open(path)
    document.apply(SetValue(LENGTH, "20 m"), "length of M1")
    document.save()
    assert path.read_bytes() == TEXT.replace('"10 m"', '"20 m"').replace("\n", "\r\n").encode()


def test_a_file_that_is_not_there_or_no_file_is_an_error(tmp_path: Path) -> None:
    for path in (tmp_path / "gone.toml", tmp_path):
        with pytest.raises(StorageError, match=str(path)):
            Document.open(path)


def test_a_file_that_is_no_text_can_t_be_opened_and_so_not_be_emptied(tmp_path: Path) -> None:
    path = tmp_path / "latin.toml"
    path.write_bytes('title = "Büro"\n'.encode("latin-1"))
    with pytest.raises(StorageError, match="UTF-8"):
        Document.open(path)


def test_a_file_with_a_mistake_in_it_is_opened_to_be_mended(tmp_path: Path) -> None:
    path = tmp_path / "run.toml"
    path.write_text(TEXT.replace('"10 m"', "10 m"))
    document = Document.open(path)
    assert not is_readable(document)
    assert not is_dirty(document)
    document.replace_text(TEXT, "typed")
    document.save()
    assert path.read_text() == TEXT
