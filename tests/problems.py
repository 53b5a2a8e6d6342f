"""The problems that tests of several subjects trace, each with the conditions and names used in `reference`."""

from __future__ import annotations

from bvp import Problem

GEOMETRIES = ("slab", "cylinder", "sphere")


def interval(source: str = "lam*exp(u)", **parameters: float) -> Problem:
    """u'' + source = 0 on [0, 1], u = 0 at both ends."""
    return Problem(f"u'' + {source} = 0", x=(0, 1), conditions=["u(0) = 0", "u(1) = 0"], parameters={"lam": 0.0, **parameters})


def body(geometry: str, source: str = "lam*exp(u)", bi: float | None = None, **parameters: float) -> Problem:
    """laplacian(u) + source = 0 on half the width or the radius 1, even in the middle; u(1) = 0, or u'(1) + Bi u(1) = 0."""
    ends = ["u(1) = 0" if bi is None else "u'(1) + Bi*u(1) = 0"]
    if geometry == "slab":
        ends.insert(0, "u'(0) = 0")
    cooling = {} if bi is None else {"Bi": bi}
    return Problem(f"laplacian(u) + {source} = 0", geometry=geometry, conditions=ends, parameters={"lam": 0.0, **cooling, **parameters})
