"""Trace branches of solutions: turning points with an uncertainty, states at a parameter value, values that are reached."""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from continuation.reaching import reach
    from continuation.records import Branch, TurningPoint
    from continuation.states import states_at, traced_with_states
    from continuation.tracing import first_turning_point as turning_point
    from continuation.tracing import trace

_PLACES = {
    "trace": ("continuation.tracing", "trace"),
    "turning_point": ("continuation.tracing", "first_turning_point"),
    "Branch": ("continuation.records", "Branch"),
    "TurningPoint": ("continuation.records", "TurningPoint"),
    "traced_with_states": ("continuation.states", "traced_with_states"),
    "states_at": ("continuation.states", "states_at"),
    "reach": ("continuation.reaching", "reach"),
}

__all__ = ["Branch", "TurningPoint", "reach", "states_at", "trace", "traced_with_states", "turning_point"]


def __getattr__(name: str) -> Any:
    if name in _PLACES:
        module, attribute = _PLACES[name]
        return getattr(import_module(module), attribute)
    raise AttributeError(f"module 'continuation' has no attribute {name!r}")


def __dir__() -> list[str]:
    return sorted({*globals(), *_PLACES})
