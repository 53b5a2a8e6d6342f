"""A branch taken apart for drawing: a smooth curve through its points, pieces of equal stability, how many states exist where."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from continuation.records import Array, Branch, TurningPoint

STEPS_BETWEEN_POINTS = 8  # of the polyline between two points of the branch; more are not seen on paper
ENOUGH_VERTICES = 4000  # a branch of more points is drawn from point to point


@dataclass(frozen=True)
class Piece:
    """A part of a branch along which the number of unstable directions is the same (None where it is not defined)."""

    arclength: Array
    parameter: Array
    measure: Array
    unstable: int | None


@dataclass(frozen=True)
class Stretch:
    """An open interval of the parameter on which the branch has so many states; None beyond an end of the branch.

    `or_more` where the branch, followed on past one of its ends, would enter the interval once more.
    """

    lower: float
    upper: float
    states: int | None
    or_more: bool = False


def pieces_of(branch: Branch, measure: str, log_parameter: bool = False, log_measure: bool = False) -> tuple[Piece, ...]:
    """The branch as curves (parameter, measure), each of one stability, that meet where the stability changes.

    On a logarithmic axis the points that are not positive are left out.
    """
    arclength, parameter, turning = _vertices(branch)
    values = np.interp(arclength, branch.arclength, branch.measure(measure))
    known = [np.nan if point is None else point.measures.get(measure, np.nan) for point in turning]
    values = np.where(np.isfinite(known), known, values)
    keep = np.isfinite(parameter) & np.isfinite(values)
    keep &= (parameter > 0) | (not log_parameter)
    keep &= (values > 0) | (not log_measure)
    keep[1:] &= np.diff(arclength) > 0  # two turning points at one place
    arclength, parameter, values = arclength[keep], parameter[keep], values[keep]
    if arclength.size == 0:
        return ()
    ends, unstable = _stability(branch)
    cuts = np.concatenate([[-np.inf], ends, [np.inf]])
    fine = np.unique(np.concatenate([_subdivided(arclength), ends[(ends > arclength[0]) & (ends < arclength[-1])]]))
    # The curve runs smoothly by its length on the paper, which the arclength of high-dimensional states may have little to do with.
    chords = _chords(parameter, values, log_parameter, log_measure)
    along = np.interp(fine, arclength, chords)
    drawn_parameter = _interpolated(chords, parameter, along, log_parameter)
    drawn_measure = _interpolated(chords, values, along, log_measure)
    pieces = []
    for first, last, count in zip(cuts[:-1], cuts[1:], unstable, strict=True):
        inside = (fine >= first) & (fine <= last)
        if np.count_nonzero(inside) > 1 or fine.size == 1:
            pieces.append(Piece(fine[inside], drawn_parameter[inside], drawn_measure[inside], count))
    return tuple(pieces)


def stretches_of(branch: Branch) -> tuple[Stretch, ...]:
    """How many states the branch, as far as it was traced, has on each stretch of the parameter, from -inf to +inf.

    Counted are the runs between turnings that pass over the stretch. Beyond an outermost turning point there is none;
    beyond an outermost end of the branch the number is not known.
    """
    parameter = _turnings(branch)
    if parameter.size < 2:
        return (Stretch(-np.inf, np.inf, None),)
    edges = np.concatenate([[-np.inf], np.unique(parameter), [np.inf]])
    lower, upper = np.minimum(parameter[:-1], parameter[1:]), np.maximum(parameter[:-1], parameter[1:])
    ends: list[tuple[float, float]] = []  # of the branch, each with the way that it would go on
    if branch.ended != "closed loop":
        ends = [(parameter[0], parameter[0] - parameter[1]), (parameter[-1], parameter[-1] - parameter[-2])]
    stretches: list[Stretch] = []
    for left, right in pairwise(edges):
        count: int | None = int(np.count_nonzero((lower <= left) & (right <= upper)))
        entered = any((end == left and way > 0) or (end == right and way < 0) for end, way in ends)
        if entered and count == 0:
            count, entered = None, False
        if stretches and (stretches[-1].states, stretches[-1].or_more) == (count, entered):  # where a closed loop began, for instance
            left = stretches.pop().lower
        stretches.append(Stretch(float(left), float(right), count, entered))
    return tuple(stretches)


def unstable_beside(branch: Branch, position: float) -> tuple[int, int] | None:
    """The numbers of unstable directions before and after a place along the arclength; None where they are not defined."""
    ends, unstable = _stability(branch)
    before = unstable[int(np.searchsorted(ends, position, side="left"))]
    after = unstable[int(np.searchsorted(ends, position, side="right"))]
    return None if before is None or after is None else (before, after)


def _vertices(branch: Branch) -> tuple[Array, Array, list[TurningPoint | None]]:
    """Arclength and parameter of the points and turning points in one order, and which of the turning points each is.

    The turning points are those of the grid that the branch was traced on, so that they lie on the same curve.
    """
    turning = [point for point in branch.turning_points if np.isfinite(point.on_grid) and np.isfinite(point.position)]
    positions = np.array([point.position for point in turning])
    arclength, parameter = np.asarray(branch.arclength, dtype=float), np.asarray(branch.parameter, dtype=float)
    if turning:  # a point that is a turning point itself stands once
        apart = np.min(np.abs(arclength[:, None] - positions), axis=1) > 1e-9 * np.ptp(arclength)
        arclength, parameter = arclength[apart], parameter[apart]
    joined = np.concatenate([arclength, positions])
    order = np.argsort(joined, kind="stable")
    which = [None if index < arclength.size else turning[index - arclength.size] for index in order]
    return joined[order], np.concatenate([parameter, [point.on_grid for point in turning]])[order], which


def _stability(branch: Branch) -> tuple[Array, list[int | None]]:
    """The places along the arclength where the number of unstable directions changes, and the number on each piece."""
    if branch.unstable_directions is None:
        return np.zeros(0), [None]
    unstable, arclength = np.asarray(branch.unstable_directions), np.asarray(branch.arclength, dtype=float)
    positions = np.array([point.position for point in branch.turning_points])
    changes = [int(index) for index in np.flatnonzero(np.diff(unstable))]
    ends: list[float] = []
    for index in changes:
        # A turning point between the two points is where it changes; within rounding it may be a point further.
        first, last = arclength[max(index - 1, 0)], arclength[min(index + 2, arclength.size - 1)]
        middle = (arclength[index] + arclength[index + 1]) / 2
        near = positions[(positions >= first) & (positions <= last)]
        ends.append(float(near[np.argmin(np.abs(near - middle))] if near.size else middle))
    return np.maximum.accumulate(np.array(ends, dtype=float)), [int(unstable[0]), *(int(unstable[index + 1]) for index in changes)]


def _turnings(branch: Branch) -> Array:
    """The parameter at the first point, at every place where it turns back, and at the last.

    A turning point has its refined value here.
    """
    _, parameter, which = _vertices(branch)
    moved = np.flatnonzero(np.isfinite(parameter))
    moved = moved[np.append(True, np.diff(parameter[moved]) != 0)] if moved.size else moved
    directions = np.sign(np.diff(parameter[moved]))
    kept = np.ones(moved.size, dtype=bool)
    kept[1:-1] = directions[1:] != directions[:-1]
    values = []
    for index in moved[kept]:
        point = which[index]
        values.append(point.value if point is not None and np.isfinite(point.value) else parameter[index])
    if branch.ended == "closed loop":  # where it closes is met twice, and not quite alike
        values[-1] = values[0]
    return np.array(values)


def _subdivided(knots: Array) -> Array:
    steps = max(1, min(STEPS_BETWEEN_POINTS, ENOUGH_VERTICES // knots.size))
    fractions = np.arange(steps) / steps
    return np.append((knots[:-1, None] + np.diff(knots)[:, None] * fractions).ravel(), knots[-1])


def _chords(parameter: Array, values: Array, log_parameter: bool, log_measure: bool) -> Array:
    """The length of the polygon through the points up to each, both axes taken as one unit long."""
    squares = np.zeros(parameter.size - 1)
    for shown in (np.log(parameter) if log_parameter else parameter, np.log(values) if log_measure else values):
        squares += (np.diff(shown) / (np.ptp(shown) or 1.0)) ** 2
    return np.append(0.0, np.cumsum(np.maximum(np.sqrt(squares), 1e-12)))


def _interpolated(knots: Array, values: Array, wanted: Array, logarithmic: bool) -> Array:
    """The monotone cubic through the points: it has no extremum that they have not, and is level at those they have.

    Slopes as in Fritsch & Butland, SIAM J. Sci. Stat. Comput. 5, 1984, 300-304 (from memory).
    """
    if knots.size < 3:
        return np.interp(wanted, knots, values)
    shown = np.log(values) if logarithmic else values
    steps = np.diff(knots)
    rise = np.diff(shown) / steps
    before, after = rise[:-1], rise[1:]
    same = before * after > 0
    weight = (steps[:-1] + 2 * steps[1:]) / (3 * (steps[:-1] + steps[1:]))
    slopes = np.zeros(knots.size)
    slopes[1:-1][same] = before[same] * after[same] / (weight * after + (1 - weight) * before)[same]
    for end, beside, slope in ((0, 0, slopes[1]), (-1, -1, slopes[-2])):
        guess = (3 * rise[beside] - slope) / 2  # no curvature at the ends
        slopes[end] = guess if guess * rise[beside] > 0 else 0.0
    left = np.clip(np.searchsorted(knots, wanted, side="right") - 1, 0, knots.size - 2)
    step, along = steps[left], (wanted - knots[left]) / steps[left]
    cubic = shown[left] * (1 + 2 * along) * (1 - along) ** 2 + shown[left + 1] * along**2 * (3 - 2 * along)
    cubic += step * along * (1 - along) * (slopes[left] * (1 - along) - slopes[left + 1] * along)
    return np.exp(cubic) if logarithmic else np.asarray(cubic)
