"""From a problem and a scheme to difference equations: rows as trees and, compiled once, as kernels that serve every grid."""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Mapping
from functools import cached_property
from types import ModuleType
from typing import TYPE_CHECKING, Any

from bvp.formula import cancel, derivative, float_functions
from bvp.formula.arrays import numpy_functions
from bvp.formula.tree import Indexed, Name, Node, walk
from bvp.grid import Grid
from bvp.hoist import Hoisted, calls_in, hoist
from bvp.problem import Problem
from bvp.row_kernels import Spelling, generated_module
from bvp.rows import PLACE, Row, depends_on, rows_of
from bvp.schemes import Scheme, named

if TYPE_CHECKING:
    from bvp.discrete_system import DiscreteSystem


class Discretization:
    """A problem under a scheme, to be followed in one parameter: its rows as trees and, compiled once, as kernels.

    compiled = False evaluates the rows by NumPy: nothing to compile, and three times the time a node.
    """

    def __init__(
        self, problem: Problem, scheme: str | Scheme = "central", along: str | None = None, *, uniform: bool = True, compiled: bool = True
    ) -> None:
        self.problem = problem
        self.scheme = named(scheme)
        self.along = along if along is not None else next(iter(problem.parameters), "#none")
        self.uniform = uniform
        self.unknown = problem.unknowns[0]
        self.rows = rows_of(problem, self.scheme, self.along, uniform)
        self.moving = any(depends_on(end, name) for end in problem.ends for name in problem.parameters)
        self.hoisted = Hoisted()
        empty = Row(*([Name("#none")] * 5))
        sets = [self.rows.inner, self.rows.first(), self.rows.left or empty, self.rows.right]
        self.trees = [self._hoisted(row) if row is not empty else list(row.trees) for row in sets]
        given = any(hasattr(function, "partials") for function in problem.functions.values())
        self.compiled = compiled and not given
        self.known_consistency: Any = None  # what bvp.consistency found, which costs a few milliseconds
        self.scalars = [(tree, leaf.name, calls_in(tree)) for tree, leaf in self.hoisted.scalars.items()]
        self.follows = [scalar for scalar in self.scalars if depends_on(scalar[0], self.along)]

    def _hoisted(self, row: Row) -> list[Node]:
        return hoist(row.trees, set(self.problem.parameters), self._grid_names(), self.along, self.hoisted)

    def _grid_names(self) -> set[str]:
        return {self.problem.coordinate, PLACE, *self._weight_names()}

    @cached_property
    def _leaves(self) -> set[Node]:
        trees = [tree for row in self.trees for tree in row] + list(self.hoisted.arrays)
        return {node for tree in trees for node in walk(tree) if not node.parts}

    def _weight_names(self) -> set[str]:
        held = set()
        for row in (self.rows.inner, self.rows.first(), self.rows.left, self.rows.right):
            for tree in row.trees if row else ():
                held |= {node.name for node in walk(tree) if isinstance(node, Indexed) and node.name.startswith("#") and node.name != PLACE}
        return held

    def on(self, grid: Grid, parameters: Mapping[str, float] | None = None) -> DiscreteSystem:
        """The discrete system on a grid, at the problem's parameters with the given changes."""
        from bvp.discrete_system import DiscreteSystem  # which is made of this

        return DiscreteSystem(self, grid, {**self.problem.parameters, **(parameters or {})})

    # -- numbers and arrays in their order ----------------------------------------------------------------------------

    @cached_property
    def array_functions(self) -> dict[str, Any]:
        """The functions of the formulas for arrays."""
        return self.problem.function_table(numpy_functions())

    @cached_property
    def float_functions(self) -> dict[str, Any]:
        """The functions of the formulas for numbers."""
        return self.problem.function_table(float_functions())

    @cached_property
    def number_index(self) -> dict[str, int]:
        """Where each scalar stands in the kernels' `numbers`."""
        names = ["#step", "#part", *self.problem.parameters, *(leaf.name for leaf in self.hoisted.scalars.values())]
        return {name: index for index, name in enumerate(dict.fromkeys(names))}

    @cached_property
    def array_index(self) -> dict[str, int]:
        """Where each nodal array stands in the kernels' `rows`: only those that the rows hold."""
        names = set()
        for node in (node for row in self.trees for tree in row for node in walk(tree) if not node.parts):
            if isinstance(node, Indexed) and node.name != self.unknown:
                names.add("#faces" if node.offset.denominator == 2 else node.name)
            elif isinstance(node, Name) and ":" in node.name and node.name.split(":")[1] != self.unknown:
                names.add(node.name.split(":")[1])
        return {name: index for index, name in enumerate(sorted(names))}

    @cached_property
    def tables(self) -> dict[str, tuple[int, int]]:
        """Where the table of each measured function begins in `numbers`, and its count of knots."""
        begin, places = len(self.number_index), {}
        for name, function in self.problem.functions.items():
            if hasattr(function, "table"):
                places[name] = (begin, function.knots.size)
                begin += function.table.size
        return places

    @cached_property
    def module(self) -> ModuleType:
        """The kernels: generated from the rows, or the general ones that read stored rows."""
        if self.compiled:
            spelling = Spelling(self.unknown, self.array_index, self.number_index, self.tables)
            none = [Name("#step")] * 5  # an end that has no such row never asks for it
            trees = [row if row[0] != Name("#none") else none for row in self.trees]
            return generated_module(trees, spelling, self.scheme.name)
        from bvp.kernels import sweep

        return sweep

    @cached_property
    def slopes_of_parameters(self) -> dict[str, list[Node]]:
        """Derivatives of the rows by every parameter but the traced one, for sensitivities."""
        found = {}
        for name in self.problem.parameters:
            sets = (self.rows.inner, self.rows.first(), self.rows.left, self.rows.right)
            found[name] = [cancel(derivative(row.residual, Name(name))) if row else Name("#step") for row in sets]
        return found


_MADE: OrderedDict[tuple[object, ...], Discretization] = OrderedDict()
MOST_MADE = 64


def discretization(
    problem: Problem, scheme: str | Scheme = "central", along: str | None = None, *, uniform: bool = True, compiled: bool = True
) -> Discretization:
    """A discretization, kept from an earlier call where the formulas are the same: parameter values do not matter to it."""
    chosen = named(scheme)
    stated = (
        problem.equations,
        problem.conditions,
        problem.ends,
        problem.geometry,
        problem.unknowns,
        problem.coordinate,
        tuple(problem.parameters),
    )
    guesses = tuple(problem.initial_guess.items())
    functions = tuple((name, id(function)) for name, function in problem.functions.items())
    key = (repr(chosen), along, uniform, compiled, stated, guesses, functions)
    if key in _MADE:
        _MADE.move_to_end(key)
        return _MADE[key]
    made = _MADE[key] = Discretization(problem, chosen, along, uniform=uniform, compiled=compiled)
    while len(_MADE) > MOST_MADE:
        _MADE.popitem(last=False)
    return made
