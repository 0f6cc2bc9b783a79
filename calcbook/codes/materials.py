"""Unit weights of materials and weights of layers per area, for taking off dead load."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from importlib import resources
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Mapping


@dataclass(frozen=True, kw_only=True)
class Material:
    """What a material weighs.

    Attributes
    ----------
    name, words
        The key, alike in every edition, and what it is in words.
    kind
        'unit weight', or 'pressure' for a layer that is listed by its weight per area.
    weight, weight_us
        The weight as a quantity in text, in SI and in US customary units; a metric source prints
        one only, which then serves for both.
    clause
        Where the figure stands, as printed in the margin.
    from_memory
        The weight has not been read in a published source and is to be confirmed.
    """

    name: str
    words: str
    kind: str
    weight: str
    weight_us: str
    clause: str
    from_memory: bool


def read_materials(
    edition: str, numbers: Mapping[str, str], follows: str = ""
) -> dict[str, Material]:
    """Return the materials of an edition by name.

    Parameters
    ----------
    numbers
        The number of the edition's table for each kind, 'unit weight' and 'pressure'.
    follows
        The edition whose tables it mirrors in SI: what it does not list itself in the data file is
        taken from there, and counts as from memory.
    """
    file = resources.files("calcbook.codes").joinpath("data", "materials.toml")
    found = {}
    for name, part in tomllib.loads(file.read_text(encoding="utf-8")).items():
        entry = part.get(edition) or part.get("any")
        mirrored = entry is None and follows in part
        if mirrored:
            entry = {"weight": part[follows]["weight"], "read": False}
        if entry is not None:
            own = f"{edition} {entry.get('number', numbers[part['kind']])}"
            found[name] = _material(name, part, entry, part.get("source", own))
    return found


def _material(
    name: str, part: Mapping[str, Any], entry: Mapping[str, Any], clause: str
) -> Material:
    return Material(
        name=name,
        words=part["words"],
        kind=part["kind"],
        weight=entry["weight"],
        weight_us=entry.get("us", entry["weight"]),
        clause=clause,
        from_memory=not entry.get("read", False),
    )
