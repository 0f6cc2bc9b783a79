"""Beams with published or known answers.

Sources: [18] Baker and Haynes, Engineering Statics (open text), chapter 7. [19] Civil Engineering
Formulas, beams. What has neither is from memory, and is also solved by sympy beside.
"""

from __future__ import annotations

import numpy as np
import pytest

from calcbook.errors import StaticsError
from calcbook.statics.beam import Beam, Hinge, Support
from calcbook.statics.beam_loads import LineLoad, MomentLoad, PointLoad, load_totals

EI = 2.0e7
EXACT = 1e-9


def beam(*places: float, length: float | None = None, kinds: str = "") -> Beam:
    """Return a beam on supports A, B, C...; ``kinds`` has an f for each that is fixed."""
    words = {"f": "fixed", "p": "pinned"}
    kinds = kinds or "p" * len(places)
    supports = [Support(chr(ord("A") + i), x, words[kinds[i]]) for i, x in enumerate(places)]
    return Beam(supports, places[-1] if length is None else length, EI)


def triangle(length: float, peak: float) -> LineLoad:
    """Return a load that rises from nothing at the left end."""
    return LineLoad(0, length, 0, peak)


# beam, loads, reactions, moments asked for (place: value); w in kN/m and so on, as published
PUBLISHED = {
    "simple, uniform": (beam(0, 6), [LineLoad(0, 6, 12)], [36, 36], {3: 54}),
    "simple, point load": (
        beam(0, 6), [PointLoad(2, 20)], [40 / 3, 20 / 3], {2: 80 / 3},
    ),
    "cantilever, uniform": (
        beam(0, length=3, kinds="f"), [LineLoad(0, 3, 5)], [15], {0: -22.5, 3: 0},
    ),
    "propped, uniform": (
        beam(0, 6, kinds="fp"), [LineLoad(0, 6, 8)], [30, 18], {0: -36, 6: 0},
    ),
    "fixed, uniform": (
        beam(0, 6, kinds="ff"), [LineLoad(0, 6, 12)], [36, 36], {0: -36, 3: 18, 6: -36},
    ),
    "two equal spans [19]": (
        beam(0, 5, 10), [LineLoad(0, 10, 10)], [18.75, 62.5, 18.75], {5: -31.25, 1.875: 17.578125},
    ),
    "spans of 6 and 4 [19]": (
        beam(0, 6, 10), [LineLoad(0, 10, 10)],
        [60 / 2 - 35 / 6, 50 + 35 / 6 + 35 / 4, 40 / 2 - 35 / 4], {6: -10 * (216 + 64) / 80},
    ),
    "overhang": (
        beam(0, 6, length=8), [LineLoad(0, 8, 10)], [80 / 3, 160 / 3], {6: -20, 8: 0},
    ),
    "three equal spans [19]": (
        beam(0, 1, 2, 3), [LineLoad(0, 3, 1)], [0.4, 1.1, 1.1, 0.4],
        {1: -0.1, 2: -0.1, 0.4: 0.08, 1.5: 0.025},
    ),
    "four equal spans [19]": (
        beam(0, 1, 2, 3, 4), [LineLoad(0, 4, 1)], [11 / 28, 32 / 28, 26 / 28, 32 / 28, 11 / 28],
        {1: -3 / 28, 2: -2 / 28},
    ),
    "cantilever loaded over its outer part [18]": (
        beam(0, length=6, kinds="f"), [LineLoad(2, 6, 4)], [16], {0: -64},
    ),
    "triangle: 30 lb at 4 ft [18]": (
        beam(0, 6), [triangle(6, 10)], [30 * 2 / 6, 30 * 4 / 6], {},
    ),
    "shelf [18]": (beam(0, 6), [LineLoad(0, 6, 100)], [300, 300], {}),
}  # fmt: skip


@pytest.mark.parametrize("name", PUBLISHED)
def test_published_beams_are_reproduced(name: str) -> None:
    """Reactions and moments are those published, exactly."""
    one, loads, reactions, moments = PUBLISHED[name]
    result = one.solve(loads)
    np.testing.assert_allclose(result.reactions[0], reactions, rtol=EXACT)
    size = result.extremes("moment")
    scale = EXACT * max(size.max[0], -size.min[0])
    for x, value in moments.items():
        np.testing.assert_allclose(result.moment(x, "left")[0], value, rtol=EXACT, atol=scale)


