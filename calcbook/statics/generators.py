"""Usual forms of trusses: gable, parallel chords, monopitch, cantilever.

Joints of the bottom chord are L0, L1 and so on from the left, joints of the top chord stand over
them as U0, U1 and so on; where the chords meet there is one joint, of the bottom chord's name. A
member is named by its two joints.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING, Literal

import numpy as np

from calcbook.errors import StaticsError, near_match
from calcbook.statics.truss import Truss
from calcbook.statics.truss_tables import Held, Joints, Members

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]

Role = Literal["top chord", "bottom chord", "post", "diagonal"]
Web = Literal["Pratt", "Howe", "Warren", "Warren with posts"]
Bar = tuple[str, str, Role]

WEBS: tuple[Web, ...] = ("Pratt", "Howe", "Warren", "Warren with posts")
"""Pratt has its diagonals in tension under a uniform load over the whole length, Howe in
compression; Warren has them by turns, with posts or without (parallel chords only)."""


_LEVEL = 1e-9  # a step of the chord force below this part of it is none


@dataclass(frozen=True)
class TrussShape:
    """The joints, members and supports of a usual form, not yet of any stiffness.

    Attributes
    ----------
    joints
        The joints, in m.
    bars
        (start, end, role) of every member.
    supports
        The supports.
    top, bottom
        The joints of each chord, left to right; a joint where they meet belongs to both.
    """

    joints: Joints
    bars: tuple[Bar, ...]
    supports: tuple[Held, ...]
    top: tuple[str, ...]
    bottom: tuple[str, ...]

    @property
    def labels(self) -> tuple[str, ...]:
        """The names of the members."""
        return tuple(f"{start}-{end}" for start, end, _ in self.bars)

    @property
    def roles(self) -> tuple[Role, ...]:
        """What each member is: 'top chord', 'bottom chord', 'post' or 'diagonal'."""
        return tuple(role for _, _, role in self.bars)

    def at(self, joints: tuple[str, ...]) -> Array:
        """Return the coordinates of some joints, shape (n, 2)."""
        rows = [list(self.joints.labels).index(joint) for joint in joints]
        found: Array = np.asarray(self.joints.xy, dtype=float)[rows]
        return found

    def truss(self, stiffness: float | Mapping[Role, float] = 1.0) -> Truss:
        """Return the truss, EA in N being one for all or one for each role.

        Raises
        ------
        StaticsError
            For a role without EA, or EA not above 0.
        """
        if isinstance(stiffness, Mapping):
            missing = [role for role in dict.fromkeys(self.roles) if role not in stiffness]
            if missing:
                raise StaticsError(f"There is no EA for the role '{missing[0]}'", named=missing)
            ea = [stiffness[role] for role in self.roles]
        else:
            ea = [stiffness] * len(self.bars)
        starts, ends = ([bar[k] for bar in self.bars] for k in (0, 1))
        return Truss(self.joints, Members(self.labels, starts, ends, ea), self.supports)


def gable(
    span: float, height: float, panels: int, web: Web = "Pratt", heel: float = 0.0
) -> TrussShape:
    """Return a gable truss, level below, its ridge in the middle.

    Parameters
    ----------
    span, height
        In m, the height to the ridge.
    panels
        In each half; 1 is a king post truss.
    web
        One of `WEBS` with posts.
    heel
        Height over the supports in m, below the height.

    Raises
    ------
    StaticsError
        For a length that makes no truss, no panels, a web that does not fit.
    """
    _refuse(span=span, height=height)
    _refuse_depth("heel", heel, below=height)
    _refuse_panels(panels)
    up = np.linspace(heel, height, panels + 1)
    depth = np.concatenate((up, up[-2::-1]))
    return _on_two_supports(span, depth, web)


def flat(span: float, depth: float, panels: int, web: Web = "Pratt") -> TrussShape:
    """Return a truss with parallel chords, supported at the ends of the bottom chord.

    Parameters
    ----------
    span, depth
        In m.
    panels
        Of the bottom chord.
    web
        One of `WEBS`; 'Warren' has its top joints over the middle of the panels.

    Raises
    ------
    StaticsError
        For a length that makes no truss, no panels, a web that does not fit.
    """
    _refuse(span=span, depth=depth)
    _refuse_panels(panels)
    if web == "Warren":
        return _warren(span, depth, panels)
    return _on_two_supports(span, np.full(panels + 1, depth), web)


def monopitch(span: float, low: float, high: float, panels: int, web: Web = "Pratt") -> TrussShape:
    """Return a truss that rises from left to right over a level bottom chord.

    Parameters
    ----------
    span
        In m.
    low, high
        Its depth at the left and at the right in m; low may be 0.
    panels
        Over the span.
    web
        One of `WEBS` with posts.

    Raises
    ------
    StaticsError
        For a length that makes no truss, no panels, a web that does not fit.
    """
    _refuse(span=span, high=high)
    _refuse_depth("low end", low, below=high)
    _refuse_panels(panels)
    return _on_two_supports(span, np.linspace(low, high, panels + 1), web)


def cantilever(
    length: float, root: float, tip: float, panels: int, web: Web = "Pratt"
) -> TrussShape:
    """Return a truss held at its left end: its top pinned, its bottom free to move up and down.

    Parameters
    ----------
    length
        In m.
    root, tip
        Its depth at the left and at the right in m; the tip may be 0. The bottom chord is level
        at the root's foot and the top chord falls.
    panels
        Over the length.
    web
        One of `WEBS` with posts.

    Raises
    ------
    StaticsError
        For a length that makes no truss, no panels, a web that does not fit.
    """
    _refuse(length=length, root=root)
    _refuse_depth("tip", tip, below=root)
    _refuse_panels(panels)
    depth = np.linspace(root, tip, panels + 1)
    left = np.linspace(length, 0.0, panels + 1)
    held = (Held("U0", "pinned"), Held("L0", "roller", np.pi / 2))
    return _posted(length, depth, -(left**2), web, held)


def _on_two_supports(span: float, depth: Array, web: Web) -> TrussShape:
    x = np.linspace(0.0, span, len(depth))
    held = (Held("L0", "pinned"), Held(f"L{len(depth) - 1}", "roller"))
    return _posted(span, depth, x * (span - x), web, held)


def _posted(
    span: float, depth: Array, moment: Array, web: Web, supports: tuple[Held, ...]
) -> TrussShape:
    """Return a truss with posts; `moment` is in proportion to that of a uniform load."""
    if web not in WEBS or web == "Warren":
        raise StaticsError(
            f"The web '{web}' does not fit this form",
            hint=near_match(str(web), WEBS[:2] + WEBS[3:])
            or "Take Pratt, Howe or Warren with posts.",
        )
    n = len(depth)
    x = np.linspace(0.0, span, n)
    meet = depth == 0
    low = tuple(f"L{k}" for k in range(n))
    high = tuple(low[k] if meet[k] else f"U{k}" for k in range(n))
    bars: list[Bar] = [(a, b, "bottom chord") for a, b in pairwise(low)]
    bars += [(a, b, "top chord") for a, b in pairwise(high)]
    bars += [(low[k], high[k], "post") for k in range(n) if not meet[k]]
    falling = _falling(depth, moment, web)
    bars += [
        (high[k], low[k + 1], "diagonal") if falling[k] else (low[k], high[k + 1], "diagonal")
        for k in range(n - 1)
        if not (meet[k] or meet[k + 1])
    ]
    above = np.flatnonzero(~meet)
    xy = np.concatenate((np.stack((x, 0 * x), axis=1), np.stack((x, depth), axis=1)[above]))
    joints = Joints(low + tuple(high[k] for k in above), xy)
    return TrussShape(joints, tuple(bars), supports, high, low)


def _falling(depth: Array, moment: Array, web: Web) -> list[bool]:
    """Return for each panel whether its diagonal falls from left to right.

    A diagonal balances the step of the chord force, moment over depth, from one panel point to
    the next: one that falls is in tension where that grows.
    """
    panels = len(depth) - 1
    if web == "Warren with posts":
        return [k % 2 == 1 for k in range(panels)]
    with np.errstate(invalid="ignore", divide="ignore"):
        chord = moment / depth
    level = _LEVEL * np.abs(chord[np.isfinite(chord)]).max()
    step, rise = np.diff(chord), np.diff(moment)
    # Without a step the shear decides, so that both halves of a gable are alike.
    grows = np.where(np.abs(step) > level, step, rise) >= -_LEVEL * np.abs(moment).max()
    tension = [bool(one) for one in grows]
    return tension if web == "Pratt" else [not one for one in tension]


def _warren(span: float, depth: float, panels: int) -> TrussShape:
    low = tuple(f"L{k}" for k in range(panels + 1))
    high = tuple(f"U{k}" for k in range(1, panels + 1))
    bars: list[Bar] = [(a, b, "bottom chord") for a, b in pairwise(low)]
    bars += [(a, b, "top chord") for a, b in pairwise(high)]
    for k, top in enumerate(high):
        bars += [(low[k], top, "diagonal"), (top, low[k + 1], "diagonal")]
    x = np.linspace(0.0, span, panels + 1)
    middle = (x[:-1] + x[1:]) / 2
    xy = np.concatenate(
        (np.stack((x, 0 * x), axis=1), np.stack((middle, np.full(panels, depth)), axis=1))
    )
    held = (Held(low[0], "pinned"), Held(low[-1], "roller"))
    return TrussShape(Joints(low + high, xy), tuple(bars), held, high, low)


def _refuse(**lengths: float) -> None:
    for name, value in lengths.items():
        if not (np.isfinite(value) and value > 0):
            raise StaticsError(
                f"The {name} of the truss is {value:g}", hint="Give a length above 0."
            )


def _refuse_depth(name: str, value: float, below: float) -> None:
    if not 0 <= value <= below:
        raise StaticsError(
            f"The depth at the {name} is {value:g}",
            hint="It is 0 at least and no more than the depth at the other end.",
        )


def _refuse_panels(panels: int) -> None:
    if not (isinstance(panels, int | np.integer) and panels >= 1):
        raise StaticsError(
            f"The truss has {panels} panels", hint="Give a whole number of panels, 1 at least."
        )
