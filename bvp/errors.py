"""What is wrong with an input, said once for all floors: what was found and where, what was expected, what to do."""

from __future__ import annotations

import difflib
from collections.abc import Sequence

LONGEST_NAME = 40  # characters of a name that a message repeats and compares


class InputError(ValueError):
    """Input that cannot be worked with; its text is meant for the person who typed it."""


class ProblemError(InputError):
    """A problem that is not stated fully or consistently."""


class SchemeError(InputError):
    """A scheme that is malformed, or that cannot serve the equation, grid or geometry asked for."""


class FormulaError(InputError):
    """A formula that cannot be read, shown with a caret under the place."""

    def __init__(self, origin: str, text: str, column: int, expected: str, advice: str = "") -> None:
        self.column = column
        self.parts = (origin, text, column, expected, advice)
        start = max(0, column - 60)
        shown = "".join(character if character.isprintable() else " " for character in text[start : start + 110])
        opening = f"{origin}: " if origin else ""
        lines = [f"{opening}{expected}", f"  {shown}", f"  {' ' * (column - start)}^"]
        if advice:
            lines.append(advice)
        super().__init__("\n".join(lines))

    def __reduce__(self) -> tuple[type[FormulaError], tuple[str, str, int, str, str]]:
        return FormulaError, self.parts


class ComputationError(RuntimeError):
    """A computation that cannot be completed as asked, with the reason."""


def nearest(name: str, known: Sequence[str]) -> str:
    """A sentence that names the nearest known name and lists the known ones."""
    listed = ", ".join(known) if known else "none"
    folded = {one.casefold(): one for one in reversed(known)}
    close = difflib.get_close_matches(name[:LONGEST_NAME].casefold(), list(folded), n=1, cutoff=0.5)
    meant = f'Did you mean "{folded[close[0]]}"? ' if close else ""
    return f"{meant}Known here: {listed}."
