"""Solve a problem at given parameter values on one grid: one state of the difference scheme."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.adapt import MOST_MOVES, Adaptation, adaptation, moved_over
from bvp.discrete_system import DiscreteSystem
from bvp.discretize import discretization
from bvp.errors import InputError, nearest
from bvp.grid import Grid
from bvp.newton import Corrected, Scales, correct, held_parameter
from bvp.problem import Problem
from bvp.schemes import Scheme
from bvp.state import State

Array = npt.NDArray[np.float64]

MOST_STEPS = 60
POLISHED = 1e-13  # of the state: the last correction asked for, near the rounding of the solves


def solve(
    problem: Problem,
    at: Mapping[str, float] | None = None,
    *,
    intervals: int = 200,
    scheme: str | Scheme = "central",
    grid: str | Grid = "uniform",
    guess: State | Array | None = None,
    extrapolate: bool = False,
    compiled: bool = True,
) -> State:
    """One state of the scheme at the given parameter values, by damped Newton from the initial guess.

    Ends with `state.ok`, or with the last iterate and `state.reason`. Which of several states is found depends on the
    guess; tracing a branch tells how many there are. grid : "uniform", "adaptive" (nodes follow the state; what no grid
    could be found for is said in the reason) or a Grid. extrapolate : the profile is that of halved steps taken to zero,
    and `state.error` an estimate of its largest error. InputError where the problem or scheme cannot be discretized.
    """
    if isinstance(grid, str) and grid not in ("uniform", "adaptive"):
        raise InputError(f'grid = "{grid}" is not known. {nearest(grid, ["uniform", "adaptive"])}')
    stated = problem.with_parameters(at or {})
    used = grid if isinstance(grid, Grid) else Grid(intervals)
    along = next(iter(at or {}), None)
    system = discretization(stated, scheme, along, uniform=used.uniform, compiled=compiled).on(used, stated.parameters)
    parameter = stated.parameters.get(system.of.along, 0.0)
    start = system.guess(parameter) if guess is None else np.asarray(guess.nodal if isinstance(guess, State) else guess, dtype=float)
    found = solved(system, start, parameter, insist=True)
    adapting = adaptation(stated, scheme, along, intervals, compiled) if grid == "adaptive" else None
    if adapting is not None:
        system, found = _settled(adapting, system, found)
    state = state_of(system, found)
    if extrapolate and state.ok:
        from bvp.extrapolated_state import extrapolated  # which solves on coarser grids

        profile, error = extrapolated(system, found)
        return replace(state, u=profile, error=error)
    return state


def _settled(adapting: Adaptation, system: DiscreteSystem, found: Corrected) -> tuple[DiscreteSystem, Corrected]:
    """The grid that a state settles on and the state there, each grid's state the guess for the next."""
    for _ in range(MOST_MOVES):
        following = adapting.better(system, found.u, found.parameter) if found.ok else None
        if following is None:
            return system, found
        again = solved(following, moved_over(found.u, system, following), found.parameter)
        if not again.ok:
            return system, found._replace(ok=False, reason=f"the state is not resolved: on a grid that follows it, {again.reason}")
        system, found = following, again
    if adapting.better(system, found.u, found.parameter) is None:
        return system, found
    return system, found._replace(ok=False, reason=f"the state is not resolved: its nodes still move after {MOST_MOVES} grids")


def solved(system: DiscreteSystem, u: Array, parameter: float, insist: bool = False) -> Corrected:
    """Newton's method at a fixed parameter from a profile, damped as far as it takes.

    insist : where corrections no longer shrink, which far from a state says little, it is gone through again without
    that test; steps are then shortened only where the equations have no value.
    """
    spread = float(np.sqrt(np.mean(u[1:-1] ** 2)))
    scale = max(spread, 1e-3 * _first_step(system, u, parameter), 1e-300)
    how: dict[str, Any] = {"tolerance": POLISHED, "most_steps": MOST_STEPS, "smallest_damping": 2.0**-20}
    scales, border = Scales(scale, max(abs(parameter), 1.0)), held_parameter(system, parameter)
    found = correct(system, u, parameter, border, scales, **how)
    if found.ok or not insist:
        return found
    again = correct(system, u, parameter, border, scales, monotone=False, **how)
    return again if again.ok else found


def _first_step(system: DiscreteSystem, u: Array, parameter: float) -> float:
    border = held_parameter(system, parameter)
    info = system.sweep(u, parameter, border.direction, 0.0, 1.0, 0.0)
    size = float(np.sqrt(info[2] / (system.grid.intervals + 1)))
    return size if np.isfinite(size) else 0.0


def residual_of(system: DiscreteSystem, u: Array, parameter: float) -> float:
    """The largest over the rows of |row| over the sum of the sizes of its terms: u's times their coefficients, and the rest."""
    rows = system.stored_rows(u, parameter)
    used = system.band.rows
    values = np.pad(u, 1)
    middle = np.clip(used, 1, system.size - 2)  # a condition is a row of the end node
    parts = np.stack([rows[1 + offset, used] * values[middle + offset] for offset in range(3)])
    residual = rows[0, used]
    sizes = np.abs(parts).sum(axis=0) + np.abs(residual - parts.sum(axis=0))
    with np.errstate(all="ignore"):
        shares = np.where(sizes > 0, np.abs(residual) / sizes, np.abs(residual))
    return float(np.max(shares))


def state_of(system: DiscreteSystem, found: Corrected) -> State:
    """The record of what Newton's method found."""
    fixed = {**system.values, system.of.along: found.parameter} if system.of.along in system.values else dict(system.values)
    return State(
        problem=system.of.problem,
        x=system.places(found.parameter),
        u=found.u[1:-1],
        parameters=fixed,
        scheme=system.of.scheme.name,
        intervals=system.grid.intervals,
        ok=found.ok,
        reason=found.reason,
        residual_of=lambda: residual_of(system, found.u, found.parameter),
        newton_steps=found.steps,
        unstable_directions=unstable_directions(found),
        nodal=found.u,
    )


def unstable_directions(found: Corrected) -> int | None:
    """How many directions grow when the residual drives the evolution, by the signs of the pivots (Sylvester's law of inertia).

    The row is oriented so that its highest derivative is dissipative: the couplings to the neighbours have the sign of
    growth. None where neighbours couple with different signs, so that the matrix is no symmetric one in other units.
    """
    if not found.alike or not found.ok:
        return None
    return found.positive if found.coupling > 0 else found.negative
