"""Newton's method on bordered systems: exact solutions, damping, what it leaves alone, and how it tells that it failed."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from bvp.discrete_system import DiscreteSystem
from bvp.discretize import Discretization
from bvp.grid import Grid
from bvp.newton import Border, Scales, correct, held_parameter
from bvp.problem import Problem

FIXED = ["u(0) = 0", "u(1) = 0"]
ONE = Scales(1.0, 1.0)


def system(text: str, intervals: int = 2, conditions: list[str] = FIXED, lam: float = 1.0) -> DiscreteSystem:
    problem = Problem(text, "u", (0, 1), conditions, {"lam": lam})
    return Discretization(problem, "central", "lam", compiled=False).on(Grid(intervals))


def test_one_unknown_by_hand() -> None:
    """Two intervals: -8 u + lam exp(u) = 0, so lam = 8 u exp(-u) (ends are fixed; the ghosts mean nothing)."""
    two = system("u'' + lam*exp(u) = 0")
    for u in (0.1, 0.6, 1.7, 3.0):
        lam = 8 * u * np.exp(-u)
        start = np.zeros(5)
        start[2] = u + 0.05
        found = correct(two, start, lam, held_parameter(two, lam), ONE, tolerance=1e-13)
        assert found.ok, found.reason
        assert found.parameter == lam
        assert found.u[2] == pytest.approx(u, abs=1e-12)
        # The tangent that dp/ds = 1 asks for: du/dlam = exp(u)/(8 - lam exp(u)).
        assert found.tangent[2] / found.pace == pytest.approx(np.exp(u) / (8 - 8 * u), rel=1e-6)


def test_a_border_finds_the_parameter_too_and_passes_the_turning_point() -> None:
    """u[1] prescribed instead of lam, at u = 1 exactly: lam = 8/e, the turning point, where the plain matrix is singular."""
    two = system("u'' + lam*exp(u) = 0")
    direction = np.array([0.0, 0.0, 1.0, 0.0, 0.0])
    for u in (0.9, 1.0, 1.1, 5.0):
        border = Border(direction, 2.0, 0.0, np.zeros(5), 0.0, distance=2.0 * u)
        start = np.array([0.0, 0.0, u + 0.1, 0.0, 0.0])
        found = correct(two, start, 8 * u * np.exp(-u) + 0.1, border, ONE, tolerance=1e-13)
        assert found.ok, found.reason
        assert found.parameter == pytest.approx(8 * u * np.exp(-u), rel=1e-12)
        assert found.u[2] == pytest.approx(u, rel=1e-13)
        assert np.sign(found.pace) == np.sign(1 - u) or abs(found.pace) < 1e-12


def test_linear_systems_take_one_step() -> None:
    """u'' = lam x, u(0) = 0, u'(1) = 2: central differences are exact for cubics: u = lam (x^3 - 3 x)/6 + 2 x less the end's h^2 term."""
    many = system("u'' = lam*x", 8, ["u(0) = 0", "u'(1) = 2"], 6.0)
    found = correct(many, np.full(11, 7.0), 6.0, held_parameter(many, 6.0), ONE, tolerance=1e-9)
    x, h = many.places(6.0), 1 / 8
    assert found.ok
    assert found.steps <= 2
    # The central slope at 1 sees h^2 of the cubic's third derivative: u = x^3 + c x with 3 + h^2 + c = 2.
    assert np.max(np.abs(found.u[1:-1] - (x**3 + (2 - 3 - h * h) * x))) < 1e-13


def test_convergence_is_quadratic() -> None:
    """Corrections over the square of the one before settle to one number: seen by asking for one step more each time."""
    many = system("u'' + lam*exp(u) = 0", 20)
    sizes = []
    for steps in range(1, 6):
        found = correct(many, many.guess(3.4), 3.4, held_parameter(many, 3.4), ONE, tolerance=1e-300, most_steps=steps)
        assert not found.ok
        sizes.append(found.last)
    ratios = [after / before**2 for before, after in pairwise(sizes) if after > 1e-14]
    assert len(ratios) >= 3
    assert ratios[-1] == pytest.approx(ratios[-2], rel=0.05)


def test_arguments_are_left_alone() -> None:
    many = system("u'' + lam*exp(u) = 0", 10)
    start = many.guess(1.0)
    anchor, before = start.copy(), start.copy()
    border = Border(np.ones(13), 0.1, 1.0, anchor, 1.0, 0.2)
    assert correct(many, start, 1.0, border, ONE).ok
    assert np.array_equal(start, before)
    assert np.array_equal(anchor, before)


@pytest.mark.parametrize(
    ("text", "start", "said"),
    [
        ("u'' + lam*log(u) = 0", -1.0, "no finite value at the first guess"),
        ("u'' + lam*exp(u) = 50", 900.0, "no finite value"),
        ("u'' + 100*lam*exp(u) = 0", 0.0, "correction"),
        ("u'' + lam/(1 - u)^2 = 0", 1.0, "no finite value at the first guess"),
    ],
)
def test_failure_is_told_and_the_state_is_finite_or_the_start(text: str, start: float, said: str) -> None:
    many = system(text, 10)
    nodal = np.full(13, start)
    found = correct(many, nodal, 1.0, held_parameter(many, 1.0), ONE)
    assert not found.ok
    assert said in found.reason
    assert np.all(np.isfinite(found.u))


def test_most_steps_are_kept_to() -> None:
    many = system("u'' + lam*exp(u) = 0", 10)
    found = correct(many, np.full(13, 3.0), 1.0, held_parameter(many, 1.0), ONE, most_steps=2, tolerance=1e-14)
    assert not found.ok
    assert found.steps == 2
    assert "2 steps" in found.reason


def test_a_full_step_over_an_edge_is_shortened() -> None:
    """8 (1 - u) + ln u = 0 from u = 0.12, next to where its slope vanishes: the full step would end at u = -14.7."""
    two = system("u'' + lam*log(u) = 0", 2, ["u(0) = 1", "u(1) = 1"])
    start = np.array([1.0, 1.0, 0.12, 1.0, 1.0])
    full = start[2] - (8 * (1 - start[2]) + np.log(start[2])) / (-8 + 1 / start[2])
    assert full < -14.0  # where the logarithm has no value
    found = correct(two, start, 1.0, held_parameter(two, 1.0), ONE, tolerance=1e-12, smallest_damping=2.0**-20, most_steps=60)
    assert found.ok, found.reason
    assert 8 * (1 - found.u[2]) + np.log(found.u[2]) == pytest.approx(0.0, abs=1e-12)


def test_size_of_a_change() -> None:
    assert Scales(2.0, 10.0).size(36.0, 9, 30.0) == pytest.approx(np.hypot(1.0, 3.0))
    assert np.isnan(ONE.size(float("nan"), 9, 0.0))
