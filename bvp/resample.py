"""A profile carried from one grid to another under the same map, or to another map, by polynomials of degree five."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]

POINTS = 6


def resampled(values: Array, positions: Array, even: bool = False) -> Array:
    """The interpolant of nodal values (no ghosts) at positions counted in nodes, also a little past the ends.

    even : the profile is continued evenly past its left end (an axis).
    """
    reach = POINTS // 2
    held = np.concatenate([values[reach:0:-1], values]) if even and values.size > reach else values
    shift = reach if held.size > values.size else 0
    count = held.size
    points = min(POINTS, count)
    first = np.clip(np.floor(positions).astype(np.int64) + shift - (points // 2 - 1), 0, count - points)
    t = positions + shift - first
    total = np.zeros(positions.size)
    for node in range(points):
        weight = np.ones(positions.size)
        for other in range(points):
            if other != node:
                weight *= (t - other) / (node - other)
        total += weight * held[first + node]
    return total


def carried(nodal: Array, intervals: int, even: bool = False) -> Array:
    """Nodal values with ghosts, shape (N + 3,), on a grid of `intervals` under the same map, shape (intervals + 3,)."""
    old = nodal.size - 3
    if old == intervals:
        return nodal.copy()
    positions = np.arange(-1, intervals + 2) * (old / intervals)
    return resampled(nodal[1:-1], positions, even)
