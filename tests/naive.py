"""Slow, literal, dense twins of the fast code: the central scheme, its Newton, its turning point, Romberg's table.

Written to be obviously right, one loop a formula, for a few dozen nodes. laplacian(u) + f(x, u, lam) = 0 with
laplacian(u) = u'' + (s/r) u', s = 0 slab, 1 cylinder, 2 sphere.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[Any]
Source = Callable[[Any, Any, Any], Any]


@dataclass(frozen=True)
class Fixed:
    """An end where u has a given value."""

    value: float = 0.0


@dataclass(frozen=True)
class Cooled:
    """An end where (outward derivative of u) + Bi (u - ambient) = 0; Bi = 0 is a plane of symmetry."""

    bi: float = 0.0
    ambient: float = 0.0


@dataclass(frozen=True)
class NaiveProblem:
    """laplacian(u) + source(x, u, lam) = 0 on [left, right]; source_u is the derivative of the source by u."""

    source: Source
    source_u: Source
    left: float = 0.0
    right: float = 1.0
    left_end: Fixed | Cooled = Fixed()
    right_end: Fixed | Cooled = Fixed()
    exponent: int = 0


def nodes(problem: NaiveProblem, intervals: int) -> Array:
    """The N + 1 nodes of the uniform grid."""
    return np.array([problem.left + (problem.right - problem.left) * k / intervals for k in range(intervals + 1)])


def residual(problem: NaiveProblem, u: Array, lam: Any) -> Array:
    """The difference equations, shape (N + 1,): one row a node, a fixed end's row being u - value.

    (u[k+1] - 2 u[k] + u[k-1])/h^2 + (s/x[k]) (u[k+1] - u[k-1])/(2h) + f(x[k], u[k], lam); where x[k] = 0 on a cylinder or sphere the
    limit (s + 1) u''; at an end with a derivative the node beyond it comes from the condition, differenced centrally.
    """
    intervals = len(u) - 1
    x = nodes(problem, intervals)
    h = (problem.right - problem.left) / intervals
    rows = np.zeros(intervals + 1, dtype=np.result_type(u, lam))
    for k in range(intervals + 1):
        end = problem.left_end if k == 0 else problem.right_end if k == intervals else None
        if isinstance(end, Fixed):
            rows[k] = u[k] - end.value
            continue
        if isinstance(end, Cooled):
            slope = -end.bi * (u[k] - end.ambient)  # along the outward normal
            before, after = (u[1] + 2 * h * slope, u[1]) if k == 0 else (u[k - 1], u[k - 1] + 2 * h * slope)
        else:
            before, after = u[k - 1], u[k + 1]
        second = (after - 2 * u[k] + before) / h**2
        first = (after - before) / (2 * h)
        if problem.exponent > 0 and x[k] == 0.0:
            laplacian = (problem.exponent + 1) * second
        elif problem.exponent > 0:
            laplacian = second + problem.exponent / x[k] * first
        else:
            laplacian = second
        rows[k] = laplacian + problem.source(x[k], u[k], lam)
    return rows


def jacobian(problem: NaiveProblem, u: Array, lam: Any) -> Array:
    """The dense derivative of the rows by the nodal values, shape (N + 1, N + 1).

    The rows without a source are affine in u, so their derivative is a difference of two of them; the source's is given.
    """
    size = len(u)
    sourceless = NaiveProblem(
        lambda x, u, lam: 0.0, lambda x, u, lam: 0.0, problem.left, problem.right, problem.left_end, problem.right_end, problem.exponent
    )
    matrix = np.zeros((size, size), dtype=np.result_type(u, lam))
    nothing = residual(sourceless, np.zeros(size), 0.0)
    for column in range(size):
        unit = np.zeros(size)
        unit[column] = 1.0
        matrix[:, column] = residual(sourceless, unit, 0.0) - nothing
    x = nodes(problem, size - 1)
    for k in range(size):
        end = problem.left_end if k == 0 else problem.right_end if k == size - 1 else None
        if not isinstance(end, Fixed):
            matrix[k, k] += problem.source_u(x[k], u[k], lam)
    return matrix


def newton(problem: NaiveProblem, u: Array, lam: float, steps: int = 50) -> Array:
    """A state of the difference equations at one parameter value, by undamped Newton; ArithmeticError where it does not settle."""
    u = np.array(u, dtype=float)
    for _ in range(steps):
        change = np.linalg.solve(jacobian(problem, u, lam), -residual(problem, u, lam))
        u = u + change
        if not np.all(np.isfinite(u)):
            break
        if np.max(np.abs(change)) <= 1e-13 * max(1.0, float(np.max(np.abs(u)))):
            return u
    raise ArithmeticError(f"no state at lam = {lam} from this start after {steps} steps")


def turning_point(problem: NaiveProblem, u: Array, lam: float, steps: int = 50) -> tuple[float, Array, Array]:
    """The turning point of the difference equations nearest to a start: (lam, u, null vector).

    Newton on the rows F(u, lam), F_u(u, lam) v, v.v - 1, with the derivative of all of them by an imaginary step of 1e-30
    (exact to rounding for analytic sources). ArithmeticError where it does not settle.
    """
    size = len(u)
    _, _, right = np.linalg.svd(jacobian(problem, u, lam))
    unknown = np.concatenate([u, right[-1], [lam]])

    def rows(z: Array) -> Array:
        state, null, parameter = z[:size], z[size : 2 * size], z[-1]
        return np.concatenate(
            [residual(problem, state, parameter), jacobian(problem, state, parameter) @ null, [np.sum(null * null) - 1.0]]
        )

    for _ in range(steps):
        derivative = np.zeros((2 * size + 1, 2 * size + 1))
        for column in range(2 * size + 1):
            stepped = unknown.astype(complex)
            stepped[column] += 1e-30j
            derivative[:, column] = rows(stepped).imag / 1e-30
        change = np.linalg.solve(derivative, -rows(unknown))
        unknown = unknown + change
        if not np.all(np.isfinite(unknown)):
            break
        if np.max(np.abs(change)) <= 1e-12 * max(1.0, float(np.max(np.abs(unknown)))):
            return float(unknown[-1]), unknown[:size], unknown[size : 2 * size]
    raise ArithmeticError(f"no turning point near lam = {lam} after {steps} steps")


def romberg(values: Sequence[float], exponents: Sequence[float], ratio: float = 2.0) -> list[list[float]]:
    """The triangular table of a sequence on steps h, h/ratio, h/ratio^2, …: row i has i + 1 entries, its last the best.

    T[i][0] = values[i];  T[i][j] = T[i][j-1] + (T[i][j-1] - T[i-1][j-1])/(ratio^exponents[j-1] - 1).
    """
    table: list[list[float]] = []
    for i, value in enumerate(values):
        row = [value]
        for j in range(1, min(i, len(exponents)) + 1):
            row.append(row[j - 1] + (row[j - 1] - table[i - 1][j - 1]) / (ratio ** exponents[j - 1] - 1.0))
        table.append(row)
    return table
