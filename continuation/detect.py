"""What happens between two points of a branch: turning points, pairs of them that a step could skip, a closed loop."""

from __future__ import annotations

from continuation.path import Path, Point, inner

MOST_HALVINGS = 8
DIP = 0.7  # a pace that may fall below this share of its ends' lesser one, in between, is looked at more closely


def paces_along(path: Path, before: Point, after: Point) -> tuple[float, float, float]:
    """dp by distance at two points, both measured along the chord between them, and the mean pace over it."""
    scales = before.scales
    state, parameter = after.u - before.u, after.parameter - before.parameter
    length = inner(state, parameter, state, parameter, scales) ** 0.5
    if length == 0.0:
        return before.pace, after.pace, before.pace

    def along(point: Point) -> float:
        across = inner(point.tangent, point.pace, state, parameter, scales) / length
        return point.pace / across if across else point.pace

    return along(before), along(after), parameter / length


def may_dip(path: Path, before: Point, after: Point) -> bool:
    """Whether the parameter may turn twice between two points whose paces agree in sign.

    The cubic through both points with their slopes has the derivative of a parabola; it is held against zero with a
    margin, so that a cubic that is only nearly right still gives the alarm.
    """
    first, last, mean = paces_along(path, before, after)
    if first * last <= 0:
        return False
    sign = 1.0 if first > 0 else -1.0
    first, last, mean = sign * first, sign * last, sign * mean
    # p'(t) = first + t (6 mean - 4 first - 2 last) + t^2 (3 first + 3 last - 6 mean)
    curve = 3.0 * (first + last - 2.0 * mean)
    if curve <= 0.0:
        return False
    t = -(6.0 * mean - 4.0 * first - 2.0 * last) / (2.0 * curve)
    if not 0.0 < t < 1.0:
        return False
    lowest = first + t * (6.0 * mean - 4.0 * first - 2.0 * last) + t * t * curve
    return lowest < DIP * min(first, last)


def closes(start: Point, before: Point, after: Point) -> bool:
    """Whether the step from before to after passes through the branch's first point, in the direction it set out."""
    near = abs(after.parameter - before.parameter)
    if min(abs(before.parameter - start.parameter), abs(after.parameter - start.parameter)) > near:
        return False  # without a look at the states
    scales = start.scales
    gap_before = inner(start.u - before.u, start.parameter - before.parameter, start.tangent, start.pace, scales)
    gap_after = inner(after.u - start.u, after.parameter - start.parameter, start.tangent, start.pace, scales)
    if not (gap_before >= 0.0 and gap_after >= 0.0):
        return False
    step = (
        inner(after.u - before.u, after.parameter - before.parameter, after.u - before.u, after.parameter - before.parameter, scales) ** 0.5
    )
    share = gap_before / (gap_before + gap_after) if gap_before + gap_after else 0.5
    state = before.u + share * (after.u - before.u) - start.u
    parameter = before.parameter + share * (after.parameter - before.parameter) - start.parameter
    off = inner(state, parameter, state, parameter, scales) ** 0.5
    return off < 0.1 * step
