"""What holds for every beam: equilibrium, superposition, symmetry, scaling, envelopes, cuts."""

from __future__ import annotations

import dataclasses
from typing import TYPE_CHECKING

import numpy as np
from beam_strategies import beams, loads, mirrored
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.statics.beam import Beam, Hinge, Support
from calcbook.statics.beam_diagrams import QUANTITIES
from calcbook.statics.beam_loads import LineLoad, Load, PointLoad, load_totals

if TYPE_CHECKING:
    from calcbook.statics.beam_results import BeamResult

CLOSE = 1e-9
few = settings(max_examples=60, deadline=None)


def size(result: BeamResult, quantity: str) -> float:
    """Return the magnitude rounding is measured by, or 1 where all is zero.

    The greatest of the quantity over all rows; where a pure moment leaves no shear but rounding,
    that of the moment over the length, and so on.
    """
    long = result.spans[-1].x2
    beside = {"shear": ("moment", 1 / long), "moment": ("shear", long),
              "slope": ("deflection", 1 / long), "deflection": ("slope", long)}  # fmt: skip
    other, factor = beside[quantity]
    found, second = result.envelope(quantity), result.envelope(other)
    own = max(float(found.max), -float(found.min))
    return max(own, factor * float(second.max), -factor * float(second.min)) or 1.0


def assert_same(one: BeamResult, other: BeamResult, x: np.ndarray, sign: float = 1.0) -> None:
    """Compare the four diagrams at places x."""
    for quantity in QUANTITIES:
        scale = CLOSE * size(one, quantity)
        np.testing.assert_allclose(
            other.at(quantity, x), sign * one.at(quantity, x), rtol=CLOSE, atol=scale
        )


@few
@given(st.data())
def test_loads_and_reactions_are_in_equilibrium(data: st.DataObject) -> None:
    """Vertical forces and moments about the left end add up to nothing in every case."""
    beam = data.draw(beams())
    acting = data.draw(loads(beam, cases=2))
    result = beam.solve(acting, cases=2)
    down, moment = load_totals(acting, 2)
    x = np.array([s.x for s in beam.supports])
    gross = np.abs(result.reactions).sum(axis=1) + 1.0
    assert (np.abs(result.reactions.sum(axis=1) - down) <= CLOSE * gross).all()
    lever = result.reactions @ x - result.reaction_moments.sum(axis=1) - moment
    turning = gross * beam.length + np.abs(result.reaction_moments).sum(axis=1)
    assert (np.abs(lever) <= CLOSE * turning).all()
    assert result.residual < CLOSE


@few
@given(st.data())
def test_every_cut_is_in_equilibrium(data: st.DataObject) -> None:
    """Shear and moment at a cut balance all that acts left of it, summed load by load."""
    beam = data.draw(beams())
    acting = data.draw(loads(beam))
    result = beam.solve(acting)
    for cut in beam.length * np.array([0.213, 0.5049, 0.871]):
        left = [part for load in acting if (part := left_of(load, float(cut))) is not None]
        down, moment = load_totals(left, 1)
        held = [i for i, s in enumerate(beam.supports) if s.x < cut]
        up = result.reactions[0, held]
        x = np.array([beam.supports[i].x for i in held])
        shear = up.sum() - down[0]
        bending = up @ (cut - x) + result.reaction_moments[0, held].sum()
        bending += moment[0] - down[0] * cut
        scale = np.abs(result.reactions).sum() + np.abs(down).sum() + 1.0
        assert abs(result.shear(cut)[0] - shear) <= CLOSE * scale
        turning = scale * beam.length + np.abs(result.reaction_moments).sum()
        assert abs(result.moment(cut)[0] - bending) <= CLOSE * (turning + abs(moment[0]))


def left_of(load: Load, cut: float) -> Load | None:
    """Return the part of a load that acts left of a cut."""
    if isinstance(load, LineLoad):
        return load.within(0.0, cut)
    return load if load.x < cut else None


