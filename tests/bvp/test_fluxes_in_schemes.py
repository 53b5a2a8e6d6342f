"""Fluxes under schemes that have formulas of their own for u' or for the axis: each must come to what the standard scheme comes to."""

from __future__ import annotations

import pytest

import bvp
import continuation

CASES = {
    "slab, k(u)": ("((1 + 0.5*u)*u')' + lam*exp(u) = 0", "slab", ["u'(0) = 0", "u(1) = 0"]),
    "slab, k(x) and a flow": ("((1 + 0.5*x)*u')' + 2*u' + lam*exp(u) = 0", "slab", ["u'(0) = 0", "u(1) = 0"]),
    "cylinder, k(u)": ("div((1 + 0.5*u)*grad(u)) + lam*exp(u) = 0", "cylinder", ["u(1) = 0"]),
    "sphere, k(x)": ("div((1 + 0.5*x^2)*grad(u)) + lam*exp(u) = 0", "sphere", ["u(1) = 0"]),
    "cylinder, as in a text-book": ("(x*u')'/x + lam*exp(u) = 0", "slab", ["u(1) = 0"]),
}


@pytest.mark.parametrize("scheme", ["upwind", "radial-exact", "shell-balance"])
@pytest.mark.parametrize("name", CASES)
def test_a_flux_comes_to_the_same_turning_point_under_every_scheme(name: str, scheme: str) -> None:
    equation, geometry, conditions = CASES[name]
    problem = bvp.Problem(equation, "u", x=(0, 1), geometry=geometry, conditions=conditions, parameters={"lam": 0.0})
    standard = continuation.turning_point(problem, along="lam", grid="uniform", compiled=False)
    found = continuation.turning_point(problem, along="lam", grid="uniform", scheme=scheme, compiled=False)
    assert found.uncertainty is not None
    assert standard.uncertainty is not None
    assert found.uncertainty < 1e-8 * found.value
    assert abs(found.value - standard.value) <= found.uncertainty + standard.uncertainty


def test_a_derivative_inside_a_flux_has_no_upwind_side() -> None:
    problem = bvp.Problem("((1 + 0.5*u)*u')' + lam*exp(u) = 0", "u", x=(0, 1), conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 1.0})
    plain = bvp.solve(problem, intervals=20, compiled=False)
    upwind = bvp.solve(problem, intervals=20, scheme="upwind", compiled=False)
    assert upwind.ok
    assert abs(upwind.u - plain.u).max() < 1e-12
