"""Text-book spellings of the radial operator, u'' + (2/x)*u' and (x^2*u')'/x^2, recognised on a domain that reaches 0.

As they stand they divide by zero at the axis. Recognised, they become laplacian(u) or div(…), whose limit is known.
"""

from __future__ import annotations

import random
from collections.abc import Callable, Sequence

from bvp.formula import derivative, evaluate, folded
from bvp.formula.tree import Binary, Call, Name, Negative, Node, Number, Prime, transform, walk

Functions = dict[str, Callable[..., float]]

SAMPLES = 7  # random points at which a coefficient must equal s/x; a coincidence at all of them is out of the question


def recognised(tree: Node, unknown: str, coordinate: str, functions: Functions) -> tuple[Node, int]:
    """The equation with its radial operator by name, and the exponent s of its geometry; s = 0 where nothing was recognised."""
    tree, exponent = _flux_form(tree, coordinate)
    if exponent:
        return tree, exponent
    return _plain_form(tree, unknown, coordinate, functions)


def _plain_form(tree: Node, unknown: str, coordinate: str, functions: Functions) -> tuple[Node, int]:
    first, second = Prime(Name(unknown), 1), Prime(Name(unknown), 2)
    leaves = set(walk(tree))
    if first not in leaves or second not in leaves:
        return tree, 0
    drift, diffusion = derivative(tree, first), derivative(tree, second)
    exponents = set()
    for seed in range(SAMPLES):
        chance = random.Random(seed)
        values: dict[Node, float] = {}

        def value(leaf: Node, values: dict[Node, float] = values, chance: random.Random = chance) -> float:
            return values.setdefault(leaf, chance.uniform(0.2, 0.8))

        try:
            ratio = value(Name(coordinate)) * evaluate(drift, value, functions) / evaluate(diffusion, value, functions)
        except (ZeroDivisionError, ValueError, OverflowError):
            return tree, 0
        exponents.add(round(ratio) if abs(ratio - round(ratio)) < 1e-12 else None)
    exponent = exponents.pop() if len(exponents) == 1 else None
    if exponent not in (1, 2):
        return tree, 0
    replaced: dict[Node, Node] = {first: Number(0.0), second: Call("laplacian", (Name(unknown),))}
    return folded(transform(tree, replaced.get)), exponent


def _factors(tree: Node) -> tuple[list[Node], list[Node]]:
    """Numerator and denominator of a product, taken apart."""
    if isinstance(tree, Binary) and tree.operator in "*/":
        above, below = _factors(tree.left)
        more, less = _factors(tree.right)
        return (above + more, below + less) if tree.operator == "*" else (above + less, below + more)
    if isinstance(tree, Negative):
        above, below = _factors(tree.operand)
        return [Number(-1.0), *above], below
    return ([] if tree == Number(1.0) else [tree]), []


def _radius_power(factors: Sequence[Node], coordinate: str) -> tuple[int, list[Node]]:
    """How often the coordinate stands among factors, and the others."""
    power, others = 0, []
    for factor in factors:
        if factor == Name(coordinate):
            power += 1
        elif (
            isinstance(factor, Binary)
            and factor.operator == "^"
            and factor.left == Name(coordinate)
            and factor.right in (Number(1.0), Number(2.0))
        ):
            power += int(factor.right.value)  # type: ignore[attr-defined]
        else:
            others.append(factor)
    return power, others


def _product(factors: Sequence[Node]) -> Node:
    result: Node = factors[0] if factors else Number(1.0)
    for factor in factors[1:]:
        result = Binary("*", result, factor)
    return result


def _flux_form(tree: Node, coordinate: str) -> tuple[Node, int]:
    """(x^s*G)'/x^s and (1/x^s)*(x^s*G)' as div(G)."""
    found: list[int] = []

    def change(node: Node) -> Node | None:
        if not (isinstance(node, Binary) and node.operator in "*/"):
            return None
        above, below = _factors(node)
        outside, others_below = _radius_power(below, coordinate)
        fluxes = [factor for factor in above if isinstance(factor, Prime) and factor.order == 1 and not isinstance(factor.operand, Name)]
        if outside not in (1, 2) or len(fluxes) != 1:
            return None
        inner_above, inner_below = _factors(fluxes[0].operand)
        inside, inner = _radius_power(inner_above, coordinate)
        if inside != outside:
            return None
        flux = _product(inner) if not inner_below else Binary("/", _product(inner), _product(inner_below))
        if not any(isinstance(part, Prime) for part in walk(flux)):
            return None
        found.append(outside)
        rest = [factor for factor in above if factor is not fluxes[0]]
        whole = _product([*rest, Call("div", (flux,))])
        return whole if not others_below else Binary("/", whole, _product(others_below))

    changed = transform(tree, change)
    return (changed, found[0]) if found and len(set(found)) == 1 else (tree, 0)
