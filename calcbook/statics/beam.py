"""A beam of any spans: supports, hinges, overhangs and stiffness that changes along it.

Signs: loads down positive, reactions up positive, applied moments and moments of the supports
clockwise positive; bending moment sagging positive; shear is the derivative of the bending moment,
positive where the left part pushes up; deflection down positive, slope its derivative.
"""

from __future__ import annotations

import dataclasses
from typing import TYPE_CHECKING

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics import beam_checks, beam_members
from calcbook.statics.beam_loads import (
    SAME_PLACE,
    LineLoad,
    Load,
    MomentLoad,
    PointLoad,
    check_loads,
    count_cases,
    named,
)
from calcbook.statics.beam_members import Acting, Line
from calcbook.statics.beam_parts import Hinge, Span, Support, spans_of
from calcbook.statics.beam_results import BeamResult

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Whole = NDArray[np.intp]

__all__ = ["Beam", "Hinge", "Span", "Support"]

OUT_OF_BALANCE = 1e-7
"""Relative residual, of equilibrium or of fit at the nodes, beyond which a solution is refused."""


class Beam:
    """A straight beam in bending; it carries no force along its axis.

    Parameters
    ----------
    supports
        In any order.
    length
        Of the whole beam, overhangs included, m.
    stiffness
        EI, N m2: one value, or (from, to, EI) for stretches that cover the beam.
    hinges
        Inner hinges, none at a support or an end.

    Raises
    ------
    StaticsError
        For a beam that cannot stand (naming what moves), or that is given wrongly: no support,
        supports or hinges off the beam or in one place, a hinge at a support or an end, stiffness
        that is not positive, overlaps, leaves a gap or differs by more than 1e12.
    """

    def __init__(
        self,
        supports: Iterable[Support],
        length: float,
        stiffness: float | Sequence[tuple[float, float, float]],
        hinges: Iterable[Hinge] = (),
    ) -> None:
        beam_checks.check_length(length)
        self.length = float(length)
        given = sorted(supports, key=lambda s: s.x)
        self.hinges = tuple(sorted(hinges, key=lambda h: h.x))
        beam_checks.check_places(given, self.hinges, self.length)
        self.supports = tuple(self._at_end(s) for s in given)
        self.stretches = beam_checks.stretches(stiffness, self.length)
        beam_checks.check_stable(self.supports, self.hinges, self.length)
        self.spans: tuple[Span, ...] = spans_of(self.supports, self.length)

    def solve(self, loads: Sequence[Load], cases: int | None = None) -> BeamResult:
        """Solve the beam for all load cases at once.

        Parameters
        ----------
        loads
            Each with the index of its load case.
        cases
            Number of load cases; without it, one more than the highest index. A case without
            loads gives zeros.

        Raises
        ------
        StaticsError
            For a load off the beam, of no length, no number, or of a case that is not there; a
            moment exactly at a hinge; a beam so ill-conditioned that equilibrium or fit is lost.
        """
        count = count_cases(loads, cases)
        check_loads(loads, self.length)
        cuts = self._cuts(loads)
        line = self._line(cuts)
        solved = beam_members.solve(line, self._acting(loads, count, cuts))
        held = np.searchsorted(cuts[line.nodes], [s.x - self._near for s in self.supports])
        borders = np.searchsorted(cuts, [s.x1 - self._near for s in self.spans]).tolist()
        result = BeamResult(
            start=line.start[:, 0],
            length=line.length[:, 0],
            stiffness=line.stiffness[:, 0],
            bending=solved.moment[:, :, 0],
            slope_at=solved.slope[:, 0],
            deflection_at=solved.deflection[:, 0],
            reactions=solved.reactions[held, 0].T,
            reaction_moments=solved.reaction_moments[held, 0].T,
            residuals=solved.residuals[0],
            span_pieces=tuple(
                slice(a, b) for a, b in zip(borders, [*borders[1:], len(cuts) - 1], strict=True)
            ),
            supports=self.supports,
            spans=self.spans,
        )
        self._check_residual(result)
        return result

    @property
    def _near(self) -> float:
        return SAME_PLACE * self.length

    def _at_end(self, support: Support) -> Support:
        """Move a support that is an end of the beam but for rounding to that end."""
        for end in (0.0, self.length):
            if support.x != end and abs(support.x - end) <= self._near:
                return dataclasses.replace(support, x=end)
        return support

    def _nodes(self) -> list[float]:
        inner = [s.x for s in self.supports] + [h.x for h in self.hinges]
        return sorted({0.0, *inner, self.length})

    def _cuts(self, loads: Sequence[Load]) -> Array:
        """Return the places of all cuts; one that is a node but for rounding is that node."""
        found = self._nodes()
        others = [b for _, b, _ in self.stretches]
        for load in loads:
            others += [load.x1, load.x2] if isinstance(load, LineLoad) else [load.x]
        for x in sorted(set(others)):
            if min(abs(x - y) for y in found) > self._near:
                found.append(x)
        return np.array(sorted(found))

    def _line(self, cuts: Array) -> Line:
        nodes = np.searchsorted(cuts, np.array(self._nodes()))
        vertical, turning = np.zeros(len(nodes)), np.zeros(len(nodes))
        hinged = np.isin(cuts[nodes], [h.x for h in self.hinges])
        for support in self.supports:
            at = int(np.searchsorted(cuts[nodes], support.x))
            vertical[at], turning[at] = support.vertical, support.turning
        middle = 0.5 * (cuts[1:] + cuts[:-1])
        ends = np.array([b for _, b, _ in self.stretches[:-1]])
        each = np.array([e for *_, e in self.stretches])[np.searchsorted(ends, middle)]
        return Line(cuts[:, None, None], each[:, None, None], nodes, vertical, turning, hinged)

    def _acting(self, loads: Sequence[Load], count: int, cuts: Array) -> Acting:
        pieces = len(cuts) - 1
        left, right = np.zeros((2, pieces, 1, count))
        forces, moments = np.zeros((2, pieces + 1, 1, count))
        for i, load in enumerate(loads):
            if isinstance(load, LineLoad):
                a, b = _nearest(cuts, load.x1), _nearest(cuts, load.x2)
                part = (cuts[a : b + 1] - cuts[a]) / (cuts[b] - cuts[a])
                w = load.w1 * (1 - part) + load.end * part
                left[a:b, 0, load.case] += w[:-1]
                right[a:b, 0, load.case] += w[1:]
                continue
            at = _nearest(cuts, load.x)
            if isinstance(load, PointLoad):
                forces[at, 0, load.case] += load.P
            else:
                self._refuse_at_hinge(load, i)
                moments[at, 0, load.case] += load.M
        return Acting(left, right, forces, moments)

    def _refuse_at_hinge(self, load: MomentLoad, index: int) -> None:
        for hinge in self.hinges:
            if abs(load.x - hinge.x) <= self._near:
                name = named(load, index)
                raise StaticsError(
                    f"{name} acts exactly at hinge {hinge.label}",
                    hint="give it just left or just right of the hinge: only one side can take it",
                    named=(name, hinge.label),
                )

    def _check_residual(self, result: BeamResult) -> None:
        if result.residual < OUT_OF_BALANCE:
            return
        shortest = min(self.spans, key=lambda s: s.length)
        raise StaticsError(
            f"the beam is so ill-conditioned that rounding spoils the result: {result.residual:.1g}"
            " of it does not balance or fit",
            hint=f"the shortest span is {shortest.label}: compare its length, and EI and springs, "
            "with the others",
            named=(shortest.label,),
        )


def _nearest(cuts: Array, x: float) -> int:
    return int(np.argmin(np.abs(cuts - x)))
