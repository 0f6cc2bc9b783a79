"""Direct stiffness for beams, many beams of one shape at once.

A beam is cut twice. *Members* run between its nodes: ends, supports and inner hinges. *Pieces* run
between all places where something changes: nodes, ends of loads, point loads, moments and changes
of stiffness; inside a piece the bending moment is a cubic. A member's stiffness and its rotations
under load are exact integrals of those cubics over its pieces, so that the unknowns are those of
the nodes only: a short piece costs no accuracy.

Pieces, cuts, members and nodes stand on the first axis, then beams, then load cases; what does not
depend on the case has a last axis of length 1.

Source of the method: displacement method for bars in bending, with flexibility coefficients by the
unit-load theorem, common to texts on structural analysis.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Whole = NDArray[np.intp]


@dataclass(frozen=True)
class Line:
    """Beams of one shape, cut into pieces.

    Parameters
    ----------
    cuts
        Places of all cuts, shape (pieces + 1, beams, 1), m.
    stiffness
        EI, shape (pieces, beams, 1), N m2.
    nodes
        Which cuts are nodes, rising, shape (nodes,); the first and the last cut are.
    vertical, turning
        Stiffness of the support at each node, shape (nodes,), N/m and N m/rad; infinite where it
        does not give, 0 where nothing holds.
    hinged
        Which nodes are inner hinges, shape (nodes,).
    """

    cuts: Array
    stiffness: Array
    nodes: Whole
    vertical: Array
    turning: Array
    hinged: NDArray[np.bool_]

    @cached_property
    def start(self) -> Array:
        """Left ends of the pieces, shape (pieces, beams, 1)."""
        return self.cuts[:-1]

    @cached_property
    def length(self) -> Array:
        """Lengths of the pieces, shape (pieces, beams, 1)."""
        return np.diff(self.cuts, axis=0)

    @cached_property
    def spans(self) -> Array:
        """Lengths of the members, shape (members, beams, 1)."""
        return np.diff(self.cuts[self.nodes], axis=0)

    @cached_property
    def member_of(self) -> Whole:
        """Member of each piece, shape (pieces,)."""
        pieces = np.arange(len(self.cuts) - 1)
        return np.searchsorted(self.nodes, pieces, side="right") - 1

    @cached_property
    def members(self) -> list[slice]:
        """Pieces of each member."""
        ends = self.nodes.tolist()
        return [slice(a, b) for a, b in itertools.pairwise(ends)]

    @cached_property
    def share(self) -> Array:
        """The straight line from 1 at a member's left end to 0, where its pieces begin."""
        right = self.cuts[self.nodes[1:]][self.member_of]
        return (right - self.start) / self.spans[self.member_of]

    @cached_property
    def part(self) -> Array:
        """Length of a piece as a part of its member."""
        return self.length / self.spans[self.member_of]

    @cached_property
    def unknowns(self) -> Whole:
        """Numbers of deflection, slope on the left and slope on the right, shape (3, nodes)."""
        widths = 2 + self.hinged.astype(np.intp)
        first = np.cumsum(widths) - widths
        return np.stack([first, first + 1, first + widths - 1])

    @cached_property
    def held(self) -> Array:
        """Stiffness of what holds each unknown, shape (unknowns,)."""
        stiffness = np.zeros(int(self.unknowns.max()) + 1)
        stiffness[self.unknowns[1]] = self.turning
        stiffness[self.unknowns[0]] = self.vertical
        return stiffness

    def by_member(self, values: Array) -> Array:
        """Return the sums of values of the pieces over each member."""
        total: Array = np.add.reduceat(values, self.nodes[:-1], axis=0)
        return total


class Acting(NamedTuple):
    """What acts on the beams, down and clockwise.

    ``left`` and ``right`` are the line load at the two ends of each piece, shape (pieces, beams,
    cases), N/m; ``forces`` and ``moments`` act at the cuts, shape (pieces + 1, beams, cases).
    """

    left: Array
    right: Array
    forces: Array
    moments: Array


