"""What a difference scheme is: a few formulas of nodal values, said in the formula language.

A scheme is data; `bvp.schemes.difference` is the one engine that turns an equation into a difference equation with
it. What a formula cannot say (coefficients that are integrals, a slope of the source) is said by a subclass that
overrides `row`, `end_derivative` or `nodal_weights`: the protocol that users have too.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import TYPE_CHECKING

from bvp.errors import SchemeError, nearest
from bvp.formula import parse
from bvp.formula.tree import Indexed, Name, Node, Relation, transform, walk

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from bvp.problem import Equation, Problem

STEP = Name("#step")  # the step of a uniform grid, a leaf that nobody can type
FORMULA_KEYS = ("denominator", "flux", "volume", "axis", "first", "end", "source", "right_hand_side", "equation")
KEYS = (*FORMULA_KEYS, "replace")
EQUATIONS = ("equation", "axis")  # the keys whose formula may be an equation with two sides


PLACES_OF_KEYS = {  # formulas without a place would be ignored in silence, and the scheme taken for another one
    "flux": "for laplacian(u), div(…) and (…)'",
    "denominator": "for second differences and divergences",
    "source": "for u undifferentiated and outside a flux",
    "right_hand_side": "for terms without derivatives",
}


@dataclass(frozen=True)
class Shape:
    """Where a row stands: on which kind of grid, for which problem, at the axis or not."""

    problem: Problem
    uniform: bool
    axis: bool = False

    @property
    def exponent(self) -> int:
        """s of the geometry."""
        return self.problem.exponent


@dataclass(frozen=True)
class Scheme:
    """A difference scheme, stated by formulas of u[k-1], u[k], u[k+1], x[…] and the step; None means the standard one.

    denominator : in place of h^2 in the second difference. flux : area times gradient between k and k+1, with
    `volume` and `axis` for the cell. first : for u'. end : for a derivative in a condition. source : what stands for
    u undifferentiated and outside a flux. right_hand_side : what stands for the part without derivatives, f.
    replace : a term for a term. equation : the whole difference equation.
    """

    name: str
    about: str
    texts: Mapping[str, str] = field(default_factory=dict)
    replacements: Mapping[str, str] = field(default_factory=dict)
    origin: str = ""
    typed: bool = False
    used: set[str] = field(default_factory=set, compare=False, repr=False)  # keys that an equation has had a place for

    # -- what the engine asks ---------------------------------------------------------------------------------------

    def formula(self, key: str, problem: Problem, unknown: str) -> Node | None:
        """One of its formulas as a tree in the problem's own names, None where the scheme leaves the standard one."""
        text = self.texts.get(key)
        if text is None:
            return None
        self.used.add(key)
        place = f"{self.origin or self.name}, {key}"
        tree = parse(text, "scheme", problem.vocabulary, place)
        if key not in EQUATIONS:
            refuse_relation(tree, text, place)
        return in_names_of(tree, problem, unknown)

    def replaced_terms(self, problem: Problem, unknown: str) -> list[tuple[Node, Node]]:
        """Its pairs of a term, written as in the equation, and what stands for it."""
        pairs = []
        own, known = problem.vocabulary, (*problem.unknowns, problem.coordinate, *problem.parameters, *problem.where)
        stand_ins = replace(
            own,
            unknowns=(*own.unknowns, *({"u"} - set(known))),
            parameters=(*own.parameters, *({"x"} - set(known))),
        )
        for term, text in self.replacements.items():
            place = f"{self.origin or self.name}, replace"
            left, right = parse(term, "equation", stand_ins, place), parse(text, "scheme", own, place)
            refuse_relation(left, term, place)
            refuse_relation(right, text, place)
            pairs.append((in_names_of(left, problem, unknown), in_names_of(right, problem, unknown)))
        return pairs

    def refuse_unused(self, equation: Equation) -> None:
        """SchemeError where one of its main formulas has found no place in the equation whose rows were made of it."""
        for key, place in PLACES_OF_KEYS.items():
            if key in self.texts and key not in self.used:
                raise SchemeError(
                    f'{self.origin or self.name}: "{key}" finds no place in "{equation.text}".\n'
                    f"It stands {place}: leave it out, or write the equation so."
                )

    def needs_uniform_grid(self, problem: Problem) -> bool:
        """Whether its formulas hold the step, or a denominator, which have a meaning on uniform grids only."""
        unknown = problem.unknowns[0]
        trees = [self.formula(key, problem, unknown) for key in FORMULA_KEYS]
        trees += [stands for _, stands in self.replaced_terms(problem, unknown)]
        return "denominator" in self.texts or any(STEP in walk(tree) for tree in trees if tree is not None)

    def row(self, equation: Equation, unknown: str, shape: Shape) -> Node:
        """The difference equation at node k."""
        from bvp.schemes.difference import difference_row

        return difference_row(self, equation, unknown, shape)

    def end_derivative(self, unknown: str, equation: Equation, shape: Shape) -> Node:
        """What stands for u' at an end, where a condition holds it; node k is the end, k-1 or k+1 the ghost beyond it."""
        from bvp.schemes.difference import standard_first

        return self.formula("end", shape.problem, unknown) or standard_first(unknown, shape)

    def nodal_weights(self, nodes: npt.NDArray[np.float64], exponent: int) -> dict[str, npt.NDArray[np.float64]]:
        """Coefficients by node that its rows hold as Indexed(name, 0); nodes with ghosts, physical, shape (N + 3,)."""
        return {}

    @property
    def limits(self) -> str:
        """Where its rows have no value though the equation has one, and what to do: a sentence, empty where there is no such place."""
        return ""

    @property
    def weight_powers(self) -> Mapping[str, int]:
        """How each of its nodal weights grows with the length of the domain, where that is a formula of parameters."""
        return {}

    def with_origin(self, origin: str) -> Scheme:
        """The same scheme, its messages opening with another place."""
        return replace(self, origin=origin)


