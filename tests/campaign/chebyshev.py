"""Repeated integration on Chebyshev points, in double precision and in mpmath: the well-conditioned half of collocation.

A function on [0, 1] is split at `breaks`; on each panel its second derivative w is known at the n zeros of T_n. Then
p = p(0) + integral of w and u = u(0) + p(0) x + integral of p are exact for polynomials.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import Any

import numpy as np
import numpy.typing as npt
from mpmath import mp, mpf

Matrix = npt.NDArray[np.float64]
Dot = Callable[[Sequence[Any], Sequence[Any]], Any]


def integrated(coefficients: Sequence[Any]) -> list[Any]:
    """Chebyshev coefficients of the integral from -1, one more than given."""
    a = [*coefficients, 0, 0]
    count = len(coefficients)
    b = [0, *((a[k - 1] * (2 if k == 1 else 1) - a[k + 1]) / (2 * k) for k in range(1, count + 1))]
    b[0] = sum((b[k] if k % 2 else -b[k]) for k in range(1, count + 1))
    return b


@lru_cache
def cosines(n: int, digits: int) -> list[Any]:
    """cos(j pi/(2n)) for j = 0 … 4n - 1, in floats for digits = 0."""
    if digits == 0:
        return [float(np.cos(np.pi * j / (2 * n))) for j in range(4 * n)]
    with mp.workdps(digits):
        return [mp.cos(mp.pi * j / (2 * n)) for j in range(4 * n)]


@dataclass(frozen=True)
class Panels:
    """The points of all panels; `digits` = 0 means floats."""

    n: int
    breaks: tuple[Any, ...]
    digits: int = 0

    @cached_property
    def points(self) -> list[Any]:
        """The n points of each panel in turn, ascending on [0, 1]."""
        c = cosines(self.n, self.digits)
        local = [(1 - c[2 * j + 1]) / 2 for j in range(self.n)]
        return [left + (right - left) * t for left, right in self.sides for t in local]

    @property
    def sides(self) -> list[tuple[Any, Any]]:
        """The ends of each panel."""
        return list(zip(self.breaks, self.breaks[1:], strict=False))

    def coefficients(self, values: Sequence[Any]) -> list[Any]:
        """Chebyshev coefficients of one panel from its values, the points ascending (x_j = -cos((2j + 1) pi/(2n)))."""
        c, n = cosines(self.n, self.digits), self.n
        found = []
        for k in range(n):
            row = [c[(k * (2 * j + 1)) % (4 * n)] for j in range(n)]
            total = self.dot(row, values) * 2 / n
            found.append(total / 2 if k == 0 else -total if k % 2 else total)
        return found

    def dot(self, left: Sequence[Any], right: Sequence[Any]) -> Any:
        """The sum of products."""
        if self.digits:
            return mp.fdot(zip(left, right, strict=True))
        return sum(a * b for a, b in zip(left, right, strict=True))

    def at_points(self, coefficients: Sequence[Any]) -> list[Any]:
        """The values of a panel's series at its points."""
        c, n = cosines(self.n, self.digits), self.n
        signed = [-a if k % 2 else a for k, a in enumerate(coefficients)]
        return [self.dot([c[(k * (2 * j + 1)) % (4 * n)] for k in range(len(signed))], signed) for j in range(n)]

    def integrals(self, w: Sequence[Any], value: Any, slope: Any) -> tuple[list[Any], list[Any], Any, Any]:
        """u and p = u' at the points, then both at 1, from w = u'' at the points with u(0) = value and p(0) = slope."""
        us: list[Any] = []
        ps: list[Any] = []
        for number, (left, right) in enumerate(self.sides):
            half = (right - left) / 2
            first = integrated(self.coefficients(w[number * self.n : (number + 1) * self.n]))
            second = integrated(first)
            steps = self.at_points(first)
            rises = self.at_points(second)
            gaps = [x - left for x in self.points[number * self.n : (number + 1) * self.n]]
            ps += [slope + half * step for step in steps]
            us += [value + slope * gap + half * half * rise for gap, rise in zip(gaps, rises, strict=True)]
            value = value + slope * (right - left) + half * half * sum(second)
            slope = slope + half * sum(first)
        return us, ps, value, slope

    @cached_property
    def matrices(self) -> tuple[Matrix, Matrix]:
        """The same as matrices on (w, u(0), p(0)): rows are the points and then the right end, for u and for p (floats only)."""
        step, rise, step_end, rise_end = unit_matrices(self.n)
        size = self.n * len(self.sides)
        u_rows, p_rows = np.zeros((size + 1, size + 2)), np.zeros((size + 1, size + 2))
        u_now, p_now = np.eye(size + 2)[size], np.eye(size + 2)[size + 1]  # as functionals of the unknowns, at the panel's left end
        for number, (left, right) in enumerate(self.sides):
            half, here = (right - left) / 2, slice(number * self.n, (number + 1) * self.n)
            gaps = np.array(self.points[here]) - left
            u_rows[here], p_rows[here] = u_now + np.outer(gaps, p_now), p_now
            u_rows[here, here] += half**2 * rise
            p_rows[here, here] += half * step
            u_now = u_now + (right - left) * p_now
            p_now = p_now.copy()
            u_now[here] += half**2 * rise_end
            p_now[here] += half * step_end
        u_rows[-1], p_rows[-1] = u_now, p_now
        return u_rows, p_rows

    def value(self, w: Sequence[Any], start: Any, slope: Any, x: Any) -> tuple[Any, Any, Any]:
        """u, p and w at one place in [0, 1]."""
        for number, (left, right) in enumerate(self.sides):
            half = (right - left) / 2
            plain = self.coefficients(w[number * self.n : (number + 1) * self.n])
            first = integrated(plain)
            second = integrated(first)
            if x <= right or right == self.breaks[-1]:
                t = (x - left) / half - 1
                return start + slope * (x - left) + half * half * summed(second, t), slope + half * summed(first, t), summed(plain, t)
            start = start + slope * (right - left) + half * half * sum(second)
            slope = slope + half * sum(first)
        raise AssertionError("the last panel holds the place")


@lru_cache
def unit_matrices(n: int) -> tuple[Matrix, Matrix, Matrix, Matrix]:
    """Single and double integration over [-1, 1] from values: matrices to the points, rows to the right end."""
    k, j = np.arange(n), np.arange(n)
    coefficients = np.cos(np.pi * np.outer(k, 2 * (n - 1 - j) + 1) / (2 * n)) * np.where(k == 0, 1.0, 2.0)[:, None] / n
    first = np.array([integrated(column) for column in coefficients.T]).T
    second = np.array([integrated(column) for column in first.T]).T
    points = [np.cos(np.pi * np.outer(2 * (n - 1 - j) + 1, np.arange(len(one))) / (2 * n)) for one in (first, second)]
    return points[0] @ first, points[1] @ second, first.sum(axis=0), second.sum(axis=0)


def summed(coefficients: Sequence[Any], t: Any) -> Any:
    """A Chebyshev series at t in [-1, 1] by Clenshaw's recurrence."""
    after, following = t * 0, t * 0
    for a in reversed(coefficients[1:]):
        after, following = a + 2 * t * after - following, after
    return coefficients[0] + t * after - following


@lru_cache(maxsize=64)
def panels(n: int, breaks: tuple[float, ...] = (0.0, 1.0), digits: int = 0) -> Panels:
    """Panels with their matrices kept; the breaks are the exact floats in either arithmetic."""
    return Panels(n, tuple(mpf(b) for b in breaks) if digits else breaks, digits)
