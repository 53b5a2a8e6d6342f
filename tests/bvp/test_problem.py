"""Problems as they are stated: what is understood, what is noticed, and what is refused with the place and the remedy."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import bvp
from bvp.errors import InputError, ProblemError
from bvp.problem import Problem

FIXED = ["u(0) = 0", "u(1) = 0"]


@pytest.mark.parametrize(
    ("text", "geometry"),
    [
        ("u'' + (2/x)*u' + lam*exp(u) = 0", "sphere"),
        ("u'' + 2*u'/x + lam*exp(u) = 0", "sphere"),
        ("(x^2*u')'/x^2 + lam*exp(u) = 0", "sphere"),
        ("(1/x^2)*(x^2*u')' + lam*exp(u) = 0", "sphere"),
        ("u'' + u'/x + lam*exp(u)", "cylinder"),
        ("lam*exp(u) = -(x*u')'/x", "cylinder"),
        ("3*u'' + 6/x*u' + 3*lam*exp(u) = 0", "sphere"),
    ],
)
def test_text_book_operators_are_the_geometry_s(text: str, geometry: str) -> None:
    written = Problem(text, "u", (0, 1), ["u(1) = 0"], {"lam": 1.0})
    named = Problem("laplacian(u) + lam*exp(u) = 0", "u", (0, 1), ["u(1) = 0"], {"lam": 1.0}, geometry=geometry)
    assert written.geometry == geometry
    assert any("read as the operator" in notice for notice in written.notices)
    one, other = (bvp.solve(problem, intervals=20, compiled=False) for problem in (written, named))
    assert one.ok
    assert np.max(np.abs(one.u - other.u)) < 1e-3  # (x^2 u')' is the shells' balance, which differs by h^2
    assert np.max(np.abs(one.u)) > 0.1


def test_away_from_the_axis_they_are_what_they_say() -> None:
    """u'' + (2/x) u' = 0 on [1, 2]: u = 2 - 2/x, no geometry needed."""
    shell = Problem("u'' + (2/x)*u' = 0", "u", (1, 2), ["u(1) = 0", "u(2) = 1"])
    assert shell.geometry == "slab"
    assert shell.notices == ()
    state = bvp.solve(shell, intervals=200, compiled=False)
    assert np.max(np.abs(state.u - (2 - 2 / state.x))) < 1e-5


def test_nothing_on_the_right_means_zero_and_sides_may_be_swapped() -> None:
    texts = ("u'' + lam*exp(u)", "u'' = -lam*exp(u)", "0 = u'' + lam*exp(u)", "lam*exp(u) + u'' = 0")
    states = [bvp.solve(Problem(text, "u", (0, 1), FIXED, {"lam": 1.0}), intervals=10, compiled=False).u for text in texts]
    for state in states[1:]:
        assert np.max(np.abs(state - states[0])) < 1e-14


def test_names_are_the_user_s_own() -> None:
    plain = Problem("u'' + lam*exp(u) = 0", "u", (0, 2), ["u(0) = 0", "u'(2) = -u(2)"], {"lam": 0.2})
    renamed = Problem(
        "theta'' + q*g = 0",
        "theta",
        domain=("z", 0, "2*len"),
        conditions=["theta(0) = 0", "theta'(2*len) = -theta(2*len)"],
        parameters={"q": 0.2, "len": 1.0},
        where={"g": "exp(theta)"},
    )
    one, other = (bvp.solve(problem, intervals=16, compiled=False) for problem in (plain, renamed))
    assert one.ok
    assert np.max(np.abs(one.u - other.u)) < 1e-14


def test_axis_and_what_is_understood_there() -> None:
    ball = Problem("laplacian(u) + 1 = 0", "u", (0, 1), ["u(1) = 0"], geometry="sphere")
    assert ball.axis
    spelled = Problem("laplacian(u) + 1 = 0", "u", (0, 1), ["u'(0) = 0", "u(1) = 0"], geometry="sphere")
    shell = Problem("laplacian(u) + 1 = 0", "u", (0.5, 1), ["u(0.5) = 0", "u(1) = 0"], geometry="sphere")
    assert not shell.axis
    for problem in (ball, spelled):  # (1 - r^2)/6, exact for central differences
        state = bvp.solve(problem, intervals=10, compiled=False)
        assert np.max(np.abs(state.u - (1 - state.x**2) / 6)) < 1e-14


