"""What in a row does not depend on the state: worked out once a grid (or once a parameter value), not once a node.

Parts of the step and of parameters only become scalars, evaluated with 40 digits where they could lose some: in double
precision ln cosh h loses half of its digits for a small step. Parts of the coordinate too become nodal arrays.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.formula import evaluate, float_functions, mpmath_functions
from bvp.formula.evaluate import operate
from bvp.formula.tree import Binary, Call, Indexed, Name, Negative, Node, Number, transform, walk
from bvp.rows import PART
from bvp.schemes.scheme import STEP

Array = npt.NDArray[np.float64]

_WITH_DIGITS = {*float_functions()}
DIGITS = 40  # of the scalars: 2 ln cosh h at a step of 1e-6 keeps 16 of them


@dataclass
class Hoisted:
    """Scalars and nodal arrays by the leaf that stands for each."""

    scalars: dict[Node, Name] = field(default_factory=dict)
    arrays: dict[Node, Indexed] = field(default_factory=dict)

    def scalar(self, tree: Node) -> Name:
        """The leaf of a scalar."""
        return self.scalars.setdefault(tree, Name(f"#scalar{len(self.scalars)}"))

    def array(self, tree: Node) -> Indexed:
        """The leaf of a nodal array."""
        from fractions import Fraction

        return self.arrays.setdefault(tree, Indexed(f"#array{len(self.arrays)}", Fraction(0)))


def hoist(trees: Iterable[Node], parameters: set[str], grid_names: set[str], moving: str, into: Hoisted) -> list[Node]:
    """The trees with what does not depend on the state replaced by leaves of `into`.

    parameters : names that are parameters; grid_names : indexed names, and differences, that the grid fills; moving :
    the traced parameter, on which a nodal array must not depend.
    """
    kinds: dict[Node, int] = {}
    scalar, nodal, state = 0, 1, 2

    def kind(node: Node) -> int:
        if node not in kinds:
            kinds[node] = leaf_kind(node) if not node.parts else max(kind(part) for part in node.parts)
        return kinds[node]

    def leaf_kind(node: Node) -> int:
        if isinstance(node, Number) or node in (STEP, PART) or (isinstance(node, Name) and node.name in parameters):
            return scalar
        name = node.name if isinstance(node, (Name, Indexed)) else ""
        return nodal if name.split(":")[-1] in grid_names else state

    def moves(node: Node) -> bool:
        return any(isinstance(part, Name) and part.name == moving for part in walk(node))

    def change(node: Node) -> Node | None:
        if isinstance(node, Number):
            return node
        here = kind(node)
        if here == scalar and node.parts:
            return into.scalar(node)
        if here == nodal and node.parts and not moves(node):
            return into.array(transform(node, lambda part: into.scalar(part) if part.parts and kind(part) == scalar else None))
        if isinstance(node, Binary) and node.operator == "/" and here != scalar and kind(node.right) == scalar and node.right.parts:
            inverse = into.scalar(Binary("/", Number(1.0), node.right))
            return Binary("*", transform(node.left, change), inverse)
        return None

    return [transform(tree, change) for tree in trees]


def calls_in(tree: Node) -> frozenset[str]:
    """The functions that a tree calls."""
    return frozenset(node.function for node in walk(tree) if isinstance(node, Call))


def plain_value(tree: Node, value: Callable[[Any], float]) -> float:
    """The value of a tree that calls no function, without what sharing subtrees takes."""
    if isinstance(tree, Number):
        return tree.value
    if isinstance(tree, Binary):
        return float(operate(tree.operator, plain_value(tree.left, value), plain_value(tree.right, value)))
    return -plain_value(tree.operand, value) if isinstance(tree, Negative) else value(tree)


def scalar_value(tree: Node, calls: frozenset[str], value: Callable[[Any], float], functions: Mapping[str, Callable[..., Any]]) -> float:
    """A scalar, with 40 digits on the way where it holds functions; nan where it has no real value. calls : those functions."""
    if not calls:
        return plain_value(tree, value)
    if not _WITH_DIGITS.issuperset(calls):
        return float(evaluate(tree, value, functions))
    import mpmath

    from bvp.formula.precise import typed

    with mpmath.workdps(DIGITS):
        try:
            result = evaluate(tree, lambda leaf: mpmath.mpf(value(leaf)), mpmath_functions(), number=typed)
        except (ZeroDivisionError, ValueError, OverflowError):
            return float("nan")
        return float(result) if isinstance(result, (float, mpmath.mpf)) else float("nan")
