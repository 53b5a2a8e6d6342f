"""A branch followed on one grid from its first point until one of its endings; detectors look at every step.

A detector is anything with `look(path, before, after)`; turning points, crossings of a value and measures that are
reached are three of them. Adding one touches its own file and the list it is passed in.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Generic, Protocol, TypeVar

import numpy as np

from bvp.adapt import Adaptation
from bvp.monitor import roughness
from continuation.crossing import crossings, distance_of
from continuation.detect import MOST_HALVINGS, closes, may_dip
from continuation.moving import carried_point, moved
from continuation.path import Path, Point, turned_round
from continuation.resolution import resolves
from continuation.step_length import StepLength

Kept = TypeVar("Kept")

ROUGH = 0.5  # roughness from which on a finer grid is asked whether the state is real
ROUGHER = 1.5  # and how much rougher it has to get after a good answer, before it is asked again at once,
POINTS_BETWEEN = 4  # or after so many points
MOST_LOOKS = 10  # halvings of a step that is looked into for a hairpin
TURNED = 0.5  # radians between neighbours in it that show one
WITHIN = "edge of the range"
CLOSED = "closed loop"
STUCK = "no smaller step"
LONGEST = "longest branch"
COARSE = "grid too coarse"
STOPPED = "interrupted"


class Detector(Protocol):
    """What looks at every step of a branch, between two neighbouring points."""

    def look(self, path: Path, before: Point, after: Point) -> None:
        """Take note of what lies between the two points."""


@dataclass
class Limits:
    """Where a branch ends: the range of the parameter, a test of a point, a count of points."""

    lowest: float = -np.inf
    highest: float = np.inf
    longest: int = 400
    ended: Callable[[Point], str | None] = field(default=lambda point: None)


@dataclass
class Followed(Generic[Kept]):
    """What was kept of the points of one direction, the first included, and how it ended."""

    points: list[Kept]
    ended: str
    reason: str = ""


def follow(
    path: Path,
    start: Point,
    rule: StepLength,
    limits: Limits,
    detectors: Sequence[Detector],
    keep: Callable[[Point], Kept],
    adaptation: Adaptation | None = None,
) -> Followed[Kept]:
    """The branch from a point on, step by step; grids follow its states where an adaptation is given.

    `keep` sees every accepted point and returns what is stored of it.
    """
    points = [keep(start)]
    here, length = start, rule.first
    suspicious, again = ROUGH, 0
    while True:
        if len(points) >= limits.longest:
            return Followed(points, LONGEST)
        following, length, reason = _next(path, here, length, rule)
        if following is None:
            return Followed(points, STUCK, reason)
        edge = _edge(path, here, following, limits)
        if edge is None and not limits.lowest <= following.parameter <= limits.highest:
            length = 0.5 * (following.arclength - here.arclength)  # the state on the edge was not found: come nearer to it
            if length < rule.smallest:
                return Followed(points, WITHIN)
            continue
        closed = edge is None and len(points) > 5 and closes(start, here, following)
        if closed:  # the loop ends in its first point: what lies beyond has been met already
            following = start._replace(arclength=here.arclength + distance_of(here, start))
        stretch = _looked_into(path, here, edge or following, 0)
        for before, after in zip([here, *stretch], stretch, strict=False):
            for detector in detectors:
                detector.look(path, before, after)
            points.append(keep(after))
            ended = limits.ended(after)
            if ended:
                return Followed(points, ended)
        if edge is not None:
            return Followed(points, WITHIN)
        if closed:
            return Followed(points, CLOSED)
        system = path.system
        rough = roughness(following.u)
        here = moved(path, following, adaptation, rough)
        start = carried_point(start, system, path.system)
        if here is not following:
            rough = roughness(here.u)
        if rough > suspicious or (rough > ROUGH and len(points) >= again):
            if not resolves(path, here):
                return Followed(points, COARSE)
            suspicious, again = ROUGHER * rough, len(points) + POINTS_BETWEEN


def _next(path: Path, here: Point, length: float, rule: StepLength) -> tuple[Point | None, float, str]:
    """The next point, the length to try after it, and the reason where there is none."""
    reason = ""
    while length >= rule.smallest:
        found = path.step_from(here, length)
        if found.ok:
            after = path.point(found, here.arclength + length, here)
            turn = math.acos(max(-1.0, min(here.tangent_to(after), 1.0)))
            if rule.accepted(turn, found.first) and not _over_hairpin(path, here, after):
                return after, rule.following(length, turn, found.first, found.steps), ""
            reason = "the branch bends more sharply than the smallest step can follow"
        else:
            reason = found.reason
        length *= rule_after_failure(found.ok)
    return None, length, reason


def _over_hairpin(path: Path, before: Point, after: Point) -> bool:
    """Whether the step went over a hairpin so narrow that its far side looks like a small turn, the tangent taken backwards.

    Where the stability changes and the parameter does not turn back, or the other way round, the step is halved toward
    the place: over a hairpin the tangent is seen to turn somewhere, over a branch point it never is.
    """
    for _ in range(MOST_LOOKS):
        if not turned_round(before, after):
            return False
        middle = _between(path, before, after)
        if middle is None or min(before.tangent_to(middle), middle.tangent_to(after)) < math.cos(TURNED):
            return True
        before, after = (before, middle) if turned_round(before, middle) else (middle, after)
    return False


def rule_after_failure(converged: bool) -> float:
    """The share of a step that is tried after it failed: less where Newton's method did not even end."""
    return 0.5 if converged else 0.3


def _looked_into(path: Path, before: Point, after: Point, depth: int) -> list[Point]:
    """The points after `before` up to `after`, more of them where the parameter could turn twice unseen."""
    if depth >= MOST_HALVINGS or not may_dip(path, before, after):
        return [after]
    middle = _between(path, before, after)
    if middle is None:
        return [after]
    return _looked_into(path, before, middle, depth + 1) + _looked_into(path, middle, after, depth + 1)


def _between(path: Path, before: Point, after: Point) -> Point | None:
    """A point half way between two neighbours."""
    half = 0.5 * (after.arclength - before.arclength)
    guess = (0.5 * (before.u + after.u), 0.5 * (before.parameter + after.parameter))
    found = path.step_from(before, half, guess)
    return path.point(found, before.arclength + half, before) if found.ok else None


def _edge(path: Path, before: Point, after: Point, limits: Limits) -> Point | None:
    """The point on the edge of the parameter's range, where the step first crosses it; a turning point may lie beyond."""
    for edge in (limits.lowest, limits.highest):
        passed = (before.parameter - edge) * (after.parameter - edge) < 0.0
        if before.parameter != edge and math.isfinite(edge) and (passed or before.pace * after.pace < 0.0):
            found = crossings(path, before, after, edge)
            if found:
                first = path.point(found[0], before.arclength, before)
                return first._replace(arclength=before.arclength + distance_of(before, first))
    return None
