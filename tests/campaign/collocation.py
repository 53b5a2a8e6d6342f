"""Turning points by Chebyshev collocation: the branch followed in floats, the turning point itself refined in 34 digits.

Unknown are w = u'' (on [0, 1]) at the points, u(0), u'(0) and the traced parameter; u and u' are w integrated exactly.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt
from mpmath import mp, mpf

from tests.campaign.chebyshev import Panels, panels
from tests.campaign.model import Model

Array = npt.NDArray[np.float64]
DIGITS = 34


class Collocated:
    """A model on panels of n points each: rows, derivatives, and what a turning point needs."""

    def __init__(self, model: Model, n: int) -> None:
        self.model, self.n = model, n
        self.breaks = (0.0, *model.breaks, 1.0)
        self.panels: Panels = panels(n, self.breaks)
        u_rows, p_rows = self.panels.matrices
        size = len(u_rows) - 1
        self.size = size + 2
        self.xi = np.array(self.panels.points)
        self.u_at, self.p_at = u_rows[:-1], p_rows[:-1]
        self.u_ends = np.array([np.eye(self.size)[size], u_rows[-1]])
        self.p_ends = np.array([np.eye(self.size)[size + 1], p_rows[-1]])
        self.functions = model.compiled("numpy")

    def parts(self, y: Array, lam: float) -> list[list[Any]]:
        """The nine parts at the points, at the left and at the right end."""
        numbers = self.model.numbers(lam)
        with np.errstate(all="ignore"):
            inner = self.functions[0](self.xi, self.u_at @ y, self.p_at @ y, y[:-2], *numbers)
            found: list[list[Any]] = [[np.broadcast_to(np.asarray(one, dtype=float), self.xi.shape) for one in inner]]
            for end in (0, 1):
                values = self.functions[end + 1](float(end), float(self.u_ends[end] @ y), float(self.p_ends[end] @ y), 0.0, *numbers)
                found.append([float(one) for one in values])
        return found

    def residual(self, parts: list[list[Any]]) -> Array:
        """The rows: the equation at the points, then the two conditions."""
        return np.append(parts[0][0], [parts[1][0], parts[2][0]])

    def jacobian(self, parts: list[list[Any]]) -> Array:
        """The rows' derivative by the unknowns."""
        matrix = np.zeros((self.size, self.size))
        matrix[:-2] = parts[0][1][:, None] * self.u_at + parts[0][2][:, None] * self.p_at
        matrix[:-2, :-2] += np.eye(self.size - 2)
        for end in (0, 1):
            matrix[self.size - 2 + end] = parts[end + 1][1] * self.u_ends[end] + parts[end + 1][2] * self.p_ends[end]
        return matrix

    def by_parameter(self, parts: list[list[Any]]) -> Array:
        """The rows' derivative by the traced parameter."""
        return np.append(parts[0][3], [parts[1][3], parts[2][3]])

    def turning_jacobian(self, parts: list[list[Any]], null: Array, pick: Array) -> Array:
        """The derivative of (F, F_y null, pick.null - 1) by (y, null, lam)."""
        m, f_y = self.size, self.jacobian(parts)
        matrix = np.zeros((2 * m + 1, 2 * m + 1))
        matrix[:m, :m] = matrix[m : 2 * m, m : 2 * m] = f_y
        matrix[:m, -1] = self.by_parameter(parts)
        places = [(self.u_at, self.p_at, slice(m, 2 * m - 2))]
        places += [(self.u_ends[e : e + 1], self.p_ends[e : e + 1], slice(2 * m - 2 + e, 2 * m - 1 + e)) for e in (0, 1)]
        for (u_rows, p_rows, rows), part in zip(places, parts, strict=True):
            du, dp = u_rows @ null, p_rows @ null
            _, _, _, _, uu, up, pp, ul, pl = (np.atleast_1d(one) for one in part)
            matrix[rows, :m] = (uu * du + up * dp)[:, None] * u_rows + (up * du + pp * dp)[:, None] * p_rows
            matrix[rows, -1] = ul * du + pl * dp
        matrix[-1, m : 2 * m] = pick
        return matrix

    def newton(self, y: Array, lam: float, row: Array, target: float, steps: int = 12) -> tuple[Array, float] | None:
        """A state with row.(y, lam) = target (an arclength or a fixed parameter); None where Newton does not settle."""
        for _ in range(steps):
            parts = self.parts(y, lam)
            rows = np.append(self.residual(parts), row @ np.append(y, lam) - target)
            matrix = np.vstack([np.column_stack([self.jacobian(parts), self.by_parameter(parts)]), row])
            if not (np.all(np.isfinite(matrix)) and np.all(np.isfinite(rows))):
                return None
            change = np.linalg.solve(matrix, -rows)
            y, lam = y + change[:-1], lam + float(change[-1])
            if np.max(np.abs(change)) <= 1e-11 * (1.0 + np.max(np.abs(y))):
                return y, lam
        return None

    def tangent(self, y: Array, lam: float, along: Array) -> Array:
        """The unit tangent (dy, dlam) whose product with `along` is positive."""
        parts = self.parts(y, lam)
        matrix = np.vstack([np.column_stack([self.jacobian(parts), self.by_parameter(parts)]), along])
        direction = np.linalg.solve(matrix, np.append(np.zeros(self.size), 1.0))
        return np.asarray(direction / np.linalg.norm(direction))


