"""Where labels go so that they meet neither each other, nor the curve, nor the frame. Lengths are in points, y upward."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

import numpy as np

from continuation.records import Array

Point = tuple[float, float]

REACHES = (5.0, 8.0, 11.0, 16.0, 22.0, 30.0, 40.0, 55.0, 75.0, 100.0, 130.0, 165.0)
"""Distances from a label to its place that are tried, the nearest first."""
_DIRECTIONS = 32
_SPACING = 1.5  # between the points that stand for a curve; smaller than any label


@dataclass(frozen=True)
class Box:
    """A rectangle with its sides along the axes."""

    left: float
    bottom: float
    right: float
    top: float

    def grown(self, margin: float) -> Box:
        """The rectangle with a margin all round, or cut down where it is negative."""
        return Box(self.left - margin, self.bottom - margin, self.right + margin, self.top + margin)

    def meets(self, other: Box) -> bool:
        """Whether the two share more than an edge."""
        return self.left < other.right and other.left < self.right and self.bottom < other.top and other.bottom < self.top

    def within(self, other: Box) -> bool:
        """Whether the whole rectangle lies in the other."""
        return other.left <= self.left and self.right <= other.right and other.bottom <= self.bottom and self.top <= other.top

    def holds_any(self, points: Array) -> bool:
        """Whether any of the points, shape (n, 2), lies inside."""
        x, y = points[:, 0], points[:, 1]
        return bool(np.any((self.left < x) & (x < self.right) & (self.bottom < y) & (y < self.top)))


@dataclass
class Field:
    """The frame that labels are placed in, and what is in their way: curves as dense points, and labels placed before."""

    frame: Box
    margin: float = 2.0
    points: Array = field(default_factory=lambda: np.empty((0, 2)))
    taken: list[Box] = field(default_factory=list)

    def add_curve(self, x: Array, y: Array) -> Array:
        """Put a polyline in the way; returns the dense points, shape (n, 2), that stand for it."""
        dense = dense_points(x, y, self.frame)
        self.points = np.concatenate([self.points, dense])
        return dense

    def is_free(self, box: Box) -> bool:
        """Whether a label may stand there."""
        wide = box.grown(self.margin)
        return wide.within(self.frame) and not any(wide.meets(other) for other in self.taken) and not wide.holds_any(self.points)

    def place(
        self, size: Point, anchor: Point, toward: Point, reaches: Sequence[float], accepted: Callable[[Box], bool] = lambda box: True
    ) -> Box | None:
        """The nearest free place for a label of a size that belongs to an anchor, None where there is none.

        Among the places at one distance the one that lies most in the direction `toward` is taken, if it is accepted. A
        line from the label to its anchor must cross no other label.
        """
        width, height = size
        angles = np.arange(_DIRECTIONS) * (2 * np.pi / _DIRECTIONS)
        ranked = sorted(angles, key=lambda angle: (-round(toward[0] * np.cos(angle) + toward[1] * np.sin(angle), 9), angle))
        for reach in reaches:
            for angle in ranked:
                across, up = float(np.cos(angle)), float(np.sin(angle))
                left = anchor[0] + across * (reach + width / 2) - width / 2
                bottom = anchor[1] + up * (reach + height / 2) - height / 2
                box = Box(left, bottom, left + width, bottom + height)
                if self.is_free(box) and accepted(box) and not self._line_is_crossed(box, anchor):
                    self.taken.append(box)
                    return box
        return None

    def _line_is_crossed(self, box: Box, anchor: Point) -> bool:
        line = line_to(box, anchor)
        return any(other.holds_any(line) for other in self.taken)


def line_to(box: Box, anchor: Point) -> Array:
    """Dense points, shape (n, 2), on the shortest line from an anchor to a box."""
    end = float(np.clip(anchor[0], box.left, box.right)), float(np.clip(anchor[1], box.bottom, box.top))
    number = max(2, int(np.hypot(end[0] - anchor[0], end[1] - anchor[1]) / _SPACING) + 1)
    return np.linspace(anchor, end, number)


def dense_points(x: Array, y: Array, frame: Box) -> Array:
    """Points, shape (n, 2), not far apart along a polyline, as far as it lies in the frame or close to it."""
    known = np.isfinite(x) & np.isfinite(y)
    x, y = x[known], y[known]
    if x.size == 0:
        return np.empty((0, 2))
    near = frame.grown(20.0)
    x, y = np.clip(x, near.left, near.right), np.clip(y, near.bottom, near.top)  # a far point must not cost a million
    along = np.concatenate([[0.0], np.cumsum(np.hypot(np.diff(x), np.diff(y)))])
    wanted = np.linspace(0.0, along[-1], max(2, int(along[-1] / _SPACING) + 2))
    return np.stack([np.interp(wanted, along, x), np.interp(wanted, along, y)], axis=1)
