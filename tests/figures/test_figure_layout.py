"""Labels kept apart, and differences of printed numbers."""

from __future__ import annotations

from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from calcbook.figures.layout import difference, every, spread


@settings(max_examples=60, deadline=None)
@given(st.lists(st.floats(-100.0, 100.0), min_size=1, max_size=12), st.floats(0.5, 6.0))
def test_spread_keeps_labels_apart_and_in_order(centres: list[float], size: float) -> None:
    """Neighbours end up at least a label apart, in the order they came."""
    places = spread(sorted(centres), [size] * len(centres))
    assert all(after - before >= size - 1e-9 for before, after in pairwise(places))


def test_spread_leaves_alone_what_has_room() -> None:
    """Labels that do not touch stay where they are."""
    assert spread([0.0, 5.0, 11.0], [4.0] * 3) == [0.0, 5.0, 11.0]


def test_spread_shares_the_move() -> None:
    """Two labels at one place move apart by half a label each."""
    assert spread([3.0, 3.0], [4.0, 4.0]) == [1.0, 5.0]


def test_spread_keeps_within_bounds() -> None:
    """Labels near an edge move inward, their room included."""
    assert spread([0.0, 1.0], [4.0, 4.0], low=0.0, high=20.0) == [2.0, 6.0]
    assert spread([19.0, 20.0], [4.0, 4.0], low=0.0, high=20.0) == [14.0, 18.0]


def test_spread_of_nothing() -> None:
    """No labels, no places."""
    assert spread([], []) == []


@pytest.mark.parametrize(
    ("upper", "lower", "exact"),
    [
        ("15.60", "11.60", "4.00"),
        ("0.3", "0.1", "0.2"),
        ("-3.20", "-6.5", "3.30"),
        ("1.2e3", "200", "1000"),
        ("5 ft 6 in", "0", None),
        ("", "1.0", None),
        ("nan", "1.0", None),
        ("1e900", "1.0", None),
    ],
)
def test_difference_is_exact_or_none(upper: str, lower: str, exact: str | None) -> None:
    """Decimals subtract to the digit; what is no decimal has no difference."""
    assert difference(upper, lower) == exact


def test_every_step_fits_the_room() -> None:
    """Labels are thinned by the least whole step that fits."""
    assert [every(count, 10) for count in (1, 10, 11, 20, 21)] == [1, 1, 2, 2, 3]
