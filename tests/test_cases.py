"""Many cases at once: the same figures as one by one, read as strictly, and fast."""

from __future__ import annotations

import csv
import io
import json
import random
import time
from typing import TYPE_CHECKING

import numpy as np
import pytest
from notebooks import WIND, make_notebook

from calcbook import cases
from calcbook.cli import main
from calcbook.errors import InputError, QuantityError
from calcbook.run import Filling, Runner

if TYPE_CHECKING:
    from pathlib import Path

    from calcbook.workbook import Workbook

EXACT = 1e-12


@pytest.fixture
def notebook(tmp_path: Path) -> Path:
    """Return a small workbook's notebook."""
    return make_notebook(tmp_path / "wind.ipynb", WIND)


@pytest.fixture
def book(notebook: Path) -> Workbook:
    """Return the small workbook, evaluated with its template's values."""
    return Runner().run(Filling(notebook))[0]


def columns(count: int) -> dict[str, list[str]]:
    """Return entries for many cases in several units, always the same ones."""
    chance = random.Random(7)  # noqa: S311  not a secret
    units = (("m/s", 1.0), ("km/h", 3.6), ("mph", 2.25))
    speeds = []
    for _ in range(count):
        unit, factor = chance.choice(units)
        speeds.append(f"{chance.uniform(12, 100) * factor:.3f} {unit}")
    return {
        "V": speeds,
        "C": [f"{chance.uniform(0.3, 1.2):.2f}" for _ in range(count)],
        "wall": [chance.choice(["solid", "louvre"]) for _ in range(count)],
    }


def test_many_cases_agree_with_one_by_one(notebook: Path, book: Workbook) -> None:
    """Every result of every case is that of a run with the same entries; nan where it is idle."""
    given = columns(40)
    found = cases.evaluate(book, given)
    assert list(found) == ["q", "p", "r"]
    for place in range(40):
        sets = {name: texts[place] for name, texts in given.items()}
        one, _ = Runner().run(Filling(notebook, sets=sets), strict=True)
        for name, array in found.items():
            alone = one.results.values[name]
            if alone is None:
                assert np.isnan(array[place])
            else:
                assert array[place] == pytest.approx(alone, rel=EXACT)


def test_results_from_the_formula(book: Workbook) -> None:
    """The velocity pressure is that of the formula worked outside the package."""
    given = {"V": ["20 m/s", "72 km/h", "100 m/s"]}
    assert cases.evaluate(book, given)["q"] == pytest.approx(
        [0.613 * 400, 0.613 * 400, 0.613 * 10_000], rel=EXACT
    )


def test_what_has_no_column_keeps_its_value(book: Workbook) -> None:
    """An entry without a column has the value on record in every case."""
    found = cases.evaluate(book, {"V": ["20 m/s", "40 m/s"]})
    assert found["p"] == pytest.approx(0.8 * found["q"], rel=EXACT)
    assert found["r"] == pytest.approx([1.25, 1.25], rel=EXACT)


def test_columns_of_schedules_have_rows_and_cases(book: Workbook) -> None:
    """A computed column has one value per row and case, and its sum one per case."""
    many = cases.read(book, {"V": ["20 m/s", "40 m/s", "60 m/s"]})
    found = cases.compute(book.many(), many.values, many.rows)
    q = 0.613 * np.array([400.0, 1600.0, 3600.0])
    assert found["w"] == pytest.approx(np.array([[8.0], [4.0]]) * q, rel=EXACT)
    assert found["W"] == pytest.approx(12 * q, rel=EXACT)


def test_every_line_where_no_result_is_declared(tmp_path: Path) -> None:
    """A workbook that declares no results gives all its single values."""
    cells = [cell.replace(", result=True", "") for cell in WIND]
    book, _ = Runner().run(Filling(make_notebook(tmp_path / "wind.ipynb", cells)))
    assert list(cases.evaluate(book, {"C": ["0.8", "0.9"]})) == ["q", "p", "r", "W"]


