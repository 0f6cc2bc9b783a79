"""Rows from spreadsheets: CSV files read strictly, every refusal with file, line and column.

Accepted: UTF-8 with or without a byte order mark, any line ends, columns parted by ',' or ';' or
tabs. A header may carry a unit, ``z (m)`` or ``z [m]``, which is put behind the bare numbers below.
"""

from __future__ import annotations

import csv
import io
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from calcbook.diskfile import in_plain_words
from calcbook.errors import InputError, near_match
from calcbook.quantities import comma_hint
from calcbook.recordform import RowRecord

if TYPE_CHECKING:
    from collections.abc import Collection, Iterable, Mapping, Sequence
    from pathlib import Path

_HEADER = re.compile(r"(?P<name>.*?\S)\s*(?:\((?P<round>[^()]*)\)|\[(?P<square>[^\[\]]*)\])")
_BARE = re.compile(r"[-+]?(?:\d+\.?\d*|\.\d+)(?:[eE][-+]?\d+)?")
_WITH_COMMA = re.compile(r"[-+]?\d+,\d+(?:[eE][-+]?\d+)?(?:\s*[^\s\d,]\S*)?")
_SOURCE = "source"
_UNIT_HINT = "put the unit into the header, as in 'z (m)', or into each cell"


@dataclass(frozen=True)
class Header:
    """The name of a column and the unit of its bare numbers ('' when it has none)."""

    name: str
    unit: str

    def __str__(self) -> str:
        """Return the header as it is written."""
        return f"{self.name} ({self.unit})" if self.unit else self.name


@dataclass(frozen=True)
class CsvTable:
    """A CSV file: its headers (the first is the key's), its rows, and where each row stood."""

    name: str
    headers: tuple[Header, ...]
    rows: tuple[dict[str, str], ...]
    lines: tuple[int, ...]


@dataclass(frozen=True)
class CaseTable:
    """A CSV file with one case per row.

    ``given`` holds each column as it stands in the file, ``entries`` the same cells by the name of
    their entry, with the unit of the header behind bare numbers.
    """

    headers: tuple[Header, ...]
    given: tuple[Sequence[str], ...]
    entries: dict[str, Sequence[str]]

    def __len__(self) -> int:
        """Return the number of cases."""
        return len(self.given[0])


def read_table(path: Path) -> CsvTable:
    """Read rows whose first column is their key; units of headers are put into the cells.

    Raises
    ------
    InputError
        No file, not UTF-8, an empty file, an empty or repeated header, a ragged row, a row
        without a key or with a key used before, a comma in a number.
    """
    headers, rows, lines = _read(path)
    seen: dict[str, int] = {}
    for row, line in zip(rows, lines, strict=True):
        key, first = row[0], headers[0].name
        if not key:
            raise _error(path.name, "the row has no key", line, first, "give each row a key")
        if key in seen:
            what = f"the key '{key}' was used before, in line {seen[key]}"
            raise _error(path.name, what, line, first, "give each row a key of its own")
        seen[key] = line
    names = [header.name for header in headers]
    keys, *others = zip(*rows, strict=True)
    units = [header.unit for header in headers[1:]]
    columns = [keys, *(_with_unit(c, unit) for c, unit in zip(others, units, strict=True))]
    found = tuple(dict(zip(names, cells, strict=True)) for cells in zip(*columns, strict=True))
    return CsvTable(path.name, headers, found, tuple(lines))


def as_rows(
    table: CsvTable, columns: Mapping[str, bool], where: str, optional: Collection[str] = ()
) -> list[RowRecord]:
    """Return the rows of a schedule; empty cells are left out.

    Parameters
    ----------
    table
        What was read; a column 'source' that the schedule does not have becomes the rows' source.
    columns
        The columns the engineer supplies, and whether each needs a unit.
    where
        The place named in errors, such as ``schedule levels``.
    optional
        The columns that may be left out of the file.

    Raises
    ------
    InputError
        An unknown or a missing column, or a number without the unit it needs.
    """
    names = [header.name for header in table.headers[1:]]
    with_source = _SOURCE in names and _SOURCE not in columns
    try:
        _check_known(table.name, (n for n in names if n != _SOURCE or not with_source), columns)
        missing = [name for name in columns if name not in names and name not in optional]
        if missing:
            hint = f"the columns are: the key, {', '.join(columns)}"
            raise _error(table.name, f"there is no column '{missing[0]}'", 1, "", hint)
        for name, needs_unit in columns.items():
            if needs_unit and name in names:
                _check_units(table.name, name, [row[name] for row in table.rows], table.lines)
    except InputError as error:
        raise error.at(where) from None
    return [
        RowRecord(
            row[table.headers[0].name],
            {name: row[name] for name in columns if row.get(name)},
            row[_SOURCE] if with_source else "",
        )
        for row in table.rows
    ]


