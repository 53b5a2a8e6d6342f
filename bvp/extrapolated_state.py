"""A state's profile extrapolated from grids of halved steps under one map: more digits from the same finest grid.

Each grid's values are a series in the step, node by node. What a column of the table adds is known on the nodes of its
coarser grid; it is smooth and small, and is carried to the nodes of the finest by polynomials.
"""

from __future__ import annotations

import itertools
import math

import numpy as np
import numpy.typing as npt

from bvp.discrete_system import DiscreteSystem
from bvp.newton import Corrected
from bvp.one_state import solved
from bvp.resample import carried, resampled

Array = npt.NDArray[np.float64]

ROUNDING = 1e-13  # of the profile, below which nothing is said
COLUMNS = 3  # halvings of the step, from N/8 to N
SETTLED = (0.3, 0.6)  # how near to a whole number the exponents of the largest differences have to be, from the finest on
SAFETY = 4.0  # times what the last column has added


def extrapolated(system: DiscreteSystem, found: Corrected) -> tuple[Array, float | None]:
    """The profile at the nodes of the system's grid, no ghosts, and an estimate of its largest error.

    The estimate is four times what the last column used has added. Where no exponent settles nothing is added and there is no
    estimate, None: the grids are then too coarse to say how far off they are.
    """
    even = system.of.problem.axis
    intervals = system.grid.intervals
    profiles = [found.u[1:-1]]
    u = found.u
    for _ in range(COLUMNS):
        if intervals % 2 or intervals < 16:
            break
        intervals //= 2
        coarse = solved(system.of.on(system.grid.refined(intervals), system.values), carried(u, intervals, even), found.parameter)
        if not coarse.ok:
            break
        u = coarse.u
        profiles.append(u[1:-1])
    finest = profiles[0]
    total, column, error = finest.copy(), profiles, np.inf
    last = 0
    while len(column) >= 3:
        differences = [fine[::2] - coarse for fine, coarse in itertools.pairwise(column)]
        sizes = [float(np.max(np.abs(one))) for one in differences]
        if not all(sizes):
            break
        exponents = [math.log2(coarse / fine) for fine, coarse in itertools.pairwise(sizes)]
        order = round(exponents[0])
        if not (order > last and all(abs(exponent - order) <= bound for exponent, bound in zip(exponents, SETTLED, strict=False))):
            break
        added = [one / (2.0**order - 1.0) for one in differences]
        ratio = (added[0].size - 1) / (finest.size - 1)
        total += resampled(added[0], ratio * np.arange(finest.size, dtype=np.float64), even)
        error, last = SAFETY * float(np.max(np.abs(added[0]))), order
        column = [fine[::2] + one for fine, one in zip(column, added, strict=False)]
    return (total, max(error, ROUNDING * float(np.max(np.abs(total))))) if np.isfinite(error) else (total, None)
