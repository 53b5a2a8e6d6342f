"""The states at a parameter value: all of those on the branch and no others, with uncertainties that hold, up to the turning point."""

from __future__ import annotations

import math

import numpy as np
import pytest
from mpmath import mp, mpf
from scipy.optimize import brentq

import continuation
from bvp import Problem
from bvp.errors import InputError
from continuation.states import traced_with_states
from tests.campaign.time_map import TimeMap
from tests.problems import body, interval
from tests.reference import KNOWN

INTERVAL = KNOWN["interval, exponential, turning point"]
ARRHENIUS = "lam*exp(u/(1 + eps*u))"


def angles(lam: float) -> tuple[float, float]:
    """The two theta = sqrt(2 lam) cosh(theta/4) of the interval, by halving with 30 digits."""

    def root(below: mpf, above: mpf) -> float:
        for _ in range(110):
            middle = (below + above) / 2
            inside = middle < mp.sqrt(2 * mpf(lam)) * mp.cosh(middle / 4)
            below, above = (middle, above) if inside else (below, middle)
        return float(below)

    with mp.workdps(30):
        top = 4 * mp.findroot(lambda a: a - mp.coth(a), mpf("1.2"))
        return root(mpf(0), top), root(mpf(60), top)


def peak(theta: float) -> float:
    """u(1/2) = 2 ln cosh(theta/4)."""
    return 2 * math.log1p(2 * math.sinh(theta / 8) ** 2)


def exact_state(theta: float, x: np.ndarray) -> np.ndarray:
    """u = -2 ln(cosh((x - 1/2) theta/2)/cosh(theta/4))."""
    return peak(theta) - 2 * np.log1p(2 * np.sinh((x - 0.5) * theta / 4) ** 2)


@pytest.mark.parametrize("scheme", ["central", "compact"])
@pytest.mark.parametrize("lam", [0.01, 1.0, 3.5138])
def test_both_states_of_the_interval_with_all_their_measures(lam: float, scheme: str) -> None:
    measures = ["max(u)", "u(0.3)", "u'(0)", "integral(exp(u))"]
    grid = "adaptive" if scheme == "central" else "uniform"
    found = continuation.states_at(
        interval(), at={"lam": lam}, measure=measures, scheme=scheme, grid=grid, until="max(u) > 14", compiled=False
    )
    assert found.asked == "equation"
    assert found.complete
    assert [state.unstable_directions for state in found.states] == [0, 1]
    for state, theta in zip(found.states, angles(lam), strict=True):
        slope = theta * math.tanh(theta / 4)
        truths = [peak(theta), float(exact_state(theta, np.array([0.3]))[0]), slope, 2 * slope / lam]
        for measure, truth in zip(measures, truths, strict=True):
            uncertainty = state.uncertainty[measure]
            assert uncertainty is not None
            assert abs(state.measures[measure] - truth) <= uncertainty + 1e-14 * abs(truth), measure
            assert uncertainty <= 1e-4 * truth
        assert state.state.u == pytest.approx(exact_state(theta, state.state.x), rel=1e-4, abs=1e-6)
        assert state.residual < 1e-12
        assert state.branch == "main"


@pytest.mark.parametrize("distance", [1e-5, 1e-6, 3e-8])
def test_states_next_to_the_turning_point_are_told_apart(distance: float) -> None:
    # They differ from its state by about the root of the distance; the scheme's own turning point on 200 intervals lies 5e-5 below.
    lam = INTERVAL.value - distance
    found = continuation.states_at(interval(), at={"lam": lam}, grid="uniform", until="max(u) > 3", compiled=False)
    assert [state.unstable_directions for state in found.states] == [0, 1]
    for state, theta in zip(found.states, angles(lam), strict=True):
        truth, uncertainty = peak(theta), state.uncertainty["max(u)"]
        assert uncertainty is not None
        assert abs(state.measures["max(u)"] - truth) <= uncertainty
    assert (
        found.states[0].measures["max(u)"]
        < KNOWN["interval, exponential, turning point, u(1/2)"].value
        < found.states[1].measures["max(u)"]
    )


