"""Layers as solve problems: linear problems with exact solutions (Cash's set: Mazzia & Cash 2015, AIP Conf. Proc. 1648:020009, read)."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import numpy.typing as npt
import pytest
from scipy.special import erf

import bvp
import continuation
from bvp.grid import Grid
from bvp.problem import Problem
from bvp.state import State

Array = npt.NDArray[np.float64]
pi = np.pi


def decay(eps: float) -> tuple[Problem, Callable[[Array], Array]]:
    """eps y'' = y, y(0) = 1, y(1) = 0."""
    problem = Problem("eps*y'' = y", "y", (0, 1), ["y(0) = 1", "y(1) = 0"], {"eps": eps})
    root = np.sqrt(eps)
    return problem, lambda x: (np.exp(-x / root) - np.exp((x - 2) / root)) / (1 - np.exp(-2 / root))


def outflow(eps: float) -> tuple[Problem, Callable[[Array], Array]]:
    """eps y'' = y', y(0) = 1, y(1) = 0."""
    problem = Problem("eps*y'' = y'", "y", (0, 1), ["y(0) = 1", "y(1) = 0"], {"eps": eps})
    return problem, lambda x: (1 - np.exp((x - 1) / eps)) / (1 - np.exp(-1 / eps))


def shock(eps: float) -> tuple[Problem, Callable[[Array], Array]]:
    """eps y'' + x y' = -eps pi^2 cos pi x - pi x sin pi x, y(-1) = -2, y(1) = 0."""
    text = "eps*y'' + x*y' = -eps*pi^2*cos(pi*x) - pi*x*sin(pi*x)"
    problem = Problem(text, "y", (-1, 1), ["y(-1) = -2", "y(1) = 0"], {"eps": eps})
    return problem, lambda x: np.cos(pi * x) + erf(x / np.sqrt(2 * eps)) / erf(1 / np.sqrt(2 * eps))


def corner(eps: float) -> tuple[Problem, Callable[[Array], Array]]:
    """y'' = -3 eps y/(eps + x^2)^2, y = x/sqrt(eps + x^2) at both ends of [-0.1, 0.1]."""
    ends = ["y(-0.1) = -0.1/sqrt(eps + 0.01)", "y(0.1) = 0.1/sqrt(eps + 0.01)"]
    problem = Problem("y'' = -3*eps*y/(eps + x^2)^2", "y", (-0.1, 0.1), ends, {"eps": eps})
    return problem, lambda x: x / np.sqrt(eps + x * x)


def error_of(state: State, exact: Callable[[Array], Array]) -> float:
    """The largest error on the whole interval: at the nodes, and half way between them by the state's interpolant."""
    between = 0.5 * (state.x[1:] + state.x[:-1])
    return max(float(np.max(np.abs(state.u - exact(state.x)))), float(np.max(np.abs(state(between) - exact(between)))))


CASES = [(made, eps) for made in (decay, outflow) for eps in (1e-2, 1e-4, 1e-6)] + [(shock, 1e-2), (corner, 1e-2), (corner, 1e-4)]


@pytest.mark.parametrize(("made", "eps"), CASES)
def test_layers_on_four_hundred_intervals(made: Callable[[float], tuple[Problem, Callable[[Array], Array]]], eps: float) -> None:
    problem, exact = made(eps)
    state = bvp.solve(problem, {"eps": eps}, intervals=400, grid="adaptive", extrapolate=True, compiled=False)
    assert state.ok
    assert state.intervals <= 400
    assert error_of(state, exact) < 1e-6
    assert state.error is not None
    assert float(np.max(np.abs(state.u - exact(state.x)))) <= state.error


def test_uniform_grid_beside_it_is_lost() -> None:
    problem, exact = outflow(1e-4)
    state = bvp.solve(problem, {"eps": 1e-4}, intervals=400, compiled=False)
    assert error_of(state, exact) > 0.1


