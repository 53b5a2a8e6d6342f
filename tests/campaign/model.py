"""A problem in symbols: u'' + (s/x) u' + S(x, u, u', parameters) = 0 with conditions at two ends, made ready for numbers.

The typed text of a problem and the S that its truth is worked out from come from the same symbols, so that they cannot differ.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from functools import cached_property
from typing import Any

import sympy
from mpmath import mpf
from sympy.printing.str import StrPrinter

X, U, V = sympy.symbols("x u u'", real=True)
XI, P, W = sympy.symbols("_place _slope _bend", real=True)  # the place on [0, 1], du/dxi, d2u/dxi2
Q = sympy.Symbol("_free", real=True)  # what shooting varies

EXPONENTS = {"slab": 0, "cylinder": 1, "sphere": 2}


class Typed(StrPrinter):  # type: ignore[misc]  # sympy has no types
    """Formulas as they are typed: ^ for powers, abs, min and max in small letters."""

    def _print_Abs(self, expr: Any) -> str:
        return f"abs({self._print(expr.args[0])})"

    def _print_Max(self, expr: Any) -> str:
        return f"max({', '.join(self._print(arg) for arg in expr.args)})"

    def _print_Min(self, expr: Any) -> str:
        return f"min({', '.join(self._print(arg) for arg in expr.args)})"


def typed(expression: Any) -> str:
    """The text of an expression in the formula language."""
    return str(Typed().doprint(sympy.sympify(expression))).replace("**", "^")


@dataclass(frozen=True)
class Model:
    """The symbols of one problem; `left` and `right` are the ends, a condition is an expression in U and V that has to vanish.

    At an axis (geometry not a slab, left end 0) the left condition is V. `breaks` are the places, as shares of the length,
    where a coefficient has a kink. `unit` and `along_unit` are the sizes of u - `base` and of the traced parameter, in physical
    units.
    """

    source: Any
    left_condition: Any
    right_condition: Any
    parameters: Mapping[str, float]
    along: str = "lam"
    left: Any = sympy.Integer(0)
    right: Any = sympy.Integer(1)
    geometry: str = "slab"
    guess: Any = sympy.Integer(0)
    breaks: tuple[float, ...] = ()
    unit: float = 1.0
    base: float = 0.0
    along_unit: float = 1.0
    axis_power: Any = None
    symbols: tuple[Any, ...] = field(default=(), init=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "symbols", tuple(sympy.Symbol(name, real=True) for name in self.parameters))

    @property
    def parameter(self) -> Any:
        """The symbol of the traced parameter."""
        return sympy.Symbol(self.along, real=True)

    @cached_property
    def scaled(self) -> tuple[Any, Any, Any]:
        """The residual on [0, 1] and the two conditions there, in (XI, U, P, W) and the scaled traced parameter."""
        length = self.right - self.left
        size = sympy.Rational(self.unit) if self.unit != 1 else sympy.Integer(1)
        place, state = self.left + length * XI, (sympy.Rational(self.base) if self.base else 0) + size * U
        slope = size * P / length
        into = [(X, place), (U, state), (V, slope)]
        source = self.source.subs(into, simultaneous=True)
        s = EXPONENTS[self.geometry]
        radial = s * P / (XI + self.left / length) if s else 0
        residual = W + radial + length**2 * source / size
        ends = [condition.subs([(U, state), (V, slope)], simultaneous=True) for condition in (self.left_condition, self.right_condition)]
        if self.along_unit != 1.0:
            rename = {self.parameter: self.parameter * sympy.Rational(self.along_unit)}
            residual, *ends = (one.subs(rename, simultaneous=True) for one in (residual, *ends))
        return residual, ends[0], ends[1]

    def _arguments(self) -> list[Any]:
        return [XI, U, P, W, *self.symbols]

    @cached_property
    def expressions(self) -> list[list[Any]]:
        """[R, R_u, R_p, R_lam, R_uu, R_up, R_pp, R_ulam, R_plam] of the residual and of each condition."""
        lam, found = self.parameter, []
        for one in self.scaled:
            first = [sympy.diff(one, by) for by in (U, P, lam)]
            second = [
                sympy.diff(first[0], U),
                sympy.diff(first[0], P),
                sympy.diff(first[1], P),
                sympy.diff(first[0], lam),
                sympy.diff(first[1], lam),
            ]
            found.append([one, *first, *second])
        return found

    def compiled(self, module: str) -> tuple[Callable[..., Any], ...]:
        """The three rows of `expressions` as functions of (XI, U, P, W, parameters…); module is "numpy" or "mpmath"."""
        modules: Any = ["scipy", "numpy"] if module == "numpy" else module
        return tuple(sympy.lambdify(self._arguments(), parts, modules=modules, cse=True) for parts in self.expressions)

    def numbers(self, lam: Any, exact: bool = False) -> list[Any]:
        """The parameters in order with the traced one (scaled) put in; `exact` gives mpf of the same floats."""
        wrap = mpf if exact else float
        return [lam if name == self.along else wrap(value) for name, value in self.parameters.items()]
