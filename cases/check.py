"""Reading a case with an eye on what is wrong or doubtful in it: everything at once, and nothing solved."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING, Any

from bvp.errors import InputError
from cases.build import along_of, problem_of, refuse_not_built, scheme_of
from cases.case import Case
from cases.faults import faults
from cases.load import case_of, document_of, located, read_text
from cases.published import BRANCH_POINT, quantities
from cases.settings import Settings, asked_for

if TYPE_CHECKING:
    from bvp.problem import Problem

MANY_DIGITS = 12  # beyond them the rounding of double precision shows in the turning points of ordinary problems


@dataclass(frozen=True)
class Findings:
    """What is wrong (the case cannot be run) and what is doubtful (it can) about a case."""

    case: str
    wrong: tuple[str, ...]
    doubtful: tuple[str, ...]


def check(name_or_path: str, settings: Settings) -> Findings:
    """Everything that is wrong or doubtful in a case with the settings asked for."""
    try:
        name, path = located(name_or_path)
        text = read_text(path)
        document = document_of(text, path.name)
    except InputError as error:
        return Findings(name_or_path, (str(error),), ())
    wrong = list(faults(document, path.name))
    if wrong:
        return Findings(name, tuple(wrong), ())
    try:
        case, notices = asked_for(case_of(document, name, path, text), settings)
    except InputError as error:
        return Findings(name, (str(error),), ())
    return Findings(name, *_judged(case, notices))


def _judged(case: Case, notices: list[str]) -> tuple[tuple[str, ...], tuple[str, ...]]:
    wrong: list[str] = []

    def tried(step: Callable[[], Any]) -> Any:
        try:
            return step()
        except InputError as error:
            wrong.append(str(error))
            return None

    tried(lambda: refuse_not_built(case))
    tried(lambda: along_of(case))
    tried(lambda: quantities(case))
    problem = tried(lambda: problem_of(case))
    if problem is None:
        return tuple(dict.fromkeys(wrong)), ()
    tried(lambda: scheme_of(case, problem))
    for own in case.schemes:
        tried(partial(_typed, case, own, problem))
    for formula, place, comparison in _formulas(case):
        tried(partial(_read, formula, problem, place, comparison))
    return tuple(dict.fromkeys(wrong)), (*notices, *problem.notices, *_doubts(case))


def _formulas(case: Case) -> Iterator[tuple[str, str, bool]]:
    """The formulas that only a run would read: each with its place, and whether it is to be a comparison."""
    for number, measure in enumerate(case.trace.measure, start=1):
        yield measure, f"{case.origin}, [trace] measure {number}", False
    if case.trace.until is not None:
        yield case.trace.until, f"{case.origin}, [trace] until", True
    for number, (_, quantity) in enumerate(_quietly(case), start=1):
        if quantity.measure:
            yield quantity.measure, f"{case.origin}, [published {number}] quantity", False


def _quietly(case: Case) -> list[Any]:
    try:
        return quantities(case)
    except InputError:  # already among what is wrong
        return []


def _read(formula: str, problem: Problem, place: str, comparison: bool) -> None:
    from bvp.measures import Measure

    measure = Measure(formula, problem, place)
    if comparison and measure.relation is None:
        raise InputError(f'{place}: "{formula}" compares nothing.\nExpected: a comparison of measures, such as max(u) > 20.')
    if not comparison and measure.relation is not None:
        raise InputError(f'{place}: "{formula}" is a comparison.\nExpected: a measure, such as max(u).')


def _typed(case: Case, name: str, problem: Problem) -> None:
    import bvp

    bvp.schemes.typed(name, case.schemes[name], problem, origin=f"{case.origin}, [scheme.{name}]")


def _doubts(case: Case) -> Iterator[str]:
    question, start = case.trace, case.start
    if question.within is not None and start is not None and not question.within[0] <= start <= question.within[1]:
        yield f"the trace starts at {question.along} = {start:g}, outside its range {question.within[0]:g} to {question.within[1]:g}."
    if question.within is None and question.until is None and question.turning_points_wanted is None:
        yield "the trace has no end: none of within, until and turning_points_wanted is given."
    if case.discretization.digits > MANY_DIGITS:
        yield f"{case.discretization.digits} digits are wanted; beyond {MANY_DIGITS} rounding decides what can be had."
    if any(quantity.kind == BRANCH_POINT for _, quantity in _quietly(case)):
        yield "a branch point is published; branch points are not built yet, so that value will not be judged."


def text_of(findings: Findings) -> str:
    """The findings as they are printed."""
    lines = []
    for head, entries in (("Wrong", findings.wrong), ("Doubtful", findings.doubtful)):
        if entries:
            lines.append(f"{head}:")
            lines += ["- " + entry.replace("\n", "\n  ") for entry in entries]
    return "\n".join(lines or [f"{findings.case}: nothing wrong and nothing doubtful was found."]) + "\n"
