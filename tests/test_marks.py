"""Results gathered over all marks of a workbook."""

from __future__ import annotations

from typing import Any

from calcbook.marks import gathered, gathered_rows


def line(name: str, si: float | None, **more: Any) -> dict[str, Any]:
    """Return a line of a statement in kN."""
    text = "" if si is None else f"{si / 1e3:g}"
    value = {"si": si, "unit": "kN", "text": text}
    return {"kind": "line", "name": name, "applies": True, "why": "", "problem": None,
            "value": value, **more}  # fmt: skip


def mark(*items: dict[str, Any]) -> dict[str, Any]:
    """Return the statement of one mark: prose, and one section."""
    return {"parts": [{"kind": "prose"}, {"kind": "section", "items": list(items)}]}


def word(name: str, text: str, kind: str = "text") -> dict[str, Any]:
    """Return a text or a choice."""
    key = "option" if kind == "choice" else "text"
    return {"kind": kind, "name": name, "applies": True, "why": "", "problem": None, key: text}


def column(item: dict[str, Any], name: str) -> dict[str, Any]:
    """Return a column that was gathered."""
    found: dict[str, Any] = next(c for c in item["columns"] if c["name"] == name)
    return found


def test_one_row_a_mark_one_column_a_result() -> None:
    """Marks keep their order; numbers, words and options stand in columns of their own."""
    found = gathered(
        "column-accumulation",
        {
            "C-2": mark(line("N", 2000.0), word("at", "1"), word("use", "office", "choice")),
            "C-10": mark(line("N", 5000.0), word("at", "2"), word("use", "roof", "choice")),
        },
    )
    assert found["rows"] == ["C-2", "C-10"]
    assert found["problem"] is None
    assert column(found, "N")["si"] == [2000.0, 5000.0]
    assert (column(found, "N")["unit"], column(found, "N")["texts"]) == ("kN", ["2", "5"])
    assert column(found, "at")["texts"] == ["1", "2"]
    assert column(found, "use")["texts"] == ["office", "roof"]
    assert column(found, "N")["problem"] is None


def test_a_mark_without_the_result_says_so() -> None:
    """A line that is not there, does not apply or has no value leaves its reason in its row."""
    found = gathered(
        "columns",
        {
            "A": mark(line("N", 1000.0)),
            "B": mark(),
            "C": mark(line("N", None, applies=False, why="lateral is gravity only")),
            "D": mark(line("N", None, problem="not available because of b_X")),
        },
    )
    reasons = column(found, "N")["problem"]
    assert reasons == [
        "",
        "is not in this mark",
        "does not apply: lateral is gravity only",
        "not available because of b_X",
    ]
    assert column(found, "N")["si"] == [1000.0, None, None, None]


def test_the_row_that_governs_is_gathered_by_name() -> None:
    """'U.largest' is the key of the row with the largest U, words like any other."""
    schedule = {
        "kind": "schedule", "name": "strength", "applies": True, "why": "", "problem": None,
        "envelope": [
            {"column": "U", "which": "largest", "row": "2a"},
            {"column": "U", "which": "smallest", "row": "7 E-"},
        ],
    }  # fmt: skip
    found = gathered("columns", {"A": mark(schedule)})
    assert column(found, "U.largest")["texts"] == ["2a"]
    assert column(found, "U.smallest")["texts"] == ["7 E-"]
    assert column(found, "U.largest")["si"] == [None]


def test_no_marks_yet() -> None:
    """A workbook without marks gives no rows, and how to make one."""
    found = gathered("floor-beam", {})
    assert found["rows"] == []
    assert "floor-beam has no marks yet" in found["problem"]
    assert "calcbook set floor-beam:C-1" in found["problem"]


def table(name: str, keys: list[str], **columns: list[float | None]) -> dict[str, Any]:
    """Return a schedule of a mark, its columns in kN."""
    return {
        "kind": "schedule", "name": name, "applies": True, "why": "", "problem": None, "rows": keys,
        "columns": [
            {"name": n, "unit": "kN", "si": si, "texts": [str(v) for v in si], "problem": None,
             "applies": True} for n, si in columns.items()
        ],
    }  # fmt: skip


def test_rows_of_a_schedule_are_gathered_over_marks() -> None:
    """Each row is named by its mark and its key, in the order of both."""
    found = gathered_rows("floor-beam", "reactions", {
        "B1": mark(table("reactions", ["A", "B"], R_D=[1.0, 2.0], R_L=[3.0, 4.0])),
        "B2": mark(table("reactions", ["A"], R_D=[5.0], R_L=[6.0])),
    })  # fmt: skip
    assert found["rows"] == ["B1 A", "B1 B", "B2 A"]
    assert column(found, "R_D")["si"] == [1.0, 2.0, 5.0]
    assert column(found, "R_L")["unit"] == "kN"
    assert column(found, "R_L")["problem"] is None
    assert found["problem"] is None


def test_a_mark_without_the_schedule_or_a_column_says_so() -> None:
    """It keeps a row of its own name with the reason; the other marks have their values."""
    broken = table("reactions", ["A"], R_D=[None])
    broken["columns"][0]["problem"] = ["not available because of solved"]
    idle = table("reactions", ["A"], R_D=[1.0]) | {"applies": False, "why": "no floor"}
    found = gathered_rows("floor-beam", "reactions", {
        "B1": mark(), "B2": mark(table("reactions", ["A"], R_D=[5.0], R_S=[6.0])),
        "B3": mark(broken), "B4": mark(idle),
    })  # fmt: skip
    assert found["rows"] == ["B1", "B2 A", "B3 A", "B4"]
    assert column(found, "R_D")["si"] == [None, 5.0, None, None]
    assert column(found, "R_D")["problem"] == [
        "is not in this mark", "", "not available because of solved", "does not apply: no floor",
    ]  # fmt: skip
    assert column(found, "R_S")["si"] == [None, 6.0, None, None]


def test_a_workbook_without_marks_has_no_rows_to_gather() -> None:
    """The schedule says how to make a mark."""
    found = gathered_rows("floor-beam", "reactions", {})
    assert found["rows"] == []
    assert "floor-beam has no marks yet" in found["problem"]
