"""Values of measured functions: piecewise polynomials of third degree from one flat array.

A table is its knots, then four coefficients for each interval, of the powers 0 to 3 of the distance from the
interval's left knot. Several tables may stand in one array, each known by where it begins.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.kernels.jit import kernel

Floats = npt.NDArray[np.float64]


@kernel
def table_interval(table: Floats, begin: int, count: int, x: float) -> int:
    """The interval in which x lies, -1 where it lies outside of the knots or is no number."""
    if not (table[begin] <= x <= table[begin + count - 1]):
        return -1
    low = 0
    high = count - 1
    while high - low > 1:
        middle = (low + high) // 2
        if x < table[begin + middle]:
            high = middle
        else:
            low = middle
    return low


@kernel
def table_value(table: Floats, begin: int, count: int, x: float, order: int) -> float:
    """The function with `count` knots at x, or its derivative of the given order; nan outside of the knots."""
    interval = table_interval(table, begin, count, x)
    if interval < 0:
        return np.nan
    t = x - table[begin + interval]
    c = begin + count + 4 * interval
    value: float = 0.0
    if order == 0:
        value = table[c] + t * (table[c + 1] + t * (table[c + 2] + t * table[c + 3]))
    elif order == 1:
        value = table[c + 1] + t * (2.0 * table[c + 2] + t * 3.0 * table[c + 3])
    elif order == 2:
        value = 2.0 * table[c + 2] + t * 6.0 * table[c + 3]
    elif order == 3:
        value = 6.0 * table[c + 3]
    return value
