"""Trace a branch of steady states in one parameter, with its turning points and how far these can be trusted."""

from __future__ import annotations

import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from bvp.consistency import consistency
from bvp.discrete_system import DiscreteSystem
from bvp.errors import ComputationError
from bvp.kernels.jit import compile_seconds
from bvp.newton import Corrected
from bvp.one_state import state_of, unstable_directions
from bvp.problem import Problem
from bvp.state import State
from continuation.asked import Asked, Event, asked
from continuation.follow import COARSE, STOPPED, Detector, Followed, Limits, follow
from continuation.moving import moved
from continuation.path import Path, Point
from continuation.records import Branch, TurningPoint
from continuation.start import first_point, first_state
from continuation.step_length import ON_THE_WAY
from continuation.turning_refined import Setting, TurningDetector, measured, turning_point

Array = npt.NDArray[np.float64]

UNTIL = "until"
WANTED = "turning points wanted"
PROFILE_BYTES = 64_000_000  # what kept profiles may take together; above, every second one is dropped


@dataclass(frozen=True)
class Kept:
    """What is stored of every point: parameter, arclength, measures, unstable directions; the profile elsewhere, of some."""

    parameter: float
    arclength: float
    measures: Mapping[str, float]
    unstable: int | None


class Recorder:
    """Stores points as they come: all their numbers, and as many profiles as the memory set aside for them allows."""

    def __init__(self, asked_for: Asked, path: Path, name: str) -> None:
        self.asked, self.path, self.name = asked_for, path, name
        self.count = 0
        self.most = max(min(asked_for.profiles, PROFILE_BYTES // (8 * path.system.size)), 2)
        self.every = 1
        self.profiles: dict[int, tuple[DiscreteSystem, Corrected]] = {}
        self.turning = TurningDetector()
        self.stopped = False
        self.last: Kept | None = None

    def __call__(self, point: Point) -> Kept:
        """Store a point, show it to the watch."""
        taken = measured(self.asked.measures, self.path.system, point.u, point.parameter)
        kept = Kept(point.parameter, point.arclength, taken, unstable_directions(point.found))
        if self.count % self.every == 0:
            self.profiles[self.count] = (self.path.system, point.found)
            if len(self.profiles) > self.most:
                self.every *= 2
                self.profiles = {index: held for index, held in self.profiles.items() if index % self.every == 0}
        self.count += 1
        self.last = kept
        if self.asked.watch is not None and self.asked.watch(Event(self.count, point.parameter, taken, len(self.turning.found), self.name)):
            self.stopped = True
        return kept

    def ended(self, point: Point) -> str | None:
        """Whether the branch ends at a point, and why."""
        if self.stopped:
            return STOPPED
        if self.asked.wanted is not None and len(self.turning.found) >= self.asked.wanted:
            return WANTED
        if self.asked.until is not None:
            system = self.path.system
            values = {**system.values, self.asked.along: point.parameter}
            if self.asked.until.holds(system.places(point.parameter), {self.asked.of.unknown: point.u[1:-1]}, values):
                return UNTIL
        return None


def trace(problem: Problem, along: str | None = None, **keywords: Any) -> Branch:
    """The branch of steady states through the state at `start`, followed in the parameter `along`.

    Keywords, as in a case file: start (its value at the first state), direction (up, down, both), within (lowest and
    highest), until ("max(u) > 20"), turning_points_wanted, measure (one or several), scheme, intervals, grid, digits
    (None: turning points are not refined), at (other parameters), watch (called with each step, may ask to stop),
    profiles (the most that are kept), longest (points of one direction), step_length (a rule), compiled (False: NumPy alone).

    The branch ends where the parameter leaves `within`, where `until` holds, at the turning points wanted, in itself,
    after `longest` points, where the grid no longer resolves the state, or where `watch` asks for it; `ended` says which.
    Raises InputError where what is asked makes no sense, ComputationError where there is no first state.
    """
    return traced(asked(problem, along, **keywords))


def first_turning_point(problem: Problem, along: str | None = None, *, digits: int | None = 10, **keywords: Any) -> TurningPoint:
    """The first turning point of the branch in `along`; keywords as for `trace`.

    ComputationError where the branch ends before one, with the ending.
    """
    branch = trace(problem, along, **{"digits": digits, "turning_points_wanted": 1, "step_length": ON_THE_WAY, **keywords})
    if not branch.turning_points:
        raise ComputationError(f"no turning point up to {branch.along} = {branch.parameter[-1]:.6g}; the branch ended: {branch.ended}")
    return branch.turning_points[0]


def setting_of(asked_for: Asked, system: DiscreteSystem, size: float = 1.0) -> Setting:
    """What refining needs of a trace."""
    values = {**system.values, asked_for.along: asked_for.start}
    return Setting(system, asked_for.measures, asked_for.digits, consistency(system.of, size, values))


def traced(asked_for: Asked, extra: tuple[Detector, ...] = (), name: str = "main") -> Branch:
    """The branch that was asked for; further detectors look at every step of it."""
    began, compiling = time.perf_counter(), compile_seconds()
    system = asked_for.of.on(asked_for.grid, asked_for.problem.parameters)
    found = first_state(system, asked_for.start, None)
    if not found.ok:
        raise ComputationError(
            f"no first state at {asked_for.along} = {asked_for.start:g}: {found.reason}.\n"
            "Start where a state is known (for example with the source switched off), or give an initial_guess."
        )
    steps, sweeps = found.steps, found.sweeps
    sides: list[tuple[Followed[Kept], Recorder]] = []
    for sign in asked_for.signs:
        path, point = first_point(system, found, sign)
        path.steps = path.sweeps = 0
        point = moved(path, point, asked_for.adaptation)
        recorder = Recorder(asked_for, path, name)
        limits = Limits(asked_for.lowest, asked_for.highest, asked_for.longest, recorder.ended)
        detectors = [recorder.turning, *extra]
        followed = follow(path, point, asked_for.step_length, limits, detectors, recorder, asked_for.adaptation)
        sides.append((followed, recorder))
        steps, sweeps = steps + path.steps, sweeps + path.sweeps
        if recorder.stopped or sides[-1][0].ended == "closed loop":
            break
    return _recorded(asked_for, sides, name, (steps, sweeps), began, compiling)


def _recorded(
    asked_for: Asked,
    sides: list[tuple[Followed[Kept], Recorder]],
    name: str,
    effort: tuple[int, int],
    began: float,
    compiling: float,
) -> Branch:
    """The record of both directions joined: the first one backwards, then the second."""
    points: list[Kept] = []
    states: dict[int, State] = {}
    turnings: list[tuple[float, TurningPoint]] = []
    notes: list[str] = list(asked_for.problem.notices)
    interrupted = False
    for side, (followed, recorder) in enumerate(sides):
        backwards = len(sides) == 2 and side == 0
        offset = len(points) - 1 if side == 1 else 0
        kept = followed.points if not backwards else followed.points[::-1]
        last = len(kept) - 1
        for index, (system, corrected) in recorder.profiles.items():
            states[last - index if backwards else offset + index] = state_of(system, corrected)
        points += [_mirrored(point) for point in kept] if backwards else kept if side == 0 else kept[1:]
        for found in recorder.turning.found:
            position = -found.position if backwards else found.position
            record = turning_point(setting_of(asked_for, found.system), found.turning, position, name)
            turnings.append((record.position, record))
        notes += _notes(followed, recorder, asked_for)
        interrupted |= recorder.stopped
    spent, compiled = time.perf_counter() - began, compile_seconds() - compiling
    unstable = [point.unstable for point in points]
    known = all(count is not None for count in unstable)
    turning = tuple(record for _, record in sorted(turnings, key=lambda pair: pair[0]))
    ended = sides[-1][0].ended
    return Branch(
        name=name,
        along=asked_for.along,
        scheme=asked_for.of.scheme.name,
        intervals=asked_for.grid.intervals,
        parameter=np.array([point.parameter for point in points]),
        measures={measure.text: np.array([point.measures[measure.text] for point in points]) for measure in asked_for.measures},
        unstable_directions=np.array(unstable, dtype=np.int64) if known else None,
        arclength=np.array([point.arclength for point in points]),
        began=f"the state at {asked_for.along} = {asked_for.start:g}" if len(sides) == 1 else sides[0][0].ended,
        ended=ended,
        turning_points=turning,
        states=dict(sorted(states.items())),
        newton_steps=effort[0],
        factorizations=effort[1],
        seconds=max(spent - compiled, 0.0),
        compile_seconds=compiled,
        complete=not interrupted and all(followed.ended != "no smaller step" for followed, _ in sides),
        notes=tuple(dict.fromkeys([*notes, *_notes_on_turning(turning)])),
    )


def _notes_on_turning(points: Sequence[TurningPoint]) -> list[str]:
    """The notes of turning points, each once with the numbers of those that it is about."""
    about: dict[str, list[int]] = {}
    for number, point in enumerate(points, start=1):
        for note in point.notes:
            about.setdefault(note if point.survives else note.partition(":")[0], []).append(number)
    return [f"turning point{'s' * (len(numbers) > 1)} {', '.join(map(str, numbers))}: {note}" for note, numbers in about.items()]


def _mirrored(point: Kept) -> Kept:
    return Kept(point.parameter, -point.arclength, point.measures, point.unstable)


def _notes(followed: Followed[Kept], recorder: Recorder, asked_for: Asked) -> list[str]:
    notes = []
    where = f"{asked_for.along} = {followed.points[-1].parameter:.6g}"
    if followed.ended == COARSE:
        notes.append(
            f"the trace ended at {where}: {asked_for.grid.intervals} intervals no longer resolve the state there. "
            "More intervals, or a grid that is graded towards its peak or layer, go further."
        )
    if followed.reason:
        notes.append(f"the trace ended at {where}: {followed.reason}.")
    if recorder.turning.missed:
        notes.append(f"{recorder.turning.missed} change(s) of direction could not be closed in on and are not listed.")
    return notes
