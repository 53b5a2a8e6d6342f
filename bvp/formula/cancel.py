"""Differences of nodal values formed as differences of differences, so that nothing cancels in rounded arithmetic.

u[k+1] is written as u[k] + up and u[k-1] as u[k] - down inside sums whose coefficients are numbers; where the exact
coefficient of u[k] is then zero, only up and down are left: u[k+1] - 2*u[k] + u[k-1] becomes up - down. The
differences themselves are exact in floating point for neighbours within a factor of two (Sterbenz 1974, from memory).
"""

from __future__ import annotations

from fractions import Fraction

from bvp.formula.tree import Binary, Call, Indexed, Name, Negative, Node, Number


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
            done[node] = _combined(node, of, only) if _is_sum(node) else _rewritten(node, of)
        return done[node]

    return of(tree)


def _rewritten(node: Node, of) -> Node:  # type: ignore[no-untyped-def]
    """log(A/B) as log1p((A - B)/B) and exp(A) - 1 as expm1(A) where that helps; any other node over its cancelled parts."""
    if isinstance(node, Call) and node.function == "log" and isinstance(node.arguments[0], Binary) and node.arguments[0].operator == "/":
        above, below = node.arguments[0].left, node.arguments[0].right
        excess = Binary("-", above, below)
        shorter = of(excess)
        if shorter != excess:
            return Call("log1p", (Binary("/", shorter, of(below)),))
    if not node.parts:
        return node
    parts = tuple(of(part) for part in node.parts)
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


def _combined(node: Node, of, only: frozenset[str] | None) -> Node:  # type: ignore[no-untyped-def]
    terms: list[tuple[Fraction, Node]] = []
    _terms(node, Fraction(1), terms)
    nodal: dict[str, dict[Fraction, Fraction]] = {}
    for factor, term in terms:
        if isinstance(term, Indexed) and term.offset.denominator == 1:
            weights = nodal.setdefault(term.name, {})
            weights[term.offset] = weights.get(term.offset, Fraction(0)) + factor
    differences = {name: weights for name, weights in nodal.items() if sum(weights.values()) == 0 and (only is None or name in only)}
    if not differences:
        return _rewritten(_expm1(node), of)
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
    size = abs(factor)
    scaled = term if size == 1 else Binary("*", Number(float(size)), term)
    if total is None:
        return scaled if factor > 0 else Negative(scaled)
    return Binary("+" if factor > 0 else "-", total, scaled)
