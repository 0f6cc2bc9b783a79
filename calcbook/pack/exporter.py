"""The nbconvert exporter, also found in JupyterLab's export menu.

nbconvert imports every exporter for each of its commands: nothing heavy is imported here.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

from nbconvert.exporters.exporter import Exporter, ResourcesDict
from traitlets import default

from calcbook.errors import PackError

if TYPE_CHECKING:
    from nbformat import NotebookNode


class CalculationExporter(Exporter):
    """A saved workbook as the PDF of a calculation package.

    The saved notebook is run from its first cell with its record, so that what is printed is what
    it computes, not what its cells last showed.
    """

    export_from_notebook = "Calculation package (PDF)"
    output_mimetype = "application/pdf"

    @default("file_extension")
    def _pdf(self) -> str:
        return ".pdf"

    def from_notebook_node(  # type: ignore[override]  # the bytes of a PDF, not a notebook
        self,
        nb: NotebookNode,
        resources: dict[str, Any] | None = None,
        **_options: object,
    ) -> tuple[bytes, dict[str, Any]]:
        """Return the PDF of a notebook and the resources nbconvert hands on.

        Raises PackError for a notebook that is not saved, or that is no workbook of calcbook.
        """
        found = ResourcesDict()
        found.update(resources or {})
        metadata = found["metadata"] or {}
        name = metadata.get("name", "")
        if not any("calcbook" in c.source for c in nb.cells if c.cell_type == "code"):
            raise PackError(
                "this notebook is no calcbook workbook, so there is nothing to print",
                hint="open a workbook that declares its calculation with calcbook",
                where=name,
            )
        path = Path(metadata.get("path", "")) / f"{name}.ipynb"
        if not name or not path.is_file():
            raise PackError(
                "the notebook has no file, so its record cannot be found",
                hint="save the notebook, then export it",
                where=name,
            )
        from calcbook.pack.package import pack_notebook  # noqa: PLC0415  (starts the whole engine)

        pdf: bytes = pack_notebook(path)
        found["output_extension"] = self.file_extension
        found["outputs"] = {}
        return pdf, found
