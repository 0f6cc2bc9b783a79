"""Live load span by span: arrangements, envelopes, and which spans govern."""

from __future__ import annotations

import math

import numpy as np
import pytest
from beam_strategies import beams
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.errors import StaticsError
from calcbook.statics.beam import Beam, Support
from calcbook.statics.beam_diagrams import QUANTITIES
from calcbook.statics.beam_loads import LineLoad, Load, MomentLoad, PointLoad, split_by_span
from calcbook.statics.patterns import arrangements, solve_patterned

EI = 1e7


def continuous(spans: int, long: float = 6.0, overhang: float = 0.0) -> Beam:
    """Return a beam of equal spans on supports A, B, C..., with an overhang on the right."""
    supports = [Support(chr(ord("A") + i), long * i) for i in range(spans + 1)]
    return Beam(supports, long * spans + overhang, EI)


def test_every_arrangement_of_few_spans_is_tried_once() -> None:
    """Of three spans there are eight, all spans first and none last."""
    found = arrangements(3)
    assert len({tuple(row) for row in found.tolist()}) == 8
    assert found[0].all()
    assert not found[-1].any()


@pytest.mark.parametrize(("spans", "count"), [(8, 256), (9, 1 + 2 + 8 + 1)])
def test_beyond_eight_spans_the_standard_arrangements_are_tried(spans: int, count: int) -> None:
    """Eight spans have 256; nine have all, both alternations, each adjacent pair, and none."""
    found = arrangements(spans)
    assert found.shape == (count, spans)
    if spans == 9:
        assert found[1].tolist() == [i % 2 == 0 for i in range(9)]
        assert sorted(set(found[3:-1].sum(axis=1).tolist())) == [2]


def test_the_known_arrangements_govern() -> None:
    """Three equal spans: coefficients 0.101 end, 0.075 middle, 0.117 support (handbooks, memory).

    The end span is worst with both end spans loaded, the middle one with itself alone, the
    support with the two spans beside it.
    """
    beam = continuous(3, 1.0)
    found = solve_patterned(beam, [LineLoad(0, 3, 1.0)], [[1.0]], (0,))
    by_span = found.result.span_envelope("moment")
    np.testing.assert_allclose(by_span.max, [0.1013, 0.075, 0.1013], atol=5e-5)
    np.testing.assert_allclose(by_span.min, [-0.1167, -0.1167, -0.1167], atol=5e-5)
    assert found.source(int(by_span.row_max[0])) == (0, ("A-B", "C-D"))
    assert found.source(int(by_span.row_max[1])) == (0, ("B-C",))
    assert found.source(int(by_span.row_min[0])) == (0, ("A-B", "B-C"))
    assert found.exact


def test_an_overhang_is_a_span_of_its_own() -> None:
    """Sagging is worst without load on the overhang; uplift at A with that alone."""
    beam = continuous(1, 6.0, overhang=2.0)
    found = solve_patterned(beam, [LineLoad(0, 8, 10.0)], [[1.0]], (0,))
    sagging = found.result.envelope("moment")
    assert float(sagging.max) == pytest.approx(45)
    assert found.source(int(sagging.row_max)) == (0, ("A-B",))
    uplift = found.result.reaction_envelope()
    assert float(uplift.min[0]) == pytest.approx(-10 * 2 * 1 / 6)
    assert found.source(int(uplift.row_min[0])) == (0, ("overhang right of B",))


def test_steady_cases_are_not_patterned() -> None:
    """A combination without live load is one row; with it, one row for each arrangement."""
    beam = continuous(2)
    loads: list[Load] = [LineLoad(0, 12, 10.0), LineLoad(0, 12, 4.0, case=1)]
    found = solve_patterned(beam, loads, [[1.4, 0.0], [1.2, 1.6]], (1,))
    assert found.combination.tolist() == [0, 1, 1, 1, 1]
    assert found.loaded.tolist() == [
        [False, False], [True, True], [True, False], [False, True], [False, False],
    ]  # fmt: skip
    np.testing.assert_allclose(found.cases.reactions, beam.solve(loads).reactions)
    full = beam.solve(loads).combined([[1.2, 1.6]])
    np.testing.assert_allclose(found.result.reactions[1], full.reactions[0])


