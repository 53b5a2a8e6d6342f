"""Grids whose nodes follow a state: when to move them, where to, and the state carried over.

A uniform grid is kept as long as it shows the state; so easy problems stay on it, with its speed and its digits.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
import numpy.typing as npt

from bvp.discrete_system import DiscreteSystem
from bvp.discretize import Discretization, discretization
from bvp.errors import InputError
from bvp.grid import Grid
from bvp.monitor import density, is_symmetric, roughness
from bvp.problem import Problem
from bvp.resample import resampled
from bvp.schemes import Scheme, named
from bvp.smooth_map import SmoothMap

Array = npt.NDArray[np.float64]

SMOOTH = 2e-3  # roughness below which a uniform grid is not looked at further: nothing in the state is narrower than some ten steps
SEEN = 0.25  # of the density in one interval that a uniform grid may have
UNEVEN = 2.5  # the largest share over the mean one, from which on a moved grid is moved again
FEWEST = 8  # intervals below which a grid stays as it was asked for
COARSE, FINE = 0.1, 0.05  # mean share of an interval from which on there are more of them, and the one that there is then
LEAST_STEP = 1e-12  # relative to the coordinate: its rounding is then 2e-4 of the step
MOST_GROWTH = 16  # times the intervals asked for
MOST_MOVES = 12  # of a grid for one state: each makes the narrowest spacing up to twenty times narrower


@dataclass(frozen=True)
class Adaptation:
    """How the grids of one problem under one scheme follow its states, and from how many intervals on."""

    plain: Discretization
    intervals: int

    @cached_property
    def moved(self) -> Discretization:
        """The same equations on grids that are not uniform."""
        of = self.plain
        return discretization(of.problem, of.scheme, of.along, uniform=False, compiled=of.compiled)

    def better(self, system: DiscreteSystem, u: Array, parameter: float, rough: float | None = None) -> DiscreteSystem | None:
        """The system on the grid that a state needs, one move away from its own; None where its own will do.

        rough : the state's roughness, where it is known.
        """
        if system.grid.intervals < FEWEST or (system.grid.uniform and (roughness(u) if rough is None else rough) < SMOOTH):
            return None
        shares = self.shares(system, u, parameter)
        largest, mean = float(shares.max()), float(shares.mean())
        if not np.isfinite(largest) or largest <= max(UNEVEN * mean, SEEN if system.grid.uniform else FINE):
            return None
        current = system.grid.map if isinstance(system.grid.map, SmoothMap) else SmoothMap.identity()
        placed = current.redistributed(shares, is_symmetric(shares))
        intervals = system.grid.intervals
        if largest <= UNEVEN * mean and mean > COARSE:
            intervals = min(2 * int(np.ceil(mean * intervals / FINE / 2)), MOST_GROWTH * self.intervals)
        grid = Grid(intervals, placed)
        return self.moved.on(grid, system.values) if is_sound(grid) else None

    def shares(self, system: DiscreteSystem, u: Array, parameter: float) -> Array:
        """The density of a state by the index of its nodes."""
        places = system.places(parameter)
        return density((places - places[0]) / (places[-1] - places[0]), u[1:-1], system.of.problem.axis)


def is_sound(grid: Grid) -> bool:
    """Whether the steps of a grid are well above the rounding of its coordinate."""
    try:
        nodes, _ = grid.nodes, grid.faces
    except InputError:  # steps that are rounded away
        return False
    return bool(np.min(np.diff(nodes) / np.maximum(np.abs(nodes[1:]), np.abs(nodes[:-1]))) > LEAST_STEP)


def adaptation(problem: Problem, scheme: str | Scheme, along: str | None, intervals: int, compiled: bool) -> Adaptation | None:
    """How grids adapt to the states of a problem; None where the scheme keeps a uniform grid."""
    chosen = named(scheme)
    if chosen.needs_uniform_grid(problem):
        return None
    return Adaptation(discretization(problem, chosen, along, uniform=True, compiled=compiled), intervals)


def moved_over(nodal: Array, old: DiscreteSystem, new: DiscreteSystem) -> Array:
    """Nodal values with ghosts on another grid of the same domain."""
    nodes = new.grid.nodes
    places = old.grid.map.inverse(nodes) if isinstance(old.grid.map, SmoothMap) else nodes
    return resampled(nodal[1:-1], places * old.grid.intervals, old.of.problem.axis)
