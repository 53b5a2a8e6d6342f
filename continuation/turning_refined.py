"""Turning points from one grid to the continuous problem: refined, with uncertainty, sensitivities and the side of the states."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from bvp.consistency import Consistency
from bvp.discrete_system import DiscreteSystem
from bvp.dot import dot
from bvp.extrapolate import ROUNDING_OF_EXTREME
from bvp.measures import Measure
from bvp.one_state import state_of
from bvp.resample import carried
from continuation import turning
from continuation.path import Path, Point
from continuation.records import TurningPoint
from continuation.refinement import Refinement, refined
from continuation.turning import DiscreteTurning

Array = npt.NDArray[np.float64]

# What is 1 in u'' is h^2 in the matrix, whose entries are rounded each for itself: the place where it is singular is only
# known to eps N^2/sqrt(N) of the state or worse. How much worse is measured, but once, on the finest grid: this is the least.
BLUR = float(np.finfo(float).eps)
SINGULAR_SHIFT = 1e-9  # relative disturbance of the data from which the finest grid is solved a second time


@dataclass(frozen=True)
class Located:
    """A turning point of a discrete branch, its place along the arclength, and the system whose it is."""

    turning: DiscreteTurning
    position: float
    system: DiscreteSystem


class TurningDetector:
    """Collects the turning points of the discrete system that lie between neighbouring points of a branch."""

    def __init__(self, most: int | None = None) -> None:
        self.found: list[Located] = []
        self.missed = 0
        self.most = most

    def look(self, path: Path, before: Point, after: Point) -> None:
        """Locate the turning point where the parameter changes its direction."""
        if not before.pace * after.pace < 0.0:
            return
        located = turning.between(path, before, after)
        if located is None:
            self.missed += 1
            return
        share = abs(before.pace) / (abs(before.pace) + abs(after.pace))
        position = before.arclength + share * (after.arclength - before.arclength)
        self.found.append(Located(located, position, path.system))


@dataclass(frozen=True)
class Setting:
    """What refining needs of a trace: the system that something was found on, measures, digits, consistency."""

    system: DiscreteSystem
    measures: Sequence[Measure]
    digits: int | None
    consistency: Consistency


class Grids:
    """The systems on other grids under the map of one, each made once."""

    def __init__(self, system: DiscreteSystem) -> None:
        self._made = {system.grid.intervals: system}
        self._first = system

    def on(self, intervals: int) -> DiscreteSystem:
        """The same equations on so many intervals."""
        if intervals not in self._made:
            self._made[intervals] = self._first.of.on(self._first.grid.refined(intervals), self._first.values)
        return self._made[intervals]


def turning_point(setting: Setting, located: DiscreteTurning, position: float, branch: str) -> TurningPoint:
    """The record of a turning point: refined where digits are asked for, the discrete one alone otherwise."""
    system, grids = setting.system, Grids(setting.system)
    notes: list[str] = []
    if setting.digits is None:
        return _record(
            setting, system, located, located.parameter, None, None, (), True, position, branch, located.parameter, {}, {}, notes
        )

    on, even, corners = grids.on, system.of.problem.axis, system.of.problem.corners

    def find(intervals: int, known: DiscreteTurning, known_intervals: int) -> DiscreteTurning | str:
        u, null = carried(known.u, intervals, even), carried(known.null, intervals, even)
        found = turning.near(on(intervals), u, known.parameter, null, known.curvature, known.scales)
        if isinstance(found, str):
            return found
        if (found.curvature < 0) != (known.curvature < 0):
            return "the branch turns the other way there"
        return found

    def values(found: DiscreteTurning, intervals: int) -> dict[str, float]:
        taken = measured(setting.measures, on(intervals), found.u, found.parameter)
        return {"": found.parameter, **taken}

    def repeat(found: DiscreteTurning, intervals: int) -> DiscreteTurning:
        disturbed = found.u * (1.0 + SINGULAR_SHIFT * np.cos(np.arange(found.u.size)))
        again = turning.near(on(intervals), disturbed, found.parameter * (1.0 + SINGULAR_SHIFT), found.null, found.curvature, found.scales)
        again = again if isinstance(again, DiscreteTurning) else found
        return again if corners else turning.placed_by_values(on(intervals), again)

    # At a turning point the parameter has an extremum along the branch: the rounding of the state enters it squared.
    result = refined(
        located, system.grid.intervals, find, values, setting.digits, repeat, corners=corners, rounding=ROUNDING_OF_EXTREME, blur=BLUR
    )
    notes += result.notes
    uncertainties = _of_measures(result, corners == "unknown")
    if setting.consistency.ok is not True and result.survives:
        uncertainties = dict.fromkeys(uncertainties)
        notes.append(f"the value is the scheme's own: {setting.consistency.reason}")
    names = [measure.text for measure in setting.measures]
    return _record(
        setting,
        on(result.finest_intervals),
        result.finest,
        result.values[""] if result.survives else located.parameter,
        uncertainties[""],
        result.order,
        result.entries,
        result.survives,
        position,
        branch,
        located.parameter,
        {name: result.values[name] for name in names},
        {name: uncertainties[name] for name in names},
        notes,
    )


def _of_measures(result: Refinement[DiscreteTurning], rough: bool) -> dict[str, float | None]:
    """The uncertainties of all numbers: a turning point's place along the branch is known less well than its parameter.

    Where the equation has corners it is where the parameter is largest on each grid, so that an uncertainty e of the
    parameter is one of about sqrt(e) of the place.
    """
    main, value = result.uncertainties[""], result.values[""]
    share = math.sqrt(main / abs(value)) if rough and main is not None and value else 0.0
    found = {}
    for name, uncertainty in result.uncertainties.items():
        least = share * abs(result.values[name]) if name else 0.0
        found[name] = None if uncertainty is None else max(uncertainty, least)
    return found


def _record(
    setting: Setting,
    system: DiscreteSystem,
    located: DiscreteTurning,
    value: float,
    uncertainty: float | None,
    order: float | None,
    entries: tuple[object, ...],
    survives: bool,
    position: float,
    branch: str,
    on_grid: float,
    measures: Mapping[str, float],
    measure_uncertainty: Mapping[str, float | None],
    notes: Sequence[str],
) -> TurningPoint:
    return TurningPoint(
        branch=branch,
        value=value,
        uncertainty=uncertainty,
        measures=measures or measured(setting.measures, system, located.u, located.parameter),
        states=located.states,
        order=order,
        on_grid=on_grid,
        refinement=entries,  # type: ignore[arg-type]
        survives=survives,
        sensitivity=sensitivities(system, located),
        position=position,
        state=state_of(system, located.found),
        notes=tuple(notes),
        measure_uncertainty=measure_uncertainty,
    )


def measured(measures: Sequence[Measure], system: DiscreteSystem, u: Array, parameter: float) -> dict[str, float]:
    """The measures of a profile by their text."""
    profiles = {system.of.unknown: u[1:-1]}
    values = {**system.values, system.of.along: parameter}
    places = system.places(parameter)
    return {measure.text: measure.value(places, profiles, values) for measure in measures}


def sensitivities(system: DiscreteSystem, located: DiscreteTurning) -> dict[str, float | None]:
    """d ln(value)/d ln(parameter) for every other parameter, from the left null vector w: -w.F_p/(w.F_lam) p/lam.

    None where the value is 0, where a parameter is 0, or where the matrix gives no null vector.
    """
    others = [name for name in system.of.problem.parameters if name != system.of.along]
    if not others:
        return {}
    rows = system.stored_rows(located.u, located.parameter).copy()
    nothing: dict[str, float | None] = dict.fromkeys(others)
    if not np.all(np.isfinite(rows[:, system.band.rows])) or not system.band.factor(rows, rows[4], located.null, 0.0).ok:
        return nothing
    left, _ = system.band.solve_transposed(np.zeros(system.size), 1.0)
    found = dict(nothing)
    for name in others:
        slope = system.slopes_by(name, located.u, located.parameter)
        change = -dot(left[system.band.rows], slope[system.band.rows])
        if located.parameter != 0.0 and np.isfinite(change):
            found[name] = float(change * system.values[name] / located.parameter)
    return found
