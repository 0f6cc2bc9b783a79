"""CSV files from spreadsheets: what is taken and what is refused, with its place."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING

import pytest

from calcbook.csvrows import Header, as_rows, read_cases, read_table
from calcbook.errors import InputError
from calcbook.record import RowRecord

if TYPE_CHECKING:
    from pathlib import Path

COLUMNS = {"z": True, "A": True, "use": False}
PLAIN = "Level,z (m),A [m2],use\nRoof,18.0,320,roof\nL2,8,412.5 m2,office\n"
ROWS = [
    RowRecord("Roof", {"z": "18.0 m", "A": "320 m2", "use": "roof"}),
    RowRecord("L2", {"z": "8 m", "A": "412.5 m2", "use": "office"}),
]


def write(folder: Path, text: str | bytes) -> Path:
    """Write a CSV file and return its path."""
    path = folder / "levels.csv"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return path


@pytest.mark.parametrize(
    "text",
    [
        PLAIN,
        "\ufeff" + PLAIN,
        PLAIN.replace("\n", "\r\n"),
        PLAIN.replace(",", ";"),
        PLAIN.replace(",", "\t"),
        PLAIN.rstrip("\n"),
        PLAIN.replace("\n", "\n\n") + ",,,\n",
        PLAIN.replace(",", " , "),
        PLAIN.replace("office", '"office"').replace("Level", '"Level, storey; a"'),
        PLAIN.replace("z (m)", "z").replace("18.0", "18.0 m").replace(",8,", ",8 m,"),
    ],
)
def test_spellings_of_one_table_give_the_same_rows(tmp_path: Path, text: str) -> None:
    """Byte order mark, line ends, delimiter, quotes and blank lines make no difference."""
    assert as_rows(read_table(write(tmp_path, text)), COLUMNS, "levels") == ROWS


def test_table_knows_headers_and_lines(tmp_path: Path) -> None:
    """A table keeps the units of its headers and the line each row begins in."""
    table = read_table(write(tmp_path, 'k,z ( ft ),n\nA,"1\n",\n\nB,-.5e1,two\n'))
    assert table.headers == (Header("k", ""), Header("z", "ft"), Header("n", ""))
    assert table.rows == ({"k": "A", "z": "1 ft", "n": ""}, {"k": "B", "z": "-.5e1 ft", "n": "two"})
    assert table.lines == (2, 5)


def test_key_is_never_given_a_unit(tmp_path: Path) -> None:
    """A key column may have brackets in its header; the keys stay as they are."""
    table = read_table(write(tmp_path, "level (no)\n1\n2\n"))
    assert as_rows(table, {}, "levels") == [RowRecord("1", {}), RowRecord("2", {})]


def test_source_column_becomes_the_source(tmp_path: Path) -> None:
    """A column named source fills the rows' source, unless the schedule has such a column."""
    table = read_table(write(tmp_path, "k,w,source\nslab,25 kN/m3,S-1\n"))
    assert as_rows(table, {"w": True}, "x") == [RowRecord("slab", {"w": "25 kN/m3"}, "S-1")]
    cells = {"w": "25 kN/m3", "source": "S-1"}
    assert as_rows(table, {"w": True, "source": False}, "x") == [RowRecord("slab", cells)]


def test_empty_cells_are_left_out(tmp_path: Path) -> None:
    """A cell with nothing in it is no cell of the row."""
    table = read_table(write(tmp_path, "k,z (m),use\nA,,x\nB,1,\n"))
    rows = as_rows(table, {"z": True, "use": False}, "levels")
    assert rows == [RowRecord("A", {"use": "x"}), RowRecord("B", {"z": "1 m"})]


def test_optional_columns_may_be_left_out(tmp_path: Path) -> None:
    """A column that is optional is no cell of a row; given, it is read as any other."""
    table = read_table(write(tmp_path, "k,z (m)\nA,1\n"))
    columns = {"z": True, "R": True}
    assert as_rows(table, columns, "x", ["R"]) == [RowRecord("A", {"z": "1 m"})]
    with pytest.raises(InputError, match="there is no column 'R'"):
        as_rows(table, columns, "x")
    unitless = read_table(write(tmp_path, "k,z (m),R\nA,1,5\n"))
    with pytest.raises(InputError, match="R"):
        as_rows(unitless, columns, "x", ["R"])


@pytest.mark.parametrize(
    ("text", "place", "message"),
    [
        ("", "", "the file is empty"),
        ("\ufeff\r\n;;\r\n", "", "the file is empty"),
        ("k,z\n", ", line 1", "headers and no rows"),
        ("k,,z\nA,1,2\n", ", line 1", "header 2 is empty"),
        ("\nk,z (m),z [ft]\nA,1,2\n", ", line 2", "the header 'z' stands twice"),
        ("k,z,u\nA,1\n", ", line 2, column 'z'", "not as many cells (2) as there are headers (3)"),
        ("k,z\nA,1\nB,1,5\n", ", line 3, column 'z'", "decimal point (1.5)"),
        ("k;z\nA;1\nB;1;5\n", ", line 3, column 'z'", "fill the row up"),
        ("k;z\nA;1,5\n", ", line 2, column 'z'", "write 1.5, with a point"),
        ("k;z\nA;-12,50 kN/m2\n", ", line 2, column 'z'", "write -12.50 kN/m2, with a point"),
        ('k,z\nA,"1,5"\n', ", line 2, column 'z'", "a comma in the number '1,5'"),
        ("k;z\nA;1,600\n", ", line 2, column 'z'", "1600 without the comma, or 1.600 with"),
        ("k;z\nA;1,600 m\n", ", line 2, column 'z'", "1600 m without the comma, or 1.600 m"),
        ("k,z\nA,1\n\n,2\n", ", line 4, column 'k'", "the row has no key"),
        ("k,z\nA,1\nB,1\nA,2\n", ", line 4, column 'k'", "'A' was used before, in line 2"),
        (b"k,z\nA,1\nB\xe9ton,2\n", ", line 3, byte 2", "CSV UTF-8"),
        ("k,z\nA,1\n".encode("utf-16"), ", line 1, byte 1", "not UTF-8"),
        ("k,z\nA,1\n".encode("utf-16-le"), "", "not UTF-8"),
        ('k,z\nA,"1\nB,2\n', ", line 2", "this is not CSV"),
    ],
)
def test_damaged_file_is_refused_with_its_place(
    tmp_path: Path, text: str | bytes, place: str, message: str
) -> None:
    """What is wrong in a file is said with line and column, and with what would be right."""
    with pytest.raises(InputError) as caught:
        read_table(write(tmp_path, text))
    assert caught.value.where == f"levels.csv{place}"
    assert message in str(caught.value)
    assert caught.value.hint