def test_failing_cases_by_check(book: Workbook) -> None:
    """The cases a check fails in are those whose demand is above the limit."""
    given = columns(200)
    many, program = cases.read(book, given), book.many()
    found = cases.compute(program, many.values, many.rows)
    ((bound, places),) = cases.failing(program, many, found)
    assert (bound.number, bound.item.meaning) == ("2.4", "Cladding as supplied")
    assert places.tolist() == np.flatnonzero(found["p"] > 1000.0).tolist()
    assert 0 < places.size < 200


@pytest.mark.parametrize("text", ["5 ft 6 in", "5'-6 1/2\"", "66 in", "1.2e1 m", "+7. m", ".9 m"])
def test_every_form_of_a_quantity_is_read(tmp_path: Path, text: str) -> None:
    """A column may hold any form a single entry may have, beside plain numbers."""
    cells = (
        'from calcbook import open_workbook\nbook = open_workbook("w", "W")',
        (
            'with book.section("S") as s:\n    s.entry("h", "H", "9 m", unit="length")\n'
            '    s.line("H = 2*h", "Twice")'
        ),
    )
    notebook = make_notebook(tmp_path / "w.ipynb", cells)
    book, _ = Runner().run(Filling(notebook))
    one, _ = Runner().run(Filling(notebook, sets={"h": text}), strict=True)
    found = cases.evaluate(book, {"h": ["3 m", text, "4 m"]})["H"]
    assert found.tolist() == [6.0, one.results.values["H"], 8.0]


@pytest.mark.parametrize(
    ("given", "kind", "message"),
    [
        ({"V": ["20 m/s", "1,5 m/s"]}, QuantityError, "case 2, V: there is a comma"),
        ({"V": ["20 m/s", "١٢ m/s"]}, QuantityError, "case 2, V: "),
        ({"V": ["20 m/s", "20_1 m/s"]}, QuantityError, "case 2, V: there is an underscore"),
        ({"V": ["20 m/s", "30  kN"]}, QuantityError, "case 2, V: 'kN' is a unit of force"),
        ({"V": ["20 m/s", "121 m/s"]}, InputError, "case 2, V: 121 m/s is outside the range"),
        ({"wall": ["solid", "louver"]}, InputError, "case 2, wall: 'louver' is no option"),
        ({"C": ["1", "0"]}, InputError, "case 2: r has no value: a division by zero"),
        ({"W": ["1", "0"]}, InputError, "W is computed by this workbook"),
        ({"VV": ["1"]}, InputError, "there is no entry 'VV'"),
        ({"C": ["1"], "V": ["20 m/s", "30 m/s"]}, InputError, "not of one length"),
    ],
)
def test_bad_case_is_named(
    book: Workbook, given: dict[str, list[str]], kind: type[Exception], message: str
) -> None:
    """The first case that is refused is named by its number, with the reason of a single entry."""
    with pytest.raises(kind, match=f".*{message}"):
        cases.evaluate(book, given)


def test_entry_without_a_value_needs_a_column(tmp_path: Path) -> None:
    """An entry the record has no value for is refused, and accepted as a column."""
    cells = [cell.replace('"40 m/s"', '""') for cell in WIND]
    book, _ = Runner().run(Filling(make_notebook(tmp_path / "wind.ipynb", cells)))
    with pytest.raises(InputError, match="V has no value yet"):
        cases.evaluate(book, {"C": ["0.8"]})
    assert cases.evaluate(book, {"V": ["20 m/s"]})["q"] == pytest.approx([245.2], rel=EXACT)


IDLE = (
    'from calcbook import open_workbook\nbook = open_workbook("roof", "Roof")',
    """with book.section("Roof") as s:
    s.choice("form", "Form", ["flat", "gable"], "flat")
    s.choice("ridge", "Ridge", ["X", "Y"], when="form == 'gable'")
    s.entry("r", "Rise", unit="length", when="form == 'gable'")
    s.line("h", "Height", result=True, cases=[("form == 'gable'", "'5 m' + r"), ("", "'5 m'")])""",
)


