"""The compact scheme: fourth order on three nodes, in the slab, the cylinder and the sphere, ends and axis included.

For laplacian(u) + f = 0 the identity

    (u[k+1] - u[k])/R+ - (u[k] - u[k-1])/R- + integral of g f r^s dr = 0,    R = integral of r^-s dr,

is exact, with g the hat that is 1 at node k, 0 at its neighbours and harmonic between. With f the parabola through
its three nodal values the integral becomes a weighted sum; in the slab the weights are h/12, 10 h/12, h/12 (Numerov;
Cowell; from memory). At the axis g is the regular part alone. The derivative at an end is the mean of the two
one-sided fluxes that the same identity gives, the ghost node included, so that the error stays even in the step.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

import numpy as np
import numpy.typing as npt

from bvp.errors import SchemeError
from bvp.formula import derivative, write
from bvp.formula.tree import Binary, Call, Indexed, Name, Node, Number, Prime, names_in, transform, walk
from bvp.geometry import resistance
from bvp.problem import Equation, Problem
from bvp.schemes.difference import minus, node_value, over
from bvp.schemes.scheme import Scheme, Shape, at_node

Array = npt.NDArray[np.float64]

ABSCISSAE, WEIGHTS = np.polynomial.legendre.leggauss(20)  # to rounding for ln r over [h, 2h] too
FRACTIONS, SHARES = (ABSCISSAE + 1.0) / 2.0, WEIGHTS / 2.0
MIRRORED = 1e-14  # a node this close to the axis, relative to the step, is on it


@dataclass(frozen=True)
class Compact(Scheme):
    """The compact scheme for c*laplacian(u) + f(x, u) = 0, c free of x and u."""

    def row(self, equation: Equation, unknown: str, shape: Shape) -> Node:
        """(flux out - flux in + weighted f)/(sum of the weights), so that f comes with coefficient 1 as in the equation."""
        leading, source = source_form(equation, unknown, shape.problem)
        problem = shape.problem
        up = minus(node_value(unknown, 1), node_value(unknown, 0))
        flux = Binary("*", up, _weight("up"))
        total: Node = flux
        if not shape.axis:
            down = minus(node_value(unknown, 0), node_value(unknown, -1))
            total = minus(flux, Binary("*", down, _weight("down")))
        average: Node = Binary("*", _weight("f_here"), at_node(source, 0, problem))
        average = Binary("+", average, Binary("*", _weight("f_up"), at_node(source, 1, problem)))
        if not shape.axis:
            average = Binary("+", average, Binary("*", _weight("f_down"), at_node(source, -1, problem)))
        return Binary("+", total if leading == Number(1.0) else Binary("*", leading, total), average)

    def end_derivative(self, unknown: str, equation: Equation, shape: Shape) -> Node:
        """u' at an end as the mean of the fluxes from either side, each corrected by its half of the integral."""
        leading, source = source_form(equation, unknown, shape.problem)
        up = Binary("*", minus(node_value(unknown, 1), node_value(unknown, 0)), _weight("end_up"))
        down = Binary("*", minus(node_value(unknown, 0), node_value(unknown, -1)), _weight("end_down"))
        average: Node | None = None
        for name, offset in (("end_f_down", -1), ("end_f_here", 0), ("end_f_up", 1)):
            term = Binary("*", _weight(name), at_node(source, offset, shape.problem))
            average = term if average is None else Binary("+", average, term)
        assert average is not None
        return Binary("+", Binary("+", up, down), average if leading == Number(1.0) else over(average, leading))

    @property
    def weight_powers(self) -> Mapping[str, int]:
        """Fluxes over volumes go like length^-2, fluxes over areas like 1/length, the ends' sources like length."""
        ends = {f"#{name}": 1 for name in ("end_f_down", "end_f_here", "end_f_up")}
        return {"#up": -2, "#down": -2, "#end_up": -1, "#end_down": -1, "#f_down": 0, "#f_here": 0, "#f_up": 0, **ends}

    def nodal_weights(self, nodes: Array, exponent: int) -> dict[str, Array]:
        """The weights of every node but the ghosts (theirs stay 0)."""
        return compact_weights(nodes, exponent)


def source_form(equation: Equation, unknown: str, problem: Problem) -> tuple[Node, Node]:
    """c and f of c*laplacian(u) + f = 0; SchemeError where the equation has no such form."""
    operators = [Call("laplacian", (Name(unknown),))] + ([Prime(Name(unknown), 2)] if problem.exponent == 0 else [])
    stand_in = Name("#operator")
    marked = transform(equation.tree, lambda node: stand_in if node in operators else None)
    leading = derivative(marked, stand_in)
    source = transform(marked, lambda node: Number(0.0) if node == stand_in else None)
    held = [
        node
        for node in walk(source)
        if isinstance(node, Prime) or (isinstance(node, Call) and node.function in ("laplacian", "div", "grad"))
    ]
    strangers = names_in(leading) - set(problem.parameters)
    if held or strangers or leading == Number(0.0):
        shown = write(held[0]) if held else write(leading) if strangers else equation.text
        raise SchemeError(
            f'the scheme "compact" has no fourth-order form on three nodes for "{shown}".\n'
            f"Expected: c*laplacian({unknown}) + f = 0, f a formula of {problem.coordinate} and {unknown} alone, c of parameters alone.\n"
            "Use central with extrapolation, or fitted where there is a first derivative."
        )
    return leading, source


