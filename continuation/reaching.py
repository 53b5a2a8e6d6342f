"""The parameter at which a measure takes a value, on a branch, refined like a turning point."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

import numpy as np

from bvp.discrete_system import DiscreteSystem
from bvp.errors import InputError
from bvp.measures import Measure
from bvp.newton import Corrected
from bvp.one_state import state_of
from bvp.problem import Problem
from bvp.resample import carried
from bvp.state import State
from continuation.asked import asked
from continuation.bracket import Bracket
from continuation.path import Path, Point
from continuation.records import Branch, Refined
from continuation.refinement import refined
from continuation.tracing import setting_of, traced
from continuation.turning_refined import Grids, Setting, measured

MOST_SECANTS = 30
REACHED = 1e-13  # of the distance between the two points that hold the place
POLISHED = 1e-12


@dataclass(frozen=True)
class ReachedPoint:
    """A place of the branch where the measure has its value: the parameter there, with its uncertainty."""

    value: float
    uncertainty: float | None
    measures: Mapping[str, float]
    order: float | None
    refinement: tuple[Refined, ...]
    survives: bool
    unstable_directions: int | None
    state: State = field(repr=False)
    notes: tuple[str, ...] = ()


@dataclass(frozen=True)
class Reached:
    """All places of a branch where a measure takes a value, in the order of the branch."""

    when: str
    along: str
    points: tuple[ReachedPoint, ...]
    complete: bool
    notes: tuple[str, ...]
    branch: Branch = field(repr=False)


@dataclass(frozen=True)
class Place:
    """A point of one grid's branch where the measure has its value, and the tangent there."""

    found: Corrected
    point: Point
    system: DiscreteSystem


class ValueDetector:
    """Collects the places where a measure's difference from its value changes sign."""

    def __init__(self, measure: Measure, unknown: str, along: str) -> None:
        self.measure, self.unknown, self.along = measure, unknown, along
        self.found: list[Place] = []
        self._last: tuple[float, float] | None = None

    def gap(self, system: DiscreteSystem, u: Any, parameter: float) -> float:
        """The measure less its value."""
        return self.measure.value(system.places(parameter), {self.unknown: u[1:-1]}, {**system.values, self.along: parameter})

    def look(self, path: Path, before: Point, after: Point) -> None:
        """Close in on the place between two points."""
        known = self._last is not None and self._last[0] == before.arclength
        left = self._last[1] if known and self._last is not None else self.gap(path.system, before.u, before.parameter)
        right = self.gap(path.system, after.u, after.parameter)
        self._last = (after.arclength, right)
        if left == 0.0 and not known:
            self.found.append(Place(before.found, before, path.system))
        if not (left * right < 0.0 or (right == 0.0 and left != 0.0)):
            return
        place = self._closed_in(path, before, after, left, right)
        if place is not None:
            self.found.append(place)

    def _closed_in(self, path: Path, before: Point, after: Point, left: float, right: float) -> Place | None:
        """The zero of the gap between two points."""
        far = after.arclength - before.arclength
        bracket: Bracket[None] = Bracket(0.0, far, left, right, None, None)
        for _ in range(MOST_SECANTS):
            distance = bracket.trial()
            found = path.step_from(before, distance, tolerance=POLISHED)
            if not found.ok:
                distance = 0.5 * (bracket.left + bracket.right)
                found = path.step_from(before, distance, tolerance=POLISHED)
                if not found.ok:
                    return None
            gap = self.gap(path.system, found.u, found.parameter)
            if gap == 0.0 or bracket.width <= REACHED * far:
                break
            bracket.take(distance, gap, None)
        return Place(found, path.point(found, before.arclength + distance, before), path.system)


def reach(problem: Problem, *, when: str, along: str | None = None, **keywords: Any) -> Reached:
    """The values of the parameter at which a measure takes a value, such as when = "max(u) = 1.2"; keywords as for `trace`.

    InputError where `when` is no equation between measures.
    """
    asked_for = asked(problem, along, **keywords)
    measure = Measure(when, asked_for.problem, f"{problem.origin}, when")
    if measure.relation != "=":
        raise InputError(f'when = "{when}" is no equation.\nExpected: a measure and its value, such as max({problem.unknowns[0]}) = 1.2.')
    detector = ValueDetector(measure, asked_for.of.unknown, asked_for.along)
    branch = traced(asked_for, (detector,))
    points = tuple(_refined_place(setting_of(asked_for, place.system), place, detector) for place in detector.found)
    notes = list(branch.notes)
    if not points:
        notes.append(
            f"{when} is reached nowhere on the branch, which ended: {branch.ended}, at {branch.along} = {branch.parameter[-1]:.6g}."
        )
    return Reached(when, branch.along, points, branch.complete, tuple(notes), branch)


def _refined_place(setting: Setting, place: Place, detector: ValueDetector) -> ReachedPoint:
    system = setting.system
    on, even = Grids(system).on, system.of.problem.axis

    def find(intervals: int, known: Place, known_intervals: int) -> Place | str:
        return _found_again(on(intervals), known, intervals, even, detector)

    def values(one: Place, intervals: int) -> dict[str, float]:
        return {"": one.found.parameter, **measured(setting.measures, on(intervals), one.found.u, one.found.parameter)}

    def repeat(one: Place, intervals: int) -> Place:
        disturbed = one.point.u * (1.0 + 1e-9 * np.cos(np.arange(one.point.u.size)))
        again = _found_again(on(intervals), Place(one.found, one.point._replace(u=disturbed), on(intervals)), intervals, even, detector)
        return again if isinstance(again, Place) else one

    result = refined(place, system.grid.intervals, find, values, setting.digits or 8, repeat, corners=system.of.problem.corners)
    names = [measure.text for measure in setting.measures]
    uncertainty = result.uncertainties[""] if setting.consistency.ok is True else None
    notes = list(result.notes) + (
        [] if setting.consistency.ok is True else [f"the value is the scheme's own: {setting.consistency.reason}"]
    )
    state = state_of(on(result.finest_intervals), result.finest.found)
    return ReachedPoint(
        value=result.values[""],
        uncertainty=uncertainty,
        measures={name: result.values[name] for name in names},
        order=result.order,
        refinement=result.entries,
        survives=result.survives,
        unstable_directions=state.unstable_directions,
        state=state,
        notes=tuple(notes),
    )


def _found_again(system: DiscreteSystem, known: Place, intervals: int, even: bool, detector: Sequence[Any] | ValueDetector) -> Place | str:
    """The place on another grid: along the known tangent, by secants on the measure's gap."""
    assert isinstance(detector, ValueDetector)
    point = known.point
    base = Point(
        carried(point.u, intervals, even),
        point.parameter,
        carried(point.tangent, intervals, even),
        point.pace,
        0.0,
        point.scales,
        known.found,
    )
    path = Path(system, base.u, base.parameter, point.scales)
    distance, step = 0.0, 1e-4
    last: tuple[float, float] | None = None
    for _ in range(MOST_SECANTS):
        found = path.step_from(base, distance, tolerance=POLISHED)
        if not found.ok:
            return found.reason
        gap = detector.gap(system, found.u, found.parameter)
        if last is not None and (gap == 0.0 or gap == last[1] or abs(step) <= 1e-13):
            return Place(found, path.point(found, point.arclength, base), system)
        move = step if last is None else -gap * (distance - last[0]) / (gap - last[1])
        last, step = (distance, gap), move
        distance += max(-0.3, min(move, 0.3))
        if abs(distance) > 2.0:
            return "the place is too far from that of the neighbouring grid"
    return f"the value was not closed in on within {MOST_SECANTS} secants"
