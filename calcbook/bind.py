"""Binding: every declared item read, its names looked up and its dimensions checked, once."""

from __future__ import annotations

import re
from dataclasses import dataclass, field, replace
from functools import lru_cache
from typing import TYPE_CHECKING

from calcbook import figures, shaping, solving, units
from calcbook.dimensions import Type, check, check_printed
from calcbook.errors import CalcbookError, DeclarationError, FormulaError, near_match
from calcbook.formula import parse
from calcbook.items import (
    Broken,
    Carry,
    Check,
    Choice,
    Entry,
    Figure,
    Item,
    Line,
    Schedule,
    Solved,
    Solver,
    TableItem,
    Text,
)
from calcbook.spelling import check_name
from calcbook.tree import Compare, Logic, Name, Node, names, walk

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping, Sequence

    from calcbook.section import Section

TEXT = Type("text", None, None)


@dataclass(eq=False)
class Bound:
    """An item with its formulas as trees and what they stand for.

    ``guards`` are the conditions of section, schedule and item, all of which must hold;
    ``branches`` the (condition, formula) trees of a line; ``needs`` every name they use;
    ``problem`` why the item could not be accepted; ``lacks`` that it needs one that could not be;
    ``schedule`` the schedule of a column; ``faults`` what a schedule asks for and cannot have.
    """

    item: Item
    section: Section
    number: str = ""
    type: Type | None = None
    guards: tuple[str, ...] = ()
    branches: tuple[tuple[Node | None, Node], ...] = ()
    needs: tuple[str, ...] = ()
    problem: str = ""
    lacks: str = ""
    schedule: Bound | None = None
    columns: list[Bound] = field(default_factory=list)
    rows: str = ""
    faults: list[str] = field(default_factory=list)

    @property
    def computable(self) -> bool:
        """Whether the item was accepted, with everything it needs."""
        return not self.problem and not self.lacks

    @property
    def name(self) -> str:
        """The name formulas use."""
        return self.item.name

    @property
    def is_words(self) -> bool:
        """Whether it is a line whose value is text: what a solver says in words."""
        return isinstance(self.item, Line) and self.type is not None and self.type.form == "text"


