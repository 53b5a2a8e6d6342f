"""Measures of a state: max(u), u(0.3), integral(u), and formulas of them."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from typing import TYPE_CHECKING, Any

import numpy as np
import numpy.typing as npt

from bvp.errors import InputError
from bvp.formula import evaluate, float_functions, parse
from bvp.formula.arrays import numpy_functions
from bvp.formula.tree import At, Call, Name, Node, Number, Prime, Relation, transform, walk
from bvp.formula.vocabulary import MEASURES
from bvp.interpolate import at_index, index_of, integral_by_index, largest, slopes_by_index

if TYPE_CHECKING:
    from bvp.problem import Problem

Array = npt.NDArray[np.float64]


class Measure:
    """One measure, or a relation between measures, ready to be taken of any state of a problem."""

    def __init__(self, text: str, problem: Problem, origin: str = "") -> None:
        self.text, self.problem = text, problem
        self.place = origin or f"{problem.origin}, measure"
        tree = parse(text, "measure", problem.vocabulary, self.place)
        self.relation = tree.sign if isinstance(tree, Relation) else None
        self._parts: dict[str, Node] = {}
        sides = (tree.left, tree.right) if isinstance(tree, Relation) else (tree,)
        self._sides = [self._numbered(problem_where(side, problem)) for side in sides]
        self._check()
        self._plain_peak = self._plain_peak_of()

    def _plain_peak_of(self) -> str | None:
        """The unknown of max(u), which most traces take at every step; None for any other measure."""
        parts = list(self._parts.values())
        if len(self._sides) != 1 or not isinstance(self._sides[0], Name) or len(parts) != 1:
            return None
        part = parts[0]
        inside = part.arguments[0] if isinstance(part, Call) and part.function == "max" else None
        return inside.name if isinstance(inside, Name) and inside.name in self.problem.unknowns else None

    def _numbered(self, tree: Node) -> Node:
        """The tree with each measured part replaced by a leaf that receives its number."""

        def change(node: Node) -> Node | None:
            if isinstance(node, At) or (isinstance(node, Call) and node.function in MEASURES and len(node.arguments) == 1):
                name = f"#part{len(self._parts)}"
                self._parts[name] = node
                return Name(name)
            return None

        return transform(tree, change)

    def _check(self) -> None:
        pointwise = {*self.problem.unknowns, self.problem.coordinate}
        for side in self._sides:
            stray = [node.name for node in walk(side) if isinstance(node, Name) and node.name in pointwise]
            stray += [node.operand.name for node in walk(side) if isinstance(node, Prime) and isinstance(node.operand, Name)]
            if stray:
                name = stray[0]
                raise InputError(
                    f'{self.place}: "{self.text}" holds {name} without a place.\n'
                    f"Expected: max({name}), {name}(…) at a place, mean({name}) or the like."
                )
        for node in self._parts.values():
            if isinstance(node, Call):
                for inner in walk(node.arguments[0]):
                    if isinstance(inner, At) or (isinstance(inner, Call) and inner.function in MEASURES and len(inner.arguments) == 1):
                        raise InputError(
                            f'{self.place}: "{self.text}" has a measure inside a measure.\nExpected: one around a formula of the unknowns.'
                        )

    def value(self, places: Array, profiles: Mapping[str, Array], parameters: Mapping[str, float]) -> float:
        """The measure of a state, of a relation the left side less the right; nan where it has no value."""
        if self._plain_peak is not None:
            return largest(profiles[self._plain_peak], self.problem.axis)[0]
        values = {name: self._part(node, places, profiles, parameters) for name, node in self._parts.items()}
        known: Callable[[Any], float] = lambda leaf: values[leaf.name] if leaf.name in values else parameters[leaf.name]  # noqa: E731
        functions = self.problem.function_table(float_functions())
        numbers = [float(evaluate(side, known, functions)) for side in self._sides]
        return numbers[0] - numbers[1] if len(numbers) == 2 else numbers[0]

    def holds(self, places: Array, profiles: Mapping[str, Array], parameters: Mapping[str, float]) -> bool:
        """Whether a relation holds for a state."""
        gap = self.value(places, profiles, parameters)
        return {"<": gap < 0, ">": gap > 0, "<=": gap <= 0, ">=": gap >= 0, "=": gap == 0, None: False}[self.relation]

    # -- the parts ----------------------------------------------------------------------------------------------------

    def _part(self, node: Node, places: Array, profiles: Mapping[str, Array], parameters: Mapping[str, float]) -> float:
        if isinstance(node, At):
            return self._at(node, places, profiles, parameters)
        assert isinstance(node, Call)
        inside = self._nodal(node.arguments[0], places, profiles, parameters)
        even = self.problem.axis
        if node.function == "max":
            return largest(inside, even)[0]
        if node.function == "min":
            return -largest(-inside, even)[0]
        weight = places**self.problem.exponent * slopes_by_index(places)
        if node.function == "integral":
            return integral_by_index(inside * weight)
        whole = integral_by_index(weight)
        if node.function == "mean":
            return integral_by_index(inside * weight) / whole
        return float(np.sqrt(integral_by_index(inside * inside * weight) / whole))

    def _nodal(self, tree: Node, places: Array, profiles: Mapping[str, Array], parameters: Mapping[str, float]) -> Array:
        def leaf(node: Any) -> Any:
            if isinstance(node, Prime):
                if not isinstance(node.operand, Name) or node.operand.name not in profiles or node.order != 1:
                    raise InputError(
                        f'{self.place}: "{self.text}" holds a derivative that no measure has.\nExpected: first derivatives of unknowns.'
                    )
                return slopes_by_index(profiles[node.operand.name], self.problem.axis) / slopes_by_index(places)
            if node.name == self.problem.coordinate:
                return places
            return profiles[node.name] if node.name in profiles else parameters[node.name]

        with np.errstate(all="ignore"):
            return np.zeros(places.size) + evaluate(tree, leaf, self.problem.function_table(numpy_functions()))

    def _at(self, node: At, places: Array, profiles: Mapping[str, Array], parameters: Mapping[str, float]) -> float:
        x = self.problem.number(node.location, parameters) if not isinstance(node.location, Number) else node.location.value
        span = places[-1] - places[0]
        if not places[0] - 1e-12 * span <= x <= places[-1] + 1e-12 * span:
            raise InputError(
                f'{self.place}: "{self.text}" looks at {x:g}, outside of the domain {places[0]:g} to {places[-1]:g}.\n'
                "Expected: a place inside."
            )
        x = min(max(x, float(places[0])), float(places[-1]))
        even = self.problem.axis
        position = index_of(places, x, even)
        operand = node.operand
        if isinstance(operand, Name):
            return at_index(profiles[operand.name], position, even)
        assert isinstance(operand, Prime)
        assert isinstance(operand.operand, Name)
        profile = profiles[operand.operand.name]
        slope = at_index(places, position, order=1)
        first = at_index(profile, position, even, order=1) / slope
        if operand.order == 1:
            return first
        if operand.order == 2:
            return (at_index(profile, position, even, order=2) - first * at_index(places, position, order=2)) / slope**2
        raise InputError(f'{self.place}: "{self.text}" holds a derivative of order {operand.order}.\nExpected: first or second.')


def problem_where(tree: Node, problem: Problem) -> Node:
    """A measure with the [where] names put in."""
    return transform(tree, lambda node: problem.where.get(node.name) if isinstance(node, Name) else None)
