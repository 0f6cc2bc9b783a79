"""A block of a spreadsheet put into the rows of a schedule, all of it or nothing."""

from __future__ import annotations

import copy
import re
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from calcbook.errors import CalcbookError, InputError
from calcbook.items import Carry
from calcbook.live import fieldtext
from calcbook.live.blocks import shown_columns
from calcbook.record import RowRecord
from calcbook.workbook import entered_columns

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

    from calcbook.items import Item
    from calcbook.workbook import Workbook

NOTHING = "nothing of the block was pasted"


class Target:
    """The schedule a block is pasted into.

    Parameters
    ----------
    book
        The workbook.
    item
        The schedule as its statement has it.
    """

    def __init__(self, book: Workbook, item: Mapping[str, Any]) -> None:
        self.book, self.name = book, str(item["name"])
        self.brought = item["from"] is not None and not item["fallback"]
        entered = entered_columns(book.schedule_item(self.name))
        self.columns: dict[str, Item] = {
            c["name"]: entered[c["name"]] for c in shown_columns(item)
            if c["name"] in entered
            and not (self.brought and isinstance(entered[c["name"]], Carry))
        }  # fmt: skip

        told = {c["name"]: {c["name"], c["meaning"]} for c in item["columns"]} | {"": {item["key"]}}
        self.headings = {name: {text.casefold() for text in words} for name, words in told.items()}

    def is_heading(self, order: Sequence[str], line: Sequence[str]) -> bool:
        """Whether a line has the headings of its columns, with or without a unit in brackets."""
        bare = [re.sub(r"\s*\([^()]*\)$", "", cell).casefold() for cell in line]
        pairs = zip(order, bare, strict=False)
        return all(text in self.headings[column] for column, text in pairs)

    def order(self, first: str, width: int) -> list[str]:
        """Return the columns a block of this width fills from the first on; '' is the key."""
        every = [*([] if self.brought else [""]), *self.columns]
        if first not in every:
            raise InputError(f"the column '{first}' is not typed here", hint=NOTHING)
        found = every[every.index(first) :]
        if width > len(found):
            raise InputError(
                f"the block has {width} columns, and only {len(found)} are typed from here on",
                hint=f"they are: {', '.join(name or 'the key' for name in found)}; {NOTHING}",
            )
        return found[:width]

    def accept(self, column: str, text: str) -> str:
        """Read a cell as it would be stored; raises CalcbookError where it is refused."""
        item = self.columns[column]
        if not text and not fieldtext.is_words(item):
            raise InputError("the cell is empty", hint="fill it, or paste a smaller block")
        bare = fieldtext.display_unit(item, self.book.system)
        unit = bare if fieldtext.is_quantity(item) else None
        return self.book.accept_cell(self.name, column, text, bare=unit)


@dataclass
class Pasted:
    """What was pasted: columns by key, the rows that have another key now, how many cells."""

    columns: dict[str, set[str]] = field(default_factory=dict)
    renamed: list[tuple[RowRecord, str]] = field(default_factory=list)
    cells: int = 0


def paste(
    target: Target, rows: list[RowRecord], at: tuple[str, str], block: Sequence[Sequence[str]]
) -> Pasted:
    """Put a block into rows, from (key, column) on; the rows are changed in place.

    A first line with the headings of its columns, as a spreadsheet has it, is left out.
    Raises InputError, naming the first bad cell; the rows are then as they were.
    """
    lines = _trimmed(block)
    order = target.order(at[1], max(map(len, lines), default=0))
    if len(lines) > 1 and target.is_heading(order, lines[0]):
        lines = lines[1:]
    start = next((n for n, row in enumerate(rows) if row.key == at[0]), None)
    if start is None:
        raise InputError(f"there is no row '{at[0]}' any more", hint="run this cell again")
    changed = copy.deepcopy(rows)
    _lengthen(target, changed, start + len(lines))
    found = Pasted()
    for row, line in zip(changed[start:], lines, strict=False):
        former = row.key
        for column, text in zip(order, line, strict=False):
            _put(target, row, column, text)
        found.columns[row.key] = set(order[: len(line)])
        found.cells += len(line)
        if row.key != former:
            found.renamed.append((row, former))
    _refuse_twice(changed, set(found.columns))
    rows[:] = changed
    return found


def new_key(keys: Iterable[str]) -> str:
    """Return a key that no row has yet: 'new', 'new 2' and so on."""
    taken, number = set(keys), 1
    key = "new"
    while key in taken:
        number += 1
        key = f"new {number}"
    return key


def _trimmed(block: Sequence[Sequence[str]]) -> list[list[str]]:
    """Return the cells without blanks around them, and without empty lines at the end."""
    lines = [[cell.strip() for cell in line] for line in block]
    while lines and not any(lines[-1]):
        lines.pop()
    if not lines:
        raise InputError("there is nothing to paste", hint="copy cells in the spreadsheet first")
    return lines


def _lengthen(target: Target, rows: list[RowRecord], count: int) -> None:
    if count > len(rows) and target.brought:
        raise InputError(
            f"the block is {count - len(rows)} rows too long; the rows come from another workbook",
            hint=NOTHING,
        )
    while count > len(rows):
        rows.append(RowRecord(new_key(row.key for row in rows), {}))


def _put(target: Target, row: RowRecord, column: str, text: str) -> None:
    if not column:
        if not text:
            raise InputError(f"row {row.key}: the key is empty", hint=f"{NOTHING}")
        row.key = text
        return
    try:
        stored = target.accept(column, text)
    except CalcbookError as error:
        hint = "; ".join(part for part in (error.hint, NOTHING) if part)
        raise InputError(f"row {row.key}, {column}: '{text}': {error.what}", hint=hint) from error
    if row.cells.get(column) != stored:
        row.source = ""
    row.cells[column] = stored


def _refuse_twice(rows: Sequence[RowRecord], pasted: set[str]) -> None:
    seen: set[str] = set()
    for row in rows:
        if row.key in seen and row.key in pasted:
            raise InputError(f"two rows would be called '{row.key}'",
                             hint=f"give each row its own key; {NOTHING}")  # fmt: skip
        seen.add(row.key)
