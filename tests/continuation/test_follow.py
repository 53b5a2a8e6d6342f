"""What a trace leaves: points, measures, profiles kept sparingly, work, and what it is asked for checked first."""

from __future__ import annotations

import dataclasses
import math
from typing import Any

import numpy as np
import pytest

import continuation
from bvp.errors import InputError, ProblemError
from continuation.step_length import StepLength
from tests.problems import body, interval
from tests.reference import KNOWN

MEASURES = ["u(1/2)", "mean(u)", "integral(exp(u))", "u'(0) - u'(1)", "rms(u)/max(u)"]


def test_measures_along_the_branch_are_those_of_the_closed_form() -> None:
    branch = continuation.trace(
        interval(), scheme="compact", intervals=200, measure=MEASURES, until="u(1/2) > 4", digits=None, compiled=False
    )
    assert list(branch.measures) == MEASURES
    for lam, peak, slopes, source in zip(
        branch.parameter[1:],
        branch.measure("u(1/2)")[1:],
        branch.measure("u'(0) - u'(1)")[1:],
        branch.measure("integral(exp(u))")[1:],
        strict=True,
    ):
        theta = 4 * math.acosh(math.exp(peak / 2))  # u = -2 ln(cosh((x - 1/2) theta/2)/cosh(theta/4))
        assert slopes == pytest.approx(2 * theta * math.tanh(theta / 4), rel=1e-5)
        assert lam * source == pytest.approx(slopes, rel=1e-5)  # what is made inside leaves through the walls
    assert branch.measure("rms(u)/max(u)")[1] == pytest.approx(math.sqrt(8 / 15), rel=0.01)  # of the parabola x (1 - x)
    assert branch.measure("mean(u)")[1] / branch.measure("u(1/2)")[1] == pytest.approx(2 / 3, rel=0.01)
    with pytest.raises(KeyError, match=r"min\(u\)"):
        branch.measure("min(u)")


@pytest.mark.parametrize("geometry", ["cylinder", "sphere"])
def test_integrals_are_weighted_by_the_geometry(geometry: str) -> None:
    exponent = {"cylinder": 1, "sphere": 2}[geometry]
    branch = continuation.trace(
        body(geometry),
        measure=["integral(exp(u))", "u'(1)", "mean(exp(u))"],
        scheme="compact",
        turning_points_wanted=1,
        digits=None,
        compiled=False,
    )
    balance = branch.parameter * branch.measure("integral(exp(u))")
    assert balance == pytest.approx(-branch.measure("u'(1)"), rel=1e-5, abs=1e-12)  # r^s u' at 1 is what was made
    assert branch.measure("mean(exp(u))") == pytest.approx((exponent + 1) * branch.measure("integral(exp(u))"), rel=1e-9)


@pytest.mark.parametrize("most", [2, 5, 10, 1000])
def test_profiles_are_kept_sparingly_and_evenly(most: int) -> None:
    branch = continuation.trace(interval(), profiles=most, until="max(u) > 15", digits=None, compiled=False)
    kept = np.array(list(branch.states))
    count = branch.parameter.size
    assert 1 <= kept.size <= most
    assert kept[0] == 0
    assert len(set(np.diff(kept))) <= 1
    assert kept.size == count if most >= count else kept.size >= most // 2
    for index, state in branch.states.items():
        assert state.parameters["lam"] == branch.parameter[index]
        assert state.measure("max(u)") == pytest.approx(branch.measure("max(u)")[index], rel=1e-13)
        assert state.ok
        assert state.residual < 1e-9
    # what is not kept is still counted and measured
    whole = continuation.trace(interval(), until="max(u) > 15", digits=None, compiled=False)
    assert branch.parameter == pytest.approx(whole.parameter, rel=1e-14)


def test_many_profiles_of_a_fine_grid_are_bounded_by_memory(monkeypatch: pytest.MonkeyPatch) -> None:
    from continuation import tracing

    monkeypatch.setattr(tracing, "PROFILE_BYTES", 8 * 400 * 6)
    branch = continuation.trace(interval(), intervals=400, grid="uniform", until="max(u) > 5", digits=None, compiled=False)
    assert 2 <= len(branch.states) <= 6


def test_without_digits_turning_points_are_the_schemes_own() -> None:
    branch = continuation.trace(interval(), intervals=10, grid="uniform", digits=None, turning_points_wanted=1, compiled=False)
    (point,) = branch.turning_points
    known = KNOWN["central, interval, N 10, turning point"].value
    assert point.value == point.on_grid == pytest.approx(known, rel=1e-12)
    assert point.uncertainty is None
    assert point.order is None
    assert point.refinement == ()
    refined = continuation.trace(interval(), intervals=10, grid="uniform", digits=9, turning_points_wanted=1, compiled=False)
    assert refined.turning_points[0].on_grid == pytest.approx(known, rel=1e-12)
    assert refined.turning_points[0].value == pytest.approx(KNOWN["interval, exponential, turning point"].value, rel=1e-10)


