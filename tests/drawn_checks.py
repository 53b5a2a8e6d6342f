"""What is wrong with a drawn figure, as a list of sentences: texts on each other, on the curve, or outside."""

from __future__ import annotations

from itertools import combinations, pairwise
from typing import Any

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.text import Text

Corners = tuple[float, float, float, float]  # left, bottom, right, top in pixels


def texts_of(figure: Figure) -> list[Text]:
    """The texts that are seen, tick labels within the limits included."""
    found = [text for text in figure.findobj(Text) if text.get_visible() and text.get_text().strip()]
    hidden = set()
    for axes in figure.axes:
        for axis in (axes.xaxis, axes.yaxis):
            drawn: Any = axis
            seen = {id(tick.label1) for tick in drawn._update_ticks()}
            ticks = [tick.label1 for tick in (*axis.get_major_ticks(), *axis.get_minor_ticks())]
            hidden |= {id(label) for label in ticks} - seen
    return [text for text in found if id(text) not in hidden]


def faults_of(figure: Figure) -> list[str]:
    """Every overlap of two texts, every label that touches curve or stroke or leaves the frame, every text outside the figure."""
    figure.draw_without_rendering()
    texts = [(text, corners_of(text)) for text in texts_of(figure)]
    whole = figure.bbox.x0, figure.bbox.y0, figure.bbox.x1, figure.bbox.y1
    faults = [f"{text.get_text()!r} leaves the figure" for text, box in texts if not _within(box, whole)]
    for (one, first), (other, second) in combinations(texts, 2):
        if first[0] < second[2] and second[0] < first[2] and first[1] < second[3] and second[1] < first[3]:
            faults.append(f"{one.get_text()!r} lies on {other.get_text()!r}")
    for axes in figure.axes:
        frame = axes.bbox.x0, axes.bbox.y0, axes.bbox.x1, axes.bbox.y1
        curve = _curve_of(axes)
        for text, box in texts:
            if text.get_gid() == "label" and text.axes is axes:
                faults += [] if _within(box, frame) else [f"{text.get_text()!r} leaves the frame"]
                inside = (box[0] < curve[:, 0]) & (curve[:, 0] < box[2]) & (box[1] < curve[:, 1]) & (curve[:, 1] < box[3])
                faults += [f"{text.get_text()!r} lies on the curve"] if np.any(inside) else []
    return faults


def corners_of(text: Text) -> Corners:
    """The box round a text, without the line that an annotation may have."""
    box = Text.get_window_extent(text)
    return box.x0, box.y0, box.x1, box.y1


def words_of(figure: Figure, gid: str) -> list[str]:
    """The words of one kind of text, in the order they were written."""
    return [text.get_text() for text in texts_of(figure) if text.get_gid() == gid]


def _curve_of(axes: Axes) -> np.ndarray[Any, Any]:
    """Curves and strokes as pixels less than half a pixel apart, shape (n, 2)."""
    found = [np.empty((0, 2))]
    scale = axes.figure.dpi / 72
    for line in axes.get_lines():
        places = axes.transData.transform(line.get_xydata())
        if line.get_gid() == "tangent":
            places = places + np.array([[0, -0.5], [0, 0.5]]) * line.get_markersize() * scale
        places = np.clip(places, -5000, 5000)
        for begin, end in pairwise(places):
            found.append(np.linspace(begin, end, int(2 * np.hypot(*(end - begin))) + 2))
    return np.concatenate(found)


def _within(box: Corners, frame: Corners) -> bool:
    return frame[0] <= box[0] and box[2] <= frame[2] and frame[1] <= box[1] and box[3] <= frame[3]
