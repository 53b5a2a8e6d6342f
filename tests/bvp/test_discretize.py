"""Derivatives of the rows against differences of the residual, both routes against each other, and ends that move."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise
from typing import Any

import numpy as np
import numpy.typing as npt
import pytest

import bvp
from bvp.discrete_system import DiscreteSystem
from bvp.discretize import Discretization, discretization
from bvp.grid import Grid
from bvp.problem import Problem
from tests import naive

Array = npt.NDArray[Any]

EXPONENTIAL = "laplacian(u) + lam*exp(u/(1 + eps*u)) = 0"
COOLED = ["u'(0) = 0.3*u(0)", "u'(1) + Bi*u(1)^2 = lam"]
PARAMETERS = {"lam": 0.8, "eps": 0.2, "Bi": 3.0}
PROBLEMS = {
    "slab": Problem(EXPONENTIAL, "u", (0, 1), COOLED, PARAMETERS),
    "cylinder": Problem(EXPONENTIAL, "u", (0, 1), [COOLED[1]], PARAMETERS, geometry="cylinder"),
    "sphere": Problem(EXPONENTIAL, "u", (0, 1), [COOLED[1]], PARAMETERS, geometry="sphere"),
    "fixed": Problem(EXPONENTIAL, "u", (0, 1), ["u(0) = lam", "u(1)^3 = Bi"], PARAMETERS),
}
FLUXES = {
    "flux": Problem("((1 + eps*u^2)*u')' + lam*exp(u) = Bi*x*u'", "u", (0, 1), COOLED, PARAMETERS),
    "stretched": Problem("u'' + eps*u'^2 + lam*u = 0", "u", (0, "2 + Bi"), ["u(0) = 1", "u'(2 + Bi) = lam"], PARAMETERS),
    "between": Problem("laplacian(u) + lam*u^2 = 0", "u", ("eps", "1 + lam"), ["u(eps) = 1", "u(1 + lam) = Bi"], PARAMETERS),
}
CASES = [
    *[(name, scheme) for name in PROBLEMS for scheme in ("central", "shell-balance", "radial-exact", "fitted", "log-cosh", "compact")],
    *[(name, scheme) for name in FLUXES for scheme in ("central", "upwind")],
    ("stretched", "log-cosh"),
    ("between", "compact"),
]


def system_of(name: str, scheme: str, along: str = "lam", intervals: int = 7, maps: Callable[[Array], Array] | None = None) -> Any:
    problem = {**PROBLEMS, **FLUXES}[name]
    return Discretization(problem, scheme, along, uniform=maps is None, compiled=False).on(Grid(intervals, maps))


def profile(size: int) -> Array:
    """A smooth profile with ghosts, away from special values."""
    return 0.4 + 0.3 * np.cos(np.linspace(-0.1, 1.3, size))


def difference(of: Callable[[float], Array], at: float) -> Array:
    """The derivative by central differences, extrapolated twice: good to about ten digits."""
    column = [(of(at + step) - of(at - step)) / (2 * step) for step in (4e-2, 2e-2, 1e-2)]
    for power in (4, 16):
        column = [(power * fine - coarse) / (power - 1) for coarse, fine in pairwise(column)]
    return np.asarray(column[0])


@pytest.mark.parametrize(("name", "scheme"), CASES)
def test_derivatives_by_nodal_values(name: str, scheme: str) -> None:
    system = system_of(name, scheme)
    u = profile(system.size)
    lam = PARAMETERS["lam"]
    stored = system.stored_rows(u, lam).copy()
    matrix = np.zeros((system.size, system.size))
    for column in range(system.size):

        def shifted(value: float, column: int = column) -> Array:
            moved = u.copy()
            moved[column] = value
            return np.array(system.stored_rows(moved, lam)[0])

        matrix[:, column] = difference(shifted, u[column])
    scale = np.max(np.abs(matrix))
    for row in system.band.rows:
        middle = min(max(row, 1), system.size - 2)  # a condition is a row of the end node
        for offset in (-1, 0, 1):
            assert abs(stored[2 + offset, row] - matrix[row, middle + offset]) < 1e-8 * scale
            matrix[row, middle + offset] = 0.0
    assert np.max(np.abs(matrix[system.band.rows])) == 0.0  # and no others


@pytest.mark.parametrize("along", ["lam", "eps", "Bi"])
@pytest.mark.parametrize(("name", "scheme"), CASES)
def test_derivatives_by_parameters(name: str, scheme: str, along: str) -> None:
    """Lengths among them: in "stretched" and "between" an end is a formula of parameters."""
    problem = {**PROBLEMS, **FLUXES}[name]
    traced = system_of(name, scheme, along)
    u = profile(traced.size)
    used = traced.band.rows

    def residual(value: float) -> Array:  # a fresh system on a problem whose parameter has another value
        moved = problem.with_parameters({along: value})
        other = Discretization(moved, scheme, "lam", compiled=False).on(Grid(7))
        return np.array(other.stored_rows(u, moved.parameters["lam"])[0, used])

    expected = difference(residual, PARAMETERS[along])
    scale = max(float(np.max(np.abs(expected))), 1.0)
    assert np.max(np.abs(traced.stored_rows(u, PARAMETERS[along])[4, used] - expected)) < 1e-8 * scale
    by_name = system_of(name, scheme, "lam").slopes_by(along, u, PARAMETERS["lam"])[used]
    assert np.max(np.abs(by_name - expected)) < 1e-8 * scale


@pytest.mark.parametrize("scheme", ["central", "shell-balance", "radial-exact", "compact"])
def test_derivatives_on_a_map(scheme: str) -> None:
    system = system_of("cylinder", scheme, maps=lambda s: np.sinh(1.5 * s) / np.sinh(1.5))
    u = profile(system.size)
    stored = system.stored_rows(u, 0.8).copy()
    for row in range(2, system.size - 2):
        for offset in (-1, 0, 1):

            def shifted(value: float, row: int = row, offset: int = offset) -> Array:
                moved = u.copy()
                moved[row + offset] = value
                return np.array(system.stored_rows(moved, 0.8)[0, row])

            assert stored[2 + offset, row] == pytest.approx(float(difference(shifted, u[row + offset])), rel=1e-8, abs=1e-7)


def test_jacobian_of_the_central_scheme_is_the_dense_twin_s() -> None:
    problem = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u(1) = 0"], {"lam": 1.3}, geometry="sphere")
    system = Discretization(problem, "central", "lam", compiled=False).on(Grid(9))
    u = profile(12)
    twin = naive.NaiveProblem(
        lambda x, u, lam: lam * np.exp(u), lambda x, u, lam: lam * np.exp(u), left_end=naive.Cooled(), right_end=naive.Fixed(), exponent=2
    )
    matrix = naive.jacobian(twin, u[1:-1], 1.3)
    stored = system.stored_rows(u, 1.3)
    for node in range(1, 9):
        assert stored[1:4, node + 1] == pytest.approx(matrix[node, node - 1 : node + 2], rel=1e-12)
    assert stored[2:4, 1] == pytest.approx(matrix[0, :2], rel=1e-12)


def dense(system: DiscreteSystem, u: Array, parameter: float, direction: Array, factor: float, corner: float) -> tuple[Array, Array]:
    """The bordered matrix with all ghosts in it and the residual: unknown nodal values only where a row or neighbour has them."""
    stored = system.stored_rows(u, parameter)
    used, n = system.band.rows, system.size
    columns = system.band.columns
    matrix = np.zeros((len(used) + 1, n + 1))
    for index, row in enumerate(used):
        middle = min(max(int(row), 1), n - 2)
        matrix[index, middle - 1 : middle + 2] = stored[1:4, row]
        matrix[index, -1] = stored[4, row]
    matrix[-1, :-1] = factor * direction
    matrix[-1, -1] = corner
    keep = np.append(np.arange(n)[columns], n)
    return matrix[:, keep], stored[0, used].copy()


def bent(s: Array) -> Array:
    """A map that draws nodes to the left."""
    return np.asarray(np.sinh(1.5 * s) / np.sinh(1.5))


@pytest.mark.parametrize(
    ("name", "compiled", "maps"), [*[(name, False, maps) for name in PROBLEMS for maps in (None, bent)], ("slab", True, None)]
)
def test_correction_and_tangent_against_a_dense_solve(name: str, compiled: bool, maps: Any) -> None:
    """[J q; w' c] [du; dp] = -[F; g], and the tangent with [0; 1] on the right; by both routes."""
    of = discretization(PROBLEMS[name], "central", "lam", uniform=maps is None, compiled=compiled)
    system = of.on(Grid(12, maps))
    u = profile(system.size)
    direction = np.zeros(system.size)
    direction[1:-1] = np.cos(np.arange(system.size - 2))
    info = system.sweep(u, 0.8, direction, 0.3, 0.7, 0.25)
    plain = system_of(name, "central", intervals=12, maps=maps)
    matrix, residual = dense(plain, u, 0.8, direction, 0.3, 0.7)
    correction = np.linalg.solve(matrix, -np.append(residual, 0.25))
    tangent = np.linalg.solve(matrix, np.append(np.zeros(len(residual)), 1.0))
    columns = plain.band.columns
    assert np.max(np.abs(system.step[columns] - correction[:-1])[1:-1]) < 1e-11 * np.max(np.abs(correction))
    assert info[0] == pytest.approx(correction[-1], rel=1e-10)
    assert np.max(np.abs(system.tangent[columns] - tangent[:-1])[1:-1]) < 1e-11 * np.max(np.abs(tangent))
    assert info[1] == pytest.approx(tangent[-1], rel=1e-10)


@pytest.mark.parametrize(("name", "scheme"), [("slab", "central"), ("sphere", "compact")])
def test_both_routes_fill_the_same_rows(name: str, scheme: str) -> None:
    generated = discretization(PROBLEMS[name], scheme, "lam", compiled=True).on(Grid(30))
    plain = system_of(name, scheme, intervals=30)
    u = profile(plain.size)
    one, other = generated.stored_rows(u, 0.8), plain.stored_rows(u, 0.8)
    used = plain.band.rows
    assert np.max(np.abs(one[:, used] - other[:, used])) < 1e-12 * np.max(np.abs(other[:, used]))


@pytest.mark.parametrize("geometry", ["slab", "cylinder", "sphere"])
@pytest.mark.parametrize("scheme", ["central", "shell-balance", "compact"])
def test_a_length_that_is_a_parameter_is_the_length_itself(scheme: str, geometry: str) -> None:
    ends = ["u'(0) = 0"] if geometry == "slab" else []
    moving = Problem("laplacian(u) + exp(u) = 0", "u", (0, "L/2"), [*ends, "u(L/2) = 0"], {"L": 1.6}, geometry=geometry)
    fixed = Problem("laplacian(u) + exp(u) = 0", "u", (0, 0.8), [*ends, "u(0.8) = 0"], geometry=geometry)
    one, other = (bvp.solve(problem, scheme=scheme, intervals=24, compiled=False) for problem in (moving, fixed))
    assert one.ok
    assert np.max(np.abs(one.x - other.x)) < 1e-15
    assert np.max(np.abs(one.u - other.u)) < 1e-13


@pytest.mark.parametrize("intervals", [4, 5, 9])
@pytest.mark.parametrize("flow", [2.0, -2.0, 0.0])
def test_a_diagonal_that_all_but_vanishes_is_a_weak_pivot_too(flow: float, intervals: int) -> None:
    """u'' + b u' + q u = 1 with q h^2 = 2 + 1e-10 and b h = 2, 0 or -2: no elimination has lost anything, yet the pivot is 1e-10."""
    q = (2.0 + 1e-10) * intervals**2
    problem = Problem("u'' + b*u' + q*u = 1", "u", (0, 1), ["u(0) = 1", "u'(1) = 0.5"], {"q": q, "b": flow * intervals})
    system = Discretization(problem, "central", "q", compiled=False).on(Grid(intervals))
    u = profile(system.size)
    direction = np.zeros(system.size)
    direction[1:-1] = np.cos(np.arange(system.size - 2))
    system.sweep(u, q, direction, 1.0, 0.3, 0.1)
    matrix, residual = dense(system, u, q, direction, 1.0, 0.3)
    for found, right in ((system.step, -np.append(residual, 0.1)), (system.tangent, np.append(np.zeros(len(residual)), 1.0))):
        expected = np.linalg.solve(matrix, right)[:-1]
        assert np.max(np.abs(found[system.band.columns] - expected)[:-1]) < 1e-9 * np.max(np.abs(expected))
