"""Turning points of the cube and the short cylinder with the exponential source, by Chebyshev collocation in the even directions.

Only a few digits are recorded, so double precision and a dozen nodes a direction do.
"""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

Matrix = npt.NDArray[np.float64]


def even_operator(nodes: int, exponent: int) -> Matrix:
    """u'' + (s/r) u' on the Chebyshev points of (0, 1) for even u with u(1) = 0, shape (nodes, nodes)."""
    size = 2 * nodes + 1
    k = np.arange(size + 1)
    x = np.cos(np.pi * k / size)
    weight = np.where((k == 0) | (k == size), 2.0, 1.0) * (-1.0) ** k
    gap = x[:, None] - x[None, :] + np.eye(size + 1)
    first = weight[:, None] / weight[None, :] / gap
    first -= np.diag(first.sum(axis=1))
    second = first @ first
    # Fold the left half onto the right one: u(-x) = u(x); the first node is the end with u = 0.
    folded = second[1 : nodes + 1, 1 : nodes + 1] + second[1 : nodes + 1, nodes + 1 : 2 * nodes + 1][:, ::-1]
    slope = first[1 : nodes + 1, 1 : nodes + 1] + first[1 : nodes + 1, nodes + 1 : 2 * nodes + 1][:, ::-1]
    return np.asarray(folded + exponent * slope / x[1 : nodes + 1, None])


def turning_point(laplacian: Matrix) -> float:
    """lam at the fold of laplacian(u) + lam e^u = 0 nearest to u near 1, by Newton on the bordered rows from a small state."""
    size = len(laplacian)
    # March in the value at the node nearest to the middle (the last one), lam unknown, until lam falls; then a parabola.
    u, lam = np.zeros(size), 0.1
    samples = []
    for middle in np.arange(0.1, 3.0, 0.05):
        for _ in range(30):
            source = lam * np.exp(u)
            matrix = np.block([[laplacian + np.diag(source), np.exp(u)[:, None]], [np.eye(size)[-1:], np.zeros((1, 1))]])
            change = np.linalg.solve(matrix, -np.append(laplacian @ u + source, u[-1] - middle))
            u, lam = u + change[:-1], float(lam + change[-1])
            if np.max(np.abs(change)) < 1e-11:
                break
        samples.append((middle, lam))
        if len(samples) > 3 and samples[-3][1] < samples[-4][1]:
            break
    near = np.array(samples[-6:])
    fit = np.polynomial.Polynomial.fit(near[:, 0], near[:, 1], 5)
    return float(max(fit(root.real) for root in fit.deriv().roots() if abs(root.imag) < 1e-9 and near[0, 0] < root.real < near[-1, 0]))


def values(nodes: int = 9) -> dict[str, Any]:
    """Cube of half width 1 and cylinder of radius 1 and half height 1."""
    slab, cylinder, unit = even_operator(nodes, 0), even_operator(nodes, 1), np.eye(nodes)
    short = np.kron(cylinder, unit) + np.kron(unit, slab)
    cube = np.kron(np.kron(slab, unit), unit) + np.kron(np.kron(unit, slab), unit) + np.kron(np.kron(unit, unit), slab)
    return {"short cylinder, turning point": turning_point(short), "cube, turning point": turning_point(cube)}
