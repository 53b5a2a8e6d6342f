"""The parameter at which a measure has a value: every place on the branch, with an uncertainty that holds."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import brentq

import continuation
from bvp import Problem
from bvp.errors import InputError
from tests.campaign.time_map import TimeMap
from tests.problems import body, interval
from tests.reference import KNOWN


def parameter_at_peak(peak: float) -> float:
    """lam of the interval with u(1/2) = peak: theta = 4 arcosh(e^(u/2)), lam = theta^2 e^(-u)/2."""
    theta = 4 * math.asinh(math.sqrt(math.expm1(peak)))  # cosh^2 - 1 = e^u - 1
    return theta**2 * math.exp(-peak) / 2


@pytest.mark.parametrize("grid", ["uniform", "adaptive"])
@pytest.mark.parametrize("scheme", ["central", "fitted", "log-cosh", "compact"])
@pytest.mark.parametrize("peak", [1e-3, 0.4, 1.2, 3.0, 8.0])
def test_peak_of_the_interval_against_its_closed_form(peak: float, scheme: str, grid: str) -> None:
    found = continuation.reach(
        interval(), when=f"max(u) = {peak}", until=f"max(u) > {1.5 * peak}", scheme=scheme, grid=grid, compiled=False
    )
    (place,) = found.points
    truth = parameter_at_peak(peak)
    assert place.uncertainty is not None
    assert abs(place.value - truth) <= place.uncertainty + 1e-14 * truth
    assert place.uncertainty <= 1e-7 * truth
    assert place.unstable_directions == (0 if peak < KNOWN["interval, exponential, turning point, u(1/2)"].value else 1)
    assert place.state.measure("max(u)") == pytest.approx(peak, rel=1e-4)
    assert found.along == "lam"


@pytest.mark.parametrize("peak", [1.18, 1.186842, 1.1868421686])
def test_next_to_the_turning_point_the_parameter_is_flat_and_no_obstacle(peak: float) -> None:
    found = continuation.reach(interval(), when=f"u(1/2) = {peak}", until="max(u) > 2", compiled=False)
    (place,) = found.points
    assert place.uncertainty is not None
    assert abs(place.value - parameter_at_peak(peak)) <= place.uncertainty
    assert place.uncertainty <= 1e-7


def test_every_place_of_the_branch_is_found_in_its_order() -> None:
    # Asked of the parameter itself, the S of eps = 0.22 gives its three states.
    found = continuation.reach(
        body("slab", "lam*exp(u/(1 + eps*u))", eps=0.22),
        along="lam",
        when="lam*integral(exp(u/(1 + eps*u))) = 10",
        within=(0, 3),
        compiled=False,
    )
    assert len(found.points) == 1  # the heat that is made grows all along the branch
    three = continuation.reach(
        body("slab", "lam*exp(u/(1 + eps*u))", eps=0.22), along="lam", when="lam = 1.15 + 0*max(u)", within=(0, 3), compiled=False
    )
    states = continuation.states_at(
        body("slab", "lam*exp(u/(1 + eps*u))", eps=0.22), along="lam", at={"lam": 1.15}, within=(0, 3), compiled=False
    )
    assert [place.value for place in three.points] == pytest.approx([1.15] * 3, abs=1e-9)
    assert [place.measures["max(u)"] for place in three.points] == pytest.approx(
        [one.measures["max(u)"] for one in states.states], rel=1e-6
    )
    assert [place.unstable_directions for place in three.points] == [0, 1, 0]


def test_energy_integral_of_an_s() -> None:
    integral = TimeMap(lambda u: np.exp(u / (1 + 0.22 * u)), lambda u: 0 * u + 1.0, (), 48)
    for peak in (0.5, 3.5, 6.0, 15.0):
        found = continuation.reach(
            body("slab", "lam*exp(u/(1 + eps*u))", eps=0.22), along="lam", when=f"u(0) = {peak}", within=(0, 3), compiled=False
        )
        (place,) = found.points
        assert place.uncertainty is not None
        assert abs(place.value - float(integral.parameter(peak, 1.0, None)[0])) <= place.uncertainty + 1e-13


def test_a_length_at_which_a_layer_reaches_a_temperature() -> None:
    problem = Problem("u'' + exp(u) = 0", x=(0, "L"), conditions=["u(0) = 0", "u(L) = 0"], parameters={"L": 0.1})
    found = continuation.reach(problem, when="max(u) = 1", until="max(u) > 2", compiled=False)
    (place,) = found.points
    assert place.uncertainty is not None
    assert abs(place.value - math.sqrt(parameter_at_peak(1.0))) <= place.uncertainty


@pytest.mark.parametrize(
    ("when", "truth"),
    [
        # all of u = 2 ln((1 + B)/(1 + B r^2)), lam = 8B/(1 + B)^2 in the cylinder
        ("u(0) = 2", lambda: math.e - 1),
        ("u'(1) = -1", lambda: 1 / 3),  # u'(1) = -4B/(1 + B)
        ("u(1/2) = 1", lambda: brentq(lambda b: 2 * math.log((1 + b) / (1 + b / 4)) - 1, 0.1, 50, xtol=1e-14)),
        ("2*integral(exp(u)) = 3", lambda: 2.0),  # integral of r e^u = (1 + B)/2
        ("max(u) + u'(1) = -0.5", lambda: brentq(lambda b: 2 * math.log(1 + b) - 4 * b / (1 + b) + 0.5, 0.01, 0.9, xtol=1e-15)),
    ],
)
def test_measures_of_the_cylinder(when: str, truth) -> None:  # type: ignore[no-untyped-def]
    b = truth()
    found = continuation.reach(body("cylinder"), when=when, until="max(u) > 3", compiled=False)
    place = found.points[0]
    exact = 8 * b / (1 + b) ** 2
    assert place.uncertainty is not None
    assert abs(place.value - exact) <= place.uncertainty + 1e-13
    assert place.uncertainty <= 1e-6 * exact


def test_a_value_that_is_nowhere_reached_says_how_the_branch_ended() -> None:
    found = continuation.reach(interval(), when="max(u) = 1.2", within=(0.0, 3.0), compiled=False)
    assert found.points == ()
    assert "edge of the range" in found.notes[-1]
    assert "max(u) = 1.2" in found.notes[-1]


def test_first_and_last_point_count() -> None:
    found = continuation.reach(interval(), when="max(u) = 0", within=(0.0, 1.0), compiled=False)
    assert [place.value for place in found.points] == pytest.approx([0.0], abs=1e-15)


def test_what_is_no_equation_is_refused() -> None:
    for when in ("max(u)", "max(u) > 1", "u = 1"):
        with pytest.raises(InputError):
            continuation.reach(interval(), when=when, compiled=False)
