"""Truncated Laurent series in one small positive variable: what a difference formula becomes when its step goes to 0.

A series is sum c[i] s^(valuation + i) for i < n, known up to terms of the order s^(valuation + n). Coefficients are
floats or mpmath numbers, and numbers mix with series. A sum that is nothing but rounding of its summands counts as 0:
the order of a difference formula is read off the first coefficient that is not.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from functools import cached_property
from typing import Any

TERMS = 10
LARGEST_WHOLE_POWER = 1000  # beyond, a power is taken by logarithms
ROUNDING = 64  # units in the last place; what is left of a sum below this is taken for 0. A choice, not derived


class SeriesError(ValueError):
    """An expression that has no Laurent series here, with the reason."""


class Series:
    """coefficients[i] s^(valuation + i), s small and positive; leading zeros are dropped, so coefficients[0] is not 0."""

    __array_ufunc__ = None  # a NumPy number beside a series leaves the arithmetic to the series

    def __init__(self, coefficients: Sequence[Any], valuation: int = 0) -> None:
        first = next((i for i, c in enumerate(coefficients) if c != 0), len(coefficients))
        self.coefficients = tuple(coefficients[first:])
        self.valuation = valuation + first

    @classmethod
    def polynomial(cls, coefficients: Sequence[Any], terms: int = TERMS) -> Series:
        """The series of a polynomial: its coefficients from the power 0 on, zeros after them up to `terms`."""
        return cls([*coefficients, *[0.0] * (terms - len(coefficients))][:terms])

    @classmethod
    def constant(cls, value: Any, terms: int = TERMS) -> Series:
        """The series of a number."""
        return cls.polynomial([value], terms)

    @classmethod
    def variable(cls, terms: int = TERMS) -> Series:
        """The small variable s itself."""
        return cls([1.0, *[0.0] * (terms - 1)], 1)

    @property
    def end(self) -> int:
        """The power of the first term that is not known."""
        return self.valuation + len(self.coefficients)

    def coefficient(self, power: int) -> Any:
        """The coefficient of s^power; SeriesError where the series does not reach so far."""
        if power >= self.end:
            raise SeriesError(f"the series is known below s^{self.end} only; s^{power} was asked for")
        return self.coefficients[power - self.valuation] if power >= self.valuation else 0.0

    @cached_property
    def is_constant(self) -> bool:
        """Whether nothing but a term s^0 is there, as far as it is known."""
        return (self.valuation == 0 and not any(self.coefficients[1:])) or not self.coefficients

    def __repr__(self) -> str:
        shown = [f"{c} s^{self.valuation + i}" for i, c in enumerate(self.coefficients) if c != 0]
        return " + ".join([*shown, f"O(s^{self.end})"])

    # -- arithmetic -------------------------------------------------------------------------------------------------

    def __neg__(self) -> Series:
        return Series([-c for c in self.coefficients], self.valuation)

    def __pos__(self) -> Series:
        return self

    def __add__(self, other: Any) -> Series:
        if not isinstance(other, Series):
            if self.end <= 0:  # a number is of the order s^0, which this series does not reach
                return self
            other = Series([other, *[0.0] * (self.end - 1)])
        start, end = min(self.valuation, other.valuation), min(self.end, other.end)
        return Series([_summed((self._at(power), other._at(power))) for power in range(start, end)], min(start, end))

    __radd__ = __add__

    def __sub__(self, other: Any) -> Series:
        return self.__add__(-other)

    def __rsub__(self, other: Any) -> Series:
        return (-self).__add__(other)

    def __mul__(self, other: Any) -> Series:
        if not isinstance(other, Series):
            return Series([c * other for c in self.coefficients], self.valuation)
        a, b = self.coefficients, other.coefficients
        known = min(len(a), len(b))
        products = [_summed([a[i] * b[n - i] for i in range(n + 1)]) for n in range(known)]
        return Series(products, self.valuation + other.valuation)

    __rmul__ = __mul__

    def __truediv__(self, other: Any) -> Series:
        if not isinstance(other, Series):
            if other == 0:
                raise SeriesError("a division by 0")
            return Series([c / other for c in self.coefficients], self.valuation)
        if not other.coefficients:
            raise SeriesError(f"a division by what vanishes below s^{other.end}")
        a, b = self.coefficients, other.coefficients
        quotient: list[Any] = []
        for n in range(min(len(a), len(b))):
            quotient.append(_summed([a[n], *(-b[i] * quotient[n - i] for i in range(1, n + 1))]) / b[0])
        return Series(quotient, self.valuation - other.valuation)

    def __rtruediv__(self, other: Any) -> Series:
        return Series([other, *[0.0] * (len(self.coefficients) - 1)][: len(self.coefficients)]) / self

    def __pow__(self, exponent: Any) -> Series:
        if isinstance(exponent, Series):
            if not exponent.is_constant:
                return exponential(exponent * logarithm(self))
            exponent = exponent.coefficient(0)
        if abs(exponent) <= LARGEST_WHOLE_POWER and exponent == int(exponent):
            return self._whole_power(int(exponent))
        return self._real_power(exponent)

    def __rpow__(self, base: Any) -> Series:
        if self.is_constant:
            return Series.constant(base, len(self.coefficients)).__pow__(self.coefficient(0))
        if not base > 0:
            raise SeriesError(f"{base} to a power that changes; the base has to be positive")
        return exponential(self * _value("log", base * unit(self.coefficients)))

    def _whole_power(self, exponent: int) -> Series:
        if exponent < 0:
            return self._whole_power(-exponent).__rtruediv__(1.0)
        result = Series.constant(1.0, len(self.coefficients))
        square = self
        while exponent:
            if exponent & 1:
                result = result * square
            exponent >>= 1
            square = square * square if exponent else square
        return result

    def _real_power(self, exponent: Any) -> Series:
        """(c s^v (1 + t))^p = c^p s^(v p) (1 + t)^p, by y' (1 + t) = p y t'; only where it vanishes is kept of a broken power."""
        shift = self.valuation * exponent
        if exponent > 0 and self.valuation > 0 and (not self.coefficients or shift != int(shift)):
            return Series((), math.floor(shift) if not self.coefficients else math.ceil(shift))
        if not self.coefficients:
            raise SeriesError(f"the power {exponent} of what vanishes below s^{self.end}")
        if shift != int(shift):
            raise SeriesError(f"the power {exponent} of what begins with s^{self.valuation}; that is no series in whole powers")
        leading = self.coefficients[0] * unit(self.coefficients)
        if not leading > 0:
            raise SeriesError(f"the power {exponent} of what is negative, {leading}, where s is small")
        t = [c / leading for c in self.coefficients]
        y = [leading**exponent]
        for n in range(1, len(t)):
            y.append(_summed([(exponent * i - (n - i)) * t[i] * y[n - i] for i in range(1, n + 1)]) / n)
        return Series(y, int(shift))

    def _at(self, power: int) -> Any:
        return self.coefficients[power - self.valuation] if power >= self.valuation else 0.0

    def from_zero(self, what: str) -> list[Any]:
        """The coefficients from the power 0 on, all in one arithmetic.

        SeriesError where negative powers are there, or not even s^0 is known.
        """
        if self.coefficients and self.valuation < 0:
            raise SeriesError(f"{what} of what grows like s^{self.valuation}")
        if self.end <= 0:
            raise SeriesError(f"{what} of what is known below s^{self.end} only")
        one = unit(self.coefficients)
        return [self._at(power) * one for power in range(self.end)]

    def sign(self) -> float:
        """The sign for small positive s; 0 where every known coefficient is 0."""
        return 0.0 if not self.coefficients else 1.0 if self.coefficients[0] > 0 else -1.0


def _summed(summands: Sequence[Any]) -> Any:
    """The sum, 0 where it is no more than the rounding of its summands."""
    total = sum(summands)
    size = sum(abs(c) for c in summands)
    return 0.0 if abs(total) <= ROUNDING * unit_roundoff(total) * size else total


def unit(coefficients: Sequence[Any]) -> Any:
    """1 in the arithmetic of some coefficients: that of the first which is no float."""
    precise = next((c for c in coefficients if not isinstance(c, (int, float))), None)
    return 1.0 if precise is None else precise.context.mpf(1)


def unit_roundoff(number: Any) -> Any:
    """The unit roundoff of a number's arithmetic."""
    if isinstance(number, (int, float)):
        return 2.220446049250313e-16
    return number.context.eps


