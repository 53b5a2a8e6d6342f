"""Exact facts about difference schemes on few intervals, built in and typed, held against closed forms and dense twins."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

import numpy as np
import pytest
from mpmath import mp, mpf
from scipy.optimize import brentq

import continuation
from bvp import Problem
from bvp.schemes import Scheme, typed
from tests import naive
from tests.problems import body, interval
from tests.reference import KNOWN
from tests.reference_schemes import CENTRAL_INVENTED_FOUR_INTERVALS, CENTRAL_STATES_THREE_INTERVALS, NO_STATE_AT

CLOSE = 1e-10  # relative

CENTRAL = {"equation": "(u[k+1] - 2*u[k] + u[k-1])/h^2 + lam*exp(u[k]) = 0"}
LOGARITHMIC = {"equation": "u[k+1] - 2*u[k] + u[k-1] = -2*log(1 + (lam*h^2/2)*exp(u[k]))"}
FOURTH_ORDER = {"right_hand_side": "(f[k-1] + 10*f[k] + f[k+1])/12"}


def own(problem: Problem, scheme: str | Mapping[str, object], intervals: int, **keywords: object) -> float:
    """The first turning point that a scheme has on exactly so many intervals; a mapping is a typed scheme."""
    used: str | Scheme = scheme if isinstance(scheme, str) else typed("mine", scheme, problem)
    point = continuation.turning_point(
        problem, along="lam", scheme=used, intervals=intervals, grid="uniform", digits=None, compiled=False, **keywords
    )
    return point.on_grid


@pytest.mark.parametrize(
    ("scheme", "intervals", "name"),
    [
        ("central", 2, "central, interval, N 2, turning point"),
        ("central", 3, "central, interval, N 3, turning point"),
        ("central", 10, "central, interval, N 10, turning point"),
        ("central", 256, "central, interval, N 256, turning point"),
        ("fitted", 10, "fitted, interval, N 10, turning point"),
        ("fitted", 20, "fitted, interval, N 20, turning point"),
        ("compact", 32, "fourth order, interval, N 32, turning point"),
        (CENTRAL, 3, "central, interval, N 3, turning point"),
        (CENTRAL, 256, "central, interval, N 256, turning point"),
        ({"equation": "u[k+1] - 2*u[k] + u[k-1] = -h^2*lam*exp(u[k])"}, 10, "central, interval, N 10, turning point"),
        ({"denominator": "step^2"}, 10, "central, interval, N 10, turning point"),
        ({"flux": "(u[k+1] - u[k])/(x[k+1] - x[k])"}, 10, "central, interval, N 10, turning point"),
        (LOGARITHMIC, 8, "logarithmic source, interval, N 8, turning point"),
        (LOGARITHMIC, 64, "logarithmic source, interval, N 64, turning point"),
        (FOURTH_ORDER, 32, "fourth order, interval, N 32, turning point"),
    ],
)
def test_recorded_turning_point_of_a_scheme(scheme: str | Mapping[str, object], intervals: int, name: str) -> None:
    assert own(interval(), scheme, intervals) == pytest.approx(KNOWN[name].value, rel=CLOSE)


def test_fitted_scheme_typed_as_a_whole_equation() -> None:
    b = "(lam*exp(u[k]))"  # of the exponential source both f and its derivative
    whole = {"equation": f"(u[k+1] - 2*u[k] + u[k-1])*{b}/(4*sin(sqrt({b})*h/2)^2) + {b} = 0"}
    for intervals in (10, 20):
        known = KNOWN[f"fitted, interval, N {intervals}, turning point"].value
        assert own(interval(), whole, intervals, start=0.1) == pytest.approx(known, rel=CLOSE)  # 0/0 at lam = 0


def test_two_and_three_intervals_by_hand() -> None:
    # One equation is left: -8u + lam e^u = 0 at N = 2, and 9u = lam e^u (both nodes alike) at N = 3.
    assert own(interval(), "central", 2) == pytest.approx(8 / math.e, rel=1e-13)
    assert own(interval(), "central", 3) == pytest.approx(9 / math.e, rel=1e-13)
    assert own(interval(), {"source": "(u[k-1] + u[k] + u[k+1])/3"}, 2) == pytest.approx(24 / math.e, rel=1e-13)  # 8u = lam e^(u/3)
    assert own(interval(), {"source": "(u[k-1] + u[k] + u[k+1])/3"}, 3) == pytest.approx(13.5 / math.e, rel=1e-13)  # 9u = lam e^(2u/3)
    # 8u = lam (2 + 10 e^u)/12: the maximum is where 2 + 10 e^u = 10 u e^u, u = 1 + W(1/(5e))
    u = float(1 + mp.lambertw(1 / (5 * mp.e)))
    assert own(interval(), FOURTH_ORDER, 2) == pytest.approx(96 * u / (2 + 10 * math.exp(u)), rel=1e-13)


@pytest.mark.parametrize("flow", [-1.5, 0.7])
def test_a_typed_first_difference_by_hand(flow: float) -> None:
    # N = 2: the central first difference vanishes in the middle, the backward one is 2u: (8 - 2c) u = lam e^u.
    problem = Problem("u'' + c*u' + lam*exp(u) = 0", x=(0, 1), conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 0.0, "c": flow})
    assert own(problem, "central", 2) == pytest.approx(8 / math.e, rel=1e-13)
    assert own(problem, {"first": "(u[k] - u[k-1])/h"}, 2) == pytest.approx((8 - 2 * flow) / math.e, rel=1e-13)
    assert own(problem, {"first": "(u[k+1] - u[k])/h"}, 2) == pytest.approx((8 + 2 * flow) / math.e, rel=1e-13)


@pytest.mark.parametrize(("unknown", "coordinate", "term"), [("u", "x", "u^2"), ("T", "s", "T^2"), ("T", "s", "u^2")])
def test_a_term_replaced_by_a_term_by_hand(unknown: str, coordinate: str, term: str) -> None:
    # N = 3, nodes a and b: 9(b - 2a) + lam (1 + ab) = 0 and 9(a - 2b) + lam = 0, so a is a root of a quadratic in b.
    def parameter(b: mpf) -> mpf:
        half = 2 * b * b - 3
        return 9 * (2 * b - (half + mp.sqrt(half * half + 12 * b * b)) / (2 * b))

    top = mp.findroot(lambda b: mp.diff(parameter, b), (mpf("0.2"), mpf(2)), solver="anderson")
    problem = Problem(
        f"{unknown}'' + lam*(1 + {unknown}^2) = 0",
        unknown,
        domain=(coordinate, 0, 1),
        conditions=[f"{unknown}(0) = 0", f"{unknown}(1) = 0"],
        parameters={"lam": 0.0},
    )
    assert own(problem, {"replace": {term: "u[k]*u[k+1]"}}, 3) == pytest.approx(float(parameter(top)), rel=1e-12)


@pytest.mark.parametrize("intervals", [2, 7, 64, 1000])
@pytest.mark.parametrize(
    ("denominator", "exact"),
    [
        ("2*log(cosh(h))", lambda h: 2 * mp.log(mp.cosh(h))),
        ("4*sinh(h/2)^2", lambda h: 4 * mp.sinh(h / 2) ** 2),
        ("sin(h)^2", lambda h: mp.sin(h) ** 2),
        ("h*(exp(h) - 1)", lambda h: h * mp.expm1(h)),
    ],
)
def test_a_denominator_only_rescales_the_parameter(denominator: str, exact, intervals: int) -> None:  # type: ignore[no-untyped-def]
    # lam_phi = lam_central h^2/phi with the same states: the difference equations are the same but for that factor.
    with mp.workdps(40):
        factor = float(1 / (mpf(intervals) ** 2 * exact(1 / mpf(intervals))))
    assert own(interval(), {"denominator": denominator}, intervals) == pytest.approx(
        own(interval(), "central", intervals) * factor, rel=3e-13
    )


def test_built_in_denominator_is_the_typed_one() -> None:
    assert own(interval(), "log-cosh", 30) == pytest.approx(own(interval(), {"denominator": "2*log(cosh(h))"}, 30), rel=1e-15)


def test_product_flux_in_the_sphere_is_the_central_scheme() -> None:
    # x[k] (x[k+1] (u[k+1] - u[k]) - x[k-1] (u[k] - u[k-1]))/h over x[k]^2 h is u'' + (2/x) u' differenced centrally.
    product = {"flux": "x[k]*x[k+1]*(u[k+1] - u[k])/h", "volume": "h*x[k]^2", "axis": "6*(u[k+1] - u[k])/h^2"}
    for intervals in (5, 50):
        assert own(body("sphere"), product, intervals) == pytest.approx(own(body("sphere"), "central", intervals), rel=1e-12)


@pytest.mark.parametrize("intervals", [3, 12])
@pytest.mark.parametrize("bi", [None, 0.7])
@pytest.mark.parametrize(("geometry", "exponent"), [("slab", 0), ("cylinder", 1), ("sphere", 2)])
def test_central_scheme_against_its_dense_twin(geometry: str, exponent: int, bi: float | None, intervals: int) -> None:
    end = naive.Fixed() if bi is None else naive.Cooled(bi)
    twin = naive.NaiveProblem(
        lambda x, u, lam: lam * np.exp(u),
        lambda x, u, lam: lam * np.exp(u),
        left_end=naive.Cooled(),  # symmetry; at an axis the rows take the limit, for which the same mirror image stands
        right_end=end,
        exponent=exponent,
    )
    branch = continuation.trace(
        body(geometry, bi=bi), along="lam", intervals=intervals, grid="uniform", digits=None, turning_points_wanted=1, compiled=False
    )
    point = branch.turning_points[0]
    assert point.state is not None
    lam, u, _ = naive.turning_point(twin, point.state.u * 1.01, point.on_grid * 0.99)
    assert point.on_grid == pytest.approx(lam, rel=1e-11)
    assert point.state.u == pytest.approx(u, rel=1e-6)


@pytest.mark.parametrize("lam", [0.5, 3.0])
def test_exactly_solvable_scheme_has_its_closed_form_at_every_node(lam: float) -> None:
    # w = e^(-u/2) = cosh(k (x - 1/2))/cosh(k/2) with 2 sinh^2(k h) = lam h^2 cosh^2(k/2).
    h = 1 / 8
    problem = interval()
    found = continuation.states_at(
        problem,
        at={"lam": lam},
        scheme=typed("logarithmic", LOGARITHMIC, problem),
        intervals=8,
        discrete=True,
        grid="uniform",
        until="max(u) > 12",
        compiled=False,
    )
    assert len(found.states) == 2

    def row(k: float) -> float:
        return 2 * (math.sinh(k * h) / (h * math.cosh(k / 2))) ** 2 - lam

    top = 2.3  # the k at the turning point lies near it
    for state, (low, high) in zip(found.states, ((1e-3, top), (top, 60.0)), strict=True):
        k = brentq(row, low, high, xtol=1e-14)
        exact = -2 * np.log(np.cosh(k * (state.state.x - 0.5)) / math.cosh(k / 2))
        assert state.state.u == pytest.approx(exact, rel=1e-11, abs=1e-12)


def test_states_of_three_and_four_intervals() -> None:
    # The states that are alike on both sides; the other two pairs lie on branches that leave this one at a pitchfork.
    keywords: dict[str, Any] = {"discrete": True, "grid": "uniform", "within": (-1.0, 4.0), "until": "max(u) > 15", "compiled": False}
    three = continuation.states_at(interval(), at={"lam": 1.0}, intervals=3, **keywords)
    for found, known in zip(three.states, CENTRAL_STATES_THREE_INTERVALS["lam 1"][:2], strict=True):
        assert found.state.u[1:-1] == pytest.approx(known, abs=1e-8)
    assert [found.unstable_directions for found in three.states] == [0, 2]  # past the pitchfork that the equation has not, at u = 3
    four = continuation.states_at(interval(), at={"lam": 0.01}, intervals=4, **keywords)
    assert four.states[1].state.u[1:-1] == pytest.approx(CENTRAL_INVENTED_FOUR_INTERVALS[0], abs=1e-6)
    assert len(continuation.states_at(interval(), at={"lam": 0.2}, intervals=4, **keywords).states) == 2


def test_branch_of_two_intervals_is_its_closed_form_over_hundreds_of_decades() -> None:
    branch = continuation.trace(
        interval(), measure="u(1/2)", intervals=2, grid="uniform", digits=None, until="u(1/2) > 600", compiled=False
    )
    u = branch.measure("u(1/2)")
    assert u[-1] > 600
    assert branch.parameter == pytest.approx(8 * u * np.exp(-u), rel=1e-7, abs=0.0)  # points on the way are solved to 1e-9 of u
    assert len(branch.turning_points) == 1
    assert branch.ended == "until"


def test_the_scheme_loses_states_that_the_equation_has() -> None:
    # Its own turning point on 10 intervals lies below 3.5 (3.4954…), that of the equation above.
    scheme = continuation.states_at(interval(), at={"lam": 3.5}, intervals=10, grid="uniform", discrete=True, compiled=False)
    assert scheme.states == ()
    assert "10 intervals" in scheme.notes[0]
    assert "3.495493294" in scheme.notes[0]
    equation = continuation.states_at(interval(), at={"lam": 3.5}, intervals=10, compiled=False)
    assert equation.complete
    for found, side in zip(equation.states, ("lower", "upper"), strict=True):
        uncertainty = found.uncertainty["max(u)"]
        assert uncertainty is not None
        assert KNOWN[f"interval, exponential, lam 3.5, {side}, u(1/2)"].agrees(found.measures["max(u)"], uncertainty)


@pytest.mark.parametrize("lam", [*NO_STATE_AT, 3.7, 1e6])
def test_no_state_is_reported_past_the_turning_point(lam: float) -> None:
    found = continuation.states_at(interval(), at={"lam": lam}, compiled=False)
    assert found.states == ()
    assert "3.513830719" in found.notes[0]
    assert found.margin["past"]
    assert found.margin["turning_point"] == pytest.approx(KNOWN["interval, exponential, turning point"].value, rel=1e-11)


def test_two_states_just_below_the_turning_point() -> None:
    found = continuation.states_at(interval(), at={"lam": 3.5138}, compiled=False)
    assert [state.unstable_directions for state in found.states] == [0, 1]
    assert not found.margin["past"]
