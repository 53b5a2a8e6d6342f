"""From a case to a problem, a scheme and the keywords of a trace; the first place where formulas are read."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from bvp.errors import InputError, nearest
from cases.case import Case
from cases.measured_data import read_columns
from cases.published import measures_needed

if TYPE_CHECKING:
    from bvp.problem import Problem


def problem_of(case: Case) -> Problem:
    """The continuous problem of a case; InputError where a formula, a condition or a file is wrong."""
    import bvp

    measured = {name: read_columns(case.folder / file, f"{case.origin}, [measured] {name}") for name, file in case.measured.items()}
    return bvp.Problem(
        case.equations,
        case.unknowns,
        domain=(case.coordinate, *case.ends),
        conditions=case.conditions,
        parameters=case.parameters,
        geometry=case.geometry,
        where=case.where,
        measured=measured,
        initial_guess=case.initial_guess,
        origin=case.origin,
    )


def scheme_of(case: Case, problem: Problem) -> Any:
    """What the lower floors take as `scheme`: a built-in name, or a scheme of the case's own."""
    import bvp

    name, built_in = case.discretization.scheme, bvp.schemes.names()
    for own in case.schemes:
        if own in built_in:
            raise InputError(f"{case.origin}, [scheme.{own}]: there is a built-in scheme of that name.\nGive yours another name.")
    if name in case.schemes:
        return bvp.schemes.typed(name, case.schemes[name], problem, origin=f"{case.origin}, [scheme.{name}]")
    if name not in built_in:
        raise InputError(f'{case.origin}: there is no scheme "{name}". {nearest(name, [*case.schemes, *built_in])}')
    return name


def along_of(case: Case) -> str:
    """The traced parameter; InputError where the case has no parameter at all."""
    if case.trace.along is None:
        raise InputError(f"{case.origin}: there is no parameter, so there is nothing to trace.\nGive one under [parameters].")
    return case.trace.along


def refuse_not_built(case: Case) -> None:
    """InputError where the case asks for something that has its place in the language and is not built yet."""
    if case.trace.branches != "one":
        raise InputError(f'{case.origin}: branches = "{case.trace.branches}" is not built yet.\nTrace one branch: branches = "one".')
    if case.trace.look_for_others:
        raise InputError(f"{case.origin}: look_for_others is not built yet.\nLeave it out, or set it to false.")


def trace_keywords(case: Case, problem: Problem) -> dict[str, Any]:
    """The keywords of `continuation.trace` that a case's [trace] and [discretization] say."""
    refuse_not_built(case)
    question, how = case.trace, case.discretization
    return {
        "along": along_of(case),
        "start": case.start,
        "direction": question.direction,
        "within": question.within,
        "until": question.until,
        "turning_points_wanted": question.turning_points_wanted,
        "measure": list(measures_needed(case)),
        "scheme": scheme_of(case, problem),
        "intervals": how.intervals,
        "grid": how.grid,
        "digits": how.digits,
    }
