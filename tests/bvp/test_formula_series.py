"""Truncated Laurent series against Taylor coefficients and values with many digits."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import mpmath
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from bvp.formula import evaluate, mpmath_functions, parse
from bvp.formula.precise import typed
from bvp.formula.series import Series, SeriesError, differentiated, series_functions
from bvp.formula.tree import Name, Node
from tests.drawn_formulas import VALUES, VOCABULARY, pointwise

F = series_functions()
s = Series.variable()


def coefficients(series: Series, count: int) -> list[Any]:
    return [series.coefficient(power) for power in range(count)]


def near(found: list[Any], expected: list[Any], tolerance: float = 1e-13) -> bool:
    return all(abs(a - b) <= tolerance * max(1, abs(b)) for a, b in zip(found, expected, strict=True))


# -- functions against mpmath's Taylor coefficients -------------------------------------------------------------------

SMOOTH = [
    ("exp", 0.0), ("exp", 0.7), ("exp", -1.3),
    ("log", 1.0), ("log", 0.6), ("log", 2.5),
    ("sqrt", 1.0), ("sqrt", 2.0),
    ("sin", 0.0), ("sin", 0.4), ("cos", 0.0), ("cos", 2.1), ("tan", 0.0), ("tan", 0.7),
    ("sinh", 0.0), ("sinh", -0.9), ("cosh", 0.0), ("cosh", 1.2), ("tanh", 0.0), ("tanh", 0.8),
    ("asin", 0.0), ("asin", 0.3), ("acos", 0.0), ("acos", -0.4), ("atan", 0.0), ("atan", 1.5),
    ("erf", 0.0), ("erf", 0.6),
    ("log1p", 0.0), ("log1p", 0.4), ("expm1", 0.0), ("expm1", -0.3),
    ("cardinal", 0.0), ("cardinal", 1.7), ("cardinal", -2.4), ("cardinal", 7.0), ("cardinal", -9.0),
    ("cardinal_slope", 0.0), ("cardinal_slope", 0.9), ("cardinal_slope", 6.0), ("cardinal_slope", -8.0),
]  # fmt: skip


@pytest.mark.parametrize(("name", "start"), SMOOTH)
def test_functions_have_their_taylor_coefficients(name: str, start: float) -> None:
    with mpmath.workdps(60):
        expected = mpmath.taylor(mpmath_functions()[name], mpmath.mpf(start), 9)
    assert near(coefficients(F[name](s + start), 10), expected)
    assert near(coefficients(F[name](2 * s * s + start), 10), [expected[n // 2] * 2 ** (n // 2) if n % 2 == 0 else 0.0 for n in range(10)])


@pytest.mark.parametrize(("name", "start"), SMOOTH)
def test_functions_keep_forty_digits(name: str, start: float) -> None:
    with mpmath.workdps(80):
        expected = mpmath.taylor(mpmath_functions()[name], mpmath.mpf(start), 9)
    with mpmath.workdps(40):
        found = F[name](Series([mpmath.mpf(start), mpmath.mpf(1), *[mpmath.mpf(0)] * 8]))
        assert near(coefficients(found, 10), expected, 1e-37)


@pytest.mark.parametrize("part", [0, 1, 2])
@pytest.mark.parametrize(("p", "z"), [(0.0, 0.0), (0.6, 0.0), (0.0, 1.5), (0.8, -2.0), (-1.1, 0.7), (2.0, 4.5), (-3.0, -1.0), (1.2, 9.0)])
def test_the_fitted_weights_have_their_taylor_coefficients(p: float, z: float, part: int) -> None:
    name = ("fit", "fit_by_drift", "fit_by_slope")[part]
    with mpmath.workdps(60):
        function = mpmath_functions()[name]
        expected = mpmath.taylor(lambda t: function(p + t, z + t * t + 2 * t), 0, 6)
    assert near(coefficients(F[name](s + p, s * s + 2 * s + z), 7), expected, 1e-12)


@settings(max_examples=300, deadline=None)
@given(pointwise)
def test_the_series_of_a_formula_approaches_its_value(tree: Node) -> None:
    with mpmath.workdps(120):
        values = {name: mpmath.mpf(value) for name, value in VALUES.items()}
        series = Series([mpmath.mpf("0.37"), mpmath.mpf(1), *[mpmath.mpf(0)] * 8])
        step = mpmath.mpf(10) ** -8
        try:
            found = evaluate(tree, lambda leaf: series if leaf.name == "x" else values[leaf.name], F, typed)
            value = evaluate(
                tree, lambda leaf: series.coefficients[0] + step if leaf.name == "x" else values[leaf.name], mpmath_functions(), typed
            )
        except (SeriesError, ZeroDivisionError, TypeError, ValueError, OverflowError):
            assume(False)
        assume(isinstance(value, mpmath.mpf) and abs(value) < 1e12)
        partial = sum(c * step ** (found.valuation + i) for i, c in enumerate(found.coefficients)) if isinstance(found, Series) else found
        end = found.end if isinstance(found, Series) else 10
        assert abs(partial - value) < step**end * mpmath.mpf(10) ** 40 * max(1, abs(value))


# -- Laurent series, and what has none --------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "start", "expected"),
    [
        ("1/x", -1, [1, 0, 0, 0]),
        ("cos(x)/sin(x)", -1, [1, 0, -1 / 3, 0, -1 / 45]),
        ("1/(exp(x) - 1)", -1, [1, -1 / 2, 1 / 12, 0, -1 / 720]),
        ("(exp(x) - 1 - x)/x^2", 0, [1 / 2, 1 / 6, 1 / 24]),
        ("x^-2*sin(x)^3", 1, [1, 0, -1 / 2]),
        ("2*log(cosh(x))", 2, [1, 0, -1 / 6, 0, 2 / 45]),
        ("sqrt(x^2 + x^3)", 1, [1, 1 / 2, -1 / 8, 1 / 16]),
        ("(4*x^4)^0.5", 2, [2, 0, 0]),
        ("(x^2*4)^-1.5", -3, [1 / 8, 0]),
        ("log(sin(x)/x)", 2, [-1 / 6, 0, -1 / 180]),
        ("2^x", 0, [1, np.log(2), np.log(2) ** 2 / 2]),
        ("(1 + x)^x", 0, [1, 0, 1, -1 / 2]),
        ("abs(-x)", 1, [1, 0]),
        ("abs(sin(x) - x)", 3, [1 / 6, 0, -1 / 120]),
        ("max(x, x^2)", 1, [1, 0]),
        ("min(x, x^2)", 2, [1, 0]),
        ("min(2, 1 + x)", 0, [1, 1]),
        ("acos(1 - x^2/2)", 1, [1, 0, 1 / 24]),
        ("(sqrt(2) + x)^2 - 2", 1, [2 * np.sqrt(2), 1]),  # 2 is not the float's square, but nothing else is left
    ],
)
def test_series_of_formulas(text: str, start: int, expected: list[float]) -> None:
    found = evaluate(parse(text, "equation", VOCABULARY), lambda leaf: s, F)
    assert found.valuation == start
    assert [found.coefficient(start + i) for i in range(len(expected))] == pytest.approx(expected, rel=1e-13, abs=1e-14)


@pytest.mark.parametrize(
    ("expand", "reason"),
    [
        (lambda: F["log"](s), "log of what vanishes"),
        (lambda: F["log"](1 / s), "log of what grows"),
        (lambda: F["log"](s - 2), "log of what is negative"),
        (lambda: F["sqrt"](1 / s), r"the power 0.5 of what begins with s\^-1"),
        (lambda: F["sqrt"](s - 1), "negative"),
        (lambda: s**-1.5, "no series in whole powers"),
        (lambda: F["exp"](1 / s), r"exp of what grows like s\^-1"),
        (lambda: F["sin"](1 / s**2), r"sin of what grows like s\^-2"),
        (lambda: 1 / (s - s), "a division by what vanishes"),
        (lambda: s / 0.0, "a division by 0"),
        (lambda: (s - s) ** -0.5, "the power -0.5 of what vanishes"),
        (lambda: (s**1.5).coefficient(2), r"known below s\^2 only"),
        (lambda: F["asin"](s + 2), "asin at 2.0 is nan"),
        (lambda: F["exp"](s + 1000), "exp at 1000.0 is inf"),
        (lambda: F["exp"](1000.0), "exp at 1000.0 is inf"),
        (lambda: (-2.0) ** s, "the base has to be positive"),
        (lambda: (s - 1) ** s, "log of what is negative"),
        (lambda: s.coefficient(40), r"known below s\^11 only"),
        (lambda: F["fit"](s + 20, s), "far from 0"),
        (lambda: F["fit"](s, s + 10), r"reaches pi\^2"),
    ],
)
def test_what_has_no_series_says_why(expand: Callable[[], Any], reason: str) -> None:
    with pytest.raises(SeriesError, match=reason):
        expand()


def test_of_a_broken_power_it_is_known_where_it_vanishes() -> None:
    for series, end in ((s**1.5, 2), (F["sqrt"](s), 1), (F["sqrt"](s * s * s), 2)):
        assert [series.coefficient(power) for power in range(end)] == [0.0] * end
        assert series.end == end


# -- arithmetic -------------------------------------------------------------------------------------------------------

polynomials = st.lists(st.integers(-3, 3), min_size=1, max_size=5).map(lambda c: Series.polynomial([float(each) for each in c]))


@settings(max_examples=300, deadline=None)
@given(polynomials, polynomials, polynomials)
def test_the_laws_of_arithmetic(a: Series, b: Series, c: Series) -> None:
    def same(left: Any, right: Any) -> bool:
        end = min(left.end, right.end)
        return all(left.coefficient(power) == right.coefficient(power) for power in range(min(left.valuation, right.valuation), end))

    assert same(a + b, b + a)
    assert same(a * b, b * a)
    assert same(a * (b + c), a * b + a * c)
    assert same(a - b, -(b - a))
    assert same((a * b) * c, a * (b * c))
    if b.coefficients and a.coefficients:
        assert near(
            [(a * b / b)._at(power) for power in range(a.valuation, a.valuation + 4)],
            [a._at(power) for power in range(a.valuation, a.valuation + 4)],
            1e-8,
        )
    assert same(differentiated(a * b), differentiated(a) * b + a * differentiated(b))


@pytest.mark.parametrize("two", [2, 2.0, np.float64(2.0), mpmath.mpf(2)])
def test_numbers_mix_with_series(two: Any) -> None:
    for found, expected in (
        (two + s, [2, 1, 0]),
        (s + two, [2, 1, 0]),
        (two - s, [2, -1, 0]),
        (s - two, [-2, 1, 0]),
        (two * s, [0, 2, 0]),
        (s * two, [0, 2, 0]),
        (s / two, [0, 0.5, 0]),
        (two / (1 + s), [2, -2, 2]),
        ((1 + s) ** two, [1, 2, 1]),
        (two**s, [1, np.log(2), np.log(2) ** 2 / 2]),
    ):
        assert isinstance(found, Series)
        assert near(coefficients(found, 3), expected)


def test_what_is_known_is_kept_account_of() -> None:
    assert (s.end, (s * s).end, (1 / s).end, (s**-2 + s).end) == (11, 12, 9, 8)
    assert (s - s).coefficients == ()
    assert (s - s).end == 11
    assert (Series.constant(1.0, 4) + s).end == 4
    assert (Series.polynomial([0.0, 0.0, 1.0], terms=6) * s).valuation == 3
    assert str(2 * s - s**3) == "2.0 s^1 + -1.0 s^3 + O(s^11)"


def test_rounding_is_not_taken_for_a_term() -> None:
    third = 1.0 / 3.0
    assert (Series.constant(0.1) + 0.2 - 0.3).coefficients == ()
    assert ((s + third) * 3 - 1).valuation == 1
    assert ((s + 1e-10) - 0.0).valuation == 0  # small is not rounding


def test_signs_are_those_for_small_positive_steps() -> None:
    assert (F["sign"](-s), F["sign"](s**3 - s**4), F["sign"](s - s)) == (-1.0, 1.0, 0.0)
    assert (F["step_le"](s, 0.0), F["step_le"](-s, 0.0), F["step_le"](s**2, s), F["step_le"](1.0, 2.0)) == (0.0, 1.0, 1.0, 1.0)
    assert F["max"](s, 0.0) is s


def test_a_difference_formula_shows_its_order() -> None:
    """(u[k+1] - 2 u[k] + u[k-1])/h^2 of a smooth u is u'' + h^2 u''''/12 + …"""
    u = [0.3, -1.1, 0.7, 0.4, -0.9, 0.2]  # Taylor coefficients
    up, here, down = (Series.polynomial([c * side**n for n, c in enumerate(u)], terms=6) for side in (1.0, 0.0, -1.0))
    nodal = {Name("u"): here}
    assert nodal[Name("u")].coefficient(0) == 0.3
    found = (up - 2 * here + down) / s**2
    assert coefficients(found, 3) == pytest.approx([2 * u[2], 0.0, 2 * u[4]], rel=1e-14)
