"""The record of a value that is known from elsewhere: its digits as printed, how good they are, where they are from."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal


@dataclass(frozen=True)
class Known:
    """One value from outside this project.

    `digits` is the decimal text as printed or recomputed, `uncertainty` the half-width it is good to (one unit of its last
    digit where the source says nothing else, 0 for an exact value written with all the digits it has).
    """

    name: str
    digits: str
    uncertainty: float
    source: str

    @property
    def value(self) -> float:
        """The nearest float."""
        return float(self.digits)

    def agrees(self, number: float, uncertainty: float = 0.0) -> bool:
        """Whether a number lies within the two uncertainties together, a rounding of both to double precision allowed for."""
        rounding = 2.3e-16 * abs(self.value)
        return abs(number - self.value) <= self.uncertainty + uncertainty + rounding


def last_place(digits: str) -> float:
    """One unit of the last digit of a decimal text: 0.01 for "2.50"."""
    return float(10.0 ** int(Decimal(digits).as_tuple().exponent))


def group(source: str, values: Mapping[str, str], exact: bool = False) -> dict[str, Known]:
    """Records of one source, by name."""
    return {name: Known(name, digits, 0.0 if exact else last_place(digits), source) for name, digits in values.items()}


def collected(*groups: Mapping[str, Known]) -> dict[str, Known]:
    """Several groups as one; a name that stands in two of them is an error."""
    together: dict[str, Known] = {}
    for part in groups:
        twice = together.keys() & part.keys()
        if twice:
            raise ValueError(f"recorded twice: {sorted(twice)}")
        together.update(part)
    return together
