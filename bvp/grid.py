"""Grids: a uniform one, or the image of a uniform one under a smooth map, each with one ghost node past either end.

A grid lives on the reference interval [0, 1]; the ends of the domain, which may be formulas of parameters, are
applied by whoever needs physical coordinates. Halving the step leaves the map alone, so that the error of a
scheme stays a series in the step.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.errors import InputError

Array = npt.NDArray[np.float64]
Map = Callable[[Array], Array]

FEWEST_INTERVALS = 2
MOST_INTERVALS = 50_000_000  # 50 million nodes take about 6 GB while they are solved


@dataclass(frozen=True)
class Grid:
    """N intervals on [0, 1]; node k sits at array index k + 1, index 0 and N + 2 are the ghosts.

    nodes : shape (N + 3,), faces : shape (N + 2,), face i between nodes i and i + 1 (at step k + 1/2, not at the mean).
    """

    intervals: int
    map: Map | None = None

    def __post_init__(self) -> None:
        check_intervals(self.intervals)

    @property
    def uniform(self) -> bool:
        """Whether all steps are equal."""
        return self.map is None

    @cached_property
    def nodes(self) -> Array:
        """Reference coordinates of the nodes, ghosts included, shape (N + 3,)."""
        return self._placed(np.arange(-1, self.intervals + 2, dtype=float))

    @cached_property
    def faces(self) -> Array:
        """Reference coordinates of the faces, shape (N + 2,)."""
        return self._placed(np.arange(-1, self.intervals + 1) + 0.5)

    def _placed(self, steps: npt.NDArray[np.floating[Any]]) -> Array:
        if self.map is None:
            return steps / self.intervals
        placed = np.asarray(self.map(steps / self.intervals), dtype=float)
        placed[steps == 0] = 0.0
        placed[steps == self.intervals] = 1.0
        inside = placed[(steps >= 0) & (steps <= self.intervals)]
        if not np.all(np.isfinite(inside)) or not np.all(np.diff(inside) > 0) or inside[0] < 0 or inside[-1] > 1:
            raise InputError(
                "the grid's map does not increase from 0 to 1.\n"
                "Expected: a smooth increasing function of s with the value 0 at s = 0 and 1 at s = 1, such as s^2 or sinh(3*s)/sinh(3)."
            )
        # A map like s^2 folds back past an end: the ghost is then mirrored, which costs the evenness of the series, not the solution.
        if not placed[0] < 0.0:
            placed[0] = -placed[np.flatnonzero(steps == -steps[0])[0]]
        if not placed[-1] > 1.0:
            placed[-1] = 2.0 - placed[np.flatnonzero(steps == 2 * self.intervals - steps[-1])[0]]
        return placed

    def refined(self, intervals: int) -> Grid:
        """The grid of another step under the same map."""
        return Grid(intervals, self.map)


def check_intervals(intervals: object) -> None:
    """InputError unless this is a number of intervals that a grid can have."""
    if isinstance(intervals, bool) or not isinstance(intervals, (int, np.integer)):
        raise InputError(
            f"intervals = {intervals!r} is not a whole number.\nExpected: how many intervals the domain is cut into, such as 200."
        )
    if not FEWEST_INTERVALS <= intervals <= MOST_INTERVALS:
        raise InputError(
            f"intervals = {intervals} is outside {FEWEST_INTERVALS} to {MOST_INTERVALS}.\n"
            "Expected: how many intervals the domain is cut into; 200 is a good start, since values are extrapolated from several grids."
        )
