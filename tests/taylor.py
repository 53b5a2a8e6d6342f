"""Initial value problems by Taylor series in mpmath, to as many digits as asked for: a truth that owes nothing to differences.

A Series yields its coefficients one after the other, each from those before it, so a series may stand in its own
right-hand side. Radial problems start at the axis itself, where u'' + (s/r) u' has the coefficients m (m - 1 + s) u_m.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from mpmath import mp, mpf


class Series:
    """A power series known coefficient by coefficient: `rule(k)` gives the k-th, and may ask for earlier ones."""

    def __init__(self, rule: Callable[[int], Any]) -> None:
        self.rule = rule
        self.known: list[Any] = []

    def __getitem__(self, k: int) -> Any:
        while len(self.known) <= k:
            self.known.append(self.rule(len(self.known)))
        return self.known[k]

    def __add__(self, other: Any) -> Series:
        right = series(other)
        return Series(lambda k: self[k] + right[k])

    def __neg__(self) -> Series:
        return Series(lambda k: -self[k])

    def __sub__(self, other: Any) -> Series:
        right = series(other)
        return Series(lambda k: self[k] - right[k])

    def __rsub__(self, other: Any) -> Series:
        return series(other) - self

    def __mul__(self, other: Any) -> Series:
        if not isinstance(other, Series):
            factor = mpf(other)
            return Series(lambda k: factor * self[k])
        return Series(lambda k: mp.fdot((self[j], other[k - j]) for j in range(k + 1)))

    def __truediv__(self, other: Any) -> Series:
        below = series(other)
        quotient = Series(lambda k: (self[k] - mp.fdot((quotient[j], below[k - j]) for j in range(k))) / below[0])
        return quotient

    def __rtruediv__(self, other: Any) -> Series:
        return series(other) / self

    def __radd__(self, other: Any) -> Series:
        return self.__add__(other)

    def __rmul__(self, other: Any) -> Series:
        return self.__mul__(other)

    def __pow__(self, exponent: Any) -> Series:
        if isinstance(exponent, int) and exponent >= 0:  # by multiplication: the base may vanish
            if exponent == 0:
                return series(1)
            return self if exponent == 1 else self * self ** (exponent - 1)
        p = mpf(exponent)

        def rule(k: int) -> Any:
            if k == 0:
                return self[0] ** p
            return mp.fdot(((p * j - (k - j)) * self[j], power[k - j]) for j in range(1, k + 1)) / (k * self[0])

        power = Series(rule)
        return power


def series(value: Any) -> Series:
    """A number as a constant series."""
    return value if isinstance(value, Series) else Series(lambda k: mpf(value) if k == 0 else mpf(0))


def exp(a: Series) -> Series:
    """exp of a series: k e_k = sum of j a_j e_(k-j)."""
    power = Series(lambda k: mp.exp(a[0]) if k == 0 else mp.fdot((j * a[j], power[k - j]) for j in range(1, k + 1)) / k)
    return power


def sinh(a: Series) -> Series:
    """sinh of a series."""
    return (exp(a) - exp(-a)) / 2


def cosh(a: Series) -> Series:
    """cosh of a series."""
    return (exp(a) + exp(-a)) / 2


def _order() -> int:
    # The cheapest order grows in proportion to the digits; 1.1 coefficients a digit came out best among 0.7 … 1.6.
    return int(1.1 * mp.dps) + 6


def _reach(coefficients: Sequence[Sequence[Any]], order: int) -> Any:
    """The step at which the last two terms of every series fall below one unit of the working precision."""
    reach = mpf("inf")
    for terms in coefficients:
        size = max(abs(terms[0]), abs(terms[1]), mpf(10) ** (-10))
        for k in (order - 1, order):
            if terms[k] != 0:
                reach = min(reach, (size * mp.eps / abs(terms[k])) ** (mpf(1) / k))
    return reach


def _sum(terms: Sequence[Any], step: Any) -> Any:
    total = mpf(0)
    for term in reversed(terms):
        total = total * step + term
    return total


Field = Callable[..., Sequence[Series]]


def _expansion(field: Field, x: Any, y: Sequence[Any], order: int) -> list[list[Any]]:
    derivatives: list[Series] = []

    def unknown(i: int) -> Series:
        return Series(lambda k: mpf(y[i]) if k == 0 else derivatives[i][k - 1] / k)

    unknowns = [unknown(i) for i in range(len(y))]
    coordinate = Series(lambda k: mpf(x) if k == 0 else mpf(1 if k == 1 else 0))
    derivatives.extend(series(part) for part in field(coordinate, *unknowns))
    return [[one[k] for k in range(order + 1)] for one in unknowns]


def advance(field: Field, x: Any, y: Sequence[Any], end: Any) -> list[Any]:
    """The unknowns at `end` of y' = field(x, *y) with y given at x <= end."""
    order = _order()
    x, end, y = mpf(x), mpf(end), list(y)
    while x < end:
        terms = _expansion(field, x, y, order)
        step = min(_reach(terms, order), end - x)
        y = [_sum(one, step) for one in terms]
        x = end if step == end - x else x + step
    return y


