"""One Newton step of a tridiagonal system with a border: rows made and eliminated from both ends at once.

The unknowns are u at the nodes and the parameter. Row i reads a u[i-1] + b u[i] + c u[i+1] + q dp = -r; the border row
(direction . du) factor + corner dp = -border closes it. Eliminating towards the middle carries the border row along,
so that the middle node and the parameter are left in a two by two system, solved with pivoting: nothing is lost
where the matrix without its border is singular, at a turning point. The tangent (border right-hand side 1, the
others 0) comes out of the same elimination.

`row` and, for the two rows at each end, `end_row(i, u, rows, numbers) -> (r, a, b, c, q)` give row i;
here it reads stored rows, in a generated module it is the typed formula. Indices: 0 and n - 1 are the conditions, 1 … n - 2 the nodes.
"""

from __future__ import annotations

import numpy as np

from bvp.kernels.jit import kernel


@kernel
def row(i, u, rows, numbers):
    """A stored row."""
    return rows[0, i], rows[1, i], rows[2, i], rows[3, i], rows[4, i]


@kernel
def end_row(i, u, rows, numbers):
    """A stored row of an end: of its condition, or of its node."""
    return rows[0, i], rows[1, i], rows[2, i], rows[3, i], rows[4, i]


# ---- from here on the text is the same in every generated module ----

FIXED, GHOST, AXIS = 0, 1, 2  # an end: its condition is the node's own row; it gives a ghost node; there is none at an axis
WEAK = 1e-9  # a pivot that lost this share of its terms is a case for pivoting; the step's error stays below 1e-7 of it
UNLIKE = 1e-12  # couplings that are zero but for rounding have no sign


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


@kernel
def left_end(u, rows, numbers, kind):
    """Row of the left end node, its ghost eliminated: r, b, c, q and r, a, b, c, q of the condition that gives the ghost."""
    if kind == FIXED:
        r, _, b, c, q = end_row(0, u, rows, numbers)
        return r, b, c, q, 0.0, 1.0, 0.0, 0.0, 0.0
    r, a, b, c, q = end_row(1, u, rows, numbers)
    if kind == AXIS:
        return r, b, c, q, 0.0, 1.0, 0.0, 0.0, 0.0
    gr, ga, gb, gc, gq = end_row(0, u, rows, numbers)
    share = a / ga
    return r - share * gr, b - share * gb, c - share * gc, q - share * gq, gr, ga, gb, gc, gq


@kernel
def right_end(u, rows, numbers, kind):
    """Row of the right end node, its ghost eliminated: r, a, b, q and r, a, b, c, q of the condition that gives the ghost."""
    last = u.shape[0] - 1
    if kind == FIXED:
        r, a, b, _, q = end_row(last, u, rows, numbers)
        return r, a, b, q, 0.0, 0.0, 0.0, 1.0, 0.0
    r, a, b, c, q = end_row(last - 1, u, rows, numbers)
    gr, ga, gb, gc, gq = end_row(last, u, rows, numbers)
    share = c / gc
    return r - share * gr, a - share * ga, b - share * gb, q - share * gq, gr, ga, gb, gc, gq


