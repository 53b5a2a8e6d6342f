"""Smooth maps of the unit interval on itself that are changed little by little: where nodes go as a state changes.

Nodes are moved by a density m over the places xi of the map that is: with S(xi) the integral of m, smoothed to a short
cosine series, the new map is X(S^-1(s)). What is where it was stays where it was; only how many nodes go there changes.
S is odd about both ends and so is X: ghosts are mirror images, and the error of a symmetric scheme stays an even series
in the step, at an axis too.
"""

from __future__ import annotations

from functools import cached_property

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]

PANELS = 128
DEGREE = 14  # of the polynomial on a panel: with the smoothing below its series ends at rounding
WIDTH = 0.03  # of the Gaussian by which a density is smoothed: a grid of 200 intervals has six nodes in it
TERMS = 40  # cosines: the Gaussian leaves exp(-(40 pi WIDTH)^2/2) = 0.0008 of the last one
LEAST = 0.05  # of the mean of a density, added to it: nodes are never taken away faster

_POINTS = np.cos(np.pi * (np.arange(DEGREE + 1) + 0.5) / (DEGREE + 1))
_TO_SERIES = np.polynomial.chebyshev.chebvander(_POINTS, DEGREE).T * (2.0 / (DEGREE + 1))
_TO_SERIES[0] *= 0.5


class SmoothMap:
    """A map X of [0, 1] on itself, a polynomial on each of PANELS equal parts; X(s) when called, beyond the ends by reflection.

    series : Chebyshev coefficients of the rise of X over each panel from its left end, shape (DEGREE + 2, PANELS).
    """

    def __init__(self, series: Array) -> None:
        rises = series.sum(axis=0)  # every Chebyshev polynomial is 1 at the right end
        self._series = series / rises.sum()
        self._rises = rises / rises.sum()
        self._starts = np.concatenate([[0.0], np.cumsum(self._rises)])

    @classmethod
    def identity(cls) -> SmoothMap:
        """X(s) = s."""
        series = np.zeros((DEGREE + 2, PANELS))
        series[:2] = 0.5 / PANELS
        return cls(series)

    def __call__(self, s: Array) -> Array:
        """X(s), shape of s."""
        places = np.asarray(s, dtype=float)
        folded, beyond = _folded(places)
        panel, rise = self._local(folded)
        mapped = self._starts[panel] + rise
        return np.copysign(np.where(beyond, 2.0 - mapped, mapped), places)

    def slope(self, s: Array) -> Array:
        """X'(s) for s in [0, 1]."""
        panel, t = _panel(np.asarray(s, dtype=float))
        return _clenshaw(self._slopes, panel, t) * (2.0 * PANELS)

    def rise(self, a: Array, b: Array) -> Array:
        """X(b) - X(a) for a <= b in [0, 1], to the relative precision of the rise itself where it is over few panels."""
        first, low = self._local(np.asarray(a, dtype=float))
        last, high = self._local(np.asarray(b, dtype=float))
        between = np.where(last == first, 0.0, self._starts[last] - self._starts[first])
        for gap in (1, 2, 3):
            near = last - first == gap
            between[near] = sum(self._rises[first[near] + step] for step in range(gap))
        return between + high - low

    def inverse(self, x: Array) -> Array:
        """The places with X(s) = x, beyond the ends by reflection."""
        wanted, beyond = _folded(np.asarray(x, dtype=float))
        s_table, x_table = self._table
        s = np.interp(wanted, x_table, s_table)
        for _ in range(6):  # from a table of a thousand places two of Newton's steps are as a rule enough
            s = np.clip(s - (self(s) - wanted) / self.slope(s), 0.0, 1.0)
        return np.copysign(np.where(beyond, 2.0 - s, s), x)

    def redistributed(self, density: Array, symmetric: bool = False) -> SmoothMap:
        """The map whose equal steps take equal shares of a smoothed density, given at equal steps of this one.

        density : positive, shape (n,), from end to end. symmetric : the mirror symmetry about the middle is kept.
        """
        held = density / density.mean() + LEAST
        count = held.size - 1
        orders = np.arange(TERMS + 1)
        weights = np.full(count + 1, 2.0 / count)
        weights[[0, -1]] *= 0.5
        waves = np.cos(np.pi * orders[:, None] * np.arange(count + 1) / count)
        cosines = (waves @ (weights * held)) * np.exp(-0.5 * (np.pi * WIDTH * orders) ** 2)
        cosines[0] *= 0.5
        if symmetric:
            cosines[1::2] = 0.0
        shares = cosines[1:] / cosines[0]
        edges = np.arange(PANELS) / PANELS
        at = (edges[:, None] + (_POINTS + 1.0) / (2.0 * PANELS)).ravel()
        old_edges = _inverse_shares(shares, np.append(edges, 1.0))
        old = _inverse_shares(shares, at).reshape(PANELS, DEGREE + 1)
        # X'(s) = X_old'(xi) dxi/ds, integrated by panels, so that narrow panels keep their relative precision.
        slopes = self.slope(old.ravel()) / _share_slope(shares, old.ravel())
        series = slopes.reshape(PANELS, DEGREE + 1) @ _TO_SERIES.T
        risen = np.polynomial.chebyshev.chebint(series, lbnd=-1.0, axis=1) / (2.0 * PANELS)
        # The rise over each panel is known from the old map itself: what was where stays there.
        risen *= (self.rise(old_edges[:-1], old_edges[1:]) / risen.sum(axis=1))[:, None]
        return SmoothMap(np.array(risen.T, dtype=np.float64))

    def _local(self, s: Array) -> tuple[npt.NDArray[np.int64], Array]:
        """The panel of each place in [0, 1], and the rise of X over the panel up to it."""
        panel, t = _panel(s)
        return panel, _clenshaw(self._series, panel, t)

    @cached_property
    def _slopes(self) -> Array:
        return np.polynomial.chebyshev.chebder(self._series, axis=0)

    @cached_property
    def _table(self) -> tuple[Array, Array]:
        s = np.linspace(0.0, 1.0, 8 * PANELS + 1)
        return s, self(s)


