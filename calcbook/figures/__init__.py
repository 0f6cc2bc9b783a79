"""The trade's pictures, drawn from a statement alone.

A figure item names a figure and says which of the statement's names play which role in it. Each
family is a module with ``NEEDS`` and ``TAKES`` (the roles it must and may be given), ``draw`` and
``describe``. Where a pressure has alternatives its role takes a list of names, or numbered fellows
(``p_internal``, ``p_internal_2``).
"""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from calcbook.errors import DeclarationError, near_match
from calcbook.figures import (
    beam_elevation,
    beam_envelope,
    build_up_section,
    column_ladder,
    factor_matrix,
    grid_plan,
    key_plan,
    level_ladder,
    pressure_height,
    truss_forces,
    truss_loads,
    wind_elevation,
)

if TYPE_CHECKING:
    from collections.abc import Mapping
    from types import ModuleType
    from typing import Any

    from calcbook.figures.sketch import Sketch

__all__ = ["describe", "draw", "names", "roles"]

_FAMILIES: dict[str, ModuleType] = {
    "beam-elevation": beam_elevation,
    "beam-envelope": beam_envelope,
    "build-up-section": build_up_section,
    "column-ladder": column_ladder,
    "factor-matrix": factor_matrix,
    "grid-plan": grid_plan,
    "key-plan": key_plan,
    "level-ladder": level_ladder,
    "pressure-height": pressure_height,
    "truss-forces": truss_forces,
    "truss-loads": truss_loads,
    "wind-elevation": wind_elevation,
}
_FORMS = ("svg", "png")


def names() -> tuple[str, ...]:
    """Return the names of the figures there are, sorted."""
    return tuple(sorted(_FAMILIES))


def roles(figure: str) -> tuple[tuple[str, ...], tuple[str, ...]]:
    """Return the roles a figure needs and those it may be given besides.

    Raises
    ------
    DeclarationError
        When there is no figure of this name.
    """
    family = _family(figure)
    return tuple(family.NEEDS), tuple(family.TAKES)


def draw(statement: Mapping[str, Any], item: Mapping[str, Any], form: str = "svg") -> bytes:
    """Draw a figure item from the statement it stands in.

    Parameters
    ----------
    statement
        The whole statement.
    item
        The figure item: ``figure`` is the name, ``uses`` maps roles to names of the statement.
    form
        ``svg`` for the page (text as text) or ``png`` for the screen.

    Returns
    -------
    bytes
        The picture, 150 mm wide; the same statement gives the same bytes.

    Raises
    ------
    DeclarationError
        When the figure, a role or the form is not known, or a needed role is not given. A value
        that is missing is no error: the figure says in words what it leaves out.
    """
    if form not in _FORMS:
        raise DeclarationError(f"a figure cannot be drawn as '{form}'", hint="use 'svg' or 'png'")
    family, uses = _checked(item)
    sketch: Sketch = family.draw(statement, uses)
    return sketch.render(form)


def describe(statement: Mapping[str, Any], item: Mapping[str, Any]) -> str:
    """Return a figure item in words, for those who cannot see it; raises like :func:`draw`."""
    family, uses = _checked(item)
    words: str = family.describe(statement, uses)
    return words


def _family(figure: str) -> ModuleType:
    try:
        return _FAMILIES[figure]
    except KeyError:
        hint = near_match(figure, _FAMILIES) or f"there are {', '.join(names())}"
        raise DeclarationError(f"there is no figure '{figure}'", hint=hint) from None


def _checked(item: Mapping[str, Any]) -> tuple[ModuleType, Mapping[str, Any]]:
    figure, uses = str(item["figure"]), item.get("uses") or {}
    family = _family(figure)
    known = (*family.NEEDS, *family.TAKES)
    for role in uses:
        if role not in known and re.sub(r"_\d+$", "", role) not in known:
            hint = near_match(role, known) or f"it takes {', '.join(known)}"
            raise DeclarationError(f"the figure '{figure}' has no role '{role}'", hint=hint)
    lacking = [role for role in family.NEEDS if role not in uses]
    if lacking:
        raise DeclarationError(
            f"the figure '{figure}' is not told which name is its '{lacking[0]}'",
            hint=f"give it as {lacking[0]}=...; it needs {', '.join(family.NEEDS)}",
        )
    return family, uses
