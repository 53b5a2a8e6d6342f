"""Turning points that a step could skip, closed loops, and every ending of a branch."""

from __future__ import annotations

import numpy as np
import pytest

import continuation
from bvp import Problem
from bvp.errors import ComputationError
from continuation.asked import Event
from continuation.step_length import FOR_FIGURES, ON_THE_WAY, StepLength
from tests.campaign.time_map import TimeMap
from tests.problems import body, interval
from tests.reference import KNOWN

ARRHENIUS = "lam*exp(u/(1 + eps*u))"


def pair(separation: float) -> Problem:
    """Two intervals leave lam = u (u^2/3 - u + 1 - d), which turns at u = 1 -+ sqrt(d): by 4 d^(3/2) of lam apart (d < 0: an inflexion)."""
    return interval("lam*8/(u^2/3 - u + 1 - d)", d=separation)


STEPS = {
    "for figures": FOR_FIGURES,
    "on the way": ON_THE_WAY,
    "short": StepLength(largest=0.05, first=0.01),
    "long": StepLength(first=0.33, largest=1.0, turn=0.8, off=0.3),
}


@pytest.mark.parametrize("start", [0.0, 0.2, 0.31])
@pytest.mark.parametrize("step", STEPS)
@pytest.mark.parametrize("gap", [2e-3, 2e-4, 2e-5])  # relative, of the two values
def test_both_of_two_close_turning_points_are_found(gap: float, step: str, start: float) -> None:
    separation = (gap / 4) ** (2 / 3)
    branch = continuation.trace(
        pair(separation),
        along="lam",
        start=start,
        intervals=2,
        grid="uniform",
        digits=None,
        until="u(1/2) > 2.5",
        step_length=STEPS[step],
        compiled=False,
    )
    tops = [u * (u * u / 3 - u + 1 - separation) for u in (1 - separation**0.5, 1 + separation**0.5)]
    assert [point.on_grid for point in branch.turning_points] == pytest.approx(tops, rel=1e-12)
    assert [point.states for point in branch.turning_points] == ["below", "above"]
    assert branch.ended == "until"


@pytest.mark.parametrize("step", STEPS)
@pytest.mark.parametrize("separation", [-1e-6, -1e-4, -1e-2])
def test_an_inflexion_is_no_turning_point(separation: float, step: str) -> None:
    branch = continuation.trace(
        pair(separation),
        along="lam",
        intervals=2,
        grid="uniform",
        digits=None,
        until="u(1/2) > 2.5",
        step_length=STEPS[step],
        compiled=False,
    )
    assert branch.turning_points == ()
    assert np.all(np.diff(branch.parameter) > 0)


def extrema(eps: float) -> tuple[float, float]:
    """The two turning points of the Arrhenius slab of half width 1, by the energy integral (see tests.campaign.time_map)."""
    from scipy.optimize import minimize_scalar

    integral = TimeMap(lambda u: np.exp(u / (1 + eps * u)), lambda u: 0 * u + 1.0, (), 48)

    def parameter(middle: float) -> float:
        return float(integral.parameter(middle, 1.0, None)[0])

    cusp = KNOWN["slab, Arrhenius, cusp, u(0)"].value
    top = minimize_scalar(lambda m: -parameter(m), bounds=(1.0, cusp), method="bounded", options={"xatol": 1e-8})
    bottom = minimize_scalar(parameter, bounds=(cusp, 12.0), method="bounded", options={"xatol": 1e-8})
    return -float(top.fun), float(bottom.fun)


@pytest.mark.parametrize(("eps", "step"), [(0.24402, "for figures"), (0.24402, "on the way"), (0.2454, "for figures")])
def test_turning_points_of_an_s_near_its_cusp(eps: float, step: str) -> None:
    top, bottom = extrema(eps)
    assert (top - bottom) / top == pytest.approx(2e-3 if eps < 0.245 else 1.7e-4, rel=0.2)  # 0.2 % and 0.02 % apart
    for start, grid in ((0.0, "uniform"), (0.9, "adaptive")):
        branch = continuation.trace(
            body("slab", ARRHENIUS, eps=eps),
            along="lam",
            start=start,
            within=(0.0, 3.0),
            grid=grid,
            intervals=100,
            step_length=STEPS[step],
            compiled=False,
        )
        assert [point.states for point in branch.turning_points] == ["below", "above"]
        for point, truth in zip(branch.turning_points, (top, bottom), strict=True):
            assert point.uncertainty is not None
            assert abs(point.value - truth) <= point.uncertainty + 1e-13


