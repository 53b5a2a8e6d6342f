"""What a trace was asked for, checked before anything is solved."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from bvp.adapt import Adaptation, adaptation
from bvp.discretize import Discretization, discretization
from bvp.errors import InputError, ProblemError, nearest
from bvp.grid import Grid
from bvp.measures import Measure
from bvp.problem import Problem
from bvp.schemes import Scheme
from continuation.grids import ADAPTIVE, grid_for
from continuation.step_length import FOR_FIGURES, StepLength

DIRECTIONS = {"up": (1.0,), "down": (-1.0,), "both": (-1.0, 1.0)}
LONGEST = 400  # points of one direction


@dataclass(frozen=True)
class Event:
    """What a `watch` sees of each step: the point's number, parameter, measures, turning points so far, the branch's name."""

    point: int
    parameter: float
    measures: Mapping[str, float]
    turning_points: int
    branch: str


Watch = Callable[[Event], Any]


@dataclass(frozen=True)
class Asked:
    """A trace as it was asked for: problem and discretization, where it starts, which way, where it ends, what is measured."""

    problem: Problem
    of: Discretization
    grid: Grid
    adaptation: Adaptation | None
    along: str
    start: float
    signs: tuple[float, ...]
    lowest: float
    highest: float
    until: Measure | None
    wanted: int | None
    measures: tuple[Measure, ...]
    digits: int | None
    watch: Watch | None
    profiles: int
    longest: int
    step_length: StepLength


def asked(
    problem: Problem,
    along: str | None = None,
    *,
    start: float | None = None,
    direction: str = "up",
    within: tuple[float, float] | None = None,
    until: str | None = None,
    turning_points_wanted: int | None = None,
    measure: str | Sequence[str] | None = None,
    scheme: str | Scheme = "central",
    intervals: int = 200,
    grid: str | Grid = "adaptive",
    digits: int | None = 8,
    at: Mapping[str, float] | None = None,
    watch: Watch | None = None,
    profiles: int = 200,
    longest: int = LONGEST,
    step_length: StepLength = FOR_FIGURES,
    compiled: bool = True,
) -> Asked:
    """The keywords of `trace`, checked; InputError says which makes no sense, and what would."""
    stated = problem.with_parameters(at or {})
    name = checked_along(stated, along)
    begin = stated.parameters[name] if start is None else float(start)
    stated = stated.with_parameters({name: begin})
    if direction not in DIRECTIONS:
        raise InputError(f'direction "{direction}" is not known. {nearest(str(direction), list(DIRECTIONS))}')
    lowest, highest = checked_range(within, begin, name)
    _whole(turning_points_wanted, "turning_points_wanted", 1, None)
    _whole(digits, "digits", 1, 15)
    texts = [f"max({stated.unknowns[0]})"] if measure is None else [measure] if isinstance(measure, str) else list(measure)
    ending = Measure(until, stated, f"{problem.origin}, until") if until else None
    if ending is not None and ending.relation is None:
        raise InputError(f'{problem.origin}, until: "{until}" is no comparison.\nExpected: something like max({stated.unknowns[0]}) > 20.')
    used = grid_for(grid, intervals, stated)
    return Asked(
        problem=stated,
        of=discretization(stated, scheme, name, uniform=used.uniform, compiled=compiled),
        grid=used,
        adaptation=adaptation(stated, scheme, name, intervals, compiled) if grid == ADAPTIVE else None,
        along=name,
        start=begin,
        signs=DIRECTIONS[direction],
        lowest=lowest,
        highest=highest,
        until=ending,
        wanted=turning_points_wanted,
        measures=tuple(Measure(text, stated, f"{problem.origin}, measure") for text in texts),
        digits=digits,
        watch=watch,
        profiles=max(int(profiles), 2),
        longest=max(int(longest), 2),
        step_length=step_length,
    )


def checked_along(problem: Problem, along: str | None) -> str:
    """The parameter to trace in: the one named, or the only one."""
    if along is None:
        if len(problem.parameters) == 1:
            return next(iter(problem.parameters))
        known = ", ".join(problem.parameters) or "none (the problem has no parameters)"
        raise ProblemError(f"{problem.origin}: which parameter to trace in is not said.\nExpected: along, one of: {known}.")
    if along not in problem.parameters:
        raise ProblemError(f'{problem.origin}: along = "{along}" is no parameter. {nearest(along, list(problem.parameters))}')
    return along


def checked_range(within: Any, start: float, along: str) -> tuple[float, float]:
    """The range of the parameter; InputError where it is none or does not hold the start."""
    if within is None:
        return -np.inf, np.inf
    try:
        lowest, highest = (float(edge) for edge in within)
    except (TypeError, ValueError):
        raise InputError(f"within = {within!r}.\nExpected: two numbers, the lowest and the highest {along}.") from None
    if not lowest < highest:
        raise InputError(f"within = [{lowest:g}, {highest:g}] is empty.\nExpected: the lower value first.")
    if not lowest <= start <= highest:
        raise InputError(
            f"the trace starts at {along} = {start:g}, outside of within = [{lowest:g}, {highest:g}].\nStart inside, or widen the range."
        )
    return lowest, highest


def _whole(value: object, name: str, lowest: int, highest: int | None) -> None:
    if value is None:
        return
    if isinstance(value, bool) or not isinstance(value, int) or value < lowest or (highest is not None and value > highest):
        to = f" to {highest}" if highest is not None else ""
        raise InputError(f"{name} = {value!r}.\nExpected: a whole number from {lowest}{to}.")
