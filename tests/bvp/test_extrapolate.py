"""Extrapolation on series with drawn coefficients: the limit is known, and whether the uncertainty holds can be counted."""

from __future__ import annotations

import math

import numpy as np
import pytest

from bvp.extrapolate import combined, common_powers, error_of_last, limit_of, usable_exponent

DRAWS = 600
ROUNDED = 1e-16


def drawn(powers: tuple[float, ...], levels: int, rng: np.random.Generator, logarithm: bool = False) -> tuple[list[float], list[float]]:
    """Two families of values whose limit is 1, with coefficients and a first step drawn over a decade."""
    factors = rng.normal(size=len(powers)) * np.exp(rng.uniform(-1.0, 2.0, size=len(powers)))
    step = math.exp(rng.uniform(math.log(0.05), math.log(0.6)))

    def value(count: int) -> float:
        h = step * 24 / count
        terms = [factor * h**power for factor, power in zip(factors, powers, strict=True)]
        return 1.0 + sum(terms) + (terms[-1] * math.log(h) if logarithm else 0.0)

    return [value(24 << level) for level in range(levels)], [value(36 << level) for level in range(levels)]


@pytest.mark.parametrize("levels", [4, 5, 6, 8])
@pytest.mark.parametrize(("powers", "logarithm"), [((2, 4, 6, 8, 10), False), ((4, 6, 8, 10), False), ((2, 6, 8, 4), True)])
def test_no_even_series_is_missed(powers: tuple[float, ...], logarithm: bool, levels: int) -> None:
    rng = np.random.default_rng([levels, len(powers)])
    for _ in range(DRAWS):
        limit, uncertainty = combined(*drawn(powers, levels, rng, logarithm), ROUNDED)
        assert abs(limit.value - 1.0) <= uncertainty


@pytest.mark.parametrize("levels", [4, 5, 6, 8])
def test_a_series_of_all_powers_is_missed_once_in_hundreds_at_most(levels: int) -> None:
    """Neighbouring powers with drawn factors can cancel on three grids and look like one power: no rule sees that every time."""
    rng = np.random.default_rng(levels)
    missed = 0
    for _ in range(DRAWS):
        limit, uncertainty = combined(*drawn((1, 2, 3, 4, 5, 6), levels, rng), ROUNDED)
        missed += abs(limit.value - 1.0) > uncertainty
    assert missed <= DRAWS // 200


def test_an_uncertainty_is_not_uselessly_wide() -> None:
    rng = np.random.default_rng(7)
    ratios = []
    for _ in range(DRAWS):
        limit, uncertainty = combined(*drawn((2, 4, 6, 8, 10), 4, rng), ROUNDED)
        ratios.append(uncertainty / max(abs(limit.value - 1.0), ROUNDED))
    assert 1.0 < np.median(ratios) < 100.0


def test_two_terms_that_pass_each_other_do_not_count_as_a_small_error() -> None:
    """h and h^2 with opposite signs: differences shrink faster and faster just before they change their sign."""
    values = [1.0 + 4.8e-3 * h - 3e-2 * h * h for h in (1 / 2, 1 / 4, 1 / 8, 1 / 16)]
    assert usable_exponent(values, 0.0, ROUNDED) is None
    assert error_of_last(values, None, ROUNDED) > abs(values[-1] - 1.0) / 4.0


def test_a_power_seen_by_one_family_alone_is_not_removed() -> None:
    even = [1.0 + h**2 for h in (1 / 2, 1 / 4, 1 / 8, 1 / 16)]
    slow = [1.0 + h**1.5 for h in (1 / 3, 1 / 6, 1 / 12, 1 / 24)]
    assert limit_of(even, ROUNDED).columns == 1
    assert common_powers(even, slow, ROUNDED) == []
    limit, uncertainty = combined(even, slow, ROUNDED)
    assert limit.columns == 0
    assert abs(limit.value - 1.0) <= uncertainty
