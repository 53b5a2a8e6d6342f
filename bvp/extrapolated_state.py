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

COLUMNS = 3  # halvings of the step, from N/8 to N
SETTLED = 0.35  # how near to a whole number the exponent of the largest differences has to be


def extrapolated(system: DiscreteSystem, found: Corrected) -> tuple[Array, float]:
    """The profile at the nodes of the system's grid, no ghosts, and an estimate of its largest error.

    The estimate is twice what the last column used has added; where no exponent settles nothing is added, and it is the
    difference of the two finest grids.
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
        exponent = math.log2(sizes[1] / sizes[0]) if sizes[0] > 0.0 and sizes[1] > 0.0 else 0.0
        order = round(exponent)
        if not (order > last and abs(exponent - order) <= SETTLED):
            break
        added = [one / (2.0**order - 1.0) for one in differences]
        ratio = (added[0].size - 1) / (finest.size - 1)
        total += resampled(added[0], ratio * np.arange(finest.size, dtype=np.float64), even)
        error, last = 2.0 * float(np.max(np.abs(added[0]))), order
        column = [fine[::2] + one for fine, one in zip(column, added, strict=False)]
    if not np.isfinite(error):
        error = float(np.max(np.abs(profiles[0][::2] - profiles[1]))) if len(profiles) > 1 else math.nan
    return total, error
