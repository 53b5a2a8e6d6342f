"""The functions of the formula language for NumPy arrays."""

from __future__ import annotations

from collections.abc import Callable
from functools import cache
from typing import Any

from bvp.formula.evaluate import float_functions


@cache
def numpy_functions() -> dict[str, Callable[..., Any]]:
    """The functions of the language for arrays; nan and inf where there is no value (warnings are the caller's)."""
    import numpy as np

    same = ("exp", "log", "sqrt", "sin", "cos", "tan", "sinh", "cosh", "tanh", "abs", "sign", "log1p", "expm1")
    table: dict[str, Callable[..., Any]] = {name: getattr(np, name) for name in same}
    for name in ("erf", "cardinal", "cardinal_slope"):
        table[name] = np.vectorize(float_functions()[name], otypes=[float])
    return {
        **table,
        "asin": np.arcsin,
        "acos": np.arccos,
        "atan": np.arctan,
        "min": np.minimum,
        "max": np.maximum,
        "step_le": lambda a, b: np.less_equal(a, b).astype(float) if isinstance(a, np.ndarray) or isinstance(b, np.ndarray) else float(a <= b),
    }
