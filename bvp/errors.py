"""What is wrong with an input, said once for all floors: what was found and where, what was expected, what to do."""

from __future__ import annotations

import difflib
from collections.abc import Sequence


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
        start = max(0, column - 60)
        shown = text[start : start + 110].replace("\n", " ").replace("\t", " ")
        opening = f"{origin}: " if origin else ""
        lines = [f"{opening}{expected}", f"  {shown}", f"  {' ' * (column - start)}^"]
        if advice:
            lines.append(advice)
        super().__init__("\n".join(lines))


class ComputationError(RuntimeError):
    """A computation that cannot be completed as asked, with the reason."""


def nearest(name: str, known: Sequence[str]) -> str:
    """A sentence that names the nearest known name and lists the known ones."""
    listed = ", ".join(known) if known else "none"
    close = difflib.get_close_matches(name, list(known), n=1, cutoff=0.5)
    meant = f'Did you mean "{close[0]}"? ' if close else ""
    return f"{meant}Known here: {listed}."
