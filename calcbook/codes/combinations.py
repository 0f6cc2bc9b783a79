"""Load combinations: factors on named load cases, alternatives expanded into ones of their own."""

from __future__ import annotations

import itertools
from dataclasses import dataclass, replace
from types import MappingProxyType
from typing import TYPE_CHECKING

from calcbook.errors import CodeSetError, near_match

if TYPE_CHECKING:
    from collections.abc import Collection, Iterable, Mapping

LOAD_CASES = ("D", "D_min", "L", "Lr", "S", "R", "H", "F", "T", "W", "E")

# What these add may be negative, so a combination without them can be the larger.
_EITHER_SENSE = {"W", "E"}

_RESISTING = "dead load resists: D_min, only what is certain to be there, stands in place of D"
_COMPANION = "f_1 by use, see the live load factor"


@dataclass(frozen=True, kw_only=True)
class Combination:
    """One load combination of one edition.

    Attributes
    ----------
    name, number
        '2a', and the number '2' of the combination it is an alternative of.
    clause
        Edition and clause, as printed in the margin.
    principal
        The load case the combination is about: without it, it has nothing to say.
    factors
        Factor by load case as formula text ('1.2', 'f_1', '0.75*0.6', '1/1.4'), in the order of
        the code. Where dead load resists, the factor stands under 'D_min' and not under 'D'.
    condition
        What the factors depend on, in words.
    from_memory
        A factor has not been read in a published source and is to be confirmed.
    """

    name: str
    number: str
    clause: str
    principal: str
    factors: Mapping[str, str]
    condition: str
    from_memory: bool

    def __post_init__(self) -> None:
        """Freeze the factors."""
        object.__setattr__(self, "factors", MappingProxyType(dict(self.factors)))

    @property
    def text(self) -> str:
        """The combination as the trade writes it: '1.2D + 1.6L + 0.5Lr'."""
        return " + ".join(_written(factor, case) for case, factor in self.factors.items())

    def formula(self, symbols: Mapping[str, str]) -> str:
        """Return the combination as formula text.

        Parameters
        ----------
        symbols
            The symbol of each load case at hand (``{"D": "D", "D_min": "D_0", "Lr": "L_r"}``), and
            of 'f_1' where it has another name. A load case without a symbol is left out; without
            one for 'D_min', that of 'D' is taken.

        Raises
        ------
        CodeSetError
            A symbol is given for a load case there is none of, or none of these cases has one.
        """
        _known(case for case in symbols if case != "f_1")
        given = {"D_min": symbols["D"], **symbols} if "D" in symbols else dict(symbols)
        terms = [
            _product(factor.replace("f_1", given.get("f_1", "f_1")), given[case])
            for case, factor in self.factors.items()
            if case in given
        ]
        if not terms:
            raise CodeSetError(
                f"none of the load cases of combination {self.name}, {self.text}, has a symbol",
                hint=f"give symbols for {', '.join(self.factors)}",
            )
        return " + ".join(terms)


def expanded(
    number: str,
    clause: str,
    principal: str,
    parts: Iterable[str | tuple[str, ...]],
    *,
    from_memory: bool,
) -> tuple[Combination, ...]:
    """Return a combination with its alternatives expanded: 2 into 2a, 2b and 2c.

    Parameters
    ----------
    principal
        The load case it is about, or several of which each alternative has one: 'Lr|S|R'.
    parts
        '1.2 D' for a factor and its load case; a tuple of these for alternatives.
    """
    groups = [part if isinstance(part, tuple) else (part,) for part in parts]
    choices = list(itertools.product(*groups))
    letters = "abcdefghijkl" if len(choices) > 1 else ("",)
    found = []
    for letter, chosen in zip(letters, choices, strict=False):
        factors = {case: factor for factor, case in (part.split() for part in chosen)}
        notes = (
            _RESISTING if "D_min" in factors else "",
            _COMPANION if "f_1" in factors.values() else "",
        )
        found.append(
            Combination(
                name=f"{number}{letter}",
                number=number,
                clause=clause,
                principal=next(case for case in principal.split("|") if case in factors),
                factors=factors,
                condition="; ".join(note for note in notes if note),
                from_memory=from_memory,
            )
        )
    return tuple(found)


def reduced_to(
    combinations: Iterable[Combination], cases: Collection[str]
) -> tuple[Combination, ...]:
    """Return what is left of combinations where only some load cases are present.

    A combination about an absent case falls away unless H or T is left in it, absent cases lose
    their factors, and an alternative that then says no more than another of its number falls away.

    Raises
    ------
    CodeSetError
        A load case there is none of.
    """
    _known(cases)
    at_hand = {*cases, "D_min"} if "D" in cases else set(cases)
    left = [
        replace(c, factors={k: factor for k, factor in c.factors.items() if k in at_hand})
        for c in combinations
        if at_hand & ({"H", "T"} & set(c.factors) | {c.principal})
    ]
    return tuple(
        c for place, c in enumerate(left)
        if not any(_says_no_more(c, o, place < other) for other, o in enumerate(left) if o is not c)
    )  # fmt: skip


def _says_no_more(one: Combination, other: Combination, earlier: bool) -> bool:
    mine, its = set(one.factors.items()), set(other.factors.items())
    if one.number != other.number or not mine <= its:
        return False
    added = other.factors.keys() - one.factors.keys()
    return not added & _EITHER_SENSE if added else not earlier


def _known(cases: Iterable[str]) -> None:
    for case in cases:
        if case not in LOAD_CASES:
            raise CodeSetError(
                f"there is no load case '{case}'",
                hint=near_match(case, LOAD_CASES) or f"they are {', '.join(LOAD_CASES)}",
            )


def _product(factor: str, symbol: str) -> str:
    above, _, below = factor.partition("/")
    product = symbol if above == "1" else f"{above}*{symbol}"
    return f"{product}/{below}" if below else product


def _written(factor: str, case: str) -> str:
    above, _, below = factor.partition("/")
    outer, _, inner = above.partition("*")
    if inner:
        text = f"{outer}({inner}{case})"
    elif above == "f_1":
        text = f"f_1 {case}"
    else:
        text = case if above == "1" else f"{above}{case}"
    return f"{text}/{below}" if below else text
