"""The weights of the fitted scheme against their definition with many digits, compiled and as plain Python."""

from __future__ import annotations

import math
import random
from typing import Any

import mpmath
import numpy as np
import pytest

from bvp.formula import derivative, evaluate, float_functions, mpmath_functions
from bvp.formula.arrays import numpy_functions
from bvp.formula.tree import Call, Name
from bvp.kernels import special
from bvp.kernels.jit import interpreted

weight = interpreted(special.weight)
KERNELS = (special.fit, special.fit_by_drift, special.fit_by_slope)
NAMES = ("fit", "fit_by_drift", "fit_by_slope")

DRIFTS = [0.0, 1e-12, 1e-6, 1e-3, 0.1, 0.7, 1.0, 1.3, 2.0, 2.5, 4.0, 10.0, 40.0, 120.0]
SLOPES = [0.0, 1e-12, 1e-6, 1e-3, 0.1, 0.9, 2.0, 3.9, 4.1, 7.0, 9.8, 50.0, 1e3]


def pairs() -> list[tuple[float, float]]:
    """A wide grid of (p, z), the borders between the formulas of the kernel among them, and pairs drawn at random."""
    found = []
    for size in DRIFTS:
        square = size * size
        special_slopes = [square * part for part in (0.5, 0.99, 1.0 - 1e-9, 1.0, 1.0 + 1e-9)]
        close = [square + gap for gap in (0.01, 1.0, 5.0, 9.86)]
        found += [(drift, slope) for drift in {size, -size} for slope in (*SLOPES, *(-slope for slope in SLOPES), *special_slopes, *close)]
    found += [(s + d, 4 * s * d) for s in (1.0, 1.01, 1.2) for d in (-1.01, -0.99, 0.59, 0.61, 0.8, 0.95, 0.999)]
    chance = random.Random(20)
    for _ in range(300):
        drift = chance.choice((1, -1)) * 10 ** chance.uniform(-4, 1.5)
        found.append((drift, chance.choice((chance.uniform(-20, drift**2 + 9.8), drift**2 + chance.uniform(-3, 9.8)))))
    return [(drift, slope) for drift, slope in found if slope - drift * drift < 9.869]


def exact(p: float, z: float) -> tuple[Any, Any, Any]:
    """e^p z/(2 (cosh p - cosh sqrt(p^2 - z))) and its derivatives by their formulas, with digits to spare for what cancels."""
    with mpmath.workdps(260 + int(abs(p))):
        a, b = mpmath.mpf(p), mpmath.mpf(z)
        if z == 0.0:
            b = mpmath.mpf(10) ** -60  # the limit, to sixty digits
        if p == 0.0:
            a = mpmath.mpf(10) ** -60
        square = a * a - b
        if square == 0:
            square = mpmath.mpf(10) ** -60
        root = mpmath.sqrt(square)
        below = (mpmath.cosh(a) - mpmath.cosh(root)).real
        sine = (mpmath.sinh(root) / root).real  # d cosh(sqrt w)/dw = sinh(sqrt w)/(2 sqrt w)
        value = mpmath.exp(a) * b / (2 * below)
        by_drift = value * (1 - (mpmath.sinh(a) - a * sine) / below)
        by_slope = value * (1 / b - sine / (2 * below))
        return value, by_drift, by_slope


def conditioning(p: float, z: float, part: int) -> float:
    """How much a relative change of p or z grows in the result, where it is like e^(2 p) or e^(-2 d), d the smaller root."""
    square = p * p - z
    root = math.sqrt(square) if square > 0 else 0.0
    smaller = (abs(p) - root) / 2
    return 1.0 + 2.0 * max(0.0, -p) + 2.0 * max(0.0, -smaller) + (2.0 * max(0.0, smaller) if part == 1 and p > 0 else 0.0)


@pytest.mark.parametrize("part", [0, 1, 2])
def test_weights_keep_their_digits(part: int) -> None:
    worst = 0.0
    for p, z in pairs():
        value = exact(p, z)[part]
        found = weight(p, z, part)
        if abs(value) < 1e-290:
            assert abs(found) < 1e-280
            continue
        worst = max(worst, float(abs(found - value) / abs(value)) / conditioning(p, z, part))
    assert worst < 1.5e-15


@pytest.mark.parametrize("part", [0, 1, 2])
def test_the_table_of_many_digits_has_them(part: int) -> None:
    function = mpmath_functions()[NAMES[part]]
    for p, z in pairs()[::7]:
        value = exact(p, z)[part]
        with mpmath.workdps(40):
            # Far from 0 the derivatives are taken by differences, which are good to the size of the value.
            size = abs(value) if part == 0 or max(p * p, abs(p * p - z)) < 100 else max(abs(value), abs(exact(p, z)[0]))
            assert abs(function(p, z) - value) <= mpmath.mpf(10) ** -36 * conditioning(p, z, part) * size


