"""calcbook: workbooks for structural load calculations.

A notebook opens a workbook and declares sections; what it declares is computed, shown with its
formulas and values, and printed in a calculation package. Results need a licensed engineer's
judgement, and the local code in force governs.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.errors import CalcbookError
from calcbook.opening import open_workbook

if TYPE_CHECKING:
    from calcbook.workbook import Workbook

__all__ = ["CalcbookError", "Workbook", "open_workbook"]


def __getattr__(name: str) -> object:
    if name == "Workbook":  # on demand: numpy and pint are slow to import, and help needs neither
        from calcbook.workbook import Workbook  # noqa: PLC0415

        return Workbook
    raise AttributeError(f"module 'calcbook' has no attribute '{name}'")
