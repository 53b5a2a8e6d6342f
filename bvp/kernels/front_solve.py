"""Solutions with the factors that `front.factor` leaves, its steps repeated on a right-hand side; and their residuals."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.kernels.jit import kernel

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Steps = npt.NDArray[np.int32]


@kernel
def solve(
    right: Floats,
    starts: Integers,
    border_rows: Floats,
    upper: Floats,
    multipliers: Floats,
    steps: Steps,
    ending: Floats,
    ending_order: Integers,
    front: Floats,
    tail: Floats,
    solution: Floats,
) -> None:
    """Solve for one right-hand side with what `front.factor` left.

    right (rows + border rows,), the rows of the band first. Overwritten: front (front rows,), tail (border rows,),
    solution (columns + numbers,).
    """
    columns = upper.shape[0]
    borders = border_rows.shape[0]
    numbers = ending_order.size
    rows = starts.size
    begun = 0
    count = borders
    for a in range(borders):
        front[a] = right[rows + a]
        tail[a] = 0.0
    for column in range(columns):
        while begun < rows and starts[begun] <= column:
            front[count] = right[begun]
            count += 1
            begun += 1
        pivot_row = steps[column, 0]
        count -= 1
        value = front[pivot_row]
        front[pivot_row] = front[count]
        solution[column] = value
        for a in range(count):
            front[a] -= multipliers[column, a] * value
    for step in range(numbers):
        value = front[ending_order[step]]
        for k in range(step):
            value -= ending[step, k] * solution[columns + k]
        solution[columns + step] = value
    for step in range(numbers - 1, -1, -1):
        value = solution[columns + step]
        for k in range(step + 1, numbers):
            value -= ending[step, k] * solution[columns + k]
        solution[columns + step] = value / ending[step, step]
    reach = columns
    for column in range(columns - 1, -1, -1):
        wide = steps[column, 1]
        while reach > column + wide:
            reach -= 1
            for k in range(borders):
                tail[k] += border_rows[k, reach] * solution[reach]
        value = solution[column]
        for k in range(numbers):
            value -= upper[column, wide + k] * solution[columns + k]
        for k in range(borders):
            value -= upper[column, wide + numbers + k] * tail[k]
        for t in range(wide - 1, 0, -1):  # the nearest last: it is the one just found, and the others need not wait for it
            value -= upper[column, t] * solution[column + t]
        solution[column] = value * upper[column, 0]


@kernel
def solve_transposed(
    right: Floats,
    starts: Integers,
    border_rows: Floats,
    upper: Floats,
    multipliers: Floats,
    steps: Steps,
    ending: Floats,
    ending_order: Integers,
    front: Floats,
    tail: Floats,
    work: Floats,
    solution: Floats,
) -> None:
    """Solve with the transposed matrix for one right-hand side, with what `front.factor` left: the same steps from the last to the first.

    right (columns + numbers,). Overwritten: front (front rows,), tail (border rows,), work (columns + numbers,),
    solution (rows + border rows,), the rows of the band first.
    """
    columns = upper.shape[0]
    borders = border_rows.shape[0]
    numbers = ending_order.size
    rows = starts.size
    tail[:] = 0.0
    work[:] = right
    reach = 0
    for column in range(columns):
        wide = steps[column, 1]
        while reach < column + wide:
            for k in range(borders):
                work[reach] -= border_rows[k, reach] * tail[k]
            reach += 1
        value = work[column] * upper[column, 0]
        work[column] = value
        for t in range(1, wide):
            work[column + t] -= upper[column, t] * value
        for k in range(numbers):
            work[columns + k] -= upper[column, wide + k] * value
        for k in range(borders):
            tail[k] += upper[column, wide + numbers + k] * value
    for step in range(numbers):
        value = work[columns + step]
        for k in range(step):
            value -= ending[k, step] * work[columns + k]
        work[columns + step] = value / ending[step, step]
    for step in range(numbers - 1, -1, -1):
        for k in range(step + 1, numbers):
            work[columns + step] -= ending[k, step] * work[columns + k]
        front[ending_order[step]] = work[columns + step]
    count = numbers
    begun = rows - 1
    for column in range(columns - 1, -1, -1):
        pivot_row = steps[column, 0]
        value = work[column]
        for a in range(count):
            value -= multipliers[column, a] * front[a]
        front[count] = front[pivot_row]
        front[pivot_row] = value
        count += 1
        while begun >= 0 and starts[begun] >= column:
            count -= 1
            solution[begun] = front[count]
            begun -= 1
    for a in range(borders):
        solution[rows + a] = front[a]


@kernel
def residual(
    right: Floats,
    entries: Floats,
    starts: Integers,
    border_columns: Floats,
    border_rows: Floats,
    solution: Floats,
    transposed: bool,
    remaining: Floats,
) -> None:
    """remaining = right - matrix times solution, or transposed matrix times solution; all three have the shape (columns + numbers,)."""
    rows, width = entries.shape
    numbers = border_columns.shape[1]
    columns = right.size - numbers
    remaining[:] = right
    for row in range(rows):
        start = starts[row]
        for t in range(min(width, columns - start)):
            if transposed:
                remaining[start + t] -= entries[row, t] * solution[row]
            else:
                remaining[row] -= entries[row, t] * solution[start + t]
        for k in range(numbers):
            if transposed:
                remaining[columns + k] -= border_columns[row, k] * solution[row]
            else:
                remaining[row] -= border_columns[row, k] * solution[columns + k]
    for a in range(border_rows.shape[0]):
        for k in range(right.size):
            if transposed:
                remaining[k] -= border_rows[a, k] * solution[rows + a]
            else:
                remaining[rows + a] -= border_rows[a, k] * solution[k]
