"""The solver of combinations on its own: expansion, names, what is left out."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from calcbook import solvers
from calcbook.errors import StaticsError


def found(**given: Any) -> Any:
    """Return the solution of one effect under 1.2D + L + W + E and 0.9D + W, with changes."""
    plain = {
        "effects": {"D": [10.0], "L": [-4.0], "W1": [3.0], "W2": [-5.0], "E": [2.0]},
        "factors": {"D": [1.2, 0.9], "L": [1.0, 0.0], "W": [1.0, 1.0], "E": [1.0, 0.0]},
        "combinations": ["a", "b"],
        **given,
    }
    by_case = {
        role: {case: None if v is None else np.array(v) for case, v in plain[role].items()}
        for role in ("effects", "factors")
    }
    return solvers.solve("combinations", {**plain, **by_case}, array=False)


def test_each_wind_case_and_both_senses_of_earthquake_are_formed() -> None:
    """1.2D with two winds and two senses, 0.9D with two winds: six sums."""
    solution = found()
    assert solution.says()[0].startswith("6 combinations over 1 effect;")
    assert list(solution.give("largest value", "")) == pytest.approx([13.0])
    assert solution.give("largest with", "") == ["W1 +E"]
    assert list(solution.give("smallest value", "")) == pytest.approx([1.0])
    assert solution.give("smallest with", "") == ["W2 -E"]


def test_variable_loads_are_left_out_where_they_relieve() -> None:
    """Without the live load of -4 the largest is 17, and it is said what is left out."""
    solution = found(relieving="left out")
    assert list(solution.give("largest value", "")) == pytest.approx([17.0])
    assert solution.give("largest with", "") == ["W1 +E, no L"]
    assert list(solution.give("smallest value", "")) == pytest.approx([1.0])


def test_wind_cases_have_the_names_given() -> None:
    """Names stand in the order of the columns; too few are refused."""
    assert found(**{"wind cases": ["WX", "WY"]}).give("smallest with", "") == ["WY -E"]
    with pytest.raises(StaticsError, match="1 wind cases are named, and 2 columns"):
        found(**{"wind cases": ["WX"]})


def test_what_does_not_act_is_named() -> None:
    """A load case given as None is 0 and said; wind columns beyond those named are not."""
    effects = {"D": [10.0], "L": None, "W1": [3.0], "W2": None, "E": None}
    solution = found(effects=effects)
    assert solution.says()[1] == "taken as 0, not acting: L, E"
    assert list(solution.give("largest value", "")) == pytest.approx([15.0])


def test_a_load_case_without_effects_is_refused() -> None:
    """A combination that asks for a load nobody gives names both."""
    with pytest.raises(StaticsError, match="combination a takes the load case E") as caught:
        found(effects={"D": [1.0], "L": [1.0], "W1": [1.0]})
    assert caught.value.hint == "give a column for E"
    with pytest.raises(StaticsError, match="nothing to combine"):
        found(effects={"X": [1.0]})


def test_uplift_is_looked_for_where_asked() -> None:
    """Only rows whose negative value is uplift are told to lift or to be held down."""
    effects = {"D": [10.0, 10.0, 90.0], "L": [0.0] * 3, "W1": [-20.0] * 3, "E": [0.0] * 3}
    solution = found(effects=effects, lifting=["uplift", "other sense", "uplift"])
    assert solution.give("uplift", "") == ["lifts", "", "held down"]


def test_rows_without_a_value_are_left_out() -> None:
    """A nan in one row leaves the others as they are alone."""
    effects = {"D": [np.nan, 10.0], "L": [0.0, -4.0], "W1": [1.0, 3.0], "E": [0.0, 2.0]}
    solution = found(effects=effects)
    largest = solution.give("largest value", "")
    assert np.isnan(largest[0])
    assert largest[1] == pytest.approx(13.0)
    assert solution.give("largest", "")[0] == ""
