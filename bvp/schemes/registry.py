"""The built-in schemes by name, and schemes typed by a user."""

from __future__ import annotations

from collections.abc import Mapping

from bvp.errors import SchemeError, nearest
from bvp.problem import Problem
from bvp.schemes.compact import COMPACT
from bvp.schemes.fitted import FITTED
from bvp.schemes.radial import RADIAL_EXACT, SHELL_BALANCE
from bvp.schemes.scheme import FORMULA_KEYS, Scheme, check_typed
from bvp.schemes.standard import CENTRAL, LOG_COSH, UPWIND

BUILT_IN = {scheme.name: scheme for scheme in (CENTRAL, SHELL_BALANCE, RADIAL_EXACT, FITTED, LOG_COSH, COMPACT, UPWIND)}


def names() -> list[str]:
    """The names of the built-in schemes."""
    return list(BUILT_IN)


def named(name: str | Scheme) -> Scheme:
    """A built-in scheme by its name; a scheme is passed through. SchemeError names the nearest known one."""
    if isinstance(name, Scheme):
        return name
    if name not in BUILT_IN:
        raise SchemeError(f'the scheme "{name}" is not known. {nearest(str(name), names())}')
    return BUILT_IN[name]


def typed(name: str, keys: Mapping[str, object], problem: Problem, origin: str = "") -> Scheme:
    """A scheme stated by formulas, each read at once so that a mistake in it shows before anything is solved."""
    place = origin or f"scheme {name}"
    check_typed(name, keys, place)
    texts = {key: str(text) for key, text in keys.items() if key in FORMULA_KEYS}
    replacements = dict(keys.get("replace") or {})  # type: ignore[call-overload]
    scheme = Scheme(name, "typed", texts, replacements, place, typed=True)
    for unknown in problem.unknowns:
        for key in texts:
            scheme.formula(key, problem, unknown)
        scheme.replaced_terms(problem, unknown)
    return scheme
