"""Live load on some spans and not on others: every arrangement, and which governs.

Cutting the live load at the supports makes it one load case for each span; an arrangement is a sum
of some of them. Up to `ALL_UP_TO` loaded spans every arrangement is tried. Beyond, these are: all
spans, every other span (both ways), and each two adjacent spans alone, as codes of practice for
continuous beams ask (common practice); also no span at all.
"""

from __future__ import annotations

import dataclasses
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics.beam_loads import count_cases, split_by_span

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    from calcbook.statics.beam import Beam
    from calcbook.statics.beam_loads import Load
    from calcbook.statics.beam_results import BeamResult

    Array = NDArray[np.float64]
    Flags = NDArray[np.bool_]

ALL_UP_TO = 8
"""Loaded spans up to which every arrangement is tried: 256 of them."""


@dataclass(frozen=True)
class Patterned:
    """Combinations of load cases with some of them patterned by span.

    Attributes
    ----------
    cases
        The load cases in full, unfactored.
    result
        One row for each combination and arrangement.
    combination
        Index of the combination of each row, shape (rows,).
    loaded
        Which spans carry the patterned load, shape (rows, spans). A span on which none acts counts
        as not loaded.
    exact
        Whether every arrangement was tried, not the standard ones only.
    """

    cases: BeamResult
    result: BeamResult
    combination: NDArray[np.intp]
    loaded: Flags
    exact: bool

    def source(self, row: int) -> tuple[int, tuple[str, ...]]:
        """Return the combination of a row and the labels of the spans its live load is on."""
        spans = zip(self.result.spans, self.loaded[row], strict=True)
        return int(self.combination[row]), tuple(s.label for s, on in spans if on)


def arrangements(spans: int) -> Flags:
    """Return the arrangements of a load that may be on each of a number of spans or not.

    Returns
    -------
    array
        Shape (arrangements, spans), all spans first, none last: every arrangement up to
        `ALL_UP_TO` spans, the standard ones beyond.
    """
    if spans <= ALL_UP_TO:
        numbers = np.arange(2**spans - 1, -1, -1)[:, np.newaxis]
        found: Flags = (numbers >> np.arange(spans - 1, -1, -1)) % 2 == 1
        return found
    each = np.arange(spans)
    adjacent = (each == each[:-1, np.newaxis]) | (each == each[1:, np.newaxis])
    return np.vstack([each >= 0, each % 2 == 0, each % 2 == 1, adjacent, each < 0])


def solve_patterned(
    beam: Beam,
    loads: Sequence[Load],
    factors: ArrayLike,
    patterned: Sequence[int],
    cases: int | None = None,
) -> Patterned:
    """Solve a beam for combinations in which some load cases act on any of the spans.

    Parameters
    ----------
    beam, loads, cases
        As for `Beam.solve`.
    factors
        Shape (combinations, cases).
    patterned
        Indices of the load cases that act span by span; in a row all of them are on the same
        spans. A combination in which their factors are zero gives one row.

    Raises
    ------
    StaticsError
        As `Beam.solve`; for factors of another shape; for a patterned case that is not there.
    """
    count = count_cases(loads, cases)
    live = sorted(set(patterned))
    if live and not 0 <= live[0] <= live[-1] < count:
        raise StaticsError(f"a patterned load case is not one of the {count}, counted from 0")
    f = np.asarray(factors, dtype=float)
    if f.ndim != 2 or f.shape[1] != count:  # noqa: PLR2004  combinations and cases
        raise StaticsError(
            f"the factors have the shape {f.shape}, and there are {count} load cases",
            hint="give one row for each combination, with one factor for each load case",
        )
    parts = split_by_span(beam, loads)
    bearing = np.array([any(load.case in live for load in part) for part in parts])
    ways = np.zeros((len(_tried(bearing)), len(parts)), dtype=bool)
    ways[:, bearing] = _tried(bearing)
    solved = beam.solve(_by_span(loads, parts, live, count), count + len(live) * len(parts))
    rows, combination, loaded = _rows(f, live, ways)
    full = np.eye(count, count + len(live) * len(parts))
    for i, case in enumerate(live):
        full[case, case] = 0.0
        full[case, count + i * len(parts) : count + (i + 1) * len(parts)] = 1.0
    exact = int(bearing.sum()) <= ALL_UP_TO
    return Patterned(solved.combined(full), solved.combined(rows), combination, loaded, exact)


def _tried(bearing: Flags) -> Flags:
    return arrangements(int(bearing.sum()))


def _by_span(
    loads: Sequence[Load], parts: Sequence[Sequence[Load]], live: Sequence[int], count: int
) -> list[Load]:
    """Return the loads with each patterned case as one case for each span, after the others."""
    found = [load for load in loads if load.case not in live]
    for i, case in enumerate(live):
        for s, part in enumerate(parts):
            at = count + i * len(parts) + s
            found += [dataclasses.replace(load, case=at) for load in part if load.case == case]
    return found


def _rows(f: Array, live: Sequence[int], ways: Flags) -> tuple[Array, NDArray[np.intp], Flags]:
    """Return the factors of all rows, and the combination and the loaded spans of each."""
    steady = f.copy()
    steady[:, live] = 0.0
    none = np.zeros((1, ways.shape[1]), dtype=bool)
    factors, combination, loaded = [], [], []
    for i, row in enumerate(f):
        used = ways if row[live].any() else none
        by_span = [row[case] * used for case in live]
        factors.append(np.hstack([np.tile(steady[i], (len(used), 1)), *by_span]))
        combination.append(np.full(len(used), i))
        loaded.append(used)
    return np.vstack(factors), np.concatenate(combination), np.vstack(loaded)