def test_input_that_does_not_apply_needs_no_value(tmp_path: Path) -> None:
    """An input without a value stands in nobody's way in cases it does not apply in."""
    book, _ = Runner().run(Filling(make_notebook(tmp_path / "roof.ipynb", IDLE)))
    assert cases.evaluate(book, {"form": ["flat", "flat"]})["h"].tolist() == [5.0, 5.0]
    given = {"form": ["flat", "gable"], "ridge": ["X", "Y"], "r": ["1 m", "2 m"]}
    assert cases.evaluate(book, given)["h"].tolist() == [5.0, 7.0]
    for missing in ("ridge", "r"):
        rest = {name: texts for name, texts in given.items() if name != missing}
        with pytest.raises(InputError, match=f"case 2: {missing} has no value yet"):
            cases.evaluate(book, rest)


def write_cases(path: Path, count: int) -> Path:
    """Write a file of cases with a unit in a header."""
    given = columns(count)
    lines = ["V;C;wall", *map(";".join, zip(*given.values(), strict=True))]
    path.write_text("\ufeff" + "\r\n".join(lines) + "\r\n", encoding="utf-8")
    return path


def test_command_prints_one_row_per_case(
    tmp_path: Path, notebook: Path, book: Workbook, capsys: pytest.CaptureFixture[str]
) -> None:
    """A row is a case as given and its results; a check that fails is named, with status 1."""
    file = write_cases(tmp_path / "c.csv", 50)
    assert main(["run", str(notebook), "--cases", str(file)]) == 1
    printed = capsys.readouterr()
    rows = list(csv.reader(io.StringIO(printed.out)))
    assert rows[0] == ["V", "C", "wall", "q (kPa)", "p (kPa)", "r"]
    given = columns(50)
    assert [row[:3] for row in rows[1:]] == [
        list(case) for case in zip(*given.values(), strict=True)
    ]
    found = cases.evaluate(book, given)
    assert [float(row[3]) for row in rows[1:]] == pytest.approx(found["q"] / 1000, rel=1e-11)
    idle = [number for number, row in enumerate(rows[1:]) if row[5] == ""]
    assert idle == np.flatnonzero(np.isnan(found["r"])).tolist()
    assert "not satisfied: 2.4 Cladding as supplied, p <= '1 kPa', in " in printed.err


def test_command_repeats_cells_as_given(
    tmp_path: Path, notebook: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Cells stand in the output as they stood in the file, their unit in the header."""
    file = tmp_path / "c.csv"
    file.write_text('V [km/h];seen_by\n36;"R, A"\n20.0 m/s;B\n')
    assert main(["run", str(notebook), "--cases", str(file)]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0] == "V (km/h),seen_by,q (kPa),p (kPa),r"
    assert [line.rsplit(",", 3)[0] for line in lines[1:]] == ['36,"R, A"', "20.0 m/s,B"]


def test_command_prints_cases_as_json(
    tmp_path: Path, notebook: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """JSON holds name, unit and values, and null where a line does not apply."""
    file = tmp_path / "c.csv"
    file.write_text("wall,V (km/h)\nsolid,36\nlouvre,72\n")
    assert main(["run", str(notebook), "--cases", str(file), "--json", "--set", "C=1"]) == 0
    found = json.loads(capsys.readouterr().out)
    names = found["names"]
    assert found["entries"]["V"] == {"unit": "km/h", "values": ["36", "72"]}
    assert names["p"] == {"unit": "kPa", "values": [0.0613, 0.1226]}
    assert names["r"] == {"unit": "", "values": [1.0, None]}


def test_a_hundred_thousand_cases_are_quick(
    tmp_path: Path, notebook: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Reading, computing and printing 100,000 cases takes seconds, not minutes."""
    file = write_cases(tmp_path / "c.csv", 100_000)
    began = time.monotonic()
    assert main(["run", str(notebook), "--cases", str(file)]) == 1
    assert time.monotonic() - began < 15
    assert capsys.readouterr().out.count("\n") == 100_001