def test_only_spans_that_carry_the_load_are_varied() -> None:
    """Ten spans, two of them loaded: four arrangements, and none is left out."""
    found = solve_patterned(continuous(10), [LineLoad(3, 12, 5.0)], [[1.0]], (0,))
    assert len(found.loaded) == 4
    assert found.exact


def test_many_loaded_spans_say_that_they_are_not_exact() -> None:
    """Nine loaded spans are tried in the standard arrangements only."""
    found = solve_patterned(continuous(9), [LineLoad(0, 54, 5.0)], [[1.0]], (0,))
    assert not found.exact
    assert len(found.loaded) == 12


def test_loads_are_cut_at_the_supports() -> None:
    """A trapezoid keeps its line; what acts at a support belongs to the span that begins there."""
    beam = continuous(2, 6.0, overhang=1.0)
    loads: list[Load] = [LineLoad(3, 9, 0.0, 6.0), PointLoad(6, 5.0), MomentLoad(13, 2.0)]
    parts = split_by_span(beam, loads)
    assert parts[0] == (LineLoad(3, 6, 0.0, 3.0),)
    assert parts[1] == (LineLoad(6, 9, 3.0, 6.0), PointLoad(6, 5.0))
    assert parts[2] == (MomentLoad(13, 2.0),)


def test_cases_and_factors_are_checked() -> None:
    """A patterned case that is not there, and factors for other cases, are refused."""
    beam, loads = continuous(2), [LineLoad(0, 12, 1.0)]
    with pytest.raises(StaticsError, match="patterned"):
        solve_patterned(beam, loads, [[1.0]], (1,))
    with pytest.raises(StaticsError, match="factors"):
        solve_patterned(beam, loads, [[1.0, 2.0]], (0,))
    with pytest.raises(StaticsError, match="no number"):
        solve_patterned(beam, loads, [[math.nan]], (0,))


@settings(max_examples=40, deadline=None)
@given(st.data())
def test_patterned_load_is_never_kinder_than_load_everywhere(data: st.DataObject) -> None:
    """The envelope over arrangements contains the beam with all spans loaded, and with none."""
    beam = data.draw(beams())
    w = data.draw(st.sampled_from([1e3, 12e3]))
    loads: list[Load] = [LineLoad(0, beam.length, 2e3), LineLoad(0, beam.length, w, case=1)]
    found = solve_patterned(beam, loads, [[1.2, 1.6]], (1,))
    full = found.cases.combined([[1.2, 1.6], [1.2, 0.0]])
    for quantity in QUANTITIES:
        whole, part = found.result.span_envelope(quantity), full.span_envelope(quantity)
        slack = 1e-9 * np.abs([part.max, part.min]).max()
        assert (whole.max >= part.max - slack).all()
        assert (whole.min <= part.min + slack).all()


@settings(max_examples=30, deadline=None)
@given(st.data())
def test_the_worst_at_a_place_is_the_sum_of_what_makes_it_worse(data: st.DataObject) -> None:
    """At any place the bound is that of each span's share taken when it is unfavourable."""
    beam = data.draw(beams())
    live = [LineLoad(0, beam.length, 5e3), PointLoad(0.61 * beam.length, 2e4)]
    found = solve_patterned(beam, live, [[1.0]], (0,))
    x = np.linspace(0.007, 0.991, 13) * beam.length
    shares = [beam.solve(part, cases=1).moment(x)[0] for part in split_by_span(beam, live)]
    worst = np.maximum(shares, 0.0).sum(axis=0)
    at = found.result.envelope_at("moment", x)
    np.testing.assert_allclose(at.max, worst, rtol=1e-9, atol=1e-9 * np.abs(shares).max())
