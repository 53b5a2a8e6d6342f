"""Damped Newton's method on a bordered system: the state and the parameter together, one elimination a trial.

A trial is accepted when the correction computed there is smaller than the last one (the natural monotonicity test, with
the fresh matrix in place of the old one; Deuflhard, Newton Methods for Nonlinear Problems, 2004, section 2.1.3, from
memory). A trial outside of the domain of a formula is one without a finite correction: the step is halved.
"""

from __future__ import annotations

import math
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from bvp.discrete_system import DiscreteSystem
from bvp.dot import dot
from bvp.ledger import Entry, ledger_in_use

Array = npt.NDArray[np.float64]

SMALLEST_DAMPING = 2.0**-20
ROUNDING = 1e-11  # a correction below this that no longer shrinks is rounding, not failure
OWN_SIZE, FOR_PARAMETER = 1e-2, 4  # the parameter's correction as a share of itself, and the steps that are spent on it at most


class Border(NamedTuple):
    """The row that closes the system: factor * direction . (u - anchor) + corner * (p - anchor_parameter) = distance."""

    direction: Array
    factor: float
    corner: float
    anchor: Array
    anchor_parameter: float
    distance: float = 0.0

    def value(self, u: Array, parameter: float) -> float:
        """How far (u, p) is from satisfying it."""
        along = self.factor * dot(self.direction, u - self.anchor) if self.factor else 0.0
        return along + self.corner * (parameter - self.anchor_parameter) - self.distance


def no_value(system: DiscreteSystem, where: str) -> str:
    """What is said where the rows are not finite; a scheme that ends before its equation does adds its own sentence."""
    limits = system.of.scheme.limits
    return f"the equations have no finite value {where}" + (f" ({limits})" if limits else "")


def held_parameter(system: DiscreteSystem, parameter: float) -> Border:
    """The border that keeps the parameter where it is."""
    nothing = np.zeros(system.size)
    return Border(nothing, 0.0, 1.0, nothing, parameter)


class Scales(NamedTuple):
    """What one unit of change is: of the state (root mean square over the nodes) and of the parameter."""

    state: float
    parameter: float

    def size(self, squares: float, nodes: int, parameter: float) -> float:
        """The norm of a change with that sum of squares, and that change of the parameter."""
        return math.hypot(math.sqrt(squares / nodes) / self.state, parameter / self.parameter) if squares >= 0.0 else math.nan


class Corrected(NamedTuple):
    """Where Newton's method ended: `ok`, or not with the reason; the tangent there, not normalised.

    positive and negative count the pivots' signs (negative = directions in which the state returns), alike is whether
    all neighbours couple with one sign, without which the counts mean nothing, coupling is that sign.
    """

    u: Array
    parameter: float
    tangent: Array
    pace: float
    ok: bool
    reason: str
    steps: int
    sweeps: int
    first: float
    last: float
    positive: int
    negative: int
    alike: bool
    coupling: float


def correct(
    system: DiscreteSystem,
    u: Array,
    parameter: float,
    border: Border,
    scales: Scales,
    *,
    tolerance: float = 1e-9,
    most_steps: int = 12,
    smallest_damping: float = 1.0 / 16.0,
    monotone: bool = True,
) -> Corrected:
    """Newton's method from (u, parameter) to the state that also satisfies the border row.

    Ends with ok where the next correction would be below `tolerance` in the norm of `scales`, else with a reason. The
    arrays given are not changed. monotone = False takes every step whose correction is finite, shrinking or not.
    """
    ledger = ledger_in_use()
    how = {"tolerance": tolerance, "most_steps": most_steps, "smallest_damping": smallest_damping, "monotone": monotone}
    if ledger is None:
        return _corrected(system, u, parameter, border, scales, **how)
    key = (float(system.size), float(parameter), float(border.distance), float(tolerance))
    found = ledger.known(key)
    if found is None:
        found = _corrected(system, u, parameter, border, scales, **how)
        ledger.note(Entry(key, found))
    return found


def _corrected(
    system: DiscreteSystem,
    u: Array,
    parameter: float,
    border: Border,
    scales: Scales,
    *,
    tolerance: float,
    most_steps: float,
    smallest_damping: float,
    monotone: float,
) -> Corrected:
    nodes = system.grid.intervals + 1
    u = u.copy()
    trial, step = np.empty_like(u), np.empty_like(u)
    gap = border.value(u, parameter)
    info = system.sweep(u, parameter, border.direction, border.factor, border.corner, gap)
    first = norm = scales.size(info[2], nodes, info[0])
    sweeps, taken = 1, 0
    contraction, damping = 1.0, 1.0
    reason = "" if math.isfinite(norm) else no_value(system, "at the first guess")

    def ended(why: str) -> Corrected:
        return Corrected(
            u,
            parameter,
            system.tangent.copy(),
            float(info[1]),
            not why,
            why,
            taken,
            sweeps,
            first,
            norm,
            int(info[5]),
            int(info[6]),
            info[7] == 0.0,
            float(info[8]),
        )

    while not reason:
        # After a full step with contraction c the next correction is about c times the square of this one over the last.
        close = norm <= tolerance or (damping == 1.0 and taken > 0 and norm * contraction * contraction <= tolerance and contraction < 0.05)
        # A parameter far below its scale is not seen in the norm; the tangent is that of the last state swept, and its sign counts.
        if close and (taken >= FOR_PARAMETER or abs(info[0]) <= OWN_SIZE * abs(parameter + info[0])):
            u += system.step
            parameter += float(info[0])
            taken += 1
            return ended("")
        if taken == most_steps:
            reason = f"no convergence in {most_steps} steps (the last correction is {norm:.1e} of the state, {tolerance:.0e} is asked for)"
            break
        np.copyto(step, system.step)
        change, damping = float(info[0]), min(1.0, 2.0 * damping)
        while True:
            np.multiply(step, damping, out=trial)
            trial += u
            moved = parameter + damping * change
            remaining = gap * (1.0 - damping)
            info = system.sweep(trial, moved, border.direction, border.factor, border.corner, remaining)
            sweeps += 1
            after = scales.size(info[2], nodes, info[0])
            if math.isfinite(after) and (not monotone or after <= (1.0 - damping / 4.0) * norm or (after < ROUNDING and damping == 1.0)):
                break
            damping /= 2.0
            if damping < smallest_damping:
                outside = no_value(system, "near here") if not math.isfinite(after) else "Newton's steps no longer shrink the correction"
                reason = f"{outside} (after {taken} steps, correction {norm:.1e} of the state)"
                break
        if reason:
            break
        contraction = after / norm
        if after < ROUNDING and contraction > 0.5:
            tolerance = max(tolerance, after)
        norm, gap, parameter = after, remaining, moved
        u, trial = trial, u
        taken += 1
    info = system.sweep(u, parameter, border.direction, border.factor, border.corner, gap)
    return ended(reason)
