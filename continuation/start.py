"""The first state of a branch, and the sizes by which its first steps are measured."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.discretize import DiscreteSystem
from bvp.newton import Corrected
from bvp.one_state import solved
from continuation.path import Path, Point

Array = npt.NDArray[np.float64]

MOST_TRIALS = 60
BENT = 0.1  # relative change of the tangent that is looked for: a parameter that moves so far shows its own size


def first_state(system: DiscreteSystem, parameter: float, guess: Array | None) -> Corrected:
    """The state at the parameter's start by damped Newton from a guess (the problem's own where None)."""
    return solved(system, system.guess(parameter) if guess is None else guess, parameter)


def first_point(system: DiscreteSystem, found: Corrected, sign: float) -> tuple[Path, Point]:
    """The path with its first point, its sizes read off the branch itself.

    Where the start is at 0 nothing there says what a large parameter is: the change of the parameter over which the
    tangent of the state turns by a tenth does.
    """
    size = float(np.sqrt(np.mean(found.u[1:-1] ** 2)))
    slope = found.tangent / found.pace if found.pace else found.tangent
    steepness = float(np.sqrt(np.mean(slope[1:-1] ** 2)))
    reach = abs(found.parameter)
    if reach == 0.0 and found.pace and steepness > 0.0:
        reach = _reach(system, found, slope, steepness, sign)
    reach = reach or 1.0
    path = Path(system, 0.0 if size > 0.0 else steepness * reach or 1.0, 0.0 if found.parameter else reach)
    path.counted(found)
    return path, path.point(found, 0.0, None, sign)


def _reach(system: DiscreteSystem, found: Corrected, slope: Array, steepness: float, sign: float) -> float:
    """How far the parameter goes from 0 until the state's answer to it changes by a tenth."""
    move = 1.0
    best = 0.0
    for _ in range(MOST_TRIALS):
        parameter = found.parameter + sign * move
        tried = solved(system, found.u + sign * move * slope, parameter)
        bent = np.inf
        if tried.ok and tried.pace:
            other = tried.tangent / tried.pace
            bent = float(np.sqrt(np.mean((other - slope)[1:-1] ** 2))) / steepness
        if bent <= BENT:
            best = move
            if bent > BENT / 4.0 or move > 1e12:
                return move
            if bent < 1e-12:
                move *= 100.0
            else:
                move *= min(max(0.8 * BENT / bent, 1.5), 100.0)
        else:
            if best:
                return best
            move *= 0.1 if not np.isfinite(bent) else min(max(0.8 * BENT / bent, 0.1), 0.7)
    return best or move
