"""The rows of a discrete system as trees: residual and exact derivatives at an inner node, at each end, for each condition.

From a scheme's difference equation to what an arithmetic can work with: coordinates placed on the domain (whose ends
may be formulas of parameters), derivatives taken, differences of nodal values cancelled.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction

from bvp.conditions import LEFT, RIGHT, Condition
from bvp.errors import ProblemError, SchemeError
from bvp.formula import cancel, derivative, down, up
from bvp.formula.derivative import ZERO, add, multiply
from bvp.formula.tree import At, Binary, Indexed, Name, Node, Number, Prime, names_in, transform, walk
from bvp.problem import Problem
from bvp.schemes.scheme import STEP, Scheme, Shape

FIXED, GHOST, AXIS = 0, 1, 2  # what an end is; the same numbers stand in the kernel bvp.kernels.sweep
PLACE = "#place"  # reference coordinate of a node, in [0, 1]
PART = Name("#part")  # the step of the reference interval, 1/N


@dataclass(frozen=True)
class Row:
    """One difference equation and its derivatives by u[k-1], u[k], u[k+1] and the traced parameter."""

    residual: Node
    lower: Node
    diagonal: Node
    upper: Node
    by_parameter: Node

    @property
    def trees(self) -> tuple[Node, ...]:
        """All five, in the order of the kernels: r, a, b, c, q."""
        return (self.residual, self.lower, self.diagonal, self.upper, self.by_parameter)


@dataclass(frozen=True)
class Rows:
    """The rows of a scalar system: inner nodes, the node at an axis, the two conditions; and what each end is."""

    inner: Row
    axis: Row | None
    left: Row | None
    right: Row
    left_kind: int
    right_kind: int
    placed: Callable[[Node], Node]  # coordinates put on the domain, for derivatives by other parameters

    def first(self) -> Row:
        """The equation at the left end node, where there is one."""
        return self.axis or self.inner


def rows_of(problem: Problem, scheme: Scheme, along: str, uniform: bool) -> Rows:
    """The rows of a problem with one unknown of second order under a scheme.

    Raises ProblemError for what is not built, SchemeError where the scheme does not serve the equation or the grid.
    """
    unknown = only_unknown(problem)
    equation = problem.equations[0]
    if scheme.needs_uniform_grid(problem) and not uniform:
        raise SchemeError(
            f'{scheme.origin or "scheme"}: "{scheme.name}" holds the step or a denominator, which have a meaning on a uniform grid only.\n'
            'Set grid to "uniform", or write the scheme with x[k+1] - x[k].'
        )
    place = placement(problem, scheme, uniform)

    def row(tree: Node) -> Row:
        placed = place(tree)
        slopes = [derivative(placed, Indexed(unknown, Fraction(offset))) for offset in (-1, 0, 1)]
        every = [placed, *slopes, derivative(placed, Name(along))]
        return Row(*(cancel(each) for each in every))

    shape = Shape(problem, uniform)
    scheme.used.clear()
    inner = row(scheme.row(equation, unknown, shape))
    if scheme.typed:
        scheme.refuse_unused(equation)
    axis = row(scheme.row(equation, unknown, Shape(problem, uniform, axis=True))) if problem.axis else None
    ends = {}
    for side in (LEFT, RIGHT):
        here = [condition for condition in problem.conditions if side in condition.sides]
        if any(len(condition.sides) > 1 for condition in here):
            raise ProblemError(
                f'{here[0].origin}: "{here[0].text}" couples the two ends, which is not built yet.\nExpected: conditions at one end each.'
            )
        wanted = 0 if side == LEFT and problem.axis else 1
        if len(here) != wanted:
            shown = "; ".join(condition.text for condition in here) or "none"
            raise ProblemError(
                f"{problem.origin}, conditions: {len(here)} at the {side} end ({shown}), which is not built yet.\n"
                "Expected: one condition at each end."
            )
        ends[side] = here[0] if here else None
    right = ends[RIGHT]
    assert right is not None
    left = ends[LEFT]
    return Rows(
        inner,
        axis,
        None if left is None else row(_condition_row(left, LEFT, scheme, problem, shape)),
        row(_condition_row(right, RIGHT, scheme, problem, shape)),
        AXIS if left is None else _end_kind(left, LEFT, unknown),
        _end_kind(right, RIGHT, unknown),
        place,
    )


def only_unknown(problem: Problem) -> str:
    """The unknown of a problem that has one, of second order; ProblemError otherwise."""
    if len(problem.unknowns) != 1:
        raise ProblemError(f"{problem.origin}: {len(problem.unknowns)} unknowns; systems are not built yet.\nExpected: one unknown.")
    if problem.equations[0].order != 2:
        raise ProblemError(
            f'{problem.origin}: "{problem.equations[0].text}" is of order {problem.equations[0].order}, which is not built yet.\n'
            "Expected: an equation of second order."
        )
    return problem.unknowns[0]


def _end_kind(condition: Condition, side: str, unknown: str) -> int:
    return GHOST if unknown in condition.derivatives(side) else FIXED


def _condition_row(condition: Condition, side: str, scheme: Scheme, problem: Problem, shape: Shape) -> Node:
    """A condition with u and u' at the end written by nodal values; the end is node k."""

    def change(node: Node) -> Node | None:
        if not isinstance(node, At):
            return None
        inside = node.operand
        if isinstance(inside, Name):
            return Indexed(inside.name, Fraction(0))
        assert isinstance(inside, Prime)
        assert isinstance(inside.operand, Name)
        if inside.order != 1:
            raise ProblemError(
                f'{condition.origin}: "{condition.text}" holds a derivative of order {inside.order}.\n'
                "Expected: u and u' in the conditions of a second-order equation."
            )
        return scheme.end_derivative(inside.operand.name, problem.equations[0], shape)

    tree = transform(condition.tree, change)
    return transform(tree, lambda node: problem.ends[0 if side == LEFT else 1] if node == Name(problem.coordinate) else None)


