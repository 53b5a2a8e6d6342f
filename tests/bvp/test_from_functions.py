"""Right-hand sides given as NumPy functions with their derivatives, held against the same problem typed as a formula."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import bvp
import continuation
from bvp.errors import ProblemError
from bvp.problem import Problem
from tests.reference import KNOWN

TRUTH = KNOWN["interval, exponential, turning point"]


def source(x: Any, u: Any, lam: Any) -> Any:
    """lam e^u, which is its own derivative by u."""
    return lam * np.exp(u)


def given(**derivatives: Any) -> Problem:
    """The interval's exponential problem with its source as a function."""
    known = {"lam": lambda x, u, lam: np.exp(u), **derivatives}
    return Problem.from_functions(source, source, known, parameters={"lam": 0.0}, conditions=["u(0) = 0", "u(1) = 0"], x=(0, 1))


@pytest.mark.parametrize("scheme", ["central", "shell-balance", "radial-exact", "log-cosh", "compact"])
def test_turning_point(scheme: str) -> None:
    point = continuation.turning_point(given(), along="lam", scheme=scheme)
    assert point.uncertainty is not None
    assert abs(point.value - TRUTH.value) <= point.uncertainty <= 1e-9


def test_state_equals_that_of_the_formula() -> None:
    typed = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u(0) = 0", "u(1) = 0"], {"lam": 0.0})
    ours = bvp.solve(given(), at={"lam": 2.0}, intervals=40)
    theirs = bvp.solve(typed, at={"lam": 2.0}, intervals=40, compiled=False)
    assert ours.ok
    assert np.max(np.abs(ours.u - theirs.u)) < 1e-14


def test_an_inconsistent_scheme_is_found_out_here_too() -> None:
    problem = given()
    wrong = bvp.schemes.typed("wrong", {"denominator": "h^2/2"}, problem)
    point = continuation.turning_point(problem, along="lam", scheme=wrong)
    assert point.uncertainty is None
    assert "does not become that of the equation" in point.notes[0]


def test_a_derivative_that_is_needed_and_missing_is_named() -> None:
    with pytest.raises(ProblemError, match="the derivative by u, u of the given function is needed"):
        continuation.turning_point(given(), along="lam", scheme="fitted")


def test_a_measured_coefficient_far_from_one_is_judged_inside_its_table() -> None:
    """Temperatures of 300: at a profile of size 1 the table has no value, and nothing could be decided."""
    temperatures = np.array([250.0, 300.0, 400.0, 500.0])
    kelvin = Problem(
        "(k(T)*T')' + lam*exp((T - 300)/10) = 0",
        "T",
        (0, 1),
        ["T(0) = 300", "T(1) = 300"],
        {"lam": 0.0},
        measured={"k": (temperatures, 1.0 + 0.001 * (temperatures - 300.0))},
    )
    assert continuation.turning_point(kelvin, along="lam", digits=6, compiled=False).uncertainty is not None
    wrong = bvp.schemes.typed("wrong", {"denominator": "1.1*h^2"}, kelvin)
    assert continuation.turning_point(kelvin, along="lam", digits=6, scheme=wrong, compiled=False).uncertainty is None
