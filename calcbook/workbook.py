"""A workbook: sections in order, their inputs, and their evaluation.

A ``Workbook`` knows no file, kernel or screen. The runner gives it its inputs and tells it,
through ``on_show``, what to do when a section is complete.
"""

from __future__ import annotations

import copy
from typing import TYPE_CHECKING, Any

from calcbook.bind import Binder, Bound, by_name, used_by
from calcbook.errors import CalcbookError, DeclarationError, InputError, near_match
from calcbook.inputs import Inputs, Reader, Readings, read_value
from calcbook.items import Carry, Choice, Entry, Schedule, Text
from calcbook.program import Program, Results
from calcbook.section import Section

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping, Sequence

    from calcbook import units
    from calcbook.codes import CodeSet
    from calcbook.items import Item

ENGINE = "0.1.0"
SYSTEMS = ("SI", "US")


def _show_nothing(_: Section) -> None:
    return None


class Workbook:
    """The calculations one notebook declares, for one filling.

    Parameters
    ----------
    name
        The workbook's identity: its records are named after it.
    title
        The heading on paper.
    code
        The code set whose clauses and tables it uses.
    system
        'SI' or 'US': the units results are shown in.
    mark
        The filling, named as on the drawings, for a workbook with marks.
    signs
        The sign conventions: what is positive, by quantity ({'pressure': 'toward the surface'}).

    Attributes
    ----------
    has_marks
        It is meant for several fillings, one for each mark of the drawings.
    """

    engine = ENGINE

    def __init__(
        self,
        name: str,
        title: str,
        *,
        code: CodeSet,
        system: str = "SI",
        mark: str | None = None,
        signs: Mapping[str, str] | None = None,
        inputs: Inputs | None = None,
    ) -> None:
        if system not in SYSTEMS:
            raise DeclarationError(f"there is no unit system '{system}'", hint="SI or US")
        self.name, self.title, self.mark = name, title, mark
        self.code, self.system = code, system
        self.signs = dict(signs or {})
        self.inputs = inputs or Inputs()
        self.sections: list[Section] = []
        self.on_show: Callable[[Section], None] = _show_nothing
        self._cells: dict[str, list[Section]] = {}
        self.has_marks = False
        self._stale = True
        self.cell = ""

    # --- declaring --------------------------------------------------------------------------

    def section(self, title: str, *, when: str = "") -> Section:
        """Open a section; used as ``with book.section("Velocity pressure") as s:``.

        A title that was declared before is replaced in place when the block ends. ``when`` is a
        condition: while it does not hold nothing in the section is applied.
        """
        return Section(title, when, self.code, self.system, self._finish)

    def _finish(self, section: Section, error: BaseException | None) -> None:
        if error is not None:
            return
        self._make_room()
        same = next((n for n, s in enumerate(self.sections) if s.title == section.title), None)
        if same is not None:
            self.sections[same] = section
        elif self._room is not None:
            self.sections.insert(self._room, section)
            self._room += 1
        else:
            self.sections.append(section)
        if self.cell:
            self._cells.setdefault(self.cell, []).append(section)
        self._stale = True
        self.on_show(section)

    @property
    def cell(self) -> str:
        """The id of the notebook cell that runs, '' where there are none; set as it starts."""
        return self._cell

    @cell.setter
    def cell(self, cell: str) -> None:
        self._cell = cell
        self._room: int | None = None
        self._fresh = True

    def _make_room(self) -> None:
        """Take out what the running cell declared before, so that its new sections stand there."""
        if not self._fresh:
            return
        self._fresh = False
        former = self._cells.pop(self.cell, [])
        places = [n for n, s in enumerate(self.sections) if s in former]
        if places:
            self._room = places[0]
            self.sections = [s for s in self.sections if s not in former]

    def mark_left_over(self, cells: Iterable[str]) -> None:
        """Mark the sections whose cells are no longer in the notebook, until a fresh run."""
        kept = [section for cell in cells for section in self._cells.get(cell, ())]
        known = [section for sections in self._cells.values() for section in sections]
        for section in self.sections:
            section.left_over = section in known and section not in kept

    def filled(self, mark: str | None, inputs: Inputs) -> Workbook:
        """Return the same declarations for another filling; neither changes the other."""
        other = copy.copy(self)
        other.mark, other.inputs = mark, inputs
        other.sections = list(self.sections)
        return other

    def up_to(self, title: str) -> Workbook:
        """Return the same workbook with its sections up to this one, as its cell leaves it."""
        other = self.filled(self.mark, self.inputs)
        titles = [section.title for section in self.sections]
        other.sections = self.sections[: titles.index(title) + 1] if title in titles else []
        other._stale = True  # noqa: SLF001  of its own class
        return other

    # --- evaluating -------------------------------------------------------------------------

    def evaluate(self) -> None:
        """Bind what was declared since the last time, read the inputs and compute everything."""
        if self._stale:
            self._bind()
        self.readings: Readings = Reader(self.inputs).read(self.bound)
        found = self.readings
        self.results: Results = self.program.evaluate(
            found.values, found.rows, found.problems, found.row_problems, found.keys
        )
        for bound in self.bound:
            if bound.lacks:
                self.results.problems[bound.number] = bound.lacks

    def _bind(self) -> None:
        binder = Binder(self.name, self.code.name, self.sections)
        self.bound: list[Bound] = binder.bind()
        self.scope = dict(by_name(self.bound))
        self.used_by = used_by(self.bound, self.scope)
        self.program = Program(self.bound, binder.scope, array=False)
        self._types = binder.scope
        self._stale = False

    def many(self) -> Program:
        """Return the workbook compiled for many cases at once (see ``calcbook.cases``)."""
        if self._stale:
            self._bind()
        return Program(self.bound, self._types, array=True)

    def statement(self) -> dict[str, Any]:
        """Evaluate and return the statement: plain data, without the notebook's prose."""
        from calcbook.statement import Writer  # noqa: PLC0415  statement builds on workbook

        self.evaluate()
        return Writer(self).write()

    # --- looking items up -------------------------------------------------------------------

    def items(self) -> list[Item]:
        """Return every declared item, those of other code sets included."""
        return [item for section in self.sections for item in section.items]

    def input_item(self, name: str) -> Entry | Choice | Text | Carry:
        """Return the item an entry is typed for.

        Raises InputError with the nearest name when there is none, or it is no input.
        """
        known = {i.name: i for i in self.items() if isinstance(i, (Entry, Choice, Text, Carry))}
        if name in known:
            return known[name]
        for schedule in (i for i in self.items() if isinstance(i, Schedule)):
            if name == schedule.name or any(name == c.name for c in schedule.columns):
                what = "a schedule" if name == schedule.name else f"a column of {schedule.name}"
                raise InputError(
                    f"{name} is {what} and has rows",
                    where=self.name,
                    hint=f"give them with --rows {schedule.name}=FILE.csv",
                )
        if any(i.name == name for i in self.items()):
            raise InputError(
                f"{name} is computed by this workbook and cannot be set", where=self.name
            )
        supplied = [n for n, item in known.items() if self._is_supplied(item)]
        hint = near_match(name, known) or f"entries are {', '.join(supplied) or 'none'}"
        raise InputError(f"there is no entry '{name}'", where=self.name, hint=hint)

    def schedule_item(self, name: str) -> Schedule:
        """Return the schedule of a name; InputError with the nearest name when there is none."""
        known = {i.name: i for i in self.items() if isinstance(i, Schedule)}
        if name not in known:
            supplied = [n for n, item in known.items() if self._is_supplied(item)]
            hint = near_match(name, known) or f"schedules are {', '.join(supplied) or 'none'}"
            raise InputError(f"there is no schedule '{name}'", where=self.name, hint=hint)
        return known[name]

    def _is_supplied(self, item: Item) -> bool:
        """Whether an item belongs to this code set and is supplied here, not brought forward."""
        elsewhere = isinstance(item, Carry)
        if isinstance(item, Schedule):
            elsewhere = bool(item.same_rows or item.origin or item.fixed)
        return not elsewhere and (not item.codes or self.code.name in item.codes)

    def not_used(self) -> list[str]:
        """Return the names of inputs given that belong to another code set."""
        here = {i.name for i in self.items() if not i.codes or self.code.name in i.codes}
        every = {i.name for i in self.items()}
        given = (*self.inputs.entries, *self.inputs.rows)
        found = [n for n in given if n in every and n not in here]
        for schedule in (i for i in self.items() if isinstance(i, Schedule)):
            cells = {c for row in self.inputs.rows.get(schedule.name, ()) for c in row.cells}
            others = (c for c in schedule.columns if c.codes and self.code.name not in c.codes)
            found += [f"{schedule.name}, {c.name}" for c in others if c.name in cells]
        return found

    def refuse_unknown(self) -> None:
        """Raise InputError for the first input given that no item of the workbook takes."""
        for name in self.inputs.entries:
            self.input_item(name)
        for name, rows in self.inputs.rows.items():
            columns = entered_columns(self.schedule_item(name))
            for row in rows:
                for cell in row.cells:
                    if cell not in columns:
                        raise InputError(
                            f"schedule {name} has no column '{cell}' to enter",
                            where=f"{self.name}, row {row.key}",
                            hint=near_match(cell, columns) or f"columns are {', '.join(columns)}",
                        )

    def accept(self, name: str, text: str, *, bare: units.Unit | None = None) -> str:
        """Read one entry as it would be stored; returns the text to store.

        Raises the reason it is refused, with the workbook and the name in front.
        """
        item = self.input_item(name)
        try:
            value = read_value(item, text, bare=bare)
        except CalcbookError as error:
            raise error.at(self.name) from None
        return value if isinstance(value, str) else value.text

    def accept_cell(
        self, schedule: str, column: str, text: str, *, bare: units.Unit | None = None
    ) -> str:
        """Read one cell of a schedule as it would be stored; raises as ``accept`` does."""
        columns = entered_columns(self.schedule_item(schedule))
        if column not in columns:
            hint = near_match(column, columns) or f"columns are {', '.join(columns)}"
            raise InputError(
                f"schedule {schedule} has no column '{column}' to enter", where=self.name, hint=hint
            )
        value: units.Quantity | str = read_value(columns[column], text, bare=bare)
        return value if isinstance(value, str) else value.text


def own_columns(book: Workbook, name: str) -> dict[str, Item]:
    """Return the columns of a schedule that are filled in here, as its rows stand now.

    Where they are brought forward, the columns that come with them are filled in at their source.
    """
    columns = entered_columns(book.schedule_item(name))
    if name not in book.readings.carried:
        return columns
    return {n: item for n, item in columns.items() if not isinstance(item, Carry)}


def entered_columns(schedule: Schedule) -> dict[str, Item]:
    """Return the columns of a schedule the engineer fills in, by name."""
    kinds = (Entry, Choice, Text, Carry)
    return {c.name: c for c in schedule.columns if isinstance(c, kinds)}


def first_problem(book: Workbook, names: Sequence[str]) -> str:
    """Return why the first of these inputs has no value, or ''."""
    for name in names:
        rows = book.readings.row_problems.get(name, [])
        found = next((p for p in (book.readings.problems.get(name, ""), *rows) if p), "")
        if found:
            return found
    return ""
