"""A schedule's shape bound: what it takes is an input above, what it gives a column to enter."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook import units
from calcbook.errors import DeclarationError, near_match
from calcbook.items import Carry, Choice, Entry, Text
from calcbook.signatures import a_kind
from calcbook.solvers import shapes

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from calcbook.dimensions import Type
    from calcbook.items import Item, Schedule, Shaped

INPUTS = (Entry, Choice, Text, Carry)


def check(
    item: Schedule, shaped: Shaped, scope: Mapping[str, Type], above: Mapping[str, Item]
) -> None:
    """Refuse a shape that is not there, or that takes or gives what it should not.

    Parameters
    ----------
    scope
        The type of every name declared so far, the schedule's columns included.
    above
        The item of each name that stands outside of schedules.

    Raises
    ------
    DeclarationError
        For an unknown shape, something it takes that lacks or is no input, a column that is not
        there to enter, another kind of quantity, an option the choice does not have.
    """
    shape = shapes.find(shaped.by)
    _refuse_others(shaped.takes, shape.takes, f"the shape {shape.name} takes")
    _refuse_others(shaped.gives.values(), shape.gives, f"the shape {shape.name} gives")
    for name, kind in (
        (shaped.choice, "text"),
        *((n, shape.takes[w]) for w, n in shaped.takes.items()),
    ):
        if not isinstance(above.get(name), INPUTS):
            raise DeclarationError(
                f"a shape depends on entries and choices declared above it, and {name} is none",
                hint=near_match(name, above),
            )
        _refuse_unlike(name, scope[name], kind)
    options = scope[shaped.choice].options
    if shaped.option not in options:
        hint = near_match(shaped.option, options) or f"it has {', '.join(options)}"
        raise DeclarationError(f"{shaped.choice} has no option '{shaped.option}'", hint=hint)
    entered = [c.name for c in item.columns if isinstance(c, INPUTS)]
    for name, what in shaped.gives.items():
        if name not in entered:
            hint = near_match(name, entered) or f"it has {', '.join(entered)}"
            raise DeclarationError(f"{item.name} has no column '{name}' to enter", hint=hint)
        _refuse_unlike(name, scope[name], shape.gives[what])


def words(shaped: Shaped) -> str:
    """Return what the rows come from, in words."""
    return f"rows from the shape, by {', '.join(dict.fromkeys(shaped.takes.values()))}"


def _refuse_others(found: Iterable[str], known: Mapping[str, str], what: str) -> None:
    """Refuse a name that the shape does not know, and one that lacks."""
    given = list(found)
    for name in given:
        if name not in known:
            hint = near_match(name, known) or f"there are {', '.join(known)}"
            raise DeclarationError(f"{what} no '{name}'", hint=hint)
    lacking = next((name for name in known if name not in given), "")
    if lacking:
        raise DeclarationError(f"{what} '{lacking}', which lacks")


def _refuse_unlike(name: str, found: Type, kind: str) -> None:
    wanted = None if kind == "text" else units.KINDS[kind].dimension
    if (found.form == "text") != (kind == "text") or found.dimension != wanted:
        raise DeclarationError(f"{name} is {a_kind(found)}, and the shape's is a {kind}")
