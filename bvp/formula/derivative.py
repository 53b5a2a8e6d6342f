"""Exact derivatives of trees.

Literals are folded where that is exact, nothing is rearranged: the order of operations decides the rounding.
"""

from __future__ import annotations

import math
import operator
from collections.abc import Callable
from fractions import Fraction

from bvp.formula.tree import Binary, Call, Negative, Node, Number, bottom_up, number_of

ZERO, ONE, TWO = Number(0.0), Number(1.0), Number(2.0)


def _literal(sign: str, left: Node, right: Node) -> Number | None:
    """The sum, difference or product of two literals where it is exact, so that 40 digits would give the same."""
    if not (isinstance(left, Number) and isinstance(right, Number)):
        return None
    carry_out = {"+": operator.add, "-": operator.sub, "*": operator.mul}[sign]
    value = carry_out(left.value, right.value)
    if not math.isfinite(value) or Fraction(value) != carry_out(Fraction(left.value), Fraction(right.value)):
        return None
    return Number(value)


def add(left: Node, right: Node) -> Node:
    """left + right."""
    if left == ZERO:
        return right
    if right == ZERO:
        return left
    if isinstance(right, Negative):
        return subtract(left, right.operand)
    return _literal("+", left, right) or Binary("+", left, right)


def subtract(left: Node, right: Node) -> Node:
    """left - right."""
    if right == ZERO:
        return left
    if left == ZERO:
        return negative(right)
    return _literal("-", left, right) or Binary("-", left, right)


def negative(tree: Node) -> Node:
    """-tree."""
    if isinstance(tree, Number):
        return Number(-tree.value) if tree.value else ZERO
    return tree.operand if isinstance(tree, Negative) else Negative(tree)


def multiply(left: Node, right: Node) -> Node:
    """left * right."""
    if ZERO in (left, right):
        return ZERO
    if left == ONE:
        return right
    if right == ONE:
        return left
    return _literal("*", left, right) or Binary("*", left, right)


def divide(left: Node, right: Node) -> Node:
    """left / right."""
    if left == ZERO or right == ONE:
        return left
    return Binary("/", left, right)


def raise_to(base: Node, exponent: float) -> Node:
    """base^exponent."""
    if exponent == 0.0:
        return ONE
    return base if exponent == 1.0 else Binary("^", base, Number(exponent))


def folded(tree: Node) -> Node:
    """The tree with literal zeros and ones, and exact sums and products of literals, carried out; nothing else changed."""
    done: dict[Node, Node] = {}
    for node in bottom_up([tree], lambda node: bool(node.parts)):
        if isinstance(node, Negative):
            done[node] = negative(done[node.operand])
        elif isinstance(node, Binary):
            left, right = done[node.left], done[node.right]
            if node.operator != "^":
                done[node] = {"+": add, "-": subtract, "*": multiply, "/": divide}[node.operator](left, right)
            else:
                done[node] = raise_to(left, right.value) if isinstance(right, Number) else Binary("^", left, right)
        else:
            done[node] = node.rebuilt(tuple(done[part] for part in node.parts)) if node.parts else node
    return done[tree]


def derivative(tree: Node, leaf: Node) -> Node:
    """The exact derivative of a tree by one of its leaves (Name, Indexed, Prime or At); other leaves are held fixed."""
    done: dict[Node, Node] = {}

    def is_operation(node: Node) -> bool:
        return node != leaf and isinstance(node, (Binary, Negative, Call))

    def of_call(node: Call) -> Node:
        total: Node = ZERO
        for number, part in enumerate(node.arguments):
            if done[part] != ZERO:
                total = add(total, multiply(partial(node, number), done[part]))
        return total

    def of_operation(node: Binary) -> Node:
        left, right = node.left, node.right
        dl, dr = done[left], done[right]
        if node.operator == "+":
            return add(dl, dr)
        if node.operator == "-":
            return subtract(dl, dr)
        if node.operator == "*":
            return add(multiply(dl, right), multiply(left, dr))
        if node.operator == "/":
            return divide(dl, right) if dr == ZERO else divide(subtract(dl, multiply(node, dr)), right)
        total: Node = ZERO
        if dl != ZERO:
            exponent = number_of(right)
            lowered = Binary("^", left, subtract(right, ONE)) if exponent is None else raise_to(left, exponent - 1.0)
            total = multiply(multiply(right, lowered), dl)
        if dr != ZERO:
            total = add(total, multiply(multiply(node, Call("log", (left,))), dr))
        return total

    for node in bottom_up([tree], is_operation):
        if node == leaf:
            done[node] = ONE
        elif isinstance(node, Negative):
            done[node] = negative(done[node.operand])
        elif isinstance(node, Binary):
            done[node] = of_operation(node)
        else:
            done[node] = of_call(node) if isinstance(node, Call) else ZERO
    return done[tree]


def partial(call: Call, number: int) -> Node:
    """The partial derivative of a function by its argument of that number, at the same arguments."""
    name, arguments = call.function, call.arguments
    x = arguments[number]
    square = Binary("^", x, TWO)
    rules: dict[str, Callable[[], Node]] = {
        "exp": lambda: call,
        "log": lambda: divide(ONE, x),
        "sqrt": lambda: divide(Number(0.5), call),
        "sin": lambda: Call("cos", arguments),
        "cos": lambda: negative(Call("sin", arguments)),
        "tan": lambda: add(ONE, Binary("^", call, TWO)),
        "sinh": lambda: Call("cosh", arguments),
        "cosh": lambda: Call("sinh", arguments),
        "tanh": lambda: subtract(ONE, Binary("^", call, TWO)),
        "asin": lambda: divide(ONE, Call("sqrt", (subtract(ONE, square),))),
        "acos": lambda: divide(Number(-1.0), Call("sqrt", (subtract(ONE, square),))),
        "atan": lambda: divide(ONE, add(ONE, square)),
        "erf": lambda: multiply(Number(1.1283791670955126), Call("exp", (negative(square),))),  # 2/sqrt(pi)
        "abs": lambda: Call("sign", arguments),
        "sign": lambda: ZERO,
        "step_le": lambda: ZERO,
        "log1p": lambda: divide(ONE, add(ONE, x)),
        "expm1": lambda: Call("exp", arguments),
        "cardinal": lambda: Call("cardinal_slope", arguments),
        "min": lambda: _share(Call("step_le", arguments), number),
        "max": lambda: _share(Call("step_le", arguments[::-1]), number),
    }
    if name == "fit":
        return Call(("fit_by_drift", "fit_by_slope")[number], arguments)
    if name in ("cardinal_slope", "fit_by_drift", "fit_by_slope"):
        raise AssertionError(f"{name} has no derivative here: second derivatives of the fitted scheme are taken by differences")
    if name in rules:
        return rules[name]()
    orders = list(call.orders or (0,) * len(arguments))
    orders[number] += 1
    return Call(name, arguments, tuple(orders))


def _share(first: Node, number: int) -> Node:
    """The part of a min or max that follows its first argument, or what that leaves for the second: together 1 in a tie too."""
    return first if number == 0 else subtract(ONE, first)
