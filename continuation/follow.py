"""A branch followed on one grid from its first point until one of its endings; detectors look at every step.

A detector is anything with `look(path, before, after)`; turning points, crossings of a value and measures that are
reached are three of them. Adding one touches its own file and the list it is passed in.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from typing import Protocol

import numpy as np

from bvp.newton import correct, held_parameter
from continuation.detect import MOST_HALVINGS, closes, may_dip
from continuation.path import CORRECTED, Path, Point, predicted
from continuation.step_length import StepLength

ROUGH = 0.3  # second difference over the range of the state, beyond which a peak stands on one node and means nothing
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
class Followed:
    """The points of one direction, the first included, and how it ended."""

    points: list[Point]
    ended: str
    reason: str = ""


def follow(
    path: Path, start: Point, rule: StepLength, limits: Limits, detectors: Sequence[Detector], keep: Callable[[Point], Point]
) -> Followed:
    """The branch from a point on, step by step; `keep` sees every accepted point and returns what is stored of it."""
    points = [keep(start)]
    here, length = start, rule.first
    reason = ""
    while True:
        if len(points) >= limits.longest:
            return Followed(points, LONGEST)
        following, length, reason = _next(path, here, length, rule)
        if following is None:
            return Followed(points, STUCK, reason)
        edge = _edge(path, here, following, limits)
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
        if roughness(following.u) > ROUGH:
            return Followed(points, COARSE)
        if len(points) > 6 and closes(start, here, following):
            return Followed(points, CLOSED)
        here = following


def roughness(u: np.ndarray) -> float:  # type: ignore[type-arg]
    """The largest second difference of nodal values over their range: small where a grid resolves a state."""
    inside = u[1:-1]
    span = float(inside.max() - inside.min())
    if not span > 0.0 or inside.size < 5:
        return 0.0
    return float(np.max(np.abs(np.diff(inside, 2)))) / span


def _next(path: Path, here: Point, length: float, rule: StepLength) -> tuple[Point | None, float, str]:
    """The next point, the length to try after it, and the reason where there is none."""
    reason = ""
    while length >= rule.smallest:
        found = path.step_from(here, length)
        if found.ok:
            after = path.point(found, here.arclength + length, here)
            turn = float(np.arccos(np.clip(here.tangent_to(after), -1.0, 1.0)))
            if rule.accepted(turn, found.first):
                return after, rule.following(length, turn, found.first, found.steps), ""
            reason = "the branch bends more sharply than the smallest step can follow"
        else:
            reason = found.reason
        length *= rule_after_failure(found.ok)
    return None, length, reason


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
    """The point on the edge of the parameter's range, where the step crosses it."""
    for edge in (limits.lowest, limits.highest):
        if (before.parameter - edge) * (after.parameter - edge) < 0.0:
            share = (edge - before.parameter) / (after.parameter - before.parameter)
            found = at_parameter(path, before, after, edge)
            if found is not None:
                return path.point(found.found, before.arclength + share * (after.arclength - before.arclength), before)
            return None
    return None


def at_parameter(path: Path, before: Point, after: Point, parameter: float) -> Point | None:
    """The state between two points at which the parameter has a value; None where Newton's method does not end."""
    share = (parameter - before.parameter) / (after.parameter - before.parameter)
    guess = before.u + share * (after.u - before.u)
    found = path.counted(correct(path.system, guess, parameter, held_parameter(path.system, parameter), before.scales, tolerance=CORRECTED))
    if not found.ok:
        guess, _ = predicted(before, share * (after.arclength - before.arclength))
        found = path.counted(
            correct(path.system, guess, parameter, held_parameter(path.system, parameter), before.scales, tolerance=CORRECTED)
        )
    return path.point(found, before.arclength + share * (after.arclength - before.arclength), before) if found.ok else None