def test_other_parameters_leave_the_problem_alone() -> None:
    problem = Problem("u'' + lam*exp(u) = 0", "u", (0, 1), FIXED, {"lam": 1.0})
    changed = problem.with_parameters({"lam": 2})
    assert (problem.parameters, changed.parameters) == ({"lam": 1.0}, {"lam": 2.0})
    assert changed.equations is problem.equations
    with pytest.raises(ProblemError, match=r'no parameter "lamb".*lam'):
        problem.with_parameters({"lamb": 2})


def test_what_is_never_used_is_noticed() -> None:
    problem = Problem("u'' + lam = 0", "u", (0, 1), FIXED, {"lam": 1.0, "Bi": 3.0})
    assert list(problem.notices) == ["the parameter Bi is used nowhere."]


def test_corners_are_known() -> None:
    def corners(text: str) -> str:
        return Problem(text, "u", (0, 1), FIXED, {"p": 1.0}).corners

    assert corners("u'' + abs(u) = 0") == "unknown"
    assert corners("u'' + max(p, u^2) = 0") == "unknown"
    assert corners("u'' + min(x, 0.5) = p") == "coordinate"
    assert corners("u'' + abs(p)*u = 0") == ""


def stated(**changes: Any) -> Problem:
    """A sound problem with some of its parts changed."""
    parts: dict[str, Any] = {"equations": "u'' + lam*exp(u) = 0", "x": (0, 1), "conditions": FIXED, "parameters": {"lam": 1.0}}
    return Problem(**{**parts, **changes})


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"geometry": "spere"}, "spere.*sphere"),
        ({"equations": "exp(u) = lam"}, "holds no derivative of u"),
        ({"equations": ["u'' = lam", "u'' = 0"]}, "1 unknown.*2 equations"),
        ({"equations": "u'' + lamb*exp(u) = 0"}, "lamb"),
        ({"equations": "u'' + 2u = lam"}, "\\*"),
        ({"x": (1, 0)}, "left end below the right"),
        ({"x": (0, "lam - 1")}, "left end below the right"),
        ({"x": (0, "u")}, "no parameter"),
        ({"x": (0, float("inf"))}, "finite"),
        ({"conditions": ["u(0) = 0"]}, "2.*orders of the equations"),
        ({"conditions": [*FIXED, "u'(0) = 1"]}, "2.*orders of the equations"),
        ({"conditions": ["u(0) = 0", "u(0.5) = 0"]}, "0.5"),
        ({"conditions": ["u(0) = 0", "u(0) = 0"]}, "stands there twice"),
        ({"parameters": {"lam": float("nan")}}, "lam.*finite"),
        ({"parameters": {"lam": "1"}}, "lam.*Expected: a number"),
        ({"parameters": {"lam": True}}, "lam.*number"),
        ({"parameters": {"lam": 1.0, "exp": 2.0}}, "exp.*keeps for itself"),
        ({"parameters": {"lam": 1.0, "u": 2.0}}, '"u" is both an unknown and a parameter'),
        ({"initial_guess": {"v": "1"}}, "no unknown.*u"),
        ({"initial_guess": {"u": "u + 1"}}, "holds an unknown"),
        ({"where": {"k": "1 + k"}}, "k needs k, a circle"),
        ({"x": (-1, 1), "geometry": "cylinder", "conditions": ["u(-1) = 0", "u(1) = 0"]}, "starts at a radius"),
        (
            {"equations": "u'' + u'/x = lam", "geometry": "sphere", "conditions": ["u(1) = 0"]},
            "operator of the cylinder.*geometry is sphere",
        ),
        ({"equations": "laplacian(u) = lam", "geometry": "sphere", "conditions": ["u(0) = 1", "u(1) = 0"]}, "axis"),
    ],
)
def test_mistakes_are_named(changes: dict[str, Any], said: str) -> None:
    with pytest.raises(InputError, match=f"(?s){said}"):
        stated(**changes)