def _value(name: str, *at: Any) -> Any:
    """A function of the language of numbers; SeriesError where it is not finite there."""
    from bvp.formula.evaluate import float_functions, mpmath_functions

    plain = all(isinstance(number, (int, float)) for number in at)
    value = (float_functions() if plain else mpmath_functions())[name](*at)
    if getattr(value, "imag", 0) or not math.isfinite(value.real):
        raise SeriesError(f"{name} at {', '.join(map(str, at))} is {value}")
    return value


def _integrated(slope: Series, constant: Any, end: int) -> Series:
    """The series with a given derivative and constant term, known below s^end at most."""
    return Series([constant, *(slope.coefficient(n - 1) / n for n in range(1, min(end, slope.end + 1)))])


def differentiated(series: Series) -> Series:
    """The derivative by s."""
    return Series([(series.valuation + i) * c for i, c in enumerate(series.coefficients)], series.valuation - 1)


# -- functions, each by the differential equation that its series satisfies -------------------------------------------


def exponential(x: Series) -> Series:
    """exp: y' = x' y."""
    c = x.from_zero("exp")
    y = [_value("exp", c[0])]
    for n in range(1, len(c)):
        y.append(_summed([i * c[i] * y[n - i] for i in range(1, n + 1)]) / n)
    return Series(y)


def logarithm(x: Series) -> Series:
    """log: y' = x'/x; x has to tend to a positive number."""
    if not isinstance(x, Series):
        return Series.constant(_value("log", x))
    if x.valuation != 0 or not x.coefficients:
        raise SeriesError(f"log of what {'vanishes' if x.valuation > 0 or not x.coefficients else 'grows'} where s is small")
    if not x.coefficients[0] > 0:
        raise SeriesError(f"log of what is negative, {x.coefficients[0]}, where s is small")
    return _by_slope("log", x, lambda t: 1.0 / t)


