"""Matrices with a band of rows, border columns and border rows: storage, checks and refinement around `kernels.front`."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from bvp.kernels import front, front_solve

Floats = npt.NDArray[np.float64]

# Pivots that outgrow the rows they come from by a factor have cost as many digits. Ordinary problems stay below 3, and
# below this the loss is not worth another solve; above, solutions are refined by their residual.
GROWTH_UNREFINED = 50.0
# Beyond this, refinement gains nothing: a few digits of the correction have to be right (1e10 leaves six).
GROWTH_REFINED = 1e10
MOST_REFINEMENTS = 4


@dataclass(frozen=True)
class Factorization:
    """How an elimination went: `ok`, or not with the reason in words.

    smallest_pivot is relative to the largest entry that the pivot's row had to begin with, growth is the largest such
    ratio. A small one means a nearly singular matrix; the converse does not hold, because the null vector may be tiny
    in the last columns. sign is that of the determinant of the whole matrix, 0 where the elimination ended early.
    """

    ok: bool
    reason: str
    smallest_pivot: float
    growth: float
    sign: float


class BorderedBand:
    """Factorizations of matrices of one pattern:

        | band     border columns | | nodal values |   | f |
        | border rows      corner | | numbers      | = | g |

    starts : shape (rows,), not decreasing, first column of each row of the band. width : entries of a row of the band,
    those past the last column are not looked at. columns : of the band. numbers : border columns. There are as many
    border rows as make the matrix square.

    The memory taken is 8 (width + front rows + numbers + border rows) bytes a column, where front rows are the border
    rows and the most rows of the band alive at once. For three-node rows of m unknowns and one border that is 40 m + 24
    bytes a column, 740 MB for a million nodes of four unknowns. The matrix itself is the caller's.
    One thread at a time may use it.
    """

    def __init__(self, starts: npt.ArrayLike, width: int, columns: int, numbers: int = 0) -> None:
        self.starts = np.ascontiguousarray(starts, dtype=np.int64)
        self.width, self.columns, self.numbers, self.rows = width, columns, numbers, self.starts.size
        self.borders = columns + numbers - self.rows
        ordered = self.starts.ndim == 1 and not np.any(np.diff(self.starts) < 0)
        if not ordered or (self.rows and not 0 <= self.starts[0] <= self.starts[-1] < columns):
            raise ValueError(f"starts must be one array that does not decrease, within 0 to {columns - 1}")
        if self.borders < 0:
            raise ValueError(f"{self.rows} rows are more than {columns} columns and {numbers} numbers")
        front_rows = self.borders + front.band_rows_in_front(self.starts, columns)
        across = width + numbers + self.borders
        self._upper = np.empty((columns, across))
        self._multipliers = np.empty((columns, max(front_rows - 1, 0)))
        self._steps = np.empty((columns, 2), dtype=np.int32)
        self._ending = np.empty((numbers, numbers))
        self._ending_order = np.empty(numbers, dtype=np.int64)
        self._front = np.empty((front_rows, across))
        self._weights = np.empty(front_rows)
        self.factorization = Factorization(False, "nothing was factored yet", 0.0, 0.0, 0.0)

    def factor(self, entries: Floats, border_columns: Floats | None = None, border_rows: Floats | None = None) -> Factorization:
        """Eliminate. The three arrays are used again by the solves and must not change before the last of them.

        entries : shape (rows, width). border_columns : shape (rows, numbers). border_rows : shape (border rows,
        columns + numbers), the corner at their end.
        """
        self._entries = _checked(entries, (self.rows, self.width), "entries")
        self._border_columns = _checked(border_columns, (self.rows, self.numbers), "border_columns")
        self._border_rows = _checked(border_rows, (self.borders, self.columns + self.numbers), "border_rows")
        code, column, smallest, growth, sign = front.factor(
            self._entries,
            self.starts,
            self._border_columns,
            self._border_rows,
            self._upper,
            self._multipliers,
            self._steps,
            self._ending,
            self._ending_order,
            self._front,
            self._weights,
        )
        reason = ""
        if code:
            reason = f"the matrix is singular: column {column} of {self.columns + self.numbers} has no pivot"
        elif not growth < GROWTH_REFINED:
            reason = (
                f"the elimination is unstable, rows grew {growth:.0e} times: as a rule all conditions couple both ends of a long domain"
            )
        self.factorization = Factorization(not reason, reason, smallest, growth, sign)
        return self.factorization

    def solve(self, right: npt.ArrayLike) -> Floats:
        """The solution for one right-hand side, shape (rows + border rows,), band first, or for several, one a row of the array."""
        return self._solved(right, transposed=False)

    def solve_transposed(self, right: npt.ArrayLike) -> Floats:
        """The solution with the transposed matrix; a right-hand side has the shape (columns + numbers,)."""
        return self._solved(right, transposed=True)

    def _solved(self, right: npt.ArrayLike, transposed: bool) -> Floats:
        if not self.factorization.ok:
            raise ValueError(f"cannot solve: {self.factorization.reason}")
        rights = np.ascontiguousarray(right, dtype=np.float64)
        size = self.columns + self.numbers
        if rights.ndim not in (1, 2) or rights.shape[-1] != size:
            raise ValueError(f"right-hand sides of shape {rights.shape} do not end in {size}")
        solutions = np.empty_like(rights)
        for one, solution in zip(np.atleast_2d(rights), np.atleast_2d(solutions), strict=True):
            self._solve_one(one, transposed, solution)
            if self.factorization.growth > GROWTH_UNREFINED:
                self._refine(one, transposed, solution)
        return solutions

    def _refine(self, right: Floats, transposed: bool, solution: Floats) -> None:
        remaining, correction = np.empty(right.size), np.empty(right.size)
        for _ in range(MOST_REFINEMENTS):
            front_solve.residual(
                right, self._entries, self.starts, self._border_columns, self._border_rows, solution, transposed, remaining
            )
            self._solve_one(remaining, transposed, correction)
            solution += correction
            if not np.max(np.abs(correction)) > 4 * np.finfo(float).eps * np.max(np.abs(solution)):
                return

    def _solve_one(self, right: Floats, transposed: bool, solution: Floats) -> None:
        factors = (self._upper, self._multipliers, self._steps, self._ending, self._ending_order)
        work = np.empty(self._weights.size), np.empty(self.borders)
        if transposed:
            front_solve.solve_transposed(right, self.starts, self._border_rows, *factors, *work, np.empty(right.size), solution)
        else:
            front_solve.solve(right, self.starts, self._border_rows, *factors, *work, solution)


def _checked(array: Floats | None, shape: tuple[int, int], name: str) -> Floats:
    made = np.zeros(shape) if array is None and 0 in shape else np.ascontiguousarray(array, dtype=np.float64)
    if made.shape != shape:
        raise ValueError(f"{name} has the shape {made.shape} where {shape} is needed")
    return made
