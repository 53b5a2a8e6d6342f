"""Turning points by shooting: an eighth-order Runge-Kutta method at its tightest tolerance, with the variational equation.

From the left end the state with one free number q (u(0), or u'(0) where u(0) is given) is integrated together with its derivative by q. The
turning point is where the right condition B and dB/dq vanish together. Nothing is shared with collocation but the equation.
"""

from __future__ import annotations

import itertools
from typing import Any

import numpy as np
import numpy.typing as npt
import sympy
from scipy.integrate import solve_ivp

from tests.campaign.model import EXPONENTS, XI, Model, P, Q, U, W

Array = npt.NDArray[np.float64]
SIDE = sympy.Symbol("_side", real=True)
AXIS_START = 1e-4  # the series at the axis is carried to the third power: 1e-16 is left


class Shooting:
    """A model made ready for integration on [0, 1]."""

    def __init__(self, model: Model, kink: float | None = None) -> None:
        residual, left, right = model.scaled
        self.model, self.kink = model, kink
        # |u - c| is followed as (u - c) times the side, which changes where u passes c.
        residual = residual.replace(sympy.Abs, lambda inside: SIDE * sympy.diff(inside, U) * inside) if kink is not None else residual
        s = EXPONENTS[model.geometry]
        self.axis = s > 0 and model.left == 0
        radial = s * P / (XI + model.left / (model.right - model.left)) if s else sympy.Integer(0)
        regular = sympy.simplify(residual - W - radial) if s else residual - W
        field = -(regular + radial)
        arguments = [XI, U, P, *model.symbols]
        self.field = sympy.lambdify(
            [*arguments, SIDE], [field, sympy.diff(field, U), sympy.diff(field, P)], modules=["math", "scipy"], cse=True
        )
        self.right = sympy.lambdify(arguments, [right, sympy.diff(right, U), sympy.diff(right, P)], modules=["math", "scipy"])
        u, p, x = self._start(regular, left, s)
        start = [u, p, sympy.diff(u, Q), sympy.diff(p, Q)]
        self.start = sympy.lambdify([Q, *model.symbols], start, modules=["math", "scipy"])
        self.first_place = x
        self.free_value = u == Q or self.axis  # else the slope at the left end is what varies

    def _start(self, regular: Any, left: Any, s: int) -> tuple[Any, Any, float]:
        if self.axis:
            r = AXIS_START
            zero = {XI: 0, U: Q, P: 0}
            if self.model.axis_power is not None:  # the source is x^a g(u): u = q - g(q) r^(2 + a)/((2 + a)(1 + a + s))
                a = self.model.axis_power
                weight = sympy.simplify(regular / XI**a).subs(zero)
                return Q - weight * r ** (2 + a) / ((2 + a) * (1 + a + s)), -weight * r ** (1 + a) / (1 + a + s), r
            source = regular.subs(zero)
            bend = -source / (s + 1)
            next_source = regular.diff(XI).subs(zero) + regular.diff(P).subs(zero) * bend
            u = Q - source * r**2 / (2 * (s + 1)) - next_source * r**3 / (3 * (s + 2))
            return u, -source * r / (s + 1) - next_source * r**2 / (s + 2), r
        if left.has(P):
            by_slope = sympy.diff(left, P)
            return Q, sympy.together(-left.subs(P, 0) / by_slope).subs(U, Q), 0.0
        return -left.subs(U, 0) / sympy.diff(left, U), Q, 0.0

    def rows(self, q: float, lam: float) -> Array:
        """B and dB/dq at the right end."""
        numbers = self.model.numbers(lam)
        field = self.field

        def derivative(x: float, y: Array) -> list[float]:
            u, p, du, dp = y
            second, by_u, by_p = field(x, u, p, *numbers, side)
            return [p, second, dp, by_u * du + by_p * dp]

        def passes(x: float, y: Array) -> float:
            return float(y[0] - kink) if kink is not None else 1.0

        passes.terminal = True  # type: ignore[attr-defined]
        y, kink = np.array(self.start(q, *numbers), dtype=float), self.kink
        side = 1.0 if kink is None or y[0] > kink else -1.0
        places = [self.first_place, *self.model.breaks, 1.0]
        for begin, end in itertools.pairwise(places):
            # One float inside each piece: no stage may stand on a kink, where sign() is 0.
            begin, end = (np.nextafter(begin, 1.0) if begin else begin), np.nextafter(end, 0.0)
            while begin < end:
                passes.direction = -side  # type: ignore[attr-defined]
                result = solve_ivp(derivative, (begin, end), y, method="DOP853", rtol=2.3e-14, atol=1e-16, events=passes)
                if result.status < 0:
                    raise ArithmeticError("the integration stopped before the end")
                y, begin = result.y[:, -1], result.t[-1]
                side = -side if result.status == 1 else side
        row, by_u, by_p = self.right(1.0, y[0], y[1], *numbers)
        return np.array([row, by_u * y[2] + by_p * y[3]])

    def turning_point(self, q: float, lam: float) -> float:
        """The scaled parameter at the turning point near a start, by Newton with differenced derivatives.

        ArithmeticError where it does not settle.
        """
        at = np.array([q, lam], dtype=float)
        last = np.inf
        for _ in range(14):
            now = self.rows(*at)
            matrix = np.zeros((2, 2))
            for column in (0, 1):
                h = np.zeros(2)
                h[column] = 1e-5 * max(abs(at[column]), 0.05)
                matrix[:, column] = (self.rows(*(at + h)) - self.rows(*(at - h))) / (2 * h[column])
            change = np.linalg.solve(matrix, -now)
            at = at + change
            size = float(np.max(np.abs(change)))
            if (size < 1e-9 and abs(change[1]) < 3e-14 * max(abs(at[1]), 1e-3)) or (size < 1e-8 and size > 0.3 * last):
                return float(at[1])
            last = size
        raise ArithmeticError("shooting did not settle")
