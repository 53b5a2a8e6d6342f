"""Labels inside the frame: values at turning points, numbers of unstable directions beside the pieces."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING, Any, cast

import numpy as np

from continuation.digits import with_uncertainty
from continuation.drawing.paper import DARK, GREY, TEXT_SIZE, box_of, frame_of, in_data, on_paper
from continuation.drawing.pieces import Piece
from continuation.drawing.places import REACHES, Box, Field, Point, line_to
from continuation.records import Array, TurningPoint

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.lines import Line2D
    from matplotlib.text import Annotation

LONGEST_STROKE, SHORTEST_STROKE = 22.0, 6.0  # points: the tangent at a turning point is shorter where another is near
_HARDLY_SEEN = 15.0
_WITH_LINE = 8.0  # a label farther than this from its turning point has a line to it
_ALONG_PIECE = (0.5, 0.42, 0.58, 0.34, 0.66, 0.26, 0.74, 0.18, 0.82, 0.1, 0.9)  # where a piece's label is tried
_BESIDE = REACHES[:4]  # a piece's label stands close to it


@dataclass(frozen=True)
class Room:
    """What labels have to keep clear of, and the curve of each piece as dense points on paper."""

    field: Field
    curves: tuple[Array, ...]


def are_apart(axes: Axes, places: Sequence[Point]) -> bool:
    """Whether no two turning points lie so close that the piece between them is hardly seen; the layout has to be settled."""
    return bool(np.all(_nearest(axes, places) > _HARDLY_SEEN))


def draw_strokes(axes: Axes, places: Sequence[Point]) -> list[Line2D]:
    """Draw a short vertical stroke, the tangent, at each turning point; the figure's layout has to be settled."""
    drawn = []
    for (x, y), nearest in zip(places, _nearest(axes, places), strict=True):
        length = float(np.clip(0.7 * nearest, SHORTEST_STROKE, LONGEST_STROKE))
        drawn += axes.plot([x], [y], linestyle="none", marker="|", markersize=length, markeredgewidth=1.0, color=DARK, gid="tangent")
    return drawn


def room_in(axes: Axes, pieces: Sequence[Piece], strokes: Sequence[Line2D]) -> Room:
    """The room that a curve and its tangent strokes leave inside the frame; the figure's layout has to be settled."""
    field = Field(frame_of(axes).grown(-1.0))
    curves = []
    for piece in pieces:
        places = on_paper(axes, piece.parameter, piece.measure)
        curves.append(field.add_curve(places[:, 0], places[:, 1]))
    for stroke in strokes:
        middle = on_paper(axes, np.asarray(stroke.get_xdata()), np.asarray(stroke.get_ydata()))[0]
        field.add_curve(np.full(2, middle[0]), middle[1] + np.array([-0.5, 0.5]) * stroke.get_markersize())
    return Room(field, tuple(curves))


def label_turning_points(
    axes: Axes, room: Room, points: Sequence[TurningPoint], places: Sequence[Point], unit: str, numbered: bool
) -> bool:
    """Write each value, or each number, beside its stroke; False, with nothing written, where a value finds no room.

    A number that finds no room is left out: its turning point is in the list.
    """
    written: list[Annotation] = []
    for number, (point, place) in enumerate(zip(points, places, strict=True), start=1):
        label = _written(axes, str(number) if numbered else in_words(point, unit), place, DARK)
        if numbered:
            label.set_fontweight("bold")
        box = room.field.place(_size(label), _anchor(label), (1.0 if point.states == "below" else -1.0, 0.0), REACHES)
        if box is not None:
            written += [label, *_set(label, box, room.field)]
            continue
        label.remove()
        if not numbered:
            for annotation in written:
                annotation.remove()
            return False
    return True


def in_words(point: TurningPoint, unit: str = "") -> str:
    """A turning point's value ± uncertainty, and below it whether it is one of the scheme alone."""
    value = with_uncertainty(point.value, point.uncertainty, unit)
    return value if point.survives else f"{value}\ndoes not survive refinement"


def label_pieces(axes: Axes, room: Room, pieces: Sequence[Piece]) -> None:
    """Write the number of unstable directions beside each piece that has room for it."""
    for index, piece in enumerate(pieces):
        inside = _inside(room.curves[index], room.field.frame)
        if piece.unstable is None or not inside.size:
            continue
        for fraction in _ALONG_PIECE:
            x, y = in_data(axes, inside[int(fraction * (len(inside) - 1))])[0]
            label = _written(axes, f"{piece.unstable} unstable", (x, y), GREY)
            box = room.field.place(_size(label), _anchor(label), (-1.0, 0.3), _BESIDE, partial(_belongs, room, index))
            if box is not None:
                _set(label, box)
                break
            label.remove()


def _nearest(axes: Axes, places: Sequence[Point]) -> Array:
    """The distance on paper from each place to the nearest other."""
    on_page = np.array([on_paper(axes, x, y)[0] for x, y in places]).reshape(-1, 2)
    distances = np.hypot(*(on_page[:, None] - on_page).T)
    np.fill_diagonal(distances, np.inf)
    return np.asarray(np.min(distances, axis=0, initial=np.inf))


def _written(axes: Axes, words: str, place: Point, color: str) -> Annotation:
    style: dict[str, Any] = {"fontsize": TEXT_SIZE, "color": color, "linespacing": 1.1, "parse_math": False, "gid": "label"}
    return axes.annotate(words, place, (0, 0), textcoords="offset points", ha="left", va="bottom", annotation_clip=False, **style)


def _size(label: Annotation) -> Point:
    box = box_of(label)
    return box.right - box.left, box.top - box.bottom


def _anchor(label: Annotation) -> Point:
    """The place that a label belongs to, on paper."""
    x, y = on_paper(_axes_of(label), *label.xy)[0]
    return float(x), float(y)


def _axes_of(label: Annotation) -> Axes:
    axes: Any = label.axes
    return cast("Axes", axes)


def _set(label: Annotation, box: Box, field: Field | None = None) -> list[Annotation]:
    """Move a label to its box; with a field, draw a line to its anchor where that is far, and put the line in the way."""
    anchor = _anchor(label)
    label.set_position((box.left - anchor[0], box.bottom - anchor[1]))
    line = line_to(box, anchor)
    if field is None or np.hypot(*(line[-1] - line[0])) <= _WITH_LINE:
        return []
    field.points = np.concatenate([field.points, line])
    straight = {"arrowstyle": "-", "linewidth": 0.6, "color": GREY, "shrinkA": 0.0, "shrinkB": 1.0}
    end = float(line[-1][0] - anchor[0]), float(line[-1][1] - anchor[1])
    return [_axes_of(label).annotate("", label.xy, end, textcoords="offset points", arrowprops=straight, annotation_clip=False)]


def _belongs(room: Room, piece: int, box: Box) -> bool:
    """Whether a label stands nearer to its own piece than to any other."""
    distances = [_distance(box, curve) for curve in room.curves]
    return all(distances[piece] < 0.8 * distance for index, distance in enumerate(distances) if index != piece)


def _distance(box: Box, points: Array) -> float:
    across = np.maximum(np.maximum(box.left - points[:, 0], points[:, 0] - box.right), 0.0)
    up = np.maximum(np.maximum(box.bottom - points[:, 1], points[:, 1] - box.top), 0.0)
    return float(np.min(np.hypot(across, up), initial=np.inf))


def _inside(points: Array, frame: Box) -> Array:
    x, y = points[:, 0], points[:, 1]
    return points[(frame.left < x) & (x < frame.right) & (frame.bottom < y) & (y < frame.top)]
