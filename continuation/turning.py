"""The turning point of a discrete branch: where the parameter has an extremum along it.

Along the hyperplanes across a fixed tangent the parameter is a smooth function of the distance, whose derivative comes
out of every bordered solve. Its zero is found by secants to the rounding of the solves; the tangent there is the null
vector, and the parameter's error is of second order in what is left of the derivative.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from bvp.discrete_system import DiscreteSystem
from bvp.dot import dot
from bvp.newton import Corrected, Scales, correct
from continuation.bracket import Bracket
from continuation.path import Path, Point, border_through, norm_of

Array = npt.NDArray[np.float64]

MOST_SECANTS = 40
MOST_DISTANCE = 2.0
TOO_FAR = "the turning point is too far from that of the neighbouring grid"
FIRST_STEP, NARROW = 1e-3, 1e-13  # of halving: the first step to either side, and the width that is small enough
POLISHED = 1e-12  # of the state: the last correction of the states on the way
APART = 7e-4  # distance of the places whose values tell where the extremum is: its fourth power is near the rounding over itself
PROBE, NARROWEST = 1e-4, 1e-6  # distances over which a slope of the derivative is measured
WITHIN, MOST_NARROWER = 1e-6, 4  # the square of that distance over the size of the hairpin, where places are near enough
LEVEL = 1e-11  # what is left of the derivative, as a share of the curvature times the state


@dataclass(frozen=True)
class DiscreteTurning:
    """A turning point of a discrete system: state, parameter, unit null vector, the parameter's curvature along it."""

    u: Array
    parameter: float
    null: Array
    curvature: float
    scales: Scales
    found: Corrected
    distance: float = 0.0  # along the tangent of the point that it was looked for from

    @property
    def states(self) -> str:
        """On which side of it, in the parameter, the two states are."""
        return "below" if self.curvature < 0 else "above"


def between(path: Path, before: Point, after: Point) -> DiscreteTurning | None:
    """The turning point between two points of a branch whose paces differ in sign; None where it cannot be closed in on."""
    border = border_through(before, 0.0)
    far = border.factor * dot(border.direction, after.u - before.u) + border.corner * (after.parameter - before.parameter)
    pace_after = _pace_across(after, before)
    if not before.pace * pace_after < 0:
        return None
    ends = (before.u, before.parameter), (after.u, after.parameter)
    bracket = Bracket(0.0, far, before.pace, pace_after, *ends)
    found: Corrected | None = None
    slope = 0.0
    for _ in range(MOST_SECANTS):
        distance = bracket.trial()
        share, (u, parameter), (other, next_parameter) = bracket.share(distance), bracket.left_held, bracket.right_held
        found = path.step_from(before, distance, (u + share * (other - u), parameter + share * (next_parameter - parameter)), POLISHED)
        if not found.ok:
            return None
        if slope == 0.0 or bracket.width > NARROWEST * abs(far):  # of two places next to each other it would be rounding alone
            slope = bracket.slope
        small = abs(found.pace) * abs(far) <= 1e-15 * before.scales.parameter and abs(found.pace / slope) < 1e-8
        if small or abs(found.pace) <= LEVEL * abs(slope) or bracket.width <= 1e-13 * abs(far):
            break
        bracket.take(distance, found.pace, (found.u, found.parameter))
    return None if found is None else _turning(found, before.scales, slope, distance)


def _pace_across(point: Point, base: Point) -> float:
    """dp by the distance along the base's tangent, at another point of the branch."""
    border = border_through(base, 0.0)
    across = border.factor * dot(border.direction, point.tangent) + border.corner * point.pace
    return point.pace / across


def _turning(found: Corrected, scales: Scales, curvature: float, distance: float) -> DiscreteTurning:
    length = norm_of(found.tangent, 0.0, scales)
    return DiscreteTurning(found.u, found.parameter, found.tangent / length, curvature / length**2, scales, found, distance)


