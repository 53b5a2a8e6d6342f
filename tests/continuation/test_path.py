"""Sizes: branches over many decades, in physical units, along lengths; the same in any of them."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy.optimize import minimize_scalar

import continuation
from bvp import Problem
from continuation.path import Path
from continuation.records import Branch
from tests.campaign.time_map import TimeMap
from tests.problems import body, interval
from tests.reference import KNOWN

INTERVAL = KNOWN["interval, exponential, turning point"].value
ARRHENIUS = "lam*exp(u/(1 + eps*u))"


def on_the_closed_form(parameter: np.ndarray, peak: np.ndarray) -> np.ndarray:
    """lam(u(1/2)) over the given parameter: theta = 4 arcosh(e^(u/2)), lam = theta^2/(2 cosh^2(theta/4))."""
    theta = 4 * np.arccosh(np.exp(peak / 2))
    return theta**2 * np.exp(-peak) / 2 / parameter


def test_branch_of_the_interval_lies_on_its_closed_form() -> None:
    branch = continuation.trace(interval(), scheme="compact", intervals=100, until="max(u) > 25", digits=None, compiled=False)
    assert branch.parameter[-1] < 1e-8 * INTERVAL
    assert len(branch.turning_points) == 1
    ratio = on_the_closed_form(branch.parameter[1:], branch.measure("max(u)")[1:])
    assert ratio == pytest.approx(np.ones(ratio.size), rel=1e-3)
    assert ratio[:20] == pytest.approx(np.ones(20), rel=1e-6)


@pytest.mark.parametrize("start", [1e-12, 1e-6, 1e-3])
def test_a_branch_that_starts_at_a_small_value_is_not_slow(start: float) -> None:
    branch = continuation.trace(interval(), start=start, turning_points_wanted=1, digits=10, compiled=False)
    # geometric steps through the decades: a handful each
    assert branch.parameter.size < 40 + 15 * math.log10(INTERVAL / start)
    assert branch.turning_points[0].value == pytest.approx(INTERVAL, rel=1e-11)
    lower = branch.parameter < 0.01
    assert branch.measure("max(u)")[lower] == pytest.approx(branch.parameter[lower] / 8, rel=0.01)  # u = lam x (1 - x)/2 for small lam


@pytest.mark.parametrize("eps", [0.2, 0.07, 0.04])
def test_hot_turning_point_of_the_arrhenius_slab_decades_below_the_first(eps: float) -> None:
    branch = continuation.trace(body("slab", ARRHENIUS, eps=eps), along="lam", within=(0.0, 5.0), compiled=False)
    assert [point.states for point in branch.turning_points] == ["below", "above"]
    assert branch.ended == "edge of the range"
    assert branch.parameter.size < 250
    integral = TimeMap(
        lambda u: np.exp(u / (1 + eps * u) - 1 / eps), lambda u: 0 * u + 1.0, (), 90
    )  # f e^(-1/eps), that nothing is too large
    hot = branch.turning_points[1]
    peak = hot.measures["max(u)"]
    found = minimize_scalar(
        lambda m: float(integral.parameter(m, 1.0, None)[0]),
        bounds=(0.8 * peak, 1.25 * peak),
        method="bounded",
        options={"xatol": 1e-8 * peak},
    )
    truth = float(found.fun) * math.exp(-1 / eps)
    assert hot.uncertainty is not None
    assert abs(hot.value - truth) <= hot.uncertainty + 1e-12 * truth
    assert hot.uncertainty <= 1e-8 * truth
    assert {0.2: 1.0, 0.07: 1e-3, 0.04: 1e-7}[eps] > truth


def in_kelvin(conductivity: float = 0.2, heat: float = 1e9, energy: float = 1.2e5, wall: float = 300.0, length: float = 1e-3) -> Problem:
    """A plane layer that heats itself: k T'' + Q A exp(-E/(R T)) = 0 with both walls at T0."""
    numbers = {"A": 0.0, "k": conductivity, "Q": heat, "E": energy, "R": 8.314462618, "T0": wall, "L": length}
    return Problem(
        "k*T'' + Q*A*exp(-E/(R*T)) = 0",
        "T",
        domain=("z", 0, "L"),
        conditions=["T(0) = T0", "T(L) = T0"],
        parameters=numbers,
        initial_guess={"T": "T0"},
    )


def without_units(problem: Problem) -> tuple[Problem, float]:
    """The same with u = E (T - T0)/(R T0^2), eps = R T0/E, and lam/A."""
    p = problem.parameters
    eps = p["R"] * p["T0"] / p["E"]
    factor = p["Q"] * p["E"] * p["L"] ** 2 / (p["k"] * p["R"] * p["T0"] ** 2) * math.exp(-p["E"] / (p["R"] * p["T0"]))
    return interval(ARRHENIUS, eps=eps), factor


def rise(branch: Branch, measure: str) -> float:
    """The peak at the turning point."""
    return branch.turning_points[0].measures[measure]


@pytest.mark.parametrize("grid", ["uniform", "adaptive"])
@pytest.mark.parametrize(
    "physical",
    [in_kelvin(), in_kelvin(energy=8e4, wall=700.0, length=0.05), in_kelvin(conductivity=1e-9, heat=1e-3, length=2e3)],
    ids=["rate of 1e18", "hot and wide", "sizes far from 1"],
)
def test_physical_units_make_no_difference(physical: Problem, grid: str) -> None:
    plain, factor = without_units(physical)
    one = continuation.trace(physical, along="A", turning_points_wanted=1, digits=10, grid=grid, compiled=False)
    other = continuation.trace(plain, along="lam", turning_points_wanted=1, digits=10, grid=grid, compiled=False)
    assert one.turning_points[0].value * factor == pytest.approx(other.turning_points[0].value, rel=1e-9)
    assert abs(one.parameter.size - other.parameter.size) <= 5
    wall, eps = physical.parameters["T0"], plain.parameters["eps"]
    assert (rise(one, "max(T)") - wall) / (eps * wall) == pytest.approx(rise(other, "max(u)"), rel=1e-7)
    for name, exponent in (("k", 1.0), ("Q", -1.0), ("L", -2.0)):  # A enters as Q A L^2/k
        assert one.turning_points[0].sensitivity[name] == pytest.approx(exponent, rel=1e-6)


@pytest.mark.parametrize("scheme", ["central", "shell-balance", "fitted", "compact"])
@pytest.mark.parametrize("source", [1e-6, 0.5, 1e8])
def test_tracing_along_a_length(source: float, scheme: str) -> None:
    # lam L^2 is all that counts: the largest length is sqrt(3.5138…/lam).
    problem = Problem("u'' + lam*exp(u) = 0", x=(0, "L"), conditions=["u(0) = 0", "u(L) = 0"], parameters={"L": 1.0, "lam": source})
    point = continuation.turning_point(problem, along="L", start=0.1 / math.sqrt(source), scheme=scheme, digits=10, compiled=False)
    truth = math.sqrt(INTERVAL / source)
    assert point.uncertainty is not None
    assert abs(point.value - truth) <= point.uncertainty + 1e-15 * truth
    assert point.uncertainty <= 1e-9 * truth
    assert point.sensitivity["lam"] == pytest.approx(-0.5, abs=1e-6)
    assert point.states == "below"


@pytest.mark.parametrize(
    ("geometry", "name"), [("cylinder", "cylinder, exponential, turning point"), ("sphere", "sphere, exponential, turning point 1")]
)
def test_tracing_along_a_radius(geometry: str, name: str) -> None:
    problem = Problem(
        "laplacian(u) + lam*exp(u) = 0", geometry=geometry, x=(0, "R"), conditions=["u(R) = 0"], parameters={"R": 0.1, "lam": 7.0}
    )
    for scheme in ("central", "compact"):
        point = continuation.turning_point(problem, along="R", scheme=scheme, digits=9, compiled=False)
        assert point.uncertainty is not None
        assert abs(point.value - math.sqrt(KNOWN[name].value / 7)) <= point.uncertainty


def test_tracing_along_the_place_of_the_left_end() -> None:
    problem = Problem("u'' + lam*exp(u) = 0", x=("a", 1), conditions=["u(a) = 0", "u(1) = 0"], parameters={"a": 0.5, "lam": 1.0})
    point = continuation.turning_point(problem, along="a", direction="down", digits=10, compiled=False)
    assert point.uncertainty is not None
    assert abs(point.value - (1 - math.sqrt(INTERVAL))) <= point.uncertainty
    assert point.states == "above"


def test_scales_are_those_of_the_way_travelled() -> None:
    """A temperature of 300 that has risen by 5 is measured by 5; a parameter that dives below 2 % of its way, by that."""
    from bvp.grid import Grid
    from bvp.newton import Scales
    from continuation.asked import asked

    system = asked(interval(), compiled=False).of.on(Grid(4), {"lam": 0.0})
    path = Path(system, np.full(7, 300.0), 2.0, Scales(1.0, 0.5))
    assert path.scales_at(np.full(7, 305.0), 12.0) == pytest.approx((5.0, 10.0))
    assert path.scales_at(np.full(7, 305.0), 1e-9) == pytest.approx((5.0, 0.2))
    assert path.scales_at(np.full(7, 301.0), 12.0) == pytest.approx((5.0, 10.0))  # the way stays the farthest


def test_a_parameter_that_falls_by_decades_never_passes_zero() -> None:
    branch = continuation.trace(interval(), until="max(u) > 20", digits=None, compiled=False)
    assert np.all(branch.parameter[1:] > 0)  # lam falls by nine decades and is never overshot
