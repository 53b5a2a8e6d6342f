"""How turning points move with the other parameters, against closed forms and re-tracing, and on which side the states are."""

from __future__ import annotations

import math

import pytest

import continuation
from bvp import Problem
from continuation.records import TurningPoint
from tests.problems import body, interval

ARRHENIUS = "lam*exp(u/(1 + eps*u))"


def first(problem: Problem, along: str = "lam", **keywords: object) -> TurningPoint:
    """The first turning point."""
    return continuation.turning_point(problem, along=along, compiled=False, **keywords)  # type: ignore[arg-type]


def by_difference(problem: Problem, name: str, number: int = 0) -> float:
    """d ln(value)/d ln(parameter) from two more traces."""
    step, value = 1e-4, problem.parameters[name]
    logs = []
    for side in (-1, 1):
        moved = {name: value * math.exp(side * step)}
        branch = continuation.trace(problem, along="lam", at=moved, digits=11, turning_points_wanted=number + 1, compiled=False)
        logs.append(math.log(branch.turning_points[number].value))
    return (logs[1] - logs[0]) / (2 * step)


@pytest.mark.parametrize("scheme", ["central", "compact", "fitted"])
def test_powers_that_dimensions_fix(scheme: str) -> None:
    # k u'' + lam q exp(u/e) on a length L: lam_c = 3.5138… k e/(q L^2)
    problem = Problem(
        "k*u'' + lam*q*exp(u/e) = 0",
        x=(0, "L"),
        conditions=["u(0) = 0", "u(L) = 0"],
        parameters={"lam": 0.0, "k": 0.3, "q": 70.0, "e": 25.0, "L": 0.02},
    )
    point = first(problem, scheme=scheme)
    expected = {"k": 1.0, "q": -1.0, "e": 1.0, "L": -2.0}
    assert point.sensitivity.keys() == expected.keys()
    for name, power in expected.items():
        assert point.sensitivity[name] == pytest.approx(power, abs=1e-8)


@pytest.mark.parametrize("bi", [0.2, 1.0, 7.0])
def test_cooled_cylinder_against_the_derivative_of_its_closed_form(bi: float) -> None:
    # Thomas 1958, from memory: ln lam = ln 8B/(1+B)^2 - 4B/(Bi(1+B)), stationary in B: d ln lam/d ln Bi = 4B/(Bi(1+B)).
    b = -2 / bi + math.sqrt(1 + 4 / bi**2)
    exact = 4 * b / (bi * (1 + b))
    assert first(body("cylinder", bi=bi)).sensitivity["Bi"] == pytest.approx(exact, rel=1e-4)
    assert first(body("cylinder", bi=bi), scheme="compact").sensitivity["Bi"] == pytest.approx(exact, rel=1e-8)


def test_wall_temperature_against_its_closed_form() -> None:
    # u = b at both ends: lam_c = 3.5138… e^-b, so d ln lam/d ln b = -b
    problem = Problem("u'' + lam*exp(u) = 0", conditions=["u(0) = b", "u(1) = b"], parameters={"lam": 0.0, "b": 0.7})
    assert first(problem).sensitivity["b"] == pytest.approx(-0.7, abs=1e-8)


@pytest.mark.parametrize(
    ("problem", "name"),
    [
        (body("slab", ARRHENIUS, eps=0.22), "eps"),
        (body("sphere", ARRHENIUS, bi=3.0, eps=0.05), "eps"),
        (body("sphere", ARRHENIUS, bi=3.0, eps=0.05), "Bi"),
        (interval("lam*(1 + c*x)*exp(u)", c=2.0), "c"),
        (Problem("((1 + e*u)*u')' + lam*exp(u) = 0", conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 0.0, "e": 0.5}), "e"),
        (Problem("u'' + p*u' + lam*exp(u) = 0", conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 0.0, "p": 3.0}), "p"),
    ],
)
def test_sensitivity_against_tracing_again(problem: Problem, name: str) -> None:
    assert first(problem).sensitivity[name] == pytest.approx(by_difference(problem, name), rel=2e-3)


def test_sensitivity_of_the_second_turning_point() -> None:
    problem = body("slab", ARRHENIUS, eps=0.22)
    branch = continuation.trace(problem, along="lam", turning_points_wanted=2, compiled=False)
    for number, point in enumerate(branch.turning_points):
        assert point.sensitivity["eps"] == pytest.approx(by_difference(problem, "eps", number), rel=2e-3)


def test_no_sensitivity_where_there_is_none() -> None:
    problem = interval("lam*exp(u) + 0*unused", unused=0.0)
    assert first(problem).sensitivity["unused"] in (None, 0.0)  # of a parameter that is 0 there is no logarithm
    assert first(interval()).sensitivity == {}


@pytest.mark.parametrize("mirrored", [False, True])
def test_states_are_below_a_first_and_above_a_second_turning_point(mirrored: bool) -> None:
    # with mu = -lam the sides change places
    problem = body("slab", ARRHENIUS.replace("lam", "(-lam)") if mirrored else ARRHENIUS, eps=0.22)
    branch = continuation.trace(
        problem, along="lam", direction="down" if mirrored else "up", turning_points_wanted=2, digits=6, compiled=False
    )
    assert [point.states for point in branch.turning_points] == (["above", "below"] if mirrored else ["below", "above"])
    for point in branch.turning_points:  # what the side says is so: states on it, two fewer on the other
        counts = []
        for side in (-1, 1):
            found = continuation.states_at(
                problem, along="lam", at={"lam": point.value + side * 0.01}, grid="uniform", within=(-3, 3), digits=5, compiled=False
            )
            counts.append(len(found.states))
        assert counts == ([3, 1] if point.states == "below" else [1, 3])


def test_side_does_not_depend_on_the_direction_of_the_trace() -> None:
    up = continuation.trace(body("slab", ARRHENIUS, eps=0.22), along="lam", within=(0, 3), digits=6, compiled=False)
    hot = continuation.trace(
        Problem(
            "u'' + lam*exp(u/(1 + eps*u)) = 0",
            conditions=["u'(0) = 0", "u(1) = 0"],
            parameters={"lam": 1.3, "eps": 0.22},
            initial_guess={"u": "28*(1 - x^2)"},
        ),
        along="lam",
        direction="down",
        within=(0, 3),
        digits=6,
        compiled=False,
    )
    assert [point.states for point in hot.turning_points] == ["above", "below"]
    assert [point.value for point in hot.turning_points][::-1] == pytest.approx([point.value for point in up.turning_points], rel=1e-6)
