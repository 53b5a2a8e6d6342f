"""Grids that follow the states of a branch: between two steps the nodes are moved where the state needs them."""

from __future__ import annotations

from bvp.adapt import MOST_MOVES, Adaptation, moved_over
from bvp.discrete_system import DiscreteSystem
from bvp.newton import Scales
from continuation.path import Path, Point, turned_round

ALONG = 0.9  # cosine between the tangents before and after a move: a branch must not be met from another side, or turned round
LEAST_SIZE = 1e-100  # of a parameter: its square is still a number


def moved(path: Path, point: Point, adaptation: Adaptation | None, rough: float | None = None) -> Point:
    """The point on the grid that its state needs, the path's system changed with it; the same point where the grid will do.

    rough : the state's roughness, where it is known. The state is solved again on each grid, on the hyperplane across the
    tangent, so that a turning point is no obstacle.
    """
    for _ in range(MOST_MOVES if adaptation is not None else 0):
        assert adaptation is not None
        system = adaptation.better(path.system, point.u, point.parameter, rough)
        if system is None:
            break
        base = carried_point(point, path.system, system)
        # A parameter far below the way it has come is held by its own size: the state stays where it is on the branch.
        own = max(min(base.scales.parameter, abs(point.parameter) or base.scales.parameter), LEAST_SIZE)
        base = base._replace(scales=Scales(base.scales.state, own))
        began = moved_over(path.began[0], path.system, system)
        old, path.system = path.system, system
        found = path.step_from(base, 0.0)
        before, path.began = path.began, (began, path.began[1])
        landed = path.point(found, point.arclength, base) if found.ok else None
        if landed is None or not landed.tangent_to(base) >= ALONG or turned_round(point, landed):
            path.system, path.began = old, before
            break
        point, rough = landed, None
    return point


def carried_point(point: Point, old: DiscreteSystem, new: DiscreteSystem) -> Point:
    """A point's state and tangent on another grid, not solved again."""
    if old is new:
        return point
    return point._replace(u=moved_over(point.u, old, new), tangent=moved_over(point.tangent, old, new))