def near(system: DiscreteSystem, u: Array, parameter: float, null: Array, curvature: float, scales: Scales) -> DiscreteTurning | str:
    """The turning point of another grid near a known one: its state, null vector and curvature carried over.

    Returns a sentence where Newton's method or the secants do not end.
    """
    path = Path(system, u, parameter, scales)
    direction = null / norm_of(null, 0.0, scales)
    base = Point(u, parameter, direction, 0.0, 0.0, scales, None)  # type: ignore[arg-type]
    if system.of.problem.corners == "unknown":
        return _by_halving(path, base, curvature)
    guess = (u, parameter)
    distance, slope = 0.0, curvature
    last: tuple[float, float] | None = None
    smallest = np.inf
    fresh = False
    for _ in range(MOST_SECANTS):
        found = path.counted(correct(system, guess[0], guess[1], border_through(base, distance), scales, tolerance=POLISHED, most_steps=20))
        if not found.ok:
            return found.reason
        if last is not None and distance != last[0]:
            measured = (found.pace - last[1]) / (distance - last[0])
            slope = measured if math.isfinite(measured) and measured != 0.0 and abs(distance - last[0]) > 1e-7 else slope
        move = -found.pace / slope
        if last is None and abs(move) <= 1e-7:
            move = math.copysign(PROBE, move)  # the slope is another grid's so far, and nothing has shown that it is right
        if abs(move) <= LEVEL or (abs(move) <= 1e-7 and abs(move) >= smallest):
            if found.last > LEVEL and not fresh:  # the pace is that of the state before Newton's last correction
                fresh, guess = True, (found.u, found.parameter)
                continue
            # What is left of the way does not count in the parameter, but does in the state, whose measures it would blur.
            return _turning(found._replace(u=found.u + move * found.tangent), scales, slope, distance + move)
        smallest = min(smallest, abs(move))
        last = (distance, found.pace)
        move = max(-0.3, min(move, 0.3))
        distance += move
        if abs(distance) > MOST_DISTANCE:
            return TOO_FAR
        guess = (found.u + move * found.tangent, found.parameter + move * found.pace)
    return f"no turning point within {MOST_SECANTS} secants"


def placed_by_values(system: DiscreteSystem, known: DiscreteTurning) -> DiscreteTurning:
    """The same turning point, its place taken from four values of the parameter around it instead of from the derivative.

    The derivative comes out of the matrix, where what is not second difference stands rounded beside 2/h^2; the values come
    out of residuals, whose differences lose nothing. What the two places differ by is the rounding of the first.
    """
    path = Path(system, known.u, known.parameter, known.scales)
    base = Point(known.u, known.parameter, known.null, 0.0, 0.0, known.scales, None)  # type: ignore[arg-type]
    apart = APART
    for _ in range(MOST_NARROWER):
        rises = []
        for place in (-2.0 * apart, -apart, apart, 2.0 * apart):
            rise = 0.5 * known.curvature * place * place
            found = path.step_from(base, place, (known.u + place * known.null, known.parameter + rise), POLISHED)
            if not found.ok:
                return known
            rises.append(found.parameter - known.parameter)
        slope = (8.0 * (rises[2] - rises[1]) - (rises[3] - rises[0])) / (12.0 * apart)
        # The fourth derivative over the second tells how narrow the hairpin is: the places have to lie well within it.
        fourth = abs(rises[0] + rises[3] - 4.0 * (rises[1] + rises[2])) / abs(known.curvature * apart * apart)
        if fourth <= 4.0 * WITHIN:
            break
        apart *= max(math.sqrt(WITHIN / fourth), 0.05)
    return replace(known, u=known.u - slope / known.curvature * known.null)


def _by_halving(path: Path, base: Point, curvature: float) -> DiscreteTurning | str:
    """The same where the equation has corners: the derivative jumps wherever a node passes one, so only its sign is used."""
    found = path.step_from(base, 0.0, (base.u, base.parameter), POLISHED)
    ends: dict[bool, tuple[float, Corrected]] = {}
    distance, step = 0.0, FIRST_STEP
    while found.ok:
        ends[found.pace > 0.0] = (distance, found)
        if len(ends) == 2:
            (rising, left), (falling, right) = ends[True], ends[False]
            if abs(falling - rising) <= NARROW:
                return _turning(found, base.scales, math.copysign(curvature, rising - falling), distance)
            distance = 0.5 * (rising + falling)
            guess = (0.5 * (left.u + right.u), 0.5 * (left.parameter + right.parameter))
        else:
            move = math.copysign(step, -found.pace * curvature)
            distance, step = distance + move, 2.0 * step
            guess = (found.u + move * found.tangent, found.parameter + move * found.pace)
            if abs(distance) > MOST_DISTANCE:
                return TOO_FAR
        found = path.step_from(base, distance, guess, POLISHED)
    return found.reason
