"""How far the next step goes: by how much the tangent turned, how far the prediction was off, how hard Newton worked."""

from __future__ import annotations

from dataclasses import dataclass

MOST_TURN = 0.9  # a step over which the tangent turns further is taken again, shorter: it may have left the branch
MOST_OFF = 0.4
GROWTH, SHRINKING = 2.0, 0.3


@dataclass(frozen=True)
class StepLength:
    """A rule for step lengths between two bounds, all as shares of the sizes of state and parameter.

    turn : radians between successive tangents, and off : distance from prediction to branch, that are aimed at.
    """

    smallest: float = 1e-9
    largest: float = 0.25
    first: float = 0.1
    turn: float = 0.2
    off: float = 0.03

    def accepted(self, turn: float, off: float) -> bool:
        """Whether a step that turned by so many radians, its prediction off by so much, is taken as it is."""
        return turn <= MOST_TURN and off <= MOST_OFF

    def following(self, length: float, turn: float, off: float, steps: int) -> float:
        """The length after a step of that length: turning grows with it, the prediction's error with its square."""
        by_turn = self.turn / max(turn, 1e-12)
        by_off = (self.off / max(off, 1e-12)) ** 0.5
        factor = min(by_turn, by_off, GROWTH)
        if steps > 5:
            factor = min(factor, 0.7)
        return min(max(length * max(factor, SHRINKING), self.smallest), self.largest)


FOR_FIGURES = StepLength()  # points so close that a smooth curve goes through them
ON_THE_WAY = StepLength(largest=0.7, turn=0.4, off=0.1)  # where nothing but a turning point is asked for
