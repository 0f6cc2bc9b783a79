"""Slab panels on their edge beams: published shapes, and sums that close."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.errors import StaticsError
from calcbook.statics.panels import EdgeLoad, slab_panel

MANY = settings(max_examples=80, deadline=None)
sides = st.floats(0.5, 20.0)
loads = st.floats(100.0, 2e4)


def on_a_beam(edge: EdgeLoad, points: int = 20_001) -> tuple[float, float, float]:
    """Return total, end reaction and largest moment of a simply supported beam, by summing up."""
    x = np.linspace(0.0, edge.length, points)
    w = np.zeros(points)
    for x1, x2, w1, w2 in edge.pieces:
        here = (x >= x1) & (x <= x2)
        w[here] = w1 + (w2 - w1) * (x[here] - x1) / (x2 - x1)
    total = float(np.trapezoid(w, x))
    reaction = float(np.trapezoid(w * (edge.length - x), x)) / edge.length
    shear = reaction - np.concatenate(([0.0], np.cumsum((w[1:] + w[:-1]) / 2 * np.diff(x))))
    moment = np.concatenate(([0.0], np.cumsum((shear[1:] + shear[:-1]) / 2 * np.diff(x))))
    return total, reaction, float(moment.max())


def test_a_published_panel() -> None:
    """5.5 kPa on 4 x 6 m: peaks 11 kN/m, totals 22 and 44 kN, as open notes on two-way slabs do."""
    panel = slab_panel(5.5e3, 6.0, 4.0)
    assert not panel.one_way
    short, long = panel.short, panel.long
    assert (short.shape, long.shape) == ("triangle", "trapezoid")
    assert (short.peak, long.peak) == pytest.approx((11e3, 11e3))
    assert (short.total, long.total) == pytest.approx((22e3, 44e3))
    assert panel.total == pytest.approx(5.5e3 * 24)
    assert short.for_moment == pytest.approx(5.5e3 * 4 / 3)
    assert long.for_moment == pytest.approx(9370.37037)
    assert short.for_shear == pytest.approx(5.5e3 * 4 / 4)
    assert long.for_shear == pytest.approx(11e3 * (1 - 1 / 3))
    assert short.for_moment * 4**2 / 8 == pytest.approx(14.66667e3, rel=1e-6)
    assert long.for_moment * 6**2 / 8 == pytest.approx(42.16667e3, rel=1e-6)


@given(loads, sides, sides)
@MANY
def test_the_edges_carry_the_whole_panel(load: float, width: float, depth: float) -> None:
    """The four edges together carry pressure times area, one way or two."""
    panel = slab_panel(load, width, depth)
    assert panel.total == pytest.approx(load * width * depth, rel=1e-12)
    assert panel.one_way == (max(width, depth) > 2.0 * min(width, depth))


@given(loads, sides, sides)
@settings(max_examples=25, deadline=None)
def test_equivalent_loads(load: float, width: float, depth: float) -> None:
    """The equivalent loads give the beam its largest moment and its end shear."""
    panel = slab_panel(load, width, depth)
    for edge in (panel.short, panel.long):
        total, reaction, moment = on_a_beam(edge)
        assert total == pytest.approx(edge.total, rel=1e-5)
        assert edge.for_shear * edge.length / 2 == pytest.approx(reaction, rel=1e-5)
        assert edge.for_moment * edge.length**2 / 8 == pytest.approx(moment, rel=1e-5)


@given(loads, sides, st.floats(1.0, 2.0))
@MANY
def test_either_order_of_the_sides(load: float, side: float, ratio: float) -> None:
    """A panel is the same with its sides in the other order."""
    assert slab_panel(load, side, ratio * side) == slab_panel(load, ratio * side, side)


def test_a_square_panel() -> None:
    """A square panel gives four triangles."""
    panel = slab_panel(4e3, 5.0, 5.0)
    assert panel.short == panel.long
    assert panel.long.shape == "triangle"


@pytest.mark.parametrize(("limit", "one_way"), [(2.0, False), (1.9, True), (2.1, False)])
def test_the_limit_of_one_way(limit: float, one_way: bool) -> None:
    """At the limit a panel still carries two ways; above it one way, to its long edges."""
    panel = slab_panel(3e3, 4.0, 8.0, limit=limit)
    assert panel.one_way is one_way
    assert (panel.short.shape == "none") is one_way
    assert panel.total == pytest.approx(96e3)
    if one_way:
        assert panel.long.pieces == ((0.0, 8.0, 6e3, 6e3),)
        assert panel.long.for_moment == panel.long.for_shear == 6e3


@pytest.mark.parametrize(
    ("call", "what"),
    [
        (lambda: slab_panel(1e3, 0.0, 4.0), "sides 0 and 4"),
        (lambda: slab_panel(1e3, 4.0, -1.0), "sides 4 and -1"),
        (lambda: slab_panel(1e3, 4.0, float("nan")), "sides 4 and nan"),
        (lambda: slab_panel(float("inf"), 4.0, 4.0), "not a number"),
        (lambda: slab_panel(1e3, 4.0, 4.0, limit=0.5), "above a ratio of 0.5"),
    ],
)
def test_panels_that_are_refused(call: object, what: str) -> None:
    """Sides, loads and limits that make no panel are refused."""
    with pytest.raises(StaticsError, match=what):
        call()  # type: ignore[operator]