def test_within_the_uncertainty_of_the_turning_point_nothing_is_decided() -> None:
    found = continuation.states_at(interval(), at={"lam": INTERVAL.value}, until="max(u) > 3", compiled=False)
    assert not found.complete
    assert "undecided" in found.notes[0]


@pytest.mark.parametrize("past", [1e-9, 1e-6, 1e-3, 1.0])
def test_past_the_turning_point_there_is_none_and_the_note_says_where_it_lies(past: float) -> None:
    found = continuation.states_at(interval(), at={"lam": INTERVAL.value + past}, digits=10, until="max(u) > 3", compiled=False)
    assert found.states == ()
    assert found.complete
    assert "3.5138307" in found.notes[0]
    assert found.margin["past"]
    assert found.margin["distance"] == pytest.approx(-past, abs=1e-10)
    assert found.margin["uncertainty"] < 1e-9


@pytest.mark.parametrize(("lam", "directions"), [(1.0, [0]), (1.15, [0, 1, 0]), (1.0922, [0, 1, 0]), (1.2142, [0, 1, 0]), (1.3, [0])])
def test_one_or_three_states_of_an_s(lam: float, directions: list[int]) -> None:
    # Turning points 1.092145… and 1.214265… (see tests.reference); the middle state is the unstable one.
    found = continuation.states_at(
        body("slab", ARRHENIUS, eps=0.22), along="lam", at={"lam": lam}, within=(0, 4), grid="uniform", compiled=False
    )
    assert [state.unstable_directions for state in found.states] == directions
    assert found.complete
    integral = TimeMap(lambda u: np.exp(u / (1 + 0.22 * u)), lambda u: 0 * u + 1.0, (), 48)
    for state in found.states:
        peak, uncertainty = state.measures["max(u)"], state.uncertainty["max(u)"]
        assert uncertainty is not None
        width = max(uncertainty, 1e-11 * peak)  # the energy integral's lam(m) passes the value within the uncertainty of m
        ends = [float(integral.parameter(peak + side * width, 1.0, None)[0]) - lam for side in (-1, 1)]
        assert ends[0] * ends[1] < 0
    assert found.margin["past"] == (len(directions) == 1)


def test_other_parameters_can_be_given_with_the_value() -> None:
    found = continuation.states_at(
        body("slab", ARRHENIUS, eps=0.22), along="lam", at={"lam": 1.15, "eps": 0.0}, within=(0, 4), grid="uniform", compiled=False
    )
    assert found.at == {"lam": 1.15, "eps": 0.0}
    assert found.states == ()  # the exponential source turns at 0.878


@pytest.mark.parametrize(("start", "lam"), [(1.0, 0.5), (1.0, 2.0), (2.0, 2.0), (3.4, 0.5)])
def test_states_do_not_depend_on_where_the_trace_starts(start: float, lam: float) -> None:
    found = continuation.states_at(
        interval(), at={"lam": lam}, start=start, within=(0.0, 4.0), until="max(u) > 7", grid="uniform", compiled=False
    )
    known = [KNOWN[f"interval, exponential, lam {lam:g}, {side}, u(1/2)"] for side in ("lower", "upper")]
    for state, one in zip(found.states, known, strict=True):
        uncertainty = state.uncertainty["max(u)"]
        assert uncertainty is not None
        assert one.agrees(state.measures["max(u)"], uncertainty)