class Binder:
    """Binds the items of a workbook in order, keeping the scope as it grows."""

    def __init__(self, where: str, code: str, sections: Sequence[Section]) -> None:
        self.where = where
        self.code = code
        self.sections = sections
        self.bound: list[Bound] = []
        self.scope: dict[str, Type] = {}
        self.home: dict[str, Bound] = {}
        self.guards: dict[str, Node] = {}

    def bind(self) -> list[Bound]:
        """Bind everything; what cannot be accepted carries its problem instead of stopping."""
        for count, section in enumerate(self.sections, 1):
            place = 0
            for item in section.items:
                if item.codes and self.code not in item.codes:
                    continue
                place += 1
                guards = tuple(c for c in (section.when, item.when) if c)
                self._accept(Bound(item, section, f"{count}.{place}", guards=guards))
        return self.bound

    def _accept(self, bound: Bound) -> None:
        self.bound.append(bound)
        try:
            self._bind(bound)
        except _NotAvailableError as error:
            self._lack(bound, error.what)
        except CalcbookError as error:
            bound.problem = str(error.at(self._place(bound)))
        for name in (bound.name, *(c.name for c in getattr(bound.item, "columns", ()))):
            if name:
                self.home.setdefault(name, bound)

    def _lack(self, bound: Bound, reason: str) -> None:
        """Let an item stand without a value, because of one that could not be accepted."""
        bound.lacks = reason
        if isinstance(bound.item, Line):
            kind = bound.item.kind
            rows = bound.schedule.rows if bound.schedule is not None else None
            bound.type = Type("number", kind.dimension if kind is not None else None, rows)

    def _place(self, bound: Bound) -> str:
        what = bound.name or bound.item.meaning or type(bound.item).__name__.lower()
        return f'{self.where}, section "{bound.section.title}", {what}'

    def _bind(self, bound: Bound) -> None:  # noqa: C901  one case per kind of item
        item = bound.item
        if isinstance(item, Broken):
            raise DeclarationError(item.text)
        self._refuse_name(bound.name)
        for guard in bound.guards:
            self._bind_guard(guard, bound)
        if isinstance(item, (Entry, Choice, Carry, Text)):
            self._declare(bound, _given_type(item))
        elif isinstance(item, TableItem):
            self._declare(bound, Type("table", None, None, table=item.table))
        elif isinstance(item, Solver):
            self._bind_solver(bound, item)
        elif isinstance(item, Solved):
            self._bind_solved(bound, item)
        elif isinstance(item, Line):
            self._bind_line(bound, item)
        elif isinstance(item, Check):
            self._bind_check(bound, item)
        elif isinstance(item, Schedule):
            self._bind_schedule(bound, item)
        elif isinstance(item, Figure):
            self._bind_figure(bound, item)

    def _bind_figure(self, bound: Bound, item: Figure) -> None:
        needed, taken = figures.roles(item.figure)
        known = (*needed, *taken)
        lacking = [role for role in needed if role not in item.uses]
        if lacking:
            raise DeclarationError(
                f"the figure {item.figure} is not told which name is its '{lacking[0]}'",
                hint=f"give it as {lacking[0]}='name'; it needs {', '.join(needed)}",
            )
        for role in item.uses:
            if re.sub(r"_\d+$", "", role) not in known:
                raise DeclarationError(
                    f"the figure {item.figure} shows no '{role}'",
                    hint=near_match(role, known) or f"it shows {', '.join(known)}",
                )
        bound.needs = tuple(_used(item.uses.values()))

    def _refuse_name(self, name: str) -> None:
        if not name:
            return
        check_name(name, name, (0, len(name)))
        first = self.home.get(name)
        if first is not None:
            place = f'{first.number}, section "{first.section.title}"'
            raise DeclarationError(
                f"{name} is already declared in {place}", hint="give one of them another name"
            )

    def _declare(self, bound: Bound, kind: Type) -> None:
        bound.type = kind
        self.scope[bound.name] = kind

    def _bind_guard(self, text: str, bound: Bound) -> None:
        node = self._read(text, bound)
        found = check(node, self.scope, text)
        if found.form != "truth" or found.rows is not None:
            raise FormulaError("a 'when' is a single condition", text=text, hint="roof == 'gable'")
        self.guards[text] = node

    def _read(self, text: str, bound: Bound) -> Node:
        """Parse a formula, add the names it needs, refuse those that are not there yet."""
        node = parse(text)
        bound.needs = tuple(dict.fromkeys((*bound.needs, *names(node))))
        for part in walk(node):
            if not isinstance(part, Name) or part.name in self.scope:
                continue
            if part.name in self.home:
                raise _NotAvailableError(f"not available because of {part.name}")
            if self._declared_later(part.name):
                raise FormulaError(
                    f"{part.name} is used before it is declared",
                    text=text,
                    span=part.span,
                    hint="move this item below it",
                )
        return node

    def _declared_later(self, name: str) -> bool:
        return any(
            name == item.name or any(name == c.name for c in getattr(item, "columns", ()))
            for section in self.sections
            for item in section.items
        )

    def _bind_line(self, bound: Bound, item: Line) -> None:
        kinds, branches = [], []
        for condition, formula in item.branches:
            test = self._read(condition, bound) if condition else None
            if test is not None:
                self._bind_test(test, condition, bound)
            node = self._read(formula, bound)
            found = self._formula_type(node, formula, item)
            self._refuse_foreign_rows(found, formula, bound)
            kinds.append(found)
            branches.append((test, node))
        bound.branches = tuple(branches)
        found = kinds[0]
        for other, (_, text) in zip(kinds[1:], item.branches[1:], strict=True):
            if other.dimension != found.dimension:
                raise FormulaError(
                    f"this case gives {_words(other)}, the first gives {_words(found)}", text=text
                )
        text = item.branches[0][1]
        item.kind = item.kind or _usual_kind(found, text)
        if item.kind.dimension != found.dimension:
            raise FormulaError(
                f"the formula gives {_words(found)}, the line is to be shown as "
                f"{units.dimension_name(item.kind.dimension)}",
                text=text,
            )
        rows = bound.schedule.rows if bound.schedule is not None else None
        self._declare(bound, Type("number", found.dimension, rows))

    def _bind_solver(self, bound: Bound, item: Solver) -> None:
        node = solving.bind(item, self.scope, self._look_up(bound))
        node = replace(node, conditions=self._conditions(solving.may_idle(item), bound))
        bound.branches = ((None, node),)
        bound.needs = tuple(dict.fromkeys((*bound.needs, *names(node))))
        self._declare(bound, Type("solution", None, None))

    def _conditions(self, taken: Iterable[str], bound: Bound) -> tuple[tuple[str, Node], ...]:
        """Return the conditions of names that a solver does without where they do not apply."""
        own = set(bound.guards)
        found = []
        for name in taken:
            tests = [self.guards[g] for g in self.home[name].guards if g not in own]
            if tests:
                found.append((name, tests[0] if len(tests) == 1 else Logic("and", tuple(tests))))
        return tuple(found)

    def _bind_solved(self, bound: Bound, item: Solved) -> None:
        self._look_up(bound)(item.of)
        home = self.home.get(item.of)
        if home is None or not isinstance(home.item, Solver):
            raise DeclarationError(
                f"{item.of} is no solver of this workbook",
                hint="name the item that s.solver() declared, with of=",
            )
        rows = bound.schedule.rows if bound.schedule is not None else None
        node, found = solving.bind_found(item, home.item, rows, self.scope)
        bound.branches = ((None, node),)
        if found.dimension is not None:
            item.kind = item.kind or solving.kind(item, home.item, found)
            if item.kind.dimension != found.dimension:
                raise FormulaError(
                    f"the solver gives {_words(found)}, the line is to be shown as "
                    f"{units.dimension_name(item.kind.dimension)}"
                )
        self._declare(bound, found)

    def _look_up(self, bound: Bound) -> Callable[[str], Name]:
        """Return a function that looks a declared name up, and notes that the item needs it."""

        def look_up(name: str) -> Name:
            check_name(name, name, (0, len(name)))
            self._read(name, bound)
            if name not in self.scope:
                hint = near_match(name, self.scope) or "declare it above"
                raise DeclarationError(f"there is no '{name}' to hand to the solver", hint=hint)
            return Name(name)

        return look_up

    def _bind_test(self, test: Node, text: str, bound: Bound) -> None:
        found = check(test, self.scope, text)
        if found.form != "truth":
            raise FormulaError("a case needs a condition", text=text, hint="roof == 'gable'")
        self._refuse_foreign_rows(found, text, bound)

    def _refuse_foreign_rows(self, found: Type, text: str, bound: Bound) -> None:
        """Refuse a column where one value is wanted, and one of another schedule's rows."""
        if found.rows is None:
            return
        if bound.schedule is None:
            raise FormulaError(
                "this gives a column, a line outside a schedule gives one value",
                text=text,
                hint="use sum(), max() or min() of the column",
            )
        if found.rows != bound.schedule.rows:
            raise FormulaError(
                f"this gives a column of {found.rows}, which has other rows",
                text=text,
                hint="use sum(), max() or min() of that column, or share the rows: same_rows=",
            )

    def _formula_type(self, node: Node, text: str, item: Line) -> Type:
        if item.takes or item.gives:
            gives = item.gives or units.unit("")
            return check_printed(node, self.scope, text, item.takes, gives)
        found = check(node, self.scope, text)
        if found.form != "number":
            raise FormulaError(
                "a line gives a number", text=text, hint="use where(condition, a, b)"
            )
        return found

    def _bind_check(self, bound: Bound, item: Check) -> None:
        node = self._read(item.formula, bound)
        if check(node, self.scope, item.formula).form != "truth":
            raise FormulaError("a check is a comparison", text=item.formula, hint="demand <= limit")
        if isinstance(node, Compare) and len(node.rest) != 1:
            raise FormulaError(
                "a check compares one demand with one limit",
                text=item.formula,
                hint="declare two checks",
            )
        bound.branches = ((None, node),)
        if isinstance(node, Compare):
            bound.type = check(node.first, self.scope, item.formula)

    def _bind_schedule(self, bound: Bound, item: Schedule) -> None:
        bound.rows = self._row_set(item)
        bound.type = Type("text", None, bound.rows)
        self.home[item.name] = bound
        if item.key:
            self._refuse_name(item.key)
            self.scope[item.key] = Type("text", None, bound.rows)
            self.home[item.key] = bound
        place = 0
        for column in item.columns:
            if column.codes and self.code not in column.codes:
                continue
            place += 1
            guards = (*bound.guards, *((column.when,) if column.when else ()))
            number = f"{bound.number}.{place}"
            part = Bound(column, bound.section, number, guards=guards, schedule=bound)
            self._accept(part)
            bound.columns.append(part)
            if part.type is not None and part.name in self.scope:
                self._declare(part, replace(part.type, rows=bound.rows))
        if item.shaped is not None:
            above = {name: home.item for name, home in self.home.items() if home.schedule is None}
            shaping.check(item, item.shaped, self.scope, above)
        self._note_missing(item, bound)

    def _row_set(self, item: Schedule) -> str:
        if not item.same_rows:
            return item.name
        first = self.home.get(item.same_rows)
        if first is None or not isinstance(first.item, Schedule):
            raise DeclarationError(f"there is no schedule '{item.same_rows}' above this one")
        if not first.computable:
            raise _NotAvailableError(f"not available because of {item.same_rows}")
        return first.rows

    def _note_missing(self, item: Schedule, bound: Bound) -> None:
        """Take out totals, governing rows and orders of columns the schedule does not have."""
        known = [c.name for c in bound.columns if not c.problem]
        every = [c.name for c in item.columns]
        asked = [*item.totals, *(c for c, _ in item.governing), *([item.order] * bool(item.order))]
        asked += item.distinct
        for name in dict.fromkeys(asked):
            if name not in every:
                hint = near_match(name, known) or f"it has {', '.join(known)}"
                bound.faults.append(f"schedule {item.name} has no column '{name}'\n{hint}")


