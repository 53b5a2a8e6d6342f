"""How fast a scheme's own turning point tends to the true one: observed orders, and the constants of the errors."""

from __future__ import annotations

import math
from collections.abc import Mapping
from itertools import pairwise

import pytest

import continuation
from bvp import Problem
from bvp.schemes import Scheme, typed
from tests.problems import body, interval
from tests.reference import KNOWN

INTERVALS = (48, 96, 192)

# The problem, and the name of its turning point in `reference`.
PROBLEMS: dict[str, tuple[Problem, str]] = {
    "interval": (interval(), "interval, exponential, turning point"),
    "slab": (body("slab"), "slab, exponential, turning point"),
    "cylinder": (body("cylinder"), "cylinder, exponential, turning point"),
    "sphere": (body("sphere"), "sphere, exponential, turning point 1"),
    "disk": (body("cylinder", "lam/(1-u)^2"), "disk, membrane, turning point 1"),
    "cooled slab": (body("slab", bi=2.0), "slab, exponential, Bi 2, turning point"),
    "cooled sphere": (body("sphere", bi=2.0), "sphere, exponential, Bi 2, turning point"),
    "slab, Arrhenius": (body("slab", "lam*exp(u/(1 + eps*u))", eps=0.01), "slab, Arrhenius, eps 0.01, turning point 1"),
}


def errors(problem: Problem, scheme: str | Scheme, exact: float, intervals: tuple[int, ...] = INTERVALS) -> list[float]:
    """The scheme's own turning points on uniform grids less the true one."""
    found = []
    for count in intervals:
        point = continuation.turning_point(
            problem, along="lam", scheme=scheme, intervals=count, grid="uniform", digits=None, compiled=False
        )
        found.append(point.on_grid - exact)
    return found


def orders(of: list[float]) -> list[float]:
    """log2 of the ratio of successive errors."""
    return [math.log2(before / after) for before, after in pairwise(of)]


@pytest.mark.parametrize(
    ("name", "scheme"),
    [
        (name, scheme)
        for name, (problem, _) in PROBLEMS.items()
        for scheme in ("central", "shell-balance", "log-cosh", "radial-exact", "fitted")
        if (problem.geometry, scheme) != ("cylinder", "fitted")
    ],
)
def test_schemes_of_second_order(name: str, scheme: str) -> None:
    problem, known = PROBLEMS[name]
    assert orders(errors(problem, scheme, KNOWN[known].value)) == pytest.approx([2.0, 2.0], abs=0.05)


def test_fitted_scheme_in_the_cylinder_has_a_logarithm() -> None:
    # In the first cells 1/r changes as fast as the step: error/h^2 grows by the same amount with every halving, C ln 2.
    scaled = [error * count**2 for error, count in zip(errors(body("cylinder"), "fitted", 2.0), INTERVALS, strict=True)]
    assert scaled[2] - scaled[1] == pytest.approx(scaled[1] - scaled[0], rel=0.02)
    assert abs(scaled[1] - scaled[0]) > 0.1 * abs(scaled[0])


@pytest.mark.parametrize("name", [name for name in PROBLEMS if "Arrhenius" not in name])  # too few digits are known of that one
def test_compact_scheme_is_of_fourth_order_with_cooled_ends_and_axis(name: str) -> None:
    problem, known = PROBLEMS[name]
    assert orders(errors(problem, "compact", KNOWN[known].value, (24, 48, 96))) == pytest.approx([4.0, 4.0], abs=0.1)


@pytest.mark.parametrize("bi", [None, 0.7, 1000.0])
def test_cooled_cylinder_against_its_closed_form(bi: float | None) -> None:
    # Thomas 1958, from memory: B = -2/Bi + sqrt(1 + 4/Bi^2), lam = 8B/(1+B)^2 exp(-4B/(Bi(1+B))); 2 at Bi = infinity.
    b = 1.0 if bi is None else -2 / bi + math.sqrt(1 + 4 / bi**2)
    exact = 8 * b / (1 + b) ** 2 * (1.0 if bi is None else math.exp(-4 * b / (bi * (1 + b))))
    assert orders(errors(body("cylinder", bi=bi), "central", exact)) == pytest.approx([2.0, 2.0], abs=0.05)
    assert orders(errors(body("cylinder", bi=bi), "compact", exact, (24, 48, 96))) == pytest.approx([4.0, 4.0], abs=0.1)


