"""The count of unstable directions, read off the pivots, against the eigenvalues of the dense matrix, ends and axis eliminated."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest

import bvp
from bvp.discretize import Discretization
from bvp.grid import Grid
from bvp.problem import Problem

Array = npt.NDArray[np.float64]


def evolution(problem: Problem, scheme: str, nodal: Array, parameter: float) -> Array:
    """d(residual)/du at the nodes that evolve: what conditions fix, or a ghost, is written by the others first."""
    system = Discretization(problem, scheme, "q", compiled=False).on(Grid(nodal.size - 3))
    stored, used, size = system.stored_rows(nodal, parameter), system.band.rows, system.size
    matrix = np.zeros((len(used), size))
    for index, row in enumerate(used):
        middle = min(max(int(row), 1), size - 2)  # a condition is a row of the end node
        matrix[index, middle - 1 : middle + 2] = stored[1:4, row]
    matrix = matrix[:, system.band.columns]
    fixing = [index for index, row in enumerate(used) if row in (0, size - 1)]
    moving = [index for index in range(len(used)) if index not in fixing]
    fixed = [0 if used[index] == 0 else matrix.shape[1] - 1 for index in fixing]
    free = [column for column in range(matrix.shape[1]) if column not in fixed]
    carried = np.linalg.solve(matrix[np.ix_(fixing, fixed)], matrix[np.ix_(fixing, free)])
    return np.asarray(matrix[np.ix_(moving, free)] - matrix[np.ix_(moving, fixed)] @ carried)


@pytest.mark.parametrize("end", ["u(1) = 0", "u'(1) + 2*u(1) = 0"])
@pytest.mark.parametrize("geometry", ["slab", "cylinder", "sphere"])
@pytest.mark.parametrize("scheme", ["central", "shell-balance", "radial-exact", "compact", "fitted", "log-cosh"])
def test_counts_are_those_of_the_dense_matrix(scheme: str, geometry: str, end: str) -> None:
    ends = ["u'(0) = 0", end] if geometry == "slab" else [end]
    problem = Problem("laplacian(u) + q*u = 1", "u", (0, 1), ends, {"q": 0.0}, geometry=geometry)
    counts = []
    for q in (0.0, 3.0, 12.0, 40.0, 90.0, 200.0):
        state = bvp.solve(problem, {"q": q}, intervals=24, scheme=scheme, compiled=False)
        assert state.ok, state.reason
        assert state.nodal is not None
        growth = np.linalg.eigvals(evolution(problem, scheme, state.nodal, q)).real
        counts.append(int(np.count_nonzero(growth > 0)))
        assert state.unstable_directions == counts[-1]
    assert counts[0] == 0
    assert counts[-1] >= 4  # all of those counts occur


def test_an_equation_with_its_sign_turned_has_the_same_states_and_counts() -> None:
    for text in ("u'' + q*exp(u) = 0", "-u'' - q*exp(u) = 0", "0 = 5*u'' + 5*q*exp(u)"):
        problem = Problem(text, "u", (0, 1), ["u(0) = 0", "u(1) = 0"], {"q": 1.0}, initial_guess={"u": "16*x*(1 - x)"})
        assert bvp.solve(problem, intervals=30, compiled=False).unstable_directions == 1


def test_no_count_is_given_where_neighbours_couple_with_two_signs() -> None:
    """u'' + 100 u' on 20 intervals: 1/h^2 - 50/h is negative, and the matrix is no symmetric one in other units."""
    problem = Problem("u'' + 100*u' + q*u = 1", "u", (0, 1), ["u(0) = 0", "u(1) = 0"], {"q": 1.0})
    assert bvp.solve(problem, intervals=20, compiled=False).unstable_directions is None
    assert bvp.solve(problem, intervals=200, compiled=False).unstable_directions == 0