class Solved(NamedTuple):
    """What `solve` finds.

    ``moment`` holds the coefficients of the bending moment on each piece, shape (4, pieces, beams,
    cases), N m; ``slope`` and ``deflection`` are those where the pieces begin, shape (pieces,
    beams, cases), rad and m; ``reactions`` and ``reaction_moments`` are those at the nodes, shape
    (nodes, beams, cases), N up and N m clockwise; ``residuals``, shape (beams, cases), say what is
    out of balance at the nodes or does not fit there, relative to the forces and slopes.
    """

    moment: Array
    slope: Array
    deflection: Array
    reactions: Array
    reaction_moments: Array
    residuals: Array


class _Ends(NamedTuple):
    """The two ends of all members: a pair of arrays of shape (members, beams, cases or 1)."""

    near: Array
    far: Array


class _Stiff(NamedTuple):
    """End moments of the members for a turn of either end: near, cross and far coefficient."""

    near: Array
    cross: Array
    far: Array

    def moments(self, turns: _Ends) -> _Ends:
        return _Ends(
            self.near * turns.near + self.cross * turns.far,
            self.cross * turns.near + self.far * turns.far,
        )


def solve(line: Line, acting: Acting) -> Solved:
    """Solve all beams for all their load cases.

    Raises
    ------
    numpy.linalg.LinAlgError
        For a mechanism; beams are checked for that before.
    """
    moment, down = _simply_supported(line, acting)
    stiff = _stiffness(line)
    fixed = stiff.moments(_turns_under_load(line, moment))
    moved = _movements(line, acting, stiff, fixed, down)
    by_movement = stiff.moments(_turns(line, moved))
    ends = _Ends(by_movement.near - fixed.near, by_movement.far - fixed.far)
    _set_released(line, acting, ends)
    _add_ends(line, moment, ends)
    slope, deflection, gap = _integrated(line, moment, moved)
    up, clockwise, lacking = _reactions(line, acting, moment, moved)
    return Solved(moment, slope, deflection, up, clockwise, np.maximum(lacking, gap))


def _simply_supported(line: Line, acting: Acting) -> tuple[Array, _Ends]:
    """Return the moments of the members as simple beams, and the forces they bring to the nodes."""
    h = line.length
    total = 0.5 * h * (acting.left + acting.right)
    about_end = h * h * (acting.left / 3 + acting.right / 6)
    shear, moment = np.zeros_like(total), np.zeros_like(total)
    lefts, sums = [], []
    for at, long in zip(line.members, line.spans, strict=True):
        inner = slice(at.start + 1, at.stop)
        v, rise = shear[at], moment[at]
        v[1:] = -np.cumsum(total[at][:-1] + acting.forces[inner], axis=0)
        steps = v * h[at] - about_end[at]
        rise[1:] = np.cumsum(steps[:-1] + acting.moments[inner], axis=0)
        left = -(rise[-1] + steps[-1]) / long
        v += left
        rise += left * (line.start[at] - line.start[at.start])
        lefts.append(left)
        sums.append(total[at].sum(axis=0) + acting.forces[inner].sum(axis=0))
    near = np.stack(lefts)
    squared = h * h
    second, third = -squared * acting.left / 2, -squared * (acting.right - acting.left) / 6
    return np.stack([moment, shear * h, second, third]), _Ends(near, np.stack(sums) - near)


def _stiffness(line: Line) -> _Stiff:
    """Return the stiffness of the members: the inverse of their flexibility."""
    weight, a, r = line.length / line.stiffness, line.share, line.part
    b = 1 - a
    near = line.by_member(weight * (a * a - a * r + r * r / 3))
    cross = line.by_member(weight * (a * b + (a - b) * r / 2 - r * r / 3))
    far = line.by_member(weight * (b * b + b * r + r * r / 3))
    whole = near * far - cross * cross
    return _Stiff(far / whole, -cross / whole, near / whole)