def _expm1(x: Series) -> Series:
    y = exponential(x)
    first = _value("expm1", x.from_zero("expm1")[0])
    return Series([first, *(y._at(n) for n in range(1, y.end))])


def _by_slope(name: str, x: Series, slope: Callable[[Series], Any]) -> Series:
    """f(x) from f' as a function of series: y' = f'(x) x'."""
    c = x.from_zero(name)
    first = _value(name, c[0])
    if len(c) == 1:
        return Series([first])
    return _integrated(slope(x) * differentiated(Series(c)), first, len(c))


def sine_and_cosine(names: tuple[str, str], x: Series, sign: float) -> tuple[Series, Series]:
    """(sin, cos) for sign -1, (sinh, cosh) for sign 1: a' = x' b, b' = sign x' a."""
    c = x.from_zero(names[0])
    a, b = [_value(names[0], c[0])], [_value(names[1], c[0])]
    for n in range(1, len(c)):
        a.append(_summed([i * c[i] * b[n - i] for i in range(1, n + 1)]) / n)
        b.append(sign * _summed([i * c[i] * a[n - i] for i in range(1, n + 1)]) / n)
    return Series(a), Series(b)


def _tangent(name: str, x: Series, sign: float) -> Series:
    """tan for sign 1, tanh for sign -1: y' = (1 + sign y^2) x'."""
    c = x.from_zero(name)
    y = [_value(name, c[0])]
    w = [1.0 + sign * y[0] * y[0]]
    for n in range(1, len(c)):
        y.append(_summed([i * c[i] * w[n - i] for i in range(1, n + 1)]) / n)
        w.append(sign * _summed([y[i] * y[n - i] for i in range(n + 1)]))
    return Series(y)


def _absolute(x: Series) -> Series:
    return -x if x.sign() < 0 else x


def _smaller(a: Any, b: Any) -> Any:
    return a if _at_most(a, b) else b


def _larger(a: Any, b: Any) -> Any:
    return b if _at_most(a, b) else a


def _at_most(a: Any, b: Any) -> float:
    difference = a - b
    return float((difference.sign() if isinstance(difference, Series) else difference) <= 0)


def series_functions() -> dict[str, Callable[..., Any]]:
    """The functions of the language of series, and of numbers among them; SeriesError where there is no series.

    abs, min, max, sign and step_le decide by the sign for small positive s.
    """
    from bvp.formula.special_series import cardinal, cardinal_slope, fit, fit_by_drift, fit_by_slope

    table: dict[str, Callable[[Series], Any]] = {
        "exp": exponential,
        "log": logarithm,
        "expm1": _expm1,
        "log1p": lambda x: _by_slope("log1p", x, lambda t: 1.0 / (1.0 + t)),
        "sqrt": lambda x: x**0.5,
        "sin": lambda x: sine_and_cosine(("sin", "cos"), x, -1.0)[0],
        "cos": lambda x: sine_and_cosine(("sin", "cos"), x, -1.0)[1],
        "sinh": lambda x: sine_and_cosine(("sinh", "cosh"), x, 1.0)[0],
        "cosh": lambda x: sine_and_cosine(("sinh", "cosh"), x, 1.0)[1],
        "tan": lambda x: _tangent("tan", x, 1.0),
        "tanh": lambda x: _tangent("tanh", x, -1.0),
        "asin": lambda x: _by_slope("asin", x, lambda t: (1.0 - t * t) ** -0.5),
        "acos": lambda x: _by_slope("acos", x, lambda t: -((1.0 - t * t) ** -0.5)),
        "atan": lambda x: _by_slope("atan", x, lambda t: 1.0 / (1.0 + t * t)),
        "erf": lambda x: _by_slope("erf", x, lambda t: exponential(-t * t) * _two_over_root_pi(t)),
        "abs": _absolute,
        "sign": Series.sign,
        "cardinal": cardinal,
        "cardinal_slope": cardinal_slope,
    }
    two: dict[str, Callable[..., Any]] = {"fit": fit, "fit_by_drift": fit_by_drift, "fit_by_slope": fit_by_slope}
    return {
        **{name: _of_one(name, function) for name, function in table.items()},
        **{name: _of_two(name, function) for name, function in two.items()},
        "min": _smaller,
        "max": _larger,
        "step_le": _at_most,
    }


def _two_over_root_pi(x: Series) -> Any:
    context = getattr(x.from_zero("erf")[0], "context", None)
    return 2.0 / (math.sqrt(math.pi) if context is None else context.sqrt(context.pi))


def _of_one(name: str, function: Callable[[Series], Any]) -> Callable[[Any], Any]:
    return lambda x: function(x) if isinstance(x, Series) else _value(name, x)


def _of_two(name: str, function: Callable[[Any, Any], Any]) -> Callable[[Any, Any], Any]:
    return lambda p, z: function(p, z) if isinstance(p, Series) or isinstance(z, Series) else _value(name, p, z)