def _weight(name: str) -> Indexed:
    return Indexed(f"#{name}", Fraction(0))


def compact_weights(nodes: Array, exponent: int) -> dict[str, Array]:
    """Weights by node for nodes r, ghosts included, shape (N + 3,); all divided so that those of f sum to 1.

    The end weights give u' itself: fluxes divided by r^s.
    """
    count = nodes.size
    names = ("up", "down", "f_down", "f_here", "f_up", "end_up", "end_down", "end_f_down", "end_f_here", "end_f_up")
    weights = {f"#{name}": np.zeros(count) for name in names}
    below, here, above = nodes[:-2], nodes[1:-1].copy(), nodes[2:]
    at_axis = exponent > 0 and abs(here[0]) <= MIRRORED * above[0]
    with np.errstate(all="ignore"):
        out = _half(below, here, above, exponent, above)
        into = _half(below, here, above, exponent, below)
        conductance_up, conductance_down = 1.0 / resistance(here, above, exponent), 1.0 / resistance(below, here, exponent)
        area = here**exponent
    if at_axis:
        below = below.copy()
        below[0] = -above[0]  # the mirror image, through which the even parabola of f goes
        regular = _axis_half(above[0], exponent)
        out[:, 0], into[:, 0] = regular[0], 0.0
        conductance_up[0], conductance_down[0] = regular[1], 0.0
        # The next node looks inward over the first cell, where only the regular solution lives: no flux arises there.
        into[:, 1] = _whole_first_cell(nodes[1], nodes[2], nodes[3], exponent)
        conductance_down[1] = 0.0
    total = (out + into).sum(axis=0)
    inner = slice(1, -1)
    weights["#up"][inner] = conductance_up / total
    weights["#down"][inner] = conductance_down / total
    for name, row in zip(("#f_down", "#f_here", "#f_up"), out + into, strict=True):
        weights[name][inner] = row / total
    with np.errstate(all="ignore"):
        weights["#end_up"][inner] = conductance_up / area / 2.0
        weights["#end_down"][inner] = conductance_down / area / 2.0
        for name, row in zip(("#end_f_down", "#end_f_here", "#end_f_up"), (out - into) / area / 2.0, strict=True):
            weights[name][inner] = row
    return weights


def _parabola(at: Array, below: Array, here: Array, above: Array) -> Array:
    """The three Lagrange parabolas through below, here, above at the points `at`, shape (3, …)."""
    return np.stack(
        [
            (at - here) * (at - above) / ((below - here) * (below - above)),
            (at - below) * (at - above) / ((here - below) * (here - above)),
            (at - below) * (at - here) / ((above - below) * (above - here)),
        ]
    )


def _half(below: Array, here: Array, above: Array, exponent: int, far: Array) -> Array:
    """Weights of f from the hat's half between here and far: integral of hat * parabola * r^s, shape (3, n)."""
    width = far - here
    total = np.zeros((3, here.size))
    for fraction, share in zip(FRACTIONS, SHARES, strict=True):
        at = here + fraction * width
        hat = resistance(at, far, exponent) / resistance(here, far, exponent)
        total += share * np.abs(width) * hat * at**exponent * _parabola(at, below, here, above)
    return total


def _axis_half(radius: float, exponent: int) -> tuple[Array, float]:
    """The axis node's weights: u[1] - u[0] = -integral of (resistance from r to radius) f r^s, f even, a parabola in r.

    Multiplied by the conductance that makes the row's first entry an area over a width.
    """
    moments = [_axis_moment(radius, exponent, power) for power in (0, 2)]
    here = moments[0] - moments[1]
    scale = 1.0 / radius ** (1 - exponent)
    return np.array([0.0, here * scale, moments[1] * scale]), scale


def _axis_moment(radius: float, exponent: int, power: int) -> float:
    """integral from 0 to R of (integral from r to R of t^-s dt) r^s (r/R)^power dr, done by parts: R^2/((s+1+p)(2+p))."""
    return radius**2 / ((exponent + 1 + power) * (2 + power))


def _whole_first_cell(axis: float, here: float, above: float, exponent: int) -> Array:
    """Weights of f over the first cell, integral of parabola * r^s from 0 to here: the inward half of the node next to the axis."""
    total = np.zeros(3)
    for fraction, share in zip(FRACTIONS, SHARES, strict=True):
        at = np.array([axis + fraction * (here - axis)])
        total += share * (here - axis) * at[0] ** exponent * _parabola(at, np.array([axis]), np.array([here]), np.array([above]))[:, 0]
    return total


COMPACT = Compact("compact", "fourth order on three nodes, ends and axis closed to fourth order by the equation")
