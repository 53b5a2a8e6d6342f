"""The observed order of states against exact solutions: every scheme, geometry and kind of end that it serves."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from itertools import pairwise

import numpy as np
import numpy.typing as npt
import pytest

import bvp
from bvp.grid import Grid
from bvp.problem import Problem

Array = npt.NDArray[np.float64]
Exact = Callable[[Array], Array]


def smooth(geometry: str, x: tuple[float, float], ends: list[str]) -> tuple[Problem, Exact]:
    """laplacian(u) - u^3 = (4 r^2 - 2 - 2 s) exp(-r^2) - exp(-3 r^2), solved by u = exp(-r^2), which is even at an axis."""
    exponent = {"slab": 0, "cylinder": 1, "sphere": 2}[geometry]
    text = f"laplacian(u) - u^3 = (4*x^2 - {2 + 2 * exponent})*exp(-x^2) - exp(-3*x^2)"
    return Problem(text, "u", x, ends, {"p": 0.0}, geometry=geometry, initial_guess={"u": "1 - 0.6*x"}), lambda r: np.exp(-r * r)


FIXED, COOLED, INSULATED = "u(1) = exp(-1)", "u'(1) + 3*u(1) = exp(-1)", "u'(1) = -2*exp(-1)"
PROBLEMS = {
    "slab, fixed": smooth("slab", (0, 1), ["u(0) = 1", FIXED]),
    "slab, cooled": smooth("slab", (0, 1), ["u(0) = 1", COOLED]),
    "slab, slopes at both ends": smooth("slab", (0, 1), ["u'(0) = 0", INSULATED]),
    "cylinder, axis, fixed": smooth("cylinder", (0, 1), [FIXED]),
    "cylinder, axis, cooled": smooth("cylinder", (0, 1), [COOLED]),
    "sphere, axis, fixed": smooth("sphere", (0, 1), [FIXED]),
    "sphere, axis, cooled": smooth("sphere", (0, 1), [COOLED]),
    "annulus, fixed": smooth("cylinder", (0.5, 1), ["u(0.5) = exp(-0.25)", FIXED]),
    "shell, cooled": smooth("sphere", (0.5, 1), ["u(0.5) = exp(-0.25)", COOLED]),
}


def orders(problem: Problem, exact: Exact, scheme: str, maps: Callable[[Array], Array] | None = None) -> list[float]:
    """log2 of successive errors at the nodes, on 40, 80, 160 intervals."""
    errors = []
    for intervals in (40, 80, 160):
        state = bvp.solve(problem, {"p": 0.0}, intervals=intervals, scheme=scheme, grid=Grid(intervals, maps), compiled=False)
        assert state.ok
        errors.append(float(np.max(np.abs(state.u - exact(state.x)))))
    return [float(np.log2(a / b)) for a, b in pairwise(errors)]


@pytest.mark.parametrize("name", PROBLEMS)
@pytest.mark.parametrize(
    ("scheme", "order", "within"),
    [("central", 2, 0.05), ("shell-balance", 2, 0.05), ("log-cosh", 2, 0.05), ("compact", 4, 0.1)],
)
def test_order_of_states(name: str, scheme: str, order: int, within: float) -> None:
    problem, exact = PROBLEMS[name]
    assert orders(problem, exact, scheme)[-1] == pytest.approx(order, abs=within)


@pytest.mark.parametrize("name", PROBLEMS)
def test_order_of_radial_exact(name: str) -> None:
    """At an axis its error is h^2 ln(1/h): log2 of the errors' ratio is 2 - log2(ln 160/ln 80) = 1.79 there, on these grids."""
    problem, exact = PROBLEMS[name]
    expected = 2.0 - float(np.log2(np.log(160) / np.log(80))) if "axis" in name else 2.0
    assert orders(problem, exact, "radial-exact")[-1] == pytest.approx(expected, abs=0.1)


@pytest.mark.parametrize("name", [name for name in PROBLEMS if "cylinder" not in name])
def test_order_of_fitted(name: str) -> None:
    """At an axis the drift s/r, frozen from node to node, leaves logarithms beside h^2 as well."""
    problem, exact = PROBLEMS[name]
    found = orders(problem, exact, "fitted")[-1]
    assert 1.6 < found < 2.05 if "axis" in name else found == pytest.approx(2.0, abs=0.05)


@pytest.mark.parametrize("scheme", ["central", "shell-balance", "radial-exact"])
@pytest.mark.parametrize("name", ["slab, cooled", "annulus, fixed", "shell, cooled"])
def test_order_on_a_smooth_map(name: str, scheme: str) -> None:
    problem, exact = PROBLEMS[name]
    graded = orders(problem, exact, scheme, lambda s: np.sinh(2.0 * s) / np.sinh(2.0))
    assert graded[-1] == pytest.approx(2.0, abs=0.05)


@pytest.mark.parametrize("name", ["slab, fixed", "cylinder, axis, fixed", "sphere, axis, cooled", "shell, cooled"])
def test_order_of_compact_on_a_smooth_map(name: str) -> None:
    problem, exact = PROBLEMS[name]
    graded = orders(problem, exact, "compact", lambda s: np.sinh(1.5 * s) / np.sinh(1.5))
    assert graded[-1] == pytest.approx(4.0, abs=0.15)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("u'' + 50*u' - u = -4*cos(2*x) - 100*sin(2*x) - cos(2*x)", {"central": 2.0, "upwind": 1.0, "fitted": 2.0}),
        ("((1 + 0.5*u)*u')' = -4*cos(2*x) - 2*cos(2*x)^2 + 2*sin(2*x)^2", {"central": 2.0, "shell-balance": 2.0}),
        ("((1 + x)*u')' + 40*u' = -4*(1 + x)*cos(2*x) - 82*sin(2*x)", {"central": 2.0, "upwind": 1.0}),
    ],
)
def test_order_with_flows_and_conductivities(text: str, expected: Mapping[str, float]) -> None:
    problem = Problem(text, "u", (0, 1), ["u(0) = 1", "u(1) = cos(2)"], {"p": 0.0}, initial_guess={"u": "1 - 1.4*x"})
    for scheme, order in expected.items():
        assert orders(problem, lambda x: np.cos(2.0 * x), scheme)[-1] == pytest.approx(order, abs=0.15), scheme
