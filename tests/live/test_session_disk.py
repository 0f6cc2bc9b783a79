"""A session and the disk: full, read-only, damaged, deleted, slow, shared, and killed."""

from __future__ import annotations

import asyncio
import errno
import os
import subprocess
import sys
import time
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from live_samples import WIND, make_job, opened
from records import files, in_memory, on_disk
from widgets_in import field, notices

from calcbook.errors import InputError, RecordError
from calcbook.live import opened as pacing
from calcbook.live.merging import together
from calcbook.record import EntryRecord, Record, RowRecord

if TYPE_CHECKING:
    from collections.abc import Callable

    from calcbook.job import Job
    from calcbook.live import Session

BROKEN = "format = 1\nworkbook = \n"


def refuse(number: int) -> Callable[..., Any]:
    """Return a function that fails as the operating system does."""

    def refusing(*_: object, **__: object) -> None:
        raise OSError(number, os.strerror(number))

    return refusing


def speed(session: Session) -> str:
    """Return the speed on disk."""
    return str(on_disk(session)["entries", "V"].value)


# --- what cannot be written ------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "number", "told"),
    [("write", errno.ENOSPC, "disk is full"), ("fsync", errno.EDQUOT, "disk is full"),
     ("open", errno.EROFS, "no permission"), ("replace", errno.EACCES, "another program")],
)  # fmt: skip
def test_what_cannot_be_written_stays_in_force(
    wind: Session, monkeypatch: pytest.MonkeyPatch, name: str, number: int, told: str
) -> None:
    """It is computed with, told with its reason, and written by the next change that can be."""
    wind.enter("V", "72 m/s")
    with monkeypatch.context() as patch:
        patch.setattr(os, name, refuse(number))
        wind.enter("V", "73 m/s")
        wind.enter("exposure", "B")
        assert told in wind.unwritten
        assert "V, exposure" in wind.unwritten
        assert "nothing was changed" not in wind.unwritten
        assert speed(wind) == "72 m/s"
        assert wind.book.readings.given["V"].text == "73 m/s"
    wind.enter_cell("floors", "Roof", "z", "8 m")
    assert wind.unwritten == ""
    assert on_disk(wind) == in_memory(wind)
    assert files(wind.job.folder) == ["design-basis.toml", "job.toml", "wind.toml"]


def test_a_folder_in_the_records_place(wind: Session, job: Job) -> None:
    """What is not a file is told, and after it is gone the record is written on request."""
    path = job.record_path("wind")
    path.mkdir()
    wind.enter("V", "73 m/s")
    assert "a folder stands where this file belongs" in wind.unwritten
    path.rmdir()
    wind.write_again()
    assert (wind.unwritten, speed(wind)) == ("", "73 m/s")


