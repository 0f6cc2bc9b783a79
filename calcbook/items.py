"""What a workbook may declare: plain descriptions, before anything is computed."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal, NoReturn

from calcbook.errors import ReadingError

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.table import Table
    from calcbook.units import Kind, Unit

Tone = Literal["assumption", "caution", "reason", "not covered"]


@dataclass(eq=False)
class Item:
    """One declared thing of a section.

    Attributes
    ----------
    name
        The symbol formulas use, or '' for an item nothing refers to.
    meaning
        What it is, in the words printed beside it.
    clause, note
        The clause of the code set, and a short note, both printed in the margin.
    when
        A condition; while it does not hold the item is not applied.
    codes
        The code sets the item belongs to; empty means all of them.
    memory
        The clause or value is known from memory and is to be confirmed against the code.
    """

    name: str = ""
    meaning: str = ""
    clause: str = ""
    note: str = ""
    when: str = ""
    codes: tuple[str, ...] = ()
    memory: bool = False


@dataclass(eq=False)
class Entry(Item):
    """A quantity the engineer supplies."""

    value: str = ""
    kind: Kind | None = None
    low: str = ""
    high: str = ""
    source: str = ""
    refusal: str = ""


@dataclass(eq=False)
class Text(Item):
    """Words the engineer supplies: a job name, a date, initials."""

    value: str = ""
    source: str = ""
    pattern: str = ""
    refusal: str = ""


@dataclass(eq=False)
class Choice(Item):
    """An entry picked from a closed list; ``labels`` gives each option in words."""

    value: str = ""
    labels: Mapping[str, str] = field(default_factory=dict)
    refused: Mapping[str, str] = field(default_factory=dict)
    source: str = ""

    @property
    def options(self) -> tuple[str, ...]:
        """The options in the order declared."""
        return tuple(self.labels)


@dataclass(eq=False)
class Carry(Item):
    """A result of another workbook, with a fallback for use outside a job."""

    origin: str = ""
    kind: Kind | None = None
    fallback: str = ""
    labels: Mapping[str, str] = field(default_factory=dict)
    sign: str = ""
    text: bool = False
    low: str = ""
    high: str = ""
    refusal: str = ""

    @property
    def options(self) -> tuple[str, ...]:
        """The options of a carried choice in the order declared."""
        return tuple(self.labels)


@dataclass(eq=False)
class Line(Item):
    """A formula; ``cases`` holds (condition, formula) pairs when there is more than one."""

    formula: str = ""
    cases: tuple[tuple[str, str], ...] = ()
    kind: Kind | None = None
    takes: Mapping[str, Unit] = field(default_factory=dict)
    gives: Unit | None = None
    result: bool = False
    sign: str = ""

    @property
    def branches(self) -> tuple[tuple[str, str], ...]:
        """Every (condition, formula) pair; a plain line has one pair without a condition."""
        return self.cases or (("", self.formula),)


@dataclass(eq=False)
class Solver(Item):
    """A solver of the package at work: ``by`` names it, ``takes`` the names in its roles.

    A role that is filled by load case has a mapping from case to name.
    """

    by: str = ""
    takes: Mapping[str, str | Mapping[str, str]] = field(default_factory=dict)


@dataclass(eq=False)
class Solved(Line):
    """A line whose value a solver found: an ``outcome`` of the solver item ``of``."""

    of: str = ""
    outcome: str = ""
    case: str = ""


@dataclass(eq=False)
class TableItem(Item):
    """A table of the code set, or of a maker, that formulas interpolate in."""

    table: Table | None = None


@dataclass(eq=False)
class Check(Item):
    """A requirement: a comparison of a demand with a limit."""

    formula: str = ""


@dataclass(eq=False)
class Remark(Item):
    """Text the reviewer should read."""

    text: str = ""
    tone: Tone = "reason"


@dataclass(eq=False)
class Figure(Item):
    """A picture drawn from the statement; ``uses`` names what it shows, by role."""

    figure: str = ""
    uses: Mapping[str, object] = field(default_factory=dict)
    caption: str = ""


@dataclass(eq=False)
class Broken(Item):
    """An item that could not be accepted, standing in its place with the reason."""

    text: str = ""
    source: str = ""


@dataclass(frozen=True)
class Shaped:
    """How the rows of a schedule come from a shape of the package.

    Attributes
    ----------
    by
        The shape; see ``calcbook.solvers.shapes``.
    choice, option
        The rows are the shape's while this choice stands at this option, and typed otherwise.
    takes
        The entry or choice for each thing the shape takes.
    gives
        What of the shape each column is.
    """

    by: str
    choice: str
    option: str
    takes: Mapping[str, str]
    gives: Mapping[str, str]


@dataclass(eq=False)
class Schedule(Item):
    """A table with keyed rows.

    ``columns`` are Entry, Text, Choice, Carry or Line items. ``default`` holds the template's
    rows as (key, {column: text}). ``origin`` brings the rows forward from another workbook,
    ``same_rows`` shares the rows of a schedule of this one, ``fixed`` rows belong to the method.
    No two rows may have the same values in the columns of ``distinct`` together. ``optional``
    schedules may have no rows at all. ``shaped`` rows come from a shape while a choice says so.
    """

    key: str = ""
    key_heading: str = ""
    columns: list[Item] = field(default_factory=list)
    default: tuple[tuple[str, dict[str, str]], ...] = ()
    origin: str = ""
    same_rows: str = ""
    fixed: bool = False
    totals: list[str] = field(default_factory=list)
    governing: list[tuple[str, str]] = field(default_factory=list)
    order: str = ""
    ascending: bool = False
    distinct: tuple[str, ...] = ()
    source: str = ""
    optional: bool = False
    shaped: Shaped | None = None


class Handle:
    """What a declaration returns: a name to hand on, never a value to read.

    Using it as a number, a truth value or in a comparison raises ReadingError, because a
    workbook whose declarations depend on a value could not be recomputed by a reviewer.
    """

    def __init__(self, name: str) -> None:
        self.name = name

    def __repr__(self) -> str:
        """Show the name, as a notebook does with the last value of a cell."""
        return f"<{self.name}>"

    def _refuse(self, *_: object) -> NoReturn:
        raise ReadingError(
            f"notebook code reads the value of {self.name}",
            hint=(
                'declare the alternatives instead: when="condition" on an item or section, or '
                "cases=[(condition, formula), ...] on a line; computing belongs in a line"
            ),
        )

    __bool__ = __float__ = __int__ = __index__ = __complex__ = __round__ = _refuse
    __lt__ = __le__ = __gt__ = __ge__ = __len__ = __iter__ = __getitem__ = __contains__ = _refuse
    __add__ = __radd__ = __sub__ = __rsub__ = __mul__ = __rmul__ = _refuse
    __mod__ = __rmod__ = __floordiv__ = __rfloordiv__ = __pos__ = __matmul__ = _refuse
    __truediv__ = __rtruediv__ = __pow__ = __rpow__ = __neg__ = __abs__ = _refuse
    __eq__ = __ne__ = _refuse
    __hash__ = object.__hash__
