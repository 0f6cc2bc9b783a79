"""Rows of schedules typed, added, moved, removed, confirmed, and pasted from a spreadsheet."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.errors import InputError
from calcbook.live import pasting
from calcbook.live.changes import Changing
from calcbook.live.merging import copied
from calcbook.record import RowRecord, row_digest
from calcbook.wording import counted
from calcbook.workbook import own_columns

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from calcbook import units

    Rows = list[RowRecord]


class RowChanging(Changing):
    """A workbook whose schedules are typed."""

    def enter_cell(
        self, schedule: str, key: str, column: str, text: str, *, bare: units.Unit | None = None
    ) -> None:
        """Take a typed cell of a schedule; raises CalcbookError when it is refused.

        The row is confirmed if it was, or when all of its cells were typed here.
        """
        stored = self.book.accept_cell(schedule, column, text, bare=bare)
        rows = self._rows(schedule)
        stood = self._standing(rows)
        _put_cell(_row(rows, key), column, stored)
        words = f"{key}, {column} = {stored}"
        self._change_typed(schedule, words, rows, stood, {key: {column}})

    def step_cell(
        self, schedule: str, key: str, column: str, text: str, *, bare: units.Unit | None = None
    ) -> None:
        """Take a cell moved by arrow keys, as ``enter_cell`` does; its row is not confirmed."""
        stored = self.book.accept_cell(schedule, column, text, bare=bare)
        rows = self._rows(schedule)
        row = _row(rows, key)
        _put_cell(row, column, stored)
        row.confirmed = None
        self._typed.get((schedule, key), set()).discard(column)
        words = f"{key}, {column} = {stored}"
        self._change(words, {("schedules", schedule): rows}, stepped=True)

    def rename_row(self, schedule: str, key: str, new: str) -> None:
        """Give a row another key."""
        new = new.strip()
        if not new:
            raise InputError("a row needs a key", hint="type the name it has on the drawings")
        rows = self._rows(schedule)
        if any(row.key == new for row in rows):
            raise InputError(f"there is a row '{new}' already", hint="give each row its own key")
        stood = {new if k == key else k for k in self._standing(rows)}
        _row(rows, key).key = new
        typed = {new: self._typed.pop((schedule, key), set()) | {""}}
        self._change_typed(schedule, f"row {key} renamed {new}", rows, stood, typed)

    def add_row(self, schedule: str, below: str | None) -> None:
        """Put a new row below one, or first."""
        rows = self._rows(schedule)
        keys = [row.key for row in rows]
        new = pasting.new_key(keys)
        rows.insert(keys.index(below) + 1 if below in keys else 0, RowRecord(new, {}))
        self._change(f"row {new} added", {("schedules", schedule): rows})

    def remove_row(self, schedule: str, key: str) -> None:
        """Take a row out."""
        rows = self._rows(schedule)
        rows.remove(_row(rows, key))
        self._typed.pop((schedule, key), None)
        self._change(f"row {key} removed", {("schedules", schedule): rows})

    def move_row(self, schedule: str, key: str, by: int) -> None:
        """Move a row down by so many places, up where negative, at most to the end."""
        rows = self._rows(schedule)
        row = _row(rows, key)
        place = rows.index(row)
        to = min(max(place + by, 0), len(rows) - 1)
        if to == place:
            return
        rows.insert(to, rows.pop(place))
        words = f"row {key} moved {'down' if to > place else 'up'}"
        self._change(words, {("schedules", schedule): rows})

    def confirm_row(self, schedule: str, key: str, *, yes: bool) -> None:
        """Confirm a row as it is, or take the confirmation back."""
        rows = self._rows(schedule)
        row = _row(rows, key)
        row.confirmed = self.signer().sign(row_digest(row)) if yes else None
        words = f"row {key} confirmed" if yes else f"row {key} not confirmed"
        self._change(words, {("schedules", schedule): rows})

    def set_row_source(self, schedule: str, key: str, text: str) -> None:
        """Say where a row comes from; whether it is confirmed stays as it is."""
        rows = self._rows(schedule)
        _row(rows, key).source = " ".join(text.split())
        self._change(f"source of row {key}", {("schedules", schedule): rows})

    def paste(self, schedule: str, key: str, column: str, block: Sequence[Sequence[str]]) -> None:
        """Paste a block of a spreadsheet, its first cell at this row and column.

        It fills the columns that are typed, left to right from ``column`` ('' is the key), and
        goes on in new rows at the end. A bare number takes the unit of its heading. All of it is
        one step of undo.

        Raises
        ------
        InputError
            A cell is refused, the block is too wide or too long, a key stands twice; the first
            bad cell is named and nothing is changed.
        """
        item = next(i for p in self.statement["parts"] if p["kind"] == "section"
                    for i in p["items"] if i.get("name") == schedule)  # fmt: skip
        target = pasting.Target(self.book, item)
        rows = self._rows(schedule)
        stood = self._standing(rows)
        typed = pasting.paste(target, rows, (key, column), block)
        stood |= {row.key for row, former in typed.renamed if former in stood}
        count = counted(typed.cells, "cell")
        self._change_typed(schedule, f"{count} pasted", rows, stood, typed.columns)

    # --- how it is done ---------------------------------------------------------------------

    def _rows(self, schedule: str) -> Rows:
        """Return a copy of the rows in force: the record's, else the template's.

        Of rows brought forward it is those of the source, each with what is entered here for it.
        """
        own = own_columns(self.book, schedule)
        given = self.book.readings.given_rows.get(schedule, [])
        rows = list(copied(self.record.schedules.get(schedule) or []))
        brought = schedule in self.book.readings.carried
        if schedule in self.record.schedules and not brought:
            return rows
        kept = {row.key: row for row in rows}
        return [
            kept.get(r.key)
            or RowRecord(r.key, {n: t for n, t in r.cells.items() if n in own}, r.source)
            for r in given
        ]

    def _standing(self, rows: Rows) -> set[str]:
        """Return the keys of the rows that are confirmed."""
        job = self.signer().job
        return {row.key for row in rows if job and self.record.is_confirmed(row, job)}

    def _change_typed(
        self, schedule: str, words: str, rows: Rows, stood: set[str],
        typed: Mapping[str, set[str]],
    ) -> None:  # fmt: skip
        """Change rows that were typed in: by key, the columns ('' is the key itself).

        Each is confirmed if it stood confirmed, and when all of it was typed here.
        """
        signer = self.signer()
        every = set(own_columns(self.book, schedule))
        so_far = {
            key: self._typed.get((schedule, key), set()) | columns
            for key, columns in typed.items()
        }  # fmt: skip
        for key, columns in so_far.items():
            row = _row(rows, key)
            if key in stood or every <= columns:
                row.confirmed = signer.confirm(row_digest(row))
        self._change(words, {("schedules", schedule): rows})
        self._typed |= {(schedule, key): columns for key, columns in so_far.items()}


def _put_cell(row: RowRecord, column: str, stored: str) -> None:
    """Set a cell; another value does not keep the row's source."""
    if row.cells.get(column) != stored:
        row.source = ""
    row.cells[column] = stored


def _row(rows: Rows, key: str) -> RowRecord:
    for row in rows:
        if row.key == key:
            return row
    raise InputError(f"there is no row '{key}' any more", hint="run this cell again")
