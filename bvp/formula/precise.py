"""The functions of the language in mpmath's arithmetic, at the precision in force when they are called."""

from __future__ import annotations

import math
from collections.abc import Callable
from functools import cache
from typing import Any

NEAR = 4.0  # |z| below which the power series of cardinal_slope is summed
NEAR_WEIGHTS = 100.0  # |p^2| and |p^2 - z| below which the power series of the fitted weights are


@cache
def mpmath_functions() -> dict[str, Callable[..., Any]]:
    """The functions of the language in mpmath's arithmetic."""
    import mpmath
    from mpmath import mp

    same = ("exp", "log", "sqrt", "sin", "cos", "tan", "sinh", "cosh", "tanh", "asin", "acos", "atan", "erf", "expm1", "log1p", "sign")

    return {
        **{name: getattr(mpmath, name) for name in same},
        "abs": abs,
        "min": min,
        "max": max,
        "step_le": lambda a, b: mp.mpf(1 if a <= b else 0),
        "cardinal": cardinal,
        "cardinal_slope": cardinal_slope,
        "fit": fit,
        "fit_by_drift": fit_by_drift,
        "fit_by_slope": fit_by_slope,
    }


def typed(value: float) -> Any:
    """A literal as it was typed: 0.1 is one tenth, and pi has all its digits."""
    import mpmath

    return +mpmath.pi if value == math.pi else mpmath.mpf(repr(value))


def cardinal(z: Any) -> Any:
    """4 sin^2(sqrt(z)/2)/z."""
    import mpmath

    half = mpmath.sqrt(z) / 2
    if z >= mpmath.pi**2:
        return mpmath.nan
    return ((mpmath.sin(half) / half) ** 2).real if half else mpmath.mpf(1)


def cardinal_slope(z: Any) -> Any:
    """The derivative of cardinal: (sin(sqrt z)/sqrt z - cardinal(z))/z, near 0 its series."""
    import mpmath

    if z >= mpmath.pi**2:
        return mpmath.nan
    if abs(z) >= NEAR:
        root = mpmath.sqrt(z)
        return ((mpmath.sin(root) / root).real - cardinal(z)) / z
    total, power, m = mpmath.mpf(0), mpmath.mpf(1), 0
    while True:
        term = (-1) ** (m + 1) * 2 * (m + 1) * power / math.factorial(2 * m + 4)
        total += term
        if abs(term) <= mpmath.mp.eps * abs(total) / 1000:
            return total
        power *= z
        m += 1


def fit(p: Any, z: Any) -> Any:
    """e^p z/(2 (cosh p - cosh sqrt(p^2 - z))), nan where z - p^2 reaches pi^2: b(s) b(d) as in bvp.kernels.special."""
    import mpmath

    p, z = mpmath.mpf(p), mpmath.mpf(z)
    if _refused(p, z):
        return mpmath.nan
    q = mpmath.sqrt(p * p - z)
    s = (p - q if p < 0 else p + q) / 2
    d = z / (4 * s) if s else s
    weight = mpmath.mpf(1)
    for root in (s, d):
        weight = weight * (-2 * root / mpmath.expm1(-2 * root) if root else 1)
    return weight.real


def fit_by_drift(p: Any, z: Any) -> Any:
    """The derivative of fit by p."""
    return _derivative(p, z, 0)


def fit_by_slope(p: Any, z: Any) -> Any:
    """The derivative of fit by z."""
    return _derivative(p, z, 1)


def _derivative(p: Any, z: Any, by: int) -> Any:
    import mpmath

    from bvp.formula.special_series import divided_differences

    p, z = mpmath.mpf(p), mpmath.mpf(z)
    if _refused(p, z):
        return mpmath.nan
    if max(p * p, abs(p * p - z)) > NEAR_WEIGHTS:
        return mpmath.diff(fit, (p, z), (1 - by, by))
    total, by_second, along = divided_differences(p * p, p * p - z, mpmath.mpf(1), abs, mpmath.mp.eps)
    return mpmath.exp(p) * (by_second / total**2 if by else 1 / total - 2 * p * along / total**2)


def _refused(p: Any, z: Any) -> bool:
    import mpmath

    return not p * p - z > -(mpmath.pi**2)
