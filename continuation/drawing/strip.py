"""The strip along the parameter axis that says how many states a branch has there."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby
from typing import TYPE_CHECKING, Any

import numpy as np

from continuation.drawing.paper import DARK, HUE, LIGHT, TEXT_SIZE, box_of, from_corner, in_data, on_paper
from continuation.drawing.pieces import Stretch

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.transforms import Transform

HEIGHT = 13.0  # points
GAP = 1.5  # between the frame and the strip
_NARROW = 9.0  # a stretch narrower than a digit with some room shares its label with narrow neighbours
_TINTS = (0.0, 0.10, 0.22, 0.34)  # of the hue, for 0, 1, 2, and 3 or more states: light enough for dark words on them


def draw_strip(axes: Axes, stretches: Sequence[Stretch]) -> None:
    """Tint the stretches that are seen below the frame; one whose number is not known stays empty."""
    from matplotlib.colors import to_rgb
    from matplotlib.patches import Rectangle

    style: dict[str, Any] = {"edgecolor": LIGHT, "linewidth": 0.5, "clip_on": False, "gid": "strip"}
    for stretch in _seen(axes, stretches):
        if stretch.states is not None:
            share = _TINTS[min(stretch.states, len(_TINTS) - 1)]
            tint = tuple(1 - share * (1 - part) for part in to_rgb(HUE))
            corner, width = (stretch.lower, -GAP - HEIGHT), stretch.upper - stretch.lower
            axes.add_patch(Rectangle(corner, width, HEIGHT, transform=_along(axes), facecolor=tint, **style))
    axes.tick_params(axis="x", which="both", pad=GAP + HEIGHT + 3)


def label_strip(axes: Axes, stretches: Sequence[Stretch]) -> None:
    """Write the numbers into the strip: "2 states", or "2" where it is narrow; very narrow neighbours share one label."""
    known = [stretch for stretch in _seen(axes, stretches) if stretch.states is not None]
    for is_wide, group in groupby(known, key=lambda stretch: _width(axes, stretch.lower, stretch.upper) >= _NARROW):
        together = list(group)
        for shared in [[stretch] for stretch in together] if is_wide else [together]:
            _write(axes, shared[0].lower, shared[-1].upper, _wordings([(stretch.states or 0, stretch.or_more) for stretch in shared]))


def _write(axes: Axes, lower: float, upper: float, wordings: Sequence[str]) -> None:
    """The longest wording that fits between two values of the parameter; nothing where none does."""
    ends = on_paper(axes, np.array([lower, upper]), np.full(2, axes.get_ylim()[0]))
    middle = in_data(axes, ends.mean(axis=0))[0, 0]
    style: dict[str, Any] = {"ha": "center", "va": "center_baseline", "fontsize": TEXT_SIZE, "color": DARK, "gid": "states"}
    for words in wordings:
        text = axes.text(middle, -GAP - HEIGHT / 2 - 0.5, words, transform=_along(axes), **style)
        box = box_of(text)
        if box.right - box.left + 3 <= _width(axes, lower, upper):
            return
        text.remove()


def _wordings(counts: Sequence[tuple[int, bool]]) -> list[str]:
    """How many states, or how many at least, there are on stretches that share a label: the longest wording first."""
    least, most = min(counts)[0], max(counts)[0]
    if least < most:
        return [f"{least}–{most} states", f"{least}–{most}"]
    if any(or_more for _, or_more in counts):
        return [f"{least} or more states", f"{least} or more", f"≥{least}"]
    return [f"{least} state" + "s" * (least != 1), f"{least}"]


def _seen(axes: Axes, stretches: Sequence[Stretch]) -> list[Stretch]:
    """The stretches cut to the limits of the axes."""
    left, right = sorted(axes.get_xlim())
    cut = [Stretch(max(stretch.lower, left), min(stretch.upper, right), stretch.states, stretch.or_more) for stretch in stretches]
    return [stretch for stretch in cut if stretch.lower < stretch.upper]


def _width(axes: Axes, lower: float, upper: float) -> float:
    ends = on_paper(axes, np.array([lower, upper]), np.full(2, axes.get_ylim()[0]))
    return float(ends[1, 0] - ends[0, 0])


def _along(axes: Axes) -> Transform:
    """The parameter across; points above the lower side of the frame up."""
    from matplotlib.transforms import blended_transform_factory

    return blended_transform_factory(axes.transData, from_corner(axes))
