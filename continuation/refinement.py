"""A value of a branch on one grid refined: the same thing found on two families of grids, extrapolated, with an uncertainty.

What is refined is a `Feature`: a turning point, a state at a parameter value, a place where a measure is reached. It
knows how to find itself again on a neighbouring grid.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Generic, TypeVar

import numpy as np

from bvp.errors import InputError
from bvp.extrapolate import ROUNDING, combined, combined_rough, common_powers
from bvp.grid import MOST_INTERVALS
from continuation.records import Refined

Feature = TypeVar("Feature")

COARSEST, FIRST_COARSE = 8, 48  # intervals of the coarsest grid: never fewer, and not more to begin with
LEVELS = 4  # grids of each family before a first estimate
FINEST = 1 << 14  # intervals beyond which a value is left with the uncertainty it has
MOST_LEVELS = 12
ROUGH_SETTLED = 1e-2  # relative uncertainty at which a value of an equation with corners, whose changes are erratic, counts as settled


@dataclass(frozen=True)
class Refinement(Generic[Feature]):
    """The refined values by name ("" the main one), each with its uncertainty or None; the finest feature found."""

    values: Mapping[str, float]
    uncertainties: Mapping[str, float | None]
    order: float | None
    entries: tuple[Refined, ...]
    survives: bool
    finest: Feature
    finest_intervals: int
    notes: tuple[str, ...] = ()


@dataclass
class Family(Generic[Feature]):
    """Grids of N, 2 N, 4 N, … intervals and what was found on each; a gap where nothing was."""

    coarsest: int
    found: dict[int, Feature] = field(default_factory=dict)

    def run(self) -> list[int]:
        """The longest unbroken run of grids with a finding that ends at the finest one."""
        levels = sorted(self.found)
        run: list[int] = []
        for intervals in reversed(levels):
            if run and run[-1] != 2 * intervals:
                break
            run.append(intervals)
        return run[::-1]


def refined(
    start: Feature,
    intervals: int,
    find: Callable[[int, Feature, int], Feature | str],
    measure: Callable[[Feature, int], Mapping[str, float]],
    digits: int | None,
    repeat: Callable[[Feature, int], Feature],
    *,
    most: int = FINEST,
    coarsest: int | None = None,
    corners: str = "",
    rounding: float = ROUNDING,
    blur: float = 0.0,
) -> Refinement[Feature]:
    """Refine what was found on a grid of `intervals`.

    find(N, feature, M) looks on N intervals for the feature known on M, and returns it or a sentence why not. measure
    gives the numbers to extrapolate, the main one under "". repeat solves the finest again from disturbed data: what its
    numbers differ by is the rounding of the solves. coarsest : an even number of intervals to begin with. corners : where
    the equation has them (see Problem.corners). rounding : of the main value, relative. blur : what rounding leaves of the
    other numbers besides, relative, for each intervals^(3/2). Ends once the main value has its digits, or at `most` intervals.
    """
    rough = corners == "unknown"
    base = coarsest or int(np.clip(2 * (intervals // 16), COARSEST, FIRST_COARSE))
    families = (Family[Feature](base), Family[Feature](base * 3 // 2))
    known: dict[int, Feature] = {intervals: start}
    notes: list[str] = []
    measured: dict[int, Mapping[str, float]] = {}

    def values(feature: Feature, count: int) -> Mapping[str, float]:
        """What `measure` gives, worked out once a grid."""
        if count not in measured:
            measured[count] = measure(feature, count)
        return measured[count]

    def visit(count: int) -> str | None:
        nearest = min(known, key=lambda other: (abs(np.log(other / count)), -other))
        try:
            found = known[count] if count in known else find(count, known[nearest], nearest)
        except InputError:  # a map whose steps have come below the rounding of the coordinate
            found = "its nodes come too close to each other for this arithmetic"
        if isinstance(found, str):
            return found
        known[count] = found
        for family in families:
            if count % family.coarsest == 0 and _power_of_two(count // family.coarsest):
                family.found[count] = found
        return None

    grids = sorted(
        {family.coarsest << level for family in families for level in range(LEVELS)}, key=lambda count: abs(np.log(count / intervals))
    )
    failures = {count: reason for count in grids if (reason := visit(count)) is not None}
    level = LEVELS
    outcome = _extrapolated(families, values, {}, rough, rounding, corners)
    while level < MOST_LEVELS and (outcome is None or not _enough(outcome, digits)):
        finer = [family.coarsest << level for family in families]
        if finer[0] > min(most, MOST_INTERVALS):
            break
        failures |= {count: reason for count in finer if (reason := visit(count)) is not None}
        if len([count for count in finer if count in failures]) == 2 and level >= LEVELS + 2:
            break
        level += 1
        outcome = _extrapolated(families, values, {}, rough, rounding, corners) or (
            outcome if rough else None
        )  # erratic: one grid may have none
    finest = max(known)
    if outcome is None:
        reason = failures.get(max(failures)) if failures else "too few grids"
        main = values(start, intervals)
        return Refinement(main, dict.fromkeys(main), None, (), False, start, intervals, (f"does not survive refinement: {reason}",))
    once, again = values(known[finest], finest), measure(repeat(known[finest], finest), finest)
    share = blur * finest**1.5
    floors = {name: max(abs(again[name] - number), share * abs(number) if name else 0.0) for name, number in once.items()}
    outcome = _extrapolated(families, values, floors, rough, rounding, corners) or outcome
    limits, uncertainties, order, entries = outcome
    survives = not rough and _settles(families, values)
    if not survives and corners:
        limits, uncertainties, order, entries = _extrapolated(families, values, floors, True, rounding, corners) or outcome
        survives = (uncertainties[""] or np.inf) <= ROUGH_SETTLED * abs(limits[""])
    if not survives:
        uncertainties = dict.fromkeys(uncertainties)
        notes.append("does not survive refinement: its value does not settle on finer grids")
    return Refinement(limits, uncertainties, order, entries, survives, known[finest], finest, tuple(notes))


def _power_of_two(number: int) -> bool:
    return number & (number - 1) == 0


Outcome = tuple[dict[str, float], dict[str, float | None], float | None, tuple[Refined, ...]]


def _extrapolated(
    families: Sequence[Family[Feature]],
    values: Callable[[Feature, int], Mapping[str, float]],
    floors: Mapping[str, float],
    rough: bool,
    rounding: float,
    corners: str,
) -> Outcome | None:
    runs = [family.run() for family in families]
    if any(len(run) < 3 for run in runs):
        return None
    taken = [{count: values(family.found[count], count) for count in run} for family, run in zip(families, runs, strict=True)]
    limits: dict[str, float] = {}
    uncertainties: dict[str, float | None] = {}
    order: float | None = None
    for name in next(iter(taken[0].values())):
        columns = [[float(numbers[name]) for numbers in one.values()] for one in taken]
        if not all(np.all(np.isfinite(column)) for column in columns):
            limits[name], uncertainties[name] = float("nan"), None
            continue
        floor = floors.get(name, 0.0)
        entries_of_all = {count: float(numbers[name]) for one in taken for count, numbers in one.items()}
        if rough:
            limit, uncertainty = combined_rough(entries_of_all, floor)
        else:
            limit, uncertainty = combined(columns[0], columns[1], floor, ROUNDING if name else rounding)
            if corners and not common_powers(columns[0], columns[1], floor):  # the corner lies elsewhere between the nodes of each grid
                uncertainty = max(uncertainty, combined_rough(entries_of_all, floor)[1])
        limits[name], uncertainties[name] = limit.value, uncertainty
        if not name:
            order = limit.order
    entries = sorted((count, float(numbers[""])) for one in taken for count, numbers in one.items())
    return limits, uncertainties, order, tuple(Refined(count, value) for count, value in entries)


def _enough(outcome: Outcome, digits: int | None) -> bool:
    limits, uncertainties, _, _ = outcome
    uncertainty = uncertainties[""]
    return uncertainty is not None and uncertainty <= 0.5 * 10.0 ** -(digits or 8) * abs(limits[""])


def _settles(families: Sequence[Family[Feature]], values: Callable[[Feature, int], Mapping[str, float]]) -> bool:
    """Whether the main value's changes shrink, or are small, from grid to finer grid in both families."""
    for family in families:
        numbers = [values(family.found[count], count)[""] for count in family.run()]
        changes = np.abs(np.diff(numbers))
        if not (changes[-1] <= 0.75 * changes[-2] or changes[-1] <= 1e-9 * abs(numbers[-1])):
            return False
    return True
