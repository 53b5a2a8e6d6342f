"""Running a case: tracing it, solving it at given values, asking where a measure takes a value."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from cases.build import along_of, problem_of, trace_keywords
from cases.case import Case
from cases.published import hold_against, values_needed
from cases.results import ReachedMeasure, Solved, Traced

if TYPE_CHECKING:
    from continuation.records import Branch

WatchCall = Callable[[Any], bool]

INTERRUPTED = "interrupted"


def trace(case: Case, watch: WatchCall | None = None) -> Traced:
    """Trace a case and hold the result against what is published about it."""
    import continuation

    problem = problem_of(case)
    keywords = trace_keywords(case, problem)
    branch: Branch
    branch, found = continuation.traced_with_states(problem, values_needed(case), watch=watch, **keywords)
    branch = replace(branch, units=case.units, labels=case.labels)
    notes = [*problem.notices, *branch.notes]
    states = {value: at_value.states for value, at_value in found.items()} if branch.complete else {}
    compared = hold_against(case, branch.turning_points, states)
    reason = "" if branch.complete else _reason(branch.ended, branch.notes)
    return Traced(case, (branch,), compared, _once(notes), branch.complete, reason)


def solve(case: Case, at: Mapping[str, float], *, discrete: bool = False, watch: WatchCall | None = None) -> Solved:
    """The steady states of a case: of the equation, or of the difference scheme on exactly the grid asked for.

    at : parameter values; those that are not among them are the case's own.
    """
    import continuation

    along = along_of(case)
    value = at.get(along, case.parameters[along])
    # The traced parameter's start stays the case's: the branch is followed from there to the value asked for.
    problem = problem_of(case)
    keywords = _for_states(trace_keywords(case, problem), value)
    if discrete and keywords["grid"] == "adaptive":
        keywords["grid"] = "uniform"  # the question is about the scheme on the grid asked for
    found = continuation.states_at(problem, at={along: value}, discrete=discrete, watch=watch, **keywords)
    notes = _once([*problem.notices, *found.notes])
    found = replace(found, at={**case.parameters, along: value})
    return Solved(case, found, notes, found.complete, "" if found.complete else _reason("", found.notes))


def reach(case: Case, when: str, watch: WatchCall | None = None) -> ReachedMeasure:
    """The values of the traced parameter at which a comparison of measures, such as max(u) = 1.2, holds."""
    import continuation

    problem = problem_of(case)
    keywords = {**trace_keywords(case, problem), "measure": list(case.trace.measure)}
    found = continuation.reach(problem, when=when, watch=watch, **keywords)
    notes = _once([*problem.notices, *found.notes])
    return ReachedMeasure(case, when, found, notes, found.complete, "" if found.complete else _reason("", found.notes))


def _for_states(keywords: Mapping[str, Any], value: float) -> dict[str, Any]:
    """What a search for states at one value takes: it goes on past the ends of a trace, and its range holds the value."""
    kept = {name: word for name, word in keywords.items() if name not in ("until", "turning_points_wanted")}
    if kept["within"] is not None:
        kept["within"] = (min(kept["within"][0], value), max(kept["within"][1], value))
    return kept


def _reason(ended: str, notes: tuple[str, ...]) -> str:
    if ended == INTERRUPTED:
        return "interrupted; what was found until then is given."
    told = [note for note in notes if note.startswith("the trace ended")] or [*notes, f"the trace ended early ({ended})."]
    return told[0]


def _once(notes: list[str]) -> tuple[str, ...]:
    return tuple(dict.fromkeys(notes))
