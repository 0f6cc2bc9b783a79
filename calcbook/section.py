"""Sections and schedules as a notebook declares them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Self, Unpack

from calcbook.declarations import Common, Declarations, common_parts, labelled, measure
from calcbook.errors import DeclarationError
from calcbook.items import (
    Carry,
    Check,
    Figure,
    Handle,
    Item,
    Remark,
    Schedule,
    Shaped,
    Solver,
    TableItem,
    Tone,
)

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping, Sequence
    from types import TracebackType

    from calcbook.codes import CodeSet

RANKS = ("largest", "smallest", "largest magnitude")
TONES = ("assumption", "caution", "reason", "not covered")


class Rows(Declarations):
    """A schedule while it is being declared; its names are columns."""

    def __init__(self, section: Section, schedule: Schedule) -> None:
        self.code, self.system = section.code, section.system
        self._schedule = schedule

    def _add(self, item: Item) -> Handle:
        self._schedule.columns.append(item)
        return Handle(item.name)

    def carry(
        self,
        name: str,
        column: str,
        meaning: str,
        *,
        unit: str = "number",
        options: Mapping[str, str] | Iterable[str] = (),
        text: bool = False,
        low: str = "",
        high: str = "",
        **common: Unpack[Common],
    ) -> Handle:
        """Bring a column forward from the schedule the rows come from."""
        return self._guarded(
            lambda: Carry(
                name=name,
                meaning=meaning,
                origin=column,
                kind=measure(unit),
                text=text,
                labels=labelled(options),
                low=low,
                high=high,
                **common_parts(common),
            ),
            name,
            column,
        )

    def total(self, *columns: str) -> None:
        """Print the sum of these columns under them."""
        self._schedule.totals.extend(columns)

    def governing(self, column: str, which: str = "largest") -> None:
        """Name the row with the 'largest', 'smallest' or 'largest magnitude' value.

        May be called for several columns; each row is worked in full.
        """
        if which not in RANKS:
            raise DeclarationError(f"no row is the '{which}'", hint=", ".join(RANKS))
        self._schedule.governing.append((column, which))

    def descending(self, column: str) -> None:
        """Require each row's value to be below that of the row before it."""
        self._schedule.order = column

    def ascending(self, column: str) -> None:
        """Require each row's value to be above that of the row before it."""
        self._schedule.order = column
        self._schedule.ascending = True

    def distinct(self, *columns: str) -> None:
        """Require that no two rows have the same words in these columns together."""
        self._schedule.distinct = columns

    def shaped(
        self, by: str, *, when: tuple[str, str], takes: Mapping[str, str], gives: Mapping[str, str]
    ) -> None:
        """Let a shape of the package give the rows while a choice says so.

        Parameters
        ----------
        by
            The shape: 'truss joints'; see ``calcbook.solvers.shapes.names()``.
        when
            A choice declared above and the option at which the rows are the shape's.
        takes
            The entry, choice or carried value for each thing the shape takes; never a line.
        gives
            For each column of this schedule what of the shape it is.
        """
        self._schedule.shaped = Shaped(by, *when, dict(takes), dict(gives))

    def __enter__(self) -> Self:
        """Begin the block."""
        return self

    def __exit__(self, *_: object) -> None:
        """End the block; what it declared stands in the section already."""