@pytest.mark.parametrize("geometry", ["slab", "cylinder", "sphere"])
def test_past_the_cusp_there_is_no_turning_point_and_before_it_there_are_two(geometry: str) -> None:
    cusp = KNOWN[f"{geometry}, Arrhenius, cusp, eps"].value
    counts = []
    for eps in (cusp - 1e-3, cusp + 1e-5):
        branch = continuation.trace(
            body(geometry, ARRHENIUS, eps=eps), along="lam", within=(0.0, 8.0), grid="uniform", digits=6, compiled=False
        )
        counts.append(len(branch.turning_points))
        assert branch.ended == "edge of the range"
        assert branch.parameter[-1] == 8.0
    assert counts == [2, 0]


def loop() -> Problem:
    """(u - 2)^2 + (lam - 1)^2 = 1/4 with u the same everywhere: a circle, on every grid."""
    return Problem(
        "u'' - ((u - 2)^2 + (lam - 1)^2 - r^2) = 0",
        conditions=["u'(0) = 0", "u'(1) = 0"],
        parameters={"lam": 1.0, "r": 0.5},
        initial_guess={"u": "2 + r"},
    )


@pytest.mark.parametrize("intervals", [4, 40])
@pytest.mark.parametrize("start", [1.0, 1.3, 1.49, 0.52])
@pytest.mark.parametrize("direction", ["up", "down", "both"])
def test_a_closed_loop_ends_in_its_first_point_with_each_turning_point_once(direction: str, start: float, intervals: int) -> None:
    branch = continuation.trace(
        loop(), along="lam", start=start, direction=direction, intervals=intervals, measure="u(1/2)", compiled=False
    )
    assert branch.ended == "closed loop"
    assert branch.complete
    assert sorted(point.on_grid for point in branch.turning_points) == pytest.approx([0.5, 1.5], abs=1e-13)
    assert {point.states for point in branch.turning_points if point.value < 1} == {"above"}
    u = branch.measure("u(1/2)")
    assert (u - 2) ** 2 + (branch.parameter - 1) ** 2 == pytest.approx(np.full(u.size, 0.25), rel=1e-8)
    assert branch.parameter[-1] == pytest.approx(branch.parameter[0], abs=1e-9)
    assert u[-1] == pytest.approx(u[0], abs=1e-9)
    # the whole circle has been gone round, once
    turns = np.unwrap(np.arctan2(u - 2, branch.parameter - 1))
    assert abs(turns[-1] - turns[0]) == pytest.approx(2 * np.pi, abs=1e-6)


def test_a_loop_cut_by_the_range_is_no_closed_loop() -> None:
    branch = continuation.trace(loop(), along="lam", within=(0.6, 2.0), direction="both", intervals=10, measure="u(1/2)", compiled=False)
    assert (branch.began, branch.ended) == ("edge of the range", "edge of the range")
    assert branch.parameter[[0, -1]] == pytest.approx([0.6, 0.6], abs=1e-12)
    assert sorted(branch.measure("u(1/2)")[[0, -1]]) == pytest.approx([1.7, 2.3], rel=1e-9)  # 2 -+ 0.3
    assert len(branch.turning_points) == 1


# -- the endings ----------------------------------------------------------------------------------------------------


def test_ends_at_the_edge_of_the_range() -> None:
    branch = continuation.trace(interval(), within=(0.0, 3.0), measure="u(1/2)", compiled=False, digits=None)
    assert branch.ended == "edge of the range"
    assert branch.parameter[-1] == 3.0
    assert branch.measure("u(1/2)")[-1] == pytest.approx(KNOWN["interval, exponential, lam 3, lower, u(1/2)"].value, abs=1e-4)
    assert branch.turning_points == ()
    back = continuation.trace(interval(), within=(1.0, 4.0), start=1.5, measure="u(1/2)", compiled=False, digits=None)
    assert back.parameter[-1] == 1.0
    assert back.measure("u(1/2)")[-1] == pytest.approx(KNOWN["interval, exponential, lam 1, upper, u(1/2)"].value, abs=1e-3)
    assert len(back.turning_points) == 1


