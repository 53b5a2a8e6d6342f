"""State and solve one two-point boundary value problem."""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from bvp.grid import Grid
    from bvp.one_state import solve
    from bvp.problem import Problem
    from bvp.state import State

_PLACES = {"Problem": "bvp.problem", "Grid": "bvp.grid", "State": "bvp.state", "solve": "bvp.one_state", "MeasuredFunction": "bvp.measured"}
_MODULES = ("errors", "formula", "schemes")

__all__ = ["Grid", "Problem", "State", "errors", "formula", "schemes", "solve"]


def __getattr__(name: str) -> Any:
    if name in _PLACES:
        return getattr(import_module(_PLACES[name]), name)
    if name in _MODULES:
        return import_module(f"bvp.{name}")
    raise AttributeError(f"module 'bvp' has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *_PLACES, *_MODULES})
