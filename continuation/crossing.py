"""The states of a branch at one value of its parameter, between two neighbouring points.

They are looked for on the hyperplanes across a tangent of the branch, where nearby turning points do not matter, and
only from close by at the value itself: Newton's method at a fixed parameter would jump from one state to its neighbour.
"""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import numpy.typing as npt

from bvp.dot import dot
from bvp.newton import Corrected, correct, held_parameter
from continuation import turning
from continuation.bracket import Bracket
from continuation.path import CORRECTED, Path, Point, border_through

Array = npt.NDArray[np.float64]
End = tuple[float, Array, float]  # distance along the base's tangent, state, parameter

MOST_SECANTS = 40
CLOSE = 1e-6  # of the way between the two ends, and
CLOSER = 1e-2  # of the way to the nearer one, which may be a turning point: from where Newton's method at the value itself goes the rest


def crossings(path: Path, before: Point, after: Point, value: float) -> list[Corrected]:
    """The states at the value that the step from `before` to `after` passes: none, one, or the two beside a turning point."""
    start, end = (0.0, before.u, before.parameter), (distance_of(before, after), after.u, after.parameter)
    stations = [start, end]
    if before.pace * after.pace < 0.0:
        located = turning.between(path, before, after)
        if located is not None:
            stations.insert(1, (located.distance, located.u, located.parameter))
    found = []
    for left, right in pairwise(stations):
        if (left[2] - value) * (right[2] - value) < 0.0:
            here = _closed_in(path, before, left, right, value)
            if here is not None:
                found.append(here)
    return found


def distance_of(base: Point, other: Point) -> float:
    """How far another point is along a point's tangent."""
    border = border_through(base, 0.0)
    return border.factor * dot(border.direction, other.u - base.u) + border.corner * (other.parameter - base.parameter)


def _closed_in(path: Path, base: Point, left: End, right: End, value: float) -> Corrected | None:
    bracket = Bracket(left[0], right[0], left[2] - value, right[2] - value, left[1], right[1])
    close = min(CLOSE * abs(left[2] - right[2]), CLOSER * min(abs(left[2] - value), abs(right[2] - value)))
    for _ in range(MOST_SECANTS):
        place = bracket.trial()
        share = bracket.share(place)
        guess = bracket.left_held + share * (bracket.right_held - bracket.left_held)
        gap = bracket.left_value + share * (bracket.right_value - bracket.left_value)
        found = path.step_from(base, place, (guess, value + gap))
        if not found.ok:
            return None
        gap = found.parameter - value
        if abs(gap) <= close or bracket.width <= 1e-12 * abs(left[0] - right[0]):
            held = held_parameter(path.system, value)
            again = path.counted(correct(path.system, found.u, value, held, base.scales, tolerance=CORRECTED))
            return again if again.ok else None
        bracket.take(place, gap, found.u)
    return None
