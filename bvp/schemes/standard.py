"""The standard scheme, and those that change one formula of it."""

from __future__ import annotations

from dataclasses import dataclass

from bvp.formula import derivative
from bvp.formula.tree import Binary, Call, Name, Node, Number, Prime, substituted, transform, walk
from bvp.problem import Equation
from bvp.schemes.difference import difference_row, minus, node_value, over, width
from bvp.schemes.scheme import Scheme, Shape, at_node

CENTRAL = Scheme("central", "standard second difference; on a cylinder or sphere u'' + (s/r) u' with its limit at r = 0")

LOG_COSH = Scheme("log-cosh", "denominator 2 ln cosh h in the second difference", {"denominator": "2*log(cosh(h))"})


@dataclass(frozen=True)
class Upwind(Scheme):
    """First derivatives against the flow: u' forward where its coefficient has the sign of that of u'', else backward.

    Both off-diagonal weights then have one sign whatever the step, so no wiggles can arise (Courant, Isaacson & Rees
    1952, from memory).
    """

    def row(self, equation: Equation, unknown: str, shape: Shape) -> Node:
        """The difference equation at node k, u' replaced by the one-sided difference that the sign of its coefficient asks for."""
        slope = Prime(Name(unknown), 1)
        if shape.axis:
            return difference_row(self, equation, unknown, shape)
        # A derivative inside a flux is no flow: it is differenced at the faces, and has no side.
        fluxes = {node: Name(f"#flux {number}") for number, node in enumerate(filter(is_flux, walk(equation.tree)))}
        open_tree = transform(equation.tree, fluxes.get)
        leading = leading_coefficient(open_tree, unknown)
        flow = at_node(_without(over(derivative(open_tree, slope), leading), unknown), 0, shape.problem)
        x = shape.problem.coordinate
        forward = over(minus(node_value(unknown, 1), node_value(unknown, 0)), width(x, 0, 1, shape))
        backward = over(minus(node_value(unknown, 0), node_value(unknown, -1)), width(x, -1, 0, shape))
        against = Binary("+", backward, Binary("*", Call("step_le", (Number(0.0), flow)), minus(forward, backward)))
        stand_in = Name("#against")
        placed = substituted(open_tree, slope, stand_in)
        for flux, name in fluxes.items():
            placed = substituted(placed, name, flux)
        row = difference_row(self, Equation(placed, equation.text, equation.order), unknown, shape)
        return substituted(row, stand_in, against)


def is_flux(node: Node) -> bool:
    """Whether a node is (k*u')' or div(k*grad(u)): a bracket that is differentiated and holds derivatives itself."""
    if isinstance(node, Call):
        return node.function == "div"
    return isinstance(node, Prime) and any(isinstance(part, Prime) for part in walk(node.operand))


def leading_coefficient(tree: Node, unknown: str) -> Node:
    """What multiplies u'' or laplacian(u) in an equation, by differentiating; Number(1) for a flux, whose sign is that of k."""
    stand_in = Name("#leading")
    for operator in (Prime(Name(unknown), 2), Call("laplacian", (Name(unknown),))):
        coefficient = derivative(substituted(tree, operator, stand_in), stand_in)
        if coefficient != Number(0.0):
            return coefficient
    return Number(1.0)


def _without(tree: Node, unknown: str) -> Node:
    """A coefficient that holds u' itself is taken at u' = 0: it only chooses a side."""
    return transform(tree, lambda node: Number(0.0) if node == Prime(Name(unknown), 1) else None)


UPWIND = Upwind("upwind", "first derivatives against the flow")