def test_undo_reaches_what_was_never_written(
    wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """With a full disk undo works in memory; nothing is missing on disk then."""
    with monkeypatch.context() as patch:
        patch.setattr(os, "write", refuse(errno.ENOSPC))
        wind.enter("V", "73 m/s")
        wind.undo()
    wind.write_again()
    assert wind.unwritten == ""
    assert in_memory(wind) == on_disk(wind) == {}


def test_running_all_cells_keeps_what_is_not_on_disk(
    wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """The session that takes over has it in memory, and writes it."""
    with monkeypatch.context() as patch:
        patch.setattr(os, "write", refuse(errno.ENOSPC))
        wind.enter("V", "73 m/s")
        again = type(wind)("wind", "Wind", job=wind.job, former=wind)
    assert again.record.entries["V"].value == "73 m/s"
    again.settle()
    assert speed(again) == "73 m/s"


def test_a_mark_that_is_not_on_disk_can_be_left(
    wind: Session, monkeypatch: pytest.MonkeyPatch
) -> None:
    """With another mark open it is still told, kept, and written by a change that can be."""
    wind.add_mark("A")
    wind.add_mark("B")
    with monkeypatch.context() as patch:
        patch.setattr(os, "write", refuse(errno.ENOSPC))
        wind.enter("V", "73 m/s")
        wind.open_mark("A")
        assert "wind.B.toml: the disk is full" in wind.unwritten
        with pytest.raises(RecordError, match="disk is full"):
            wind.remove_mark("B")
        wind.open_mark("B")
        assert speed_in(wind) == "73 m/s"
        wind.open_mark("A")
    wind.enter("V", "60 m/s")
    assert wind.unwritten == ""
    assert wind.job.record("wind", "B").entries["V"].value == "73 m/s"


# --- a record deleted or damaged while open --------------------------------------------------


def test_a_deleted_record_is_written_anew(wind: Session, job: Job) -> None:
    """The next look says that it is gone; the next change writes all of it."""
    wind.enter("V", "72 m/s")
    wind.enter_cell("floors", "Roof", "z", "8 m")
    job.record_path("wind").unlink()
    wind.look()
    assert "was deleted" in wind.unwritten
    assert not job.record_path("wind").exists()
    wind.enter("exposure", "B")
    assert wind.unwritten == ""
    assert len(on_disk(wind)) == 3
    assert on_disk(wind) == in_memory(wind)


def test_a_damaged_record_is_not_overwritten_unasked(wind: Session, job: Job) -> None:
    """What is typed stays in memory; the damaged file is left, and one is asked."""
    wind.enter("V", "72 m/s")
    path = job.record_path("wind")
    path.write_text(BROKEN)
    wind.look()
    assert "line 2" in wind.unwritten
    wind.enter("V", "73 m/s")
    wind.write_again()
    assert path.read_text() == BROKEN
    (ask,) = wind.asks
    assert [option for option, _ in ask["options"]] == ["anew", "later"]
    wind.answer(ask["id"], "later")
    assert (wind.asks, path.read_text()) == ([], BROKEN)
    assert "Not on disk: V" in wind.unwritten


def test_a_damaged_record_is_written_anew_on_request(wind: Session, job: Job) -> None:
    """The damaged file is kept under another name that is no record's."""
    wind.enter("V", "72 m/s")
    path = job.record_path("wind")
    for name in ("wind.toml.damaged", "wind.toml.damaged-2"):
        path.write_text(BROKEN)
        wind.enter("V", "73 m/s" if speed_in(wind) == "72 m/s" else "74 m/s")
        wind.answer(wind.asks[0]["id"], "anew")
        assert (wind.asks, wind.unwritten) == ([], "")
        assert (job.folder / name).read_text() == BROKEN
        assert on_disk(wind) == in_memory(wind)
    assert job.marks("wind") == ()


def speed_in(session: Session) -> str:
    """Return the speed in memory."""
    return session.record.entries["V"].value


def test_a_damaged_record_put_right_by_hand_is_read_again(wind: Session, job: Job) -> None:
    """The question goes away, what was put right comes in, what was typed is written."""
    wind.enter("V", "72 m/s")
    path = job.record_path("wind")
    good = path.read_text()
    path.write_text(BROKEN)
    wind.enter("V", "73 m/s")
    path.write_text(good.replace("[schedules]", 'exposure = { value = "B" }\n\n[schedules]'))
    wind.look()
    assert (wind.asks, wind.unwritten) == ([], "")
    assert speed(wind) == "73 m/s"
    assert on_disk(wind)["entries", "exposure"].value == "B"


# --- two kernels -----------------------------------------------------------------------------


def test_the_later_kernel_sees_the_earlier_ones_change(wind: Session, job: Job) -> None:
    """A look brings in what was typed elsewhere, in results and fields, and says what it was."""
    other = opened(WIND, job)
    other.enter("V", "80 m/s")
    other.enter_cell("floors", "Roof", "z", "9 m")
    wind.look()
    assert field(wind, "Site", "Basic wind speed").value == "80"
    assert "V, floors" in wind.notice
    assert "V, floors" in notices(wind)
    assert wind.undo_words == ""
    wind.look()
    assert "V, floors" in wind.notice


def test_the_same_item_changed_in_both_is_asked(wind: Session, job: Job) -> None:
    """Mine stays in memory and theirs on disk until one decides; other changes are written."""
    other = opened(WIND, job)
    other.enter("V", "90 m/s")
    wind.enter("V", "81 m/s")
    wind.enter("exposure", "B")
    (ask,) = wind.asks
    assert "Here: 81 m/s. On disk: 90 m/s." in ask["text"]
    assert (speed_in(wind), speed(wind)) == ("81 m/s", "90 m/s")
    assert on_disk(wind)["entries", "exposure"].value == "B"
    wind.answer(ask["id"], "mine")
    assert (speed(wind), wind.asks) == ("81 m/s", [])
    other.look()
    assert speed_in(other) == "81 m/s"


def test_theirs_is_taken_on_request_and_undo_brings_mine_back(wind: Session, job: Job) -> None:
    """Nothing is lost by the answer."""
    other = opened(WIND, job)
    other.enter("V", "90 m/s")
    wind.enter("V", "81 m/s")
    (ask,) = wind.asks
    with pytest.raises(InputError, match="no longer open"):
        wind.answer(ask["id"], "both")
    wind.answer(ask["id"], "theirs")
    assert (speed_in(wind), speed(wind)) == ("90 m/s", "90 m/s")
    assert wind.book.readings.given["V"].text == "90 m/s"
    wind.undo()
    assert speed(wind) == "81 m/s"
    with pytest.raises(InputError, match="no longer open"):
        wind.answer(ask["id"], "mine")


def test_a_question_follows_what_happens_on_disk(wind: Session, job: Job) -> None:
    """A third value is asked about instead; when both are alike there is nothing to ask."""
    other = opened(WIND, job)
    other.enter("V", "90 m/s")
    wind.enter("V", "81 m/s")
    other.enter("V", "95 m/s")
    wind.look()
    assert "On disk: 95 m/s." in wind.asks[0]["text"]
    other.enter("V", "81 m/s")
    wind.look()
    assert wind.asks == []
    assert on_disk(wind) == in_memory(wind)


def test_rows_changed_in_both_kernels_are_put_together(wind: Session, job: Job) -> None:
    """One types in a row, the other adds one: both stand. The same row is asked about."""
    wind.enter_cell("floors", "Roof", "use", "roof")
    other = opened(WIND, job)
    other.add_row("floors", "Level 2")
    wind.enter_cell("floors", "Level 2", "z", "3 m")
    assert [r.key for r in wind.record.schedules["floors"]] == ["Roof", "Level 2", "new"]
    assert wind.asks == []
    other.look()
    other.enter_cell("floors", "Roof", "z", "9 m")
    wind.enter_cell("floors", "Roof", "z", "8 m")
    (ask,) = wind.asks
    assert "Roof: z = 8 m" in ask["text"]
    assert "Roof: z = 9 m" in ask["text"]
    assert "Level 2" not in ask["text"]


ROW = st.builds(RowRecord, st.sampled_from("ABCD"), st.sampled_from([{"z": "1"}, {"z": "2"}]))
ROWS = st.lists(ROW, unique_by=lambda row: row.key, max_size=4)


@given(ROWS, ROWS, ROWS)
@settings(deadline=None)
def test_putting_together_loses_nothing(
    first: list[RowRecord], own: list[RowRecord], other: list[RowRecord]
) -> None:
    """Without a clash every change of either side is in the result, whoever looks."""
    both, clash = together(first, own, other)
    turned, clash_turned = together(first, other, own)
    assert clash == clash_turned
    if clash:
        return
    assert both == turned
    said = {row.key: row for row in both}
    former = {row.key: row for row in first}
    for side in (own, other):
        here = {row.key: row for row in side}
        for key in former.keys() | here.keys():
            if here.get(key) != former.get(key):
                assert said.get(key) == here.get(key)


# --- many changes, and the end of a kernel ---------------------------------------------------


def test_two_hundred_changes_in_two_seconds(wind: Session) -> None:
    """All are applied at once in memory; the disk is settled 300 ms after the last one."""
    writes: list[str] = []
    save = Record.save

    def counted(record: Record, **more: float) -> None:
        save(record, **more)
        writes.append(record.entries["V"].value)

    async def change() -> None:
        began = time.monotonic()
        for n in range(200):
            wind.enter("V", f"{20 + n / 4} m/s")
            assert speed_in(wind) == f"{20 + n / 4} m/s"
            assert wind.statement["results"][0]["name"] == "q"
            await asyncio.sleep(max(0.0, began + n * 0.01 - time.monotonic()))
        await asyncio.sleep(0.3)

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Record, "save", counted)
        asyncio.run(change())
    assert writes[-1] == speed_in(wind) == "69.75 m/s"
    assert on_disk(wind) == in_memory(wind)
    assert len(writes) < 30
    assert field(wind, "Site", "Basic wind speed").value == "69.75"


def test_the_last_of_many_is_shown_and_few_are_painted(wind: Session) -> None:
    """In a kernel what is shown follows at most about every 50 ms, and ends with the last."""
    painted: list[float] = []

    class Bar:
        def show(self, statement: Any) -> None:
            painted.append(next(r["value"]["si"] for r in statement["results"]))

    wind.bar = Bar()

    async def change() -> float:
        began = time.monotonic()
        for n in range(40):
            wind.enter("V", f"{40 + n} m/s")
            await asyncio.sleep(0)
        took = time.monotonic() - began
        await asyncio.sleep(0.25)  # the bar comes a little after the lines
        return took

    took = asyncio.run(change())
    assert painted[-1] == pytest.approx(0.613 * 79**2)
    assert 2 <= len(painted) <= 4 + took / 0.05


def test_the_first_change_of_a_quiet_time_is_written_at_once(
    job: Job, monkeypatch: pytest.MonkeyPatch
) -> None:
    """As soon as the kernel has shown it; a second one within the pace of writing waits."""
    monkeypatch.setattr(pacing, "WRITE_SECONDS", 5.0)
    wind = opened(WIND, job)

    async def change() -> tuple[str, str]:
        wind.enter("V", "72 m/s")
        await asyncio.sleep(0.02)
        first = speed(wind)
        wind.enter("V", "73 m/s")
        await asyncio.sleep(0.02)
        return first, speed(wind)

    assert asyncio.run(change()) == ("72 m/s", "72 m/s")
    wind.settle()
    assert speed(wind) == "73 m/s"


def test_a_kernel_looks_about_once_a_second(wind: Session, job: Job) -> None:
    """Without anything typed here, a change elsewhere is shown soon."""
    other = opened(WIND, job)

    async def wait() -> None:
        wind.view("Site")
        other.settle()
        record = job.record("wind")
        record.change({"V": EntryRecord("88 m/s")})
        record.save()
        for _ in range(30):
            await asyncio.sleep(0.1)
            if speed_in_or_none(wind) == "88 m/s":
                return

    asyncio.run(wait())
    assert field(wind, "Site", "Basic wind speed").value == "88"


def speed_in_or_none(session: Session) -> str:
    """Return the speed in memory, '' while there is none."""
    entry = session.record.entries.get("V")
    return entry.value if entry else ""


KILLED = """
import asyncio, sys
sys.path.insert(0, {tests!r})
from pathlib import Path
from live_samples import WIND, opened
from calcbook.job import Job
session = opened(WIND, Job.load(Path({job!r})))
async def change():
    for n in range(100_000):
        session.enter("V", f"{{20 + n % 90}} m/s")
        session.enter_cell("floors", "Roof", "z", f"{{5 + n % 90}} m")
        print("changed", flush=True)
        await asyncio.sleep(0)
asyncio.run(change())
"""


@pytest.mark.parametrize("changes", [3, 40])
def test_a_kernel_killed_in_a_change_leaves_a_whole_record(tmp_path: Path, changes: int) -> None:
    """After SIGKILL the record can be read and holds an old or a new value, and can be opened."""
    job = make_job(tmp_path / "job")
    code = KILLED.format(tests=str(Path(__file__).parent), job=str(job.folder))
    child = subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE, text=True)
    assert child.stdout is not None
    for line in child.stdout:
        changes -= line == "changed\n"
        if changes <= 0:
            break
    child.kill()
    child.wait()
    record = job.record("wind")
    if record.on_disk:
        assert record.entries["V"].value.removesuffix(" m/s").isdigit()
        assert record.schedules["floors"][0].cells["z"].removesuffix(" m").isdigit()
    session = opened(WIND, job)
    session.enter("V", "70 m/s")
    assert (speed(session), session.unwritten) == ("70 m/s", "")
