"""Declaring the items that sections and schedules have in common."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, TypedDict, Unpack

from calcbook import units
from calcbook.errors import CalcbookError, DeclarationError, near_match
from calcbook.formula import split_definition
from calcbook.items import Broken, Choice, Entry, Handle, Item, Line, Solved, Text

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Sequence

    from calcbook.codes import CodeSet


class Common(TypedDict, total=False):
    """What every item may be given; see Item."""

    clause: str
    note: str
    when: str
    codes: tuple[str, ...]
    memory: bool


def measure(text: str) -> units.Kind:
    """Return the kind of quantity for a kind's name ('pressure') or a unit ('kN/m2').

    Raises DeclarationError when it is neither.
    """
    if text in units.KINDS:
        return units.KINDS[text]
    try:
        unit = units.unit(text)
    except CalcbookError as error:
        hint = near_match(text, units.KINDS) or "name a kind of quantity or write a unit"
        raise DeclarationError(f"'{text}' is no kind of quantity and no unit", hint=hint) from error
    return units.Kind(text, unit.dimension, unit, unit, 3, 3)


def labelled(options: Mapping[str, str] | Iterable[str]) -> dict[str, str]:
    """Return options with their words; a bare option is its own words."""
    return dict(options) if isinstance(options, Mapping) else {o: o for o in options}


def common_parts(given: Common) -> Common:
    """Check the keywords every item may take."""
    known = Common.__annotations__
    for word in given:
        if word not in known:
            raise DeclarationError(
                f"an item has no '{word}'",
                hint=near_match(word, known) or f"it may have {', '.join(known)}",
            )
    return given


class Declarations:
    """What sections and schedules have in common: declaring entries, choices and lines."""

    code: CodeSet
    system: str

    def _add(self, item: Item) -> Handle:
        raise NotImplementedError  # pragma: no cover  both kinds of block define it

    def _guarded(self, build: Callable[[], Item], name: str, source: str) -> Handle:
        """Declare an item, or put the reason it could not be accepted in its place."""
        try:
            item = build()
        except CalcbookError as error:
            item = Broken(name=name, text=str(error), source=source)
        return self._add(item)

    def entry(
        self,
        name: str,
        meaning: str,
        value: str = "",
        *,
        unit: str = "number",
        low: str = "",
        high: str = "",
        source: str = "",
        refusal: str = "",
        **common: Unpack[Common],
    ) -> Handle:
        """Declare a quantity the engineer supplies.

        Parameters
        ----------
        value
            The template's value as text with its unit; it stays unconfirmed until typed.
        unit
            A kind of quantity ('pressure') or a unit ('kN/m2') for display and for bare numbers.
        low, high
            The range permitted, as quantities; ``refusal`` says why outside of it is refused.
        **common
            ``clause``, ``note``, ``when``, ``codes``, ``memory``: see Item.
        """
        return self._guarded(
            lambda: Entry(
                name=name,
                meaning=meaning,
                value=value,
                kind=measure(unit),
                low=low,
                high=high,
                source=source,
                refusal=refusal,
                **common_parts(common),
            ),
            name,
            value,
        )

    def choice(
        self,
        name: str,
        meaning: str,
        options: Mapping[str, str] | Iterable[str],
        value: str = "",
        *,
        refused: Mapping[str, str] | None = None,
        source: str = "",
        **common: Unpack[Common],
    ) -> Handle:
        """Declare an entry picked from a closed list; ``refused`` gives a reason per option."""
        return self._guarded(
            lambda: Choice(
                name=name,
                meaning=meaning,
                labels=labelled(options),
                value=value,
                refused=refused or {},
                source=source,
                **common_parts(common),
            ),
            name,
            value,
        )

    def text(
        self,
        name: str,
        meaning: str,
        value: str = "",
        *,
        pattern: str = "",
        refusal: str = "",
        source: str = "",
        **common: Unpack[Common],
    ) -> Handle:
        """Declare words the engineer supplies; ``pattern`` is a regular expression they match."""
        return self._guarded(
            lambda: Text(
                name=name,
                meaning=meaning,
                value=value,
                pattern=pattern,
                refusal=refusal,
                source=source,
                **common_parts(common),
            ),
            name,
            value,
        )

    def line(
        self,
        formula: str,
        meaning: str,
        *,
        unit: str = "",
        cases: Sequence[tuple[str, str]] = (),
        takes: Mapping[str, str] | None = None,
        gives: str = "",
        result: bool = False,
        sign: str = "",
        **common: Unpack[Common],
    ) -> Handle:
        """Declare a formula ``name = expression``, or a name with ``cases``.

        Parameters
        ----------
        unit
            Kind of quantity or unit the value is shown in; by default that of its dimension.
        cases
            (condition, formula) pairs; the first condition that holds is used.
        takes, gives
            For a formula *as printed*: the unit each symbol stands for and the unit it gives.
        result
            The line is a result of the workbook: carried forward and on the first page.
        sign
            The name of the workbook's sign convention the value follows.
        """
        named = formula.split("=", 1)[0].strip()

        def build() -> Line:
            name, text = (formula.strip(), "") if cases else split_definition(formula)
            return Line(
                name=name,
                meaning=meaning,
                formula=text,
                cases=tuple(cases),
                kind=measure(unit) if unit else None,
                takes={k: units.unit(u) for k, u in (takes or {}).items()},
                gives=units.unit(gives) if takes or gives else None,
                result=result,
                sign=sign,
                **common_parts(common),
            )

        return self._guarded(build, named, formula)

    def solved(
        self,
        name: str,
        meaning: str,
        *,
        of: str,
        gives: str,
        case: str = "",
        unit: str = "",
        result: bool = False,
        sign: str = "",
        **common: Unpack[Common],
    ) -> Handle:
        """Declare a line whose value a solver found.

        Parameters
        ----------
        of
            The name of the solver item, declared with ``s.solver``.
        gives
            The outcome wanted ('reaction'), of a load ``case`` where it is asked by case. In a
            schedule it runs over the rows; it may be words ('tension').
        unit, result, sign
            As for ``line``.
        """
        return self._guarded(
            lambda: Solved(
                name=name,
                meaning=meaning,
                of=of,
                outcome=gives,
                case=case,
                kind=measure(unit) if unit else None,
                result=result,
                sign=sign,
                **common_parts(common),
            ),
            name,
            f"{of}: {gives} {case}".strip(),
        )

    def clause(
        self,
        subject: str,
        *,
        unit: str = "",
        meaning: str = "",
        result: bool = False,
        sign: str = "",
        when: str = "",
        codes: tuple[str, ...] = (),
        **renamed: str,
    ) -> Handle:
        """Declare the line that a clause of the job's code set states.

        ``renamed`` gives other names to the clause's symbols (``K_z="K_h", z="h"``).
        A clause with cases becomes a line with cases.
        """
        if codes and self.code.name not in codes:
            return Handle(subject)

        def build() -> Line:
            clause = self.code.clause(subject)
            stated = clause.stated(self.system, renamed)
            return Line(
                name=stated.name,
                meaning=meaning or clause.meaning,
                formula=stated.formula,
                cases=stated.cases,
                kind=measure(unit or clause.kind),
                takes={k: units.unit(u) for k, u in stated.takes.items()},
                gives=units.unit(stated.gives) if stated.takes or stated.gives else None,
                result=result,
                sign=sign,
                when=when,
                codes=codes,
                clause=clause.reference,
                note=clause.note,
                memory=clause.from_memory,
            )

        return self._guarded(build, self._symbol(subject, renamed), subject)

    def _symbol(self, subject: str, renamed: Mapping[str, str]) -> str:
        """Return the symbol a clause gives here, for one that cannot be accepted as well."""
        known = self.code.clause(subject).name if self.code.has(subject) else ""
        return renamed.get(known, known) or subject
