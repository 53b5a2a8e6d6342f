"""A branch followed by arclength on collocation points from its start to its first turning points, and states beside them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt
import sympy

from tests.campaign.collocation import Collocated, Turning, sharpened
from tests.campaign.model import XI, Model, X

Array = npt.NDArray[np.float64]
LADDER = (24, 36, 54, 80, 120, 180)
LONGEST = 700  # steps


@dataclass(frozen=True)
class Followed:
    """The points passed, as (y, lam scaled), and the turning points met, with the index of the point after each."""

    system: Collocated
    points: tuple[tuple[Array, float], ...]
    turnings: tuple[tuple[int, Turning], ...]


def first_state(system: Collocated, lam: float) -> tuple[Array, float]:
    """The state at the start, by Newton from the model's guess."""
    model = system.model
    length = model.right - model.left
    values = dict(zip(model.symbols, model.numbers(lam * model.along_unit), strict=True))
    guess = ((model.guess - model.base) / model.unit).subs(X, model.left + length * XI).subs(values)
    forms = [sympy.lambdify(XI, sympy.diff(guess, XI, order), "numpy") for order in (2, 0, 1)]
    y = np.array([*np.broadcast_to(forms[0](system.xi), system.xi.shape), forms[1](0.0), forms[2](0.0)], dtype=float)
    found = system.newton(y, lam, np.eye(system.size + 1)[-1], lam, steps=40)
    if found is None:
        raise ArithmeticError("no state at the start")
    return found


def metric(system: Collocated, vector: Array) -> Array:
    """The row that takes the product with a direction: mean product of nodal u, plus that of the scaled parameter."""
    du = system.u_at @ vector[:-1]
    return np.append(du @ system.u_at / len(du), vector[-1])


def unit_tangent(system: Collocated, y: Array, lam: float, along: Array) -> Array:
    """The tangent of length 1 in the metric, on the side of `along`."""
    direction = system.tangent(y, lam, metric(system, along))
    return np.asarray(direction / np.sqrt(metric(system, direction) @ direction))


def follow(model: Model, start: float, direction: str, wanted: int = 1, beyond: int = 0, n: int = 36, largest: float = 0.12) -> Followed:
    """The branch from `start` (in the parameter's own unit) through `wanted` turning points and up to `beyond` points further.

    The step is halved where the direction turns by more than 8 degrees or Newton fails. ArithmeticError where a turning point
    is not reached.
    """
    system = Collocated(model, n)
    y, lam = first_state(system, start / model.along_unit)
    along = np.zeros(system.size + 1)
    along[-1] = 1.0 if direction == "up" else -1.0
    tangent = unit_tangent(system, y, lam, along)
    points: list[tuple[Array, float]] = [(y, lam)]
    turnings: list[tuple[int, Turning]] = []
    step, left = 0.01, beyond
    for _ in range(LONGEST):
        row = metric(system, tangent)
        here = np.append(y, lam)
        guess = here + step * tangent
        found = system.newton(guess[:-1], guess[-1], row, row @ here + step)
        turned = unit_tangent(system, *found, tangent) if found else tangent
        if found is None or row @ turned < 0.99:
            step /= 2
            if step < 1e-9:
                break
            continue
        if turned[-1] * tangent[-1] < 0:
            if len(turnings) >= wanted:  # a further one is nobody's business, and the points may not resolve it
                break
            half = np.append(y + found[0], lam + found[1]) / 2
            turning = sharpened(system, half[:-1], turned[:-1] + tangent[:-1], half[-1])
            if abs(turning.lam - lam) > 0.5 * step + 1e-6:
                raise ArithmeticError("the turning point found is not the one passed")
            turnings.append((len(points), turning))
        y, lam = found
        points.append(found)
        if len(turnings) >= wanted:
            left -= 1
            if left < 0:
                break
        step = min(step * (1.5 if row @ turned > 0.998 else 1.0), largest)
        tangent = turned
    if len(turnings) < wanted:
        raise ArithmeticError(f"{len(turnings)} turning points on {len(points)} points, the last at {lam}")
    return Followed(system, tuple(points), tuple(turnings))


def crossings(followed: Followed, lam: float) -> list[tuple[Array, float]]:
    """The states with a given scaled parameter on the points passed, in their order."""
    states = []
    for (y0, lam0), (y1, lam1) in zip(followed.points, followed.points[1:], strict=False):
        if (lam0 - lam) * (lam1 - lam) < 0:
            share = (lam - lam0) / (lam1 - lam0)
            found = followed.system.newton(y0 + share * (y1 - y0), lam, np.eye(followed.system.size + 1)[-1], lam, steps=30)
            if found is not None:
                states.append(found)
    return states


def extreme(exact: Any, y: Any, smallest: bool = False) -> Any:
    """The largest (or smallest) u of a state, also between the points, in the arithmetic of its panels."""
    points = exact.points
    us, ps, end, _ = exact.integrals(y[:-2], y[-2], y[-1])
    values = [y[-2], *us, end]
    best = (min if smallest else max)(range(len(values)), key=values.__getitem__)
    if best in (0, len(values) - 1):
        return values[best]
    x = points[best - 1] - ps[best - 1] / y[best - 1]
    u = values[best]
    for _ in range(60):
        if not 0 < x < 1:
            return values[best]
        u, p, w = exact.value(y[:-2], y[-2], y[-1], x)
        if w == 0 or abs(p / w) < (1e-33 if exact.digits else 1e-15):
            break
        x -= p / w
    return u
