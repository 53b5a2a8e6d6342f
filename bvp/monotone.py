"""Slopes of a cubic spline through points, limited where the curve would rise and fall between points that do not.

The spline is the one with two continuous derivatives and no jump of the third at the second and the last but one knot
(de Boor, A Practical Guide to Splines, 1978, chapter IV). A piece of it is monotone where its two slopes lie in the
region of Fritsch and Carlson, SIAM J. Numer. Anal. 17, 1980, 238-246; where not, they are limited to the square inside
of that region, at most three times the slope of the data. Beside a local extremum of the data the curve may overshoot,
as a smooth one does whose extremum lies between two points; its slopes there are limited only to three times the
greater slope of the data on either side. (Hyman, SIAM J. Sci. Stat. Comput. 4, 1983, 645-654, takes the lesser, which
costs a smooth extremum two orders.) After each limitation the rest of the spline is computed afresh with the limited
slopes held, so that it keeps its two derivatives everywhere else.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Floats = npt.NDArray[np.float64]
Booleans = npt.NDArray[np.bool_]


def monotone_slopes(knots: Floats, values: Floats) -> tuple[Floats, Booleans]:
    """(slopes at the knots, which of them were limited), both of shape (n,), for n >= 2 increasing knots."""
    steepness = np.diff(values) / np.diff(knots)
    held = np.zeros(knots.size, dtype=bool)
    slopes = spline_slopes(knots, steepness, held, np.zeros(knots.size))
    # Each round holds a knot more, or limits one further: at most two rounds a knot.
    while True:
        limited = limited_slopes(steepness, slopes)
        changed = limited != slopes
        if not np.any(changed):
            return slopes, held
        held |= changed
        slopes = spline_slopes(knots, steepness, held, limited)


def spline_slopes(knots: Floats, steepness: Floats, held: Booleans, given: Floats) -> Floats:
    """Slopes (n,) of the cubic spline with steepness (n - 1,) between the knots, those marked `held` being given."""
    count = knots.size
    steps = np.diff(knots)
    if count == 2:
        return np.where(held, given, steepness[0])
    if count == 3 and not np.any(held):  # one parabola
        middle = (steps[1] * steepness[0] + steps[0] * steepness[1]) / (steps[0] + steps[1])
        return np.array([2 * steepness[0] - middle, middle, 2 * steepness[1] - middle])
    from scipy.linalg import solve_banded  # here, because loading it takes longer than most runs

    band = np.zeros((3, count))  # above, on and below the diagonal, as solve_banded takes them
    right = np.empty(count)
    band[1, 1:-1] = 2 * (steps[:-1] + steps[1:])
    band[0, 2:] = steps[:-1]
    band[2, :-2] = steps[1:]
    right[1:-1] = 3 * (steps[1:] * steepness[:-1] + steps[:-1] * steepness[1:])
    for end, beside, above in ((0, 1, 0), (-1, -2, 2)):
        first, second = steps[end], steps[beside]
        if count == 3:  # one knot inside: no third derivative to join, so no curvature at the end
            band[1, end], band[above, beside], right[end] = 2, 1, 3 * steepness[end]
        else:
            band[1, end], band[above, beside] = second, first + second
            right[end] = ((first + 2 * (first + second)) * second * steepness[end] + first**2 * steepness[beside]) / (first + second)
    band[1, held] = 1
    right[held] = given[held]
    band[0, 1:][held[:-1]] = 0
    band[2, :-1][held[1:]] = 0
    return np.where(held, given, solve_banded((1, 1), band, right))  # given exactly, so that limited slopes stay limited


def limited_slopes(steepness: Floats, slopes: Floats) -> Floats:
    """The slopes (n,), limited at the ends of those pieces that are not monotone where the data, of steepness (n - 1,), are."""
    extremum = _extrema(steepness)
    beside = extremum[:-1] | extremum[1:]
    size = np.abs(steepness)
    least = np.minimum(np.append(size, np.inf), np.insert(size, 0, np.inf))
    greatest = np.maximum(np.append(size, size[-2:-1]), np.insert(size, 0, size[1:2])) if size.size > 1 else np.repeat(size, 2)

    left, right = _relative(steepness, slopes[:-1]), _relative(steepness, slopes[1:])
    forward = (left >= 0) & (right >= 0)
    in_region = (left + right <= 2) | (2 * left + right <= 3) | (left + 2 * right <= 3)
    in_region |= left**2 + left * (right - 6) + (right - 3) ** 2 <= 0
    level = (steepness != 0) | ((slopes[:-1] == 0) & (slopes[1:] == 0))
    strict = level & np.where(beside, in_region | ~forward, in_region & forward)
    right_way = ((left >= 0) | extremum[:-1]) & ((right >= 0) | extremum[1:])
    moderate = np.abs(slopes) <= 3 * greatest
    loose = ~beside | (right_way & moderate[:-1] & moderate[1:])

    of_data = np.sign(np.append(steepness, 0.0) + np.insert(steepness, 0, 0.0))
    sign = np.where(extremum, np.sign(slopes), of_data)
    most = np.where(_ends(~strict), 3 * least, 3 * greatest)
    return np.where(_ends(~(strict & loose)), sign * np.clip(sign * slopes, 0.0, most), slopes)


def _ends(pieces: Booleans) -> Booleans:
    """The knots at the ends of the pieces that are marked."""
    return np.append(pieces, False) | np.insert(pieces, 0, False)


def _extrema(steepness: Floats) -> Booleans:
    """Which knots are local extrema of the data, the ends never."""
    inside = np.sign(steepness[:-1]) * np.sign(steepness[1:]) < 0
    return np.concatenate([[False], inside, [False]])


def _relative(steepness: Floats, slopes: Floats) -> Floats:
    """Slopes over the steepness of a piece, 0 where that is flat, cut off far outside of the region of Fritsch and Carlson."""
    with np.errstate(over="ignore"):
        ratios = np.divide(slopes, steepness, out=np.zeros_like(slopes), where=steepness != 0)
    return np.clip(ratios, -100.0, 100.0)


def coefficients(knots: Floats, values: Floats, slopes: Floats) -> Floats:
    """Coefficients (n - 1, 4) of the powers of the distance from each piece's left knot."""
    steps = np.diff(knots)
    steepness = np.diff(values) / steps
    left, right = slopes[:-1], slopes[1:]
    return np.stack([values[:-1], left, (3 * steepness - 2 * left - right) / steps, (left + right - 2 * steepness) / steps**2], axis=1)
