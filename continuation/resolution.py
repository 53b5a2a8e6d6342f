"""Whether a grid still resolves a state: cheap to suspect, and decided on a grid of half the step."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.errors import InputError
from bvp.resample import carried
from continuation.path import Path, Point

Array = npt.NDArray[np.float64]

MOST_CHANGE = 0.15  # of the state's range or the parameter's value, between the two grids


def resolves(path: Path, point: Point) -> bool:
    """Whether the branch of a grid with half the step passes near a point of this one."""
    system = path.system
    intervals = 2 * system.grid.intervals
    even = system.of.problem.axis
    u, tangent = carried(point.u, intervals, even), carried(point.tangent, intervals, even)
    try:
        finer = Path(system.of.on(system.grid.refined(intervals), system.values), u, point.parameter, point.scales)
    except InputError:  # steps below the rounding of the coordinate
        return False
    found = finer.step_from(Point(u, point.parameter, tangent, point.pace, 0.0, point.scales, point.found), 0.0)
    if not found.ok:
        return False
    change = float(np.max(np.abs(found.u - u)[1:-1]))
    near = abs(found.parameter - point.parameter) <= MOST_CHANGE * max(abs(point.parameter), abs(found.parameter))
    return near and change <= MOST_CHANGE * float(np.ptp(u[1:-1]))
