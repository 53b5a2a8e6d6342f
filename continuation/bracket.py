"""Closing in on the zero of a function between two places where its signs differ."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Generic, TypeVar

Held = TypeVar("Held")


@dataclass
class Bracket(Generic[Held]):
    """Two places with function values of different signs, and what was found at each.

    Regula falsi with the value of the idle end lowered (Anderson & Bjorck 1973, BIT 13:253, from memory), so that both
    ends close in; `right` is always the place tried last.
    """

    left: float
    right: float
    left_value: float
    right_value: float
    left_held: Held
    right_held: Held
    _weight: float = 1.0

    @property
    def width(self) -> float:
        """The distance of the two places."""
        return abs(self.right - self.left)

    @property
    def slope(self) -> float:
        """The mean slope of the function between them."""
        return (self.right_value - self.left_value) / (self.right - self.left) if self.right != self.left else 0.0

    def trial(self) -> float:
        """The place to try next."""
        lowered = self._weight * self.left_value
        return (self.left * self.right_value - self.right * lowered) / (self.right_value - lowered)

    def share(self, place: float) -> float:
        """Where a place lies, from 0 at the left to 1 at the right."""
        return (place - self.left) / (self.right - self.left) if self.right != self.left else 0.0

    def take(self, place: float, value: float, held: Held) -> None:
        """The value at a place that was tried takes that of one end."""
        if value * self.right_value < 0.0:
            self.left, self.left_value, self.left_held, self._weight = self.right, self.right_value, self.right_held, 1.0
        else:
            lowered = 1.0 - value / self.right_value if self.right_value else 0.0
            self._weight *= lowered if lowered > 0.0 else 0.5
        self.right, self.right_value, self.right_held = place, value, held
