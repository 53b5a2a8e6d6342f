"""Series of the tool's own functions: cardinal and the fitted weights, which are entire where their formulas are 0/0."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from typing import Any

from bvp.formula.series import Series, SeriesError, exponential, sine_and_cosine, unit, unit_roundoff

NEAR = 4.0  # |z| up to which the power series around 0 is summed: it loses one digit there
LARGEST = 100.0  # of |p^2| and |p^2 - z| where the weights' power series is summed; a fine grid has them near 0


def cardinal(z: Series) -> Series:
    """2 (1 - cos sqrt z)/z = sum 2 (-z)^m/(2 m + 2)!."""
    return _entire("cardinal", z, 0)


def cardinal_slope(z: Series) -> Series:
    """The derivative of cardinal by z."""
    return _entire("cardinal_slope", z, 1)


def _entire(name: str, z: Series, order: int) -> Series:
    c = z.from_zero(name)
    start = c[0]
    if abs(start) > NEAR:
        closed = _half_angle(z)
        return closed if order == 0 else (_sine_over_argument(z) - closed) / z
    one = unit(c)
    near = [_taylor(one, start, n, order) for n in range(len(c))]
    return _composed(near, z - start)


def _taylor(one: Any, start: Any, n: int, order: int) -> Any:
    """The coefficient of (z - start)^n of the derivative of that order of cardinal."""
    total, size = 0.0 * one, 0.0 * one
    for m in range(n, n + 200):
        whole = (m + 1 if order else 1) * math.comb(m, n)
        power = m + order
        term = (-1) ** power * 2 * one * whole / math.factorial(2 * power + 2) * start ** (m - n)
        total, size = total + term, max(size, abs(term))
        if abs(term) <= unit_roundoff(one) * size * 1e-3:
            break
    return total


def _composed(coefficients: Sequence[Any], t: Series) -> Series:
    """sum coefficients[n] t^n for a t that vanishes where s does."""
    total = Series.constant(coefficients[-1], len(coefficients))
    for coefficient in reversed(coefficients[:-1]):
        total = total * t + coefficient
    return total


def _root(z: Series) -> tuple[Series, float]:
    """sqrt|z|, and the sign of z."""
    sign = z.sign()
    return (z * sign) ** 0.5, sign


def _half_angle(z: Series) -> Series:
    root, sign = _root(z)
    half = sine_and_cosine(("sin", "cos"), root / 2, -1.0)[0] if sign > 0 else sine_and_cosine(("sinh", "cosh"), root / 2, 1.0)[0]
    return half * half * 4 / (z * sign)


def _sine_over_argument(z: Series) -> Series:
    root, sign = _root(z)
    return (sine_and_cosine(("sin", "cos"), root, -1.0)[0] if sign > 0 else sine_and_cosine(("sinh", "cosh"), root, 1.0)[0]) / root


def fit(p: Any, z: Any) -> Series:
    """e^p z/(2 (cosh p - cosh sqrt(p^2 - z)))."""
    grown, sums = _sums(p, z)
    weight: Series = grown / sums[0]
    return weight


def fit_by_drift(p: Any, z: Any) -> Series:
    """The derivative of fit by p."""
    grown, (total, _, along) = _sums(p, z)
    slope: Series = grown / total - grown * along * p * 2 / (total * total)
    return slope


def fit_by_slope(p: Any, z: Any) -> Series:
    """The derivative of fit by z."""
    grown, (total, by_second, _) = _sums(p, z)
    slope: Series = grown * by_second / (total * total)
    return slope


def _sums(p: Any, z: Any) -> tuple[Series, tuple[Any, Any, Any]]:
    """e^p, and the divided differences of cosh sqrt w at p^2 and p^2 - z: the weight is e^p over the first."""
    if not isinstance(p, Series):
        p = Series.constant(p, max(z.end, 1))
    if not isinstance(z, Series):
        z = Series.constant(z, max(p.end, 1))
    grown = exponential(p)
    a = p * p
    b = a - z
    c = b.from_zero("fit") + a.from_zero("fit")
    if abs(b._at(0)) > LARGEST or abs(a._at(0)) > LARGEST:
        raise SeriesError(f"the fitted weights at a step where p^2 = {a._at(0)} and p^2 - z = {b._at(0)} are far from 0")
    if b.coefficients and b._at(0) <= -(math.pi**2):
        raise SeriesError("the fitted weights have no meaning where z - p^2 reaches pi^2")
    one = unit(c)
    whole = Series.constant(one, min(a.end, b.end, grown.end))
    return grown, divided_differences(a, b, whole, _size, unit_roundoff(one))


def divided_differences(a: Any, b: Any, one: Any, size: Callable[[Any], Any], roundoff: Any) -> tuple[Any, Any, Any]:
    """2 E[a, b] of E(w) = cosh sqrt w, its derivative by b, and that by a and b together, in any arithmetic.

    The m-th power gives the sum of all a^i b^(m - 1 - i); that and its derivatives follow from those of the power before.
    """
    s, by_b, along, power = one, 0 * one, 0 * one, one  # for m = 1; power is b^(m - 1)
    totals = [0 * one, 0 * one, 0 * one]
    for m in range(1, 400):
        weight = math.factorial(2 * m)
        parts = [2 * part / weight for part in (s, by_b, along)]
        totals = [total + part for total, part in zip(totals, parts, strict=True)]
        if m > 2 and all(size(part) <= roundoff * 1e-3 * size(total) for part, total in zip(parts, totals, strict=True)):
            break
        s, by_b, along = a * s + power * b, a * by_b + power * m, s + a * along + power * m
        power = power * b
    return totals[0], totals[1], totals[2]


def _size(series: Series) -> Any:
    return max((abs(c) for c in series.coefficients), default=0.0)