def constant(problem: Problem, scheme: str | Scheme, exact: float, order: int) -> float:
    """C of the error C h^order + D h^(order + 2), from N = 40 and 80."""
    coarse, fine = (error * count**order for error, count in zip(errors(problem, scheme, exact, (40, 80)), (40, 80), strict=True))
    return (4 * fine - coarse) / 3


@pytest.mark.parametrize(
    ("scheme", "order", "name"),
    [
        ("central", 2, "central, interval, error constant, h^2"),
        ("log-cosh", 2, "2 ln cosh h, interval, error constant, h^2"),
        ({"denominator": "4*sinh(h/2)^2"}, 2, "4 sinh^2(h/2), interval, error constant, h^2"),
        ("fitted", 2, "fitted, interval, error constant, h^2"),
        (
            {"equation": "u[k+1] - 2*u[k] + u[k-1] = -2*log(1 + (lam*h^2/2)*exp(u[k]))"},
            2,
            "logarithmic source, interval, error constant, h^2",
        ),
        ("compact", 4, "fourth order, interval, error constant, h^4"),
    ],
)
def test_recorded_constants_of_the_interval(scheme: str | Mapping[str, object], order: int, name: str) -> None:
    problem, known = interval(), KNOWN[name]
    used = scheme if isinstance(scheme, str) else typed("mine", scheme, problem)
    found = constant(problem, used, KNOWN["interval, exponential, turning point"].value, order)
    assert abs(found - known.value) <= known.uncertainty


def test_recorded_constants_of_the_cylinder() -> None:
    central = KNOWN["central, cylinder, node on the axis, error constant, h^2"]
    assert abs(constant(body("cylinder"), "central", 2.0, 2) - central.value) <= central.uncertainty
    # The logarithmic flux vanishes in the first cell, so that the source of the axis cell does not reach the first shell.
    exact = KNOWN["logarithmic flux, cylinder, node on the axis, source of its cell lost, error constant, h^2"]
    assert abs(constant(body("cylinder"), "radial-exact", 2.0, 2) - exact.value) <= exact.uncertainty


def test_order_on_a_smooth_map() -> None:
    exact = KNOWN["sphere, exponential, turning point 1"].value
    found = []
    for count in INTERVALS:
        point = continuation.turning_point(
            body("sphere"), along="lam", scheme="shell-balance", intervals=count, grid="sinh(2*s)/sinh(2)", digits=None, compiled=False
        )
        found.append(point.on_grid - exact)
    assert orders(found) == pytest.approx([2.0, 2.0], abs=0.05)


def test_upwind_differences_are_of_first_order() -> None:
    # u'' + c u' + lam e^u; the truth is the compact value, which a second scheme confirms.
    problem = Problem("u'' + c*u' + lam*exp(u) = 0", x=(0, 1), conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 0.0, "c": 2.0})
    fine = continuation.turning_point(problem, along="lam", scheme="central", digits=9, compiled=False)
    assert orders(errors(problem, "upwind", fine.value)) == pytest.approx([1.0, 1.0], abs=0.06)


@pytest.mark.parametrize("name", ["interval", "cylinder", "cooled sphere"])
def test_order_reported_with_a_turning_point_is_the_one_observed(name: str) -> None:
    problem, known = PROBLEMS[name]
    for scheme, order, tolerance in (("central", 2.0, 0.02), ("compact", 4.0, 0.05)):
        point = continuation.turning_point(problem, along="lam", scheme=scheme, grid="uniform", compiled=False)
        assert point.order == pytest.approx(order, abs=tolerance)
        entries = [entry for entry in point.refinement if entry.intervals in (24, 48)]
        observed = math.log2((entries[0].value - KNOWN[known].value) / (entries[1].value - KNOWN[known].value))
        assert observed == pytest.approx(order, abs=0.1)
