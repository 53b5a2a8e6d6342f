"""Branches far beyond what a uniform grid shows, held against shooting in the logarithm of the radius (scipy's DOP853).

With y(rho) the solution from the axis outward, every state of these problems is a piece of that one curve: the parameter
is a function of where the piece ends, and the turning points are its extrema.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq, minimize_scalar

import continuation
from bvp.problem import Problem

START = 1e-3  # of rho, where the series about the axis has 16 digits in its first terms


def outward(right: Callable[[float, np.ndarray], list[float]], first: list[float], last: float) -> Callable[[float], np.ndarray]:
    """The curve over t = ln rho."""
    found = solve_ivp(right, (np.log(START), last), first, method="DOP853", rtol=1e-13, atol=1e-18, dense_output=True)
    return lambda t: np.asarray(found.sol(t))


def extrema(slope: Callable[[float], float], begin: float, end: float, count: int) -> list[float]:
    """The first zeros of a slope over t."""
    grid = np.linspace(begin, end, 4000)
    values = [slope(t) for t in grid]
    found = [brentq(slope, a, b, xtol=1e-14) for a, b, va, vb in zip(grid, grid[1:], values, values[1:], strict=False) if va * vb < 0]
    assert len(found) >= count
    return found[:count]


def exponential(last: float) -> Callable[[float], np.ndarray]:
    """y'' + 2 y'/rho + e^y = 0, y(0) = y'(0) = 0, as (y, dy/dt); the series is that of Emden (Chandrasekhar 1939, ch. IV, from memory)."""
    r2 = START**2
    first = [-r2 / 6 + r2**2 / 120, -r2 / 3 + r2**2 / 30]
    return outward(lambda t, q: [q[1], -q[1] - np.exp(2 * t + q[0])], first, last)


def test_ten_turning_points_of_the_sphere() -> None:
    curve = exponential(26.0)
    places = extrema(lambda t: 2.0 + float(curve(t)[1]), -2.0, 26.0, 10)
    sphere = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u(1) = 0"], {"lam": 0.0}, geometry="sphere")
    branch = continuation.trace(sphere, along="lam", turning_points_wanted=10, compiled=False)
    assert len(branch.turning_points) == 10
    for point, t in zip(branch.turning_points, places, strict=True):
        truth = float(np.exp(2 * t + curve(t)[0]))
        assert point.uncertainty is not None
        assert abs(point.value - truth) <= point.uncertainty + 1e-11
        assert point.uncertainty <= 1e-8 * truth
        known = point.measure_uncertainty["max(u)"]
        assert known is not None
        assert abs(point.measures["max(u)"] + float(curve(t)[0])) <= known + 1e-11
        assert abs((point.order or 0.0) - 2.0) <= 0.05


def test_cooled_sphere_over_ten_decades() -> None:
    """u(1) = -u'(1)/Bi shifts the whole curve: lam = rho^2 exp(y + rho y'/Bi)."""
    biot = 0.1
    curve = exponential(16.0)

    def slope(t: float) -> float:
        y, v = curve(t)
        return float(2.0 + v + (-v - np.exp(2 * t + y)) / biot)

    places = extrema(slope, -3.0, 16.0, 2)
    sphere = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u'(1) + Bi*u(1) = 0"], {"lam": 0.0, "Bi": biot}, geometry="sphere")
    branch = continuation.trace(sphere, along="lam", turning_points_wanted=2, compiled=False)
    for point, t in zip(branch.turning_points, places, strict=True):
        y, v = curve(t)
        truth = float(np.exp(2 * t + y + v / biot))
        assert point.uncertainty is not None
        assert abs(point.value - truth) <= point.uncertainty + 1e-10 * truth
        assert point.uncertainty <= 1e-8 * truth
    assert branch.turning_points[1].value < 1e-9


def test_four_turning_points_of_the_membrane_disk() -> None:
    """1 - w = y/y(rho) with y'' + y'/rho = y^-2, y(0) = 1: lam = rho^2/y^3 and 1 - w(0) = 1/y."""
    r2 = START**2
    curve = outward(lambda t, q: [q[1], np.exp(2 * t) / q[0] ** 2], [1 + r2 / 4 - r2**2 / 32, r2 / 2 - r2**2 / 8], 14.0)
    places = extrema(lambda t: float(2.0 - 3.0 * curve(t)[1] / curve(t)[0]), -2.0, 14.0, 4)
    disk = Problem("laplacian(w) + lam/(1 - w)^2 = 0", "w", (0, 1), ["w(1) = 0"], {"lam": 0.0}, geometry="cylinder")
    branch = continuation.trace(disk, along="lam", turning_points_wanted=4, compiled=False)
    for point, t in zip(branch.turning_points, places, strict=True):
        truth = float(np.exp(2 * t) / curve(t)[0] ** 3)
        assert point.uncertainty is not None
        assert abs(point.value - truth) <= point.uncertainty + 1e-11
        assert point.uncertainty <= 1e-8
        known = point.measure_uncertainty["max(w)"]
        assert known is not None
        assert known <= 1e-4
        assert abs(1.0 - point.measures["max(w)"] - 1.0 / float(curve(t)[0])) <= known + 1e-12