@kernel
def sweep(u, rows, numbers, left_kind, right_kind, direction, factor, corner, border, work, step, tangent, info):
    """Newton's correction and the tangent of the bordered system at u; overwrites work, step, tangent, info.

    u, step, tangent : (n,); direction : (n,); work : (3, n). info receives: 0 the parameter's correction, 1 the
    tangent's parameter, 2 and 3 the sums of squares of both over the nodes, 4 the count of weak pivots, 5 and 6 those of
    positive and negative pivots at nodes with an equation, 7 the count of neighbours whose couplings differ in sign, 8 the
    coupling of the middle node.
    """
    first, last = 1, u.shape[0] - 2
    middle = (first + last) // 2
    weak = positive = unlike = 0

    r, b, c, q, gr, ga, gb, gc, gq = left_end(u, rows, numbers, left_kind)
    s, d, e, p, hr, ha, hb, hc, hq = right_end(u, rows, numbers, right_kind)
    if left_kind != FIXED and b > 0.0:
        positive += 1
    if right_kind != FIXED and e > 0.0:
        positive += 1
    if abs(b) <= WEAK * abs(c) or abs(e) <= WEAK * abs(d):
        weak += 1
    work[0, first], work[1, first], work[2, first] = c / b, -r / b, q / b
    work[0, last], work[1, last], work[2, last] = d / e, -s / e, p / e
    left_border = factor * direction[first]
    right_border = factor * direction[last]
    corner_left = left_border * work[2, first]
    corner_right = right_border * work[2, last]
    known_left = left_border * work[1, first]
    known_right = right_border * work[1, last]
    left_border = -left_border * work[0, first]
    right_border = -right_border * work[0, last]
    outer, inner = c, d  # the coupling into the next row, to be held against that row's coupling back
    counted_left, counted_right = left_kind != FIXED, right_kind != FIXED

    i, k = first + 1, last - 1
    while i < middle or k > middle:
        if i < middle:
            r, a, b, c, q = row(i, u, rows, numbers)
            if counted_left and a * outer < -UNLIKE * b * b:
                unlike += 1
            loss = a * work[0, i - 1]
            pivot = b - loss
            if abs(pivot) < WEAK * (abs(b) + abs(loss) + abs(c)):
                weak += 1
            if pivot > 0.0:
                positive += 1
            inverse = 1.0 / pivot
            ratio = c * inverse
            known = (-r - a * work[1, i - 1]) * inverse
            column = (q - a * work[2, i - 1]) * inverse
            work[0, i], work[1, i], work[2, i] = ratio, known, column
            carried = factor * direction[i] + left_border
            known_left += carried * known
            corner_left += carried * column
            left_border = -carried * ratio
            outer = c
            counted_left = True
            i += 1
        if k > middle:
            s, d, e, c, p = row(k, u, rows, numbers)
            if counted_right and c * inner < -UNLIKE * e * e:
                unlike += 1
            loss = c * work[0, k + 1]
            pivot = e - loss
            if abs(pivot) < WEAK * (abs(e) + abs(loss) + abs(d)):
                weak += 1
            if pivot > 0.0:
                positive += 1
            inverse = 1.0 / pivot
            ratio = d * inverse
            known = (-s - c * work[1, k + 1]) * inverse
            column = (p - c * work[2, k + 1]) * inverse
            work[0, k], work[1, k], work[2, k] = ratio, known, column
            carried = factor * direction[k] + right_border
            known_right += carried * known
            corner_right += carried * column
            right_border = -carried * ratio
            inner = d
            counted_right = True
            k -= 1

    # The middle node and the parameter; where there are only two nodes the middle is the left end itself.
    if middle == first:
        r, b, c, q, gr, ga, gb, gc, gq = left_end(u, rows, numbers, left_kind)
        if left_kind != FIXED and b > 0.0:
            positive -= 1
        pivot = b - c * work[0, middle + 1]
        rest = -r - c * work[1, middle + 1]
        column = q - c * work[2, middle + 1]
        carried = factor * direction[middle] + right_border
        known, corner_here = known_right, corner - corner_right
    else:
        r, a, b, c, q = row(middle, u, rows, numbers)
        pivot = b - a * work[0, middle - 1] - c * work[0, middle + 1]
        rest = -r - a * work[1, middle - 1] - c * work[1, middle + 1]
        column = q - a * work[2, middle - 1] - c * work[2, middle + 1]
        carried = factor * direction[middle] + left_border + right_border
        known, corner_here = known_left + known_right, corner - corner_left - corner_right
        if (counted_left and a * outer < -UNLIKE * b * b) or (counted_right and c * inner < -UNLIKE * b * b):
            unlike += 1
    if pivot > 0.0 and (middle != first or left_kind != FIXED):
        positive += 1
    here, parameter = two_by_two(pivot, column, carried, corner_here, rest, -border - known)
    along, pace = two_by_two(pivot, column, carried, corner_here, 0.0, 1.0)

    step[middle], tangent[middle] = here, along
    squares, tangent_squares = here * here, along * along
    before, before_along = here, along
    after, after_along = here, along
    i, k = middle - 1, middle + 1
    while i >= first or k <= last:
        if i >= first:
            before = work[1, i] - work[0, i] * before - work[2, i] * parameter
            before_along = -work[0, i] * before_along - work[2, i] * pace
            step[i], tangent[i] = before, before_along
            squares += before * before
            tangent_squares += before_along * before_along
            i -= 1
        if k <= last:
            after = work[1, k] - work[0, k] * after - work[2, k] * parameter
            after_along = -work[0, k] * after_along - work[2, k] * pace
            step[k], tangent[k] = after, after_along
            squares += after * after
            tangent_squares += after_along * after_along
            k += 1
    step[0] = (-gr - gb * step[1] - gc * step[2] - gq * parameter) / ga
    tangent[0] = (-gb * tangent[1] - gc * tangent[2] - gq * pace) / ga
    step[last + 1] = (-hr - ha * step[last - 1] - hb * step[last] - hq * parameter) / hc
    tangent[last + 1] = (-ha * tangent[last - 1] - hb * tangent[last] - hq * pace) / hc
    nodes = last - first + 1 - (left_kind == FIXED) - (right_kind == FIXED)
    info[0], info[1], info[2], info[3] = parameter, pace, squares, tangent_squares
    info[4], info[5], info[6], info[7], info[8] = weak, positive, nodes - positive, unlike, c


@kernel
def fill(u, rows, numbers, left_kind, right_kind, out):
    """All rows stored: r, a, b, c, q of every row, out : (5, n); those of the ends not in use are left alone."""
    last = u.shape[0] - 1
    if left_kind != AXIS:
        out[0, 0], out[1, 0], out[2, 0], out[3, 0], out[4, 0] = end_row(0, u, rows, numbers)
    if left_kind != FIXED:
        out[0, 1], out[1, 1], out[2, 1], out[3, 1], out[4, 1] = end_row(1, u, rows, numbers)
    for i in range(2, last - 1):
        out[0, i], out[1, i], out[2, i], out[3, i], out[4, i] = row(i, u, rows, numbers)
    if right_kind != FIXED:
        i = last - 1
        out[0, i], out[1, i], out[2, i], out[3, i], out[4, i] = end_row(i, u, rows, numbers)
    out[0, last], out[1, last], out[2, last], out[3, last], out[4, last] = end_row(last, u, rows, numbers)