def test_commas_in_text_are_no_decimal_commas(tmp_path: Path) -> None:
    """Only a cell that is a number is looked at for its comma."""
    table = read_table(write(tmp_path, "k;note\nA;rooms 1,2\nB;1, 2\nC;1,234.5 m\n"))
    assert [row["note"] for row in table.rows] == ["rooms 1,2", "1, 2", "1,234.5 m"]


@pytest.mark.parametrize(
    ("text", "place", "message"),
    [
        ("k,z (m),Use,A (m2)\nA,1,x,2\n", ", line 1", "unknown column 'Use'\ndid you mean 'use'?"),
        ("k,z (m),use,A (m2),q\nA,1,x,2,3\n", ", line 1", "known here: z, A, use"),
        ("k,z (m),use\nA,1,x\n", ", line 1", "there is no column 'A'"),
        ("k,z,A (m2),use\nA,1 m,2,x\nB,3,4,x\n", ", line 3, column 'z'", "'3' has no unit"),
    ],
)
def test_columns_that_do_not_fit_are_refused(
    tmp_path: Path, text: str, place: str, message: str
) -> None:
    """Unknown and missing columns and missing units name the schedule, the file and the place."""
    with pytest.raises(InputError) as caught:
        as_rows(read_table(write(tmp_path, text)), COLUMNS, "schedule levels")
    assert caught.value.where == f"schedule levels, levels.csv{place}"
    assert message in str(caught.value)


def test_folder_is_refused(tmp_path: Path) -> None:
    """A folder in place of a file is called one, and a file is asked for."""
    with pytest.raises(InputError, match=r"is a folder\nname a CSV file"):
        read_table(tmp_path)


def test_missing_file_is_refused(tmp_path: Path) -> None:
    """A path without a file is named."""
    with pytest.raises(InputError, match=r"gone\.csv: there is no such file"):
        read_table(tmp_path / "gone.csv")


def test_cases_are_rows_without_a_key(tmp_path: Path) -> None:
    """A file of cases gives one set of entries per row; equal rows are welcome."""
    path = write(tmp_path, "V (m/s);roof;C\n70;flat;0.8\n70;flat;0.8\n150 mph;gable;1\n")
    found = read_cases(path, {"V": True, "roof": False, "C": False, "h": True})
    assert len(found) == 3
    assert {name: list(cells) for name, cells in found.entries.items()} == {
        "V": ["70 m/s", "70 m/s", "150 mph"], "roof": ["flat", "flat", "gable"],
        "C": ["0.8", "0.8", "1"],
    }  # fmt: skip
    assert [str(header) for header in found.headers] == ["V (m/s)", "roof", "C"]
    assert found.given[0] == ("70", "70", "150 mph")


@pytest.mark.parametrize(
    ("text", "place", "message"),
    [
        ("V,C\n70 m/s,1\n70,1\n", ", line 3, column 'V'", "'70' has no unit"),
        ("V (m/s),C\n70,1\n,1\n", ", line 3, column 'V'", "the cell is empty"),
        ("W (m/s)\n70\n", ", line 1", "unknown column 'W'"),
        ("V (m/s),C\n70\n", ", line 2, column 'V'", "not as many cells (1)"),
        ("V (m/s);C\n70;0,8\n", ", line 2, column 'C'", "a comma in the number '0,8'"),
    ],
)
def test_cases_that_do_not_fit_are_refused(
    tmp_path: Path, text: str, place: str, message: str
) -> None:
    """An unknown entry, an empty cell, a missing unit: each with its line and column."""
    with pytest.raises(InputError) as caught:
        read_cases(write(tmp_path, text), {"V": True, "C": False})
    assert caught.value.where == f"levels.csv{place}"
    assert message in str(caught.value)


def test_100_000_cases_are_read_in_seconds(tmp_path: Path) -> None:
    """A hundred thousand cases of six entries are read within a few seconds, last row right."""
    lines = "".join(f"{i % 90}.5,3.5 kN/m2,0.85,{i},gable,1e3\n" for i in range(100_000))
    path = write(tmp_path, f"V (m/s),w,C,n,roof,F (N)\n{lines}")
    names = {"V": True, "w": True, "C": False, "n": False, "roof": False, "F": True}
    start = time.perf_counter()
    cases = read_cases(path, names)
    assert time.perf_counter() - start < 5
    last = {name: cells[-1] for name, cells in cases.entries.items()}
    assert (len(cases), last["n"], last["V"]) == (100_000, "99999", "9.5 m/s")
