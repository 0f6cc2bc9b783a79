"""What is answered when a value is needed: plain data, with printed texts."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from calcbook.studies.choosing import Result
    from calcbook.studies.entered import Entered

CLOSED, BRACKETED = "closed form", "bracketed"
ONE, SEVERAL, NONE, EVERY = "one", "several", "none", "every"


@dataclass(frozen=True)
class Answer:
    """A value of the entry, verified by recomputation.

    Attributes
    ----------
    text, si
        What would be typed, with enough figures that the target is met within 1e-9; in SI.
    result
        The result that gives, as printed.
    rounded, rounded_result, rounded_satisfied
        A suggestion in four figures (for a check, on the side that satisfies it), the result it
        gives, and for a check whether it is satisfied.
    way
        'closed form' or 'bracketed'.
    formula
        For a closed form, the formula of the entry.
    given
        What stands for the target in that formula, in words.
    interval, tolerance
        For a bracketed value, the interval it was found in and what it was refined to.
    stretch
        Where every value of a range serves, that range in words; the value is its nearest end.
    """

    text: str
    si: float
    result: str
    rounded: str
    rounded_result: str
    rounded_satisfied: bool | None
    way: str
    formula: str
    given: str
    interval: str
    tolerance: str
    stretch: str


@dataclass(frozen=True)
class Nearest:
    """The attainable value nearest to the target: the entry there, and the result."""

    entry: str
    result: str


@dataclass(frozen=True)
class Needed:
    """What an entry would have to be.

    Attributes
    ----------
    result, entry
        What was chosen.
    target
        The target as printed; for a check 'satisfied exactly' or its ratio.
    verdict
        'one', 'several', 'none' or 'every' (the result does not change, and is the target).
    answers
        The one nearest to the value in force first.
    nearest
        Where there is none: the nearest attainable value.
    searched
        The range that was searched, in words.
    notes
        What else is to be said: jumps over the target, an open range, where it is entered.
    """

    result: Result
    entry: Entered
    target: str
    verdict: str
    answers: tuple[Answer, ...]
    nearest: Nearest | None
    searched: str
    notes: tuple[str, ...]