@pytest.mark.parametrize(("digits", "finest"), [(3, 2000), (12, 5000)])
def test_no_more_grids_than_the_digits_need(digits: int, finest: int) -> None:
    point = continuation.turning_point(interval(), digits=digits, grid="uniform", compiled=False)
    assert max(entry.intervals for entry in point.refinement) < finest
    assert [entry.intervals for entry in point.refinement] == sorted(entry.intervals for entry in point.refinement)
    for entry in point.refinement:  # each is the scheme's own on that grid
        if entry.intervals <= 48:
            own = continuation.turning_point(interval(), intervals=entry.intervals, grid="uniform", digits=None, compiled=False)
            assert entry.value == pytest.approx(own.on_grid, rel=1e-12)


def test_unstable_directions_change_at_turning_points_only() -> None:
    branch = continuation.trace(body("sphere"), until="max(u) > 12", digits=None, compiled=False)
    assert branch.unstable_directions is not None
    turns = [point.position for point in branch.turning_points]
    assert len(turns) >= 2
    expected = [
        sum(place < length for place in turns) for length in branch.arclength
    ]  # Joseph & Lundgren 1973, from memory: one more at each
    assert list(branch.unstable_directions) == expected


def test_stability_against_the_eigenvalues_of_the_dense_matrix() -> None:
    branch = continuation.trace(
        interval("lam*exp(u/(1 + eps*u))", eps=0.22), along="lam", intervals=16, grid="uniform", within=(0, 6), compiled=False
    )
    assert branch.unstable_directions is not None
    h, eps = 1 / 16, 0.22
    second = (np.diag(np.full(14, 1.0), 1) + np.diag(np.full(14, 1.0), -1) - 2 * np.eye(15)) / h**2
    for index, state in branch.states.items():
        u, lam = state.u[1:-1], state.parameters["lam"]
        matrix = second + np.diag(lam * np.exp(u / (1 + eps * u)) / (1 + eps * u) ** 2)
        assert branch.unstable_directions[index] == np.sum(np.linalg.eigvalsh(matrix) > 0)
    assert set(branch.unstable_directions) == {0, 1}


def test_work_is_counted_and_records_are_frozen() -> None:
    branch = continuation.trace(interval(), turning_points_wanted=1, compiled=False)
    assert branch.newton_steps >= branch.parameter.size - 1
    assert branch.factorizations >= branch.newton_steps
    assert 0 < branch.seconds < 60
    assert branch.began == "the state at lam = 0"
    with pytest.raises(dataclasses.FrozenInstanceError):
        branch.name = "other"  # type: ignore[misc]


def test_shorter_steps_are_taken_where_they_are_asked_for() -> None:
    seen = []
    for step in (StepLength(), StepLength(turn=0.05, largest=0.1)):
        branch = continuation.trace(interval(), until="max(u) > 5", digits=None, step_length=step, compiled=False)
        x, y = branch.parameter / np.ptp(branch.parameter), branch.measure("max(u)") / np.ptp(branch.measure("max(u)"))
        turns = np.abs(np.diff(np.unwrap(np.arctan2(np.diff(y), np.diff(x)))))
        seen.append((float(turns.max()), float(np.hypot(np.diff(x), np.diff(y)).max())))
    assert seen[0][0] < 1.0  # radians on paper, at the turning point
    assert seen[0][1] < 0.35
    assert seen[1][0] < 0.5 * seen[0][0]
    assert seen[1][1] < 0.5 * seen[0][1]


@pytest.mark.parametrize(
    ("keywords", "words"),
    [
        ({"direction": "upwards"}, r"direction.*up"),
        ({"within": (2, 1)}, r"lower value first"),
        ({"within": (1, 2)}, r"starts at lam = 0, outside"),
        ({"within": 3}, r"two numbers"),
        ({"until": "max(u)"}, r"no comparison"),
        ({"until": "u > 3"}, r"without a place"),
        ({"measure": "u"}, r"without a place"),
        ({"measure": ["max(u)", "max(v)"]}, r"v"),
        ({"turning_points_wanted": 0}, r"whole number from 1"),
        ({"digits": 16}, r"1 to 15"),
        ({"digits": 2.5}, r"whole number"),
        ({"intervals": 1}, r"outside 2"),
        ({"intervals": 20.5}, r"whole number"),
        ({"scheme": "zentral"}, r"central"),
        ({"at": {"mu": 2.0}}, r"mu"),
        ({"at": {"lam": math.nan}}, r"finite"),
        ({"start": math.inf}, r"finite"),
        ({"grid": "2*s"}, r"increase from 0 to 1"),
    ],
)
def test_what_makes_no_sense_is_refused_before_anything_is_solved(keywords: dict[str, Any], words: str) -> None:
    with pytest.raises(InputError, match=words):
        continuation.trace(interval(), watch=lambda event: pytest.fail("a point was solved"), compiled=False, **keywords)


def test_the_parameter_is_named_where_there_are_several() -> None:
    with pytest.raises(ProblemError, match=r"lam, eps"):
        continuation.trace(interval("lam*exp(u/(1 + eps*u))", eps=0.1), compiled=False)
    with pytest.raises(ProblemError, match=r"lamb"):
        continuation.trace(interval(), along="lamb", compiled=False)
