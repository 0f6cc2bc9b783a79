"""Loads on areas and lines, brought to joints, levels and girders.

Each piece of load goes half to its one end and half to its other, so that what arrives is what was
there. Forces at joints are positive to the right and up.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np

from calcbook.errors import StaticsError
from calcbook.statics.truss_results import row_of
from calcbook.statics.truss_tables import refuse_repeated

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import ArrayLike, NDArray

    from calcbook.statics.truss import Truss

    Array = NDArray[np.float64]

_CLOSE = 1e-9  # of a length: places nearer than that are one place


def member_weights(truss: Truss, per_length: ArrayLike) -> Array:
    """Return the weight of the members as forces at the joints in N, shape (joints, 2).

    Half of each member goes to each of its joints.

    Parameters
    ----------
    truss
        The truss.
    per_length
        Weight in N/m, one for all or shape (members,).

    Raises
    ------
    StaticsError
        For a weight that is no number or below 0.
    """
    given = _checked("The weight per length", per_length, len(truss.lengths), least=0.0)
    half = given * truss.lengths / 2
    total = np.bincount(truss.ends.ravel(), weights=np.repeat(half, 2), minlength=len(truss.xy))
    return np.stack((np.zeros_like(total), -total), axis=1)


def at_joints(truss: Truss, joints: Sequence[str], forces: ArrayLike) -> Array:
    """Return forces at some joints as forces at all joints of a truss in N, shape (joints, 2).

    Parameters
    ----------
    truss
        The truss.
    joints
        Labels of the joints that have a force.
    forces
        In N, shape (len(joints), 2).

    Raises
    ------
    StaticsError
        For a joint that is not there or is given twice, or forces that do not fit.
    """
    refuse_repeated("joint", joints)
    given = np.asarray(forces, dtype=float)
    if given.shape != (len(joints), 2) or not np.isfinite(given).all():
        raise StaticsError(
            f"Forces of shape {given.shape} do not fit {len(joints)} joints",
            hint="Give every joint an Fx and an Fy, both numbers.",
        )
    total = np.zeros((len(truss.xy), 2))
    for joint, force in zip(joints, given, strict=True):
        total[row_of(joint, truss.joints.labels, "joint")] = force
    return total


def tributary(x: ArrayLike) -> Array:
    """Return the length that belongs to each place: half the way to its neighbours, shape (n,).

    The ends have no more than that, so the lengths add up to the way from first to last.

    Parameters
    ----------
    x
        Places along a line in m, in ascending order, shape (n,).

    Raises
    ------
    StaticsError
        For fewer than two places, or places out of order.
    """
    return _halved(np.diff(_ascending(x)))


def chord_loads(
    xy: ArrayLike,
    pressure: ArrayLike,
    spacing: float,
    measured: Literal["plan", "slope"] = "plan",
) -> Array:
    """Return the load of an area on a chord as forces at its joints in N, shape (n, 2).

    Parameters
    ----------
    xy
        The joints of the chord, left to right, in m, shape (n, 2).
    pressure
        Downward load in Pa, one for all or one per panel, shape (n - 1,). Below 0 it lifts.
    spacing
        Distance between trusses in m.
    measured
        'plan' for a load per area on plan (such as live load), 'slope' for one per area of the
        surface (such as the weight of roofing).

    Raises
    ------
    StaticsError
        For fewer than two joints, joints out of order, a spacing not above 0, another `measured`.
    """
    panels = np.diff(_chord(xy), axis=0)
    lengths = {"plan": panels[:, 0], "slope": np.hypot(panels[:, 0], panels[:, 1])}
    if measured not in lengths:
        raise StaticsError(
            f"The load is measured on '{measured}'", hint="Measure it on 'plan' or on 'slope'."
        )
    load = _checked("The load", pressure, len(panels)) * _width("spacing", spacing)
    down = _halved(load * lengths[measured])
    return np.stack((np.zeros_like(down), -down), axis=1)


def chord_wind(
    xy: ArrayLike,
    pressure: ArrayLike,
    spacing: float,
    face: Literal["above", "below"] = "above",
) -> Array:
    """Return wind on a chord, square to its surface, as forces at its joints in N, shape (n, 2).

    Parameters
    ----------
    xy
        The joints of the chord, left to right, in m, shape (n, 2).
    pressure
        In Pa, positive toward the surface, one for all or one per panel, shape (n - 1,).
    spacing
        Distance between trusses in m.
    face
        The side of the chord on which the pressure acts.

    Raises
    ------
    StaticsError
        For fewer than two joints, joints out of order, a spacing not above 0, another `face`.
    """
    panels = np.diff(_chord(xy), axis=0)
    toward = {"above": (1.0, -1.0), "below": (-1.0, 1.0)}
    if face not in toward:
        raise StaticsError(
            f"The wind acts on the face '{face}'", hint="It acts from 'above' or from 'below'."
        )
    load = _checked("The wind pressure", pressure, len(panels)) * _width("spacing", spacing)
    return _halved(load[:, np.newaxis] * panels[:, ::-1] * np.array(toward[face]))


def face_wind(levels: ArrayLike, pressure: ArrayLike, width: float) -> Array:
    """Return wind on an upright face as one force per level in N, shape (n,).

    The forces have the sense of the pressure: positive toward the face.

    Parameters
    ----------
    levels
        Elevations in m, bottom to top, shape (n,).
    pressure
        In Pa, one for all or one per storey, shape (n - 1,).
    width
        Of the face in m.

    Raises
    ------
    StaticsError
        For fewer than two levels, levels out of order, a width not above 0.
    """
    storeys = np.diff(_ascending(levels))
    load = _checked("The wind pressure", pressure, len(storeys)) * _width("width", width)
    return _halved(load * storeys)


def lever(load: ArrayLike, x: ArrayLike, span: ArrayLike) -> tuple[Array, Array]:
    """Return what a load gives to the near and the far support: P(1 - x/L) and P x/L.

    Parameters
    ----------
    load
        In N.
    x
        Distance from the near support in m, within the span.
    span
        L in m.

    Raises
    ------
    StaticsError
        For a span not above 0, or a load outside it.
    """
    loads, places, spans = (np.asarray(given, dtype=float) for given in (load, x, span))
    if not (np.isfinite(spans).all() and (spans > 0).all()):
        raise StaticsError("The span of a lever is a length above 0")
    if not (np.isfinite(loads).all() and np.all((places >= 0) & (places <= spans))):
        raise StaticsError(
            "A load is outside the span, or is not a number",
            hint="The lever rule is for loads between the two supports.",
        )
    far: Array = np.asarray(loads * places / spans)
    return np.asarray(loads - far), far


def girder_points(x: ArrayLike, reactions: ArrayLike) -> tuple[Array, Array]:
    """Return the reactions of beams as point loads on their girder, those at one place added.

    Parameters
    ----------
    x
        Where each beam meets the girder in m, shape (n,), in any order.
    reactions
        Of each beam in N, shape (cases, n), or (n,) for one case.

    Returns
    -------
    places, loads
        In m, ascending, shape (k,); in N, shape (cases, k).

    Raises
    ------
    StaticsError
        For shapes that do not fit, or values that are no numbers.
    """
    places = np.atleast_1d(np.asarray(x, dtype=float))
    given = np.atleast_2d(np.asarray(reactions, dtype=float))
    if given.shape[1:] != places.shape or not len(places):
        raise StaticsError(f"{given.shape[-1]} reactions do not fit {len(places)} beams")
    if not (np.isfinite(places).all() and np.isfinite(given).all()):
        raise StaticsError("A place or a reaction of a beam is not a number")
    order = np.argsort(places, kind="stable")
    apart = np.diff(places[order]) > _CLOSE * np.abs(places).max()
    first = np.flatnonzero(np.concatenate(([True], apart)))
    return places[order][first], np.add.reduceat(given[:, order], first, axis=1)


def _halved(pieces: Array) -> Array:
    """Give half of each piece (n - 1, …) to each of its two ends (n, …)."""
    total = np.zeros((len(pieces) + 1, *pieces.shape[1:]))
    total[:-1] += pieces / 2
    total[1:] += pieces / 2
    return total


def _ascending(x: ArrayLike) -> Array:
    places = np.asarray(x, dtype=float)
    fewest = 2
    if places.ndim != 1 or len(places) < fewest or not np.isfinite(places).all():
        raise StaticsError("A load is spread between two places at least, each a number")
    if not (np.diff(places) > 0).all():
        raise StaticsError(
            "The places are not in order", hint="Give them left to right, or bottom to top."
        )
    return places


def _chord(xy: ArrayLike) -> Array:
    joints = np.asarray(xy, dtype=float)
    if joints.ndim != 2 or joints.shape[1] != 2 or not np.isfinite(joints).all():  # noqa: PLR2004
        raise StaticsError("Every joint of a chord has an x and a y, both numbers")
    _ascending(joints[:, 0])
    return joints


def _checked(what: str, given: ArrayLike, count: int, least: float = -np.inf) -> Array:
    values = np.asarray(given, dtype=float)
    if values.ndim and values.shape != (count,):
        raise StaticsError(
            f"{what} has {values.size} values for {count} parts",
            hint="Give one value for all, or one for each.",
        )
    if not (np.isfinite(values).all() and (values >= least).all()):
        below = "" if np.isneginf(least) else f" or is below {least:g}"
        raise StaticsError(f"{what} is not a number{below}")
    return np.broadcast_to(values, (count,)).astype(float)


def _width(what: str, value: float) -> float:
    if not (np.isfinite(value) and value > 0):
        raise StaticsError(f"The {what} is {value:g}", hint="Give a length above 0.")
    return value
