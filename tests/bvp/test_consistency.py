"""Schemes that become another equation for small steps are recognised, at inner nodes, ends and axis; sound ones pass.

Each verdict is held against a measurement: the state of the scheme on ever finer grids either goes to the exact solution
of the equation or stays away from it.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest

import bvp
from bvp.consistency import Consistency, consistency
from bvp.discretize import Discretization
from bvp.problem import Problem
from bvp.schemes import names, typed

# All are solved by u = cos(x), which has neither the value nor the slope 0 at a held end that could hide a factor there.
BOUND = ["u'(0) - u(0) = -1", "u'(1) + 2*u(1) = 2*cos(1) - sin(1)"]
SLAB = Problem("laplacian(u) + p*u^2 = p*cos(x)^2 - cos(x)", "u", (0, 1), BOUND, {"p": -0.5}, initial_guess={"u": "1"})
FLOW = Problem("u'' + 3*u' + p*u = (p - 1)*cos(x) - 3*sin(x)", "u", (0, 1), BOUND, {"p": 0.5})
# u = cos(x) in the sphere: laplacian(u) = -cos(x) - 2 sin(x)/x, written as a series in x so that it has a value at the axis.
SPHERE = Problem(
    "laplacian(u) + p*u = (p - 1)*cos(x) - 2*(1 - x^2/6 + x^4/120 - x^6/5040 + x^8/362880 - x^10/39916800)",
    "u",
    (0, 1),
    ["u'(1) + 2*u(1) = 2*cos(1) - sin(1)"],
    {"p": 0.5},
    geometry="sphere",
)


def scheme_of(problem: Problem, scheme: str | Mapping[str, object]) -> Any:
    return scheme if isinstance(scheme, str) else typed("mine", scheme, problem)


def verdict(problem: Problem, scheme: str | Mapping[str, object]) -> Consistency:
    """What the code says of it."""
    return consistency(Discretization(problem, scheme_of(problem, scheme), "p", compiled=False), 1.0, problem.parameters)


def errors(problem: Problem, scheme: str | Mapping[str, object]) -> list[float]:
    """The largest distance of the scheme's state from cos(x), on 20 and on 160 intervals."""
    found = []
    for intervals in (20, 160):
        state = bvp.solve(problem, {"p": problem.parameters["p"]}, intervals=intervals, scheme=scheme_of(problem, scheme), compiled=False)
        assert state.ok
        found.append(float(np.max(np.abs(state.u - np.cos(state.x)))))
    return found


SOUND: list[tuple[Problem, str | Mapping[str, object]]] = [
    *[(SLAB, name) for name in names()],
    *[(FLOW, name) for name in ("central", "fitted", "upwind", "log-cosh")],
    *[(SPHERE, name) for name in names()],
    (SLAB, {"denominator": "2*log(cosh(h))"}),
    (SLAB, {"denominator": "sin(h)^2"}),
    (SLAB, {"denominator": "(exp(h) - 1)^2"}),
    (SLAB, {"denominator": "(exp(h) - 1)*h"}),
    (SLAB, {"denominator": "h^2*(1 - h)"}),
    (SLAB, {"source": "(u[k-1] + u[k] + u[k+1])/3"}),
    (SLAB, {"replace": {"u^2": "u[k-1]*u[k+1]"}}),
    (SLAB, {"end": "(u[k+1] - u[k-1])/(2*sin(h))"}),
    (SLAB, {"flux": "(u[k+1] - u[k])/sin(h)"}),
    (FLOW, {"first": "(u[k] - u[k-1])/h"}),
    (SPHERE, {"flux": "x[k]*x[k+1]*(u[k+1] - u[k])/h", "axis": "6*(u[k+1] - u[k])/h^2"}),
]
UNSOUND: list[tuple[Problem, Mapping[str, object], str]] = [
    (SLAB, {"denominator": "h^2/2"}, "difference equation"),
    (SLAB, {"denominator": "2*h^2"}, "difference equation"),
    (SLAB, {"denominator": "1.001*h^2"}, "difference equation"),
    (SLAB, {"source": "u[k] + 0.1"}, "difference equation"),
    (SLAB, {"source": "(u[k-1] + u[k] + u[k+1])/2"}, "difference equation"),
    (SLAB, {"right_hand_side": "(f[k-1] + 9*f[k] + f[k+1])/12"}, "difference equation"),
    (SLAB, {"replace": {"u^2": "u[k]^3"}}, "difference equation"),
    (SLAB, {"flux": "1.1*(u[k+1] - u[k])/h"}, "difference equation"),
    (SLAB, {"end": "(u[k+1] - u[k-1])/h"}, "u'"),
    (FLOW, {"first": "(u[k+1] - u[k-1])/h"}, "difference equation"),
    (SPHERE, {"flux": "x[k]*x[k+1]*(u[k+1] - u[k])/h", "axis": "2*(u[k+1] - u[k])/h^2"}, "axis"),
    (SPHERE, {"flux": "x[k]*(u[k+1] - u[k])/h", "axis": "6*(u[k+1] - u[k])/h^2"}, "difference equation"),
]


@pytest.mark.parametrize(("problem", "scheme"), SOUND)
def test_sound_schemes_pass(problem: Problem, scheme: str | Mapping[str, object]) -> None:
    found = verdict(problem, scheme)
    assert found.ok is True, found.reason
    coarse, fine = errors(problem, scheme)
    assert fine < 0.2 * coarse  # first order would leave an eighth


@pytest.mark.parametrize(("problem", "scheme", "row"), UNSOUND)
def test_unsound_schemes_are_recognised(problem: Problem, scheme: Mapping[str, object], row: str) -> None:
    found = verdict(problem, scheme)
    assert found.ok is False
    assert row in found.reason
    assert '"mine"' in found.reason


@pytest.mark.parametrize(("problem", "scheme", "row"), [case for case in UNSOUND if case[2] != "axis"])
def test_and_they_do_go_somewhere_else(problem: Problem, scheme: Mapping[str, object], row: str) -> None:
    coarse, fine = errors(problem, scheme)
    assert fine > 0.5 * coarse
    assert fine > 1e-5


def test_a_wrong_factor_that_the_condition_does_not_see_is_no_fault() -> None:
    """u'(0) = 0 says the same with any factor before the difference."""
    insulated = Problem("laplacian(u) + p*u = (p - 1)*cos(x)", "u", (0, 1), ["u'(0) = 0", "u(1) = cos(1)"], {"p": 0.5})
    assert verdict(insulated, {"end": "(u[k+1] - u[k-1])/h"}).ok is True
    coarse, fine = errors(insulated, {"end": "(u[k+1] - u[k-1])/h"})
    assert fine < 0.02 * coarse


@pytest.mark.parametrize("factor", ["7", "h^2", "1/h"])
def test_a_whole_equation_may_be_scaled(factor: str) -> None:
    keys = {"equation": f"({factor})*((u[k+1] - 2*u[k] + u[k-1])/h^2 + p*u[k]^2 - p*cos(x[k])^2 + cos(x[k])) = 0"}
    assert verdict(SLAB, keys).ok is True
    wrong = {"equation": f"({factor})*((u[k+1] - 2*u[k] + u[k-1])/h^2 + p*u[k]^2 - p*cos(x[k])^2 + 1.01*cos(x[k])) = 0"}
    assert verdict(SLAB, wrong).ok is False
