"""Every combination over every effect: which governs each, with which wind case, and its value."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook.errors import StaticsError
from calcbook.solvers import Outcome, Role, Solver

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

WIND, EARTHQUAKE = "W", "E"
#: What live load, roof live load (or either half of it), snow or rain is called: it may be absent.
VARIABLE = ("L", "L_1", "Lr", "Lr_a", "Lr_b", "S", "R")
LEFT_OUT = "left out"
UPLIFT = "uplift"
NOTHING, LIFTS, HELD = "", "lifts", "held down"


@dataclass(frozen=True)
class Side:
    """The largest (or smallest) values: shape (effects,) each, and what they consist of.

    Attributes
    ----------
    values
        The values, coherent SI.
    names, beside
        The combination of each, and in words the wind case, the sense of earthquake and the loads
        left out.
    """

    values: np.ndarray
    names: list[str]
    beside: list[str]


@dataclass(frozen=True)
class Combined:
    """Effects (rows) under combinations: the largest and the smallest of each.

    Attributes
    ----------
    largest, smallest
        Over all combinations, each with every wind case and both senses of earthquake.
    lifting
        Whether a negative value of a row is uplift.
    count
        How many combinations were formed.
    idle
        The load cases that do not act.
    """

    largest: Side
    smallest: Side
    lifting: list[bool]
    count: int
    idle: list[str]

    def give(self, outcome: str, case: str) -> object:  # noqa: ARG002  no outcome is by case
        """Return an outcome over the effects."""
        if outcome == "uplift":
            return [self._uplift(row) for row in range(len(self.lifting))]
        side = self.largest if outcome.startswith("largest") else self.smallest
        if outcome.endswith("value"):
            return side.values
        return side.beside if outcome.endswith("with") else side.names

    def _uplift(self, row: int) -> str:
        if not self.lifting[row]:
            return NOTHING
        return LIFTS if self.smallest.values[row] < 0.0 else HELD

    def says(self) -> tuple[str, ...]:
        """Return how many combinations were formed, and what does not act."""
        effects = len(self.lifting)
        noun = "effect" if effects == 1 else "effects"
        said = f"{self.count} combinations over {effects} {noun}; the first of equals is named"
        if not self.idle:
            return (said,)
        return said, f"taken as 0, not acting: {', '.join(self.idle)}"


@dataclass(frozen=True)
class _Formed:
    """A combination with its wind case: factor by column of effects, and its name."""

    name: str
    beside: str
    factors: Mapping[str, float]


def run(given: Mapping[str, Any]) -> Combined:
    """Combine; raises StaticsError where a combination asks for a load case nobody gives."""
    effects = {case: v for case, v in given["effects"].items() if v is not None}
    idle = [case for case in given["effects"] if case not in effects and not _wind(case)]
    factors, names = given["factors"], given["combinations"]
    winds = _named([case for case in effects if _wind(case)], given.get("wind cases"))
    if not names or not any(case in factors or _wind(case) for case in effects):
        raise StaticsError("there is nothing to combine")
    _refuse_lacking(given["effects"], factors, names)
    formed = [
        one
        for row, name in enumerate(names)
        for one in _formed(name, {c: float(f[row]) for c, f in factors.items()}, winds)
    ]
    relieving = given.get("relieving", "") == LEFT_OUT
    rows = len(next(iter(effects.values())))
    return Combined(
        _side(formed, effects, 1.0, relieving=relieving),
        _side(formed, effects, -1.0, relieving=relieving),
        [text == UPLIFT for text in given.get("lifting", [NOTHING] * rows)],
        len(formed),
        idle,
    )


def _named(winds: list[str], names: Sequence[str] | None) -> dict[str, str]:
    """Return the columns of wind, each with the name of its case; W alone needs none."""
    if names is None:
        return {case: case if case != WIND else "" for case in winds}
    if len(names) != len(winds):
        raise StaticsError(
            f"{len(names)} wind cases are named, and {len(winds)} columns of wind are given",
            hint="give a column for each named wind case",
        )
    return dict(zip(winds, names, strict=True))


def _wind(case: str) -> bool:
    """Whether a column of effects is wind, or one of the named wind cases: W, W1, W2."""
    return (case.startswith(WIND) and case[1:].isdigit()) or case == WIND


def _refuse_lacking(
    effects: Mapping[str, object], factors: Mapping[str, np.ndarray], names: Sequence[str]
) -> None:
    for case, column in factors.items():
        given = any(map(_wind, effects)) if case == WIND else case in effects
        if not given and np.any(column != 0):
            row = names[int(np.flatnonzero(column)[0])]
            raise StaticsError(
                f"combination {row} takes the load case {case}, and no effect is given for it",
                hint=f"give a column for {case}",
                named=(row, case),
            )


def _formed(name: str, factors: dict[str, float], winds: Mapping[str, str]) -> Iterator[_Formed]:
    """Yield a combination with each wind case and both senses of earthquake."""
    wind, shake = factors.pop(WIND, 0.0), factors.get(EARTHQUAKE, 0.0)
    blown = winds if wind else {"": ""}
    for case, beside in (blown or {"": ""}).items():
        taken = {**factors, case: wind} if case else factors
        if not shake:
            yield _Formed(name, beside, taken)
            continue
        for sense, sign in ((1.0, "+E"), (-1.0, "-E")):
            both = f"{beside} {sign}".strip()
            yield _Formed(name, both, {**taken, EARTHQUAKE: sense * shake})


def _side(
    formed: Sequence[_Formed], effects: Mapping[str, np.ndarray], sense: float, *, relieving: bool
) -> Side:
    """Return the largest values (``sense`` 1) or the smallest (-1) over combinations."""
    cases = list(effects)
    parts = np.stack([sense * effects[case] for case in cases])
    if relieving:
        for place, case in enumerate(cases):
            if case in VARIABLE:
                parts[place] = np.maximum(parts[place], 0.0)
    matrix = np.array([[one.factors.get(case, 0.0) for case in cases] for one in formed])
    totals = matrix @ parts
    chosen = [formed[place] for place in totals.argmax(axis=0)]
    relieved = [case for case in cases if relieving and case in VARIABLE]
    beside = []
    for row, one in enumerate(chosen):
        absent = [c for c in relieved if one.factors.get(c) and sense * effects[c][row] < 0.0]
        without = f"no {', '.join(absent)}" if absent else ""
        beside.append(", ".join(part for part in (one.beside, without) if part))
    return Side(sense * totals.max(axis=0) + 0.0, [one.name for one in chosen], beside)


SOLVER = Solver(
    name="combinations",
    method=(
        "Sums of factor times effect for every combination of the code, with each named wind case "
        "and both senses of E; the largest and the smallest are kept."
    ),
    roles={
        "effects": Role("Effects by load case", "any", rows="effects", by_case=True, may_idle=True),
        "factors": Role("Factors by load case", "number", rows="combinations", by_case=True),
        "combinations": Role("Combinations", "text", rows="combinations"),
        "wind cases": Role("Names of the wind cases", "text", rows="wind cases", optional=True),
        "relieving": Role("Variable loads where they relieve", "text", optional=True),
        "lifting": Role("What a negative value is", "text", rows="effects", optional=True),
    },
    outcomes={
        "largest value": Outcome("largest over the combinations", "any", rows="effects"),
        "largest": Outcome("combination with the largest", "text", rows="effects"),
        "largest with": Outcome("what acts with the largest", "text", rows="effects"),
        "smallest value": Outcome("smallest over the combinations", "any", rows="effects"),
        "smallest": Outcome("combination with the smallest", "text", rows="effects"),
        "smallest with": Outcome("what acts with the smallest", "text", rows="effects"),
        "uplift": Outcome("whether the smallest lifts", "text", rows="effects"),
    },
    run=run,
    independent=frozenset({"effects"}),
)
