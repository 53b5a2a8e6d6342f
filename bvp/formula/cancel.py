"""Differences of nodal values formed as differences of differences, so that nothing cancels in rounded arithmetic.

u[k+1] is written as u[k] + up and u[k-1] as u[k] - down inside sums whose coefficients are numbers; where the exact
coefficient of u[k] is then zero, only up and down are left: u[k+1] - 2*u[k] + u[k-1] becomes up - down. The
differences themselves are exact in floating point for neighbours within a factor of two (Sterbenz 1974, from memory).
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from fractions import Fraction

from bvp.formula.tree import Binary, Call, Indexed, Name, Negative, Node, Number

OFFSETS = {Fraction(-1), Fraction(0), Fraction(1)}
LARGEST_EXACT = 2**53  # whole numbers up to here are floating-point numbers
LARGEST_FACTOR = Fraction(10) ** 300  # a factor beyond is no floating-point number, and the sum is left as it is


def up(name: str) -> Name:
    """The leaf that stands for name[k+1] - name[k]; nobody can type it."""
    return Name(f"#up:{name}")


def down(name: str) -> Name:
    """The leaf that stands for name[k] - name[k-1]."""
    return Name(f"#down:{name}")


def cancel(tree: Node, only: frozenset[str] | None = None) -> Node:
    """The tree with every cancelling combination of nodal values (of the names given, or of all) written by their differences."""
    done: dict[Node, Node] = {}

    def of(node: Node) -> Node:
        if node not in done:
            done[node] = _combined(node, of, only) if _is_sum(node) else _rewritten(node, of, only)
        return done[node]

    return of(tree)


def _rewritten(node: Node, of: Callable[[Node], Node], only: frozenset[str] | None) -> Node:
    """log(A/B) as log1p((A - B)/B) where nodal values of A cancel against those of B; any other node over its cancelled parts."""
    if isinstance(node, Call) and node.function == "log" and isinstance(node.arguments[0], Binary) and node.arguments[0].operator == "/":
        above, below = node.arguments[0].left, node.arguments[0].right
        excess = Binary("-", above, below)
        if _differences(excess, only).keys() - _differences(above, only).keys() - _differences(below, only).keys():
            return Call("log1p", (Binary("/", of(excess), of(below)),))
    parts = tuple(map(of, node.parts))
    return node if all(new is old for new, old in zip(parts, node.parts, strict=True)) else node.rebuilt(parts)


def _is_sum(node: Node) -> bool:
    return isinstance(node, Binary) and node.operator in "+-"


def _terms(node: Node, factor: Fraction, into: list[tuple[Fraction, Node]]) -> None:
    """The terms of a sum with their exact numerical factors, brackets with a number before them opened."""
    if isinstance(node, Binary) and node.operator in "+-":
        _terms(node.left, factor, into)
        _terms(node.right, factor if node.operator == "+" else -factor, into)
    elif isinstance(node, Negative):
        _terms(node.operand, -factor, into)
    elif isinstance(node, Binary) and node.operator == "*" and isinstance(node.left, Number):
        _terms(node.right, factor * Fraction(node.left.value), into)
    elif isinstance(node, Binary) and node.operator in "*/" and isinstance(node.right, Number) and node.right.value:
        number = Fraction(node.right.value)
        _terms(node.left, factor * number if node.operator == "*" else factor / number, into)
    else:
        into.append((factor, node))


def _weights(terms: list[tuple[Fraction, Node]]) -> dict[str, dict[Fraction, Fraction]]:
    """The coefficients of the nodal values of each name."""
    weights: dict[str, dict[Fraction, Fraction]] = {}
    for factor, term in terms:
        if isinstance(term, Indexed) and term.offset.denominator == 1:
            of_name = weights.setdefault(term.name, {})
            of_name[term.offset] = of_name.get(term.offset, Fraction(0)) + factor
    return weights


def _differences(node: Node, only: frozenset[str] | None) -> Mapping[str, dict[Fraction, Fraction]]:
    """The names whose nodal values in a sum have coefficients that add up to 0, with these."""
    terms: list[tuple[Fraction, Node]] = []
    _terms(node, Fraction(1), terms)
    if any(factor and not 1 / LARGEST_FACTOR < abs(factor) < LARGEST_FACTOR for factor, _ in terms):
        return {}
    named = _weights(terms).items()
    return {
        name: weights
        for name, weights in named
        if not sum(weights.values()) and weights.keys() <= OFFSETS and (only is None or name in only)
    }


def _combined(node: Node, of: Callable[[Node], Node], only: frozenset[str] | None) -> Node:
    differences = _differences(node, only)
    if not differences:
        return _rewritten(_expm1(node), of, only)
    terms: list[tuple[Fraction, Node]] = []
    _terms(node, Fraction(1), terms)
    total: Node | None = None
    written: set[str] = set()
    for factor, term in terms:
        if isinstance(term, Indexed) and term.offset.denominator == 1 and term.name in differences:
            if term.name not in written:
                written.add(term.name)
                weights = differences[term.name]
                total = _added(total, weights.get(Fraction(1), Fraction(0)), up(term.name))
                total = _added(total, -weights.get(Fraction(-1), Fraction(0)), down(term.name))
        else:
            total = _added(total, factor, of(term))
    return total if total is not None else Number(0.0)


def _expm1(node: Node) -> Node:
    """exp(A) - 1 and 1 - exp(A)."""
    if isinstance(node, Binary) and node.operator == "-":
        left, right = node.left, node.right
        if isinstance(left, Call) and left.function == "exp" and right == Number(1.0):
            return Call("expm1", left.arguments)
        if isinstance(right, Call) and right.function == "exp" and left == Number(1.0):
            return Negative(Call("expm1", right.arguments))
    return node


def _added(total: Node | None, factor: Fraction, term: Node) -> Node | None:
    if factor == 0:
        return total
    scaled = _scaled(abs(factor), term)
    if total is None:
        return scaled if factor > 0 else Negative(scaled)
    return Binary("+" if factor > 0 else "-", total, scaled)


def _scaled(size: Fraction, term: Node) -> Node:
    """size * term; a third of it as term/3, which is rounded once."""
    above, below = size.numerator, size.denominator
    if Fraction(float(size)) == size or max(above, below) > LARGEST_EXACT:
        return term if size == 1 else Binary("*", Number(float(size)), term)
    product = term if above == 1 else Binary("*", Number(float(above)), term)
    return Binary("/", product, Number(float(below)))