def _areas(moment: Array) -> tuple[Array, Array]:
    """Return area and first moment about the left end of cubics over a piece of length 1."""
    return (
        moment[0] + moment[1] / 2 + moment[2] / 3 + moment[3] / 4,
        moment[0] / 2 + moment[1] / 3 + moment[2] / 4 + moment[3] / 5,
    )


def _turns_under_load(line: Line, simple: Array) -> _Ends:
    """Return the end rotations of the simple members under their loads, as of a sagging moment."""
    area, first = _areas(simple)
    weight = line.length / line.stiffness
    near = weight * line.share * area - weight * line.part * first
    return _Ends(line.by_member(near), line.by_member(weight * area - near))


def _turns(line: Line, moved: Array) -> _Ends:
    """Return the end rotations of the members from their chords, as of a sagging moment."""
    v, left, right = (moved[u] for u in line.unknowns)
    chord = (v[1:] - v[:-1]) / line.spans
    return _Ends(right[:-1] - chord, chord - left[1:])


def _movements(line: Line, acting: Acting, stiff: _Stiff, fixed: _Ends, down: _Ends) -> Array:
    """Return deflections and slopes of the nodes, shape (unknowns, beams, cases)."""
    size, beams = len(line.held), acting.left.shape[1]
    whole, load = np.zeros((beams, size, size)), np.zeros((size, *acting.left.shape[1:]))
    for m, over in enumerate(1 / line.spans):
        at = line.unknowns[[0, 2, 0, 1], [m, m, m + 1, m + 1]]
        push = over * (fixed.near[m] - fixed.far[m])
        load[at[0]] += down.near[m] + push
        load[at[1]] += fixed.near[m]
        load[at[2]] += down.far[m] - push
        load[at[3]] -= fixed.far[m]
        one = [k[m, :, 0] for k in stiff]
        whole[:, at[:, np.newaxis], at] += _block(over[:, 0], *one)
    load[line.unknowns[0]] += acting.forces[line.nodes]
    load[line.unknowns[1]] += acting.moments[line.nodes]
    free = np.flatnonzero(np.isfinite(line.held))
    moved = np.zeros_like(load)
    if len(free):
        kept = whole[:, free[:, np.newaxis], free]
        kept[:, np.arange(len(free)), np.arange(len(free))] += line.held[free]
        moved[free] = _scaled_solve(kept, load[free])
    return moved


def _block(over: Array, near: Array, cross: Array, far: Array) -> Array:
    """Return the stiffness of a member in deflection and slope of its ends: (beams, 4, 4)."""
    p, q = near - cross, far - cross
    s, zero = p + q, np.zeros_like(over)
    push = [over * s * over, over * p, -over * s * over, over * q]
    rows = [
        push,
        [over * p, near, -over * p, -cross],
        [-one for one in push],
        [over * q, -cross, -over * q, far + zero],
    ]
    return np.stack([np.stack(row, axis=-1) for row in rows], axis=-2)


def _scaled_solve(whole: Array, load: Array) -> Array:
    """Solve with rows and columns scaled to a unit diagonal, so that units do not matter."""
    scale = 1 / np.sqrt(np.diagonal(whole, axis1=-2, axis2=-1))[..., np.newaxis]
    scaled = scale * whole * scale.swapaxes(-1, -2)
    found: Array = scale * np.linalg.solve(scaled, scale * load.swapaxes(0, 1))
    return found.swapaxes(0, 1)


def _set_released(line: Line, acting: Acting, ends: _Ends) -> None:
    """Put the end moments that are known exactly, at hinges and free or pinned ends, in place."""
    if not line.turning[0]:
        ends.near[0] = acting.moments[0]
    if not line.turning[-1]:
        ends.far[-1] = -acting.moments[-1]
    inner = line.hinged[1:-1]
    ends.near[1:][inner] = 0.0
    ends.far[:-1][inner] = 0.0


