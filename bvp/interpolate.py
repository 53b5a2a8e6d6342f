"""Values between nodes, from polynomials through seven neighbours in the index of the nodes.

On the image of a uniform grid under a smooth map every nodal quantity is smooth in the index, so that equal steps serve
all grids. Errors are of order h^7: below those of the schemes, and no obstacle to extrapolation. An array has one
entry a node (no ghosts); with an axis at the left it is continued evenly.
"""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]

WINDOW = 7  # nodes of one polynomial; fewer where the grid has fewer

# Weights of the differences of first, second, … order, taken inward at both ends, that make the trapezoid rule exact for
# polynomials of degree 5 (Gregory's formula, Hildebrand, Introduction to Numerical Analysis, section 5.9, from memory).
GREGORY = (1 / 12, -1 / 24, 19 / 720, -3 / 160, 863 / 60480)


def window(values: Array, index: int, even: bool) -> tuple[Array, int]:
    """The values of up to WINDOW nodes around an index, and the index of the first; with even, continued past 0."""
    count = values.size
    half = WINDOW // 2
    if even and index < half and count > WINDOW:
        picked = np.abs(np.arange(index - half, index + half + 1))
        return values[picked], index - half
    first = min(max(index - half, 0), max(count - WINDOW, 0))
    return values[first : first + WINDOW], first


def newton_coefficients(values: Array) -> list[float]:
    """Newton's form in t = 0, 1, 2, …: forward differences over factorials."""
    row = values.tolist()
    coefficients, factorial = [row[0]], 1.0
    for order in range(1, len(row)):
        row = [after - before for before, after in pairwise(row)]
        factorial *= order
        coefficients.append(row[0] / factorial)
    return coefficients


def polynomial(coefficients: list[float], t: float) -> tuple[float, float, float]:
    """Value, slope and curvature at t of a polynomial in Newton's form, by Horner's rule."""
    value = slope = curve = 0.0
    for order in range(len(coefficients) - 1, -1, -1):
        shift = t - order
        curve = curve * shift + 2.0 * slope
        slope = slope * shift + value
        value = value * shift + coefficients[order]
    return value, slope, curve


def at_index(values: Array, position: float, even: bool = False, order: int = 0) -> float:
    """The interpolant, or its first or second derivative by the index, at a position counted in nodes."""
    near, first = window(values, round(min(max(position, 0), values.size - 1)), even)
    return polynomial(newton_coefficients(near), position - first)[order]


def largest(values: Array, even: bool = False) -> tuple[float, float]:
    """The greatest value of the interpolant and its position in nodes; at a node, at an end, or between nodes."""
    top = int(np.argmax(values))
    if not math.isfinite(values[top]):
        return float("nan"), float(top)
    near, first = window(values, top, even)
    coefficients = newton_coefficients(near)
    lower, upper = max(top - 1, 0) - first, min(top + 1, values.size - 1) - first
    t = float(top - first)
    for _ in range(8):  # Newton's steps on the slope; from a node next to the peak three are as a rule enough
        _, slope, curve = polynomial(coefficients, t)
        if not curve < 0.0:
            break
        moved = min(max(t - slope / curve, lower), upper)
        if abs(moved - t) < 1e-12:
            break
        t = moved
    value = polynomial(coefficients, t)[0]
    return (value, t + first) if value > values[top] else (float(values[top]), float(top))


def index_of(places: Array, x: float, even: bool = False) -> float:
    """The position in nodes at which the coordinate is x, by Newton's method on its interpolant; ends included."""
    interval = int(np.clip(np.searchsorted(places, x, side="right") - 1, 0, places.size - 2))
    position = interval + (x - places[interval]) / (places[interval + 1] - places[interval])
    odd_near_axis = even and interval < WINDOW  # the coordinate itself is odd there; linear continuation keeps it exact
    for _ in range(0 if odd_near_axis else 6):
        error = at_index(places, position) - x
        slope = at_index(places, position, order=1)
        if not slope > 0.0:
            break
        position = min(max(position - error / slope, interval), interval + 1.0)
        if abs(error) <= 1e-15 * max(abs(x), abs(places[-1])):
            break
    return position


def slopes_by_index(values: Array, even: bool = False) -> Array:
    """The first derivative by the index at every node, from the polynomials through seven (or all) nodes."""
    count = values.size
    if count <= WINDOW:
        return np.array([at_index(values, float(index), even, 1) for index in range(count)])
    weights = np.array([-1, 9, -45, 0, 45, -9, 1]) / 60.0
    slopes = np.empty(count)
    slopes[3:-3] = np.convolve(values, weights[::-1], mode="valid")
    for index in (0, 1, 2, count - 3, count - 2, count - 1):
        slopes[index] = at_index(values, float(index), even, 1)
    return slopes


def integral_by_index(values: Array) -> float:
    """The integral over all nodes by the index: the trapezoid rule with Gregory's corrections at both ends."""
    total = float(values.sum()) - 0.5 * float(values[0] + values[-1])
    orders = min(len(GREGORY), values.size - 1)
    inward_left, inward_right = values[: orders + 1], values[::-1][: orders + 1]
    for weight in GREGORY[:orders]:
        inward_left, inward_right = np.diff(inward_left), np.diff(inward_right)
        total += weight * float(inward_left[0] + inward_right[0])
    return total
