"""The recorded values: a quick sample is recomputed, and the check itself is shown to catch a wrong digit."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from mpmath import mp

from tests import naive, taylor
from tests.known import collected, group, last_place
from tests.reference import KNOWN
from tests.verify_reference import differs, recomputed, wrong_arch, wrong_layers, wrong_states


@pytest.mark.parametrize("module", ["exponential", "others", "schemes"])
def test_values_are_recomputed(module: str) -> None:
    found = {name: number for name, number in recomputed(module).items() if name in KNOWN}
    assert len(found) >= 10
    assert [name for name, number in found.items() if differs(KNOWN[name], number)] == []


def test_a_wrong_digit_is_caught() -> None:
    known = KNOWN["interval, exponential, turning point"]
    number = recomputed("exponential")[known.name]
    assert differs(dataclasses.replace(known, digits="3.513830719125161306"), number)


def test_states_layers_and_arch() -> None:
    assert wrong_states() == wrong_layers() == wrong_arch() == []


def test_record_keeps_names_apart_and_its_uncertainty() -> None:
    one = group("a source", {"a": "2.50"})
    assert one["a"].uncertainty == last_place("2.50") == pytest.approx(0.01)
    assert one["a"].agrees(2.5099)
    assert not one["a"].agrees(2.52)
    assert one["a"].agrees(2.52, uncertainty=0.02)
    with pytest.raises(ValueError, match="recorded twice"):
        collected(one, group("another", {"a": "1"}))
    assert all(known.source and np.isfinite(known.value) for known in KNOWN.values())


EXPONENTIAL = naive.NaiveProblem(lambda x, u, lam: lam * np.exp(u), lambda x, u, lam: lam * np.exp(u))


@pytest.mark.parametrize("intervals", [2, 3, 10])
def test_naive_turning_point(intervals: int) -> None:
    x = naive.nodes(EXPONENTIAL, intervals)
    lam, u, null = naive.turning_point(EXPONENTIAL, 4.8 * x * (1 - x), 3.4)
    assert lam == pytest.approx(KNOWN[f"central, interval, N {intervals}, turning point"].value, rel=1e-14)
    assert np.max(np.abs(naive.jacobian(EXPONENTIAL, u, lam) @ null)) < 1e-12


@pytest.mark.parametrize(("exponent", "name", "guess"), [(0, "slab", 0.42), (2, "sphere", 1.45)])
def test_naive_cooled_ends_converge_at_second_order(exponent: int, name: str, guess: float) -> None:
    problem = dataclasses.replace(EXPONENTIAL, left_end=naive.Cooled(), right_end=naive.Cooled(2.0), exponent=exponent)
    grids = [naive.nodes(problem, n) for n in (4, 8, 16, 32)]
    values = [naive.turning_point(problem, 1.5 - x**2, guess)[0] for x in grids]
    truth = KNOWN[f"{name}, exponential, Bi 2, turning point"].value
    errors = np.abs(np.array(values) - truth)
    assert np.log2(errors[-2] / errors[-1]) == pytest.approx(2.0, abs=0.05)
    assert naive.romberg(values, [2, 4, 6])[-1][-1] == pytest.approx(truth, rel=1e-8)


def test_series_arithmetic_against_closed_forms() -> None:
    with mp.workdps(30):
        # u'' + u = 0 from the middle: cos; y' = y^2: 1/(1 - x); (1 + x)^(1/2) by its own equation.
        u, v = taylor.radial_profile(lambda r, u: u, 0, 1, 1)
        assert abs(u - mp.cos(1)) < 1e-28
        assert abs(v + mp.sin(1)) < 1e-28
        assert abs(taylor.advance(lambda x, y: [y * y], 0, [1], mp.mpf(1) / 2)[0] - 2) < 1e-27
        root = taylor.advance(lambda x, y: [(1 + x) ** mp.mpf("-0.5") / 2], 0, [1], 1)[0]
        assert abs(root - mp.sqrt(2)) < 1e-27
        # The sphere's u'' + (2/r) u' + u = 0: sin(r)/r, first zero at pi.
        zero, _ = taylor.radial_until(lambda r, u: u, 2, 1, lambda r, u, v: u)
        assert abs(zero - mp.pi) < 1e-27
