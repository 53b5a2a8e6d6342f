"""The names that a formula may hold, and those that nobody may take."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from bvp.errors import ProblemError
from bvp.formula.words import is_name, normal

ONE_ARGUMENT = ("exp", "log", "sqrt", "sin", "cos", "tan", "sinh", "cosh", "tanh", "asin", "acos", "atan", "abs", "erf")
TWO_ARGUMENTS = ("min", "max")
OPERATORS = ("laplacian", "div", "grad")
MEASURES = ("max", "min", "mean", "rms", "integral")
CONSTANTS = ("pi", "π")
RESERVED = (*ONE_ARGUMENT, *TWO_ARGUMENTS, *OPERATORS, *MEASURES, *CONSTANTS)
MADE = (
    "sign",
    "step_le",
    "log1p",
    "expm1",
    "cardinal",
    "cardinal_slope",
    "fit",
    "fit_by_drift",
    "fit_by_slope",
)  # calls that only the tool makes


@dataclass(frozen=True)
class Vocabulary:
    """The names of a problem: unknowns, coordinate, parameters, [where] names, measured and given functions, numbers to be found."""

    unknowns: tuple[str, ...]
    coordinate: str
    parameters: tuple[str, ...] = ()
    where: tuple[str, ...] = ()
    measured: tuple[str, ...] = ()
    functions: Mapping[str, int] = field(default_factory=dict)
    numbers: tuple[str, ...] = ()

    def kinds(self) -> list[tuple[str, str]]:
        """Every name with what it is."""
        return [
            *((name, "an unknown") for name in self.unknowns),
            (self.coordinate, "the coordinate"),
            *((name, "a parameter") for name in self.parameters),
            *((name, "a name under [where]") for name in self.where),
            *((name, "a measured function") for name in self.measured),
            *((name, "a given function") for name in self.functions),
            *((name, "an unknown number") for name in self.numbers),
        ]

    def check(self, origin: str = "problem") -> None:
        """ProblemError where a name is no name, is taken by the language, or stands for two things."""
        seen: dict[str, str] = {}
        for name, kind in self.kinds():
            if not isinstance(name, str) or not is_name(name):
                raise ProblemError(f"{origin}: {kind} is called {name!r}.\nExpected: a letter, then letters, digits or underscores.")
            spelled = normal(name)
            if spelled in RESERVED or (spelled in MADE and kind.endswith("function")):
                raise ProblemError(
                    f'{origin}: {kind} is called "{name}", which the formula language keeps for itself.\nChoose another name.'
                )
            if spelled in seen:
                raise ProblemError(f'{origin}: "{name}" is both {seen[spelled]} and {kind}.\nChoose different names.')
            seen[spelled] = kind

    def own_spelling(self) -> dict[str, str]:
        """Every name by its normal spelling."""
        return {normal(name): name for name, _ in self.kinds()}
