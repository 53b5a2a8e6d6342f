"""A branch drawn on matplotlib axes: its curve, its turning points with their values, how many states exist where."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from continuation.drawing.below import lines_below, write_below
from continuation.drawing.frame import set_limits, set_ticks, set_words, spans_decades, unit_of
from continuation.drawing.labels import are_apart, draw_strokes, label_pieces, label_turning_points, room_in
from continuation.drawing.paper import HUE, LINE_HEIGHT, POINTS_PER_INCH, WIDTH
from continuation.drawing.pieces import Piece, pieces_of, stretches_of
from continuation.drawing.places import Point
from continuation.drawing.strip import draw_strip, label_strip
from continuation.records import Branch, TurningPoint

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MOST_VALUES = 3  # more turning points than this are numbered, and listed below the axes
DASHES = (0, (4.0, 2.2))


def draw_branch(branch: Branch, measure: str | None = None, axes: Axes | None = None) -> Axes:
    """Draw a branch against its parameter; returns the Axes, new ones on a new pyplot figure where none are given.

    Solid pieces are stable, dashed ones unstable, the convention of text-books (Strogatz, Nonlinear Dynamics and Chaos,
    1994, section 3.1, from memory); beside each stands its number of unstable directions. A turning point has a short
    stroke along its tangent and its value ± uncertainty; more than three are numbered, and listed below. The strip along
    the parameter axis says how many states the branch has there, as far as it was traced.

    `measure` is one of `branch.measures`, by default the first; KeyError where it was not measured. Given axes need a
    layout that makes room for what is written below them ("constrained" does), and the size they are to have: labels are
    placed for the size that they find.
    """
    chosen = next(iter(branch.measures)) if measure is None else measure
    branch.measure(chosen)  # the KeyError comes before anything is drawn
    axes = _new_axes(branch) if axes is None else axes
    points = branch.turning_points
    places = [_place_of(point, branch, chosen) for point in points]
    pieces = _draw_curve(axes, branch, chosen, places)
    stretches = stretches_of(branch)
    set_limits(axes, branch, chosen, places, stretches)
    draw_strip(axes, stretches)
    set_ticks(axes)
    heads = set_words(axes, branch, chosen, lines_below(branch, len(points) > MOST_VALUES))
    unit = unit_of(branch, branch.along)
    for numbered in [False, True] if len(points) <= MOST_VALUES and are_apart(axes, places) else [True]:
        below = write_below(axes, branch, chosen, heads, numbered)
        strokes = draw_strokes(axes, places)
        room = room_in(axes, pieces, strokes)
        if label_turning_points(axes, room, points, places, unit, numbered):
            break
        for artist in (*below, *strokes):
            artist.remove()
    label_pieces(axes, room, pieces)
    label_strip(axes, stretches)
    return axes


def height_of_figure(branch: Branch) -> float:
    """A good height in inches for a figure of the usual width with nothing but a branch on it."""
    return 100 / 25.4 + lines_below(branch, len(branch.turning_points) > MOST_VALUES) * LINE_HEIGHT / POINTS_PER_INCH


def _new_axes(branch: Branch) -> Axes:
    from matplotlib import pyplot

    axes: Axes = pyplot.figure(figsize=(WIDTH, height_of_figure(branch)), layout="constrained").add_subplot()
    return axes


def _place_of(point: TurningPoint, branch: Branch, measure: str) -> Point:
    """Where a turning point is drawn: its refined value, and the measure there; on the curve where one of them is not known."""
    height = point.measures.get(measure, np.nan)
    on_curve = np.interp(point.position, branch.arclength, branch.measure(measure))
    return point.value if np.isfinite(point.value) else point.on_grid, float(height if np.isfinite(height) else on_curve)


def _draw_curve(axes: Axes, branch: Branch, measure: str, places: Sequence[Point]) -> tuple[Piece, ...]:
    if spans_decades(np.asarray(branch.parameter), [x for x, _ in places]):
        axes.set_xscale("log")
    if spans_decades(branch.measure(measure), [y for _, y in places]):
        axes.set_yscale("log")
    pieces = pieces_of(branch, measure, axes.get_xscale() == "log", axes.get_yscale() == "log")
    look: dict[str, Any] = {"color": HUE, "linewidth": 1.5, "dash_capstyle": "butt", "gid": "piece"}
    for piece in pieces:
        style = DASHES if piece.unstable else "solid"
        marker = "_" if piece.parameter.size == 1 else ""  # a branch of one point must be seen too
        axes.plot(piece.parameter, piece.measure, linestyle=style, marker=marker, **look)
    return pieces
