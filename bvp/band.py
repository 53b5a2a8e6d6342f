"""The rows of a scalar system as a bordered band matrix: solved with pivoting, transposed too.

For where the fast elimination has no good pivots, and for left null vectors.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.bordered_band import BorderedBand, Factorization
from bvp.rows import FIXED, GHOST

Array = npt.NDArray[np.float64]


class ScalarBand:
    """The band of one grid: which entries of the stored rows are rows and columns of the matrix, ghosts included."""

    def __init__(self, size: int, left_kind: int, right_kind: int) -> None:
        first = 0 if left_kind == GHOST else 1
        last = size - 1 if right_kind == GHOST else size - 2
        self.columns = slice(first, last + 1)
        count = last - first + 1
        rows = np.arange(size)
        starts = rows - 1
        if left_kind == GHOST:
            starts[:2] = 0
        else:
            starts[:2] = 1  # the end node's row begins at itself
        if right_kind == GHOST:
            starts[-2:] = size - 3
        else:
            starts[-2:] = size - 4
        keep = np.ones(size, dtype=bool)
        if left_kind != GHOST:
            keep[1 if left_kind == FIXED else 0] = False
        if right_kind != GHOST:
            keep[size - 2] = False
        self.rows = np.flatnonzero(keep)
        self.left_kind, self.right_kind = left_kind, right_kind
        self.matrix = BorderedBand(starts[self.rows] - first, 3, count, 1)

    def factor(self, rows: Array, column: Array, border: Array, corner: float) -> Factorization:
        """Factor [J column; border corner] for stored rows of shape (5, n); column by rows, border by columns, each (n,)."""
        entries = rows[1:4, self.rows].T.copy()
        if self.left_kind != GHOST:  # a, b, c of the end node's row sit one column to the left: its first column is the node
            entries[0] = [entries[0, 1], entries[0, 2], 0.0]
        if self.right_kind != GHOST:
            entries[-1] = [0.0, entries[-1, 0], entries[-1, 1]]
        across = np.append(border[self.columns], corner)[None, :]
        return self.matrix.factor(entries, column[self.rows][:, None], across)

    def solve(self, right: Array, last: float) -> tuple[Array, float]:
        """The solution for a right-hand side by rows, shape (n,), and that of the border row: nodal values and the number."""
        solved = self.matrix.solve(np.append(right[self.rows], last))
        return self._spread(solved), float(solved[-1])

    def solve_transposed(self, right: Array, last: float) -> tuple[Array, float]:
        """The same with the transposed matrix: right-hand side by columns, solution by rows, shape (n,)."""
        solved = self.matrix.solve_transposed(np.append(right[self.columns], last))
        spread = np.zeros(right.size)
        spread[self.rows] = solved[:-1]
        return spread, float(solved[-1])

    def _spread(self, solved: Array) -> Array:
        spread = np.zeros(self.columns.stop + (0 if self.right_kind == GHOST else 1))
        spread[self.columns] = solved[:-1]
        return spread
