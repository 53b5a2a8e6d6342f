"""Following one branch on one grid by pseudo-arclength: points, the norm in which steps are measured, prediction.

A point carries its tangent (Keller 1977, in Applications of Bifurcation Theory, from memory). A change is measured
relative to the state and to the parameter, so that temperatures of 300 and rate constants of 1e12 weigh alike.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from bvp.discrete_system import DiscreteSystem
from bvp.dot import dot
from bvp.newton import Border, Corrected, Scales, correct
from bvp.one_state import unstable_directions

Array = npt.NDArray[np.float64]

# The share of the way travelled below which a relative change of the parameter no longer counts as a distance: a branch
# that dives to a millionth is then followed by its state, and one that crosses zero is not slowed down on its way.
PARAMETER_FLOOR = 0.02
STATE_FLOOR = 1e-3
CORRECTED = 1e-9  # of the state: the last correction at a point of a branch


class Point(NamedTuple):
    """A point of a branch: state with ghosts, parameter, unit tangent (state and parameter), arclength so far."""

    u: Array
    parameter: float
    tangent: Array
    pace: float
    arclength: float
    scales: Scales
    found: Corrected

    def tangent_to(self, other: Point) -> float:
        """The cosine between the tangents of two points, in this point's norm."""
        theirs = norm_of(other.tangent, other.pace, self.scales)  # its own tangent has the length 1 here
        return inner(self.tangent, self.pace, other.tangent, other.pace, self.scales) / theirs


def turned_round(before: Point, after: Point) -> bool | None:
    """Whether the tangent at a point looks as if the branch had been met from its other side; None where that cannot be told.

    Along a branch the sign of dp times that of the determinant of F_u is the same (Cramer's rule on the bordered matrix),
    so that the parameter turns back where the number of unstable directions changes by one. Where it does not, either
    the tangent was taken backwards, as happens over a hairpin, or the step went over a branch point.
    """
    counts = unstable_directions(before.found), unstable_directions(after.found)
    if counts[0] is None or counts[1] is None or before.pace == 0.0 or after.pace == 0.0:
        return None
    return (before.pace * after.pace > 0.0) != ((counts[0] - counts[1]) % 2 == 0)


def inner(u: Array, p: float, v: Array, q: float, scales: Scales) -> float:
    """The inner product of two changes (state, parameter); ghosts do not count."""
    nodes = u.size - 2
    return dot(u[1:-1], v[1:-1]) / nodes / scales.state**2 + p * q / scales.parameter**2


def norm_of(u: Array, p: float, scales: Scales) -> float:
    """The length of a change."""
    return math.sqrt(inner(u, p, u, p, scales))


def border_through(point: Point, distance: float) -> Border:
    """The hyperplane across a point's tangent at a distance along it."""
    nodes = point.u.size - 2
    direction = point.tangent.copy()
    direction[0] = direction[-1] = 0.0
    scales = point.scales
    return Border(direction, 1.0 / nodes / scales.state**2, point.pace / scales.parameter**2, point.u, point.parameter, distance)


class Path:
    """The branch of one discrete system that is being followed, and how far it has come from where it began."""

    def __init__(self, system: DiscreteSystem, u: Array, parameter: float, first: Scales) -> None:
        self.system = system
        self.began = (u, parameter)
        self.travelled = first
        # A branch that begins at nothing has no smaller size than its first answer; one that does not may shrink by decades.
        self.least = Scales(0.0 if np.any(u[1:-1]) else first.state, 0.0 if parameter else first.parameter)
        self.steps = self.sweeps = 0

    def scales_at(self, u: Array, parameter: float) -> Scales:
        """The sizes of state and parameter here: the way from the beginning, or their own values where these are less."""
        nodes = u.size - 2
        away = (u - self.began[0])[1:-1]
        state = max(self.travelled.state, math.sqrt(dot(away, away) / nodes))
        change = max(self.travelled.parameter, abs(parameter - self.began[1]))
        self.travelled = Scales(state, change)
        size = math.sqrt(dot(u[1:-1], u[1:-1]) / nodes)
        return Scales(
            max(min(size, state), STATE_FLOOR * state, self.least.state),
            max(min(abs(parameter), change), PARAMETER_FLOOR * change, self.least.parameter),
        )

    def counted(self, found: Corrected) -> Corrected:
        """Newton's effort added to the account."""
        self.steps += found.steps
        self.sweeps += found.sweeps
        return found

    def point(self, found: Corrected, arclength: float, like: Point | None, sign: float = 1.0) -> Point:
        """The point at a corrected state, its tangent of unit length and turned the way of `like`, or of the parameter's sign."""
        scales = self.scales_at(found.u, found.parameter)
        tangent, pace = found.tangent, found.pace
        length = norm_of(tangent, pace, scales)
        if like is None:
            turned = sign if pace >= 0 else -sign
        else:
            turned = 1.0 if inner(tangent, pace, like.tangent, like.pace, like.scales) >= 0 else -1.0
        factor = turned / length
        return Point(found.u, found.parameter, tangent * factor, pace * factor, arclength, scales, found)

    def step_from(self, point: Point, distance: float, guess: tuple[Array, float] | None = None, tolerance: float = CORRECTED) -> Corrected:
        """The state on the hyperplane at a distance along the point's tangent, corrected from a prediction."""
        u, parameter = guess if guess is not None else predicted(point, distance)
        return self.counted(correct(self.system, u, parameter, border_through(point, distance), point.scales, tolerance=tolerance))


def predicted(point: Point, distance: float) -> tuple[Array, float]:
    """The tangent's prediction; the parameter in its logarithm where it moves by a good part of itself."""
    move = distance * point.pace
    parameter = point.parameter
    if parameter != 0.0 and abs(move) > 0.2 * abs(parameter) and abs(parameter) >= point.scales.parameter:
        parameter *= math.exp(max(-2.0, min(move / parameter, 2.0)))
    else:
        parameter += move
    return point.u + distance * point.tangent, parameter
