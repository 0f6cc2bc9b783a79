"""Fill the saved outputs of the templates and of the demo job, after a change of what is printed.

The demo job takes the cells of the templates; each notebook is then run in a kernel of its own
in its own folder, as nbval runs it. Code is saved folded, so that a workbook opens as a page of
calculation.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import nbformat
from nbclient import NotebookClient

from calcbook.job import template_folder, templates

if TYPE_CHECKING:
    from pathlib import Path


def fill(notebook: Path, cells_of: Path) -> None:
    """Run the cells of one notebook and save them, with their outputs, as another."""
    node = nbformat.read(cells_of, as_version=4)
    for cell in node.cells:
        cell.metadata = {"jupyter": {"source_hidden": True}} if cell.cell_type == "code" else {}
    client = NotebookClient(
        node, resources={"metadata": {"path": notebook.parent}},
        record_timing=False, store_widget_state=False,
    )  # fmt: skip
    client.execute()
    node.metadata.language_info = {"name": "python"}
    nbformat.write(node, notebook)


if __name__ == "__main__":
    for name, template in templates().items():
        fill(template, template)
        fill(template_folder() / "demo" / f"{name}.ipynb", template)
