"""What a workbook asks of a solved beam: reactions, extremes by case and combination, curves."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping, Sequence

    from numpy.typing import NDArray

    from calcbook.statics.patterns import Patterned

    Array = NDArray[np.float64]
    Whole = NDArray[np.intp]
    Read = float | Array | list[str]

POINTS = 9
NOISE = 1e-10
"""Part of the largest value below which a value is what rounding left."""


@dataclass(frozen=True)
class Names:
    """What the rows of a workbook are called: load cases, combinations, supports and free ends.

    Attributes
    ----------
    cases
        Every load case of the beam.
    strength, service
        The combinations.
    listed
        The load cases a workbook lists as rows.
    held
        For each row of supports and free ends: the place among the supports, -1 for a free end.
    start
        Where the beam begins, in the measure the places are given in, m.
    """

    cases: tuple[str, ...]
    strength: tuple[str, ...]
    service: tuple[str, ...]
    listed: tuple[str, ...]
    held: tuple[int, ...]
    start: float


class FoundBeam:
    """A beam under its load cases, each alone, and under combinations.

    Parameters
    ----------
    solved
        Its combinations are the load cases one by one, then strength, then service.
    names
        What rows and cases are called.
    patterned
        The load cases that act span by span.
    """

    def __init__(self, solved: Patterned, names: Names, patterned: Sequence[str]) -> None:
        self.solved, self.names, self.patterned = solved, names, tuple(patterned)
        cases, strength = len(names.cases), len(names.strength)
        self._alone = range(cases)
        self._strength = range(cases, cases + strength)
        self._service = range(cases + strength, cases + strength + len(names.service))

    def give(self, outcome: str, case: str) -> object:
        """Return an outcome; see ``calcbook.solvers.beam.SOLVER``.

        What is nothing but rounding beside the largest of its sort is 0.
        """
        found = _OUTCOMES[outcome](self, case)
        if isinstance(found, list) or "place" in outcome:
            return found
        values = np.asarray(found, dtype=float)
        clean = np.where(np.abs(values) < NOISE * self._largest(outcome), 0.0, values)
        return clean if clean.ndim else float(clean)

    def _largest(self, outcome: str) -> float:
        """Return the largest magnitude of shear, moment or deflection in any row."""
        quantity = next((q for q in ("moment", "deflection") if q in outcome), "shear")
        found = self.solved.result.extremes(quantity)
        return float(max(np.abs(found.max).max(), np.abs(found.min).max()))

    def says(self) -> tuple[str, ...]:
        """Return the residual of equilibrium and how live load was arranged on the spans."""
        spans = self.solved.result.spans
        said = [f"equilibrium is closed to {self.solved.cases.residual:.0e} of the loads"]
        if self.patterned:
            loaded = int(self.solved.loaded.any(axis=0).sum())
            every = "every arrangement" if self.solved.exact else "the standard arrangements"
            of = "1 span" if len(spans) == 1 else f"{loaded} of {len(spans)} spans"
            tried = f"{every} on them tried" if loaded > 1 else "with it and without it tried"
            said.append(f"live load is given on {of}: {tried}" if loaded else "no live load given")
        return tuple(said)

    def curves(self) -> list[dict[str, Any]]:
        """Return largest and smallest shear and moment along the beam over strength combinations.

        Each is a mapping with ``name`` and lists ``x`` (m), ``largest`` and ``smallest`` (SI).
        """
        rows = self._rows(self._strength)
        found = []
        for name in ("shear", "moment"):
            x, values = self.solved.result.curve(name, POINTS)
            part = values[rows] if len(rows) else np.zeros((1, len(x)))
            found.append(
                {
                    "name": name,
                    "x": (x + self.names.start).tolist(),
                    "largest": part.max(axis=0).tolist(),
                    "smallest": part.min(axis=0).tolist(),
                }
            )
        return found

    # --- rows of the result -----------------------------------------------------------------

    def _rows(self, combinations: range) -> Whole:
        inside = np.isin(self.solved.combination, combinations)
        return np.flatnonzero(inside)

    def _at_supports(self, values: Array) -> Array:
        """Return values of the supports in the rows of supports and free ends, 0 for the latter."""
        return np.array([values[n] if n >= 0 else 0.0 for n in self.names.held])

    def _each(self, combinations: range, quantity: str, *, largest: bool) -> tuple[Array, Whole]:
        """Return the extreme of each combination over its arrangements, and in which row."""
        found = self.solved.result.extremes(quantity)
        values = found.max if largest else -found.min
        rows = [self._rows(range(c, c + 1)) for c in combinations]
        # Of arrangements that are alike the last counts: it has the fewest spans loaded.
        best = np.array([r[np.flatnonzero(_alike_largest(values[r]))[-1]] for r in rows], dtype=int)
        return (found.max if largest else found.min)[best], best

    # --- outcomes ---------------------------------------------------------------------------

    def reaction(self, case: str) -> Array:
        """Return the reactions of a load case in full."""
        return self._at_supports(self.solved.cases.reactions[self.names.cases.index(case)])

    def reaction_moment(self, case: str) -> Array:
        """Return the moments of the supports in a load case in full."""
        return self._at_supports(self.solved.cases.reaction_moments[self.names.cases.index(case)])

    def extreme_reaction(self, case: str, *, largest: bool) -> Array:
        """Return the extreme reactions of a load case over its arrangements."""
        place = self.names.cases.index(case)
        each = self.solved.result.reactions[self._rows(range(place, place + 1))]
        return self._at_supports(each.max(axis=0) if largest else each.min(axis=0))

    def of_case(self, case: str, quantity: str, *, place: bool) -> float:
        """Return the largest value of a load case in full, or its place."""
        found = self.solved.cases.extremes(quantity)
        row = self.names.cases.index(case)
        return float(found.x_max[row]) + self.names.start if place else float(found.max[row])

    def listed(self, quantity: str, *, largest: bool) -> Array:
        """Return the extremes of the load cases a workbook lists, over their arrangements."""
        values, _ = self._each(self._alone, quantity, largest=largest)
        return np.array([values[self.names.cases.index(case)] for case in self.names.listed])

    def combined(self, kind: str, quantity: str, *, largest: bool) -> Array:
        """Return the extremes of each combination of a kind."""
        return self._each(self._of(kind), quantity, largest=largest)[0]

    def place(self, kind: str, quantity: str, *, largest: bool) -> Array:
        """Return where the extremes of each combination are."""
        _, rows = self._each(self._of(kind), quantity, largest=largest)
        found = self.solved.result.extremes(quantity)
        return (found.x_max if largest else found.x_min)[rows] + self.names.start

    def loaded(self, kind: str, quantity: str, *, largest: bool) -> list[str]:
        """Return the spans with live load on them in the extremes of each combination."""
        _, rows = self._each(self._of(kind), quantity, largest=largest)
        return [self._spans(row) for row in rows]

    def in_span(self, quantity: str, *, largest: bool) -> Array:
        """Return the extreme over strength combinations in the span after each row."""
        values = self._span_values(quantity, self._strength, largest=largest)
        return self._after(values.max(axis=0) if largest else values.min(axis=0))

    def by(self, quantity: str, *, largest: bool) -> list[str]:
        """Return the combination of that extreme."""
        rows = self._rows(self._strength)
        values = self._span_values(quantity, self._strength, largest=largest)
        best = [rows[np.argmax(_alike_largest(one if largest else -one))] for one in values.T]
        named = [self.names.strength[self.solved.combination[r] - len(self._alone)] for r in best]
        found = values.max(axis=0) if largest else values.min(axis=0)
        size = np.abs(found) > NOISE * self._largest(quantity)
        return self._worded([name if some else "" for name, some in zip(named, size, strict=True)])

    def deflection(self, combinations: range) -> Array:
        """Return the deflection of largest magnitude in the span after each row."""
        down = self._span_values("deflection", combinations).max(axis=0)
        up = self._span_values("deflection", combinations, largest=False).min(axis=0)
        return self._after(np.where(down >= -up, down, up))

    def deflection_of(self, case: str) -> Array:
        """Return it for a load case over its arrangements."""
        place = self.names.cases.index(case)
        return self.deflection(range(place, place + 1))

    def total_deflection(self) -> Array:
        """Return it over the service combinations."""
        return self.deflection(self._service)

    def _of(self, kind: str) -> range:
        return self._strength if kind == "strength" else self._service

    def _spans(self, row: int) -> str:
        _, labels = self.solved.source(int(row))
        if not labels:
            return "none"
        bearing = int(self.solved.loaded.any(axis=0).sum())
        every = len(labels) == bearing and bearing > 1
        return "all" if every else ", ".join(labels)

    def _span_values(self, quantity: str, combinations: range, *, largest: bool = True) -> Array:
        found = self.solved.result.span_extremes(quantity)
        rows = self._rows(combinations)
        if not len(rows):
            return np.zeros((1, found.max.shape[1]))
        if quantity == "shear":
            return np.maximum(found.max, -found.min)[rows]
        return (found.max if largest else found.min)[rows]

    def _after(self, spans: Array) -> Array:
        """Return values of the spans in the rows of supports and free ends, 0 after the last."""
        return np.append(spans, 0.0)

    def _worded(self, spans: Sequence[str]) -> list[str]:
        return [*spans, ""]


def _alike_largest(values: Array) -> NDArray[np.bool_]:
    """Return which values are the largest, rounding left out."""
    slack = 1e-9 * float(np.abs(values).max(initial=0.0))
    found: NDArray[np.bool_] = values >= values.max() - slack
    return found


def _outcomes() -> Mapping[str, Callable[[FoundBeam, str], Read]]:
    """Return how each outcome is read."""
    found: dict[str, Callable[[FoundBeam, str], Read]] = {
        "reaction": lambda b, case: b.reaction(case),
        "reaction moment": lambda b, case: b.reaction_moment(case),
        "largest reaction": lambda b, case: b.extreme_reaction(case, largest=True),
        "smallest reaction": lambda b, case: b.extreme_reaction(case, largest=False),
        "moment of the case": lambda b, case: b.of_case(case, "moment", place=False),
        "place of the moment of the case": lambda b, case: b.of_case(case, "moment", place=True),
        "deflection in the span": lambda b, case: b.deflection_of(case),
        "service deflection in the span": lambda b, _: b.total_deflection(),
    }
    for which in ("largest", "smallest"):
        large = which == "largest"
        for q in ("moment", "shear"):
            found[f"{which} {q} by case"] = _bind("listed", q, largest=large)
            found[f"{which} {q} in the span"] = _bind("in_span", q, largest=large)
            found[f"combination of the {which} {q} in the span"] = _bind("by", q, largest=large)
        for kind, q in (("strength", "moment"), ("strength", "shear"), ("service", "deflection")):
            found[f"{which} {q}"] = _bind("combined", kind, q, largest=large)
            found[f"place of the {which} {q}"] = _bind("place", kind, q, largest=large)
            found[f"spans loaded for the {which} {q}"] = _bind("loaded", kind, q, largest=large)
    return found


def _bind(method: str, *args: str, largest: bool) -> Callable[[FoundBeam, str], Read]:
    def read(beam: FoundBeam, _case: str) -> Read:
        found: Read = getattr(beam, method)(*args, largest=largest)
        return found

    return read


_OUTCOMES = _outcomes()
