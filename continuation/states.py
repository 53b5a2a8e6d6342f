"""The steady states at a parameter value: of the equation, or of the difference scheme on one grid."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.adapt import moved_over
from bvp.discrete_system import DiscreteSystem
from bvp.errors import InputError
from bvp.newton import Corrected
from bvp.one_state import solved, state_of
from bvp.problem import Problem
from bvp.resample import carried
from bvp.state import State
from continuation.asked import Asked, asked
from continuation.crossing import crossings
from continuation.path import Path, Point
from continuation.records import Branch, TurningPoint
from continuation.refinement import FINEST, FIRST_COARSE, refined
from continuation.tracing import setting_of, traced
from continuation.turning_refined import Grids, Setting, measured

Array = npt.NDArray[np.float64]

TWICE = 1e-6  # relative distance below which two states found are one
MOST_INTERVALS_NEAR = 200_000  # intervals that are spent on telling two states next to a turning point apart


@dataclass(frozen=True)
class FoundState:
    """One steady state: its measures with uncertainties, unstable directions, residual, the branch it lies on."""

    measures: Mapping[str, float]
    uncertainty: Mapping[str, float | None]
    unstable_directions: int | None
    residual: float
    branch: str
    state: State = field(repr=False)


@dataclass(frozen=True)
class StatesAt:
    """The states at one parameter value, ordered by the first measure, with the margin to the nearest turning point.

    asked : "equation" or "scheme". complete : whether the branch was followed to its end; states that no traced branch
    reaches are not looked for.
    """

    asked: str
    at: Mapping[str, float]
    states: tuple[FoundState, ...]
    margin: Mapping[str, Any]
    complete: bool
    notes: tuple[str, ...]
    branch: Branch = field(repr=False)


class Crossings:
    """Collects the states of the discrete branch at one value of the parameter."""

    def __init__(self, value: float) -> None:
        self.value = value
        self.found: list[tuple[DiscreteSystem, Corrected]] = []
        self._begun = False
        self.missed = 0

    def look(self, path: Path, before: Point, after: Point) -> None:
        """Solve at the value where the step passes it; a point that sits on it belongs to the step that ends there."""
        if not self._begun and before.parameter == self.value:
            self.found.append((path.system, before.found))
        self._begun = True
        if after.parameter == self.value:
            self.found.append((path.system, after.found))
        elif before.parameter != self.value:
            here = crossings(path, before, after, self.value)
            passed = (before.parameter - self.value) * (after.parameter - self.value) < 0.0
            self.missed += (len(here) % 2 == 1) != passed  # a step that passes the value meets an odd number of states
            self.found += [(path.system, one) for one in here]


def states_at(problem: Problem, *, at: Mapping[str, float], along: str | None = None, discrete: bool = False, **keywords: Any) -> StatesAt:
    """The steady states at given parameter values, on the branch traced in `along` from its start.

    Of the equation: each discrete state is followed to finer grids and counts only if it settles there; its measures
    are extrapolated. discrete = True: those of the scheme on exactly the grid asked for. Keywords as for `trace`.
    Past a turning point there is none, and a note says where it lies.
    """
    name = along if along is not None else _traced_name(problem, at)
    if name not in at:
        at = {**at, name: problem.parameters[name] if keywords.get("start") is None else float(keywords["start"])}
    value = float(at[name])
    if not math.isfinite(value):
        raise InputError(f"at {name} = {value}.\nExpected: a finite number.")
    others = {other: number for other, number in at.items() if other != name}
    begin = problem.parameters[name] if keywords.get("start") is None else float(keywords["start"])
    if discrete:
        keywords = {"grid": "uniform", **keywords}  # the question is about the scheme on the grid asked for
    keywords = {**keywords, "direction": _direction(begin, value, keywords.get("direction"))}
    keywords.pop("turning_points_wanted", None)
    asked_for = asked(problem, name, at=others, **{**keywords, "within": _range(keywords.get("within"), begin, value)})
    crossings = Crossings(value)
    branch = traced(asked_for, (crossings,))
    finer = None if discrete else _finer_grid(branch, value)
    if finer is not None and not isinstance(finer, str):
        return states_at(problem, at=at, along=name, **{**keywords, "intervals": finer})
    return _answer(asked_for, branch, crossings, {**others, name: value}, discrete, finer)


def traced_with_states(problem: Problem, values: Sequence[float], **keywords: Any) -> tuple[Branch, dict[float, StatesAt]]:
    """A branch, and the states of the equation on it at given values of its parameter, from one trace; keywords as for `trace`."""
    asked_for = asked(problem, **keywords)
    crossings = {float(value): Crossings(float(value)) for value in values}
    branch = traced(asked_for, tuple(crossings.values()))
    found = {}
    for value, at_value in crossings.items():
        finer = _finer_grid(branch, value)
        if finer is None or isinstance(finer, str):
            found[value] = _answer(asked_for, branch, at_value, {branch.along: value}, False, finer)
        else:
            found[value] = states_at(problem, at={branch.along: value}, **{**keywords, "intervals": finer})
    return branch, found


def _answer(
    asked_for: Asked, branch: Branch, crossings: Crossings, at: Mapping[str, float], discrete: bool, undecided: str | None
) -> StatesAt:
    """The states at a value from the discrete ones that a trace met there."""
    name, value = branch.along, crossings.value
    found = _distinct(crossings.found)
    notes = list(branch.notes)
    states = []
    for system, corrected in found:
        polished = solved(system, corrected.u, value)
        setting = setting_of(asked_for, system)
        if not polished.ok:
            notes.append(f"a state near {name} = {value:g} could not be solved to rounding: {polished.reason}")
            continue
        if discrete:
            state: FoundState | None = _discrete_state(setting, system, polished)
        else:
            state = _real_state(setting, system, polished, notes, _coarsest(branch, value))
        if state is not None:
            states.append(state)
    first = asked_for.measures[0].text
    states.sort(key=lambda one: one.measures[first])
    if undecided is not None:
        notes.insert(0, undecided)
    elif crossings.missed:
        notes.insert(0, f"{crossings.missed} state(s) at {name} = {value:.12g} could not be closed in on and are not listed.")
    elif not states:
        notes.insert(0, _why_none(branch, name, value, discrete, asked_for.grid.intervals))
    notes.append("only states on the branch traced from its start are listed; others, not connected to it, are not looked for.")
    return StatesAt(
        "scheme" if discrete else "equation",
        at,
        tuple(states),
        _margin(branch, value, discrete),
        branch.complete and undecided is None and not crossings.missed,
        tuple(dict.fromkeys(notes)),
        branch,
    )


def _traced_name(problem: Problem, at: Mapping[str, float]) -> str:
    if len(at) == 1:
        return next(iter(at))
    if len(problem.parameters) == 1:
        return next(iter(problem.parameters))
    raise InputError("which of the parameters leads to the states is not said.\nExpected: along, the one that the branch is traced in.")


def _direction(begin: float, value: float, asked_direction: str | None) -> str:
    """Towards the value from a parameter of 0, where most branches begin; both ways from elsewhere, lest a state be missed."""
    towards = "up" if value > begin else "down"
    if asked_direction is None:
        return towards if begin == 0.0 and value != begin else "both"
    return asked_direction if asked_direction == towards else "both"


def _range(within: Any, begin: float, value: float) -> Any:
    """The trace's range: the one asked for, widened where the value lies outside."""
    if within is None:
        return None
    lowest, highest = within
    span = abs(value - begin)
    return min(lowest, value - 0.01 * span), max(highest, value + 0.01 * span)


