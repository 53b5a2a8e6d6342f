"""Evaluation of a tree in any arithmetic: floats, arrays, numbers of 40 digits, series."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from functools import cache
from typing import Any

from bvp.formula.tree import Binary, Call, Negative, Node, Number

Functions = Mapping[str, Callable[..., Any]]


def evaluate(tree: Node, value: Callable[[Any], Any], functions: Functions) -> Any:
    """The value of a tree; `value` is asked for every leaf (Name, Indexed, Prime, At), each subtree is worked out once.

    Raises what the arithmetic raises; the tables here give nan or inf instead wherever floats can.
    """
    return evaluate_all([tree], value, functions)[0]


def evaluate_all(trees: Sequence[Node], value: Callable[[Any], Any], functions: Functions) -> list[Any]:
    """The values of several trees, subtrees that they share worked out once."""
    done: dict[Node, Any] = {}

    def of(node: Node) -> Any:
        if isinstance(node, Number):
            return node.value
        if node in done:
            return done[node]
        if isinstance(node, Binary):
            result = _operate(node.operator, of(node.left), of(node.right))
        elif isinstance(node, Negative):
            result = -of(node.operand)
        elif isinstance(node, Call) and node.function in functions:
            inside = [of(part) for part in node.arguments]
            result = functions[node.function](*inside, orders=node.orders) if node.orders else functions[node.function](*inside)
        else:
            result = value(node)
        done[node] = result
        return result

    return [of(tree) for tree in trees]


def _operate(operator: str, left: Any, right: Any) -> Any:
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
        return math.inf
    except ValueError:
        return math.inf if base == 0.0 else math.nan


def cardinal(z: float) -> float:
    """4 sin^2(sqrt(z)/2)/z, entire in z: 1 - z/12 + z^2/360 - …; cosh for z < 0."""
    if abs(z) < 1e-2:
        return 1.0 - z / 12.0 * (1.0 - z / 30.0 * (1.0 - z / 56.0 * (1.0 - z / 90.0)))
    root = math.sqrt(abs(z)) / 2.0
    half = math.sin(root) if z > 0.0 else math.sinh(root)
    return 4.0 * half * half / abs(z)


def cardinal_slope(z: float) -> float:
    """The derivative of `cardinal`: (sin(sqrt z)/sqrt z - cardinal(z))/z."""
    if abs(z) < 1e-1:
        return -1.0 / 12.0 + z / 180.0 * (1.0 - z * 3.0 / 112.0 * (1.0 - z * 4.0 / 270.0 * (1.0 - z * 5.0 / 528.0)))
    root = math.sqrt(abs(z))
    ratio = math.sin(root) / root if z > 0.0 else math.sinh(root) / root
    return (ratio - cardinal(z)) / z


def _guarded(function: Callable[..., float]) -> Callable[..., float]:
    def guarded(*arguments: float) -> float:
        try:
            return function(*arguments)
        except OverflowError:
            return math.inf
        except ValueError:
            return math.nan

    return guarded


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
    plain = {name: getattr(math, name) for name in ("exp", "sqrt", "sin", "cos", "tan", "cosh", "tanh", "asin", "acos", "atan", "erf", "log1p", "expm1")}
    table = {name: _guarded(function) for name, function in plain.items()}
    return {
        **table,
        "log": _guarded(_log),
        "sinh": _sinh,
        "abs": abs,
        "min": min,
        "max": max,
        "sign": lambda x: math.nan if math.isnan(x) else float((x > 0) - (x < 0)),
        "step_le": lambda a, b: 1.0 if a <= b else 0.0,
        "cardinal": _guarded(cardinal),
        "cardinal_slope": _guarded(cardinal_slope),
    }


@cache
def mpmath_functions() -> dict[str, Callable[..., Any]]:
    """The functions of the language in mpmath's arithmetic, at the precision in force."""
    import mpmath

    names = {"asin": "asin", "acos": "acos", "atan": "atan"}
    table = {name: getattr(mpmath, names.get(name, name)) for name in ("exp", "log", "sqrt", "sin", "cos", "tan", "sinh", "cosh", "tanh", "asin", "acos", "atan", "erf", "expm1", "log1p")}

    def entire(z: Any) -> Any:
        return 2 * (1 - mpmath.cos(mpmath.sqrt(z))).real / z if z else mpmath.mpf(1)

    return {
        **table,
        "abs": abs,
        "min": min,
        "max": max,
        "sign": mpmath.sign,
        "step_le": lambda a, b: mpmath.mpf(1 if a <= b else 0),
        "cardinal": entire,
    }
