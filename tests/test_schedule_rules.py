"""Rules of a schedule's rows: told apart, missing in the middle of a running sum, counted."""

from __future__ import annotations

import books

ROWS = {"rows": [("a", {"at": "1", "F": "2 kN"}), ("b", {"at": "2", "F": "two"}),
                 ("c", {"at": "1", "F": "5 kN"})]}  # fmt: skip


def loads(rows: dict[str, list[tuple[str, dict[str, str]]]]) -> dict[str, object]:
    """Return the columns of a schedule of loads at places, by name."""
    book = books.book(rows=rows)
    with book.section("Trial") as s, s.schedule("rows", "Rows") as t:
        t.text("at", "Place")
        t.distinct("at")
        t.entry("F", "Load", unit="force")
        t.line("P = running(F)", "So far", unit="force")
        t.line("Q = running(F) + sum(F)", "Something of all", unit="force")
        t.line("n = running(0*F/'1 kN' + 1)", "Rows so far", unit="count")
    found = book.statement()["parts"][0]["items"][0]
    return {column["name"]: column for column in found["columns"]} | {"errors": found["errors"]}


def test_rows_that_have_to_differ_name_each_other() -> None:
    """The later of two rows with the same words says which row has them already."""
    found = loads(ROWS)
    assert found["at"]["problem"] == ["", "", "c is at 1, where a is already"]  # type: ignore[index]


def test_a_column_that_is_not_there_cannot_be_told_apart() -> None:
    """A rule on a column that the schedule lacks is an error of the schedule."""
    book = books.book(rows=ROWS)
    with book.section("Trial") as s, s.schedule("rows", "Rows") as t:
        t.text("at", "Place")
        t.text("F", "Load")
        t.distinct("att")
    errors = book.statement()["parts"][0]["items"][0]["errors"]
    assert "has no column 'att'" in errors[0]
    assert "did you mean 'at'" in errors[0]


def test_a_column_whose_condition_cannot_be_accepted_is_named() -> None:
    """An entry under a condition on a refused line, and what uses it, stop nothing else."""
    book = books.book(rows=ROWS)
    with book.section("Trial") as s:
        s.line("n = 1 +", "Refused", unit="count")
        with s.schedule("rows", "Rows") as t:
            t.text("at", "Place")
            t.entry("F", "Load", unit="force", when="n > 2")
            t.line("G = 2*F", "Twice", unit="force")
    found = book.statement()["parts"][0]["items"][1]
    assert found["errors"] == ["F is not available because of n"]
    told = {c["name"]: c["problem"] for c in found["columns"]}
    assert told["at"] is None
    assert told["G"] == ["not available because of F"] * 3


def test_a_running_sum_stands_down_to_the_row_that_is_missing() -> None:
    """Rows above a bad one have their sum, it and those below do not; a sum of all has none."""
    found = loads(ROWS)
    running = found["P"]
    assert running["si"] == [2000.0, None, None]  # type: ignore[index]
    told = running["problem"]  # type: ignore[index]
    assert told[0] == ""
    assert told[1:] == ["row b: not available because of F", "row c: not available because of F"]
    assert all(found["Q"]["problem"])  # type: ignore[index]


def test_counts_are_whole_numbers() -> None:
    """A column of counts is printed without decimals."""
    rows = {"rows": [(k, {"at": k, "F": "1 kN"}) for k in "abc"]}
    assert loads(rows)["n"]["texts"] == ["1", "2", "3"]  # type: ignore[index]


def test_one_notebook_serves_all_marks() -> None:
    """Declarations filled in for another mark: each keeps its own entries and results."""
    one = books.lines("q = 2*p", entries={"p": "3"})
    one.evaluate()
    other = one.filled("B2", books.book({"p": "5"}).inputs)
    assert other.statement()["mark"] == "B2"
    assert (one.results.values["q"], other.results.values["q"]) == (6.0, 10.0)
    assert one.mark is None