class Section(Declarations):
    """A titled group of items, shown by one cell; used as ``with book.section(...) as s:``."""

    def __init__(
        self,
        title: str,
        when: str,
        code: CodeSet,
        system: str,
        finish: Callable[[Section, BaseException | None], None],
    ) -> None:
        self.title = title
        self.when = when
        self.code, self.system = code, system
        self.items: list[Item] = []
        self.left_over = False
        self._finish = finish

    def _add(self, item: Item) -> Handle:
        self.items.append(item)
        return Handle(item.name)

    def basis(self) -> None:
        """Bring the code set and the unit system forward from the design basis."""
        from calcbook import codes  # noqa: PLC0415  a section alone needs no code data

        self.carry(
            "code_set",
            "design-basis.code_set",
            "Code set",
            options=codes.names(),
            fallback=self.code.name,
        )
        self.carry(
            "units",
            "design-basis.units",
            "Unit system",
            options={"SI": "SI units", "US": "US customary units"},
            fallback=self.system,
        )

    def carry(
        self,
        name: str,
        origin: str,
        meaning: str,
        *,
        unit: str = "number",
        fallback: str = "",
        options: Mapping[str, str] | Iterable[str] = (),
        sign: str = "",
        text: bool = False,
        low: str = "",
        high: str = "",
        refusal: str = "",
        **common: Unpack[Common],
    ) -> Handle:
        """Bring a result of another workbook forward (``origin`` is 'workbook.name').

        ``fallback`` serves outside a job and counts as unconfirmed; ``sign`` is the sense the
        source must have ('toward the surface'), ``refusal`` why a value out of range is refused.
        """
        return self._guarded(
            lambda: Carry(
                name=name,
                meaning=meaning,
                origin=_origin(origin),
                kind=measure(unit),
                fallback=fallback,
                labels=labelled(options),
                sign=sign,
                text=text,
                low=low,
                high=high,
                refusal=refusal,
                **common_parts(common),
            ),
            name,
            origin,
        )

    def table(self, name: str, subject: str, *, meaning: str = "", when: str = "") -> Handle:
        """Declare a table of the code set under a name that ``interpolate`` may use."""

        def build() -> TableItem:
            table = self.code.table(subject, self.system)
            return TableItem(
                name=name,
                meaning=meaning or table.name,
                table=table,
                clause=table.source,
                memory=table.from_memory,
                when=when,
            )

        return self._guarded(build, name, subject)

    def schedule(
        self,
        name: str,
        meaning: str,
        *,
        key: str = "",
        heading: str = "Mark",
        rows: Sequence[Mapping[str, str]] = (),
        origin: str = "",
        same_rows: str = "",
        fixed: bool = False,
        optional: bool = False,
        source: str = "",
        **common: Unpack[Common],
    ) -> Rows:
        """Declare a schedule; used as ``with s.schedule(...) as t:``.

        Parameters
        ----------
        key, heading
            The name conditions use for the row's key, and the heading of the key column.
        rows
            The template's rows, each a mapping with ``key`` and texts of the entered columns.
        origin
            'workbook.schedule' the rows are brought forward from; ``rows`` is the fallback.
            'workbook.*' gathers one row for each mark of a workbook, 'workbook.*.schedule' the
            rows of that schedule of every mark, keyed by mark and row ('B1 A'), and
            'workbook.named.schedule' those of the marks that a cell typed here names.
        same_rows
            A schedule of this workbook whose rows (and columns) this one shares.
        fixed
            The rows belong to the method and are not edited.
        optional
            There may be no rows; a sum over them is 0.
        """
        default = tuple(
            (str(row.get("key", "")), {k: str(v) for k, v in row.items() if k != "key"})
            for row in rows
        )
        item = Schedule(
            name=name,
            meaning=meaning,
            key=key,
            key_heading=heading,
            default=default,
            origin=origin,
            same_rows=same_rows,
            fixed=fixed,
            optional=optional,
            source=source,
            **common_parts(common),
        )
        self._add(item)
        return Rows(self, item)

    def solver(
        self,
        name: str,
        meaning: str,
        *,
        by: str,
        takes: Mapping[str, str | Mapping[str, str]],
        **common: Unpack[Common],
    ) -> Handle:
        """Put a solver of the package to work on declared names; ``solved`` reads what it found.

        Parameters
        ----------
        by
            The solver: 'beam', 'truss'; see ``calcbook.solvers.names()``.
        takes
            The name that fills each of its roles; a role filled by load case takes a mapping
            from case to name.
        """
        return self._guarded(
            lambda: Solver(
                name=name, meaning=meaning, by=by, takes=dict(takes), **common_parts(common)
            ),
            name,
            by,
        )

    def check(self, formula: str, meaning: str, **common: Unpack[Common]) -> None:
        """Declare a requirement ``demand <= limit``."""
        self._guarded(
            lambda: Check(meaning=meaning, formula=formula, **common_parts(common)), "", formula
        )

    def remark(self, text: str, tone: Tone = "reason", **common: Unpack[Common]) -> None:
        """Declare text the reviewer should read."""

        def build() -> Remark:
            if tone not in TONES:
                raise DeclarationError(f"a remark has no tone '{tone}'", hint=", ".join(TONES))
            return Remark(text=text, tone=tone, **common_parts(common))

        self._guarded(build, "", text)

    def figure(self, figure: str, caption: str, *, when: str = "", **uses: object) -> None:
        """Declare a picture; each keyword names, by role, the item it shows.

        A section has one figure, because its cell carries one picture.
        """

        def build() -> Figure:
            if any(isinstance(item, Figure) for item in self.items):
                raise DeclarationError("a section has one figure", hint="open another section")
            return Figure(figure=figure, caption=caption, uses=uses, when=when)

        self._guarded(build, "", figure)

    def __enter__(self) -> Self:
        """Begin the block."""
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        """Hand the section to its workbook, unless the block was left by an error."""
        self._finish(self, error)


def _origin(text: str) -> str:
    workbook, dot, name = text.partition(".")
    if not (dot and workbook and name):
        raise DeclarationError(
            f"'{text}' names no result of a workbook",
            hint="write workbook.name, for example design-basis.h_roof",
        )
    return text
