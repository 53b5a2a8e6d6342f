"""Random sources and conductivities: expressions in u with named parameters, such that the branch from lam = 0 turns."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
import sympy

from tests.campaign.model import U

Generator = np.random.Generator


def number(rng: Generator, low: float, high: float, logarithmic: bool = False) -> float:
    """A random number of four digits: what a person would type, and no friend of any grid."""
    value = np.exp(rng.uniform(np.log(low), np.log(high))) if logarithmic else rng.uniform(low, high)
    return float(f"{value:.4g}")


def symbol(name: str) -> Any:
    """A real parameter."""
    return sympy.Symbol(name, real=True)


@dataclass(frozen=True)
class Source:
    """f(u) with its parameters; `most` is the pole of f, or how far a turning point is looked for; `kinks` are values of u."""

    expression: Any
    parameters: dict[str, float] = field(default_factory=dict)
    most: float = 12.0
    kinks: tuple[float, ...] = ()


@dataclass(frozen=True)
class Family:
    """A source with ranges for its parameters."""

    expression: Any
    ranges: Mapping[str, tuple[float, float]] = field(default_factory=dict)
    most: float = 12.0

    def drawn(self, rng: Generator) -> Source:
        """One member."""
        return Source(self.expression, {name: number(rng, *ends) for name, ends in self.ranges.items()}, self.most)


_c, _d, _p, _eps, _e, _g = (symbol(name) for name in ("c", "d", "p", "eps", "e", "g"))

SMOOTH: dict[str, Family] = {
    "exponential": Family(sympy.exp(U)),
    "Arrhenius": Family(sympy.exp(U / (1 + _eps * U)), {"eps": (0.01, 0.15)}),
    "power": Family((1 + U) ** _p, {"p": (1.7, 5.0)}),
    "membrane": Family(1 / (1 - U) ** 2, {}, 1.0),
    "pole": Family(1 / (1 - U) ** _p, {"p": (0.8, 3.5)}, 1.0),
    "fringing field": Family((1 + _c * (1 - U)) / (1 - U) ** 2, {"c": (0.1, 2.0)}, 1.0),
    "hyperbolic": Family(sympy.cosh(_c * U), {"c": (0.6, 2.0)}),
    "quadratic": Family(1 + _c * U + U**2, {"c": (-0.5, 2.0)}, 30.0),
    "cubic": Family(1 + _c * U**3, {"c": (0.2, 3.0)}),
    "wavy": Family(sympy.exp(U) + _c * sympy.sin(_d * U), {"c": (0.05, 0.3), "d": (0.7, 2.0)}),
    "reacting": Family((1 + _c * U) * sympy.exp(U / (1 + _eps * U)), {"c": (0.1, 2.0), "eps": (0.01, 0.1)}),
    "step": Family(sympy.exp(U + _c * sympy.tanh(U)), {"c": (0.1, 1.0)}),
    "root": Family(sympy.sqrt(1 + _c * U) * sympy.exp(U), {"c": (0.2, 3.0)}),
    "logarithm": Family(sympy.exp(U) * sympy.log(_c + U), {"c": (1.5, 4.0)}),
    "error function": Family(sympy.exp(U) + _c * sympy.erf(U), {"c": (0.2, 2.0)}),
    "two rates": Family(sympy.exp(U) + _c * sympy.exp(_d * U), {"c": (0.1, 2.0), "d": (0.2, 1.8)}),
}

CONDUCTIVITY: dict[str, Family] = {
    "linear": Family(1 + _e * U, {"e": (-0.12, 1.5)}),
    "exponential": Family(sympy.exp(-_e * U), {"e": (0.05, 0.5)}),
    "rational": Family(1 / (1 + _e * U), {"e": (0.05, 0.8)}),
    "root": Family(sympy.sqrt(_g + _e * U), {"g": (0.5, 2.0), "e": (0.1, 2.0)}),
    "quadratic": Family(_g + _e * U**2, {"g": (0.5, 2.0), "e": (0.05, 0.6)}),
}


def smooth(rng: Generator, turn: int) -> Source:
    """The smooth sources one after the other, with random parameters."""
    return list(SMOOTH.values())[turn % len(SMOOTH)].drawn(rng)


def conductivity(rng: Generator, turn: int) -> Source:
    """The conductivities one after the other, with random parameters."""
    return list(CONDUCTIVITY.values())[turn % len(CONDUCTIVITY)].drawn(rng)


def kinked(rng: Generator) -> Source:
    """exp(u) + b |u - c| with c below the turning point's u."""
    kink = number(rng, 0.15, 0.9)
    return Source(sympy.exp(U) + symbol("b") * sympy.Abs(U - _c), {"b": number(rng, 0.2, 1.5), "c": kink}, 12.0, (kink,))
