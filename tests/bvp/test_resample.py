"""Profiles carried between grids: exact for polynomials of degree five, of sixth order else, even at an axis."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from bvp.resample import carried, resampled

COEFFICIENTS = st.lists(st.floats(-2.0, 2.0), min_size=1, max_size=6)


@given(COEFFICIENTS, st.integers(5, 60), st.integers(2, 90))
def test_quintics_are_carried_exactly_ghosts_too(coefficients: list[float], old: int, new: int) -> None:
    curve = np.polynomial.Polynomial(coefficients)
    nodal = curve(np.arange(-1, old + 2) / old)
    nodal[[0, -1]] = 1e9  # ghosts are not asked
    found = carried(nodal, new) if new != old else nodal
    if new != old:
        assert np.max(np.abs(found - curve(np.arange(-1, new + 2) / new))) < 1e-10


@given(st.lists(st.floats(-2.0, 2.0), min_size=1, max_size=3), st.integers(6, 40), st.integers(2, 60))
def test_even_profiles_stay_even_past_the_axis(coefficients: list[float], old: int, new: int) -> None:
    curve = np.polynomial.Polynomial([value for one in coefficients for value in (one, 0.0)])
    if new != old:
        found = carried(curve(np.arange(-1, old + 2) / old), new, even=True)
        assert found[0] == pytest.approx(curve(1 / new), abs=1e-9)
        assert np.max(np.abs(found[1:] - curve(np.arange(0, new + 2) / new))) < 1e-9


def test_evenness_is_used_where_it_is_known() -> None:
    """cos on 8 intervals of [0, 2]: the mirror images halve the error in the first cell at the least."""
    values = np.cos(2.0 * np.arange(9) / 8)
    places = np.array([0.3, 0.5, 0.7])
    plain, even = (np.max(np.abs(resampled(values, places, side) - np.cos(2.0 * places / 8))) for side in (False, True))
    assert even < 0.5 * plain


def test_errors_are_of_sixth_order() -> None:
    errors = []
    for count in (20, 40, 80):
        nodes = np.arange(count + 1) / count
        middles = (np.arange(count) + 0.5) / count
        errors.append(np.max(np.abs(resampled(np.exp(np.sin(5 * nodes)), middles * count) - np.exp(np.sin(5 * middles)))))
    assert np.log2(errors[1] / errors[2]) == pytest.approx(6.0, abs=0.5)


def test_nodes_are_taken_from_both_sides_alike() -> None:
    """Between the third and fourth of six nodes the error is (5/2 * 3/2 * 1/2)^2/6! h^6 f'''''' (its leading term)."""
    h = 0.05
    found = resampled(np.exp(h * np.arange(21)), np.array([9.5]))[0] - np.exp(9.5 * h)
    assert abs(found) == pytest.approx((15 / 8) ** 2 / 720 * h**6 * np.exp(9.5 * h), rel=0.02)


def test_nodes_keep_their_values() -> None:
    values = np.random.default_rng(2).normal(size=13)
    assert np.array_equal(resampled(values, np.arange(13.0)), values)
    nodal = np.random.default_rng(3).normal(size=9)
    again = carried(nodal, 6)
    assert np.array_equal(again, nodal)
    again[0] = 5.0
    assert nodal[0] != 5.0


@pytest.mark.parametrize("count", [2, 3, 4])
def test_few_nodes_give_polynomials_of_lower_degree(count: int) -> None:
    curve = np.polynomial.Polynomial([1.0, -2.0, 0.5, 0.3][:count])
    places = np.linspace(-0.3, count - 0.7, 7)
    assert np.max(np.abs(resampled(curve(np.arange(float(count))), places) - curve(places))) < 1e-12