def read_cases(path: Path, names: Mapping[str, bool]) -> CaseTable:
    """Read one case per row; the columns are entries, none of them a key.

    Parameters
    ----------
    path
        The file; it may have 100,000 rows and more.
    names
        The entries there are, and whether each needs a unit; a file may name any of them.

    Raises
    ------
    InputError
        As `read_table`, an unknown entry, an empty cell, a number without the unit it needs.
    """
    headers, rows, lines = _read(path)
    _check_known(path.name, (header.name for header in headers), names)
    given = tuple(zip(*rows, strict=True))
    entries = {}
    for header, cells in zip(headers, given, strict=True):
        if "" in cells:
            line = lines[cells.index("")]
            hint = "write the value, or leave the whole column out to keep the value on record"
            raise _error(path.name, "the cell is empty", line, header.name, hint)
        full = _with_unit(cells, header.unit)
        if names[header.name] and not header.unit:
            _check_units(path.name, header.name, full, lines)
        entries[header.name] = full
    return CaseTable(headers, given, entries)


def _read(path: Path) -> tuple[tuple[Header, ...], list[list[str]], list[int]]:
    """Return headers, stripped rows and the line each row begins in; at least one row."""
    text = _text(path)
    delimiter = _delimiter(text)
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, strict=True)
    rows: list[list[str]] = []
    lines: list[int] = []
    begins = 1
    try:
        for row in reader:
            cells = [cell.strip() for cell in row]
            if any(cells):
                rows.append(cells)
                lines.append(begins)
            begins = reader.line_num + 1
    except csv.Error as error:
        hint = "save the file as CSV again from the spreadsheet"
        raise _error(path.name, f"this is not CSV: {error}", begins, "", hint) from error
    if not rows:
        hint = "write the headers in the first line and one row in each line below"
        raise InputError("the file is empty", hint=hint, where=path.name)
    headers = _headers(path.name, rows[0], lines[0])
    if len(rows) == 1:
        raise _error(path.name, "there are headers and no rows", lines[0], "", "add the rows")
    _check_shape(path.name, headers, rows[1:], lines[1:], delimiter)
    return headers, rows[1:], lines[1:]


def _text(path: Path) -> str:
    if path.is_dir():
        raise InputError(f"'{path}' is a folder", hint="name a CSV file, for example levels.csv")
    with in_plain_words(path, InputError):
        data = path.read_bytes()
    hint = "save it from the spreadsheet as 'CSV UTF-8'"
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        column = error.start - data.rfind(b"\n", 0, error.start)
        where = f"{path.name}, line {line}, byte {column}"
        raise InputError("the file is not UTF-8 text", hint=hint, where=where) from error
    if "\0" in text:
        raise InputError("the file is not UTF-8 text", hint=hint, where=path.name)
    return text


def _delimiter(text: str) -> str:
    """Return the delimiter the first line that says something has most of."""
    first = next((line for line in text.splitlines() if line.strip(" ,;\t")), "")
    outside = re.sub(r'"[^"]*"|\([^()]*\)|\[[^\[\]]*\]', "", first)
    return max(";\t,", key=outside.count)


def _headers(name: str, cells: Sequence[str], line: int) -> tuple[Header, ...]:
    headers: dict[str, Header] = {}
    for number, cell in enumerate(cells, start=1):
        found = _HEADER.fullmatch(cell)
        unit = (found["round"] or found["square"] or "").strip() if found else ""
        header = Header(found["name"] if found else cell, unit)
        if not cell:
            raise _error(name, f"header {number} is empty", line, "", "name every column")
        if header.name in headers:
            hint = "give each column a name of its own"
            raise _error(name, f"the header '{header.name}' stands twice", line, "", hint)
        headers[header.name] = header
    return tuple(headers.values())


def _check_shape(
    name: str,
    headers: Sequence[Header],
    rows: Sequence[Sequence[str]],
    lines: Sequence[int],
    delimiter: str,
) -> None:
    for row, line in zip(rows, lines, strict=True):
        if len(row) != len(headers):
            what = f"the row has not as many cells ({len(row)}) as there are headers "
            what += f"({len(headers)})"
            hint = "fill the row up, with empty cells where there is nothing"
            if len(row) > len(headers) and delimiter == ",":
                hint = "write numbers with a decimal point (1.5), text with commas in quotes"
            raise _error(name, what, line, headers[min(len(row), len(headers)) - 1].name, hint)
    for header, cells in zip(headers, zip(*rows, strict=True), strict=True):
        for cell, line in zip(cells, lines, strict=True):
            if "," in cell and _WITH_COMMA.fullmatch(cell):
                what = f"there is a comma in the number '{cell}'"
                raise _error(name, what, line, header.name, comma_hint(cell))


def _with_unit(cells: Sequence[str], unit: str) -> Sequence[str]:
    if not unit:
        return cells
    bare = _BARE.fullmatch
    return [f"{cell} {unit}" if bare(cell) else cell for cell in cells]


def _check_known(name: str, found: Iterable[str], known: Iterable[str]) -> None:
    known = list(known)
    for column in found:
        if column not in known:
            hint = near_match(column, known) or f"known here: {', '.join(known)}"
            raise _error(name, f"unknown column '{column}'", 1, "", hint)


def _check_units(name: str, column: str, cells: Sequence[str], lines: Sequence[int]) -> None:
    for cell, line in zip(cells, lines, strict=True):
        if _BARE.fullmatch(cell):
            raise _error(name, f"'{cell}' has no unit", line, column, _UNIT_HINT)


def _error(name: str, what: str, line: int, column: str, hint: str) -> InputError:
    place = f"{name}, line {line}" + (f", column '{column}'" if column else "")
    return InputError(what, hint=hint, where=place)