def test_ignition_to_extinction_over_five_decades() -> None:
    """Arrhenius source at eps = 0.05 in the slab: from u(0) = m down to 0 the curve takes rho, and lam = rho^2."""
    eps = 0.05

    def parameter(middle: float) -> float:
        def arrived(t: float, q: np.ndarray) -> float:
            return float(q[0])

        arrived.terminal = True  # type: ignore[attr-defined]
        scale = np.exp(-0.5 * middle / (1 + eps * middle))  # the curve is as wide as the source is strong
        right = lambda t, q: [q[1], -np.exp(q[0] / (1 + eps * q[0]) - middle / (1 + eps * middle))]  # noqa: E731
        found = solve_ivp(right, (0.0, 1e4), [middle, 0.0], method="DOP853", rtol=1e-13, atol=1e-13, events=arrived)
        return float((found.t_events[0][0] * scale) ** 2)

    ignition = minimize_scalar(lambda m: -np.log(parameter(m)), bounds=(0.5, 4.0), method="bounded", options={"xatol": 1e-7})
    extinction = minimize_scalar(lambda m: np.log(parameter(m)), bounds=(300.0, 600.0), method="bounded", options={"xatol": 1e-5})
    slab = Problem("u'' + lam*exp(u/(1 + eps*u)) = 0", "u", (0, 1), ["u'(0) = 0", "u(1) = 0"], {"lam": 0.0, "eps": eps})
    branch = continuation.trace(slab, along="lam", turning_points_wanted=2, compiled=False)
    for point, truth in zip(branch.turning_points, (np.exp(-ignition.fun), np.exp(extinction.fun)), strict=True):
        assert point.uncertainty is not None
        assert abs(point.value - truth) <= point.uncertainty + 1e-11 * truth
        assert point.uncertainty <= 1e-8 * truth
    assert branch.turning_points[0].value / branch.turning_points[1].value == pytest.approx(1.7e5, rel=0.02)


@pytest.mark.parametrize(
    ("equation", "conditions", "length"),
    [
        ("laplacian(u) + lam/(1 - u)^2 = 0", ["9.488*u(L) + u'(L) = 0"], 0.8294),
        ("div((1.218*x^2 + 1)*(0.2801*u^2 + 0.6563)*grad(u)) + lam/(1 - u)^2 = 0", ["u(L) = 0"], 1.0),
    ],
)
def test_hairpins_narrower_than_a_step_do_not_turn_the_trace_round(equation: str, conditions: list[str], length: float) -> None:
    """The middle of such a membrane goes one way only along the whole branch, however the parameter winds (change of variable as above)."""
    disk = Problem(equation, "u", (0, "L"), conditions, {"lam": 0.0, "L": length}, geometry="cylinder")
    branch = continuation.trace(disk, along="lam", until="max(u) > 0.9995", compiled=False)
    middle = branch.measure("max(u)")
    assert branch.ended == "until"
    assert np.all(np.diff(middle) > 0.0)
    real = [point for point in branch.turning_points if point.survives]
    assert len(real) >= 3
    assert len({round(point.measures["max(u)"], 6) for point in real}) == len(real)  # each once
