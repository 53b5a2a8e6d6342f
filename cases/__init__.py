"""What a person works with: case files, the command line, reports, figures, result folders."""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from cases.case import Case
    from cases.load import bundled_names, load
    from cases.run import reach, solve, trace

# Names and the modules they come from: nothing is imported before it is asked for.
_HOMES = {
    "Case": "cases.case",
    "bundled_names": "cases.load",
    "load": "cases.load",
    "reach": "cases.run",
    "solve": "cases.run",
    "trace": "cases.run",
}


def __getattr__(name: str) -> Any:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(_HOMES[name]), name)


def __dir__() -> list[str]:
    return sorted(__all__)


__all__ = ["Case", "bundled_names", "load", "reach", "solve", "trace"]