@dataclass(frozen=True)
class Turning:
    """A turning point in floats: unknowns, null vector, scaled parameter."""

    y: Array
    null: Array
    lam: float


def sharpened(system: Collocated, y: Array, null: Array, lam: float, steps: int = 20) -> Turning:
    """Newton on (F, F_y null, pick.null - 1); ArithmeticError where it does not settle."""
    pick = null / float(null @ null)
    m = system.size
    for _ in range(steps):
        parts = system.parts(y, lam)
        rows = np.concatenate([system.residual(parts), system.jacobian(parts) @ null, [pick @ null - 1.0]])
        matrix = system.turning_jacobian(parts, null, pick)
        if not np.all(np.isfinite(matrix)):
            break
        change = np.linalg.solve(matrix, -rows)
        y, null, lam = y + change[:m], null + change[m : 2 * m], lam + float(change[-1])
        if np.max(np.abs(change[:m])) <= 1e-10 * (1.0 + np.max(np.abs(y))):
            return Turning(y, null, lam)
    raise ArithmeticError("the turning point did not settle on these points")


def moved(vector: Array, old: Collocated, new: Collocated) -> Array:
    """Unknowns carried over to other points, through the interpolant of w."""
    w = [float(one) for one in vector[:-2]]
    values = [old.panels.value(w, float(vector[-2]), float(vector[-1]), float(x))[2] for x in new.xi]
    return np.array([*values, vector[-2], vector[-1]])


def refined(system: Collocated, turning: Turning, passes: int = 6) -> tuple[Any, list[Any]]:
    """(lam scaled, y) in 34 digits by iterative refinement: rows in mpmath, corrections by the matrix in floats."""
    with mp.workdps(DIGITS):
        functions, m = system.model.compiled("mpmath"), system.size
        exact = panels(system.n, system.breaks, DIGITS)
        y, null, lam = [mpf(one) for one in turning.y], [mpf(one) for one in turning.null], mpf(turning.lam)
        pick = turning.null / float(turning.null @ turning.null)
        inverse = np.linalg.inv(system.turning_jacobian(system.parts(turning.y, turning.lam), turning.null, pick))
        for _ in range(passes):
            numbers = system.model.numbers(lam, exact=True)
            us, ps, u_end, p_end = exact.integrals(y[:-2], y[-2], y[-1])
            du, dp, du_end, dp_end = exact.integrals(null[:-2], null[-2], null[-1])
            rows, variation = [], []
            for x, u, p, w, d, e, f in zip(exact.points, us, ps, y[:-2], du, dp, null[:-2], strict=True):
                part = functions[0](x, u, p, w, *numbers)
                rows.append(part[0])
                variation.append(part[1] * d + part[2] * e + f)
            for end, (u, p, d, e) in enumerate(((y[-2], y[-1], null[-2], null[-1]), (u_end, p_end, du_end, dp_end))):
                part = functions[end + 1](mpf(end), u, p, mpf(0), *numbers)
                rows.append(part[0])
                variation.append(part[1] * d + part[2] * e)
            rows += [*variation, mp.fdot(zip((mpf(one) for one in pick), null, strict=True)) - 1]
            size = max(abs(one) for one in rows)
            if size == 0:
                break
            change = inverse @ np.array([float(one / size) for one in rows])
            y = [one - size * mpf(step) for one, step in zip(y, change[:m], strict=True)]
            null = [one - size * mpf(step) for one, step in zip(null, change[m : 2 * m], strict=True)]
            lam -= size * mpf(change[-1])
        return lam, y