class _NotAvailableError(FormulaError):
    """A name that could not be accepted itself."""


def _kind(item: Entry | Carry | Line) -> units.Kind:
    if item.kind is None:
        raise DeclarationError(f"{item.name} has no kind of quantity")
    return item.kind


def _given_type(item: Entry | Choice | Carry | Text) -> Type:
    if isinstance(item, Text) or (isinstance(item, Carry) and item.text):
        return TEXT
    if isinstance(item, Choice) or (isinstance(item, Carry) and item.labels):
        return Type("text", None, None, item.options)
    dimension = _kind(item).dimension
    for limit in (item.low, item.high):
        if limit:
            units.read_quantity(limit, dimension)
    return Type("number", dimension, None)


def _usual_kind(found: Type, text: str) -> units.Kind:
    for kind in units.KINDS.values():
        if kind.dimension == found.dimension:
            return kind
    raise FormulaError(
        f"the formula gives {_words(found)}, which has no usual unit",
        text=text,
        hint="state one: unit='kN/m4'",
    )


def _words(found: Type) -> str:
    return units.dimension_name(found.dimension) if found.dimension is not None else found.form


def _used(values: Iterable[object]) -> Iterable[str]:
    for value in values:
        if isinstance(value, str):
            yield value
        elif isinstance(value, dict):
            yield from _used(value.values())
        elif isinstance(value, (list, tuple)):
            yield from _used(value)


def by_name(bound: Iterable[Bound]) -> Mapping[str, Bound]:
    """Return the bound items that formulas can name."""
    return {b.name: b for b in bound if b.name and b.type is not None}


@lru_cache(maxsize=4096)
def symbols(text: str) -> tuple[str, ...]:
    """Return the names a formula or condition uses, in order of first appearance."""
    return names(parse(text))


def used_by(bound: Iterable[Bound], scope: Mapping[str, Bound]) -> dict[str, list[str]]:
    """Return the numbers of the items that use each name, formulas and conditions alike."""
    used: dict[str, list[str]] = {}
    for item in (b for b in bound if not isinstance(b.item, Figure)):
        number = item.schedule.number if item.schedule is not None else item.number
        guards = [n for g in item.guards for n in symbols(g)] if item.computable else []
        for name in dict.fromkeys((*item.needs, *guards)):
            home = scope[name].schedule if name in scope else None
            numbers = used.setdefault(name, [])
            if number not in numbers and (home is None or home is not item.schedule):
                numbers.append(number)
    return used
