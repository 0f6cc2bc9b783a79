"""Records: read strictly, confirmed for one job, named by workbook and mark."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from record_texts import FILLED, HEAD, load, write

from calcbook.errors import RecordError
from calcbook.record import (
    CarriedRecord,
    Confirmation,
    EntryRecord,
    Record,
    RowRecord,
    record_path,
    row_digest,
)

if TYPE_CHECKING:
    from pathlib import Path


def test_missing_file_is_an_empty_record(tmp_path: Path) -> None:
    """Without a file a record is empty, and reading writes nothing."""
    record = Record.load(tmp_path / "w.toml", "w")
    assert (record.entries, record.schedules, record.carried) == ({}, {}, {})
    assert list(tmp_path.iterdir()) == []


def test_all_parts_are_read(tmp_path: Path) -> None:
    """Entries, rows, carried values, sources and confirmations come as they were typed."""
    record = load(tmp_path, FILLED)
    confirmed = Confirmation("70 m/s", "MC-1", "RA", "2026-10-02")
    assert record.entries == {
        "V": EntryRecord("70 m/s", "map", confirmed),
        "h": EntryRecord("18.0 m"),
    }
    assert record.schedules["levels"][1] == RowRecord("L2", {"z": "8 m"}, "A-2")
    assert record.carried == {
        "q_h": CarriedRecord("2.8 kPa", 2800.0, origin="wind.q_h", sign="toward +")
    }


@pytest.mark.parametrize(
    ("text", "place", "message"),
    [
        (HEAD + "[entries\n", "line 3, column 9", "broken TOML"),
        (HEAD + "entrys = {}\n", "line 3, column 1", "did you mean 'entries'?"),
        (HEAD + '[entries]\nV = "1 m"\n', "line 4, column 1", 'write V = { value = "1 m" }'),
        (HEAD + "[entries]\nV = 3\n", "line 4, column 1", "must be a table, not a whole number"),
        (HEAD + "entries = 3\n", "line 3, column 1", "entries must be a table"),
        (HEAD + "[entries]\nV = { value = 70 }\n", "line 4, column 7", 'write value = "70"'),
        (HEAD + "[entries]\nV = {}\n", "line 4, column 1", "'value' is missing in entries.V"),
        (HEAD + '[entries]\nV = { vale = "1" }\n', "line 4, column 7", "did you mean 'value'?"),
        (
            HEAD + '[entries]\nV = { value = "1", confirmed = { value = "1", job = "1" } }\n',
            "line 4, column 20",
            "'by' is missing in entries.V.confirmed",
        ),
        (
            HEAD + '[entries.V]\nvalue = "1"\n[entries.V.confirmed]\nvalue = "1"\njob = "1"\n'
            'by = "RA"\non = "2026-10-02"\n',
            "line 9, column 1",
            "without quotes",
        ),
        (HEAD + "[schedules]\ns = 1\n", "line 4, column 1", "schedules.s must be a list"),
        (HEAD + '[schedules]\ns = [\n  "a",\n]\n', "line 5, column 3", "s row 1 must be a table"),
        (HEAD + "[schedules]\ns = [{ cells = {} }]\n", "line 4, column 6", "'key' is missing"),
        (
            HEAD + '[schedules]\ns = [\n { key = "a" },\n { key = "a" },\n]\n',
            "line 6, column 4",
            "s has two rows 'a'",
        ),
        (
            HEAD + '[schedules]\ns = [{ key = "a", cells = { z = 1.5 } }]\n',
            "line 4, column 29",
            "schedules.s row 1 cells.z must be text",
        ),
        (HEAD + '[schedules]\ns = [{ key = "a", z = "1" }]\n', "line 4, column 19", "key 'z'"),
        (
            HEAD + '[carried]\nq = { value = "1", si = true }\n',
            "line 4, column 20",
            "carried.q.si must be a number, not true or false",
        ),
        (HEAD + '[carried]\nq = { value = "1", si = inf }\n', "line 4, column 20", "be finite"),
        ('format = 2\nworkbook = "w"\nnew = 1\n', "line 1, column 1", "reads formats 0 to 1"),
        ('format = -1\nworkbook = "w"\n', "line 1, column 1", "has format -1"),
        ("format = true\n", "line 1, column 1", "must be a whole number"),
        ('format = 1\nworkbook = "x"\n', "line 2, column 1", "a record of 'x', not of 'w'"),
        (HEAD + 'mark = "B1"\n', "line 3, column 1", "must have no mark"),
    ],
)
def test_damaged_record_is_refused_and_left_alone(
    tmp_path: Path, text: str, place: str, message: str
) -> None:
    """What is wrong in a record is said with file, line and column; the file stays as it is."""
    path = write(tmp_path, text)
    with pytest.raises(RecordError) as caught:
        Record.load(path, "w")
    assert caught.value.where == f"w.toml, {place}"
    assert message in str(caught.value)
    assert path.read_bytes() == text.encode()
    assert [item.name for item in tmp_path.iterdir()] == ["w.toml"]


@pytest.mark.parametrize("text", ['workbook = "w"\n', "format = 1\n", ""])
def test_missing_head_is_refused(tmp_path: Path, text: str) -> None:
    """A record without its format or workbook is refused by name of what is missing."""
    with pytest.raises(RecordError, match=r"w\.toml: '(format|workbook)' is missing at the top"):
        load(tmp_path, text)


@pytest.mark.parametrize(
    "entry",
    [
        EntryRecord("caf\udce9"),
        EntryRecord("1", confirmed=Confirmation("1", "1", "RA", "yesterday")),
    ],
)
def test_change_refuses_what_no_file_can_hold(tmp_path: Path, entry: EntryRecord) -> None:
    """Broken text or a wrong date is refused before anything is changed in memory."""
    record = load(tmp_path, FILLED)
    with pytest.raises(RecordError, match=r"w\.toml"):
        record.change(entries={"h": EntryRecord("9 m"), "x": entry})
    assert record.entries["h"] == EntryRecord("18.0 m")


def test_change_refuses_values_that_are_not_finite_and_keys_used_twice(tmp_path: Path) -> None:
    """A carried nan and two rows of one key are refused; the record stays as it was."""
    record = load(tmp_path, FILLED)
    with pytest.raises(RecordError, match="not a finite number"):
        record.change(carried={"q_h": CarriedRecord("nan", float("nan"))})
    with pytest.raises(RecordError, match="levels has two rows 'a'"):
        record.change(schedules={"levels": [RowRecord("a", {}), RowRecord("a", {})]})
    assert record.digest() == load(tmp_path, FILLED).digest()


def test_confirmation_is_for_this_value_and_this_job(tmp_path: Path) -> None:
    """An entry is confirmed for its very text and job number, and for nothing else."""
    record = load(tmp_path, FILLED)
    entry = record.entries["V"]
    assert record.is_confirmed(entry, "MC-1")
    assert not record.is_confirmed(entry, "MC-2")
    assert not record.is_confirmed(record.entries["h"], "MC-1")
    assert not record.is_confirmed(EntryRecord("71 m/s", "map", entry.confirmed), "MC-1")
    without = Confirmation("1", "", "RA", "2026-10-02")
    assert not record.is_confirmed(EntryRecord("1", confirmed=without), "")


def test_row_is_confirmed_as_a_whole(tmp_path: Path) -> None:
    """A row edited outside is no longer confirmed; the order of its cells does not matter."""
    row = RowRecord("L2", {"z": "8 m", "use": "office"})
    row.confirmed = Confirmation(row_digest(row), "MC-1", "RA", "2026-10-02")
    record = load(tmp_path, FILLED)
    record.change(schedules={"levels": [row]})
    record.save()
    path = record.path
    swapped = path.read_text().replace('z = "8 m", use = "office"', 'use = "office", z = "8 m"')
    assert record.is_confirmed(load(tmp_path, swapped).schedules["levels"][0], "MC-1")
    edited = load(tmp_path, swapped.replace("8 m", "9 m")).schedules["levels"][0]
    assert not record.is_confirmed(edited, "MC-1")


def test_digest_is_of_the_inputs_as_typed(tmp_path: Path) -> None:
    """Values, cells and the order of rows count; sources, comments and carried values do not."""
    base = load(tmp_path, FILLED).digest()
    same = FILLED.replace('source = "map", ', "").replace("2800.0", "1.0").replace("# ask", "# a")
    assert load(tmp_path, same).digest() == base
    assert load(tmp_path, FILLED.replace("18.0 m", "18 m")).digest() != base
    assert load(tmp_path, FILLED.replace('"8 m"', '"9 m"')).digest() != base
    record = load(tmp_path, FILLED)
    record.change(schedules={"levels": record.schedules["levels"][::-1]})
    assert record.digest() != base


@pytest.mark.parametrize("mark", ["B1", "C-3", "T_2", "2.1", "x" * 60])
def test_marks_become_file_names(tmp_path: Path, mark: str) -> None:
    """A mark as on the drawings is part of the record's name."""
    assert record_path(tmp_path, "floor-beam", mark) == tmp_path / f"floor-beam.{mark}.toml"


@pytest.mark.parametrize(
    "mark",
    ["", ".", "..", "../B1", "a/b", "a\\b", "B1.", ".B1", "a..b", "B 1", "B1\n", "é", "x" * 61],
)
def test_marks_that_could_leave_the_folder_are_refused(tmp_path: Path, mark: str) -> None:
    """Path tricks, blanks and foreign letters in a mark are refused."""
    with pytest.raises(RecordError, match="cannot be a mark"):
        record_path(tmp_path, "floor-beam", mark)


@pytest.mark.parametrize("workbook", ["", "../x", "a.b", "job", "Job", "-x", "a/b"])
def test_workbook_names_that_cannot_be_files_are_refused(tmp_path: Path, workbook: str) -> None:
    """A workbook's name stays inside the folder and does not take job.toml."""
    with pytest.raises(RecordError, match="cannot name a workbook"):
        record_path(tmp_path, workbook)
