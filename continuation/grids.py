"""The grid that a trace asks for by a word: uniform, adaptive, or the formula of a map."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import numpy.typing as npt

from bvp.formula import Node, Vocabulary, evaluate, parse
from bvp.formula.arrays import numpy_functions
from bvp.formula.tree import Name
from bvp.grid import Grid
from bvp.problem import Problem

ADAPTIVE = "adaptive"

Array = npt.NDArray[np.float64]


def grid_for(grid: str | Grid, intervals: int, problem: Problem) -> Grid:
    """The grid to begin with: one given as such, a uniform one, or the formula of a map of [0, 1] on itself, such as s^2.

    An adaptive grid begins as a uniform one.
    """
    if isinstance(grid, Grid):
        return grid
    if grid in ("uniform", ADAPTIVE):
        return Grid(intervals)
    tree = parse(str(grid), "plain", Vocabulary(unknowns=(), coordinate="s"), f"{problem.origin}, grid")
    return Grid(intervals, _map(tree))


def _map(tree: Node) -> Callable[[Array], Array]:
    def placed(s: Array) -> Array:
        with np.errstate(all="ignore"):
            return np.zeros(s.size) + evaluate(tree, {Name("s"): s}.__getitem__, numpy_functions())

    return placed
