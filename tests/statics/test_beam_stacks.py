"""Many beams of one shape at once, against the same beams one by one."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest

from calcbook.errors import StaticsError
from calcbook.statics.beam import Beam, Support
from calcbook.statics.beam_diagrams import QUANTITIES
from calcbook.statics.beam_loads import LineLoad, Load, PointLoad
from calcbook.statics.beam_stacks import BeamStack

BEAMS, CASES, SPANS, POINTS = 6, 3, 3, 2


def one_by_one(spans: np.ndarray, stiffness: np.ndarray, kinds: tuple[str, ...]) -> Beam:
    """Return the beam a row of the stack stands for."""
    ends = np.concatenate([[0.0], np.cumsum(spans)])
    named = zip("ABCD", ends.tolist(), kinds, strict=True)
    supports = [Support(label, x, kind) for label, x, kind in named if kind != "free"]
    stretches = list(zip(ends[:-1].tolist(), ends[1:].tolist(), stiffness.tolist(), strict=True))
    return Beam(supports, float(ends[-1]), stretches)


@pytest.mark.parametrize(
    "kinds",
    [
        ("pinned", "roller", "roller", "pinned"),
        ("fixed", "pinned", "pinned", "free"),
        ("free", "pinned", "fixed", "free"),
    ],
)
def test_a_stack_is_its_beams(kinds: tuple[str, ...]) -> None:
    """Reactions, peaks and their places are those of each beam solved alone, combined too."""
    random = np.random.default_rng(3)
    spans = random.uniform(3, 9, (BEAMS, SPANS))
    stiffness = random.uniform(1e6, 9e6, (BEAMS, SPANS))
    line = random.uniform(-4e3, 9e3, (BEAMS, CASES, SPANS))
    points = random.uniform(-4e4, 9e4, (BEAMS, CASES, SPANS, POINTS))
    at = spans[..., None] * np.sort(random.uniform(0.1, 0.9, (BEAMS, SPANS, POINTS)), axis=-1)
    factors = random.uniform(-1, 2, (4, CASES))
    stack = BeamStack(spans, stiffness, kinds).solve(line, points, at).combined(factors)
    assert stack.residual < 1e-11
    held = [k != "free" for k in kinds]
    for b in range(BEAMS):
        loads: list[Load] = []
        begins = np.cumsum(spans[b]) - spans[b]
        for case, s in np.ndindex(CASES, SPANS):
            start, end = begins[s], begins[s] + spans[b, s]
            loads.append(LineLoad(start, end, line[b, case, s], case=case))
            loads += [
                PointLoad(start + x, size, case=case)
                for x, size in zip(at[b, s], points[b, case, s], strict=True)
            ]
        alone = one_by_one(spans[b], stiffness[b], kinds).solve(loads).combined(factors)
        np.testing.assert_allclose(stack.reactions[b][:, held], alone.reactions, rtol=1e-9)
        for quantity in QUANTITIES:
            ours, theirs = stack.span_extremes(quantity), alone.span_extremes(quantity)
            scale = 1e-9 * np.abs([theirs.max, theirs.min]).max()
            np.testing.assert_allclose(ours.max[b], theirs.max, rtol=1e-9, atol=scale)
            np.testing.assert_allclose(ours.min[b], theirs.min, rtol=1e-9, atol=scale)
        whole = alone.envelope("moment")
        assert stack.envelope("moment").row_max[b] == whole.row_max
        assert stack.envelope("moment").x_max[b] == pytest.approx(float(whole.x_max))


def test_uniform_loads_need_no_point_loads() -> None:
    """Two equal spans of the handbooks, for two lengths."""
    stack = BeamStack([[5, 5], [10, 10]], 1e7, ("pinned",) * 3)
    result = stack.solve(np.full((2, 1, 2), 10.0))
    np.testing.assert_allclose(result.reactions[:, 0], [[18.75, 62.5, 18.75], [37.5, 125, 37.5]])
    np.testing.assert_allclose(result.extremes("moment").min[:, 0], [-31.25, -125])
    assert result.pieces("moment").coefficients.shape == (2, 1, 2, 4)
    assert result.pieces("moment").start.shape == (2, 2)


REFUSED: dict[str, tuple[tuple[Any, ...], str]] = {
    "a span of nothing": (([[5, 0]], 1e7, ("pinned",) * 3), "length of span 2 of beam 1"),
    "stiffness of nothing": (([[5, 5]], [[1.0, math.nan]], ("pinned",) * 3), "EI of span 2"),
    "too few kinds": (([[5, 5]], 1e7, ("pinned",) * 2), "2 spans have 3 ends"),
    "free inside": (([[5, 5]], 1e7, ("pinned", "free", "pinned")), "support 2 from the left"),
    "an unknown kind": (([[5, 5]], 1e7, ("pinned", "pined", "pinned")), "support 2"),
    "a mechanism": (([[5, 5]], 1e7, ("free", "pinned", "free")), "mechanism"),
    "no support": (([[5.0]], 1e7, ("free", "free")), "no support"),
}


@pytest.mark.parametrize("name", REFUSED)
def test_stacks_that_cannot_stand_are_refused(name: str) -> None:
    """The message names beam, span or support by number."""
    given, words = REFUSED[name]
    with pytest.raises(StaticsError, match=words):
        BeamStack(*given)


def test_loads_that_do_not_fit_are_refused() -> None:
    """Another number of spans, places off the span or out of order, and nan."""
    stack = BeamStack([[5, 5]], 1e7, ("pinned",) * 3)
    line = np.zeros((1, 1, 2))
    with pytest.raises(StaticsError, match="do not fit"):
        stack.solve(np.zeros((1, 1, 3)))
    with pytest.raises(StaticsError, match="inside span 2"):
        stack.solve(line, np.ones((1, 1, 2, 1)), [[[2], [5]]])
    with pytest.raises(StaticsError, match="inside span 1"):
        stack.solve(line, np.ones((1, 1, 2, 2)), [[[3, 2], [2, 3]]])
    with pytest.raises(StaticsError, match="no number"):
        stack.solve(line + np.nan)
