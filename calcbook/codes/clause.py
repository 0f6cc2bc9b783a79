"""The shape that every edition of every code shares: clauses, tables and the set of them."""

from __future__ import annotations

import re
from dataclasses import dataclass, field, fields, replace
from types import MappingProxyType
from typing import TYPE_CHECKING, Any, NamedTuple, TypeVar

from calcbook.codes.combinations import reduced_to
from calcbook.errors import CodeSetError, near_match

if TYPE_CHECKING:
    from collections.abc import Collection, Iterable, Mapping

    from calcbook.codes.combinations import Combination
    from calcbook.codes.materials import Material
    from calcbook.codes.uses import Use
    from calcbook.table import Table

Cases = tuple[tuple[str, str], ...]
_Part = TypeVar("_Part")

# Quoted text is matched first so that an option or a unit in quotes is never taken for a symbol.
_WORD = re.compile(r"'[^']*'|\"[^\"]*\"|\b[A-Za-z_]\w*\b(?!\s*\()")
_NOT_SYMBOLS = {"and", "or", "not"}


class Stated(NamedTuple):
    """What a clause states in one unit system, ready to become a line.

    Attributes
    ----------
    name
        The symbol the clause gives.
    formula
        The formula as text, or '' when there are cases.
    cases
        Pairs of (condition, formula).
    takes, gives
        For a formula *as printed*: the unit each symbol stands for, and the unit of the result.
    """

    name: str
    formula: str
    cases: Cases
    takes: dict[str, str]
    gives: str


@dataclass(frozen=True, kw_only=True)
class Clause:
    """One clause of one edition, in calcbook's own words.

    Attributes
    ----------
    subject
        The words a workbook asks for it by.
    edition, number
        Where it stands: 'NSCP 2015' and 'Eq. 207B.3-1'.
    meaning
        What the clause gives, as printed beside its line.
    name, kind
        The symbol it gives and the kind of quantity; '' for a clause that is only referred to.
    formula, formula_us
        Formula text in SI and in US customary units ('' when the same text serves both).
    cases, cases_us
        Pairs of (condition, formula) in place of a formula; again the same when left out.
    takes, takes_us, gives, gives_us
        Units of a formula *as printed*, for either form.
    note
        What the reader should know about its use.
    from_memory
        A number in it has not been read in a published source and is to be confirmed.
    """

    subject: str
    edition: str
    number: str
    meaning: str
    name: str = ""
    kind: str = ""
    formula: str = ""
    formula_us: str = ""
    cases: Cases = ()
    cases_us: Cases = ()
    takes: Mapping[str, str] = field(default_factory=dict)
    takes_us: Mapping[str, str] = field(default_factory=dict)
    gives: str = ""
    gives_us: str = ""
    note: str = ""
    from_memory: bool = False

    def __post_init__(self) -> None:
        """Freeze the mappings."""
        object.__setattr__(self, "takes", MappingProxyType(dict(self.takes)))
        object.__setattr__(self, "takes_us", MappingProxyType(dict(self.takes_us)))

    @property
    def reference(self) -> str:
        """Edition and number, as printed in the margin."""
        return f"{self.edition} {self.number}"

    @property
    def symbols(self) -> tuple[str, ...]:
        """Every symbol of the clause: the one it gives, then those it uses, as they appear."""
        pairs = (*self.cases, *self.cases_us, (self.formula, self.formula_us))
        found = [self.name] if self.name else []
        for text in (text for pair in pairs for text in pair):
            words = (match[0] for match in _WORD.finditer(text))
            found += [w for w in words if w[0] not in "'\"" and w not in _NOT_SYMBOLS]
        return tuple(dict.fromkeys(found))

    def stated(self, system: str = "SI", renamed: Mapping[str, str] | None = None) -> Stated:
        """Return what the clause states in a unit system, with symbols renamed.

        Parameters
        ----------
        system
            'SI' or 'US'.
        renamed
            New names by symbol, for the same clause used at another place: ``{"z": "h"}``.

        Raises
        ------
        CodeSetError
            The clause states no formula, or has no symbol of a name to be renamed.
        """
        if not self.name:
            raise CodeSetError(
                f"{self.reference}, {self.subject}, states no formula",
                hint="refer to it by its number and write the line in the workbook",
            )
        new = renamed or {}
        for symbol in new:
            if symbol not in self.symbols:
                raise CodeSetError(
                    f"{self.reference}, {self.subject}, has no symbol '{symbol}'",
                    hint=near_match(symbol, self.symbols)
                    or f"its symbols are {', '.join(self.symbols)}",
                )
        us = in_us(system)
        has_us_form = us and bool(self.formula_us or self.cases_us)
        takes = self.takes_us if has_us_form else self.takes
        return Stated(
            name=new.get(self.name, self.name),
            formula=_renamed(self.formula_us if us and self.formula_us else self.formula, new),
            cases=tuple(
                (_renamed(condition, new), _renamed(formula, new))
                for condition, formula in (self.cases_us if us and self.cases_us else self.cases)
            ),
            takes={new.get(symbol, symbol): unit for symbol, unit in takes.items()},
            gives=self.gives_us if has_us_form else self.gives,
        )


