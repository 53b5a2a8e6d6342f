"""One state by damped Newton: residuals recomputed, edges of domains, weak pivots, stability, units; failures that are told."""

from __future__ import annotations

import numpy as np
import pytest

import bvp
from bvp.problem import Problem

FIXED = ["u(0) = 0", "u(1) = 0"]


def test_residual_written_out_and_closed_form() -> None:
    """u = -2 ln(cosh(t (x - 1/2)/2)/cosh(t/4)), t = sqrt(2 lam) cosh(t/4): the exponential source between held faces."""
    problem = Problem("u'' + lam*exp(u) = 0", "u", (0, 1), FIXED, {"lam": 2.0})
    state = bvp.solve(problem, intervals=400, compiled=False)
    assert state.ok
    assert np.max(np.abs(np.diff(state.u, 2) * 400**2 + 2.0 * np.exp(state.u[1:-1]))) < 1e-8  # strong form: 1e-16 N^2 u
    assert state.residual < 1e-15
    t = 2.357551053877401
    assert t == pytest.approx(2.0 * np.cosh(t / 4), rel=1e-12)
    exact = -2.0 * np.log(np.cosh(t * (state.x - 0.5) / 2) / np.cosh(t / 4))
    assert np.max(np.abs(state.u - exact)) < 2e-6
    assert state(0.5) == pytest.approx(0.3289524213411136, abs=2e-6)
    assert state.unstable_directions == 0


@pytest.mark.parametrize(
    ("text", "guess"),
    [
        ("u'' + 0.3/(1 - u)^2 = 0", "0.7*4*x*(1 - x)"),  # one step would carry it past the plate
        ("u'' + log(2 + u) = 0", "-1.9*4*x*(1 - x)"),
        ("u'' + sqrt(1 + u) = 0", "-0.99*4*x*(1 - x)"),
        ("u'' + 0.5*exp(u/(1 + 0.2*u)) = 0", "-3*4*x*(1 - x)"),  # the pole is at -5
    ],
)
def test_edges_of_domains_shorten_the_step(text: str, guess: str) -> None:
    problem = Problem(text, "u", (0, 1), FIXED, initial_guess={"u": guess})
    state = bvp.solve(problem, intervals=60, compiled=False)
    assert state.ok, state.reason
    assert np.all(np.isfinite(state.u))
    assert state.residual < 1e-14


@pytest.mark.parametrize("intervals", [4, 9, 30])
@pytest.mark.parametrize("multiple", [2.0, 1.0, 3.0])
def test_weak_pivots_against_a_dense_solve(intervals: int, multiple: float) -> None:
    """u'' + q u = 1 with q h^2 = 2: every second leading minor of the matrix is zero; 1 and 3 lie beside it."""
    q = multiple * intervals**2
    problem = Problem("u'' + q*u = 1", "u", (0, 1), ["u(0) = 0.5", "u(1) = -0.25"], {"q": q})
    size = intervals - 1
    matrix = (np.diag(np.full(size, -2.0 + multiple)) + np.diag(np.ones(size - 1), 1) + np.diag(np.ones(size - 1), -1)) * intervals**2
    right = np.ones(size)
    right[0] -= 0.5 * intervals**2
    right[-1] += 0.25 * intervals**2
    if np.linalg.cond(matrix) > 1e10:
        matrix = matrix[:0]  # a singular problem has no state to compare with
    state = bvp.solve(problem, intervals=intervals, compiled=False)
    if matrix.size:
        assert state.ok, state.reason
        assert np.max(np.abs(state.u[1:-1] - np.linalg.solve(matrix, right))) < 1e-11
    else:
        assert not state.ok


@pytest.mark.parametrize(("guess", "count"), [("0", 0), ("4*sin(pi*x)", 1)])
def test_unstable_directions_are_the_positive_eigenvalues(guess: str, count: int) -> None:
    problem = Problem("u'' + lam*exp(u) = 0", "u", (0, 1), FIXED, {"lam": 1.0}, initial_guess={"u": guess})
    state = bvp.solve(problem, intervals=40, compiled=False)
    assert state.ok
    size = 39
    matrix = (np.diag(np.full(size, -2.0)) + np.diag(np.ones(size - 1), 1) + np.diag(np.ones(size - 1), -1)) * 1600
    eigenvalues = np.linalg.eigvalsh(matrix + np.diag(np.exp(state.u[1:-1])))
    assert np.count_nonzero(eigenvalues > 0) == state.unstable_directions == count


def test_no_state_is_told_not_raised() -> None:
    problem = Problem("u'' + lam*exp(u) = 0", "u", (0, 1), FIXED, {"lam": 8.0})
    state = bvp.solve(problem, intervals=100, compiled=False)
    assert not state.ok
    assert "correction" in state.reason or "finite" in state.reason


def test_physical_units_give_the_dimensionless_state() -> None:
    """k T'' + q exp(-E/(R T)) = 0 over 1 mm at 300 K with a rate of 1e12: the same curve as in units of its own."""
    physical = Problem(
        "k*T'' + Q*A*exp(-E/(R*T)) = 0",
        "T",
        (0, 1e-3),
        ["T(0) = T0", "T(0.001) = T0"],
        {"k": 0.2, "Q": 1e11, "A": 1e12, "E": 1.0e5, "R": 8.314462618, "T0": 300.0},
        initial_guess={"T": "T0"},
    )
    warm = bvp.solve(physical, intervals=80, compiled=False)
    p = physical.parameters
    bare = Problem(
        "v'' + s*exp(-g/v) = 0",
        "v",
        (0, 1),
        ["v(0) = 1", "v(1) = 1"],
        {"s": p["Q"] * p["A"] * 1e-6 / (p["k"] * 300.0), "g": p["E"] / (p["R"] * 300.0)},
        initial_guess={"v": "1"},
    )
    scaled = bvp.solve(bare, intervals=80, compiled=False)
    assert warm.ok
    assert scaled.ok
    assert float(np.ptp(scaled.u)) > 1e-5  # it is heated at all
    assert np.max(np.abs(warm.u / 300.0 - scaled.u)) < 1e-12


def test_guesses_may_be_arrays_and_states() -> None:
    problem = Problem("u'' + lam*exp(u) = 0", "u", (0, 1), FIXED, {"lam": 1.0})
    upper = bvp.solve(problem, intervals=40, guess=4.0 * np.sin(np.pi * np.linspace(-1 / 40, 1 + 1 / 40, 43)), compiled=False)
    again = bvp.solve(problem, {"lam": 1.1}, intervals=40, guess=upper, compiled=False)
    assert upper.ok
    assert again.ok
    assert again.measure("max(u)") < upper.measure("max(u)")  # the upper state comes down as lam goes up
