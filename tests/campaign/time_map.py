"""Turning points of autonomous slabs by quadrature: (k(u) u')' + lam f(u) = 0 has an energy integral.

From the middle, where u = m, to the wall, where u = s: half length times sqrt(lam) = I(m, s) = integral of k du/sqrt(2 (G(m) - G(u))),
G' = f k. With u = m - (m - s) t^2 the end's singularity is gone: I = sqrt(2 (m - s)) times the integral over t of k/sqrt(g),
g = (G(m) - G(u))/(m - u) = mean of f k between u and m, itself a Gauss-Legendre sum, so that nothing cancels.
"""

from __future__ import annotations

import itertools
from collections.abc import Callable
from fractions import Fraction
from functools import lru_cache
from typing import Any

import numpy as np
import numpy.typing as npt
from mpmath import mp, mpf

Array = npt.NDArray[np.float64]
Function = Callable[[Any], Any]


@lru_cache
def gauss(n: int, digits: int = 0) -> tuple[tuple[Any, ...], tuple[Any, ...]]:
    """Nodes and weights of the Gauss-Legendre rule on [0, 1]; the nodes in mpmath by Newton from those in floats."""
    nodes, weights = np.polynomial.legendre.leggauss(n)
    if digits == 0:
        return tuple((nodes + 1) / 2), tuple(weights / 2)
    exact_nodes, exact_weights = [], []
    with mp.workdps(digits + 5):
        for node in nodes:
            x = mpf(node)
            for _ in range(4):
                before, now = mpf(1), x
                for k in range(2, n + 1):
                    before, now = now, ((2 * k - 1) * x * now - (k - 1) * before) / k
                slope = n * (x * now - before) / (x * x - 1)
                x -= now / slope
            exact_nodes.append((x + 1) / 2)
            exact_weights.append(1 / ((1 - x * x) * slope * slope))
    return tuple(exact_nodes), tuple(exact_weights)


class TimeMap:
    """The energy integral of one source and conductivity; `kinks` are the values of u where f is not smooth."""

    def __init__(self, source: Function, conductivity: Function, kinks: tuple[float, ...] = (), nodes: int = 48, digits: int = 0) -> None:
        self.source, self.conductivity, self.kinks, self.digits = source, conductivity, kinks, digits
        self.nodes, self.weights = gauss(nodes, digits)
        self.root = mp.sqrt if digits else np.sqrt

    def _pieces(self, cuts: list[Any]) -> list[tuple[Any, Any]]:
        places = sorted({0, 1, *(cut for cut in cuts if 0 < cut < 1)})
        return list(itertools.pairwise(places))

    def mean(self, u: Any, m: Any) -> Any:
        """The mean of f k between u and m."""
        total = 0 * m
        for left, right in self._pieces([(kink - u) / (m - u) for kink in self.kinks]):
            width = right - left
            if self.digits:
                values = (u + (m - u) * (left + width * t) for t in self.nodes)
                total += width * mp.fdot(((self.source(v) * self.conductivity(v)), w) for v, w in zip(values, self.weights, strict=True))
            else:
                array = u + (m - u) * (left + width * np.array(self.nodes))
                total += width * float(np.sum(np.array(self.weights) * self.source(array) * self.conductivity(array)))
        return total

    def travel(self, m: Any, s: Any) -> Any:
        """I(m, s): the half length times sqrt(lam)."""
        total = 0 * m
        for left, right in self._pieces([self.root((m - kink) / (m - s)) for kink in self.kinks if s < kink < m]):
            width = right - left
            for t, w in zip(self.nodes, self.weights, strict=True):
                u = m - (m - s) * (left + width * t) ** 2
                total += width * w * self.conductivity(u) / self.root(self.mean(u, m))
        return self.root(2 * (m - s)) * total

    def slope(self, m: Any, s: Any) -> Any:
        """k u' at the wall, its size over sqrt(lam): sqrt(2 (G(m) - G(s)))."""
        return self.root(2 * (m - s) * self.mean(s, m))

    def wall(self, m: Any, half: Any, bi: Any, guess: Any = None) -> Any:
        """s with k u' + Bi s = 0 at the wall for a given half length: (half) Bi s = slope I; by secant steps, or bisection first."""

        def row(s: Any) -> Any:
            return half * bi * s - self.slope(m, s) * self.travel(m, s)

        if guess is None:
            low, high = 0.0 * m, m * (1 - 1e-9)
            for _ in range(12):
                middle = (low + high) / 2
                low, high = (middle, high) if row(middle) < 0 else (low, middle)
            guess = (low + high) / 2
        s, other = guess, guess * (1 - (mpf("1e-12") if self.digits else 1e-6))
        value, before = row(s), row(other)
        for _ in range(60):
            if value == before:
                break
            s, other, before = s - value * (s - other) / (value - before), s, value
            value = row(s)
            if abs(s - other) <= (mpf(10) ** -(self.digits - 4) if self.digits else 1e-14) * abs(m):
                break
        return s

    def parameter(self, m: Any, half: Any, bi: Any | None, guess: Any = None) -> tuple[Any, Any]:
        """(lam, s) of the state with u = m in the middle; bi None means u = 0 at the wall."""
        s = 0 * m if bi is None else self.wall(m, half, bi, guess)
        return (self.travel(m, s) / half) ** 2, s


def turning_point(
    functions: tuple[Function, Function],
    exact: tuple[Function, Function],
    width: Fraction,
    bi: float | None,
    kinks: tuple[float, ...],
    most: float,
) -> tuple[Any, Any, Any]:
    """(lam, m, uncertainty) of the first maximum of lam(m) on (0, most): found in floats, finished with 30 digits.

    The functions are (f, k) on arrays and on mpf. Around the maximum lam is a parabola: three values 1e-6 apart give it to
    1e-22; the whole is done with 48 and with 64 nodes. ArithmeticError where lam(m) rises all the way.
    """
    plain, half = TimeMap(*functions, kinks, 32), float(width)
    ms = most * np.linspace(0.004, 0.996, 125)
    values: list[float] = []
    for m in ms:
        values.append(float(plain.parameter(float(m), half, bi)[0]))
        if len(values) > 2 and values[-1] < values[-2]:
            break
    else:
        raise ArithmeticError("no turning point below the largest u tried")
    low, high = float(ms[max(len(values) - 3, 0)]), float(ms[len(values) - 1])
    ratio = (np.sqrt(5.0) - 1) / 2
    while high - low > 1e-5 * high:  # golden section down to where rounding hides the top, then a parabola through wider points
        a, b = high - ratio * (high - low), low + ratio * (high - low)
        if plain.parameter(a, half, bi)[0] < plain.parameter(b, half, bi)[0]:
            low = a
        else:
            high = b
    middle, wall = (low + high) / 2, plain.parameter((low + high) / 2, half, bi)[1]
    tops = []
    with mp.workdps(32):
        centre, length = mpf(middle), mpf(width.numerator) / width.denominator
        for nodes in (48, 64):
            fine = TimeMap(*exact, kinks, nodes, 32)
            for h in (mpf("1e-5"), mpf("1e-9")):
                guess = mpf(wall) if bi is not None else None
                left, now, right = (fine.parameter(centre + k * h, length, None if bi is None else mpf(bi), guess)[0] for k in (-1, 0, 1))
                change = -(right - left) * h / 2 / (left - 2 * now + right)
                centre += change
            tops.append(now - (right - left) ** 2 / (8 * (left - 2 * now + right)))
        return tops[1], centre, abs(tops[1] - tops[0]) + mpf("1e-24") * abs(tops[1])
