"""One Newton step of a tridiagonal system with a border: rows made and eliminated from both ends at once.

The unknowns are u at the nodes and the parameter. Row i reads a u[i-1] + b u[i] + c u[i+1] + q dp = -r; the border row
(direction . du) factor + corner dp = -border closes it. Eliminating towards the middle carries the border row along,
so that the middle node and the parameter are left in a two by two system, solved with pivoting: nothing is lost
where the matrix without its border is singular, at a turning point. The tangent (border right-hand side 1, the
others 0) comes out of the same elimination.

`row(i, u, rows, numbers) -> (r, a, b, c, q)` gives row i; here it reads stored rows, in a generated module it is the
typed formula. Indices: 0 and n - 1 are the conditions, 1 … n - 2 the nodes.
"""

from __future__ import annotations

import numpy as np

from bvp.kernels.jit import kernel

WEAK = 1e-9  # a pivot that lost this share of its terms is a case for pivoting; the step's error stays below 1e-7 of it


@kernel
def row(i, u, rows, numbers):
    """A stored row."""
    return rows[0, i], rows[1, i], rows[2, i], rows[3, i], rows[4, i]


# ---- from here on the text is the same in every generated module ----


@kernel
def two_by_two(a, b, c, d, e, f):
    """x, y of a x + b y = e, c x + d y = f by elimination with complete pivoting."""
    largest = max(abs(a), abs(b), abs(c), abs(d))
    if largest == 0.0:
        return np.nan, np.nan
    if abs(c) == largest or abs(d) == largest:
        a, b, c, d, e, f = c, d, a, b, f, e
    if abs(b) > abs(a):
        factor = d / b
        x = (f - factor * e) / (c - factor * a)
        return x, (e - a * x) / b
    factor = c / a
    y = (f - factor * e) / (d - factor * b)
    return (e - b * y) / a, y
