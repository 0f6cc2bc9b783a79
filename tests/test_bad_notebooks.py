"""Notebooks that cannot be accepted: one clear message, exit status 2, nothing changed."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from command_line import refused, says
from notebooks import contents, make_job, make_notebook

from calcbook.cli import main

if TYPE_CHECKING:
    from pathlib import Path

OPEN = 'from calcbook import open_workbook\nbook = open_workbook("wind", "Wind")'
SITE = (
    'with book.section("Site") as s:\n'
    '    s.entry("V", "Speed", "40 m/s", unit="speed")\n'
    '    s.entry("h", "Height", "9 m", unit="length", low="1 m", high="400 m")\n'
)
FORMULAS = {
    "a = h*": ("stops too early", "a value is missing"),
    "a = h h": ("cannot be read here", "between two values"),
    "a = (h": ("a bracket is opened and not closed", "    (h\n    ^"),
    "a = hh + h": ("there is no value 'hh'", "did you mean 'h'?", "    hh + h\n    ^^"),
    "a = h + V": ("cannot add length and speed", "    h + V\n        ^"),
    "a = h.real": ("a dot after a name", "names are plain"),
    "a = open(h)": ("there is no function 'open'", "the functions are"),
    "a = __import__('os')": ("there is no function '__import__'",),
    "a = h[0]": ("square brackets", "    h[0]"),
    "a = (lambda: h)()": ("lambda is not part of a formula",),
    "a = [x for x in h]": ("lists are not part of a formula", "sum(w)"),
    "a = h*9**9**9": ("power", "    h*9**9**9"),
    f"a = {'(' * 10_000}h{')' * 10_000}": ("20005 characters, more than 2000", "split it"),
    "höhe = h": ("'ö' is not part of a formula", "use plain letters", "höhe"),
    "a = h; V": ("';' is not part of a formula",),
    "a = h if V else 2": ("write where(condition, a, b)",),
    "a = h = V": ("'='",),
    "lambda = h": ("'lambda' is a reserved word", "Greek letter"),
}


@pytest.mark.parametrize("formula", FORMULAS, ids=lambda text: text[:24])
def test_formula_that_cannot_be_accepted(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], formula: str
) -> None:
    """The line is refused with its place; the rest of the section stands and is printed."""
    line = f'    s.line({formula!r}, "Line")\n    s.line("H = 2*h", "Twice the height")'
    notebook = make_notebook(tmp_path / "wind.ipynb", (OPEN, SITE + line))
    before = contents(tmp_path)
    assert main(["run", str(notebook)]) == 2
    printed = capsys.readouterr()
    says(printed.err, "calcbook: wind: 1 thing", 'wind, section "Site"', *FORMULAS[formula])
    assert "H = 2 h = 2 · 9 m = 18.00 m" in printed.out
    assert contents(tmp_path) == before


DECLARATIONS = {
    "twice": (
        '    s.line("a = h", "A")',
        'with book.section("Walls") as s:\n    s.line("a = 2*h", "A")',
        ('section "Walls", a: a is already declared in 1.3, section "Site"', "another name"),
    ),
    "too early": (
        '    s.line("a = b", "A")\n    s.line("b = h", "B")',
        "",
        ('section "Site", a: b is used before it is declared', "move this item below it"),
    ),
    "two cases differ": (
        '    s.line("a", "A", cases=[("h > \'1 m\'", "h"), ("", "V")])',
        "",
        ("this case gives speed, the first gives length",),
    ),
    "wrong unit": (
        '    s.line("a = h", "A", unit="force")',
        "",
        ("the formula gives length", "force"),
    ),
    "no such keyword": (
        '    s.entry("q", "Q", "1", wen="h > h")',
        "",
        ("q: an item has no 'wen'", "did you mean 'when'?"),
    ),
    "no such unit": (
        '    s.line("a = h", "A", unit="presure")',
        "",
        ("'presure' is no kind of quantity and no unit", "did you mean 'pressure'?"),
    ),
}


@pytest.mark.parametrize("case", DECLARATIONS)
def test_declaration_that_cannot_be_accepted(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], case: str
) -> None:
    """What is declared twice, too early or with another unit is refused with its section."""
    first, second, parts = DECLARATIONS[case]
    notebook = make_notebook(tmp_path / "wind.ipynb", (OPEN, SITE + first, second))
    says(refused(capsys, tmp_path, "run", str(notebook)), *parts)


CODE = {
    "if v:\n        pass": ("reads the value of v", "cases=[(condition, formula), ...]"),
    "float(v)": ("reads the value of v", 'when="condition"'),
    "if v > 1:\n        pass": ("reads the value of v",),
    "2*v": ("reads the value of v", "computing belongs in a line"),
    "sorted([v, v])": ("reads the value of v",),
    "1/0": ("the cell stopped: ZeroDivisionError", "    1/0"),
    "raise SystemExit(0)": ("the cell stopped: SystemExit",),
    "%matplotlib inline": ("notebook commands do not run outside Jupyter", "write it in Python"),
    "!ls -l": ("notebook commands do not run outside Jupyter", "!ls -l"),
    "if": ("the cell stopped: SyntaxError",),
}


@pytest.mark.parametrize("code", CODE)
def test_notebook_code_that_may_not_be(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], code: str
) -> None:
    """Reading a value, and code that stops, are refused with notebook and cell."""
    cell = f'{SITE}    v = s.entry("v", "Value", "1")\n    {code}\n'
    notebook = make_notebook(tmp_path / "wind.ipynb", (OPEN, cell))
    message = refused(capsys, tmp_path, "run", str(notebook))
    says(message, "wind.ipynb, cell 2", *CODE[code])


def test_command_of_a_whole_cell(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """A cell in another language is refused for its first line, whatever stands below."""
    notebook = make_notebook(tmp_path / "wind.ipynb", (OPEN, "%%bash\necho 'it\n"))
    message = refused(capsys, tmp_path, "run", str(notebook))
    says(message, "wind.ipynb, cell 2: notebook commands do not run", "    %%bash")


def test_text_that_only_looks_like_a_command(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A line of a string, or of an expression, may begin with such a sign."""
    cell = 'words = """\n%matplotlib\n! take care\n"""\nrest = (7\n    % 4)\n'
    notebook = make_notebook(tmp_path / "wind.ipynb", (OPEN, cell + SITE))
    assert main(["run", str(notebook)]) == 0
    assert "Height: h = 9 m" in capsys.readouterr().out


