"""Grids that follow the states of a branch: between two steps the nodes are moved where the state needs them."""

from __future__ import annotations

from bvp.adapt import MOST_MOVES, Adaptation, moved_over
from bvp.discretize import DiscreteSystem
from continuation.path import Path, Point


def moved(path: Path, point: Point, adaptation: Adaptation | None) -> Point:
    """The point on the grid that its state needs, the path's system changed with it; the same point where the grid will do.

    The state is solved again on each grid, on the hyperplane across the tangent, so that a turning point is no obstacle.
    """
    for _ in range(MOST_MOVES if adaptation is not None else 0):
        assert adaptation is not None
        system = adaptation.better(path.system, point.u, point.parameter)
        if system is None:
            break
        base = carried_point(point, path.system, system)
        began = moved_over(path.began[0], path.system, system)
        old, path.system = path.system, system
        found = path.step_from(base, 0.0)
        if not found.ok:
            path.system = old
            break
        path.began = (began, path.began[1])
        point = path.point(found, point.arclength, base)
    return point


def carried_point(point: Point, old: DiscreteSystem, new: DiscreteSystem) -> Point:
    """A point's state and tangent on another grid, not solved again."""
    if old is new:
        return point
    return point._replace(u=moved_over(point.u, old, new), tangent=moved_over(point.tangent, old, new))