def template(subject: str, place: str, meaning: str, **parts: Any) -> Clause:  # noqa: ANN401
    """Return a clause that several editions share.

    Its number is a *place* ('velocity pressure'), for which each edition has a number of its own.
    """
    return Clause(subject=subject, edition="", number=place, meaning=meaning, **parts)


def issued(
    templates: Iterable[Clause],
    edition: str,
    numbers: Mapping[str, str],
    different: Mapping[str, Mapping[str, Any]],
) -> dict[str, Clause]:
    """Return the clauses of an edition by subject.

    Parameters
    ----------
    templates
        The clauses shared by editions.
    edition
        The name of the code set.
    numbers
        The number that the edition has for each place.
    different
        By subject, the fields of a clause that the edition states in another way.
    """
    return {
        shared.subject: replace(
            shared,
            edition=edition,
            number=numbers[shared.number],
            **different.get(shared.subject, {}),
        )
        for shared in templates
    }


@dataclass(frozen=True, kw_only=True)
class CodeSet:
    """The clauses and tables of one edition of one design code.

    Attributes
    ----------
    name, title
        'NSCP 2015', and the title in full.
    note
        What the reader should know about the set as a whole.
    clauses, tables
        By subject. A clause whose formula looks a table up has that table under its own subject.
    tables_us
        The tables whose printed numbers differ in US customary units.
    combination_lists
        Load combinations under 'strength' and 'service', in the order of the code.
    use_list, material_list
        Uses with their live loads and materials with their weights, by name.
    """

    name: str
    title: str
    note: str
    clauses: Mapping[str, Clause]
    tables: Mapping[str, Table]
    tables_us: Mapping[str, Table]
    combination_lists: Mapping[str, tuple[Combination, ...]]
    use_list: Mapping[str, Use]
    material_list: Mapping[str, Material]

    def __post_init__(self) -> None:
        """Freeze the mappings."""
        for part in fields(self):
            if part.name not in ("name", "title", "note"):
                frozen = MappingProxyType(dict(getattr(self, part.name)))
                object.__setattr__(self, part.name, frozen)

    def has(self, subject: str) -> bool:
        """Return whether the edition has a clause on the subject."""
        return subject in self.clauses

    def clause(self, subject: str) -> Clause:
        """Return the clause on a subject; raises CodeSetError when there is none."""
        return self._found(self.clauses, subject, "clause")

    def number(self, subject: str) -> str:
        """Return edition and number of the clause on a subject, as printed in the margin."""
        return self.clause(subject).reference

    def cases(self, subject: str, system: str = "SI") -> Cases:
        """Return the (condition, formula) pairs of a clause given by cases.

        Raises
        ------
        CodeSetError
            There is no such clause, or it is given by a single formula.
        """
        clause = self.clause(subject)
        if not clause.cases:
            raise CodeSetError(
                f"{clause.reference}, {subject}, is not given by cases",
                hint="take its formula from the clause",
            )
        return clause.stated(system).cases

    def table(self, subject: str, system: str = "SI") -> Table:
        """Return the table on a subject; raises CodeSetError when there is none."""
        table = self._found(self.tables, subject, "table")
        return self.tables_us.get(subject, table) if in_us(system) else table

    def combinations(
        self, kind: str, cases: Collection[str] | None = None
    ) -> tuple[Combination, ...]:
        """Return the load combinations for 'strength' or 'service', in the order of the code.

        Parameters
        ----------
        cases
            The load cases present; see `reduced_to` for what is then left out. All by default.

        Raises
        ------
        CodeSetError
            There is no such kind of combination, or no load case of a name.
        """
        listed = self._found(self.combination_lists, kind, "list of load combinations")
        return listed if cases is None else reduced_to(listed, cases)

    def uses(self) -> Mapping[str, Use]:
        """Return the uses the edition lists with their live loads, by name."""
        return self.use_list

    def materials(self) -> Mapping[str, Material]:
        """Return the materials with their weights, by name."""
        return self.material_list

    def _found(self, known: Mapping[str, _Part], subject: str, what: str) -> _Part:
        if subject not in known:
            raise CodeSetError(
                f"{self.name} has no {what} on '{subject}'",
                hint=near_match(subject, known) or f"it has: {'; '.join(known)}",
            )
        return known[subject]


def in_us(system: str) -> bool:
    """Return whether a unit system is US customary; raises CodeSetError for an unknown one."""
    if system not in ("SI", "US"):
        raise CodeSetError(f"there is no unit system '{system}'", hint="use 'SI' or 'US'")
    return system == "US"


def _renamed(text: str, new: Mapping[str, str]) -> str:
    return _WORD.sub(lambda match: new.get(match[0], match[0]), text)