@few
@given(st.data())
def test_supports_hold(data: st.DataObject) -> None:
    """No deflection at rigid supports, none of slope at fixed ones, spring force by stiffness."""
    beam = data.draw(beams())
    result = beam.solve(data.draw(loads(beam)))
    sag, turn = size(result, "deflection"), size(result, "slope")
    for i, support in enumerate(beam.supports):
        moved, turned = result.deflection(support.x)[0], result.slope(support.x)[0]
        reach = CLOSE * (sag + turn * beam.length)
        if support.kind == "spring":
            given_up = result.reactions[0, i] / support.vertical
            assert abs(moved - given_up) <= reach
            assert abs(turned + result.reaction_moments[0, i] / support.turning) <= CLOSE * turn
        else:
            assert abs(moved) <= reach
        if support.kind == "fixed":
            assert abs(turned) <= CLOSE * turn


@few
@given(st.data())
def test_effects_add_up(data: st.DataObject) -> None:
    """Two cases combined give what their loads give together, each times its factor."""
    beam = data.draw(beams())
    acting = data.draw(loads(beam, cases=2))
    factors = [1.4, -0.75]
    together = [factored(load, factors[load.case]) for load in acting]
    combined = beam.solve(acting, cases=2).combined([factors])
    x = np.linspace(0.003, 0.997, 29) * beam.length
    one = beam.solve(together, cases=1)
    parts = beam.solve(acting, cases=2)
    for quantity in QUANTITIES:
        scale = CLOSE * size(parts, quantity)
        ours, theirs = combined.at(quantity, x), one.at(quantity, x)
        np.testing.assert_allclose(ours, theirs, rtol=CLOSE, atol=scale)


def factored(load: Load, factor: float) -> Load:
    """Return a load times a factor, in the first case."""
    if isinstance(load, LineLoad):
        return dataclasses.replace(load, w1=load.w1 * factor, w2=load.end * factor, case=0)
    if isinstance(load, PointLoad):
        return dataclasses.replace(load, P=load.P * factor, case=0)
    return dataclasses.replace(load, M=load.M * factor, case=0)


@few
@given(st.data())
def test_a_mirrored_beam_has_mirrored_results(data: st.DataObject) -> None:
    """Moments and deflections are mirrored, shear and slope change their sign."""
    beam = data.draw(beams())
    acting = data.draw(loads(beam))
    long = beam.length
    other = Beam(
        [dataclasses.replace(s, x=long - s.x) for s in beam.supports],
        long,
        [(long - b, long - a, e) for a, b, e in reversed(beam.stretches)],
        [Hinge(h.label, long - h.x) for h in beam.hinges],
    )
    one, two = beam.solve(acting), other.solve([mirrored(load, long) for load in acting])
    x = np.linspace(0.0031, 0.9963, 29) * long
    for quantity, sign in zip(QUANTITIES, (-1, 1, -1, 1), strict=True):
        scale = CLOSE * size(one, quantity)
        theirs = sign * two.at(quantity, long - x)
        np.testing.assert_allclose(one.at(quantity, x), theirs, rtol=CLOSE, atol=scale)


@few
@given(st.data(), st.sampled_from([1e-3, 0.25, 40.0]))
def test_lengths_scale(data: st.DataObject, k: float) -> None:
    """With all lengths times k, line loads over k and point loads kept, moments are times k."""
    beam = data.draw(beams(hinged=False))
    acting = [a for a in data.draw(loads(beam)) if isinstance(a, (LineLoad, PointLoad))]
    rigid = [Support(s.label, s.x, "pinned") for s in beam.supports]
    large = [dataclasses.replace(s, x=k * s.x) for s in rigid]
    one = Beam(rigid, beam.length, beam.stretches).solve(acting, cases=1)
    stretched = [(k * a, k * b, e) for a, b, e in beam.stretches]
    two = Beam(large, k * beam.length, stretched).solve([scaled(a, k) for a in acting], cases=1)
    np.testing.assert_allclose(
        two.reactions, one.reactions, rtol=CLOSE, atol=CLOSE * size(one, "shear")
    )
    x = np.linspace(0.0031, 0.9963, 29) * beam.length
    for quantity, power in zip(QUANTITIES, (0, 1, 2, 3), strict=True):
        scale = CLOSE * size(one, quantity)
        theirs = two.at(quantity, k * x) / k**power
        np.testing.assert_allclose(one.at(quantity, x), theirs, rtol=CLOSE, atol=scale)