# Deflections, from memory: 5wL^4/384, PL^3/48, wL^4/8, PL^3/3, wL^4/384, PL^3/192, ML^2/(9 sqrt 3)
DEFLECTIONS = {
    "simple, uniform": (beam(0, 8), [LineLoad(0, 8, 9e3)], 5 * 9e3 * 8**4 / 384, 4.0),
    "simple, point load": (beam(0, 8), [PointLoad(4, 5e4)], 5e4 * 8**3 / 48, 4.0),
    "cantilever, uniform": (
        beam(0, length=8, kinds="f"), [LineLoad(0, 8, 9e3)], 9e3 * 8**4 / 8, 8.0,
    ),
    "cantilever, point load": (
        beam(0, length=8, kinds="f"), [PointLoad(8, 5e4)], 5e4 * 8**3 / 3, 8.0,
    ),
    "fixed, uniform": (beam(0, 8, kinds="ff"), [LineLoad(0, 8, 9e3)], 9e3 * 8**4 / 384, 4.0),
    "fixed, point load": (beam(0, 8, kinds="ff"), [PointLoad(4, 5e4)], 5e4 * 8**3 / 192, 4.0),
    "moment at the right end": (
        beam(0, 8), [MomentLoad(8, -4e4)], 4e4 * 8**2 / (9 * 3**0.5), 8 / 3**0.5,
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", DEFLECTIONS)
def test_greatest_deflections_are_the_known_ones(name: str) -> None:
    """Size and place of the greatest deflection follow the formula of the handbooks."""
    one, loads, times_stiffness, x = DEFLECTIONS[name]
    found = one.solve(loads).extremes("deflection")
    np.testing.assert_allclose(found.max[0], times_stiffness / EI, rtol=EXACT)
    np.testing.assert_allclose(found.x_max[0], x, rtol=1e-6)


def test_signs_of_a_simple_beam() -> None:
    """Shear falls from + to -, the beam sags, turns clockwise on the left, and goes down."""
    result = beam(0, 6).solve([LineLoad(0, 6, 10)])
    assert result.shear(0)[0] == pytest.approx(30)
    assert result.shear(6)[0] == pytest.approx(-30)
    assert result.moment(3)[0] == pytest.approx(45)
    assert result.slope(0)[0] == pytest.approx(10 * 6**3 / 24 / EI)
    assert result.slope(6)[0] == pytest.approx(-10 * 6**3 / 24 / EI)


def test_a_clockwise_moment_raises_the_bending_moment() -> None:
    """The bending moment jumps up by an applied moment, and the left reaction pulls down."""
    result = beam(0, 6).solve([MomentLoad(2, 12)])
    assert result.moment(2, "right")[0] - result.moment(2, "left")[0] == pytest.approx(12)
    np.testing.assert_allclose(result.reactions[0], [-2, 2])


def test_moments_of_fixed_supports_are_clockwise() -> None:
    """The left support holds a loaded beam anticlockwise, the right one clockwise."""
    result = beam(0, 6, kinds="ff").solve([LineLoad(0, 6, 12)])
    np.testing.assert_allclose(result.reaction_moments[0], [-36, 36])


def test_a_jump_has_two_sides() -> None:
    """Shear left and right of a point load differ by the load."""
    result = beam(0, 6).solve([PointLoad(2, 12)])
    assert result.shear(2, "left")[0] == pytest.approx(8)
    assert result.shear(2, "right")[0] == pytest.approx(-4)
    x, shear = result.curve("shear", points=2)
    np.testing.assert_allclose(x, [0, 2, 2, 6])
    np.testing.assert_allclose(shear, [[8, 8, -4, -4]])


def test_a_hinged_beam_is_solved_by_statics() -> None:
    """A suspended span hands half its load to the tip of the cantilever (from memory)."""
    hinged = Beam(
        [Support("A", 0, "fixed"), Support("B", 10)], 10, [(0, 4, EI), (4, 10, 3 * EI)],
        [Hinge("H", 4)],
    )  # fmt: skip
    result = hinged.solve([LineLoad(4, 10, 5)])
    np.testing.assert_allclose(result.reactions[0], [15, 15])
    np.testing.assert_allclose(result.moment([0, 4, 7])[0], [-60, 0, 22.5])
    tip = 15 * 4**3 / (3 * EI)
    assert result.deflection(4)[0] == pytest.approx(tip)
    assert result.slope(4, "left")[0] == pytest.approx(15 * 4**2 / (2 * EI))
    middle = tip / 2 + 5 * 5 * 6**4 / (384 * 3 * EI)
    assert result.deflection(7)[0] == pytest.approx(middle)


def test_a_vertical_spring_gives_by_its_load() -> None:
    """A beam on a rigid support and a spring: statics give the load, the spring the sinking."""
    one = Beam([Support("A", 0), Support("B", 6, "spring", kv=5e5)], 6, EI)
    result = one.solve([PointLoad(3, 2e4)])
    np.testing.assert_allclose(result.reactions[0], [1e4, 1e4])
    assert result.deflection(6)[0] == pytest.approx(1e4 / 5e5)
    assert result.deflection(3)[0] == pytest.approx(2e4 * 6**3 / (48 * EI) + 0.5 * 1e4 / 5e5)


def test_a_turning_spring_lies_between_pinned_and_fixed() -> None:
    """End moment of a span with equal turning springs: wL^2/12 / (1 + 2EI/(kr L))."""
    kr, w, long = 3e6, 1e4, 6.0
    ends = [Support(n, x, "spring", kr=kr) for n, x in (("A", 0.0), ("B", long))]
    result = Beam(ends, long, EI).solve([LineLoad(0, long, w)])
    expected = w * long**2 / 12 / (1 + 2 * EI / (kr * long))
    np.testing.assert_allclose(result.moment([0, long])[0], -expected, rtol=EXACT)
    np.testing.assert_allclose(result.reaction_moments[0], [-expected, expected], rtol=EXACT)


def test_a_stepped_cantilever_follows_the_unit_load_theorem() -> None:
    """Tip deflection P(a^3/EI_2 + (L^3 - a^3)/EI_1)/3, a the length of the outer part."""
    one = Beam([Support("A", 0, "fixed")], 5, [(0, 3, 4 * EI), (3, 5, EI)])
    result = one.solve([PointLoad(5, 1e4)])
    tip = 1e4 * (2**3 / EI + (5**3 - 2**3) / (4 * EI)) / 3
    assert result.deflection(5)[0] == pytest.approx(tip, rel=EXACT)


def test_a_load_at_a_support_goes_straight_into_it() -> None:
    """Nothing bends under a load that stands on a support."""
    result = beam(0, 5, 10).solve([PointLoad(5, 1e5)])
    np.testing.assert_allclose(result.reactions[0], [0, 1e5, 0])
    assert result.extremes("moment").max[0] == 0
    assert result.residual == 0


def test_a_case_without_loads_gives_zeros() -> None:
    """Three cases, one loaded: the others have no reactions and no moments."""
    result = beam(0, 6).solve([LineLoad(0, 6, 12, case=1)], cases=3)
    np.testing.assert_allclose(result.reactions, [[0, 0], [36, 36], [0, 0]])
    np.testing.assert_array_equal(result.extremes("moment").max, [0, result.moment(3)[1], 0])


def test_spans_are_named_after_their_supports() -> None:
    """Overhangs are spans of their own; supports may be given in any order."""
    one = Beam([Support("B", 8), Support("A", 2)], 10, EI)
    labels = ["overhang left of A", "A-B", "overhang right of B"]
    assert [s.label for s in one.spans] == labels
    assert [s.overhang for s in one.spans] == [True, False, True]
    assert [s.length for s in one.spans] == [2, 6, 2]


def test_places_that_differ_by_rounding_are_one() -> None:
    """Ends, supports and loads a rounding error apart leave no sliver of a span or a piece."""
    one = Beam([Support("A", 1e-12), Support("B", 0.1 + 0.2), Support("C", 0.6)], 0.1 * 6, EI)
    assert [s.label for s in one.spans] == ["A-B", "B-C"]
    result = one.solve([LineLoad(0, 0.3, 10), LineLoad(0.3, 0.6, 10), PointLoad(0.3, 1)])
    assert len(result.pieces("moment").start) == 2
    np.testing.assert_allclose(result.reactions[0], [1.125, 4.75, 1.125])


def test_peaks_by_span_stay_in_their_span() -> None:
    """Two equal spans: the same sagging peak in each, mirrored; the hogging one at the support."""
    result = beam(0, 5, 10).solve([LineLoad(0, 10, 10)])
    found = result.span_extremes("moment")
    np.testing.assert_allclose(found.max, [[17.578125, 17.578125]])
    np.testing.assert_allclose(found.x_max, [[1.875, 8.125]])
    np.testing.assert_allclose(found.min, [[-31.25, -31.25]])
    np.testing.assert_allclose(found.x_min, [[5, 5]])


def test_of_equal_peaks_the_left_one_is_named() -> None:
    """Between two equal point loads the moment is constant: the first place counts."""
    result = beam(0, 9).solve([PointLoad(3, 7), PointLoad(6, 7)])
    assert result.extremes("moment").x_max[0] == pytest.approx(3)


def test_a_parabolic_peak_is_found_between_points() -> None:
    """Under a triangle the moment peaks at L/sqrt 3 with w L^2/(9 sqrt 3) (from memory)."""
    found = beam(0, 6).solve([triangle(6, 10)]).extremes("moment")
    assert found.x_max[0] == pytest.approx(6 / 3**0.5, rel=EXACT)
    assert found.max[0] == pytest.approx(10 * 36 / (9 * 3**0.5), rel=EXACT)


def test_an_envelope_names_place_and_combination() -> None:
    """Of two combinations the heavier governs, at midspan; of reactions at each support."""
    one = beam(0, 6)
    cases = one.solve([LineLoad(0, 6, 10), PointLoad(1, 6, case=1)])
    result = cases.combined([[1.4, 0], [1.2, 1.6]])
    found = result.envelope("moment")
    assert int(found.row_max) == 0
    assert float(found.x_max) == pytest.approx(3)
    assert float(found.max) == pytest.approx(1.4 * 45)
    by_support = result.reaction_envelope()
    np.testing.assert_array_equal(by_support.row_max, [1, 0])
    np.testing.assert_allclose(by_support.max, [36 + 8, 42])


def test_an_envelope_of_ordinates_takes_both_sides_of_a_jump() -> None:
    """At a point load the greatest shear is left of it, the least right of it."""
    result = beam(0, 6).solve([PointLoad(2, 12)])
    found = result.envelope_at("shear", [2.0, 4.0])
    np.testing.assert_allclose(found.max, [8, -4])
    np.testing.assert_allclose(found.min, [-4, -4])


def test_the_pieces_are_the_polynomials_of_the_diagrams() -> None:
    """Coefficients for every row and piece; their sum is the value at the right end of a piece."""
    result = beam(0, 6).solve([triangle(6, 10), PointLoad(2, 3, case=1)])
    for quantity, degree in (("shear", 2), ("moment", 3), ("slope", 4), ("deflection", 5)):
        pieces = result.pieces(quantity)
        assert pieces.coefficients.shape == (2, 2, degree + 1)
        ends = pieces.start + pieces.length
        sums = pieces.coefficients.sum(axis=-1)
        np.testing.assert_allclose(sums, result.at(quantity, ends, "left"), rtol=1e-12, atol=1e-15)


def test_totals_of_loads_are_their_resultants() -> None:
    """A trapezoid, a point load and a moment: total and moment about the left end."""
    loads = [LineLoad(1, 4, 2, 6), PointLoad(5, 10, case=1), MomentLoad(2, 7, case=1)]
    down, moment = load_totals(loads)
    np.testing.assert_allclose(down, [12, 10])
    np.testing.assert_allclose(moment, [2 * 3 * 2.5 + 4 * 3 / 2 * 3, 57])


def test_very_unequal_stiffness_is_solved_or_refused() -> None:
    """A stiff half, 1e6 times as stiff, does not bend: the soft half is a propped cantilever."""
    one = Beam([Support("A", 0, "fixed"), Support("B", 8)], 8, [(0, 4, 1e6 * EI), (4, 8, EI)])
    result = one.solve([PointLoad(6, 1e4)])
    cantilever = Beam([Support("A", 0, "fixed"), Support("B", 4)], 4, EI)
    expected = cantilever.solve([PointLoad(2, 1e4)])
    np.testing.assert_allclose(result.reactions[0, 1], expected.reactions[0, 1], rtol=1e-5)
    with pytest.raises(StaticsError, match="rounding"):
        Beam([Support("A", 0, "fixed")], 8, [(0, 4, 1e14), (4, 8, 1)])