def _panel(s: Array) -> tuple[npt.NDArray[np.int64], Array]:
    """The panel of each place, and where in it, from -1 to 1."""
    panel = np.clip((s * PANELS).astype(np.int64), 0, PANELS - 1)
    return panel, 2.0 * (s * PANELS - panel) - 1.0


def _clenshaw(series: Array, panel: npt.NDArray[np.int64], t: Array) -> Array:
    above, upper = np.zeros(t.shape), np.zeros(t.shape)
    for row in series[:0:-1]:
        above, upper = row[panel] + 2.0 * t * above - upper, above
    return series[0][panel] + t * above - upper


def _folded(places: Array) -> tuple[Array, npt.NDArray[np.bool_]]:
    """Places reflected into [0, 1] at both ends, and which lay beyond 1."""
    folded = np.abs(places)
    beyond = folded > 1.0
    return np.where(beyond, 2.0 - folded, folded), beyond


def _share_slope(shares: Array, xi: Array) -> Array:
    return np.asarray(np.polynomial.chebyshev.chebval(np.cos(np.pi * xi), np.append(1.0, shares)))


def _inverse_shares(shares: Array, s: Array) -> Array:
    """xi with S(xi) = xi + sum of shares_k sin(k pi xi)/(k pi) = s."""
    orders = np.arange(1, shares.size + 1)

    def total(xi: Array) -> Array:
        return np.asarray(xi + np.sin(np.pi * np.multiply.outer(xi, orders)) @ (shares / (np.pi * orders)))

    table = np.linspace(0.0, 1.0, 1025)
    xi = np.interp(s, total(table), table)
    for _ in range(4):
        xi = np.clip(xi - (total(xi) - s) / _share_slope(shares, xi), 0.0, 1.0)
    xi[s == 0.0], xi[s == 1.0] = 0.0, 1.0
    return xi
