"""The inner product of long vectors on one thread."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]

LONG = 4096  # below, BLAS stays on one thread and is three times as fast


def dot(u: Array, v: Array) -> float:
    """The sum of u_k v_k.

    Long ones not by BLAS, which starts threads for long vectors: on a machine with other work they wait for each other, and a sum
    of ten thousand products was seen to take eight milliseconds.
    """
    return float(np.dot(u, v)) if u.size < LONG else float(np.einsum("i,i->", u, v))
