"""The functions of the language on arrays: NumPy's own where there is one."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Any


@cache
def numpy_functions() -> dict[str, Callable[..., Any]]:
    """The functions of the language for arrays of floats; nan outside a domain, inf at an overflow, as NumPy has it.

    NumPy warns where that happens: whoever evaluates decides with numpy.errstate.
    """
    import numpy as np

    same = ("exp", "log", "sqrt", "sin", "cos", "tan", "sinh", "cosh", "tanh", "abs", "sign", "log1p", "expm1")

    def erf(z: Any) -> Any:
        from scipy import special  # here, because few formulas need it and loading it takes longer than most runs

        return special.erf(z)

    def cardinal(z: Any) -> Any:
        half = np.sqrt(np.abs(z)) / 2.0
        ratio = np.where(np.asarray(z) > 0.0, np.sin(half), np.sinh(half)) / np.where(half == 0.0, 1.0, half)
        return np.where(np.asarray(z) < np.pi**2, np.where(half == 0.0, 1.0, ratio * ratio), np.nan)

    def cardinal_slope(z: Any) -> Any:
        from bvp.formula.evaluate import CARDINAL_SLOPE

        z = np.asarray(z, dtype=float)
        near = np.abs(z) < 4.0
        inner = np.where(near, z, 0.0)
        series = np.zeros_like(inner)
        for coefficient in reversed(CARDINAL_SLOPE):
            series = coefficient + inner * series
        outer = np.where(near, 4.0, z)
        root = np.sqrt(np.abs(outer))
        closed = (np.where(outer > 0.0, np.sin(root), np.sinh(root)) / root - cardinal(outer)) / outer
        return np.where(z < np.pi**2, np.where(near, series, closed), np.nan)

    def fitted(part: int) -> Callable[..., Any]:
        """The fitted weight or one of its derivatives, pair by pair in a kernel."""

        def of_pairs(p: Any, z: Any) -> Any:
            from bvp.kernels.special import weight, weights

            if np.ndim(p) == 0 and np.ndim(z) == 0:
                return weight(float(p), float(z), part)
            drifts, slopes = (np.ascontiguousarray(side, dtype=float) for side in np.broadcast_arrays(p, z))
            out = np.empty(drifts.shape)
            weights(drifts, slopes, part, out)
            return out

        return of_pairs

    return {
        **{name: getattr(np, name) for name in same},
        "asin": np.arcsin,
        "acos": np.arccos,
        "atan": np.arctan,
        "erf": erf,
        "min": np.minimum,
        "max": np.maximum,
        "step_le": lambda a, b: np.where(np.less_equal(a, b), 1.0, 0.0),
        "cardinal": cardinal,
        "cardinal_slope": cardinal_slope,
        "fit": fitted(0),
        "fit_by_drift": fitted(1),
        "fit_by_slope": fitted(2),
    }
