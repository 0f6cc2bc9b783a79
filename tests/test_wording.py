"""The words that screen, paper and terminal share."""

from __future__ import annotations

import pytest

from calcbook.wording import cases_told, compared, solver_takes, symbols_in


def side(text: str, unit: str = "m") -> dict[str, str]:
    """Return a side of a check as a statement gives it."""
    return {"text": text, "unit": unit}


@pytest.mark.parametrize(
    ("relation", "told"),
    [
        ("<=", "demand 18.40, limit 20.00 m, ratio 0.92"),
        ("<", "demand 18.40, limit 20.00 m, ratio 0.92"),
        (">=", "value 18.40 m, at least 20.00 m, ratio 0.92"),
        (">", "value 18.40 m, more than 20.00 m, ratio 0.92"),
        ("==", "value 18.40 m, to be 20.00 m, ratio 0.92"),
        ("!=", "value 18.40 m, not to be 20.00 m, ratio 0.92"),
    ],
)
def test_sides_are_told_by_their_relation(relation: str, told: str) -> None:
    """A limit from above has a demand, one from below a value that is at least something."""
    check = {"relation": relation, "demand": side("18.40"), "limit": side("20.00")}
    assert compared(check | {"ratio_text": "0.92"}) == told


def test_a_side_without_a_value_is_told() -> None:
    """A missing side is not available; with neither side there is nothing to tell."""
    half = {"relation": "<=", "demand": side(""), "limit": side("20.00"), "ratio_text": ""}
    assert compared(half) == "demand not available, limit 20.00 m"
    assert compared(half | {"limit": side("")}) == ""


def test_only_cases_that_follow_each_other_are_told_together() -> None:
    """One formula before and after another is told twice: the first case that holds counts."""
    rows = [("a", "x"), ("b", "x"), ("c", "y"), ("", "x")]
    cases = [{"when": when, "formula": formula} for when, formula in rows]
    told = [("x", ["a", "b"]), ("y", ["c"]), ("x", [""])]
    assert cases_told({"cases": cases}) == told


def test_symbols_are_found_in_words() -> None:
    """q_z is a symbol; a file's name and a workbook's entry are words."""
    assert symbols_in("at q_z, not K_zt") == [
        ("at ", False), ("q_z", True), (", not ", False), ("K_zt", True),
    ]  # fmt: skip
    assert symbols_in("see a_b.toml and x/q_z") == [("see a_b.toml and x/q_z", False)]


def test_what_a_solver_takes_is_told_shortly_where_it_has_main_roles() -> None:
    """Main roles are told with their names; the others as names, those by load case as letters."""
    taken = [
        {"meaning": "strips", "case": "", "name": "strip", "main": True},
        {"meaning": "strips from", "case": "", "name": "x_1", "main": False},
        *({"meaning": "load of strips", "case": c, "name": f"w_{c}", "main": False} for c in "DL"),
    ]
    assert solver_takes({"takes": taken}) == [
        ("strips", [("", "strip")]), ("and of these", [("", "x_1")]),
        ("and by load case", [("", "w")]),
    ]  # fmt: skip
    plain = [one | {"main": False} for one in taken]
    assert solver_takes({"takes": plain}) == [
        ("strips", [("", "strip")]), ("strips from", [("", "x_1")]),
        ("load of strips", [("D", "w_D"), ("L", "w_L")]),
    ]  # fmt: skip
