"""The axes of a drawn branch: their scales, limits, ticks, names and units."""

from __future__ import annotations

import re
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from continuation.digits import significant
from continuation.drawing.paper import AXIS_SIZE, DARK, GREY, LINE_HEIGHT, TEXT_SIZE, frame_of, root_figure, settle, wrapped
from continuation.drawing.pieces import Stretch
from continuation.drawing.places import Point
from continuation.records import Array, Branch

if TYPE_CHECKING:
    from matplotlib.axes import Axes

MANY_DECADES = 1e3  # a quantity that spans more has a logarithmic axis
_OF_NAME = re.compile(r"(max|min|mean|rms)\(\s*(\w+)\s*\)")
_AT_PLACE = re.compile(r"(\w+)\(([^()]*)\)")
_WORDS = {"max": "largest", "min": "smallest", "mean": "mean", "rms": "root mean square"}


def spans_decades(values: Array, at_turning_points: Sequence[float]) -> bool:
    """Whether a quantity asks for a logarithmic axis: positive (a start at 0 apart), and over more than three decades."""
    values = values[np.isfinite(values)]
    positive = values.size > 0 and np.all(values[1:] > 0) and values[0] >= 0 and all(value > 0 for value in at_turning_points)
    return bool(positive and np.max(values) > MANY_DECADES * _least_that_matters(values, at_turning_points))


def _least_that_matters(values: Array, at_turning_points: Sequence[float]) -> float:
    """The least of the first value and the turning points.

    A tail toward 0 beyond the last turning point does not count: a branch that comes from 0, turns, and goes back toward
    0 is read better on a linear axis. Without turning points all values count, unless the branch starts at 0.
    """
    starts = [float(value) for value in values[:1] if value > 0]
    if not at_turning_points:
        return float(np.min(values)) if starts else np.inf
    return min([*starts, *at_turning_points])


def set_limits(axes: Axes, branch: Branch, measure: str, places: Sequence[Point], stretches: Sequence[Stretch]) -> None:
    """Limits with room for labels beyond outermost turning points, and none beyond a range that begins at 0."""
    before, after = (0.10 if stretch.states == 0 else 0.03 for stretch in (stretches[0], stretches[-1]))
    axes.set_xlim(*_limits(np.asarray(branch.parameter), [x for x, _ in places], before, after * 1.6, axes.get_xscale() == "log"))
    axes.set_ylim(*_limits(branch.measure(measure), [y for _, y in places], 0.06, 0.08, axes.get_yscale() == "log"))


def _limits(values: Array, at_turning_points: Sequence[float], before: float, after: float, logarithmic: bool) -> tuple[float, float]:
    shown = np.concatenate([values, at_turning_points])
    shown = shown[np.isfinite(shown)]
    if logarithmic:
        # Of a long tail toward 0 a decade and a half is seen, so that the rest keeps its room.
        shown = np.log10(np.maximum(shown, _least_that_matters(values, at_turning_points) / 30))
    lower, upper = (float(np.min(shown)), float(np.max(shown))) if shown.size else (0.0, 0.0)
    width = upper - lower
    if width <= 1e-12 * max(abs(lower), abs(upper)):  # one value only
        width, before, after = 0.1 * abs(upper) or 1.0, 0.5, 0.5
    begin, end = lower - before * width, upper + after * width
    if not logarithmic and 0 <= lower < 0.03 * width:
        begin = 0.0
    return (10**begin, 10**end) if logarithmic else (begin, end)


def set_words(axes: Axes, branch: Branch, measure: str, lines_to_come: int) -> tuple[str, str]:
    """Names and units on the axes, broken where they are longer; returns the short heads (parameter, measure) for columns.

    `lines_to_come` are those that will be written below the axes and make them lower.
    """
    short, words = [], []
    for name in (branch.along, measure):
        unit, label = unit_of(branch, name), _label(branch, name)
        short.append(f"{name} ({unit})" if unit else name)
        words.append(f"{label}, {short[-1]}" if label else short[-1])
    axes.tick_params(which="both", direction="in", labelsize=TEXT_SIZE, labelcolor=DARK, color=GREY)
    for side, spine in axes.spines.items():
        spine.set_visible(side in ("left", "bottom"))
        spine.set(color=GREY, linewidth=0.8)
    settle(axes)
    frame = frame_of(axes)
    taken = (lines_to_come + 3) * LINE_HEIGHT  # of the height, by the words themselves too
    lengths = frame.right - frame.left, max(frame.top - frame.bottom - taken, 6 * LINE_HEIGHT)
    lines = ["\n".join(wrapped(line, length, root_figure(axes), AXIS_SIZE)) for line, length in zip(words, lengths, strict=True)]
    style: dict[str, Any] = {"fontsize": AXIS_SIZE, "color": DARK, "parse_math": False}
    axes.set_xlabel(lines[0], **style)
    axes.set_ylabel(lines[1], **style)
    return short[0], short[1]


def set_ticks(axes: Axes) -> None:
    """Numbers at the ticks without a common factor or offset far from them, where the range allows it."""
    from matplotlib.ticker import MaxNLocator, ScalarFormatter

    for axis, limits in ((axes.xaxis, axes.get_xlim()), (axes.yaxis, axes.get_ylim())):
        formatter, largest = axis.get_major_formatter(), max(map(abs, limits))
        axis.get_offset_text().set(fontsize=TEXT_SIZE, color=DARK)
        if not isinstance(formatter, ScalarFormatter) or abs(limits[1] - limits[0]) < 1e-5 * largest:
            continue
        formatter.set_useOffset(False)  # 300.1 is read more easily than 3e2 + 0.1
        if not 1e-2 <= largest < 1e6:
            axis.set_major_formatter(lambda value, _: significant(value))
            axis.set_major_locator(MaxNLocator(nbins=4, steps=[1, 2, 5, 10]))  # such numbers are wide


def unit_of(branch: Branch, name: str) -> str:
    """The unit of a parameter, or of a measure that has its unknown's."""
    unit = branch.units.get(name)
    if unit is None and (found := _OF_NAME.fullmatch(name)):
        unit = branch.units.get(found[2])
    elif unit is None and (found := _AT_PLACE.fullmatch(name)):
        unit = branch.units.get(found[1])
    return "" if unit in (None, "1") else str(unit)


def _label(branch: Branch, name: str) -> str:
    """What a parameter or a measure is called in words; empty where nobody said."""
    if name in branch.labels:
        return branch.labels[name]
    if (found := _OF_NAME.fullmatch(name)) and found[2] in branch.labels:
        return f"{_WORDS[found[1]]} {branch.labels[found[2]]}"
    if (found := _AT_PLACE.fullmatch(name)) and found[1] in branch.labels:
        return branch.labels[found[1]]
    return ""
