"""How fast many beams are solved: 1,000 beams of three spans under 20 combinations.

`beams_vs_numpy` measures the package's batched beams against the same beams hand-written in numpy
by one who knows the one shape: pinned supports, a uniform load and one point load on each span.
Both give, for each beam and combination, the reactions, and greatest and least shear and bending
moment with their places.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
import timing

from calcbook.statics.beam_stacks import BeamStack

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

BEAMS, COMBINATIONS, CASES, SPANS = 1_000, 20, 5, 3
AGREE = 1e-9


class Given(NamedTuple):
    """The beams: lengths and EI, loads of the cases, places of the point loads, factors."""

    spans: Array
    stiffness: Array
    line: Array
    points: Array
    at: Array
    factors: Array


def beams_vs_numpy() -> float:
    """Return our time over that of numpy, after comparing all figures of both."""
    random = np.random.default_rng(11)
    spans = random.uniform(4.0, 9.0, (BEAMS, SPANS))
    stiffness = random.uniform(1e7, 4e7, (BEAMS, SPANS))
    line = random.uniform(1e3, 30e3, (BEAMS, CASES, SPANS))
    points = random.uniform(1e3, 90e3, (BEAMS, CASES, SPANS))
    at = spans * random.uniform(0.2, 0.8, (BEAMS, SPANS))
    factors = random.uniform(0.0, 1.6, (COMBINATIONS, CASES))
    given = Given(spans, stiffness, line, points, at, factors)
    found, theirs = by_calcbook(given), by_numpy(given)
    for name, values in theirs.items():
        scale = AGREE * np.abs(values).max()
        np.testing.assert_allclose(found[name], values, rtol=AGREE, atol=scale, err_msg=name)
    times = timing.best({
        "ours": lambda: by_calcbook(given),
        "numpy": lambda: by_numpy(given),
    })  # fmt: skip
    timing.say(
        f"{BEAMS:,} beams of {SPANS} spans, {CASES} load cases, {COMBINATIONS} combinations, "
        f"reactions and peaks of shear and moment with their places: ours "
        f"{timing.span(times['ours'])}, numpy {np.__version__} {timing.span(times['numpy'])}"
    )
    return times["ours"] / times["numpy"]


def by_calcbook(given: Given) -> dict[str, Array]:
    """Return the figures by the package."""
    stack = BeamStack(given.spans, given.stiffness, ("pinned",) * (SPANS + 1))
    cases = stack.solve(given.line, given.points[..., np.newaxis], given.at[..., np.newaxis])
    result = cases.combined(given.factors)
    shear, moment = result.extremes("shear"), result.extremes("moment")
    return {
        "reactions": result.reactions,
        "V max": shear.max, "V min": shear.min, "x V max": shear.x_max, "x V min": shear.x_min,
        "M max": moment.max, "M min": moment.min, "x M max": moment.x_max, "x M min": moment.x_min,
    }  # fmt: skip


def by_numpy(given: Given) -> dict[str, Array]:
    """Return the figures as one would by hand: slope deflection, then each span in two parts."""
    spans, stiffness, w, P, at, factors = given  # noqa: N806
    L, a = spans[:, None], at[:, None]  # noqa: N806
    b = L - a
    fixed_left = -w * L**2 / 12 - P * a * b**2 / L**2
    fixed_right = -w * L**2 / 12 - P * a**2 * b / L**2
    M_left, M_right = _end_moments(spans, stiffness, fixed_left, fixed_right)  # noqa: N806
    V_left = w * L / 2 + P * b / L + (M_right - M_left) / L  # noqa: N806
    w, P, M_left, V_left = (factors @ one for one in (w, P, M_left, V_left))  # noqa: N806
    V_a = V_left - w * a  # noqa: N806
    V_right = V_a - P - w * b  # noqa: N806
    M_a = M_left + (V_left + V_a) / 2 * a  # noqa: N806
    M_end = M_a + (V_a - P + V_right) / 2 * b  # noqa: N806
    reactions = np.zeros((BEAMS, COMBINATIONS, SPANS + 1))
    reactions[..., :-1] += V_left
    reactions[..., 1:] -= V_right
    begin = (np.cumsum(spans, axis=1) - spans)[:, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        s_1, s_2 = V_left / w, (V_a - P) / w
    s_1 = np.where((s_1 > 0) & (s_1 < a), s_1, 0.0)
    s_2 = np.where((s_2 > 0) & (s_2 < b), s_2, 0.0)
    top_1 = M_left + V_left * s_1 - w * s_1**2 / 2
    top_2 = M_a + (V_a - P) * s_2 - w * s_2**2 / 2
    x_0, x_a, x_L = (np.broadcast_to(x, w.shape) for x in (begin, begin + a, begin + L))  # noqa: N806
    M = np.stack([M_left, top_1, M_a, top_2, M_end], axis=-1)  # noqa: N806
    x_M = np.stack([x_0, x_0 + s_1, x_a, x_a + s_2, x_L], axis=-1)  # noqa: N806
    V = np.stack([V_left, V_a, V_a - P, V_right], axis=-1)  # noqa: N806
    x_V = np.stack([x_0, x_a, x_a, x_L], axis=-1)  # noqa: N806
    return {"reactions": reactions, **_peaks("V", V, x_V), **_peaks("M", M, x_M)}


def _end_moments(
    spans: Array, stiffness: Array, fixed_left: Array, fixed_right: Array
) -> tuple[Array, Array]:
    """Return the moments at the ends of the spans, sagging positive, by slope deflection."""
    k = stiffness / spans
    K, load = np.zeros((BEAMS, SPANS + 1, SPANS + 1)), np.zeros((BEAMS, SPANS + 1, CASES))  # noqa: N806
    for i in range(SPANS):
        K[:, i, i] += 4 * k[:, i]
        K[:, i + 1, i + 1] += 4 * k[:, i]
        K[:, i, i + 1] += 2 * k[:, i]
        K[:, i + 1, i] += 2 * k[:, i]
        load[:, i] -= fixed_left[..., i]
        load[:, i + 1] += fixed_right[..., i]
    turn = np.linalg.solve(K, load).swapaxes(1, 2)
    near, far, k = turn[..., :-1], turn[..., 1:], k[:, None]
    return fixed_left + k * (4 * near + 2 * far), fixed_right - k * (2 * near + 4 * far)


def _peaks(name: str, values: Array, places: Array) -> dict[str, Array]:
    values, places = (v.reshape(BEAMS, COMBINATIONS, -1) for v in (values, places))
    i, j = values.argmax(axis=-1)[..., None], values.argmin(axis=-1)[..., None]
    return {
        f"{name} max": np.take_along_axis(values, i, -1)[..., 0],
        f"x {name} max": np.take_along_axis(places, i, -1)[..., 0],
        f"{name} min": np.take_along_axis(values, j, -1)[..., 0],
        f"x {name} min": np.take_along_axis(places, j, -1)[..., 0],
    }
