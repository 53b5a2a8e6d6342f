"""Exact derivatives of trees. Zeros and ones are folded, nothing is rearranged: the order of operations decides the rounding."""

from __future__ import annotations

from bvp.formula.tree import Binary, Call, Negative, Node, Number

ZERO, ONE, TWO = Number(0.0), Number(1.0), Number(2.0)


def add(left: Node, right: Node) -> Node:
    """left + right."""
    if left == ZERO:
        return right
    if right == ZERO:
        return left
    if isinstance(right, Negative):
        return subtract(left, right.operand)
    return Binary("+", left, right)


def subtract(left: Node, right: Node) -> Node:
    """left - right."""
    if right == ZERO:
        return left
    if left == ZERO:
        return negative(right)
    return Binary("-", left, right)


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
    if isinstance(left, Number) and isinstance(right, Number):
        return Number(left.value * right.value)
    return Binary("*", left, right)


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
    """The tree with sums and products of literal zeros and ones carried out, nothing else changed."""
    if isinstance(tree, Negative):
        return negative(folded(tree.operand))
    if isinstance(tree, Binary):
        left, right = folded(tree.left), folded(tree.right)
        if tree.operator == "^":
            return raise_to(left, right.value) if isinstance(right, Number) else Binary("^", left, right)
        return {"+": add, "-": subtract, "*": multiply, "/": divide}[tree.operator](left, right)
    if tree.parts:
        return tree.rebuilt(tuple(folded(part) for part in tree.parts))
    return tree


def derivative(tree: Node, leaf: Node) -> Node:
    """The exact derivative of a tree by one of its leaves (Name, Indexed, Prime or At); other leaves are held fixed."""
    done: dict[Node, Node] = {}

    def by(node: Node) -> Node:
        if node == leaf:
            return ONE
        if node not in done:
            done[node] = _of_kind(node)
        return done[node]

    def _of_kind(node: Node) -> Node:
        if isinstance(node, Negative):
            return negative(by(node.operand))
        if isinstance(node, Binary):
            return _of_operation(node)
        if isinstance(node, Call):
            total: Node = ZERO
            for number, part in enumerate(node.arguments):
                inner = by(part)
                if inner != ZERO:
                    total = add(total, multiply(partial(node, number), inner))
            return total
        return ZERO

    def _of_operation(node: Binary) -> Node:
        left, right = node.left, node.right
        dl, dr = by(left), by(right)
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
            lowered = raise_to(left, right.value - 1.0) if isinstance(right, Number) else Binary("^", left, subtract(right, ONE))
            total = multiply(multiply(right, lowered), dl)
        if dr != ZERO:
            total = add(total, multiply(multiply(node, Call("log", (left,))), dr))
        return total

    return by(tree)


def partial(call: Call, number: int) -> Node:
    """The partial derivative of a function by its argument of that number, at the same arguments."""
    name, arguments = call.function, call.arguments
    x = arguments[number]
    square = Binary("^", x, TWO)
    rules = {
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
        "min": lambda: Call("step_le", (x, arguments[1 - number])),
        "max": lambda: Call("step_le", (arguments[1 - number], x)),
    }
    if name in ("fit", "fit_by_drift", "fit_by_slope"):
        return _partial_of_fit(call, number)
    if name in rules:
        return rules[name]()
    orders = list(call.orders or (0,) * len(arguments))
    orders[number] += 1
    return Call(name, arguments, tuple(orders))


def _partial_of_fit(call: Call, number: int) -> Node:
    if call.function != "fit":
        raise AssertionError("second derivatives of the fitted weights are taken by differences")
    return Call(("fit_by_drift", "fit_by_slope")[number], call.arguments)