def _distinct(found: Sequence[tuple[DiscreteSystem, Corrected]]) -> list[tuple[DiscreteSystem, Corrected]]:
    """Each state once."""
    kept: list[tuple[DiscreteSystem, Corrected]] = []
    for system, one in found:
        size = float(np.max(np.abs(one.u[1:-1]))) or 1.0
        others = [other.u if held is system else moved_over(other.u, held, system) for held, other in kept]
        if all(float(np.max(np.abs(one.u - other)[1:-1])) > TWICE * size for other in others):
            kept.append((system, one))
    return kept


def _discrete_state(setting: Setting, system: DiscreteSystem, found: Corrected) -> FoundState:
    state = state_of(system, found)
    taken = measured(setting.measures, system, found.u, found.parameter)
    return FoundState(taken, dict.fromkeys(taken), state.unstable_directions, state.residual, "main", state)


def _real_state(
    setting: Setting, system: DiscreteSystem, found: Corrected, notes: list[str], coarsest: int | None = None
) -> FoundState | None:
    """The state of the equation that a discrete state leads to on finer grids; None where it leads to none."""
    on, value, even = Grids(system).on, found.parameter, system.of.problem.axis

    def find(intervals: int, known: Corrected, known_intervals: int) -> Corrected | str:
        start = carried(known.u, intervals, even)
        again = solved(on(intervals), start, value)
        if not again.ok:
            return again.reason
        size = float(np.max(np.abs(start[1:-1]))) or 1.0
        return again if float(np.max(np.abs(again.u - start)[1:-1])) <= 0.3 * size else "the state jumps away there"

    def values(one: Corrected, intervals: int) -> dict[str, float]:
        taken = measured(setting.measures, on(intervals), one.u, value)
        return {"": next(iter(taken.values())), **taken}

    def repeat(one: Corrected, intervals: int) -> Corrected:
        again = solved(on(intervals), one.u * (1.0 + 1e-9 * np.cos(np.arange(one.u.size))), value)
        return again if again.ok else one

    digits, corners = setting.digits or 8, system.of.problem.corners
    most = FINEST if coarsest is None else max(FINEST, 8 * coarsest)
    result = refined(found, system.grid.intervals, find, values, digits, repeat, most=most, coarsest=coarsest, corners=corners)
    if not result.survives:
        # Next to a turning point the coarse grids have lost the state already: begin with grids like the one it was found on.
        near = 2 * (system.grid.intervals // 4)
        result = refined(found, system.grid.intervals, find, values, digits, repeat, most=8 * near, coarsest=near, corners=corners)
    if not result.survives:
        taken = values(found, system.grid.intervals)[""]
        text = setting.measures[0].text
        notes.append(
            f"a state of the scheme with {text} = {taken:.6g} is left out: it {result.notes[0] if result.notes else 'does not settle'}."
        )
        return None
    names = [measure.text for measure in setting.measures]
    uncertainties = {name: result.uncertainties[name] if setting.consistency.ok is True else None for name in names}
    if setting.consistency.ok is not True:
        notes.append(f"the states are the scheme's own: {setting.consistency.reason}.")
    state = state_of(on(result.finest_intervals), result.finest)
    return FoundState(
        {name: result.values[name] for name in names}, uncertainties, state.unstable_directions, state.residual, "main", state
    )


def _coarsest(branch: Branch, value: float) -> int | None:
    """The coarsest grid to refine from where a scheme turns later than the equation, so that coarse grids have states too far apart.

    As the root of a distance to the turning point that shrinks with the grid these follow no power of the step, until
    that distance is small against the equation's own. None where the usual grids do.
    """
    for one in branch.turning_points:
        outwards = 1.0 if one.states == "below" else -1.0
        beyond, distance = outwards * (one.on_grid - one.value), outwards * (one.value - value)
        if one.survives and beyond > 0.0 and distance > 0.0:
            needed = branch.intervals * (4.0 * beyond / distance) ** (1.0 / max(one.order or 2.0, 1.0))
            if needed > FIRST_COARSE:
                return min(2 * math.ceil(needed / 2.0), MOST_INTERVALS_NEAR // 8)
    return None


def _finer_grid(branch: Branch, value: float) -> int | str | None:
    """The intervals that show the states between a scheme's own turning point and the refined one, where the value lies there.

    A sentence where no grid can: the value is too near to the turning point to tell. None where there is no need.
    """
    for one in branch.turning_points:
        if not one.survives:
            continue
        inside = value < one.value if one.states == "below" else value > one.value
        hidden = value > one.on_grid if one.states == "below" else value < one.on_grid
        distance = abs(one.value - value)
        if one.uncertainty is not None and distance <= one.uncertainty:
            return (
                f"{branch.along} = {value:.12g} is within the uncertainty of the turning point at {one.value:.12g}: "
                "whether states exist there is undecided."
            )
        if inside and hidden:
            gain = abs(one.value - one.on_grid) / distance
            intervals = 2 * math.ceil(1.2 * branch.intervals * gain ** (1.0 / max(one.order or 2.0, 1.0)) / 2.0)
            if intervals > MOST_INTERVALS_NEAR:
                return (
                    f"{branch.along} = {value:.12g} is so near to the turning point at {one.value:.12g} that {intervals} intervals "
                    "would be needed to tell its two states apart; they exist, and differ little from the state at the turning point."
                )
            return intervals
    return None


def _margin(branch: Branch, value: float, discrete: bool) -> dict[str, Any]:
    """How far the value is from the nearest turning point of the branch, in the parameter and as a share of it."""
    reached: list[TurningPoint] = [one for one in branch.turning_points if discrete or one.survives]
    if not reached:
        return {}
    nearest = min(reached, key=lambda one: abs((one.on_grid if discrete else one.value) - value))
    place = nearest.on_grid if discrete else nearest.value
    return {
        "turning_point": float(place),
        "uncertainty": None if discrete else nearest.uncertainty,
        "distance": float(place - value),
        "past": bool(value > place if nearest.states == "below" else value < place),
        "share": float((place - value) / place) if place else None,
    }


def _why_none(branch: Branch, name: str, value: float, discrete: bool, intervals: int) -> str:
    margin = _margin(branch, value, discrete)
    whose = f"the scheme on {intervals} intervals has no state" if discrete else "the equation has no state on this branch"
    if margin:
        return f"{whose} at {name} = {value:g}: the branch turns back at {name} = {margin['turning_point']:.10g}."
    return f"{whose} at {name} = {value:g}: the branch ended before ({branch.ended} at {name} = {branch.parameter[-1]:.6g})."
