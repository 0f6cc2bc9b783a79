"""The text of records: edited in place, migrated, readable by hand."""

from __future__ import annotations

import tomllib
from typing import TYPE_CHECKING

import pytest
import tomlkit
from hypothesis import given, settings
from hypothesis import strategies as st
from record_texts import FILLED, HEAD, load, write

from calcbook.errors import RecordError
from calcbook.record import (
    CarriedRecord,
    Confirmation,
    EntryRecord,
    Record,
    RowRecord,
)

if TYPE_CHECKING:
    from pathlib import Path


def test_new_record_is_laid_out_for_editing_by_hand(tmp_path: Path) -> None:
    """A new record has one entry and one row per line, in the order of reading."""
    record = Record(tmp_path / "w.B1.toml", "w", "B1")
    record.change(
        entries={
            "V": EntryRecord("70 m/s", "map", Confirmation("70 m/s", "7", "RA", "2026-10-02"))
        },
        schedules={"levels": [RowRecord("Roof", {"z": "18 m", "use": "no"}), RowRecord("L2", {})]},
        carried={"q.h": CarriedRecord("2 kPa", 2000.0)},
    )
    record.save()
    assert (tmp_path / "w.B1.toml").read_text() == (
        'format = 1\nworkbook = "w"\nmark = "B1"\n\n[entries]\n'
        'V = { value = "70 m/s", source = "map", confirmed = '
        '{ value = "70 m/s", job = "7", by = "RA", on = 2026-10-02 } }\n'
        '\n[schedules]\nlevels = [\n  { key = "Roof", cells = { z = "18 m", use = "no" } },\n'
        '  { key = "L2" },\n]\n\n[carried]\n"q.h" = { value = "2 kPa", si = 2000.0 }\n'
    )


def test_saving_touches_only_what_changed(tmp_path: Path) -> None:
    """One changed entry, row and carried value: their three lines differ and comments stay."""
    record = load(tmp_path, FILLED)
    rows = record.schedules["levels"]
    rows[1] = RowRecord("L2", {"z": "8.4 m"})
    record.change(
        entries={"V": EntryRecord("65 m/s")},
        schedules={"levels": rows},
        carried={"q_h": CarriedRecord("2.9 kPa", 2900.0)},
    )
    record.save()
    before, after = FILLED.splitlines(), record.path.read_text().splitlines()
    different = [new for old, new in zip(before, after, strict=True) if old != new]
    assert different == [
        'V = { value = "65 m/s" }  # ask RA',
        '  { key = "L2", cells = { z = "8.4 m" } },',
        'q_h = { value = "2.9 kPa", si = 2900.0 }  # from wind',
    ]


def test_rows_come_and_go_between_the_comments(tmp_path: Path) -> None:
    """Rows put in, taken out and moved leave the comments of the other rows in place."""
    record = load(tmp_path, FILLED)
    roof, second, ground = record.schedules["levels"]
    top, new = RowRecord("Top", {"z": "21 m"}), RowRecord("L3", {"z": "12 m"})
    record.change(schedules={"levels": [top, roof, second, new, ground]})
    record.save()
    record.change(schedules={"levels": [top, roof, new, ground, RowRecord("B1", {})]})
    record.save()
    lines = record.path.read_text().splitlines()
    start = lines.index("levels = [")
    assert lines[start + 1 : start + 9] == [
        '  { key = "Top", cells = { z = "21 m" } },',
        "  # from the top",
        '  { key = "Roof", cells = { z = "18 m" } },  # without parapet',
        '  { key = "L3", cells = { z = "12 m" } },',
        "  # ground below",
        '    {key="L1", cells={z="4 m"}},  # ramp excluded',
        '  { key = "B1" },',
        "]",
    ]


def test_rows_renamed_and_turned_round_take_their_comments_along(tmp_path: Path) -> None:
    """A new key in a row's place keeps the comments; rows in another order take theirs along."""
    record = load(tmp_path, FILLED)
    _, second, ground = record.schedules["levels"]
    record.change(schedules={"levels": [RowRecord("Deck", {}), second, ground]})
    record.save()
    record.change(schedules={"levels": [ground, RowRecord("Deck", {})]})
    record.save()
    assert record.path.read_text().split("levels = [")[1].split("]")[0] == (
        '\n  # ground below\n    {key="L1", cells={z="4 m"}},  # ramp excluded\n'
        '  # from the top\n  { key = "Deck" },  # without parapet\n'
    )


def test_blanks_and_texts_that_look_like_a_confirmation_stay(tmp_path: Path) -> None:
    """Untouched lines with dates stay as typed, and text is never taken for a date."""
    line = 'a = { value = "on = 2026-10-02}", source = "# on = 2026-10-02}" } # on = 2026-10-02}\n'
    record = load(tmp_path, FILLED.replace("\nh = {", f"\n{line}h = {{"))
    before = record.path.read_text()
    record.change(entries={"h": EntryRecord("19.0 m")})
    record.save()
    assert record.path.read_text() == before.replace("18.0", "19.0")


