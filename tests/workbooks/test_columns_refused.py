"""Bad and odd columns: what is refused, what is named, and what still stands beside it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from sheets import CODES, rows_of
from stacks import BOOK, TYPED, base, kilonewtons, level, stack

from calcbook.errors import CalcbookError
from calcbook.record import RowRecord

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]

NSCP, ASCE = CODES


def problem(sheet: Sheet, name: str) -> str:
    """Return why an item has no value."""
    return str(next(i["problem"] for i in sheet.items() if i["name"] == name))


def problems(sheet: Sheet, schedule: str, column: str) -> list[str]:
    """Return why each row of a column has no value, '' where it has one."""
    item = next(i for i in sheet.items() if i["name"] == schedule)
    found = next(c for c in item["columns"] if c["name"] == column)
    return found["problem"] or [""] * len(item["rows"])


def test_mark_outside_the_grid(fill: Fill) -> None:
    """A line that the grid does not have is named; nothing is made up for the area."""
    sheet = fill(BOOK, {"at_x": "9"})
    assert "there is no row '9' in line_x" in problem(sheet, "b_X")
    assert problem(sheet, "N_u")
    assert sheet.value("b_Y") == pytest.approx(3.3)


def test_parking_on_the_roof(fill: Fill) -> None:
    """Cars on the roof are live load L, not reduced, with f_1 = 1; there is no roof live load."""
    rows = stack(
        level("Roof", "40 m2", "4 kPa", "garage private"), level("1", "40 m2", "4 kPa", "office")
    )
    sheet = fill(BOOK, TYPED, rows)
    assert base(sheet, "N_Lr") == [0.0]
    assert kilonewtons(sheet, "column", "P_L0") == pytest.approx([76.0, 172.0])
    assert kilonewtons(sheet, "column", "P_L")[0] == pytest.approx(76.0)
    assert sheet.column("live", "f_1") == [1.0, 0.5]
    said = {i["text"] for i in sheet.items() if i["kind"] == "remark" and i["applies"]}
    assert "No level here takes roof live load." in said
    assert any("common practice" in text for text in said)


def test_parking_as_the_code_permits(fill: Fill) -> None:
    """NSCP: at most 40 % by influence area; ASCE: 20 % from two garage floors on."""
    rows = stack(*(level(str(n), "100 m2", "4 kPa", "garage private") for n in range(2)))
    sets = {**TYPED, "parking": "as the code permits"}
    nscp, asce = (fill(BOOK, sets, rows, code=code) for code in CODES)
    assert nscp.column("others", "R_g") == pytest.approx([0.6, 0.6])
    assert asce.column("others", "R_g") == pytest.approx([1.0, 0.8])
    plain = fill(BOOK, TYPED, rows)
    assert plain.column("others", "R_g") == [1.0, 1.0]


def test_floor_on_grade_is_not_carried(fill: Fill) -> None:
    """The ground floor brings neither dead nor live load, and the remark says so."""
    sheet = fill(BOOK)
    for name in ("G", "G_min"):
        assert sheet.by_key("dead", name)["Ground"] == 0.0
    assert sheet.by_key("live", "Q")["Ground"] == 0.0
    assert any("A level on grade" in str(i.get("text")) for i in sheet.items())


def test_column_that_ends_below_the_roof(fill: Fill) -> None:
    """Where the floor is not here nothing is added, and no own weight above the column's head."""
    levels = [level(str(n), "20 m2", "4 kPa", "office", A_ct="90000 mm2") for n in range(3)]
    levels[0]["here"] = "no"
    sheet = fill(BOOK, TYPED, stack(*levels))
    assert kilonewtons(sheet, "dead", "G")[0] == 0.0
    assert kilonewtons(sheet, "dead", "G_c") == pytest.approx([0.0, 6.372, 6.372])
    levels[0]["here"], levels[1]["here"] = "yes", "no"
    sheet = fill(BOOK, TYPED, stack(*levels))
    assert kilonewtons(sheet, "dead", "G_c") == pytest.approx([6.372] * 3)