def test_limits() -> None:
    for part, limit in enumerate((1.0, 1.0, 1.0 / 12.0)):
        assert weight(0.0, 0.0, part) == pytest.approx(limit, rel=1e-15)
    for p in (1e-8, 0.3, 5.0, -5.0, 200.0):
        assert weight(p, 0.0, 0) == pytest.approx(2 * p / -math.expm1(-2 * p), rel=1e-14)
    for z in (-30.0, -1e-5, 1e-5, 3.0, 9.0):
        assert weight(0.0, z, 0) == pytest.approx(1.0 / interpreted(special.cardinal)(z), rel=2e-15)


def test_neither_overflow_nor_loss_at_steep_drifts() -> None:
    assert weight(1e6, 3.0, 0) == pytest.approx(2e6 + 1.5 - 1.125e-6, rel=1e-15)
    assert weight(1e6, 3.0, 1) == pytest.approx(2.0, rel=1e-11)
    assert weight(1e6, 3.0, 2) == pytest.approx(0.5, rel=2e-6)
    assert weight(1e6, 1e12, 0) == pytest.approx(1e12, rel=1e-14)
    assert [weight(-1e6, 3.0, part) for part in range(3)] == [0.0, 0.0, 0.0]
    assert all(math.isfinite(weight(p, z, part)) for p in (-1e6, 1e6) for z in (-1e12, -1.0, 0.0, 1e-300, 1e11) for part in range(3))
    assert [weight(p, z, 0) for p, z in ((0.0, 5e-324), (0.0, 1e-310), (1e-170, 1e-320), (1e-300, -1e-310))] == [1.0] * 4


@pytest.mark.parametrize(("p", "z"), [(0.0, 10.0), (1.0, 12.0), (-3.0, 9.0 + math.pi**2), (math.nan, 1.0), (1.0, math.nan)])
def test_no_weight_where_the_scheme_is_refused(p: float, z: float) -> None:
    for part, name in enumerate(NAMES):
        assert math.isnan(weight(p, z, part))
        assert math.isnan(float_functions()[name](p, z))
        assert math.isnan(KERNELS[part](p, z))
        assert mpmath.isnan(mpmath_functions()[name](p, z))


def test_compiled_and_interpreted_agree() -> None:
    chance = random.Random(3)
    for _ in range(300):
        p = chance.uniform(-6.0, 6.0)
        z = chance.uniform(-30.0, p * p + 9.8)
        for part, name in enumerate(NAMES):
            plain = float_functions()[name](p, z)
            assert plain == weight(p, z, part)
            assert KERNELS[part](p, z) == pytest.approx(plain, rel=1e-15)
        for kernel in (special.cardinal, special.cardinal_slope):
            assert kernel(z) == pytest.approx(interpreted(kernel)(z), rel=1e-15, abs=1e-17, nan_ok=True)
            plain = float_functions()[interpreted(kernel).__name__](z)
            assert interpreted(kernel)(z) == plain or (math.isnan(plain) and math.isnan(interpreted(kernel)(z)))
        assert special.step_le(p, z) == (1.0 if p <= z else 0.0)
    for z in (-1e7, -2e6, math.nan):
        for kernel in (special.cardinal, special.cardinal_slope):
            assert kernel(z) == pytest.approx(float_functions()[interpreted(kernel).__name__](z), nan_ok=True)


def test_arrays_are_filled_with_what_numbers_give() -> None:
    p, z = np.array([0.1, -2.0, 30.0]), np.array([0.5, -1.0, 3.0])
    for part, name in enumerate(NAMES):
        assert numpy_functions()[name](p, z).tolist() == [weight(float(a), float(b), part) for a, b in zip(p, z, strict=True)]


def test_derivatives_of_trees_lead_to_them() -> None:
    tree = Call("fit", (Name("p"), Name("z")))
    values = {"p": 0.4, "z": 1.3}
    for part, name in ((1, "p"), (2, "z")):
        assert evaluate(derivative(tree, Name(name)), lambda leaf: values[leaf.name], float_functions()) == weight(0.4, 1.3, part)
    with pytest.raises(AssertionError, match="by differences"):
        derivative(Call("fit_by_slope", (Name("p"), Name("z"))), Name("p"))
    slope = derivative(Call("cardinal", (Name("z"),)), Name("z"))
    assert slope == Call("cardinal_slope", (Name("z"),))
