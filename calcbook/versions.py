"""The versions of what computes a statement, as printed on the last page of a pack."""

from __future__ import annotations

import contextlib
import platform
from functools import cache
from importlib import metadata

LIBRARIES = ("calcbook", "numpy", "pint", "sympy", "matplotlib", "typst", "nbconvert", "ipywidgets")


@cache  # looking versions up is slow, and what was loaded does not change
def software() -> dict[str, str]:
    """Return the versions of what computed a statement."""
    found = {"python": platform.python_version()}
    for library in LIBRARIES:
        with contextlib.suppress(metadata.PackageNotFoundError):
            found[library] = metadata.version(library)
    return found