def test_one_bad_row_of_thirty(fill: Fill) -> None:
    """A live load that cannot be read is named; above it everything stands, below it says why."""
    levels = [level(f"L{n}", "20 m2", "4 kPa", "office") for n in range(30, 0, -1)]
    levels[20]["L_a"] = "1,5 kPa"
    sheet = fill(BOOK, TYPED, stack(*levels))
    told = problems(sheet, "levels", "L_a")
    assert "L10" in told[20]
    assert "1.5 kPa" in told[20]
    assert [bool(t) for t in told] == [n == 20 for n in range(30)]
    assert [bool(t) for t in problems(sheet, "column", "P_L0")] == [n >= 20 for n in range(30)]
    item = next(c for c in sheet.item("column")["columns"] if c["name"] == "P_L0")
    assert item["si"][19] == pytest.approx(20 * 20 * 2400.0)
    assert "L10" in problem(sheet, "N_L0")
    assert problem(sheet, "N_L")
    assert base(sheet, "N_D") == pytest.approx([30 * 80.0])


def test_one_bad_line_load(fill: Fill) -> None:
    """A wall the take-off does not have is named in its row; other levels keep their load."""
    line = {"what": "beam", "l_k": "4 m", "w_t": "0 kN/m"}
    rows = rows_of(
        "lines",
        {**line, "key": "a", "line_of": "B-9", "line_level": "Roof"},
        {**line, "key": "b", "line_of": "B-2", "line_level": "Level 2"},
    )
    sheet = fill(BOOK, {}, rows)
    assert "there is no row 'B-9' in beam" in problems(sheet, "lines", "w_k")[0]
    assert problems(sheet, "lines", "w_k")[1] == ""
    assert [bool(p) for p in problems(sheet, "dead", "G")] == [True, False, False]


def test_wall_listed_at_another_level(fill: Fill) -> None:
    """A wall of level 2 that is listed at the roof does not satisfy the check."""
    line = {"key": "a", "what": "wall", "line_of": "E-2", "line_level": "Roof", "l_k": "3 m"}
    sheet = fill(BOOK, {}, rows_of("lines", {**line, "w_t": "0 kN/m"}))
    found = sheet.checks()["Each wall and beam is listed at the level it has in the take-off"]
    assert found is False


def test_frame_rows_that_miss_a_level(fill: Fill) -> None:
    """Lateral loads without a row for a level are not taken as zero."""
    rows = stack(level("A", "10 m2", "4 kPa", "office"), level("B", "10 m2", "4 kPa", "office"))
    rows["frame"] = rows["frame"][:1]
    sheet = fill(BOOK, {**TYPED, "lateral": "typed"}, rows)
    assert "B" in "".join(problems(sheet, "column", "P_Wc"))


def test_uplift_is_said(fill: Fill) -> None:
    """Where wind lifts more than the least dead load holds, a caution says what follows."""
    rows = stack(
        level("Roof", "10 m2", "2 kPa", "roof", D_min="1 kPa"), lateral=[{"W_t": "-30 kN"}]
    )
    sheet = fill(BOOK, {**TYPED, "lateral": "typed"}, rows)
    assert base(sheet, "N_up") == pytest.approx([0.9 * 10.0 - 30.0])
    cautions = [i["text"] for i in sheet.items() if i["kind"] == "remark" and i["applies"]]
    assert any("The column lifts" in text for text in cautions)


def test_gravity_only_is_said(fill: Fill) -> None:
    """Without wind and earthquake the combinations stand with zero and a remark says so."""
    sheet = fill(BOOK)
    assert base(sheet, "N_Wc", "N_Wt", "N_Ec", "N_Et") == [0.0] * 4
    assert any("Gravity only" in str(i.get("text")) and i["applies"] for i in sheet.items())


