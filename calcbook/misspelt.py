"""What is often typed as a unit and is none here, with the units it may stand for.

Without this the nearest spelling would be proposed, and 'kph' is one letter from mph.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook.errors import near_match

if TYPE_CHECKING:
    from collections.abc import Callable, Collection

_TYPED = {
    ("km/h",): "kph kmh kmph kmps",
    ("m/s",): "mps",
    ("ft/s",): "fps",
    ("knot", "km/h"): "kt kts",
    ("kN", "km/h", "knot"): "kn",
    ("h",): "hr hrs hours",
    ("min",): "mins minutes",
    ("s",): "secs seconds",
    ("m",): "mtr mtrs",
    ("m2",): "sqm",
    ("mm2",): "sqmm",
    ("ft2",): "sqft sf",
    ("in2",): "sqin",
    ("m3",): "cum cbm",
    ("ft3",): "cuft cft cf",
    ("kg",): "kgs kilo kilos",
    ("t", "tf", "kip"): "ton tons",
    ("lbf", "lb"): "lbs pounds",
    ("kip",): "k klb klbf",
    ("N*m",): "nm",
    ("kN*m",): "knm",
    ("kN*mm",): "knmm",
    ("lbf*ft",): "lbft ftlb",
    ("kip*ft",): "kipft ftkip ftk",
    ("kip*in",): "kipin inkip",
    ("deg",): "degs",
    ("rad",): "radians",
    ("%",): "pct",
}
_MEANT = {spelling: units for units, typed in _TYPED.items() for spelling in typed.split()}


def is_misspelt(spelling: str) -> bool:
    """Whether a spelling stands in the table."""
    return spelling in _MEANT


def unit_hint(
    spelling: str,
    known: Collection[str],
    *,
    around: tuple[str, str] = ("", ""),
    fits: Callable[[str], bool] = lambda _: True,
) -> str:
    """Return what to write for a unit that is not there.

    Parameters
    ----------
    spelling
        The unit as typed.
    known
        The units there are.
    around
        What is typed before and after it, in a unit made of several.
    fits
        Whether a unit is of the kind that is wanted; where none is, all are named.
    """
    alike = any(unit.casefold() == spelling.casefold() for unit in known)
    every = _MEANT.get(spelling) or (() if alike else _MEANT.get(spelling.casefold(), ()))
    found = [unit for unit in every if fits(unit)] or every
    if len(found) > 1:
        return f"write {', '.join(found[:-1])} or {found[-1]}"
    if found:
        return f"did you mean '{found[0].join(around)}'?"
    usual = "write a unit such as m, mm, kN, kPa, kN/m2, ft, in, kip, psf"
    return near_match(spelling, known) or usual
