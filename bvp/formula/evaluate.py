"""Evaluation of a tree in any arithmetic: floats, arrays, numbers of 40 digits, series."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from functools import cache
from typing import Any

from bvp.formula.tree import Binary, Call, Negative, Node, Number, bottom_up

Functions = Mapping[str, Callable[..., Any]]


def evaluate(tree: Node, value: Callable[[Any], Any], functions: Functions, number: Callable[[float], Any] = float) -> Any:
    """The value of a tree; `value` is asked for every leaf (Name, Indexed, Prime, At), each subtree is worked out once.

    `number` makes what stands for a literal: `precise.typed` where 1/3 is to have 40 digits too. Raises what the
    arithmetic raises; the tables here give nan or inf instead wherever floats can.
    """
    return evaluate_all([tree], value, functions, number)[0]


def evaluate_all(
    trees: Sequence[Node], value: Callable[[Any], Any], functions: Functions, number: Callable[[float], Any] = float
) -> list[Any]:
    """The values of several trees, subtrees that they share worked out once."""
    done: dict[Node, Any] = {}

    def is_operation(node: Node) -> bool:
        return isinstance(node, (Binary, Negative)) or (isinstance(node, Call) and node.function in functions)

    for node in bottom_up(trees, is_operation):
        if isinstance(node, Number):
            done[node] = number(node.value)
        elif isinstance(node, Binary):
            done[node] = operate(node.operator, done[node.left], done[node.right])
        elif isinstance(node, Negative):
            done[node] = -done[node.operand]
        elif isinstance(node, Call) and node.function in functions:
            inside = [done[part] for part in node.arguments]
            done[node] = functions[node.function](*inside, orders=node.orders) if node.orders else functions[node.function](*inside)
        else:
            done[node] = value(node)
    return [done[tree] for tree in trees]


def operate(operator: str, left: Any, right: Any) -> Any:
    """left operator right, for numbers, arrays and whatever else has the operators."""
    if operator == "+":
        return left + right
    if operator == "-":
        return left - right
    if operator == "*":
        return left * right
    if isinstance(left, (int, float)) and isinstance(right, (int, float)):
        return _float_quotient(left, right) if operator == "/" else _float_power(left, right)
    return left / right if operator == "/" else left**right


def _float_quotient(left: float, right: float) -> float:
    if right == 0.0:
        return math.nan if left == 0.0 or math.isnan(left) else math.copysign(math.inf, left) * math.copysign(1.0, right)
    return left / right


def _float_power(base: float, exponent: float) -> float:
    try:
        return math.pow(base, exponent)
    except OverflowError:
        return -math.inf if base < 0.0 and exponent % 2.0 == 1.0 else math.inf
    except ValueError:
        return math.inf if base == 0.0 else math.nan


CARDINAL_SLOPE = tuple((-1) ** (m + 1) * 2.0 * (m + 1) / math.factorial(2 * m + 4) for m in range(14))  # of z^m; 1e-16 up to |z| = 4


def cardinal(z: float) -> float:
    """4 sin^2(sqrt(z)/2)/z = 1 - z/12 + z^2/360 - …, sinh for z < 0; nan from pi^2 on, where the fitted scheme ends."""
    if z >= math.pi**2:
        return math.nan
    half = math.sqrt(abs(z)) / 2.0
    if half == 0.0:
        return 1.0
    ratio = (math.sin(half) if z > 0.0 else math.sinh(half)) / half
    return ratio * ratio


def cardinal_slope(z: float) -> float:
    """The derivative of `cardinal`: (sin(sqrt z)/sqrt z - cardinal(z))/z, near 0 its series."""
    if z >= math.pi**2:
        return math.nan
    if abs(z) < 4.0:
        total = 0.0
        for coefficient in reversed(CARDINAL_SLOPE):
            total = total * z + coefficient
        return total
    root = math.sqrt(abs(z))
    return ((math.sin(root) if z > 0.0 else math.sinh(root)) / root - cardinal(z)) / z


def _guarded(function: Callable[..., float]) -> Callable[..., float]:
    def guarded(*arguments: float) -> float:
        try:
            return function(*arguments)
        except OverflowError:
            return math.inf
        except ValueError:
            return math.nan

    return guarded


def _fitted_weight(part: int) -> Callable[[float, float], float]:
    """The uncompiled twin of a kernel, fetched at its first call: numba is slow to import and `check` does without."""

    def weight(p: float, z: float) -> float:
        from bvp.kernels.jit import interpreted
        from bvp.kernels.special import weight as compiled

        return interpreted(compiled)(p, z, part)

    return weight


def _log(x: float) -> float:
    return -math.inf if x == 0.0 else math.log(x)


def _sinh(x: float) -> float:
    try:
        return math.sinh(x)
    except OverflowError:
        return math.copysign(math.inf, x)


@cache
def float_functions() -> dict[str, Callable[..., float]]:
    """The functions of the language for Python floats; nan outside a domain, inf at an overflow, never an exception."""
    plain = {
        name: getattr(math, name)
        for name in ("exp", "sqrt", "sin", "cos", "tan", "cosh", "tanh", "asin", "acos", "atan", "erf", "log1p", "expm1")
    }
    table = {name: _guarded(function) for name, function in plain.items()}
    return {
        **table,
        "log": _guarded(_log),
        "sinh": _sinh,
        "abs": abs,
        "min": lambda a, b: math.nan if math.isnan(a) or math.isnan(b) else min(a, b),
        "max": lambda a, b: math.nan if math.isnan(a) or math.isnan(b) else max(a, b),
        "sign": lambda x: math.nan if math.isnan(x) else float((x > 0) - (x < 0)),
        "step_le": lambda a, b: 1.0 if a <= b else 0.0,
        "cardinal": _guarded(cardinal),
        "cardinal_slope": lambda z: -_guarded(lambda z: -cardinal_slope(z))(z),
        **{name: _guarded(_fitted_weight(part)) for part, name in enumerate(("fit", "fit_by_drift", "fit_by_slope"))},
    }


@cache
def mpmath_functions() -> dict[str, Callable[..., Any]]:
    """The functions of the language in mpmath's arithmetic, at the precision in force."""
    from bvp.formula import precise

    return precise.mpmath_functions()
