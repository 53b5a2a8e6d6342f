"""The fitted scheme: exact at each node for the equation with its coefficients frozen there, the slope of the source among them.

For u'' + f = 0 the second difference over h^2 plus f (4/(b h^2)) sin^2(sqrt(b) h/2), b = df/du at the node, sinh for
b < 0. For u'' + a u' + b u + c = 0 the three-point formula exact for it, normalised so that c has coefficient 1
(Il'in 1969; Allen & Southwell 1955, from memory). b is part of the residual and never frozen under differentiation.
"""

from __future__ import annotations

from dataclasses import dataclass

from bvp.errors import SchemeError
from bvp.formula import derivative, write
from bvp.formula.tree import Binary, Call, Name, Node, Number, Prime, transform, walk
from bvp.geometry import power
from bvp.problem import Equation
from bvp.schemes.difference import HALF, minus, node_value, over, width
from bvp.schemes.scheme import STEP, Scheme, Shape, at_node


@dataclass(frozen=True)
class StandardForm:
    """u'' + drift u' + source = 0, each a pointwise tree."""

    drift: Node
    source: Node


def standard_form(equation: Equation, unknown: str, shape: Shape, scheme: str) -> StandardForm:
    """The equation solved for u''; SchemeError where it is not linear in u'' and u', or holds a flux."""
    slope, curve, radial = Prime(Name(unknown), 1), Prime(Name(unknown), 2), Call("laplacian", (Name(unknown),))
    for node in walk(equation.tree):
        operator = isinstance(node, Prime) or (isinstance(node, Call) and node.function in ("laplacian", "div", "grad"))
        if operator and node not in (slope, curve, radial):
            raise SchemeError(
                f'the scheme "{scheme}" has no form for "{write(node)}".\n'
                f"Expected: an equation of {unknown}'' (or laplacian({unknown})), {unknown}' and {unknown} itself.\n"
                "Use central or shell-balance, or write the flux out."
            )
    exponent = shape.exponent
    opened: Node = curve
    if exponent and not shape.axis:
        opened = Binary("+", curve, Binary("*", over(Number(float(exponent)), Name(shape.problem.coordinate)), slope))
    elif exponent:
        opened = Binary("*", Number(exponent + 1.0), curve)  # the limit at the axis, where u' = 0
    tree = transform(equation.tree, lambda node: opened if node == radial else None)
    leading = derivative(tree, curve)
    drift = derivative(tree, slope)
    if curve in set(walk(leading)) | set(walk(drift)) or slope in set(walk(leading)) | set(walk(drift)):
        raise SchemeError(
            f"the scheme \"{scheme}\" has no form for an equation that is not linear in {unknown}'' and {unknown}'.\nUse central."
        )
    zero: dict[Node, Node] = {curve: Number(0.0), slope: Number(0.0)}
    rest = transform(tree, zero.get)
    return StandardForm(Number(0.0) if shape.axis else _over(drift, leading), _over(rest, leading))


def _over(tree: Node, leading: Node) -> Node:
    if tree == Number(0.0) or leading == Number(1.0):
        return tree
    return over(tree, leading)


@dataclass(frozen=True)
class Fitted(Scheme):
    """The fitted scheme; exact on equal steps, and with each step's own weight of second order on smooth maps."""

    @property
    def limits(self) -> str:
        """Beyond a quarter wave an interval, where the frozen equation has solutions that vanish at both neighbours."""
        return "the scheme fitted has no value where sqrt(b)*h reaches pi, b the slope of the source: take more intervals"

    def row(self, equation: Equation, unknown: str, shape: Shape) -> Node:
        """((u[k+1] - u[k]) W(p, z)/h - (u[k] - u[k-1]) W(-p, z)/h)/h + f with p = a h/2, z = b h^2, each h its own on a map.

        W(p, z) = e^p z/(2 (cosh p - cosh sqrt(p^2 - z))); W(0, z) = z/(4 sin^2(sqrt(z)/2)).
        """
        form = standard_form(equation, unknown, shape, self.name)
        problem = shape.problem
        source = at_node(form.source, 0, problem)
        slope = at_node(derivative(form.source, Name(unknown)), 0, problem)
        up = minus(node_value(unknown, 1), node_value(unknown, 0))
        down = minus(node_value(unknown, 0), node_value(unknown, -1))
        if shape.axis:
            down = minus(node_value(unknown, 0), node_value(unknown, 1))
        if form.drift == Number(0.0) and shape.uniform:
            scaled = Binary("*", slope, power(STEP, 2))
            second = over(minus(up, down), power(STEP, 2))
            return Binary("+", second, Binary("*", source, Call("cardinal", (scaled,))))
        drift, x = at_node(form.drift, 0, problem), problem.coordinate
        right = width(x, 0, 1, shape)
        left, cell = (right, right) if shape.axis else (width(x, -1, 0, shape), width(x, -HALF, HALF, shape))

        def weighted(difference: Node, step: Node, sign: float) -> Node:
            fit = (Binary("*", Number(0.5 * sign), Binary("*", drift, step)), Binary("*", slope, power(step, 2)))
            return over(Binary("*", difference, Call("fit", fit)), step)

        return Binary("+", over(minus(weighted(up, right, 1.0), weighted(down, left, -1.0)), cell), source)


FITTED = Fitted("fitted", "exact for the equation with its coefficients, and the slope of its source, frozen at each node")