def test_ends_where_until_holds_and_not_before() -> None:
    branch = continuation.trace(interval(), until="max(u) > 4", compiled=False, digits=None)
    assert branch.ended == "until"
    peaks = branch.measure("max(u)")
    assert peaks[-1] > 4
    assert np.all(peaks[:-1] <= 4)


@pytest.mark.parametrize("wanted", [1, 2])
def test_ends_with_the_turning_points_wanted(wanted: int) -> None:
    branch = continuation.trace(body("sphere"), turning_points_wanted=wanted, compiled=False, digits=6)
    assert branch.ended == "turning points wanted"
    assert len(branch.turning_points) == wanted
    for number, point in enumerate(branch.turning_points, start=1):
        assert KNOWN[f"sphere, exponential, turning point {number}"].agrees(point.value, 1e-5)
    before = continuation.trace(body("sphere"), within=(0.0, 3.0), turning_points_wanted=wanted, compiled=False, digits=None)
    assert before.ended == "edge of the range"


def test_ends_where_there_is_no_smaller_step() -> None:
    # On two intervals 8u = lam - 1 + sqrt(1 - u): the branch ends in u = 1, lam = 9, beyond which there is no root.
    problem = Problem("u'' + lam - 1 + sqrt(1 - u) = 0", conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 0.0})
    branch = continuation.trace(problem, intervals=2, grid="uniform", measure="u(1/2)", digits=None, compiled=False)
    assert branch.ended == "no smaller step"
    assert branch.parameter[-1] == pytest.approx(9.0, abs=1e-4)
    assert not branch.complete
    u = branch.measure("u(1/2)")
    assert 8 * u == pytest.approx(branch.parameter - 1 + np.sqrt(1 - u), abs=1e-5)  # the root has an infinite slope at u = 1
    assert any("no finite value" in note for note in branch.notes)


def test_ends_where_the_watch_asks_for_it_and_shows_every_point() -> None:
    seen: list[Event] = []

    def watch(event: Event) -> bool:
        seen.append(event)
        return event.turning_points > 0

    branch = continuation.trace(interval(), watch=watch, compiled=False)
    assert branch.ended == "interrupted"
    assert not branch.complete
    assert [event.point for event in seen] == list(range(1, branch.parameter.size + 1))
    assert [event.parameter for event in seen] == list(branch.parameter)
    assert [event.measures["max(u)"] for event in seen] == list(branch.measure("max(u)"))
    assert [event.turning_points for event in seen[-2:]] == [0, 1]
    assert KNOWN["interval, exponential, turning point"].agrees(branch.turning_points[0].value, 1e-7)  # kept, and refined
    both = continuation.trace(interval(), direction="both", watch=lambda event: event.point > 3, compiled=False, digits=None)
    assert both.ended == "interrupted"


def test_ends_with_the_longest_branch() -> None:
    branch = continuation.trace(interval(), longest=9, compiled=False, digits=None)
    assert branch.ended == "longest branch"
    assert branch.parameter.size == 9


def test_no_first_state_says_where_to_start() -> None:
    with pytest.raises(ComputationError, match=r"lam = 5"):
        continuation.trace(interval(), start=5.0, compiled=False)  # past the turning point: there is none


def test_both_directions_are_joined_at_the_start() -> None:
    up = continuation.trace(interval(), start=1.0, within=(-2.0, 4.0), until="max(u) > 3", compiled=False, digits=None)
    down = continuation.trace(interval(), start=1.0, within=(-2.0, 4.0), until="max(u) > 3", direction="down", compiled=False, digits=None)
    both = continuation.trace(interval(), start=1.0, within=(-2.0, 4.0), until="max(u) > 3", direction="both", compiled=False, digits=None)
    assert both.parameter == pytest.approx(np.concatenate([down.parameter[:0:-1], up.parameter]), rel=1e-12)
    assert np.all(np.diff(both.arclength) > 0)
    assert both.arclength[down.parameter.size - 1] == 0.0
    assert both.parameter[0] == -2.0
    assert down.parameter[1] < 1.0 < up.parameter[1]
    for index, state in both.states.items():
        assert state.parameters["lam"] == both.parameter[index]
        assert state.measure("max(u)") == pytest.approx(both.measure("max(u)")[index], rel=1e-12)
