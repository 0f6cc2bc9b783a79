"""What a beam is made of: supports, inner hinges and spans."""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass

from calcbook.errors import StaticsError, near_match

KINDS = ("pinned", "roller", "fixed", "spring")
"""A roller holds a beam as a pin does: the beam carries no force along its axis."""


@dataclass(frozen=True)
class Support:
    """A support of a beam.

    Parameters
    ----------
    label
        As on the drawing.
    x
        Place from the left end, m.
    kind
        ``pinned`` or ``roller`` (held vertically, free to turn), ``fixed``, or ``spring``.
    kv
        Vertical stiffness of a spring, N/m; None: it does not give.
    kr
        Stiffness of a spring against turning, N m/rad; None: free to turn.

    Raises
    ------
    StaticsError
        For an unknown kind, a spring without stiffness or a stiffness that is not positive.
    """

    label: str
    x: float
    kind: str = "pinned"
    kv: float | None = None
    kr: float | None = None

    def __post_init__(self) -> None:
        """Refuse what is no support."""
        if self.kind not in KINDS:
            raise StaticsError(
                f"support {self.label} is of the unknown kind '{self.kind}'",
                hint=near_match(self.kind, KINDS) or f"kinds: {', '.join(KINDS)}",
                named=(self.label,),
            )
        given = [k for k in (self.kv, self.kr) if k is not None]
        if bool(given) != (self.kind == "spring"):
            raise StaticsError(
                f"support {self.label} is {self.kind} "
                + ("with the stiffness of a spring" if given else "without a stiffness"),
                hint="a spring has a vertical stiffness, a stiffness against turning, or both; "
                "other supports have none",
                named=(self.label,),
            )
        if not all(math.isfinite(k) and k > 0 for k in given):
            raise StaticsError(
                f"the stiffness of support {self.label} is not a positive number",
                hint="leave out a support that holds nothing; make one pinned that does not give",
                named=(self.label,),
            )

    @property
    def vertical(self) -> float:
        """Return the vertical stiffness, N/m; infinite where the support does not give."""
        return math.inf if self.kv is None else self.kv

    @property
    def turning(self) -> float:
        """Return the stiffness against turning, N m/rad; infinite for fixed, 0 for free."""
        return math.inf if self.kind == "fixed" else self.kr or 0.0


@dataclass(frozen=True)
class Hinge:
    """An inner hinge: the beam passes shear there but no bending moment.

    Parameters
    ----------
    label
        As on the drawing.
    x
        Place from the left end, m.
    """

    label: str
    x: float


@dataclass(frozen=True)
class Span:
    """The part of a beam between two supports, or beyond the last one.

    Attributes
    ----------
    label
        ``A-B`` between supports A and B; ``overhang left of A``, ``overhang right of B``.
    x1, x2
        Its ends, m.
    overhang
        Whether it lies beyond the supports.
    """

    label: str
    x1: float
    x2: float
    overhang: bool = False

    @property
    def length(self) -> float:
        """Return its length, m."""
        return self.x2 - self.x1


def spans_of(supports: tuple[Support, ...], length: float) -> tuple[Span, ...]:
    """Return the spans of a beam from left to right.

    Parameters
    ----------
    supports
        From left to right.
    length
        Of the beam, m.
    """
    first, last = supports[0], supports[-1]
    found = []
    if first.x > 0:
        found.append(Span(f"overhang left of {first.label}", 0.0, first.x, overhang=True))
    found += [Span(f"{a.label}-{b.label}", a.x, b.x) for a, b in itertools.pairwise(supports)]
    if last.x < length:
        found.append(Span(f"overhang right of {last.label}", last.x, length, overhang=True))
    return tuple(found)
