"""Every combination over every effect: which governs each, and with what value."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook.errors import StaticsError
from calcbook.solvers import Outcome, Role, Solver

if TYPE_CHECKING:
    from collections.abc import Mapping


class Combined:
    """Effects (rows) under combinations: their values, largest and smallest.

    Parameters
    ----------
    names
        The combinations.
    values
        Shape (effects, combinations), coherent SI.
    """

    def __init__(self, names: list[str], values: np.ndarray) -> None:
        self.names, self.values = names, values

    def give(self, outcome: str, case: str) -> object:  # noqa: ARG002  no outcome is by case
        """Return an outcome over the effects."""
        place = (self.values.argmax if "largest" in outcome else self.values.argmin)(axis=1)
        if outcome.endswith("value"):
            return np.take_along_axis(self.values, place[:, None], axis=1)[:, 0]
        return [self.names[p] for p in place]

    def says(self) -> tuple[str, ...]:
        """Return how many combinations were formed."""
        effects, combinations = self.values.shape
        return (
            f"{combinations} combinations over {effects} effects; the first of equals is named",
        )


def run(given: Mapping[str, Any]) -> Combined:
    """Combine; raises StaticsError where a combination asks for a load case nobody gives."""
    effects, factors, names = given["effects"], given["factors"], given["combinations"]
    for case, column in factors.items():
        if case not in effects and np.any(column != 0):
            row = names[int(np.flatnonzero(column)[0])]
            raise StaticsError(
                f"combination {row} takes the load case {case}, and no effect is given for it",
                hint=f"give a column for {case}",
                named=(row, case),
            )
    shared = [case for case in effects if case in factors]
    if not names or not shared:
        raise StaticsError("there is nothing to combine")
    rows = np.stack([effects[case] for case in shared])
    return Combined(names, rows.T @ np.stack([factors[case] for case in shared]))


SOLVER = Solver(
    name="combinations",
    method="Sums of factor times effect for every combination; the largest and smallest are kept.",
    roles={
        "effects": Role("Effects by load case", "any", rows="effects", by_case=True),
        "factors": Role("Factors by load case", "number", rows="combinations", by_case=True),
        "combinations": Role("Combinations", "text", rows="combinations"),
    },
    outcomes={
        "largest value": Outcome("largest over the combinations", "any", rows="effects"),
        "largest": Outcome("combination with the largest", "text", rows="effects"),
        "smallest value": Outcome("smallest over the combinations", "any", rows="effects"),
        "smallest": Outcome("combination with the smallest", "text", rows="effects"),
    },
    run=run,
)
