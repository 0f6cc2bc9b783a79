"""What holds for the project as a whole: its layout, its public face, its two commands."""

from __future__ import annotations

import ast
import json
import re
import subprocess
import sys
from pathlib import Path

import pytest

import calcbook
from calcbook.job import template_folder, templates
from calcbook.run import Filling, Runner

TOP = Path(__file__).resolve().parent.parent
README = (TOP / "README.md").read_text(encoding="utf-8")


def test_public_names_are_sorted_and_there() -> None:
    """The public face is what __all__ lists, in order, and each name exists."""
    assert sorted(calcbook.__all__) == calcbook.__all__
    assert all(hasattr(calcbook, name) for name in calcbook.__all__)


def test_importing_the_package_stays_light() -> None:
    """Importing calcbook loads neither matplotlib, sympy, typst, widgets nor nbconvert."""
    heavy = ("matplotlib", "sympy", "typst", "ipywidgets", "nbconvert", "nbformat")
    code = f"import sys, calcbook; print([m for m in {heavy!r} if m in sys.modules])"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=TOP
    )
    assert done.stdout.strip() == "[]"


def imported(path: Path) -> set[str]:
    """Return the modules of the package that a module imports as it is loaded."""
    found: set[str] = set()
    for node in ast.parse(path.read_text(encoding="utf-8")).body:
        if isinstance(node, ast.ImportFrom) and node.module == "calcbook":
            found |= {name.name for name in node.names}
        elif isinstance(node, ast.ImportFrom) and (node.module or "").startswith("calcbook."):
            found.add(str(node.module).split(".")[1])
    return found


def test_imports_run_one_way() -> None:
    """Every module stands in the table of DEVELOPERS.md and imports from no row below its own."""
    guide = (TOP / "DEVELOPERS.md").read_text(encoding="utf-8").split("## The house")[1]
    rows = [line.split("|")[1] for line in guide.split("##")[0].splitlines() if "| `" in line]
    row = {name: n for n, cell in enumerate(rows) for name in re.findall("`(.+?)`", cell)}
    package = Path(calcbook.__file__).parent
    loaded = {
        path: path.relative_to(package).parts[0].removesuffix(".py")
        for path in package.rglob("*.py") if path != package / "__init__.py"
    }  # fmt: skip
    assert set(loaded.values()) == set(row)
    assert [
        f"{path.name} imports {other}"
        for path, name in loaded.items() for other in imported(path) if row[other] > row[name]
    ] == []  # fmt: skip


def test_ci_runs_the_test_command_of_the_readme() -> None:
    """The last line of .ci/run is the second command of the README."""
    commands = re.findall(r"```sh\n(python3 -m venv .*?)\n```", README)
    assert len(commands) == 2
    assert (TOP / ".ci" / "run").read_text(encoding="utf-8").splitlines()[-1] == commands[1]


def test_the_workbook_of_the_readme_runs(tmp_path: Path) -> None:
    """The example of a workbook of one's own computes its force and its check."""
    source = next(
        block for block in re.findall(r"```python\n(.*?)```", README, re.DOTALL)
        if "open_workbook" in block
    )  # fmt: skip
    cell = {"cell_type": "code", "source": source}
    notebook = tmp_path / "sign-board.ipynb"
    notebook.write_text(json.dumps({"cells": [cell]}), encoding="utf-8")
    _, statement = Runner().run(Filling(notebook))
    (force,) = statement["results"]
    assert force["value"]["si"] == pytest.approx(2400 * 0.85 * 1.8 * 3.6)
    assert statement["counts"]["problems"] == 0
    assert statement["counts"]["checks"] == 1
    assert statement["counts"]["not_satisfied"] == 0


def sources(notebook: Path) -> list[tuple[str, str]]:
    """Return (type, source) of every cell."""
    cells = json.loads(notebook.read_text(encoding="utf-8"))["cells"]
    return [(c["cell_type"], "".join(c["source"])) for c in cells]


@pytest.mark.parametrize("name", sorted(templates()))
def test_the_demo_job_has_the_cells_of_the_templates(name: str) -> None:
    """A notebook of the demo job differs from its template in saved outputs only."""
    demo = template_folder() / "demo" / f"{name}.ipynb"
    assert sources(demo) == sources(templates()[name])


@pytest.mark.parametrize("name", sorted(templates()))
def test_every_workbook_says_who_answers_for_it(name: str) -> None:
    """The head of each workbook says that an engineer judges and the local code governs."""
    kind, text = sources(templates()[name])[0]
    assert kind == "markdown"
    assert "licensed engineer" in text
    assert "local code in force governs" in text


def test_only_the_ordered_files_stand_at_the_top() -> None:
    """The top of the tree holds the ordered layout, and dot-files."""
    listed = subprocess.run(
        ["git", "ls-files"], capture_output=True, text=True, check=False, cwd=TOP
    ).stdout.split("\n")
    top = {path.split("/")[0] for path in listed if path}
    expected = {"README.md", "DEVELOPERS.md", "pyproject.toml", "calcbook", "workbooks", "tests"}
    assert {name for name in top if not name.startswith(".")} <= expected