def _add_ends(line: Line, simple: Array, ends: _Ends) -> None:
    """Add the straight line between the end moments to the moments of the simple members."""
    near, far = ends.near[line.member_of], ends.far[line.member_of]
    simple[0] += near * line.share + far * (1 - line.share)
    simple[1] += (far - near) * line.part


def _integrated(line: Line, moment: Array, moved: Array) -> tuple[Array, Array, Array]:
    """Return slope and deflection where the pieces begin, and what they miss the nodes by.

    The curvature is -M/EI. What is missed is relative to the greatest slope or bend, shape
    (beams, cases).
    """
    area, first = _areas(moment)
    h = line.length
    weight = h / line.stiffness
    turn, sag = -weight * area, -weight * h * (area - first)
    slope, deflection = np.empty_like(turn), np.empty_like(turn)
    v, left, right = (moved[u] for u in line.unknowns)
    missed = np.zeros(turn.shape[1:])
    for m, at in enumerate(line.members):
        slopes = right[m] + np.cumsum(turn[at], axis=0)
        slope[at.start], slope[at.start + 1 : at.stop] = right[m], slopes[:-1]
        sags = v[m] + np.cumsum(slope[at] * h[at] + sag[at], axis=0)
        deflection[at.start], deflection[at.start + 1 : at.stop] = v[m], sags[:-1]
        missed = np.maximum(missed, np.abs(slopes[-1] - left[m + 1]))
        missed = np.maximum(missed, np.abs(sags[-1] - v[m + 1]) / line.spans[m])
    bent = weight * np.abs(moment).max(axis=0)
    size = np.maximum(np.abs(slope), bent).max(axis=0)
    return slope, deflection, np.divide(missed, size, out=np.zeros_like(size), where=size > 0)


def _reactions(
    line: Line, acting: Acting, moment: Array, moved: Array
) -> tuple[Array, Array, Array]:
    """Return reactions and moments of the supports, which are what the nodes lack for equilibrium.

    The third array is what they lack where nothing holds them, or beyond what a spring gives,
    relative to the loads, shears and moments, shape (beams, cases).
    """
    h = line.length
    begins = moment[1] / h
    ends = begins - 0.5 * h * (acting.left + acting.right)
    shear = _jumps(line, begins, ends)
    turning = _jumps(line, moment[0], moment.sum(axis=0))
    up = shear + acting.forces[line.nodes]
    clockwise = turning - acting.moments[line.nodes]
    size = np.abs(acting.forces).sum(axis=0) + np.maximum(np.abs(begins), np.abs(ends)).max(axis=0)
    size += (0.5 * h * (np.abs(acting.left) + np.abs(acting.right))).sum(axis=0)
    longest = line.spans.max(axis=0)
    size += np.abs(moment).max(axis=(0, 1)) / longest
    vertical, stiff = line.vertical[:, None, None], line.turning[:, None, None]
    forces = _lacking(up, vertical, moved[line.unknowns[0]])
    moments = _lacking(clockwise, stiff, -moved[line.unknowns[1]]) / longest
    worst = np.maximum(forces, moments)
    lacking = np.divide(worst, size, out=np.zeros_like(worst), where=size > 0)
    return np.where(vertical > 0, up, 0.0), np.where(stiff > 0, clockwise, 0.0), lacking


def _jumps(line: Line, begins: Array, ends: Array) -> Array:
    """Return the value right of each node less that left of it; nothing lies beyond the ends."""
    jump = np.zeros((len(line.nodes), *begins.shape[1:]))
    jump[:-1] += begins[line.nodes[:-1]]
    jump[1:] -= ends[line.nodes[1:] - 1]
    return jump


def _lacking(reactions: Array, stiffness: Array, movement: Array) -> Array:
    """Return the most that a spring or a free node takes beyond what its stiffness gives."""
    gives = np.isfinite(stiffness)
    off = np.where(gives, reactions - np.where(gives, stiffness, 0.0) * movement, 0.0)
    found: Array = np.abs(off).max(axis=0)
    return found
