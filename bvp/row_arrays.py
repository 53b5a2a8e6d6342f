"""Rows evaluated by NumPy, with nothing to compile: on slices for the inner nodes, on single numbers at the ends."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.formula import evaluate_all
from bvp.formula.tree import Indexed, Name, Node

Array = npt.NDArray[np.float64]
Functions = Mapping[str, Callable[..., Any]]


def leaf_values(
    u: Array, unknown: str, arrays: Mapping[str, Array], numbers: Mapping[str, float], begin: int, end: int
) -> Callable[[Node], Any]:
    """The value of each leaf for the rows begin … end - 1; u and arrays have one entry a node, faces one a face."""

    def array_of(name: str) -> Array:
        return u if name == unknown else arrays[name]

    def value(node: Node) -> Any:
        if isinstance(node, Indexed):
            if node.offset.denominator == 2:
                shift = 0 if node.offset > 0 else -1
                return arrays["#faces"][begin + shift : end + shift]
            shift = int(node.offset)
            return array_of(node.name)[begin + shift : end + shift]
        assert isinstance(node, Name)
        kind, _, name = node.name.partition(":")
        if kind == "#up":
            held = array_of(name)
            return held[begin + 1 : end + 1] - held[begin:end]
        if kind == "#down":
            held = array_of(name)
            return held[begin:end] - held[begin - 1 : end - 1]
        return numbers[node.name]

    return value


def evaluated(trees: Sequence[Node], value: Callable[[Node], Any], functions: Functions, out: Array) -> None:
    """The trees' values into the rows of `out`; nan and inf stand where a formula has no value."""
    with np.errstate(all="ignore"):
        for row, result in zip(out, evaluate_all(trees, value, functions), strict=True):
            row[:] = result
