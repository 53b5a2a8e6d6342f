"""Pivoted elimination of a matrix whose rows couple a few neighbouring columns, with border columns and border rows.

    | band     border columns | | nodal values |   | f |
    | border rows      corner | | numbers      | = | g |

A row of the band has `width` entries from column `start` on; rows come ordered by `start`. Column after column is
eliminated by one of the rows that have begun and are not used up (the front), the one with the largest entry relative
to the largest that the row had: Gaussian elimination with scaled partial pivoting (Golub and Van Loan, Matrix
Computations, section 3.4), nothing left out. So conditions that all stand at one end need nothing special, and a band
that is singular where the whole is not costs no digits.

A border row stands in the front from the first column on. Beyond the columns that have been reached it is still what
it was, and rows from which it was subtracted are multiples of it there: every front row carries those multiples, its
tail, in place of the entries. With border rows kept out of the choice of pivots, digits were lost wherever the null
vector of a singular band is small at the far end, up to all of them.

What this cannot do is what partial pivoting cannot: where both ends are coupled by every condition, none standing at
one end, it can be unstable (Wright, SIAM J. Sci. Comput. 14, 1993, 231-238, gives such systems). The growth shows it.

`upper[j]` is the pivot row of column j: its entries in the band, the first one inverted, those in the border columns,
and its tail. `steps[j]` is its place in the front, and how many entries in the band it has; `multipliers[j, a]` how
often it was subtracted from front row a.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.kernels.jit import kernel

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Steps = npt.NDArray[np.int32]


@kernel
def band_rows_in_front(starts: Integers, columns: int) -> int:
    """The most rows of the band that have begun and not yet served as pivots, if all pivots are of the band."""
    begun = 0
    most = 0
    for column in range(columns):
        while begun < starts.size and starts[begun] <= column:
            begun += 1
        most = max(most, begun - column)
    return most


@kernel
def factor(
    entries: Floats,
    starts: Integers,
    border_columns: Floats,
    border_rows: Floats,
    upper: Floats,
    multipliers: Floats,
    steps: Steps,
    ending: Floats,
    ending_order: Integers,
    front: Floats,
    weights: Floats,
) -> tuple[int, int, float, float, float]:
    """(code, column, smallest pivot, growth, sign of the determinant); code 1 is no pivot in this column, 0 is well.

    The smallest pivot is relative to the largest entry that its row had to begin with, growth is the largest of the same ratios.

    entries (rows, width), starts (rows,), border_columns (rows, numbers), border_rows (border rows, columns + numbers).
    Overwritten: upper (columns, width + numbers + border rows), multipliers (columns, front rows), steps (columns, 2),
    ending (numbers, numbers), ending_order (numbers,), front (front rows, width + numbers + border rows), weights
    (front rows,); front rows are the border rows and `band_rows_in_front`.
    """
    rows, width = entries.shape
    columns = upper.shape[0]
    numbers = border_columns.shape[1]
    borders = border_rows.shape[0]
    across = numbers + borders
    count = borders  # rows in the front
    begun = 0
    reach = 0  # the columns before this one stand in the front
    smallest = np.inf
    growth = 0.0
    sign = -1.0 if borders * rows % 2 == 1 else 1.0  # the border rows stand first in the front
    for a in range(borders):
        largest = 0.0
        for k in range(columns + numbers):
            largest = max(largest, abs(border_rows[a, k]))
        weights[a] = 1.0 / largest if largest > 0.0 else 0.0
        for k in range(numbers):
            front[a, k] = border_rows[a, columns + k]
        for k in range(borders):
            front[a, numbers + k] = 1.0 if k == a else 0.0
    for column in range(columns):
        end = max(reach, column + 1)
        row = begun
        while row < rows and starts[row] <= column:
            wide = min(width, columns - column)
            while wide > 1 and entries[row, wide - 1] == 0.0:
                wide -= 1
            end = max(end, column + wide)
            row += 1
        if end > reach:  # columns enter the front rows out of their tails; what stands behind makes room
            before = reach - column
            after = end - column
            for a in range(count):
                for k in range(across - 1, -1, -1):
                    front[a, after + k] = front[a, before + k]
                for t in range(before, after):
                    front[a, t] = 0.0
                for k in range(borders):
                    multiple = front[a, after + numbers + k]
                    for t in range(before, after):
                        front[a, t] += multiple * border_rows[k, column + t]
            reach = end
        wide = min(width, reach - column)
        while begun < row:
            largest = 0.0
            for t in range(wide):
                entry = entries[begun, t]
                front[count, t] = entry
                largest = max(largest, abs(entry))
            for t in range(wide, reach - column + across):
                front[count, t] = 0.0
            for k in range(numbers):
                entry = border_columns[begun, k]
                front[count, reach - column + k] = entry
                largest = max(largest, abs(entry))
            weights[count] = 1.0 / largest if largest > 0.0 else 0.0
            count += 1
            begun += 1
        best = 0.0
        pivot_row = count
        for a in range(count):
            size = abs(front[a, 0]) * weights[a]
            if size > best:
                best = size
                pivot_row = a
        inverse = 1.0 / front[pivot_row, 0] if best > 0.0 else np.inf
        if not abs(inverse) < np.inf:
            return 1, column, 0.0, growth, 0.0
        smallest = min(smallest, best)
        growth = max(growth, best)
        count -= 1
        if (inverse < 0.0) ^ (pivot_row != count) ^ (count % 2 == 1):
            sign = -sign  # the pivot row changes places with the last row in the front, then passes all others
        end = reach - column + across
        steps[column, 0] = pivot_row
        steps[column, 1] = reach - column
        upper[column, 0] = inverse
        front[pivot_row, 0] = front[count, 0]
        for t in range(1, end):
            upper[column, t] = front[pivot_row, t]
            front[pivot_row, t] = front[count, t]
        weights[pivot_row] = weights[count]
        a = 0
        while a + 1 < count:  # two rows at a time: a tenth faster than one
            first = front[a, 0] * inverse
            second = front[a + 1, 0] * inverse
            multipliers[column, a] = first
            multipliers[column, a + 1] = second
            for t in range(1, end):
                entry = upper[column, t]
                front[a, t - 1] = front[a, t] - first * entry
                front[a + 1, t - 1] = front[a + 1, t] - second * entry
            a += 2
        if a < count:
            first = front[a, 0] * inverse
            multipliers[column, a] = first
            for t in range(1, end):
                front[a, t - 1] = front[a, t] - first * upper[column, t]
    for a in range(numbers):
        for k in range(numbers):
            ending[a, k] = front[a, k]
    code, step, least, sign_of_ending = factor_ending(ending, weights, ending_order)
    return code, columns + step, min(smallest, least), growth, sign * sign_of_ending


@kernel
def factor_ending(ending: Floats, weights: Floats, order: Integers) -> tuple[int, int, float, float]:
    """(code, step, smallest pivot relative to its row, sign of the determinant): L U in place of what is left of the border columns.

    ending (numbers, numbers), weights and order (numbers,), all overwritten; order becomes that of the front rows.
    """
    size = order.size
    smallest = np.inf
    sign = 1.0
    for a in range(size):
        order[a] = a
    for step in range(size):
        best = 0.0
        pivot_row = step
        for a in range(step, size):
            relative = abs(ending[a, step]) * weights[a]
            if relative > best:
                best = relative
                pivot_row = a
        if not best > 0.0:
            return 1, step, 0.0, 0.0
        smallest = min(smallest, best)
        if (ending[pivot_row, step] < 0.0) != (pivot_row != step):
            sign = -sign
        order[step], order[pivot_row] = order[pivot_row], order[step]
        weights[step], weights[pivot_row] = weights[pivot_row], weights[step]
        for k in range(size):
            ending[step, k], ending[pivot_row, k] = ending[pivot_row, k], ending[step, k]
        for a in range(step + 1, size):
            multiplier = ending[a, step] / ending[step, step]
            ending[a, step] = multiplier
            for k in range(step + 1, size):
                ending[a, k] -= multiplier * ending[step, k]
    return 0, 0, smallest, sign