@pytest.mark.parametrize("words", [("run", "one"), ("status", "."), ("set", "one", "x=2 m")])
def test_circular_carries(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch,
    words: tuple[str, ...],
) -> None:  # fmt: skip
    """Two workbooks that carry from each other are refused, and the circle is named."""
    cell = (
        "from calcbook import open_workbook\n"
        'book = open_workbook("{0}", "W")\n'
        'with book.section("S") as s:\n'
        '    s.carry("y", "{1}.z", "Y", unit="length", fallback="1 m")\n'
        '    s.entry("x", "X", "1 m", unit="length")\n'
        '    s.line("z = x + y", "Z")'
    )
    books = {name: (cell.format(name, other),) for name, other in (("one", "two"), ("two", "one"))}
    monkeypatch.chdir(make_job(tmp_path / "job", books))
    message = refused(capsys, tmp_path, *words)
    says(message, "values in a circle: one -> two -> one", "one of them must own the value")


def test_table_that_does_not_reach_that_far(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A roof pitch beyond a table that is not to be extended is refused with the table's name."""
    cells = (
        'from calcbook import open_workbook\nbook = open_workbook("roof", "Roof")',
        ('from calcbook.items import TableItem\n'
        'from calcbook.table import Axis, Table\nfrom calcbook.units import unit\n'
        'with book.section("Roof") as s:\n'
        '    s.entry("theta", "Pitch", "30 deg", unit="angle")\n'
        '    s.items.append(TableItem(name="T", meaning="C_p", table=Table("roof coefficients",\n'
        '        (Axis("theta", unit("deg"), (10.0, 45.0)),), (-0.9, -0.3), unit(""), "refuse",\n'
        '        "maker")))\n'
        '    s.line("C_p = interpolate(T, theta)", "Coefficient")'),
    )  # fmt: skip
    notebook = str(make_notebook(tmp_path / "roof.ipynb", cells))
    assert main(["run", notebook]) == 0
    message = refused(capsys, tmp_path, "run", notebook, "--set", "theta=60 deg")
    says(message, "C_p", "the table 'roof coefficients' does not reach that far")
