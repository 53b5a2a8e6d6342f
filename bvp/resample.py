"""A profile carried from one grid to another under the same map, or to another map, by polynomials of degree five."""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]

POINTS = 6
MOST_REMEMBERED = 2000  # intervals of grids whose weights are kept


def resampled(values: Array, positions: Array, even: bool = False) -> Array:
    """The interpolant of nodal values (no ghosts) at positions counted in nodes, also a little past the ends.

    even : the profile is continued evenly past its left end (an axis).
    """
    return _combined(values, even, *_weights(values.size, positions, even))


def carried(nodal: Array, intervals: int, even: bool = False) -> Array:
    """Nodal values with ghosts, shape (N + 3,), on a grid of `intervals` under the same map, shape (intervals + 3,)."""
    old = nodal.size - 3
    if old == intervals:
        return nodal.copy()
    weights = _remembered if max(old, intervals) <= MOST_REMEMBERED else _between
    return _combined(nodal[1:-1], even, *weights(old, intervals, even))


def _between(old: int, intervals: int, even: bool) -> tuple[npt.NDArray[np.int64], Array]:
    return _weights(old + 1, np.arange(-1, intervals + 2) * (old / intervals), even)


_remembered = lru_cache(maxsize=64)(_between)  # a branch's grids are the same for each of its turning points


def _weights(count: int, positions: npt.NDArray[Any], even: bool) -> tuple[npt.NDArray[np.int64], Array]:
    """The first node of each position's polynomial, and the weights of its nodes, shape (points, positions)."""
    reach = POINTS // 2 if even and count > POINTS // 2 else 0
    held = count + reach
    points = min(POINTS, held)
    first = np.clip(np.floor(positions).astype(np.int64) + reach - (points // 2 - 1), 0, held - points)
    t = positions + reach - first
    weights = np.ones((points, positions.size))
    for node in range(points):
        for other in range(points):
            if other != node:
                weights[node] *= (t - other) / (node - other)
    return first, weights


def _combined(values: Array, even: bool, first: npt.NDArray[np.int64], weights: Array) -> Array:
    reach = POINTS // 2
    held = np.concatenate([values[reach:0:-1], values]) if even and values.size > reach else values
    total = weights[0] * held[first]
    for node in range(1, len(weights)):
        total += weights[node] * held[first + node]
    return total
