"""Looks and lengths on paper. Lengths are in points (1/72 inch), y upward; matplotlib is imported when it is needed."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, cast

import numpy as np

from continuation.drawing.places import Box
from continuation.records import Array

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure
    from matplotlib.text import Text
    from matplotlib.transforms import Transform

HUE = "#2f6384"  # the one hue; all else is grey, so that a grey print and any eye keep everything
DARK, GREY, LIGHT = "#2b3135", "#5c6368", "#b4babe"
TEXT_SIZE, AXIS_SIZE = 8.0, 9.0
LINE_HEIGHT = 11.0
WIDTH = 160 / 25.4  # inches: the text width of a page
POINTS_PER_INCH = 72.0


def root_figure(axes: Axes) -> Figure:
    """The figure that axes lie on, through any subfigure."""
    return cast("Figure", axes.get_figure(root=True))


def settle(axes: Axes) -> None:
    """Let the figure's layout do its work, so that places on paper are known."""
    root_figure(axes).draw_without_rendering()


def on_paper(axes: Axes, x: Array | float, y: Array | float) -> Array:
    """Places in data coordinates, shape (n,) each, as points on paper, shape (n, 2)."""
    pixels = axes.transData.transform(np.stack([np.atleast_1d(x), np.atleast_1d(y)], axis=1))
    return np.asarray(pixels * (POINTS_PER_INCH / root_figure(axes).dpi))


def in_data(axes: Axes, places: Array) -> Array:
    """The other way round."""
    return np.asarray(axes.transData.inverted().transform(np.atleast_2d(places) * (root_figure(axes).dpi / POINTS_PER_INCH)))


def frame_of(axes: Axes) -> Box:
    """The frame of the axes on paper."""
    return _box(axes.bbox, root_figure(axes))


def box_of(text: Text) -> Box:
    """The box round a text on paper."""
    return _box(text.get_window_extent(), cast("Figure", text.get_figure(root=True)))


def from_corner(axes: Axes) -> Transform:
    """Points to the right of, and above, the lower left corner of the frame."""
    from matplotlib.transforms import Affine2D, ScaledTranslation

    corner: Any = axes.transAxes
    return Affine2D().scale(1 / POINTS_PER_INCH) + root_figure(axes).dpi_scale_trans + ScaledTranslation(0, 0, corner)


def wrapped(words: str, width: float, figure: Figure, size: float = TEXT_SIZE, weight: str = "normal") -> list[str]:
    """The lines of a text that is to be no wider than `width`; a single word that is wider is cut."""
    measuring = figure.text(0, 0, "", fontsize=size, fontweight=weight, parse_math=False)

    def fits(line: str) -> bool:
        measuring.set_text(line)
        box = box_of(measuring)
        return box.right - box.left <= width

    lines: list[str] = []
    for paragraph in words.splitlines():
        line = ""
        for word in paragraph.split():
            if line and fits(f"{line} {word}"):
                line = f"{line} {word}"
                continue
            lines += [line] if line else []
            while not fits(word) and len(word) > 1:
                kept = max((length for length in range(1, len(word)) if fits(word[:length])), default=1)
                lines.append(word[:kept])
                word = word[kept:]
            line = word
        lines += [line] if line else []
    measuring.remove()
    return lines


def _box(pixels: Any, figure: Figure) -> Box:
    scale = POINTS_PER_INCH / figure.dpi
    return Box(pixels.x0 * scale, pixels.y0 * scale, pixels.x1 * scale, pixels.y1 * scale)
