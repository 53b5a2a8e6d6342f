"""Grids given by the formula of a map: the same turning points, states and orders; maps that are none are refused."""

from __future__ import annotations

import numpy as np
import pytest

import continuation
from bvp.errors import InputError
from bvp.grid import Grid
from bvp.schemes import typed
from continuation.grids import grid_for
from tests.problems import body, interval
from tests.reference import KNOWN

MAPS = ("s^2", "sinh(3*s)/sinh(3)", "(exp(2*s) - 1)/(exp(2) - 1)", "s + sin(2*pi*s)/8", "s*(2 - s)")


@pytest.mark.parametrize("scheme", ["central", "shell-balance", "radial-exact", "compact"])
@pytest.mark.parametrize("grid", MAPS)
@pytest.mark.parametrize(
    ("geometry", "name"),
    [
        ("slab", "slab, exponential, turning point"),
        ("cylinder", "cylinder, exponential, turning point"),
        ("sphere", "sphere, exponential, turning point 1"),
    ],
)
def test_turning_point_on_a_graded_grid(geometry: str, name: str, grid: str, scheme: str) -> None:
    point = continuation.turning_point(body(geometry), scheme=scheme, grid=grid, digits=7, intervals=100, compiled=False)
    known = KNOWN[name]
    assert point.uncertainty is not None
    assert known.agrees(point.value, point.uncertainty)
    assert point.uncertainty <= 1e-6 * known.value
    assert point.state is not None
    assert np.ptp(np.diff(point.state.x)) > 0.1 / point.state.intervals  # it is graded


def test_cooled_ends_on_a_graded_grid() -> None:
    known = KNOWN["sphere, exponential, Bi 2, turning point"]
    for grid in MAPS[:4]:
        point = continuation.turning_point(body("sphere", bi=2.0), along="lam", grid=grid, digits=7, compiled=False)
        assert point.uncertainty is not None
        assert known.agrees(point.value, point.uncertainty)


def test_a_map_puts_the_nodes_where_its_formula_says() -> None:
    grid = grid_for("sinh(3*s)/sinh(3)", 8, interval())
    assert grid.nodes[1:-1] == pytest.approx(np.sinh(3 * np.arange(9) / 8) / np.sinh(3), rel=1e-14)
    assert grid.refined(16).nodes[1:-1:2] == pytest.approx(grid.nodes[1:-1], rel=1e-14)
    assert grid_for("uniform", 5, interval()).nodes[1:-1] == pytest.approx(np.arange(6) / 5)
    own = Grid(7, lambda s: s**3)
    assert grid_for(own, 100, interval()) is own


def test_states_on_a_graded_grid() -> None:
    found = continuation.states_at(interval(), at={"lam": 2.0}, grid="s + sin(2*pi*s)/8", until="max(u) > 5", compiled=False)
    for state, side in zip(found.states, ("lower", "upper"), strict=True):
        uncertainty = state.uncertainty["max(u)"]
        assert uncertainty is not None
        assert KNOWN[f"interval, exponential, lam 2, {side}, u(1/2)"].agrees(state.measures["max(u)"], uncertainty)


@pytest.mark.parametrize(
    ("grid", "words"),
    [
        ("2*s", "increase from 0 to 1"),
        ("1 - s", "increase from 0 to 1"),
        ("sin(5*s)/sin(5)", "increase from 0 to 1"),
        ("s + 1/10", "increase from 0 to 1"),
        ("log(s)", "increase from 0 to 1"),
        ("s*lam", "lam"),
        ("unifrom", "unifrom"),
        ("s^", r"s\^"),
    ],
)
def test_a_map_that_is_none_is_refused(grid: str, words: str) -> None:
    with pytest.raises(InputError, match=words):
        continuation.trace(interval(), grid=grid, compiled=False)


def test_a_scheme_of_uniform_grids_refuses_another() -> None:
    problem = interval()
    for scheme in ("log-cosh", typed("mine", {"denominator": "h*sin(h)"}, problem), typed("mine", {"first": "(u[k] - u[k-1])/h"}, problem)):
        with pytest.raises(InputError, match="uniform"):
            continuation.trace(problem, grid="s^2", scheme=scheme, compiled=False)


def test_adaptive_grids_follow_a_state_into_its_layer() -> None:
    # Exponential source in the sphere: by the fourth turning point the core is a thousandth of the radius. Truths by Taylor series.
    from mpmath import mp

    from tests.recomputed.exponential import sphere_turning_points

    with mp.workdps(20):
        truths = sphere_turning_points(4)
    branch = continuation.trace(body("sphere"), turning_points_wanted=4, grid="adaptive", scheme="shell-balance", digits=7, compiled=False)
    for point, (value, centre) in zip(branch.turning_points, truths, strict=True):
        assert point.uncertainty is not None
        assert abs(point.value - float(value)) <= point.uncertainty
        assert point.uncertainty <= 1e-6 * point.value
        assert point.measures["max(u)"] == pytest.approx(float(centre), rel=1e-4)
