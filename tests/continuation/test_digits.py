"""Numbers for people: what is shown holds, and no more is shown than that."""

from __future__ import annotations

import math
from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from continuation.digits import rounded_safe, significant, with_uncertainty

values = st.floats(allow_nan=False, allow_infinity=False)
widths = st.floats(min_value=0, exclude_min=True, allow_nan=False, allow_infinity=False)


@pytest.mark.parametrize(
    ("value", "uncertainty", "shown"),
    [
        (3.513830719123, 3.5e-11, "3.51383071912 ± 4e-11"),
        (3.513830719125161, 4e-12, "3.513830719125 ± 5e-12"),
        (3.513830719125161, 1.2e-12, "3.5138307191252 ± 1.3e-12"),
        (6.5e-12, 3e-20, "6.50000000e-12 ± 3e-20"),
        (0.0, 3e-12, "0 ± 3e-12"),
        (1e-5, 0.05, "0 ± 0.06"),  # uncertainty larger than the value
        (-0.001, 0.3, "0 ± 0.4"),
        (300.2514, 0.018, "300.251 ± 0.019"),
        (1.23456e12, 3e7, "1.23456e12 ± 3e7"),
        (1234.0, 30.0, "1230 ± 40"),
        (3.513830719, 1e-9, "3.513830719 ± 1e-9"),  # as it was printed
        (1.401, 0.001, "1.401 ± 0.001"),
        (9.99996, 4e-4, "10.0000 ± 0.0005"),
        (-2.0, 1e-17, "-2.000000000000000 ± 1e-15"),  # a double has no digits beyond
        (2.0, 0.0, "2 ± 0"),
        (3.5138307, None, "3.51383, uncertainty unknown"),
        (3.5138307, math.inf, "3.51383, uncertainty unknown"),
        (3e-11, None, "3e-11, uncertainty unknown"),
        (math.nan, 1e-3, "-"),
        (None, None, "-"),
        (5e-324, 5e-324, "5e-324 ± 5e-324"),
        (1e300, 1e-300, "1.000000000000000e300 ± 1e285"),
    ],
)
def test_value_and_uncertainty(value: float | None, uncertainty: float | None, shown: str) -> None:
    assert with_uncertainty(value, uncertainty) == shown


def test_unit_stands_behind_the_numbers() -> None:
    assert with_uncertainty(1.873, 0.002, "m") == "1.873 ± 0.002 m"
    assert with_uncertainty(1.873, None, "m") == "1.873 m, uncertainty unknown"


@given(values, widths)
def test_interval_shown_holds_the_one_computed(value: float, uncertainty: float) -> None:
    middle, _, half = with_uncertainty(value, uncertainty).partition(" ± ")
    shown, width = Fraction(middle), Fraction(half)
    rounding = Fraction(1e-15) * abs(Fraction(value)) * 2 + Fraction(5e-324)  # of a double and its shortest decimal
    assert abs(shown - Fraction(value)) + Fraction(uncertainty) <= width + rounding


@given(st.floats(1e-30, 1e30), st.floats(1e-12, 1e3))
def test_no_digit_is_shown_that_is_not_known(value: float, relative: float) -> None:
    middle, _, half = with_uncertainty(value, relative * value).partition(" ± ")
    width = Fraction(half)
    assert width <= 2 * Fraction(relative) * Fraction(value) * Fraction(11, 10)  # not uselessly wide
    digits = middle.lstrip("-").partition("e")
    decimals = len(digits[0].partition(".")[2]) if "." in digits[0] else 0
    last = Fraction(10) ** (int(digits[2] or 0) - decimals)
    # The last digit is at most the second of the uncertainty: below 30 of it before what rounding the value costs is added, 31 after.
    assert middle == "0" or last * 31 >= width or "." not in digits[0]
    assert middle == "0" or last <= width  # and the uncertainty is not beyond it


@pytest.mark.parametrize(
    ("value", "uncertainty", "digits", "side", "shown"),
    [
        (3.51383, 1e-6, 3, "down", "3.51"),
        (3.51383, 1e-6, 3, "up", "3.52"),
        (3.51, 1e-12, 3, "down", "3.50"),  # the uncertainty alone takes it over the edge
        (9.996, 0.0, 3, "up", "10.0"),
        (-9.996, 0.0, 3, "down", "-10.0"),
        (1.0, 1.0, 3, "down", "0"),
        (1.0, 2.0, 2, "down", "-1.0"),
        (123456.0, 1.0, 3, "down", "1.23e5"),
        (6.51e-12, 1e-15, 2, "up", "6.6e-12"),
    ],
)
def test_limit_is_rounded_to_the_safe_side(value: float, uncertainty: float, digits: int, side: str, shown: str) -> None:
    assert rounded_safe(value, uncertainty, digits, side) == shown  # type: ignore[arg-type]


@given(st.floats(-1e200, 1e200), st.floats(0, 1e200), st.integers(1, 12))
def test_rounded_limit_is_never_on_the_wrong_side(value: float, uncertainty: float, digits: int) -> None:
    slack = Fraction(1e-15) * (abs(Fraction(value)) + Fraction(uncertainty)) + Fraction(5e-324)
    assert Fraction(rounded_safe(value, uncertainty, digits, "down")) <= Fraction(value) - Fraction(uncertainty) + slack
    assert Fraction(rounded_safe(value, uncertainty, digits, "up")) >= Fraction(value) + Fraction(uncertainty) - slack


@pytest.mark.parametrize(("value", "uncertainty", "side"), [(math.nan, 0.1, "down"), (1.0, math.inf, "up"), (1.0, 0.1, "left")])
def test_limit_without_a_safe_side_is_refused(value: float, uncertainty: float, side: str) -> None:
    with pytest.raises(ValueError, match="side"):
        rounded_safe(value, uncertainty, 3, side)  # type: ignore[arg-type]


def test_significant_digits() -> None:
    assert [significant(value) for value in (300.0, 1e6, 6.5e-12, 1 / 3, math.nan)] == ["300", "1e6", "6.5e-12", "0.333333", "-"]
