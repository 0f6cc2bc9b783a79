"""Many beams of one shape solved at once: the same supports, other lengths, stiffness and loads."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics import beam_members
from calcbook.statics.beam_checks import check_stable
from calcbook.statics.beam_diagrams import Diagrams
from calcbook.statics.beam_members import Acting, Line
from calcbook.statics.beam_parts import Support

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    Array = NDArray[np.float64]

KINDS = ("pinned", "roller", "fixed", "free")


class BeamStack:
    """Beams with the same number of spans and the same kinds of supports.

    Parameters
    ----------
    spans
        Lengths, shape (beams, spans), m.
    stiffness
        EI of each span, shape (beams, spans), N m2.
    kinds
        Of the ends of the spans from left to right, shape (spans + 1,): ``pinned``, ``roller``,
        ``fixed``, and at the two ends also ``free`` for an overhang.

    Raises
    ------
    StaticsError
        For lengths or stiffness that are not positive, kinds that do not fit or leave the beams
        free to move.
    """

    def __init__(self, spans: ArrayLike, stiffness: ArrayLike, kinds: Sequence[str]) -> None:
        self.spans = np.atleast_2d(np.asarray(spans, dtype=float))
        self.stiffness = np.broadcast_to(np.asarray(stiffness, dtype=float), self.spans.shape)
        self.kinds = tuple(kinds)
        for name, values in (("length", self.spans), ("EI", self.stiffness)):
            _check_positive(name, values)
        self._check_kinds()

    def solve(
        self, line: ArrayLike, points: ArrayLike | None = None, at: ArrayLike | None = None
    ) -> Diagrams:
        """Solve all beams for all load cases.

        Parameters
        ----------
        line
            Uniform load on each span, shape (beams, cases, spans), N/m down.
        points
            Point loads on each span, shape (beams, cases, spans, loads), N down.
        at
            Where these act, shape (beams, spans, loads), m from the left end of the span, rising
            and inside it.

        Returns
        -------
        Diagrams
            With an axis of beams in front of the rows; reactions at the ends of all spans, 0 at
            free ends.

        Raises
        ------
        StaticsError
            For loads of another shape, no number, or off their spans.
        """
        places = np.zeros((*self.spans.shape, 0)) if at is None else np.asarray(at, dtype=float)
        uniform = np.asarray(line, dtype=float)
        shape = (*uniform.shape[:2], self.spans.shape[1], places.shape[-1])
        forces = np.zeros(shape) if points is None else np.asarray(points, dtype=float)
        self._check_loads(uniform, forces, places)
        cut = self._cut(places)
        w = np.repeat(np.moveaxis(uniform, -1, 0), shape[-1] + 1, axis=0)
        solved = beam_members.solve(cut, Acting(w, w, *_at_cuts(forces)))
        return Diagrams(
            start=cut.start,
            length=cut.length,
            stiffness=cut.stiffness,
            bending=solved.moment,
            slope_at=solved.slope,
            deflection_at=solved.deflection,
            reactions=np.moveaxis(solved.reactions, 0, -1),
            reaction_moments=np.moveaxis(solved.reaction_moments, 0, -1),
            residuals=solved.residuals,
            span_pieces=tuple(cut.members),
        )

    def _cut(self, places: Array) -> Line:
        """Return the beams cut at the ends of the spans and at the point loads."""
        beams, spans = self.spans.shape
        each = places.shape[-1] + 1
        ends = np.zeros((beams, spans + 1))
        np.cumsum(self.spans, axis=1, out=ends[:, 1:])
        begins = np.concatenate([ends[:, :-1, None], ends[:, :-1, None] + places], axis=-1)
        cuts = np.concatenate([begins.reshape(beams, -1), ends[:, -1:]], axis=1)
        rigid = np.array([0.0 if kind == "free" else np.inf for kind in self.kinds])
        fixed = np.array([np.inf if kind == "fixed" else 0.0 for kind in self.kinds])
        return Line(
            cuts=np.ascontiguousarray(cuts.T)[..., np.newaxis],
            stiffness=np.repeat(self.stiffness.T, each, axis=0)[..., np.newaxis],
            nodes=np.arange(spans + 1) * each,
            vertical=rigid,
            turning=fixed,
            hinged=np.zeros(spans + 1, dtype=bool),
        )

    def _check_kinds(self) -> None:
        spans = self.spans.shape[1]
        if len(self.kinds) != spans + 1:
            raise StaticsError(
                f"{spans} spans have {spans + 1} ends, and {len(self.kinds)} kinds are given"
            )
        for i, kind in enumerate(self.kinds):
            if kind not in KINDS or (kind == "free" and 0 < i < spans):
                raise StaticsError(
                    f"support {i + 1} from the left is '{kind}'",
                    hint=f"kinds: {', '.join(KINDS)}; free only at the two ends",
                    named=(str(i + 1),),
                )
        held = [
            Support(str(i + 1), float(i), kind)
            for i, kind in enumerate(self.kinds)
            if kind != "free"
        ]
        if not held:
            raise StaticsError("the beams have no support")
        check_stable(held, (), float(spans))

    def _check_loads(self, uniform: Array, forces: Array, places: Array) -> None:
        beams, spans = self.spans.shape
        fits = (
            uniform.ndim == 3  # noqa: PLR2004  beams, cases and spans
            and uniform.shape[::2] == (beams, spans)
            and forces.shape == (*uniform.shape, places.shape[-1])
            and places.shape[:-1] == (beams, spans)
        )
        if not fits:
            raise StaticsError(
                "the loads do not fit the beams",
                hint=f"there are {beams} beams of {spans} spans; point loads need their places",
            )
        if not all(np.isfinite(a).all() for a in (uniform, forces, places)):
            raise StaticsError("a load of the beams is no number")
        zero = np.zeros((beams, spans, 1))
        borders = np.concatenate([zero, places, self.spans[..., np.newaxis]], axis=-1)
        wrong = np.argwhere((np.diff(borders, axis=-1) <= 0).any(axis=-1))
        if len(wrong):
            beam, span = wrong[0] + 1
            raise StaticsError(
                f"the point loads of beam {beam} do not rise inside span {span}",
                hint="give their places from the left end of the span, in order",
                named=(str(beam), str(span)),
            )


def _check_positive(name: str, values: Array) -> None:
    wrong = np.argwhere(~(np.isfinite(values) & (values > 0)))
    if len(wrong):
        beam, span = wrong[0] + 1
        raise StaticsError(
            f"the {name} of span {span} of beam {beam} is not a positive number",
            named=(str(beam), str(span)),
        )


def _at_cuts(forces: Array) -> tuple[Array, Array]:
    """Return the point loads, and no moments, at the cuts: (pieces + 1, beams, cases)."""
    beams, cases, spans, each = forces.shape
    found = np.zeros((spans * (each + 1) + 1, beams, cases))
    by_span = found[:-1].reshape(spans, each + 1, beams, cases)
    by_span[:, 1:] = forces.transpose(2, 3, 0, 1)
    return found, np.zeros_like(found)
