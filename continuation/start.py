"""The first state of a branch, and the sizes by which its first steps are measured."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.discrete_system import DiscreteSystem
from bvp.newton import Corrected, Scales
from bvp.one_state import solved
from continuation.path import Path, Point

Array = npt.NDArray[np.float64]

MOST_TRIALS = 60
MOST_LEVELS = 12
FARTHEST = 1e50  # where no change of the tangent is seen, the end of looking for it
BENT = 0.1  # relative change of the tangent that is looked for: a parameter that moves so far shows its own size


def first_state(system: DiscreteSystem, parameter: float, guess: Array | None) -> Corrected:
    """The state at the parameter's start by damped Newton from a guess (the problem's own where None).

    Where no guess was given and zero leads nowhere, as with temperatures in kelvin, the line through what the conditions
    say of the ends is tried too, looked for from zero, from the sizes of the parameters and from inside measured tables.
    """
    found = solved(system, system.guess(parameter) if guess is None else guess, parameter, insist=True)
    if found.ok or guess is not None or system.of.unknown in system.of.problem.initial_guess:
        return found
    for level in levels(system):
        line = between_ends(system, parameter, level)
        again = solved(system, line, parameter, insist=True) if line is not None else None
        if again is not None and again.ok:
            return again
    return found


def levels(system: DiscreteSystem) -> list[float]:
    """Constants from which the conditions are solved, each once: zero, middles of measured tables, values of parameters."""
    tables = [float(function.knots[[0, -1]].mean()) for function in system.of.problem.functions.values() if hasattr(function, "knots")]
    return list(dict.fromkeys([0.0, *tables, *system.values.values()]))[:MOST_LEVELS]


def between_ends(system: DiscreteSystem, parameter: float, level: float) -> Array | None:
    """The line between the constants that satisfy the conditions at the ends; an end that says nothing takes the other's."""
    ends = [end for row in (0, -1) if (end := _constant_at(system, parameter, row, level)) is not None]
    return ends[0] + (ends[-1] - ends[0]) * system.grid.nodes if ends else None


def _constant_at(system: DiscreteSystem, parameter: float, row: int, level: float) -> float | None:
    """The constant that satisfies the condition of a row, by Newton's method; None where it is not met by one, or by all."""
    for _ in range(MOST_TRIALS):
        rows = system.stored_rows(np.full(system.size, level), parameter)
        slope = float(rows[1:4, row].sum())
        move = -float(rows[0, row]) / slope if slope else np.nan
        if not np.isfinite(move) or abs(slope) <= 1e-9 * float(np.abs(rows[1:4, row]).sum()):  # u' = 0 holds for every constant
            return None
        level += move
        if abs(move) <= 1e-12 * abs(level):
            return level
    return None


def first_point(system: DiscreteSystem, found: Corrected, sign: float) -> tuple[Path, Point]:
    """The path with its first point, its sizes read off the branch itself.

    The first sizes are the change of the parameter over which the tangent of the state turns by a tenth, and the state's
    answer to it: a temperature of 300 that answers by 5 degrees is followed by degrees.
    """
    slope = found.tangent / found.pace if found.pace else found.tangent
    steepness = float(np.sqrt(np.mean(slope[1:-1] ** 2)))
    moves = found.pace != 0.0 and steepness > 0.0
    reach = _reach(system, found, slope, steepness, sign) if moves else abs(found.parameter) or 1.0
    path = Path(system, found.u, found.parameter, Scales(steepness * reach or 1.0, reach))
    path.counted(found)
    return path, path.point(found, 0.0, None, sign)


def _reach(system: DiscreteSystem, found: Corrected, slope: Array, steepness: float, sign: float) -> float:
    """How far the parameter goes until the state's answer to it changes by a tenth; its own value at most, where that is not 0."""
    most = abs(found.parameter) or np.inf
    move = 1.0 if most == np.inf else 0.1 * most
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
            if bent > BENT / 4.0 or move >= min(most, FARTHEST):
                return move
            move = min(move * (100.0 if bent < 1e-12 else min(max(0.8 * BENT / bent, 1.5), 100.0)), most)
        else:
            if best:
                return best
            move *= 0.1 if not np.isfinite(bent) else min(max(0.8 * BENT / bent, 0.1), 0.7)
    return best or move
