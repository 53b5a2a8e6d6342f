"""Boundary layer, the layer equation with pitchforks, Troesch's problem, and the linear layers put into their equations."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from mpmath import mp, mpf

from tests.recomputed.roots import newton
from tests.taylor import Series, advance, sinh

# The cut of the half-infinite interval: what is left beyond decays like exp(-L^2/2), 1e-31 here.
CUT = 12


def wall_layer(beta: Any, curvature: Any) -> Any:
    """f'(L) - 1 of f''' + f f'' + beta (1 - f'^2) = 0 with f = f' = 0, f'' = curvature at the wall."""

    def field(_: Series, f: Series, f1: Series, f2: Series) -> list[Series]:
        return [f1, f2, -(f * f2) - (1 - f1 * f1) * beta]

    return advance(field, 0, (mpf(0), mpf(0), mpf(curvature)), CUT)[1] - 1


def layer_turning_point() -> tuple[Any, Any]:
    """(beta, f''(0)) where f'(L) - 1 and its derivative by f''(0) vanish together."""

    def rows(beta: Any, curvature: Any) -> list[Any]:
        def field(_: Series, *y: Series) -> list[Series]:
            f, f1, f2, d, d1, d2 = y
            return [f1, f2, -(f * f2) - (1 - f1 * f1) * beta, d1, d2, f1 * d1 * (2 * beta) - f * d2 - d * f2]

        start = (mpf(0), mpf(0), mpf(curvature), mpf(0), mpf(0), mpf(1))
        y = advance(field, 0, start, CUT)
        return [y[1] - 1, y[4]]

    beta, curvature = newton(rows, ("-0.1988", "0.001"))
    return beta, curvature


def rotated_layer(eps: Any, middle: Any) -> list[Any]:
    """y(1), its derivative by y(0), and the odd variation at 1, of eps^2 y'' + 2 (1 - x^2) y + y^2 = 1 with y'(0) = 0."""
    weight = 1 / mpf(eps) ** 2

    def field(x: Series, *y: Series) -> list[Series]:
        u, v, even, even1, odd, odd1 = y
        slope = (1 - x * x) * 2 + u * 2
        return [v, (1 - (1 - x * x) * 2 * u - u * u) * weight, even1, -(slope * even) * weight, odd1, -(slope * odd) * weight]

    y = advance(field, 0, [mpf(one) for one in (middle, 0, 1, 0, 0, 1)], 1)
    return [y[0], y[2], y[4]]


def rotated_points(row: int, guesses: tuple[tuple[str, str], ...]) -> list[Any]:
    """eps where y(1) = 0 together with the given row: 1 the turning points, 2 the pitchforks."""

    def both(eps: Any, middle: Any) -> list[Any]:
        values = rotated_layer(eps, middle)
        return [values[0], values[row]]

    return [newton(both, guess)[0] for guess in guesses]


def troesch(length: Any) -> tuple[Any, Any]:
    """u'(0), u'(1) of u'' = L sinh(L u), u(0) = 0, u(1) = 1, by the Jacobi function of the text-book solution.

    sinh(L u/2) = (s/2) sc(L x | 1 - s^2/4) with s = u'(0), parameter m = 1 - s^2/4; u'(1)^2 = s^2 + 2 (cosh L - 1).
    """
    length = mpf(length)

    def row(log_slope: Any) -> Any:
        s = mp.exp(log_slope)
        m = 1 - s * s / 4
        ratio = mp.re(mp.ellipfun("sn", length, m=m)) / mp.re(mp.ellipfun("cn", length, m=m))
        return mp.log(s / 2 * ratio) - mp.log(mp.sinh(length / 2))

    # For large L u'(0) tends to 8 exp(-L) from below.
    start = mp.log(8 * mp.exp(-length) * (1 - 2 * mp.exp(-length / 2))) if length > 3 else mp.log(mpf("0.84"))
    with mp.workdps(70):  # s^2 is 1e-16 at L = 20, and the parameter 1 - s^2/4 has to keep it
        s = mp.exp(newton(lambda log_slope: [row(log_slope)], (start,))[0])
    return +s, mp.sqrt(s * s + 2 * (mp.cosh(length) - 1))


def troesch_by_series(length: Any, slope: Any) -> Any:
    """u(1) of Troesch's problem from u'(0), by Taylor series: a second way, which shows the first to be the right solution."""

    def field(_: Series, u: Series, v: Series) -> list[Series]:
        return [v, sinh(u * length) * length]

    return advance(field, 0, (mpf(0), mpf(slope)), 1)[0]


Function = Callable[[Any], Any]

# Starts (eps, y(0)) from a scan in double precision.
PITCHFORK_GUESSES = (("0.4689", "0.88"), ("0.2347", "-0.29"))
TURNING_GUESSES = (("0.2852", "-1.01"), ("0.1719", "1.312"))


def layer_residuals(eps: Any, x: Any) -> dict[str, Any]:
    """What each recorded exact solution leaves of its equation at one place, with derivatives by mpmath."""
    eps, x = mpf(eps), mpf(x)
    root = mp.sqrt(eps)
    cos, sin, pi = mp.cos, mp.sin, mp.pi

    def residual(y: Function, a: Any, b: Any, c: Any, f: Any = 0) -> Any:
        terms = [a * mp.diff(y, x, 2), b * mp.diff(y, x), c * y(x), -f]
        return mp.fsum(terms) / max(*(abs(term) for term in terms), mpf(1))

    wave, swing = cos(pi * x), sin(pi * x)
    far = mp.erf(1 / mp.sqrt(2 * eps))
    return {
        "layer at the left end": residual(lambda t: (mp.exp(-t / root) - mp.exp((t - 2) / root)) / (1 - mp.exp(-2 / root)), eps, 0, -1),
        "convection to the right": residual(lambda t: (1 - mp.exp((t - 1) / eps)) / (1 - mp.exp(-1 / eps)), eps, -1, 0),
        "smooth solution of a convective equation": residual(
            lambda t: cos(pi * t), eps, 2 + wave, -1, -(1 + eps * pi**2) * wave - (2 + wave) * pi * swing
        ),
        "interior layer where the convection turns": residual(
            lambda t: cos(pi * t) + mp.erf(t / mp.sqrt(2 * eps)) / far, eps, x, 0, -eps * pi**2 * wave - pi * x * swing
        ),
        "peak at the middle": residual(lambda t: 1 / (eps + t * t), eps + x * x, 4 * x, 2),
        "steep middle": residual(lambda t: t / mp.sqrt(eps + t * t), 1, 0, 3 * eps / (eps + x * x) ** 2),
        "layers at both ends": residual(
            lambda t: cos(pi * t) + mp.exp((t - 1) / root) + mp.exp(-(t + 1) / root), eps, 0, -1, -(1 + eps * pi**2) * wave
        ),
    }


def values() -> dict[str, Any]:
    """Everything recorded about layers but the linear ones, which have no numbers."""
    beta, curvature = layer_turning_point()
    found = {"boundary layer, turning point, beta": beta, "boundary layer, turning point, f''(0)": curvature}
    for name, value, guess in (("0", mpf(0), "0.47"), ("1/2", mpf(1) / 2, "0.9277"), ("1", mpf(1), "1.2326")):
        found[f"boundary layer, beta {name}, f''(0)"] = newton(lambda c, value=value: [wall_layer(value, c)], (guess,))[0]
    for number, eps in enumerate(rotated_points(2, PITCHFORK_GUESSES), start=1):
        found[f"rotated layer, pitchfork {number}, eps"] = eps
    for number, eps in enumerate(rotated_points(1, TURNING_GUESSES), start=1):
        found[f"rotated layer, turning point {number}, eps"] = eps
    for length in (1, 5, 10, 20):
        found[f"Troesch, L {length}, u'(0)"], found[f"Troesch, L {length}, u'(1)"] = troesch(length)
    return found
