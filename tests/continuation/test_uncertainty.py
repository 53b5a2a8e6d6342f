"""Uncertainties hold: assorted problems whose turning points are known by other means, and schemes that deserve none."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cache
from typing import Any

import numpy as np
import pytest
from scipy.optimize import minimize_scalar

import continuation
from bvp import Problem
from bvp.schemes import typed
from tests.campaign.time_map import TimeMap
from tests.problems import body, interval
from tests.reference import KNOWN

TRUTH = 3e-14  # relative, of Gauss quadrature in doubles at a flat maximum
INTERVAL = KNOWN["interval, exponential, turning point"].value


ALL = ("central", "shell-balance", "radial-exact", "fitted", "log-cosh", "compact")
FLUX = ("central", "shell-balance", "radial-exact", "log-cosh")  # that have a form for a conductivity
NO_SLOPE = ("central", "compact", "log-cosh")  # that do not need f' where f has a corner


@dataclass(frozen=True)
class Autonomous:
    """(k(u) u')' + lam f(u) = 0 with u = 0 or cooling at both walls, as a problem and as an energy integral."""

    source: str
    f: Callable[[Any], Any]
    most: float = 6.0  # of u in the middle at the turning point
    parameters: dict[str, float] = field(default_factory=dict)
    conductivity: str = ""
    k: Callable[[Any], Any] = lambda u: 0 * u + 1.0
    bi: float | None = None
    kinks: tuple[float, ...] = ()
    half: float = 0.5
    schemes: tuple[str, ...] = ALL

    def problem(self) -> Problem:
        """The problem on [0, 2 half]."""
        operator = f"(({self.conductivity})*u')'" if self.conductivity else "u''"
        flux = f"({self.conductivity})*" if self.conductivity else ""
        ends = ["u(0) = 0", "u(L) = 0"]
        if self.bi is not None:
            ends = [f"-{_at(flux, '0')}u'(0) + Bi*u(0) = 0", f"{_at(flux, 'L')}u'(L) + Bi*u(L) = 0"]
        numbers = {"lam": 0.0, "L": 2 * self.half, **self.parameters, **({} if self.bi is None else {"Bi": self.bi})}
        return Problem(f"{operator} + lam*({self.source}) = 0", x=(0, "L"), conditions=ends, parameters=numbers)

    def truth(self) -> float:
        """The largest lam of the lowest states, by the energy integral (see tests.campaign.time_map)."""
        coarse, integral = TimeMap(self.f, self.k, self.kinks, 16), TimeMap(self.f, self.k, self.kinks, 40)
        middles = np.linspace(0.02, 0.999, 50) * self.most
        values: list[float] = []
        while len(values) < 2 or values[-1] >= values[-2]:
            values.append(float(coarse.parameter(float(middles[len(values)]), self.half, self.bi)[0]))
        top = len(values) - 2
        found = minimize_scalar(
            lambda m: -float(integral.parameter(m, self.half, self.bi)[0]),
            bounds=(float(middles[max(top - 1, 0)]), float(middles[top + 1])),
            method="bounded",
            options={"xatol": 1e-7 * self.most},
        )
        return -float(found.fun)


def _at(flux: str, place: str) -> str:
    return flux.replace("u", f"u({place})")


AUTONOMOUS: dict[str, Autonomous] = {
    "exponential": Autonomous("exp(u)", np.exp),
    "quadratic": Autonomous("1 + u^2", lambda u: 1 + u**2),
    "power 1.5": Autonomous("(1 + u)^p", lambda u: (1 + u) ** 1.5, 30.0, {"p": 1.5}),
    "power 3": Autonomous("(1 + u)^3", lambda u: (1 + u) ** 3),
    "Arrhenius": Autonomous("exp(u/(1 + eps*u))", lambda u: np.exp(u / (1 + 0.1 * u)), 6.0, {"eps": 0.1}),
    "membrane": Autonomous("1/(1 - u)^2", lambda u: (1 - u) ** -2.0, 0.99),
    "hyperbolic": Autonomous("cosh(u)", np.cosh),
    "quintic": Autonomous("1 + u/2 + u^5", lambda u: 1 + u / 2 + u**5),
    "wavy": Autonomous("exp(u) + 0.3*sin(3*u)", lambda u: np.exp(u) + 0.3 * np.sin(3 * u)),
    "root": Autonomous("sqrt(1 + u)*exp(u)", lambda u: np.sqrt(1 + u) * np.exp(u)),
    "logarithm": Autonomous("exp(u)*log(2 + u)", lambda u: np.exp(u) * np.log(2 + u)),
    "step": Autonomous("exp(u + tanh(u))", lambda u: np.exp(u + np.tanh(u))),
    "wide": Autonomous("exp(u)", np.exp, half=50.0),
    "narrow": Autonomous("exp(u/300)", lambda u: np.exp(u / 300), 1800.0, half=5e-4),
    "cooled": Autonomous("exp(u)", np.exp, bi=1.3),
    "hardly cooled": Autonomous("1 + u^2", lambda u: 1 + u**2, bi=0.02),
    "cooled Arrhenius": Autonomous("exp(u/(1 + eps*u))", lambda u: np.exp(u / (1 + 0.05 * u)), 6.0, {"eps": 0.05}, bi=8.0),
    "conducting": Autonomous("exp(u)", np.exp, conductivity="1 + u/2", k=lambda u: 1 + u / 2, schemes=FLUX),
    "insulating": Autonomous("exp(u)", np.exp, conductivity="exp(-u/4)", k=lambda u: np.exp(-u / 4), schemes=FLUX),
    "conducting, cooled": Autonomous("exp(u)", np.exp, conductivity="1 + u/2", k=lambda u: 1 + u / 2, bi=2.0, schemes=FLUX),
    "kink": Autonomous("exp(u) + abs(u - 0.5)", lambda u: np.exp(u) + np.abs(u - 0.5), kinks=(0.5,), schemes=NO_SLOPE),
    "onset": Autonomous("1 + max(u - 0.3, 0)^2", lambda u: 1 + np.maximum(u - 0.3, 0) ** 2, kinks=(0.3,), schemes=NO_SLOPE),
    "ramp": Autonomous("max(exp(u), 1 + 3*u)", lambda u: np.maximum(np.exp(u), 1 + 3 * u), kinks=(1.9038136944403565,), schemes=NO_SLOPE),
    "clipped": Autonomous("exp(u) - min(u, 0.8)", lambda u: np.exp(u) - np.minimum(u, 0.8), kinks=(0.8,), schemes=NO_SLOPE),
}

ZERO = ["u(0) = 0", "u(1) = 0"]

# Coefficients of x that a change of variable takes away: equation, parameters, conditions, turning point.
GIVEN: dict[str, tuple[str, dict[str, float], list[str], float]] = {
    # y = ln(1 + x): ((1 + x) u')' = u_yy/(1 + x), length ln 2
    "conductivity 1 + x": ("((1 + x)*u')' + lam*exp(u)/(1 + x) = 0", {}, ZERO, INTERVAL / math.log(2) ** 2),
    # y = (1 - e^(-c x))/c: (e^(c x) u')' = e^(-c x) u_yy, length (1 - e^-c)/c
    "conductivity e^(c x)": (
        "(exp(c*x)*u')' + lam*exp(u - c*x) = 0",
        {"c": 1.5},
        ZERO,
        INTERVAL * (1.5 / (1 - math.exp(-1.5))) ** 2,
    ),
    # the same y: u'' + c u' = e^(-2 c x) u_yy
    "drift": ("u'' + c*u' + lam*exp(u - 2*c*x) = 0", {"c": 1.5}, ZERO, INTERVAL * (1.5 / (1 - math.exp(-1.5))) ** 2),
    "counter drift": ("u'' + c*u' + lam*exp(u - 2*c*x) = 0", {"c": -0.8}, ZERO, INTERVAL * (0.8 / (math.exp(0.8) - 1)) ** 2),
    # v = u + c x (1 - x): v'' = u'' - 2c, and v = 0 at both ends
    "shifted": ("u'' - 2*c + lam*exp(u + c*x*(1 - x)) = 0", {"c": 0.7}, ZERO, INTERVAL),
    # v = u - b - c x is 0 at both ends: lam e^b e^(c x) e^v
    "tilted": ("u'' + lam*exp(u - c*x) = 0", {"b": 0.4, "c": 0.9}, ["u(0) = b", "u(1) = b + c"], INTERVAL * math.exp(-0.4)),
    # a wall temperature of 300 that rises by 20 u, lam of 1e12
    "physical": (
        "T'' + 20*lam*1e-12*exp((T - 300)/20) = 0".replace("T", "u"),
        {},
        ["u(0) = 300", "u(1) = 300"],
        INTERVAL * 1e12,
    ),
}


@cache
def truth_of(name: str) -> float:
    """Each truth once."""
    return AUTONOMOUS[name].truth()


def check(problem: Problem, truth: float, scheme: str, grid: str, digits: int = 8, widest: float = 1e-7) -> None:
    """The turning point is known to that many digits, and its truth is within the uncertainty."""
    point = continuation.turning_point(problem, along="lam", scheme=scheme, grid=grid, digits=digits, compiled=False)
    assert point.uncertainty is not None, point.notes
    assert abs(point.value - truth) <= point.uncertainty + TRUTH * truth, f"{point.value!r} ± {point.uncertainty:.1e}, truth {truth!r}"
    assert point.uncertainty <= widest * truth


@pytest.mark.parametrize(
    ("name", "scheme", "grid"),
    # Three schemes each, in turn, one of them on the adaptive grid.
    [
        (name, scheme, grid)
        for turn, (name, about) in enumerate(AUTONOMOUS.items())
        for shift, grid in enumerate(("uniform", "adaptive", "uniform"))
        for scheme in [about.schemes[(turn + shift) % len(about.schemes)]]
    ],
)
def test_uncertainty_holds_against_the_energy_integral(name: str, scheme: str, grid: str) -> None:
    check(AUTONOMOUS[name].problem(), truth_of(name), scheme, grid)


@pytest.mark.parametrize("digits", [3, 5, 11])
@pytest.mark.parametrize("name", ["Arrhenius", "membrane", "quintic", "cooled", "conducting"])
def test_uncertainty_holds_for_few_and_for_many_digits(name: str, digits: int) -> None:
    check(AUTONOMOUS[name].problem(), truth_of(name), "central", "uniform", digits, 10.0**-digits)


@pytest.mark.parametrize("scheme", ["central", "shell-balance", "log-cosh"])
@pytest.mark.parametrize("name", GIVEN)
def test_uncertainty_holds_where_a_change_of_variable_gives_the_truth(name: str, scheme: str) -> None:
    equation, numbers, ends, truth = GIVEN[name]
    problem = Problem(equation, conditions=ends, parameters={"lam": 0.0, **numbers})
    check(problem, truth, scheme, "uniform")
    check(problem, truth, scheme, "adaptive")


@pytest.mark.parametrize("scheme", ["central", "fitted", "compact"])
@pytest.mark.parametrize("place", [0.3, 0.5, 0.777])
def test_uncertainty_holds_where_a_coefficient_has_a_corner(place: float, scheme: str) -> None:
    # With v = u + max(x - a, 0)^3: v'' + lam e^v = 0 and v = 0 at both ends; the corner is a node of some grids and of none.
    problem = Problem(
        "u'' + 6*max(x - a, 0) + lam*exp(u + max(x - a, 0)^3) = 0",
        conditions=["u(0) = 0", "u(1) = -(1 - a)^3"],
        parameters={"lam": 0.0, "a": place},
    )
    for digits in (4, 8):
        check(problem, INTERVAL, scheme, "uniform", digits, 10.0 ** (1 - digits))


INCONSISTENT: dict[str, dict[str, str]] = {
    "wrong factor": {"equation": "(u[k+1] - 2*u[k] + u[k-1])/h^2 + 1.001*lam*exp(u[k]) = 0"},
    "denominator of the first order": {"denominator": "h^2*(2 + h)"},
    "source of another node": {"source": "(u[k] + u[k+1])/3"},
    "flux with an area of its own": {"flux": "2*(u[k+1] - u[k])/(x[k+1] - x[k])"},
}


@pytest.mark.parametrize("name", INCONSISTENT)
def test_a_scheme_that_solves_another_equation_gets_no_uncertainty(name: str) -> None:
    problem = Problem("laplacian(u) + lam*exp(u) = 0", conditions=ZERO, parameters={"lam": 0.0})
    point = continuation.turning_point(problem, scheme=typed("mine", INCONSISTENT[name], problem), compiled=False)
    assert abs(point.value - INTERVAL) > 1e-3  # it converges, to something else
    assert point.uncertainty is None
    assert set(point.measure_uncertainty.values()) == {None}
    assert any("scheme's own" in note and "mine" in note for note in point.notes)


def test_a_scheme_with_a_wrong_end_gets_no_uncertainty() -> None:
    problem = Problem("u'' + lam*exp(u) = 0", conditions=["u(0) = 0", "u'(1) + u(1) = 0"], parameters={"lam": 0.0})
    wrong = typed("mine", {"end": "(u[k+1] - u[k-1])/h"}, problem)  # twice the derivative
    point = continuation.turning_point(problem, scheme=wrong, grid="uniform", compiled=False)
    assert point.uncertainty is None
    assert any("u'(1) + u(1) = 0" in note for note in point.notes)


@pytest.mark.parametrize(
    "keys",
    [
        {"denominator": "2*log(cosh(h))"},
        {"denominator": "h*sin(h)"},
        {"source": "(u[k-1] + u[k] + u[k+1])/3"},
        {"right_hand_side": "(f[k-1] + 10*f[k] + f[k+1])/12"},
        {"equation": "u[k+1] - 2*u[k] + u[k-1] = -2*log(1 + (lam*h^2/2)*exp(u[k]))"},
        {"equation": "(u[k+1] - 2*u[k] + u[k-1])/h^2 + lam*(exp(u[k+1]) + exp(u[k-1]))/2 = 0"},
        {"denominator": "h*(exp(h) - 1)"},  # of first order: odd powers of h
        {"source": "(u[k] + u[k+1])/2"},  # the same, and not symmetric
    ],
)
def test_a_typed_scheme_that_is_consistent_gets_an_uncertainty_that_holds(keys: dict[str, str]) -> None:
    problem = interval()
    point = continuation.turning_point(problem, scheme=typed("mine", keys, problem), digits=8, grid="uniform", compiled=False)
    assert point.uncertainty is not None
    assert abs(point.value - INTERVAL) <= point.uncertainty
    assert point.uncertainty <= 1e-7 * INTERVAL


def test_uncertainty_shrinks_with_the_digits_wanted_and_is_not_wide() -> None:
    known = KNOWN["sphere, exponential, turning point 2"]
    for digits in (3, 6, 9):
        branch = continuation.trace(body("sphere"), turning_points_wanted=2, digits=digits, compiled=False)
        uncertainty = branch.turning_points[1].uncertainty
        assert uncertainty is not None
        assert uncertainty <= 10.0**-digits * known.value
        assert known.agrees(branch.turning_points[1].value, uncertainty)
