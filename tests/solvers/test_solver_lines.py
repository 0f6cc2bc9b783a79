"""Solver lines of a workbook: roles filled, outcomes read, and what is refused."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from books import book, items
from jsonschema import Draft202012Validator

from calcbook import cases, statement

if TYPE_CHECKING:
    from calcbook.workbook import Workbook

FACTORS = {"D": {"1": "1.4", "2": "1.2", "3": "0.9"}, "W": {"1": "0", "2": "1", "3": "-1"}}


def combined(takes: dict[str, Any] | None = None, **given: Any) -> Workbook:
    """Return a workbook whose effects are combined by a solver."""
    found = book(**given)
    with found.section("Combinations") as s:
        s.entry("k", "Factor on wind", "1", unit="number")
        with s.schedule("effects", "Effects", key="effect", rows=[
            {"key": "B1", "D": "100 kN", "W": "30 kN"}, {"key": "B2", "D": "20 kN", "W": "40 kN"},
        ]) as t:  # fmt: skip
            t.entry("D", "Dead load", unit="force")
            t.entry("W", "Wind", unit="force")
        with s.schedule("listed", "Combinations", key="name", fixed=True,
                        rows=[{"key": k} for k in FACTORS["D"]]) as t:  # fmt: skip
            for case, factors in FACTORS.items():
                times = "*k" if case == "W" else ""
                t.line(f"f_{case}", case, cases=[(f"name == '{n}'", f + times)
                                                for n, f in factors.items()])  # fmt: skip
        s.solver("govern", "Governing combinations", by="combinations", takes=takes or {
            "effects": {"D": "D", "W": "W"}, "factors": {"D": "f_D", "W": "f_W"},
            "combinations": "name",
        })  # fmt: skip
        with s.schedule("result", "Governing", same_rows="effects") as t:
            t.solved("U_max", "Largest", of="govern", gives="largest value")
            t.solved("c_max", "Combination", of="govern", gives="largest")
            t.solved("U_min", "Smallest", of="govern", gives="smallest value", result=True)
            t.governing("U_min", "smallest")
        s.line("U_u = max(U_max)", "Largest of all", unit="force", result=True)
    return found


def test_a_solver_gives_columns_of_numbers_and_words() -> None:
    """The governing values and combinations are those of the sums worked by hand."""
    shown = items(combined().statement())
    columns = {c["name"]: c for c in shown["result"]["columns"]}
    assert pytest.approx(columns["U_max"]["si"]) == [150e3, 64e3]
    assert pytest.approx(columns["U_min"]["si"]) == [60e3, -22e3]
    assert columns["c_max"]["texts"] == ["2", "2"]
    assert columns["c_max"]["role"] == "text"
    assert shown["U_u"]["value"]["text"] == "150.0"


def test_a_solver_says_what_it_takes_and_lines_say_where_they_come_from() -> None:
    """The statement follows its schema, and names method, roles and the outcome read."""
    plain = combined().statement()
    Draft202012Validator(statement.schema()).validate(plain)
    solver = items(plain)["govern"]
    assert solver["kind"] == "solver"
    effects = {"role": "effects", "meaning": "Effects by load case", "case": "W", "name": "W"}
    assert effects | {"main": False} in solver["takes"]
    assert solver["says"] == ["3 combinations over 2 effects; the first of equals is named"]
    solved = items(plain)["result"]["columns"][0]["solved"]
    assert solved["number"] == solver["number"]


def test_a_row_without_a_value_is_named_and_the_rest_stands() -> None:
    """Rows solved each on its own: a bad one has no outcomes, with its reason, others theirs."""
    rows = {"effects": [("B1", {"D": "100 kN", "W": "30"}), ("B2", {"D": "1 kN", "W": "1 kN"})]}
    shown = items(combined(rows=rows).statement())
    assert shown["govern"]["problem"] is None
    assert "1 row left out for want of a value" in shown["govern"]["says"]
    for column in shown["result"]["columns"]:
        assert column["problem"] == ["row B1: not available because of W", ""]
    columns = {c["name"]: c for c in shown["result"]["columns"]}
    assert columns["U_max"]["si"] == pytest.approx([None, 2.2e3])
    assert columns["c_max"]["texts"] == ["", "2"]
    assert "not available because of U_max" in shown["U_u"]["problem"]


def test_no_row_with_a_value_is_a_problem_of_the_solver() -> None:
    """Where every row lacks a value, the solver says so."""
    shown = items(combined(rows={"effects": [("B1", {"D": "100 kN", "W": "30"})]}).statement())
    assert "no row has all its values" in shown["govern"]["problem"]


def with_wind(when: str, second: str = "500 kN") -> Workbook:
    """Return a workbook with a second wind case under a condition."""
    found = book()
    with found.section("Combinations") as s:
        s.entry("n", "Wind cases", "1", unit="count")
        with s.schedule("effects", "Effects", key="effect", rows=[
            {"key": "B1", "D": "100 kN", "W1": "30 kN", "W2": second},
        ]) as t:  # fmt: skip
            t.entry("D", "Dead load", unit="force")
            t.entry("W1", "Wind 1", unit="force")
            t.entry("W2", "Wind 2", unit="force", when=when)
        with s.schedule("listed", "Combinations", key="name", fixed=True, rows=[{"key": "4"}]) as t:
            t.line("f_D = 1.2", "Dead load")
            t.line("f_W = 1.0", "Wind")
        s.solver("govern", "Governing", by="combinations", takes={
            "effects": {"D": "D", "W1": "W1", "W2": "W2"}, "factors": {"D": "f_D", "W": "f_W"},
            "combinations": "name",
        })  # fmt: skip
        with s.schedule("result", "Governing", same_rows="effects") as t:
            t.solved("U", "Largest", of="govern", gives="largest value", result=True)
        s.line("U_u = max(U)", "Largest of all", unit="force", result=True)
    return found


@pytest.mark.parametrize(("when", "second", "largest"), [
    ("n >= 2", "500 kN", 150e3), ("n >= 2", "", 150e3), ("n >= 1", "500 kN", 620e3),
])  # fmt: skip
def test_a_solver_does_without_what_does_not_apply(when: str, second: str, largest: float) -> None:
    """A column whose condition does not hold is not combined, whatever stands in it."""
    shown = items(with_wind(when, second).statement())
    assert shown["U_u"]["value"]["si"] == largest
    taken = [told["name"] for told in shown["govern"]["takes"]]
    assert ("W2" in taken) == (largest > 200e3)


def test_many_cases_differ_in_what_applies() -> None:
    """The condition of a column varies over cases: each has the columns that apply in it."""
    found = with_wind("n >= 2")
    found.evaluate()
    many = cases.evaluate(found, {"n": ["1", "2", "1"]})
    assert pytest.approx(many["U_u"]) == [150e3, 620e3, 150e3]


def test_many_cases_are_each_solved() -> None:
    """Many cases at once give what each gives alone."""
    found = combined()
    found.evaluate()
    many = cases.evaluate(found, {"k": ["1", "2", "0"]})
    assert pytest.approx(many["U_u"]) == [150e3, 180e3, 140e3]


def test_the_fingerprint_knows_the_solver() -> None:
    """Reading another outcome changes the fingerprint."""
    one = combined()
    other = combined(takes={"effects": {"D": "D"}, "factors": {"D": "f_D"}, "combinations": "name"})
    assert one.statement()["fingerprint"] != other.statement()["fingerprint"]


@pytest.mark.parametrize(("takes", "said"), [
    ({"effects": {"D": "D"}, "factors": {"D": "f_D"}}, "lacks its 'combinations'"),
    ({"effects": "D", "factors": {"D": "f_D"}, "combinations": "name"}, "not filled as it should"),
    ({"effects": {"D": "D"}, "factors": {"D": "D"}, "combinations": "name"},
     "D is a force, and 'factors' of the solver is to be"),
    ({"effects": {"D": "D"}, "factors": {"D": "f_D"}, "combinations": "effect"}, "rows of effects"),
    ({"effects": {"D": "D"}, "factor": {"D": "f_D"}, "combinations": "name"}, "did you mean"),
    ({"effects": {"D": "k"}, "factors": {"D": "f_D"}, "combinations": "name"}, "to be a column"),
    ({"effects": {"D": "D_9"}, "factors": {"D": "f_D"}, "combinations": "name"}, "D_9"),
])  # fmt: skip
def test_roles_filled_wrongly_are_refused(takes: dict[str, Any], said: str) -> None:
    """A role that is missing, unknown or filled by another kind is named where it stands."""
    shown = {i["number"]: i for p in combined(takes).statement()["parts"] for i in p["items"]}
    assert said in shown["1.4"]["text"]


def test_a_case_without_its_load_is_refused() -> None:
    """A combination that asks for a load nobody gives has no value, and says which."""
    shown = items(combined({
        "effects": {"D": "D"}, "factors": {"D": "f_D", "W": "f_W"}, "combinations": "name",
    }).statement())  # fmt: skip
    assert "combination 2 takes the load case W" in shown["govern"]["problem"]


def test_outcomes_that_are_not_there_are_refused() -> None:
    """An unknown outcome, solver item or case is named with what would be right."""
    found = combined()
    with found.section("More") as s:
        s.solved("a_1", "One", of="govern", gives="larger value")
        s.solved("a_2", "Two", of="U_u", gives="largest value")
        s.solved("a_3", "Three", of="govern", gives="largest value")
        s.solver("b", "Other", by="combination", takes={})
        s.line("a_4 = 2*govern", "Four")
    said = [i["text"] for i in found.statement()["parts"][1]["items"]]
    expected = ["gives no 'larger value'", "is no solver", "in a schedule with the rows of effects",
                "did you mean 'combinations'", "solver"]  # fmt: skip
    assert [part in text for part, text in zip(expected, said, strict=True)] == [True] * 5