def placement(problem: Problem, scheme: Scheme, uniform: bool) -> Callable[[Node], Node]:
    """The function that puts coordinates, widths and the step of a tree on the problem's domain.

    With ends that are numbers they stay leaves, filled with physical values. With ends that are formulas they become
    left + (right - left)*place on a fixed reference interval, so that derivatives by a length are exact.
    """
    x = problem.coordinate
    left, right = problem.ends
    moving = bool(names_in(left) | names_in(right))

    def widths(tree: Node) -> Node:
        tree = cancel(tree, frozenset({x}))
        if not uniform:
            return tree
        return transform(tree, lambda node: STEP if node in (up(x), down(x)) else None)

    if not moving:
        return widths
    length = Binary("-", right, left) if left != Number(0.0) else right

    def share(node: Node) -> Node | None:
        """What of a coordinate, or of a difference of two, the length multiplies."""
        if isinstance(node, Indexed) and node.name == x:
            return Indexed(PLACE, node.offset)
        return {STEP: PART, up(x): up(PLACE), down(x): down(PLACE)}.get(node)  # type: ignore[call-overload]

    def change(node: Node) -> Node | None:
        if left == Number(0.0) and isinstance(node, Binary) and node.operator == "/":
            above, below = share(node.left), share(node.right)
            if above is not None and below is not None:
                return Binary("/", above, below)  # a ratio does not know the length, and at the axis it may be infinite
        if isinstance(node, Indexed) and node.name == x:
            return add(left, multiply(length, Indexed(PLACE, node.offset)))
        if isinstance(node, Indexed) and node.name in scheme.weight_powers:
            if left != Number(0.0) and problem.exponent:
                raise SchemeError(
                    f'the scheme "{scheme.name}" has no weights for a shell whose ends are formulas of parameters.\n'
                    "Use central or shell-balance there."
                )
            return multiply(node, Binary("^", length, Number(float(scheme.weight_powers[node.name]))))
        if node in (up(x), down(x)):
            return multiply(length, (up if node == up(x) else down)(PLACE))
        if node == STEP:
            return multiply(length, PART)
        return None

    return lambda tree: transform(widths(tree), change)


def depends_on(tree: Node, name: str) -> bool:
    """Whether a plain name stands in a tree."""
    return any(isinstance(node, Name) and node.name == name for node in walk(tree))


__all__ = ["AXIS", "FIXED", "GHOST", "PART", "PLACE", "ZERO", "Row", "Rows", "depends_on", "only_unknown", "rows_of"]
