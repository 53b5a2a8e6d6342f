"""Schemes typed by a user, key by key: central written out by hand in many ways is central, and mistakes are named."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest

import bvp
from bvp.errors import FormulaError, InputError, SchemeError
from bvp.grid import Grid
from bvp.problem import Problem
from bvp.schemes import typed

SLAB = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u'(0) = 0", "u'(1) + 2*u(1) = 0"], {"lam": 0.3})
SPHERE = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u(1) = 0"], {"lam": 1.0}, geometry="sphere")
FLOW = Problem("u'' + 3*u' + lam*u^2 = 0", "u", (0, 1), ["u(0) = 1", "u(1) = 0"], {"lam": 1.0})


def profile(problem: Problem, scheme: Any, intervals: int = 16) -> Any:
    """The nodal values of the state of a scheme, built in or typed."""
    used = typed("mine", scheme, problem) if isinstance(scheme, Mapping) else scheme
    state = bvp.solve(problem, dict(problem.parameters), intervals=intervals, scheme=used, compiled=False)
    assert state.ok
    return state.u


@pytest.mark.parametrize(
    ("problem", "keys"),
    [
        (SLAB, {"denominator": "h^2"}),
        (SLAB, {"denominator": "step^2"}),
        (SLAB, {"flux": "(u[k+1] - u[k])/(x[k+1] - x[k])"}),
        (SLAB, {"flux": "(u[k+1] - u[k])/h", "volume": "h"}),
        (SLAB, {"end": "(u[k+1] - u[k-1])/(2*h)"}),
        (SLAB, {"source": "u[k]"}),
        (SLAB, {"right_hand_side": "f[k]"}),
        (SLAB, {"equation": "(u[k+1] - 2*u[k] + u[k-1])/h^2 + lam*exp(u[k]) = 0"}),
        (SLAB, {"equation": "u[k+1] + u[k-1] = 2*u[k] - h^2*lam*exp(u[k])"}),
        (FLOW, {"first": "(u[k+1] - u[k-1])/(2*h)"}),
        (FLOW, {"replace": {"u^2": "u[k]*u[k]"}}),
    ],
)
def test_central_by_hand(problem: Problem, keys: Mapping[str, object]) -> None:
    assert np.max(np.abs(profile(problem, keys) - profile(problem, "central"))) < 1e-13


def test_a_flux_and_an_axis_by_hand_are_shell_balance() -> None:
    keys = {"flux": "x[k+1/2]^2*(u[k+1] - u[k])/(x[k+1] - x[k])", "axis": "3*(u[k+1] - u[k])/((x[k+1] - x[k])*x[k+1/2])"}
    assert np.max(np.abs(profile(SPHERE, keys) - profile(SPHERE, "shell-balance"))) < 1e-13


def test_a_whole_equation_with_its_axis() -> None:
    keys = {
        "equation": "(u[k+1] - 2*u[k] + u[k-1])/h^2 + (2/x[k])*(u[k+1] - u[k-1])/(2*h) + lam*exp(u[k]) = 0",
        "axis": "6*(u[k+1] - u[k])/h^2 + lam*exp(u[k]) = 0",
    }
    assert np.max(np.abs(profile(SPHERE, keys) - profile(SPHERE, "central"))) < 1e-12


@pytest.mark.parametrize(
    ("keys", "row"),
    [
        ({"source": "(u[k-1] + u[k] + u[k+1])/3"}, lambda u, h: np.diff(u, 2) / h**2 + 0.5 * np.exp((u[:-2] + u[1:-1] + u[2:]) / 3)),
        (
            {"right_hand_side": "(f[k-1] + 10*f[k] + f[k+1])/12"},
            lambda u, h: np.diff(u, 2) / h**2 + 0.5 * (np.exp(u[:-2]) + 10 * np.exp(u[1:-1]) + np.exp(u[2:])) / 12,
        ),
        ({"denominator": "2*log(cosh(h))"}, lambda u, h: np.diff(u, 2) / (2 * np.log(np.cosh(h))) + 0.5 * np.exp(u[1:-1])),
        ({"denominator": "4*sinh(h/2)^2"}, lambda u, h: np.diff(u, 2) / (4 * np.sinh(h / 2) ** 2) + 0.5 * np.exp(u[1:-1])),
        ({"replace": {"exp(u)": "exp((u[k-1] + u[k+1])/2)"}}, lambda u, h: np.diff(u, 2) / h**2 + 0.5 * np.exp((u[:-2] + u[2:]) / 2)),
    ],
)
def test_residual_written_out(keys: Mapping[str, object], row: Any) -> None:
    fixed = Problem("u'' + lam*exp(u) = 0", "u", (0, 1), ["u(0) = 0", "u(1) = 0"], {"lam": 0.5})
    for intervals in (7, 20):
        u = profile(fixed, keys, intervals)
        assert np.max(np.abs(row(u, 1.0 / intervals))) < 1e-10


@pytest.mark.parametrize(
    ("problem", "keys", "error", "said"),
    [
        (SLAB, {"denom": "h^2"}, SchemeError, '"denom" is no key'),
        (SLAB, {}, SchemeError, "has no formula"),
        (SLAB, {"denominator": 3}, SchemeError, "a formula in quotes"),
        (SLAB, {"denominator": "h^^2"}, FormulaError, "denominator"),
        (SLAB, {"flux": "(u[k+2] - u[k])/h"}, FormulaError, "k-1, k and k\\+1"),
        (SLAB, {"equation": "u[k] = w[k]"}, FormulaError, '"w" has no nodal values'),
        (SLAB, {"equation": "u[k] = 0", "source": "u[k]"}, SchemeError, "Give one or the other"),
        (SLAB, {"replace": {"u^7": "u[k]^7"}}, SchemeError, "stands nowhere"),
        (FLOW, {"flux": "__import__('os')"}, FormulaError, "flux"),
    ],
)
def test_mistakes_are_named(problem: Problem, keys: Mapping[str, object], error: type[InputError], said: str) -> None:
    with pytest.raises(error, match=said):
        profile(problem, keys)


def test_a_step_has_no_meaning_on_a_map() -> None:
    with pytest.raises(SchemeError, match="uniform"):
        bvp.solve(SLAB, scheme=typed("mine", {"denominator": "h^2"}, SLAB), grid=Grid(20, lambda s: s * s), compiled=False)