def test_change_that_would_be_lost_is_not_written(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """When the TOML library drops a line, the file stays and the record says so."""
    record = load(tmp_path, FILLED)
    record.change(entries={"V": EntryRecord("65 m/s")})
    dumps = tomlkit.dumps
    monkeypatch.setattr(tomlkit, "dumps", lambda document: dumps(document).replace("L2", "L3"))
    with pytest.raises(RecordError, match="cannot be put into this file"):
        record.save()
    assert record.path.read_text() == FILLED


def test_carried_option_has_no_number(tmp_path: Path) -> None:
    """A carried choice is kept by its option, without a number in SI."""
    record = load(tmp_path, FILLED)
    carried = CarriedRecord("flat", None, "flat", "design-basis.roof", fingerprint="ab12")
    record.change(carried={"roof": carried})
    record.save()
    assert Record.load(record.path, "w").carried["roof"] == carried


def test_items_are_taken_out(tmp_path: Path) -> None:
    """None takes an entry, a schedule and a carried value out of the file."""
    record = load(tmp_path, FILLED)
    record.change(entries={"h": None, "not there": None}, schedules={"levels": None})
    record.change(carried={"q_h": None})
    record.save()
    again = Record.load(record.path, "w")
    assert (list(again.entries), again.schedules, again.carried) == (["V"], {}, {})


def test_saving_nothing_leaves_the_file_alone(tmp_path: Path) -> None:
    """Saving without a change writes nothing, not even the same bytes."""
    record = load(tmp_path, FILLED)
    before = record.path.stat()
    record.save()
    assert record.path.stat() == before


@pytest.mark.parametrize(
    "layout",
    [
        '[entries.V]\nvalue = "1" # first\nsource = "x"\n[entries.h]\nvalue = "2"\n',
        'entries = { V = { value = "1", source = "x" }, h = { value = "2" } }\n',
        '[entries]\nV.value = "1"\nV.source = "x"\nh.value = "2"\n',
        '[entries.V]\nvalue = "1"\n[schedules]\n[entries.h]\nvalue = "2"\n',
        '[[schedules.s]]\nkey = "a"\ncells.z = "1"\n[[schedules.s]]\nkey = "b"\n',
        'schedules.s = [{ key = "a" }, { key = "b" }]\n',
    ],
)
def test_other_layouts_of_toml_are_edited_too(tmp_path: Path, layout: str) -> None:
    """However the TOML is laid out by hand, what was changed is what is read again."""
    record = load(tmp_path, HEAD + layout)
    record.change(entries={"V": EntryRecord("3"), "new": EntryRecord("4", "y")})
    record.change(schedules={"s": [RowRecord("b", {"z": "2"}), RowRecord("c", {})]})
    record.save()
    again = Record.load(record.path, "w")
    assert (again.entries, again.schedules) == (record.entries, record.schedules)


def test_comment_inside_a_table_of_several_lines_stays(tmp_path: Path) -> None:
    """An entry spread over lines keeps its lines and their comments."""
    record = load(tmp_path, HEAD + '[entries.V]\nvalue = "1" # by phone\nsource = "x"\n')
    record.change(entries={"V": EntryRecord("2")})
    record.save()
    assert record.path.read_text() == HEAD + '[entries.V]\nvalue = "2" # by phone\n'


texts = st.text(st.characters(codec="utf-8"), max_size=12)
entries = st.builds(EntryRecord, texts, texts)
rows = st.lists(
    st.builds(RowRecord, st.sampled_from("abcdefg"), st.dictionaries(texts, texts, max_size=2)),
    max_size=7,
    unique_by=lambda row: row.key,
)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.tuples(st.dictionaries(texts, st.none() | entries, max_size=3), rows), max_size=5)
)
def test_any_changes_are_read_again(
    tmp_path_factory: pytest.TempPathFactory,
    changes: list[tuple[dict[str, EntryRecord | None], list[RowRecord]]],
) -> None:
    """After any run of changes, with any text in them, the file says what the memory says."""
    path = tmp_path_factory.mktemp("any") / "w.toml"
    record = load(path.parent, FILLED)
    for changed, levels in changes:
        record.change(entries=changed, schedules={"levels": levels})
        record.save()
        again = Record.load(path, "w")
        assert (again.entries, again.schedules) == (record.entries, record.schedules)
        assert "# wind on the clinic" in path.read_text(encoding="utf-8")


def test_older_format_is_migrated_and_kept(tmp_path: Path) -> None:
    """A record of format 0 is read; saving writes the new format and keeps the old file."""
    old = 'format = 0 # old\nworkbook = "w"\n[entries]\n# map\nV = "70 m/s" # RA\nh = "4 m"\n'
    record = load(tmp_path, old)
    assert record.entries == {"V": EntryRecord("70 m/s"), "h": EntryRecord("4 m")}
    assert record.path.read_text() == old
    record.change(entries={"h": EntryRecord("5 m")})
    record.save()
    assert record.path.read_text() == (
        'format = 1 # old\nworkbook = "w"\n[entries]\n# map\n'
        'V = { value = "70 m/s" } # RA\nh = { value = "5 m" }\n'
    )
    assert (tmp_path / "w.toml.format-0").read_text() == old
    record.change(entries={"h": EntryRecord("6 m")})
    record.save()
    write(tmp_path, old)
    record.reload()
    record.change(entries={"h": EntryRecord("7 m")})
    record.save()
    copies = sorted(path.name for path in tmp_path.glob("w.toml.format-*"))
    assert copies == ["w.toml.format-0", "w.toml.format-0-2"]


@pytest.mark.parametrize("entries", ["entries = 3\n", "[entries]\nV = 3\n"])
def test_damaged_record_of_an_older_format_is_refused(tmp_path: Path, entries: str) -> None:
    """Migration repairs nothing: a wrong type is refused as in the newest format."""
    with pytest.raises(RecordError, match="must be a table, not a whole number"):
        load(tmp_path, f'format = 0\nworkbook = "w"\n{entries}')


def test_written_record_is_plain_toml(tmp_path: Path) -> None:
    """Any TOML reader reads what is written."""
    record = Record(tmp_path / "w.toml", "w")
    record.change(entries={"a b": EntryRecord("5'-6 1/2\" \\ \x7f\x00\té")})
    record.save()
    data = tomllib.loads(record.path.read_text(encoding="utf-8"))
    assert data["entries"]["a b"]["value"] == "5'-6 1/2\" \\ \x7f\x00\té"
