"""Clauses and tables of design codes, one edition per module."""

from __future__ import annotations

import importlib

from calcbook.codes.clause import Clause, CodeSet, Stated
from calcbook.codes.combinations import Combination
from calcbook.codes.materials import Material
from calcbook.codes.uses import Use
from calcbook.errors import CodeSetError, near_match

__all__ = ["Clause", "CodeSet", "Combination", "Material", "Stated", "Use", "get", "names"]

_MODULES = {
    "NSCP 2015": "nscp_2015",
    "ASCE 7-16": "asce_7_16",
}


def names() -> tuple[str, ...]:
    """Return the names of the code sets; the first serves where none is chosen."""
    return tuple(_MODULES)


def get(name: str) -> CodeSet:
    """Return the code set of this name.

    Raises
    ------
    CodeSetError
        There is none of that name.
    """
    if name not in _MODULES:
        known = " and ".join(f"'{known}'" for known in _MODULES)
        raise CodeSetError(
            f"there is no code set '{name}'",
            hint=near_match(name, _MODULES) or f"the code sets are {known}",
        )
    code: CodeSet = importlib.import_module(f"calcbook.codes.{_MODULES[name]}").CODE_SET
    return code
