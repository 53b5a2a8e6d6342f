"""Where a state needs its nodes: a density whose share in each interval says how much happens there."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from bvp.interpolate import slopes_by_index

Array = npt.NDArray[np.float64]

STEEPNESS = 0.25  # of the largest slope: below this share of it a change of the slope counts less and less
FLAT = 1e-9  # range of a state relative to its size, below which its shape is rounding
GRADING = 4.0  # of the length of one share, by the distance from where it is short
FEWEST = 6  # intervals below which nothing is said of roughness
SMOOTHING = 2  # passes of (1, 2, 1)/4


def density(x: Array, u: Array, even: bool) -> Array:
    """The share of every node, by the index: of the length, of the range of u, and of the logarithm of its slope.

    x_k/L + |u_k|/(max u - min u) + |g_k|/(|g| + STEEPNESS max|g|), g = u' and _k a derivative by the index. The last term
    resolves a core or a layer by its own width, however narrow it is; a peak takes about 2 ln(1 + 1/STEEPNESS) of it.
    """
    by_index = slopes_by_index(x)
    span = float(x[-1] - x[0])
    shares = np.abs(by_index) / span
    extent = float(np.ptp(u))
    if extent > FLAT * float(np.max(np.abs(u))):
        rise = slopes_by_index(u, even)
        slope = rise / by_index
        steepest = float(np.max(np.abs(slope)))
        bend = np.abs(slopes_by_index(slope))
        shares = shares + np.abs(rise) / extent + bend / (np.abs(slope) + STEEPNESS * steepest)
    shares = graded(x, shares / np.abs(by_index)) * np.abs(by_index)
    for _ in range(SMOOTHING):
        padded = np.pad(shares, 1, mode="edge")
        shares = 0.25 * padded[:-2] + 0.5 * padded[1:-1] + 0.25 * padded[2:]
    return shares


def graded(x: Array, shares: Array) -> Array:
    """Shares by x, raised where needed so that the length of one share changes by no more than GRADING times the distance.

    Away from a layer nodes then thin out in proportion to the distance from it, not at once.
    """
    lengths, ramp = 1.0 / shares, GRADING * x
    shortest = float(lengths.min())
    lengths = np.minimum(lengths, ramp + np.minimum.accumulate(lengths - ramp))
    lengths = np.minimum(lengths, np.minimum.accumulate((lengths + ramp)[::-1])[::-1] - ramp)
    return 1.0 / np.maximum(lengths, shortest)  # where a length is lost beside the ramp


def is_symmetric(shares: Array) -> bool:
    """Whether a density mirrors about the middle."""
    return bool(np.max(np.abs(shares - shares[::-1])) <= 1e-5 * np.max(shares))


def roughness(u: Array) -> float:
    """The largest fourth difference of nodal values over their largest second difference.

    About (h/l)^2 where the state changes over lengths l, and 2 where a peak stands on one node.
    """
    if u.size < FEWEST + 3:
        return 0.0
    first = u[2:-1] - u[1:-2]
    second = first[1:] - first[:-1]
    third = second[1:] - second[:-1]
    fourth = third[1:] - third[:-1]
    largest = max(float(second.max()), -float(second.min()))
    return max(float(fourth.max()), -float(fourth.min())) / largest if largest > 0.0 else 0.0
