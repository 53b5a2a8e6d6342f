"""The difference equations of one grid, with parameter values: residuals, derivatives and Newton's corrections."""

from __future__ import annotations

import math
from collections.abc import Mapping
from functools import cached_property
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.band import ScalarBand
from bvp.discretize import Discretization
from bvp.dot import dot
from bvp.formula import evaluate_all
from bvp.formula.tree import Name, Node
from bvp.geometry import EXPONENTS
from bvp.grid import Grid
from bvp.hoist import scalar_value
from bvp.row_arrays import evaluated, leaf_values
from bvp.rows import AXIS, FIXED, GHOST, PART, PLACE
from bvp.schemes.scheme import STEP

Array = npt.NDArray[np.float64]


class DiscreteSystem:
    """The difference equations of one grid: n = N + 3 entries in every array, one for each node and a ghost at each end.

    `values` are those of all parameters; the traced one is passed to each call.
    """

    def __init__(self, discretization: Discretization, grid: Grid, values: Mapping[str, float]) -> None:
        self.of = discretization
        self.grid = grid
        self.values = dict(values)
        self.size = grid.intervals + 3
        self.left_kind, self.right_kind = discretization.rows.left_kind, discretization.rows.right_kind
        self._functions, self._floats = discretization.array_functions, discretization.float_functions
        self._numbers = self._all_numbers(self.values.get(discretization.along, 0.0))
        self._fill_arrays()
        self.step, self.tangent = np.zeros(self.size), np.zeros(self.size)
        self._work, self._info = np.zeros((3, self.size)), np.zeros(9)
        self._stored = None if discretization.compiled else np.zeros((5, self.size))

    # -- the grid's part ----------------------------------------------------------------------------------------------

    def ends(self, parameter: float) -> tuple[float, float]:
        """The ends of the domain at a value of the traced parameter."""
        return self.of.problem.end_values({**self.values, self.of.along: parameter})

    def places(self, parameter: float) -> Array:
        """Coordinates of the nodes, ghosts not among them, shape (N + 1,)."""
        left, right = self.ends(parameter)
        inner = self.grid.nodes[1:-1]
        placed = left + (right - left) * inner
        placed[-1] = right
        return placed

    @cached_property
    def _base(self) -> dict[str, Array]:
        """Coordinates of nodes and faces, and the scheme's weights: physical, or on the reference interval where the ends move."""
        grid, of = self.grid, self.of
        nodes, faces, name = grid.nodes, grid.faces, PLACE
        if not of.moving:
            left, right = of.problem.end_values(self.values)
            nodes, faces, name = left + (right - left) * nodes, left + (right - left) * faces, of.problem.coordinate
        weights = of.scheme.nodal_weights(nodes, EXPONENTS[of.problem.geometry])
        return {name: nodes, "#faces": np.append(faces, np.nan), **weights}

    def _fill_arrays(self) -> None:
        of, base = self.of, self._base
        self.arrays: dict[str, Array] = {key: array for key, array in base.items() if key in of.array_index}
        numbers = {name: self._numbers[index] for name, index in of.number_index.items()}
        inside = leaf_values(np.empty(0), "", base, numbers, 1, self.size - 1)
        with np.errstate(all="ignore"):
            for leaf, values in zip(
                of.hoisted.arrays.values(), evaluate_all(list(of.hoisted.arrays), inside, self._functions), strict=True
            ):
                held = np.full(self.size, np.nan)
                held[1:-1] = values
                self.arrays[leaf.name] = held
        self._rows = np.zeros((max(len(of.array_index), 1), self.size))
        for key, index in of.array_index.items():
            self._rows[index] = self.arrays[key]
            self.arrays[key] = self._rows[index]

    def _step(self, values: Mapping[str, float]) -> float:
        left, right = self.of.problem.end_values(values)
        return (right - left) / self.grid.intervals

    # -- scalars ------------------------------------------------------------------------------------------------------

    def _all_numbers(self, parameter: float) -> Array:
        of = self.of
        total = len(of.number_index) + sum(function.table.size for function in of.problem.functions.values() if hasattr(function, "table"))
        numbers = np.zeros(total)
        for name, (begin, _) in of.tables.items():
            table = of.problem.functions[name].table
            numbers[begin : begin + table.size] = table
        self._set_scalars(numbers, parameter, of.scalars)
        return numbers

    def _set_scalars(self, numbers: Array, parameter: float, scalars: list[tuple[Node, str, frozenset[str]]]) -> None:
        of = self.of
        values = {**self.values, of.along: parameter}
        step = self._step(values)
        numbers[of.number_index["#step"]], numbers[of.number_index["#part"]] = step, 1.0 / self.grid.intervals
        for name in of.problem.parameters:
            numbers[of.number_index[name]] = values[name]
        known: dict[Node, float] = {STEP: step, PART: 1.0 / self.grid.intervals, **{Name(name): value for name, value in values.items()}}
        for tree, name, calls in scalars:
            numbers[of.number_index[name]] = scalar_value(tree, calls, known.__getitem__, self._floats)

    def numbers(self, parameter: float) -> Array:
        """All scalars at a value of the traced parameter; the array is the system's own and changes with the next call."""
        of = self.of
        numbers = self._numbers
        if of.along in of.number_index and numbers[of.number_index[of.along]] != parameter:
            numbers[of.number_index[of.along]] = parameter
            if of.follows or of.moving:
                self._set_scalars(numbers, parameter, of.follows)
        return numbers

    # -- what Newton asks ---------------------------------------------------------------------------------------------

    def sweep(self, u: Array, parameter: float, direction: Array, factor: float, corner: float, border: float) -> Array:
        """Newton's correction and tangent into `step` and `tangent`; returns what `bvp.kernels.sweep.sweep` puts in info.

        The border row reads factor * (direction . du) + corner * dp = -border.
        """
        numbers = self.numbers(parameter)
        rows = self._rows if self._stored is None else self.stored_rows(u, parameter)
        self.of.module.sweep(
            u,
            rows,
            numbers,
            self.left_kind,
            self.right_kind,
            direction,
            factor,
            corner,
            border,
            self._work,
            self.step,
            self.tangent,
            self._info,
        )
        if self._info[4] > 0 or not math.isfinite(self._info[2]):  # a pivot that is zero leaves no number to compare
            self._sweep_with_pivoting(u, parameter, direction, factor, corner, border)
        return self._info

    def _sweep_with_pivoting(self, u: Array, parameter: float, direction: Array, factor: float, corner: float, border: float) -> None:
        """The same correction and tangent where the elimination without pivoting met a weak pivot; nan where none can be had."""
        rows = self.stored_rows(u, parameter)
        finite = all(np.all(np.isfinite(rows[:, self.band.rows][index])) for index in range(5))
        if not finite or not self.band.factor(rows, rows[4], factor * direction, corner).ok:
            self._info[[0, 1, 2, 3]] = np.nan
            return
        self.step[:], self._info[0] = self.band.solve(-rows[0], -border)
        self.tangent[:], self._info[1] = self.band.solve(np.zeros(self.size), 1.0)
        self._info[2], self._info[3] = dot(self.step[1:-1], self.step[1:-1]), dot(self.tangent[1:-1], self.tangent[1:-1])

    @cached_property
    def band(self) -> ScalarBand:
        """The matrix of this grid for solves with pivoting."""
        return ScalarBand(self.size, self.left_kind, self.right_kind)

    def stored_rows(self, u: Array, parameter: float) -> Array:
        """r, a, b, c, q of every row, shape (5, n): 0 and n - 1 the conditions, 1 … n - 2 the nodes."""
        numbers = self.numbers(parameter)
        if self._stored is None:
            out = np.zeros((5, self.size))
            self.of.module.fill(u, self._rows, numbers, self.left_kind, self.right_kind, out)
            return out
        named_numbers = {name: numbers[index] for name, index in self.of.number_index.items()}
        self._evaluate(self.of.trees, u, named_numbers, self._stored, range(5), self.arrays)
        return self._stored

    def _evaluate(
        self, trees: list[list[Node]], u: Array, numbers: Mapping[str, float], out: Array, which: Any, arrays: Mapping[str, Array]
    ) -> None:
        """The trees of inner nodes, left node, left condition and right condition, each on its own rows of `out`."""
        last = self.size - 1
        inner, first, left, right = trees
        spans = [(inner, 2, last - 1)]
        if self.left_kind != FIXED:
            spans.append((first, 1, 2))
        if self.left_kind != AXIS:
            spans.append((left, 0, 1))
        if self.right_kind == GHOST:
            spans.append((inner, last - 1, last))
        spans.append((right, last, last + 1))
        for row, begin, end in spans:
            # A condition is a row of the end node, which sits one index inside of where it is stored.
            shift = 1 if begin == 0 else -1 if begin == last else 0
            if end > begin:
                value = leaf_values(u, self.of.unknown, arrays, numbers, begin + shift, end + shift)
                evaluated([row[index] for index in which], value, self._functions, out[:, begin:end])

    def slopes_by(self, name: str, u: Array, parameter: float) -> Array:
        """Derivatives of every row by any parameter, shape (n,), in the places of `stored_rows`."""
        numbers = self.numbers(parameter)
        values = {
            **self.values,
            self.of.along: parameter,
            "#step": numbers[self.of.number_index["#step"]],
            "#part": 1.0 / self.grid.intervals,
        }
        out = np.zeros((1, self.size))
        trees = [[tree] for tree in self.of.slopes_of_parameters[name]]
        self._evaluate(trees, u, values, out, range(1), self._base)
        return out[0]

    def guess(self, parameter: float) -> Array:
        """The initial guess at the nodes and ghosts; zero where none is given."""
        problem = self.of.problem
        tree = problem.initial_guess.get(self.of.unknown)
        if tree is None:
            return np.zeros(self.size)
        left, right = self.ends(parameter)
        values: dict[Node, Any] = {Name(name): value for name, value in {**self.values, self.of.along: parameter}.items()}
        values[Name(problem.coordinate)] = left + (right - left) * self.grid.nodes
        with np.errstate(all="ignore"):
            guess = np.zeros(self.size) + evaluate_all([tree], values.__getitem__, self._functions)[0]
        guess[[0, -1]] = np.where(np.isfinite(guess[[0, -1]]), guess[[0, -1]], guess[[1, -2]])
        return guess
