"""A kernel module generated for one set of rows: the rows as straight-line code, fused with the elimination of `bvp.kernels.sweep`.

The module's text depends on the formulas only, not on a grid or on values, so that one compilation serves all grids.
"""

from __future__ import annotations

import inspect
from collections.abc import Mapping, Sequence
from types import ModuleType
from typing import Any

from bvp.formula import source
from bvp.formula.tree import Call, Indexed, Name, Node, walk

MARK = "# ---- from here on the text is the same in every generated module ----"
FUNCTIONS = {
    name: f"math.{name}"
    for name in ("exp", "log", "sqrt", "sin", "cos", "tan", "sinh", "cosh", "tanh", "asin", "acos", "atan", "erf", "log1p", "expm1")
}
FUNCTIONS |= {"abs": "abs", "min": "min", "max": "max", "sign": "np.sign"}
SPECIAL = ("cardinal", "cardinal_slope", "fit", "fit_by_drift", "fit_by_slope", "step_le")

HEADER = '''"""Rows of a difference scheme, written by the program from a formula; safe to delete."""

from __future__ import annotations

import math

import numpy as np

from bvp.kernels.jit import kernel

'''


class Spelling:
    """How the leaves of row trees are spelled in a generated module: u[i+1], rows[3, i], numbers[5]."""

    def __init__(
        self, unknown: str, array_index: Mapping[str, int], number_index: Mapping[str, int], tables: Mapping[str, tuple[int, int]]
    ) -> None:
        self.unknown, self.array_index, self.number_index, self.tables = unknown, array_index, number_index, tables

    def leaf(self, node: Node) -> str:
        """One leaf."""
        if isinstance(node, Indexed):
            if node.offset.denominator == 2:
                return f"rows[{self.array_index['#faces']}, {_index(int(node.offset - _half(node)))}]"
            where = (
                f"[{_index(int(node.offset))}]"
                if node.name == self.unknown
                else f"[{self.array_index[node.name]}, {_index(int(node.offset))}]"
            )
            return ("u" if node.name == self.unknown else "rows") + where
        assert isinstance(node, Name)
        kind, _, name = node.name.partition(":")
        if kind in ("#up", "#down"):
            nearer, farther = (0, 1) if kind == "#up" else (-1, 0)
            row = "" if name == self.unknown else f"{self.array_index[name]}, "
            array = "u" if name == self.unknown else "rows"
            return f"({array}[{row}{_index(farther)}] - {array}[{row}{_index(nearer)}])"
        return f"numbers[{self.number_index[node.name]}]"

    def functions(self) -> dict[str, str]:
        """Functions, the measured ones among them with the place of their table in `numbers`."""
        table = {**FUNCTIONS, **{name: name for name in SPECIAL}}
        for name, (begin, count) in self.tables.items():
            for order in range(4):
                table[name if order == 0 else f"{name}:{order}"] = f"table_value(numbers, {begin}, {count}, {{}}, {order})"
        return table


def _half(node: Indexed) -> Any:
    """Face k + 1/2 is stored at index i, face k - 1/2 at i - 1."""
    return node.offset - (0 if node.offset > 0 else -1)


def _index(offset: int) -> str:
    return f"i{offset:+}" if offset else "i"


def generated_module(rows: Sequence[Sequence[Node]], spelling: Spelling, hint: str) -> ModuleType:
    """The compiled module for the rows of inner nodes, left end node, left condition, right condition (each five trees)."""
    from bvp.generated import load
    from bvp.kernels import sweep

    inner, first, left, right = rows
    called = {node.function for row in rows for tree in row for node in walk(tree) if isinstance(node, Call)}
    parts = [HEADER]
    if called & set(spelling.tables):
        from bvp.measured import source_text

        parts.append(source_text())
    if called & set(SPECIAL):
        from bvp.kernels import special

        parts.append(_kernels_text(special))
    parts.append(_function("row", "the equation at an inner node", inner, spelling))
    for name, what, trees in (
        ("first_row", "the equation at the left end", first),
        ("left_row", "the left condition", left),
        ("right_row", "the right condition", right),
    ):
        parts.append(_function(name, what, trees, spelling))
    parts.append(END_ROW)
    parts.append(inspect.getsource(sweep).split(MARK)[1])
    return load("\n\n".join(part.strip("\n") + "\n" for part in parts), hint)


END_ROW = '''@kernel
def end_row(i, u, rows, numbers):
    """The rows of the two ends."""
    if i == 0:
        return left_row(1, u, rows, numbers)
    if i == 1:
        return first_row(i, u, rows, numbers)
    if i == u.shape[0] - 2:
        return row(i, u, rows, numbers)
    return right_row(u.shape[0] - 2, u, rows, numbers)
'''


def _function(name: str, what: str, trees: Sequence[Node], spelling: Spelling) -> str:
    lines, results = source(trees, spelling.leaf, spelling.functions())
    body = "".join(f"    {line}\n" for line in lines)
    return f'@kernel\ndef {name}(i, u, rows, numbers):\n    """r, a, b, c, q of {what}."""\n{body}    return {", ".join(results)}\n'


def _kernels_text(module: ModuleType) -> str:
    text = inspect.getsource(module)
    return text[text.index("@kernel") :]
