"""Numbers for people: as many digits as are known to hold, and limits rounded toward the safe side."""

from __future__ import annotations

import math
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_EVEN, Context, Decimal
from typing import Literal

DIGITS_OF_UNKNOWN = 6  # significant digits shown where nobody knows how many hold
NOT_A_NUMBER = "-"
_CONTEXT = Context(prec=800)  # room for the sum of any two doubles, which lie up to 632 places apart
_DOUBLE_DIGITS = 16  # significant digits beyond which a double says nothing


def with_uncertainty(value: float | None, uncertainty: float | None, unit: str = "") -> str:
    """A value with the digits that are known to hold, its uncertainty and its unit: `3.51383071912 ± 4e-11`, `1.873 ± 0.003 m`.

    The uncertainty is rounded up to one digit (two where the first would be 1 or 2 and one would cost something), and
    what rounding the value costs is added to it, so that the interval shown holds the one computed. Without an
    uncertainty the value has six digits and the words "uncertainty unknown" behind it; what is no finite number is a dash.
    """
    if value is None or not math.isfinite(value):
        return NOT_A_NUMBER
    behind = f" {unit}" if unit else ""
    if uncertainty is None or not math.isfinite(uncertainty):
        return f"{significant(value)}{behind}, uncertainty unknown"
    exact, width = _decimal(value), abs(_decimal(uncertainty))
    if width == 0:
        return f"{significant(value, _DOUBLE_DIGITS)} ± 0{behind}"
    place = width.adjusted()
    printed_so = width == _at_place(width, place, ROUND_FLOOR) and exact == _at_place(exact, place, ROUND_FLOOR)
    if width < Decimal(3).scaleb(place) and not printed_so:
        place -= 1
    if exact != 0:
        place = max(place, exact.adjusted() - _DOUBLE_DIGITS + 1)
    rounded = _at_place(exact, place, ROUND_HALF_EVEN)
    shown = _at_place(_CONTEXT.add(width, abs(_CONTEXT.subtract(exact, rounded))), place, ROUND_CEILING)
    return f"{_plain(rounded, place)} ± {_plain(shown, place)}{behind}"


def rounded_safe(value: float, uncertainty: float, digits: int, side: Literal["down", "up"]) -> str:
    """A limit moved by its uncertainty and rounded, both toward the safe side, to so many significant digits.

    "down" is for a limit that must not be exceeded: the result is at most value - uncertainty; "up" for one that must
    not be undercut. Raises ValueError where value or uncertainty is no finite number: such a limit has no safe side.
    """
    if not (math.isfinite(value) and math.isfinite(uncertainty)):
        raise ValueError(f"a limit of {value} with the uncertainty {uncertainty} cannot be rounded to a safe side")
    if side not in ("down", "up"):
        raise ValueError(f"side is {side!r}; expected 'down' or 'up'")
    exact, width = _decimal(value), abs(_decimal(uncertainty))
    edge, rounding = (_CONTEXT.subtract(exact, width), ROUND_FLOOR) if side == "down" else (_CONTEXT.add(exact, width), ROUND_CEILING)
    if edge == 0:
        return "0"
    place = edge.adjusted() - digits + 1
    rounded = _at_place(edge, place, rounding)
    if rounded != 0 and rounded.adjusted() > edge.adjusted():  # 9.996 became 10.00: one digit more than asked for
        place += 1
        rounded = _at_place(rounded, place, rounding)
    return _plain(rounded, place)


def significant(value: float | None, digits: int = DIGITS_OF_UNKNOWN) -> str:
    """A number with so many significant digits at most, zeros at the end left out; a dash for what is no finite number."""
    if value is None or not math.isfinite(value):
        return NOT_A_NUMBER
    mantissa, exponent, power = f"{value:.{digits}g}".partition("e")
    return f"{mantissa}e{int(power)}" if exponent else mantissa


def _decimal(number: float) -> Decimal:
    """The shortest decimal that is this double: 1e-9 where the double itself is 6e-26 more."""
    return Decimal(repr(float(number)))


def _at_place(number: Decimal, place: int, rounding: str) -> Decimal:
    return number.quantize(Decimal(1).scaleb(place), rounding=rounding, context=_CONTEXT)


def _plain(number: Decimal, place: int) -> str:
    """Fixed notation where it is short, a power of ten elsewhere; the last digit stands at `place` in both."""
    if number == 0:
        return "0"
    if place <= 2 and -4 <= number.adjusted() <= 6:
        return f"{number:f}"
    mantissa = number.scaleb(-number.adjusted(), context=_CONTEXT)
    return f"{mantissa:f}e{number.adjusted()}"
