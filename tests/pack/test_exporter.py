from __future__ import annotations

import subprocess
import sys
from typing import TYPE_CHECKING

import nbformat
import pytest
from nbconvert.exporters import get_exporter

from calcbook.errors import PackError
from calcbook.pack.exporter import CalculationExporter

if TYPE_CHECKING:
    from pathlib import Path


def notebook(*code: str) -> nbformat.NotebookNode:
    """Return a notebook of these code cells."""
    return nbformat.v4.new_notebook(cells=[nbformat.v4.new_code_cell(c) for c in code])


def test_exporter_is_found_by_name() -> None:
    """The exporter is found by nbconvert, gives a PDF and stands in the export menu."""
    exporter = get_exporter("calculation_pdf")()
    assert isinstance(exporter, CalculationExporter)
    assert exporter.file_extension == ".pdf"
    assert exporter.output_mimetype == "application/pdf"
    assert exporter.export_from_notebook == "Calculation package (PDF)"


def test_import_is_light() -> None:
    """Importing the exporter loads neither the engine nor the libraries of the pack."""
    script = (
        "import sys, calcbook.pack.exporter;"
        "print(*{'pint', 'typst', 'sympy', 'matplotlib', 'ipywidgets'} & set(sys.modules))"
    )
    told = subprocess.run([sys.executable, "-c", script], capture_output=True, check=True)
    assert told.stdout.split() == []


def test_foreign_notebook_is_refused() -> None:
    """A notebook that never opens a workbook gives one clear error."""
    with pytest.raises(PackError, match="no calcbook workbook"):
        CalculationExporter().from_notebook_node(notebook("print(1)"), {"metadata": {"name": "a"}})


def test_unsaved_notebook_is_refused(tmp_path: Path) -> None:
    """A notebook without a file has no record and is refused."""
    given = {"metadata": {"name": "beam", "path": str(tmp_path)}}
    with pytest.raises(PackError, match="save the notebook"):
        CalculationExporter().from_notebook_node(notebook("import calcbook"), given)