def advance_until(field: Field, x: Any, y: Sequence[Any], value: Callable[..., Any]) -> tuple[Any, list[Any]]:
    """Where value(x, *y) first changes its sign from that at the start, and the unknowns there."""
    order = _order()
    x, y = mpf(x), list(y)
    sign = mp.sign(value(x, *y))
    for _ in range(10_000):
        terms = _expansion(field, x, y, order)
        step = _reach(terms, order)

        def at(part: Any, terms: list[list[Any]] = terms, x: Any = x) -> Any:
            return value(x + part, *(_sum(one, part) for one in terms))

        if mp.sign(at(step)) != sign:
            part = mp.findroot(at, (mpf(0), step), solver="anderson", tol=mp.eps**1.5)
            return x + part, [_sum(one, part) for one in terms]
        x, y = x + step, [_sum(one, step) for one in terms]
    raise ArithmeticError("no change of sign within 10000 steps")


def from_axis(source: Callable[[Series, Series], Series], exponent: int, centre: Any, most: Any = 1) -> tuple[Any, Any, Any]:
    """A radius near the axis, at most `most`, with u and u' there: u'' + (s/r) u' + source(r, u) = 0, u(0) = centre, u'(0) = 0."""
    order = _order()
    radius = Series(lambda k: mpf(1 if k == 1 else 0))
    u = Series(lambda m: mpf(centre) if m == 0 else mpf(0) if m == 1 else -right[m - 2] / (m * (m - 1 + exponent)))
    right = series(source(radius, u))
    terms = [u[k] for k in range(order + 1)]
    step = min(_reach([terms], order), mpf(most))
    return step, _sum(terms, step), _sum([k * term for k, term in enumerate(terms)][1:], step)


def radial(source: Callable[[Series, Series], Series], exponent: int) -> Field:
    """u'' + (s/r) u' + source(r, u) = 0 away from the axis as a field of (u, u')."""
    return lambda r, u, v: (v, -source(r, u) - v * exponent / r)


def radial_profile(source: Callable[[Series, Series], Series], exponent: int, centre: Any, end: Any) -> list[Any]:
    """u and u' at the radius `end` of the solution that is regular at the axis."""
    r, u, v = from_axis(source, exponent, centre, end)
    return advance(radial(source, exponent), r, (u, v), end)


def radial_until(
    source: Callable[[Series, Series], Series], exponent: int, centre: Any, value: Callable[..., Any]
) -> tuple[Any, list[Any]]:
    """The radius where value(r, u, u') first changes its sign, with u and u' there."""
    r, u, v = from_axis(source, exponent, centre)
    # The first step is halved until the sign has not changed yet.
    sign = mp.sign(value(r * mpf("1e-6"), mpf(centre), mpf(0)))
    while mp.sign(value(r, u, v)) != sign:
        r, u, v = from_axis(source, exponent, centre, r / 2)
    return advance_until(radial(source, exponent), r, (u, v), value)
