"""Newton's method in several unknowns with a differenced derivative, in mpmath: ends on the size of its own step."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from mpmath import mp, mpf


def newton(rows: Callable[..., Sequence[Any]], start: Sequence[Any], digits: int = 24, steps: int = 25) -> list[Any]:
    """Where all rows(*unknowns) vanish; ArithmeticError unless a step below 10^-digits (relative) is reached.

    Differences with a step of 10^(-dps/2) leave a derivative good to half the digits: every step gains that many.
    """
    at = [mpf(one) for one in start]
    for _ in range(steps):
        now = list(rows(*at))
        matrix = mp.matrix(len(at), len(at))
        for column, value in enumerate(at):
            h = mpf(10) ** (-mp.dps // 2) * max(abs(value), mpf(1))
            moved = rows(*(one + h if i == column else one for i, one in enumerate(at)))
            for row in range(len(at)):
                matrix[row, column] = (moved[row] - now[row]) / h
        change = mp.lu_solve(matrix, mp.matrix([-one for one in now]))
        at = [one + change[i] for i, one in enumerate(at)]
        if max(abs(change[i]) / max(abs(one), mpf(1)) for i, one in enumerate(at)) < mpf(10) ** -digits:
            return at
    raise ArithmeticError(f"no root near {[mp.nstr(mpf(one), 6) for one in start]} after {steps} steps")
