"""Records on disk: locks, other writers, kills, full disks."""

from __future__ import annotations

import errno
import os
import subprocess
import sys
from typing import TYPE_CHECKING, Any

import pytest

from calcbook.diskfile import locked
from calcbook.errors import RecordChangedError, RecordError
from calcbook.record import EntryRecord, Record, update

if TYPE_CHECKING:
    from pathlib import Path

OLD = 'format = 1\nworkbook = "w"\n\n[entries]\nV = { value = "70 m/s" }  # map\n'
FULL = OSError(errno.ENOSPC, "No space left on device")


@pytest.fixture
def record(tmp_path: Path) -> Record:
    """Return a record on disk with one change that is not saved."""
    path = tmp_path / "w.toml"
    path.write_text(OLD)
    record = Record.load(path, "w")
    record.change(entries={"V": EntryRecord("65 m/s")})
    return record


def names(folder: Path) -> list[str]:
    """Return what is in a folder, the lock file left out."""
    return sorted(path.name for path in folder.iterdir() if path.suffix != ".lock")


def refuse(error: OSError) -> Any:
    """Return a function that raises the error whatever it is called with."""

    def refusing(*_: object, **__: object) -> None:
        raise error

    return refusing


def test_outside_edit_is_noticed_and_not_overwritten(record: Record) -> None:
    """A file changed since it was read is not written; after a reload the change goes in."""
    edited = OLD.replace("# map", "# atlas")
    record.path.write_text(edited)
    with pytest.raises(RecordChangedError, match="reload the record"):
        record.save()
    assert record.path.read_text() == edited
    record.reload()
    assert record.entries["V"] == EntryRecord("70 m/s")
    record.change(entries={"V": EntryRecord("65 m/s")})
    record.save()
    assert record.path.read_text() == edited.replace("70", "65")


def test_record_made_or_removed_meanwhile_is_noticed(record: Record, tmp_path: Path) -> None:
    """A file that appeared or went since reading counts as changed by someone else."""
    new = Record.load(tmp_path / "x.toml", "x")
    new.change(entries={"a": EntryRecord("1")})
    (tmp_path / "x.toml").write_text("")
    record.path.unlink()
    for changed in (new, record):
        with pytest.raises(RecordChangedError):
            changed.save()
    assert names(tmp_path) == ["x.toml"]


def test_saving_twice_is_no_outside_edit(record: Record) -> None:
    """A record knows its own writing and saves again."""
    record.save()
    record.change(entries={"V": EntryRecord("60 m/s")})
    record.save()
    assert 'V = { value = "60 m/s" }  # map' in record.path.read_text()


@pytest.mark.parametrize("function", ["write", "fsync", "replace"])
def test_full_disk_leaves_the_old_record(
    record: Record, monkeypatch: pytest.MonkeyPatch, function: str
) -> None:
    """Wherever the disk is full, the old file is whole and nothing else is left."""
    with monkeypatch.context() as patch:
        patch.setattr(os, function, refuse(FULL))
        with pytest.raises(RecordError, match="disk is full") as caught:
            record.save()
    assert "free some space" in caught.value.hint
    assert (record.path.read_text(), names(record.path.parent)) == (OLD, ["w.toml"])
    record.save()
    assert "65 m/s" in record.path.read_text()