def test_source_switched_off_and_a_sink() -> None:
    nothing = continuation.states_at(interval(), at={"lam": 0.0}, within=(-1.0, 4.0), until="max(u) > 3", compiled=False)
    assert [state.measures["max(u)"] for state in nothing.states] == [0.0]
    # lam < 0: cos in place of cosh, u = -2 ln(cos(z (2x - 1))/cos z) with 8 z^2 = |lam| cos^2 z
    sink = continuation.states_at(interval(), at={"lam": -3.0}, measure="u(1/2)", within=(-4.0, 0.0), compiled=False)
    z = brentq(lambda z: 8 * z * z - 3 * math.cos(z) ** 2, 0.1, 1.5, xtol=1e-15)
    (state,) = sink.states
    assert state.uncertainty["u(1/2)"] is not None
    assert abs(state.measures["u(1/2)"] - 2 * math.log(math.cos(z))) <= state.uncertainty["u(1/2)"]
    assert state.unstable_directions == 0


def test_the_cylinder_has_its_two_closed_forms() -> None:
    # lam = 8B/(1+B)^2 with u(0) = 2 ln(1 + B); two B with product 1.
    for lam in (0.5, 1.5, 1.999):
        root = math.sqrt(1 - lam / 2)
        truths = sorted(2 * math.log(1 + b) for b in ((4 / lam - 1) - 4 / lam * root, (4 / lam - 1) + 4 / lam * root))
        found = continuation.states_at(
            body("cylinder"), at={"lam": lam}, scheme="shell-balance", grid="uniform", until="max(u) > 7", compiled=False
        )
        for state, truth in zip(found.states, truths, strict=True):
            uncertainty = state.uncertainty["max(u)"]
            assert uncertainty is not None
            assert abs(state.measures["max(u)"] - truth) <= uncertainty + 1e-14
        assert [state.unstable_directions for state in found.states] == [0, 1]


def test_states_and_branch_from_one_trace() -> None:
    branch, found = traced_with_states(interval(), [1.0, 3.5, 3.6], within=(0.0, 4.0), until="max(u) > 8", compiled=False)
    assert branch.ended in ("until", "edge of the range")
    assert [len(found[value].states) for value in (1.0, 3.5, 3.6)] == [2, 2, 0]
    for value, alone in ((1.0, found[1.0]), (3.5, found[3.5])):
        for state, side in zip(alone.states, ("lower", "upper"), strict=True):
            uncertainty = state.uncertainty["max(u)"]
            assert uncertainty is not None
            assert KNOWN[f"interval, exponential, lam {value:g}, {side}, u(1/2)"].agrees(state.measures["max(u)"], uncertainty)


def test_a_scheme_that_solves_another_equation_gives_states_without_uncertainty() -> None:
    from bvp.schemes import typed

    problem = interval()
    wrong = typed("mine", {"equation": "(u[k+1] - 2*u[k] + u[k-1])/h^2 + 1.5*lam*exp(u[k]) = 0"}, problem)
    found = continuation.states_at(problem, at={"lam": 2.0}, scheme=wrong, until="max(u) > 6", compiled=False)
    # they are those at 3.0 of the equation it does solve
    for state, side in zip(found.states, ("lower", "upper"), strict=True):
        assert state.measures["max(u)"] == pytest.approx(KNOWN[f"interval, exponential, lam 3, {side}, u(1/2)"].value, rel=1e-7)
        assert state.uncertainty == {"max(u)": None}
    assert any("scheme's own" in note for note in found.notes)


def test_a_value_that_the_branch_does_not_reach_says_how_it_ended() -> None:
    found = continuation.states_at(interval(), at={"lam": 3.0}, until="max(u) > 0.2", compiled=False)
    assert found.states == ()
    assert "until" in found.notes[0]


def test_what_is_asked_for_is_checked() -> None:
    problem = Problem("u'' + lam*exp(u/(1 + eps*u)) = 0", conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 0.0, "eps": 0.1})
    with pytest.raises(InputError, match="along"):
        continuation.states_at(problem, at={"lam": 1.0, "eps": 0.2}, compiled=False)
    with pytest.raises(InputError, match="finite"):
        continuation.states_at(interval(), at={"lam": math.nan}, compiled=False)
    with pytest.raises(InputError, match="mu"):
        continuation.states_at(interval(), along="lam", at={"lam": 1.0, "mu": 1.0}, compiled=False)