@pytest.mark.parametrize("scheme", ["fitted", "upwind"])
@pytest.mark.parametrize("intervals", [10, 40, 160])
@pytest.mark.parametrize("eps", [1e-1, 1e-3, 1e-6])
def test_fitted_and_upwind_have_no_wiggles(scheme: str, intervals: int, eps: float) -> None:
    problem, exact = outflow(eps)
    state = bvp.solve(problem, {"eps": eps}, intervals=intervals, scheme=scheme, compiled=False)
    assert state.ok
    assert np.all(np.diff(state.u) <= 1e-12)  # the exact solution falls from 1 to 0
    if scheme == "fitted":  # exact at the nodes where the coefficients are constant (Il'in 1969; Allen & Southwell 1955, from memory)
        assert np.max(np.abs(state.u - exact(state.x))) < 1e-11


@pytest.mark.parametrize("eps", [1e-1, 1e-3, 1e-6])
def test_fitted_is_exact_for_a_constant_flow_on_any_map(eps: float) -> None:
    """Each step has the weight of the exponential itself (Il'in 1969; Scharfetter & Gummel 1969, from memory)."""
    problem, exact = outflow(eps)
    for placed in (lambda s: s * (2 - s), lambda s: np.sinh(2 * s) / np.sinh(2), lambda s: s + 0.1 * np.sin(2 * pi * s)):
        state = bvp.solve(problem, {"eps": eps}, scheme="fitted", grid=Grid(37, placed), compiled=False)
        assert state.ok
        assert np.max(np.abs(state.u - exact(state.x))) < 1e-11


# 20-digit table, recomputed; a perturbation table of 2012 is wrong from the fifth digit.
TROESCH = {
    1: (0.84520268530995106, 1.3418378623684904),
    5: (0.0457504614063187401, 12.100495450777814),
    10: (3.5833778463081369e-4, 148.40642115601013),
    20: (1.6487731827804036e-8, 22026.465749406787),
}


@pytest.mark.parametrize("steepness", [1, 5, 10, 20])
def test_troesch(steepness: int) -> None:
    problem = Problem("u'' = L*sinh(L*u)", "u", (0, 1), ["u(0) = 0", "u(1) = 1"], {"L": 1.0}, initial_guess={"u": "x"})
    found = continuation.states_at(problem, at={"L": float(steepness)}, measure=["u'(0)", "u'(1)"], digits=9, compiled=False)
    (state,) = found.states
    for measure, truth in zip(("u'(0)", "u'(1)"), TROESCH[steepness], strict=True):
        uncertainty = state.uncertainty[measure]
        assert uncertainty is not None
        assert abs(state.measures[measure] - truth) <= uncertainty + 1e-14 * truth
    assert state.measures["u'(0)"] == pytest.approx(TROESCH[steepness][0], rel=1e-8)


def test_an_interior_layer_that_moves_is_followed() -> None:
    """eps u'' + u u' - u = 0 with u(0) = a, u(1) = 3/2: the layer stands at (-a - 1/2)/2 up to O(eps) (Lagerstrom & Cole, from memory)."""
    guess = "x - 0.25 + 0.75*(x - 0.25)/sqrt((x - 0.25)^2 + 0.0004)"
    problem = Problem(
        "eps*u'' + u*u' - u = 0", "u", (0, 1), ["u(0) = a", "u(1) = 1.5"], {"a": -1.0, "eps": 2e-3}, initial_guess={"u": guess}
    )
    branch = continuation.trace(problem, along="a", within=(-1.0, -0.7), compiled=False)
    assert branch.ended == "edge of the range"
    assert not branch.turning_points
    for state in branch.states.values():
        slopes = np.diff(state.u) / np.diff(state.x)
        assert state.x[int(np.argmax(slopes))] == pytest.approx((-state.parameters["a"] - 0.5) / 2, abs=5e-3)
        assert np.min(np.diff(state.x)) < 5e-4
