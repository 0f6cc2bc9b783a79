"""Polynomials of the diagrams: values, derivatives and roots on a piece."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from calcbook.statics.polynomials import candidates, derivative, roots, value


def with_roots(*places: float) -> np.ndarray:
    """Return the coefficients, lowest power first, of the polynomial with these roots."""
    return np.polynomial.polynomial.polyfromroots(places)


def found(c: np.ndarray) -> list[float]:
    """Return the roots of one polynomial, sorted."""
    each = [float(t[0]) for t in roots(c[:, np.newaxis])]
    return sorted(t for t in each if not np.isnan(t))


@pytest.mark.parametrize(
    "places",
    [(0.3,), (0.2, 0.7), (0.2, 1.7), (0.1, 0.5, 0.9), (-0.5, 0.5, 1.5), (0.1, 0.2, 0.6, 0.95),
     (0.4999, 0.5001, 0.7, 2.0), (1e-6, 0.5, 3.0, 4.0), (0.1, 0.2, 0.3, 0.4, 0.5)],
)  # fmt: skip
def test_roots_inside_the_piece_are_found(places: tuple[float, ...]) -> None:
    """Every root between 0 and 1, and none beyond."""
    inside = [p for p in places if 0 < p < 1]
    np.testing.assert_allclose(found(with_roots(*places)), inside, rtol=1e-9, atol=1e-12)


def test_without_a_root_nothing_is_found() -> None:
    """A parabola above the axis, a constant, and a line that is zero throughout."""
    assert found(np.array([1.0, 0.0, 1.0])) == []
    assert found(np.array([2.0])) == []
    assert found(np.array([0.0, 0.0])) == []


def test_degrees_may_differ_from_piece_to_piece() -> None:
    """A quartic, a parabola, a line and a constant at once."""
    c = np.zeros((5, 4))
    c[:, 0] = with_roots(0.25, 0.75, 2, 3)
    c[:3, 1] = with_roots(0.4, 1.4)
    c[:2, 2] = with_roots(0.6)
    c[0, 3] = 1.0
    each = np.sort(np.stack(roots(c)), axis=0)
    np.testing.assert_allclose(each[0], [0.25, 0.4, 0.6, np.nan], rtol=1e-9)
    np.testing.assert_allclose(each[1, 0], 0.75, rtol=1e-9)
    assert np.isnan(each[1:, 1:]).all()


def test_values_and_derivatives_are_those_of_the_polynomial() -> None:
    """1 + 2t + 3t^2 at one half, and its derivative 2 + 6t."""
    c = np.array([1.0, 2.0, 3.0])
    assert float(value(c, 0.5)) == pytest.approx(2.75)
    np.testing.assert_allclose(derivative(c), [2.0, 6.0])


@given(st.lists(st.floats(-10, 10), min_size=1, max_size=6))
def test_candidates_hold_the_peak(coefficients: list[float]) -> None:
    """No value on the piece lies beyond the greatest and least of the candidates."""
    c = np.array(coefficients)[:, np.newaxis]
    _, values = candidates(c)
    everywhere = value(c, np.linspace(0, 1, 501))
    slack = 1e-9 * (1 + np.abs(coefficients).max())
    assert everywhere.max() <= values.max() + slack
    assert everywhere.min() >= values.min() - slack