def scaled(load: LineLoad | PointLoad, k: float) -> Load:
    """Return a load of the same size on a beam k times as long."""
    if isinstance(load, PointLoad):
        return dataclasses.replace(load, x=k * load.x)
    return LineLoad(k * load.x1, k * load.x2, load.w1 / k, load.end / k)


@few
@given(st.data(), st.lists(st.floats(0.01, 0.99), min_size=1, max_size=6))
def test_cutting_a_beam_further_changes_nothing(data: st.DataObject, parts: list[float]) -> None:
    """Loads of nothing and steps of EI to the same EI add cuts, and no more."""
    beam = data.draw(beams())
    acting = data.draw(loads(beam))
    nothing = [PointLoad(p * beam.length, 0.0) for p in parts]
    nothing += [LineLoad(0.0, p * beam.length, 0.0) for p in parts]
    halved = [s for a, b, e in beam.stretches for s in ((a, (a + b) / 2, e), ((a + b) / 2, b, e))]
    finer = Beam(beam.supports, beam.length, halved, beam.hinges)
    one, two = beam.solve(acting), finer.solve([*acting, *nothing])
    x = np.linspace(0.0031, 0.9963, 29) * beam.length
    assert_same(one, two, x)
    for quantity in QUANTITIES:
        scale = CLOSE * size(one, quantity)
        first, second = one.extremes(quantity), two.extremes(quantity)
        np.testing.assert_allclose(first.max, second.max, rtol=CLOSE, atol=scale)
        np.testing.assert_allclose(first.min, second.min, rtol=CLOSE, atol=scale)


@few
@given(st.data())
def test_peaks_are_reached_and_never_passed(data: st.DataObject) -> None:
    """The value at the place of a peak is the peak; none of 400 other places lies beyond it."""
    beam = data.draw(beams())
    result = beam.solve(data.draw(loads(beam)))
    x = np.linspace(0.0, 1.0, 401) * beam.length
    for quantity in QUANTITIES:
        found = result.extremes(quantity)
        slack = CLOSE * size(result, quantity)
        values = result.at(quantity, x)
        assert values.max() <= found.max[0] + slack
        assert values.min() >= found.min[0] - slack
        for place, peak in ((found.x_max[0], found.max[0]), (found.x_min[0], found.min[0])):
            sides = [result.at(quantity, place, side)[0] for side in ("left", "right")]
            assert min(abs(s - peak) for s in sides) <= 10 * slack


@few
@given(st.data())
def test_an_envelope_contains_every_row(data: st.DataObject) -> None:
    """Of any combination no value lies outside, and the row named reaches the bound."""
    beam = data.draw(beams())
    cases = beam.solve(data.draw(loads(beam, cases=3)), cases=3)
    factors = [[1.4, 0, 0], [1.2, 1.6, 0.5], [0.9, 0, -1], [1.2, 1, 1]]
    result = cases.combined(factors)
    x = np.linspace(0.0, 1.0, 33) * beam.length
    for quantity in QUANTITIES:
        whole, by_span = result.envelope(quantity), result.span_envelope(quantity)
        at = result.envelope_at(quantity, x)
        slack = CLOSE * size(result, quantity)
        values = result.at(quantity, x)
        assert (values <= at.max + slack).all()
        assert (values >= at.min - slack).all()
        assert (at.max <= whole.max + slack).all()
        assert abs(by_span.max.max() - whole.max) <= slack
        assert abs(by_span.min.min() - whole.min) <= slack
        reached = result.extremes(quantity).max[int(whole.row_max)]
        assert abs(reached - whole.max) <= slack


@few
@given(st.data())
def test_the_diagrams_are_each_other_s_derivatives(data: st.DataObject) -> None:
    """Shear is the slope of the moment, and slope that of the deflection (central differences)."""
    beam = data.draw(beams())
    result = beam.solve(data.draw(loads(beam)))
    h = 1e-5 * beam.length
    for x in beam.length * np.array([0.1173, 0.4519, 0.9037]):
        if np.abs(result.pieces("moment").start - x).min() < 2 * h:
            continue
        for quantity, slope in (("moment", "shear"), ("deflection", "slope")):
            ends = result.at(quantity, [x - h, x + h])[0]
            rise = (ends[1] - ends[0]) / (2 * h)
            scale = 1e-5 * (size(result, slope) + size(result, quantity) / beam.length)
            assert abs(rise - result.at(slope, x)[0]) <= scale
