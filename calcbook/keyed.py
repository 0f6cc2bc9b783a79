"""Values of one schedule found by the key of another's rows: ``lookup`` and ``sum_for``.

A column is an array over its rows (axis 0), with many cases (rows, cases). Keys are texts.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Array = NDArray[np.float64]


class MissingRowError(ValueError):
    """A key that no row has."""


def texts(keys: object) -> list[str]:
    """Return keys as texts, from a column (rows,) or (rows, 1)."""
    return [str(key) for key in np.asarray(keys, dtype=object).reshape(-1)]


def lookup(column: Array, keys: object, key: str | NDArray[np.str_]) -> float | Array:
    """Return the value of the row whose key is the one given.

    With a key for each of many cases, as an array, the values are an array (cases,), nan where no
    row has the key. Raises MissingRowError where no row has a single key: a value is never made up.
    """
    rows = texts(keys)
    if isinstance(key, np.ndarray):
        return _by_case(np.asarray(column, dtype=float), rows, key)
    if str(key) not in rows:
        raise MissingRowError(f"there is no row '{key}'")
    found = np.asarray(column, dtype=float)[rows.index(str(key))]
    return float(found) if found.ndim == 0 else found


def _by_case(values: Array, rows: list[str], keys: NDArray[np.str_]) -> Array:
    """Return for each case the value of the row its key names, from (rows, 1) or (rows, cases)."""
    if not rows:
        return np.full(len(keys), math.nan)
    place = {key: row for row, key in reversed(list(enumerate(rows)))}
    wide = values.reshape(len(rows), -1)
    cases = max(len(keys), wide.shape[1])
    found = np.array([place.get(str(key), -1) for key in np.broadcast_to(keys, cases)])
    wide = np.broadcast_to(wide, (len(rows), cases))
    return np.where(found < 0, math.nan, wide[found, np.arange(cases)])


def lookup_rows(column: Array, keys: object, wanted: object) -> Array:
    """Return, for each key wanted, the value of its row; nan where no row has it."""
    place = {key: row for row, key in reversed(list(enumerate(texts(keys))))}
    values = np.asarray(column, dtype=float)
    rows = np.array([place.get(key, -1) for key in texts(wanted)], dtype=int)
    if not len(values):
        return np.full((len(rows), *values.shape[1:]), math.nan)
    if np.array_equal(rows, np.arange(len(values))):
        return values  # the same rows in the same order
    found: Array = values[rows]
    found[rows < 0] = math.nan
    return found


def sum_for(column: Array, keys: object, key: str) -> float | Array:
    """Return the sum over the rows whose key is the one given, in the order of the rows."""
    values = np.asarray(column, dtype=float)
    own = values[[k == str(key) for k in texts(keys)]]
    total = np.cumsum(own, axis=0)[-1] if len(own) else np.zeros(values.shape[1:])
    return float(total) if total.ndim == 0 else total


def sum_for_rows(column: Array, keys: object, wanted: object) -> Array:
    """Return, for each key wanted, the sum over the rows that have it; 0 where none has."""
    return np.array([sum_for(column, keys, key) for key in texts(wanted)])
