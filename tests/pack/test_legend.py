"""What is said under a schedule about its columns."""

from __future__ import annotations

import json

from clinic import column, schedule

from calcbook.pack.schedules import legend


def test_words_brought_forward_need_no_symbol() -> None:
    """A carried column of words is headed by its meaning; one of numbers is explained."""
    source = column("from_where", "Source", "", "carried", ["table"], labels={})
    gamma = column("gamma", "Unit weight", "kN/m3", "carried", ["24"])
    told = json.dumps(
        legend(schedule("2.1", "materials", "", ["concrete"], columns=[gamma, source]))
    )
    assert "Unit weight" in told
    assert "Source" not in told


def factors(when: str, formula: str) -> str:
    """Return the legend of a column of factors by row, one of its cases as given."""
    cases = [{"when": "name == '1'", "formula": "1.4"}, {"when": when, "formula": formula}]
    part = column("a_D", "Dead load", "", "computed", ["1.4", "1.2"], cases=cases)
    return json.dumps(legend(schedule("2.1", "listed", "", ["1", "2a"], columns=[part])))


def test_numbers_listed_by_row_are_not_said_again() -> None:
    """Where each row's key has a number, the cells say it; a name or another test is printed."""
    assert "by row" in factors("name == '2a'", "0.75*0.6")
    assert "by row" not in factors("name == '2a'", "f_1")
    assert "by row" not in factors("use == 'office'", "0.5")
    assert "by row" not in factors("L_o > '4.8 kPa'", "0.5")


def numbered(*formulas: str, meaning: str = "Case W{}") -> str:
    """Return the legend of columns P_1, P_2 and so on with these formulas."""
    parts = [
        column(f"P_{n}", meaning.format(n), "kN", "computed", ["1"], formula=text)
        for n, text in enumerate(formulas, 1)
    ]
    return json.dumps(legend(schedule("2.1", "listed", "", ["1"], columns=parts)))


def test_numbered_columns_alike_are_told_once() -> None:
    """The first of P_1 to P_3 is printed with its formula; the others are likewise."""
    told = numbered("2*q_1*u_a", "2*q_2*u_a", "2*q_3*u_a")
    assert "likewise" in told
    assert "Case W1" in told
    assert "Case W2" not in told


def test_numbered_columns_that_differ_are_told_each() -> None:
    """Another factor, another name or a number that is not the column's own is no likeness."""
    for formulas in (("2*q_1", "3*q_2"), ("q_1", "r_2"), ("q_1", "q_1")):
        told = numbered(*formulas)
        assert "likewise" not in told
        assert "Case W2" in told