def test_full_disk_in_the_middle_of_writing(
    record: Record, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A disk that takes ten bytes and is full then leaves the old record."""
    write = os.write
    taken: list[int] = []

    def write_ten(descriptor: int, data: bytes) -> int:
        if taken:
            raise FULL
        taken.append(write(descriptor, data[:10]))
        return 10

    with monkeypatch.context() as patch:
        patch.setattr(os, "write", write_ten)
        with pytest.raises(RecordError, match="disk is full"):
            record.save()
    assert taken == [10]
    assert (record.path.read_text(), names(record.path.parent)) == (OLD, ["w.toml"])


def test_full_disk_while_migrating_leaves_no_copy(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """When the new format cannot be written, the copy of the old file goes as well."""
    old = 'format = 0\nworkbook = "w"\n[entries]\nV = "70 m/s"\n'
    (tmp_path / "w.toml").write_text(old)
    record = Record.load(tmp_path / "w.toml", "w")
    record.change(entries={"V": EntryRecord("65 m/s")})
    replace, calls = os.replace, []

    def replace_once(source: str, target: str) -> None:
        calls.append(target)
        if len(calls) > 1:
            raise FULL
        replace(source, target)

    monkeypatch.setattr(os, "replace", replace_once)
    with pytest.raises(RecordError, match="disk is full"):
        record.save()
    assert ((tmp_path / "w.toml").read_text(), names(tmp_path)) == (old, ["w.toml"])


def test_file_held_by_another_program_is_tried_again(
    record: Record, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Twice refused and then let in: the record is saved."""
    replace, refusals = os.replace, [PermissionError(13, "held"), PermissionError(13, "held")]

    def replace_later(source: str, target: str) -> None:
        if refusals:
            raise refusals.pop()
        replace(source, target)

    monkeypatch.setattr(os, "replace", replace_later)
    record.save()
    assert "65 m/s" in record.path.read_text()


def test_file_held_for_long_is_explained(record: Record, monkeypatch: pytest.MonkeyPatch) -> None:
    """A file that stays held is not written, and the message says who might hold it."""
    monkeypatch.setattr(os, "replace", refuse(PermissionError(13, "held")))
    with pytest.raises(RecordError, match="another program holds this file open") as caught:
        record.save()
    assert "a spreadsheet" in caught.value.hint
    assert (record.path.read_text(), names(record.path.parent)) == (OLD, ["w.toml"])


@pytest.mark.parametrize("code", [errno.EACCES, errno.EPERM, errno.EROFS])
def test_folder_without_permission_is_explained(
    record: Record, monkeypatch: pytest.MonkeyPatch, code: int
) -> None:
    """In a folder that cannot be written the message names the folder; nothing changes."""
    monkeypatch.setattr(os, "open", refuse(OSError(code, os.strerror(code))))
    with pytest.raises(RecordError, match="no permission") as caught:
        record.save()
    assert str(record.path.parent) in caught.value.what
    assert (record.path.read_text(), names(record.path.parent)) == (OLD, ["w.toml"])


def test_unknown_trouble_keeps_the_words_of_the_system(
    record: Record, monkeypatch: pytest.MonkeyPatch
) -> None:
    """An error without words of ours is passed on with the system's own."""
    monkeypatch.setattr(os, "fsync", refuse(OSError(errno.EIO, "Input/output error")))
    with pytest.raises(RecordError, match=r"w\.toml: the file cannot be used: Input/output error"):
        record.save()


def test_places_that_are_no_folder_or_no_file_are_explained(tmp_path: Path) -> None:
    """A missing folder, a file for a folder, a folder for a file: each is named."""
    (tmp_path / "file").write_text("x")
    for folder in (tmp_path / "gone", tmp_path / "file"):
        with pytest.raises(RecordError, match="no such file or folder"):
            update(folder / "w.toml", "w", None, lambda _: None)
    assert names(tmp_path) == ["file"]
    (tmp_path / "w.toml").mkdir()
    with pytest.raises(RecordError, match="a folder stands where this file belongs"):
        Record.load(tmp_path / "w.toml", "w")


def test_lock_that_is_never_free_is_explained(record: Record) -> None:
    """While another one writes, saving gives up after the wait and says why."""
    script = (
        "import sys, pathlib\n"
        "from calcbook.diskfile import locked\n"
        "from calcbook.errors import RecordError\n"
        "with locked(pathlib.Path(sys.argv[1]), RecordError):\n"
        "    print('held', flush=True)\n"
        "    sys.stdin.read()\n"
    )
    with subprocess.Popen(
        [sys.executable, "-c", script, str(record.path)],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
    ) as holder:
        assert holder.stdout
        assert holder.stdout.readline() == b"held\n"
        with pytest.raises(RecordError, match=r"another process is writing this file"):
            record.save(wait=0.05)
        assert record.path.read_text() == OLD
        holder.communicate()
    record.save(wait=0.05)
    assert "65 m/s" in record.path.read_text()


def test_lock_is_free_after_an_error(record: Record) -> None:
    """A change that fails writes nothing and gives the lock back."""

    def failing(_: Record) -> None:
        raise ZeroDivisionError

    with pytest.raises(ZeroDivisionError):
        update(record.path, "w", None, failing)
    assert record.path.read_text() == OLD
    with locked(record.path, RecordError, wait=0.05):
        record.save_locked()
    assert "65 m/s" in record.path.read_text()


@pytest.mark.skipif(os.name != "posix", reason="modes and links are those of POSIX")
def test_mode_and_link_are_kept(record: Record, tmp_path: Path) -> None:
    """The file keeps its permissions, and a link stays a link."""
    record.path.chmod(0o640)
    link = tmp_path / "link.toml"
    link.symlink_to(record.path)
    update(link, "w", None, lambda r: r.change(entries={"V": EntryRecord("1")}))
    assert link.is_symlink()
    assert record.path.stat().st_mode & 0o777 == 0o640
    assert 'value = "1"' in record.path.read_text()


COUNTER = """
import pathlib, sys
from calcbook.record import EntryRecord, update

def count(record):
    old = record.entries.get("n", EntryRecord("0"))
    record.change(entries={"n": EntryRecord(str(int(old.value) + 1))})

for _ in range(250):
    update(pathlib.Path(sys.argv[1]), "w", None, count, wait=60)
"""


def test_two_processes_lose_none_of_500_writes(tmp_path: Path) -> None:
    """Two processes that write one record 500 times together leave the number 500 in it."""
    path = tmp_path / "w.toml"
    writers = [subprocess.Popen([sys.executable, "-c", COUNTER, str(path)]) for _ in range(2)]
    assert [writer.wait(timeout=120) for writer in writers] == [0, 0]
    assert Record.load(path, "w").entries["n"].value == "500"
    assert names(tmp_path) == ["w.toml"]


KILLER = """
import os, pathlib, random, signal, sys, time
from calcbook.record import EntryRecord, Record

def save_for_ever(path, pipe):
    record = Record.load(path, "w")
    number = int(record.entries["n"].value)
    while True:
        number += 1
        record.change(entries={"n": EntryRecord(str(number))})
        os.write(pipe, b"+")
        record.save()
        os.write(pipe, b"-")

path = pathlib.Path(sys.argv[1])
record = Record(path, "w")
record.change(entries={f"e{i}": EntryRecord("3.5 kN/m2", "S-1") for i in range(40)})
record.change(entries={"n": EntryRecord("0")})
record.save()
chance = random.Random(7)
known = torn = 0
for _ in range(200):
    read, write = os.pipe()
    child = os.fork()
    if not child:
        save_for_ever(path, write)
    os.close(write)
    begun = os.read(read, 1)
    time.sleep(chance.uniform(0, 0.012))
    os.kill(child, signal.SIGKILL)
    os.waitpid(child, 0)
    while more := os.read(read, 4096):
        begun += more
    os.close(read)
    started, finished = known + begun.count(b"+"), known + begun.count(b"-")
    entries = Record.load(path, "w").entries
    known = int(entries["n"].value)
    assert known in (started, finished), (known, started, finished)
    assert len(entries) == 41
    torn += started != finished
print(torn)
"""


@pytest.mark.skipif(not hasattr(os, "fork"), reason="kills a forked process")
def test_200_kills_while_saving_tear_nothing(tmp_path: Path) -> None:
    """After each of 200 kills the record holds the last value saved or the one being saved."""
    path = tmp_path / "w.toml"
    command = [sys.executable, "-c", KILLER, str(path)]
    done = subprocess.run(command, check=False, capture_output=True, text=True, timeout=120)
    assert (done.returncode, done.stderr) == (0, "")
    assert int(done.stdout) > 100, "most kills must fall into a save"
    update(path, "w", None, lambda record: record.change(entries={"n": None}))
    assert names(tmp_path) == ["w.toml"]
