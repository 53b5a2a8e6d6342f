"""Slab, cylinder and sphere: face areas, cell volumes and harmonic functions, as trees and as arrays.

With s = 0, 1, 2 the operator is laplacian(u) = r^-s (r^s u')' = u'' + (s/r) u', and its limit at r = 0 is
(s + 1) u''. Constant factors (2 pi, 4 pi) are left out everywhere; they cancel.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from bvp.formula.tree import Binary, Node, Number

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

EXPONENTS = {"slab": 0, "cylinder": 1, "sphere": 2}
NAMES = {exponent: name for name, exponent in EXPONENTS.items()}


def power(base: Node, exponent: int) -> Node:
    """base^exponent without the trivial powers."""
    if exponent == 0:
        return Number(1.0)
    return base if exponent == 1 else Binary("^", base, Number(float(exponent)))


def times(left: Node, right: Node) -> Node:
    """left * right, a factor 1 left out."""
    if left == Number(1.0):
        return right
    return left if right == Number(1.0) else Binary("*", left, right)


def volume(inner: Node, outer: Node, exponent: int) -> Node:
    """(outer^(s+1) - inner^(s+1))/(s+1), factored so that nothing cancels: (outer - inner) times a mean of r^s."""
    width = Binary("-", outer, inner)
    if exponent == 0:
        return width
    if exponent == 1:
        return Binary("/", Binary("*", width, Binary("+", outer, inner)), Number(2.0))
    squares = Binary("+", Binary("+", power(outer, 2), Binary("*", outer, inner)), power(inner, 2))
    return Binary("/", Binary("*", width, squares), Number(3.0))


def resistance(inner: npt.NDArray[np.float64], outer: npt.NDArray[np.float64], exponent: int) -> npt.NDArray[np.float64]:
    """The integral of r^-s from inner to outer: what a steady flux has to overcome between two radii.

    outer - inner, ln(outer/inner), 1/inner - 1/outer; infinite where inner is 0 and s > 0.
    """
    import numpy as np

    width = outer - inner
    if exponent == 0:
        return width
    with np.errstate(divide="ignore"):
        return np.log1p(width / inner) if exponent == 1 else width / (inner * outer)