def in_names_of(tree: Node, problem: Problem, unknown: str) -> Node:
    """u, x, h and step of a scheme as the unknown, the coordinate and the step of the problem."""
    own = {*problem.unknowns, problem.coordinate, *problem.parameters, *problem.where}

    def meant(name: str) -> str:
        if name in own:
            return name
        return {"u": unknown, "x": problem.coordinate}.get(name, name)

    def change(node: Node) -> Node | None:
        if isinstance(node, Indexed):
            return Indexed(meant(node.name), node.offset, node.place)
        if isinstance(node, Name):
            if node.name in ("h", "step") and node.name not in own:
                return STEP
            return Name(meant(node.name), node.place)
        return None

    return transform(tree, change)


def at_node(tree: Node, offset: int, problem: Problem) -> Node:
    """A pointwise formula at node k + offset: every unknown and the coordinate with that index."""
    pointwise = {*problem.unknowns, problem.coordinate}
    return transform(tree, lambda node: Indexed(node.name, Fraction(offset)) if isinstance(node, Name) and node.name in pointwise else None)


def shifted(tree: Node, offset: int) -> Node:
    """A formula of nodal values moved by whole nodes."""
    return transform(tree, lambda node: Indexed(node.name, node.offset + offset) if isinstance(node, Indexed) else None)


def refuse_relation(tree: Node, text: str, place: str) -> None:
    """SchemeError where a formula that has to be a value is an equation."""
    if isinstance(tree, Relation):
        raise SchemeError(
            f'{place}: "{text}" is an equation.\nExpected: a value, with no "=" in it; an equation stands under "equation" or "axis".'
        )


def check_typed(name: str, keys: Mapping[str, object], origin: str) -> None:
    """SchemeError unless every key is one that a scheme may have, with the right kind of value."""
    for key, value in keys.items():
        if key not in KEYS:
            raise SchemeError(f'{origin}: "{key}" is no key of a scheme. {nearest(key, list(KEYS))}')
        if key == "replace":
            if not isinstance(value, Mapping) or not all(isinstance(text, str) for text in value.values()):
                raise SchemeError(
                    f'{origin}: "replace" is {value!r}.\nExpected: a table of a term for a term, such as {{"u^2" = "u[k]*u[k+1]"}}.'
                )
        elif not isinstance(value, str):
            raise SchemeError(f'{origin}: "{key}" is {value!r}.\nExpected: a formula in quotes.')
    if not keys:
        raise SchemeError(f'{origin}: the scheme "{name}" has no formula.\nExpected: one of {", ".join(KEYS)}.')
    if "equation" in keys and set(keys) - {"equation", "end", "axis"}:
        extra = sorted(set(keys) - {"equation", "end", "axis"})[0]
        raise SchemeError(
            f'{origin}: "equation" is the whole difference equation, and "{extra}" would change a part of it.\nGive one or the other.'
        )
    for key in ("volume",):
        if key in keys and "flux" not in keys:
            raise SchemeError(f'{origin}: "{key}" belongs to a "flux", which is missing.\nGive both, or neither.')