@pytest.mark.parametrize(
    ("sets", "rows", "words"),
    [
        ({"n_alike": "0"}, {}, ["n_alike", "1 to 1000"]),
        ({"c_x": "2"}, {}, ["c_x", "1 to 1.5", "first interior support"]),
        ({"gamma_c": "-23 kN/m3"}, {}, ["gamma_c"]),
        ({"member": "inner column"}, {}, ["member", "interior column"]),
        ({"section": "octagonal"}, {}, ["section", "rectangular"]),
        ({}, stack(level("A", "-5 m2", "4 kPa", "office")), ["A_t", "0 m2 to 10000 m2"]),
        ({}, stack(level("A", "5 m2", "4 kPa", "ofice")), ["use", "did you mean 'office'"]),
        ({}, stack(level("A", "5 m2", "-4 kPa", "office")), ["D", "0 kPa"]),
        (
            {"lateral": "typed"},
            stack(level("A", "5 m2", "4 kPa", "office"), lateral=[{"W_c": "-9 kN"}]),
            ["W_c", "uplift goes into the next column"],
        ),
        (
            {"lateral": "typed"},
            stack(level("A", "5 m2", "4 kPa", "office"), lateral=[{"E_t": "9 kN"}]),
            ["E_t", "compression goes into the column before"],
        ),
        (
            {},
            {"levels": [RowRecord("A", {"elevation": z}) for z in ("3 m", "0 m")]},
            ["two rows are called 'A'"],
        ),
    ],
)
def test_refused(sets: dict[str, str], rows: Any, words: list[str], run: Fill) -> None:
    """The message names the entry or column and what would be right."""
    with pytest.raises(CalcbookError) as caught:
        run(BOOK, {**TYPED, **sets} if rows else sets, rows)
    for word in words:
        assert word in str(caught.value)


def test_cells_of_the_other_code_are_listed_as_not_used(fill: Fill) -> None:
    """Movable partitions typed for ASCE add 0.72 kPa there; under NSCP they are kept, not used."""
    rows = stack(level("1", "10 m2", "4 kPa", "office", partitions="yes"))
    nscp, asce = (fill(BOOK, TYPED, rows, code=code) for code in CODES)
    assert asce.column("live", "L_o") == pytest.approx([2400.0 + 720.0])
    assert nscp.column("live", "L_o") == pytest.approx([2400.0])
    assert nscp.book.not_used() == ["levels, partitions"]
    assert asce.book.not_used() == []


def test_suction_on_the_roof_lifts_the_column(fill: Fill) -> None:
    """The uplift of the roof acts on its area from the top down, also in a column of gravity."""
    rows = stack(
        level("Roof", "40 m2", "1 kPa", "roof", D_min="0.5 kPa"),
        level("1", "30 m2", "5 kPa", "office", D_min="4 kPa"),
    )
    sheet = fill(BOOK, {**TYPED, "p_up": "-2.5 kPa"}, rows)
    assert kilonewtons(sheet, "column", "P_Wt") == pytest.approx([-100.0, -100.0])
    least = kilonewtons(sheet, "column", "P_Dmin")
    expected = [0.9 * least[0] - 100, 0.9 * least[1] - 100]
    assert kilonewtons(sheet, "column", "P_up") == pytest.approx(expected)
    said = [i["text"] for i in sheet.items() if i["kind"] == "remark" and i["applies"]]
    assert any(text.startswith("The column lifts at a level") for text in said)
    calm = fill(BOOK, TYPED, rows)
    assert kilonewtons(calm, "column", "P_Wt") == [0.0, 0.0]


def test_live_load_added_on_a_roof_counts(fill: Fill) -> None:
    """What is typed beside the use of a roof is live load of no pool, not roof live load."""
    rows = stack(
        level("Roof", "40 m2", "4 kPa", "roof", L_a="2 kPa"),
        level("1", "40 m2", "4 kPa", "office"),
    )
    sheet = fill(BOOK, TYPED, rows)
    assert kilonewtons(sheet, "column", "P_L0")[0] == pytest.approx(80.0)
    assert kilonewtons(sheet, "column", "P_L")[0] == pytest.approx(80.0)


def test_other_garages_and_heavy_uses_are_not_reduced(fill: Fill) -> None:
    """NSCP: private garages and storage alone are reduced among garages and heavy floors."""
    sets = {**TYPED, "parking": "as the code permits"}
    for use, left in (
        ("garage storage", 1.0),
        ("manufacturing light", 1.0),
        ("storage light", 0.8),
    ):
        sheet = fill(BOOK, sets, stack(*(level(str(n), "100 m2", "4 kPa", use) for n in "12")))
        full, reduced = (kilonewtons(sheet, "column", name)[-1] for name in ("P_L0", "P_L"))
        assert reduced == pytest.approx(left * full), use
