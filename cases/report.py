"""Results as readable text: full words, each value with its uncertainty and unit, as many digits as are known to hold."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from functools import singledispatch
from itertools import pairwise
from typing import Any

from cases.case import Case
from cases.results import ReachedMeasure, Solved, Traced
from cases.tables import table, wrapped
from cases.words import NUMERICAL_ONLY, head_of_measure, head_of_name
from continuation.digits import rounded_safe, significant, with_uncertainty

SAFE_DIGITS = 3
MANY = 3.0  # times a limit, from where on its per cent say less

Lines = Iterator[str]


def text_of(result: object) -> str:
    """The report of a result, as it is printed."""
    return "\n".join(lines_of(result)) + "\n"


@singledispatch
def lines_of(result: object) -> Lines:
    """The lines of a report."""
    raise TypeError(f"{type(result).__name__} has no report")


@lines_of.register
def _(result: Traced) -> Lines:
    case = result.case
    yield from _head(case, f"traced along {head_of_name(case, _along(case))}")
    for branch in result.branches:
        yield ""
        yield from wrapped(f"Branch {branch.name}: {len(branch.parameter)} points. Began: {branch.began}. Ended: {branch.ended}.")
        yield ""
        yield from _pieces(case, branch)
    yield ""
    yield from _turning_points(result)
    if result.compared:
        yield ""
        yield from _published(result)
    yield from _notes(case, result.notes)
    yield ""
    steps, factorizations = (sum(getattr(branch, name) for branch in result.branches) for name in ("newton_steps", "factorizations"))
    yield f"Work: {sum(branch.seconds for branch in result.branches):.2g} s, {steps} Newton steps, {factorizations} factorizations."


@lines_of.register
def _(result: Solved) -> Lines:
    case, found = result.case, result.found
    of_equation = found.asked == "equation"
    yield from _head(case, "steady states of the equation" if of_equation else "steady states of the difference scheme on this grid alone")
    at = found.at if isinstance(found.at, Mapping) else {_along(case): found.at}
    place = ", ".join(f"{name} = {value:.12g} {case.unit(name)}".rstrip() for name, value in at.items())
    count = len(found.states)
    yield ""
    if not count:
        yield from wrapped(f"No steady state at {place}.")
    else:
        yield from wrapped(f"{count} steady state{'s' * (count != 1)} at {place}")
        yield ""
        measures = list(found.states[0].measures)
        rows = []
        for state in found.states:
            cells = [_cell(state.measures[measure], state.uncertainty.get(measure)) for measure in measures]
            rows.append([*cells, _count(state.unstable_directions), f"{state.residual:.1e}", state.branch])
        yield from table([*(head_of_measure(case, measure) for measure in measures), "unstable directions", "residual", "branch"], rows)
    yield from _margin(case, found.margin)
    yield from _notes(case, result.notes)


@lines_of.register
def _(result: ReachedMeasure) -> Lines:
    case, along = result.case, _along(result.case)
    yield from _head(case, f"where {result.when}")
    yield ""
    if not result.found.points:
        yield f"{result.when} is nowhere reached on what was traced."
    else:
        measures = list(result.found.points[0].measures)
        rows = [
            [
                _cell(point.value, point.uncertainty),
                *(significant(point.measures[measure]) for measure in measures),
                _count(point.unstable_directions),
                result.found.branch.name,
            ]
            for point in result.found.points
        ]
        yield from table(
            [head_of_name(case, along), *(head_of_measure(case, measure) for measure in measures), "unstable directions", "branch"], rows
        )
    yield from _notes(case, result.notes)


# -- parts of reports -------------------------------------------------------------------------------------------------


def _along(case: Case) -> str:
    return case.trace.along or ""


def _head(case: Case, asked: str) -> Lines:
    yield case.title
    how = case.discretization
    yield f"{case.origin}, {asked}; scheme {how.scheme}, {how.intervals} intervals, grid {how.grid}"
    for opening, text in (("", case.about), ("Caution: ", case.caution)):
        if text:
            yield ""
            yield from wrapped(text, opening=opening)


def _pieces(case: Case, branch: Any) -> Lines:
    """The branch between its ends and turning points: the parameter and the first measure there, and the stability."""
    along, measures = _along(case), list(branch.measures)
    values = branch.parameter
    last = len(values) - 1
    cuts = sorted({0, *(min(int(_index(branch.arclength, point.position)), last) for point in branch.turning_points), last})
    rows = []
    for start, end in pairwise(cuts):
        if branch.unstable_directions is None:
            count = "not defined"
        else:
            inside = branch.unstable_directions[start + 1 : end] if end - start > 1 else branch.unstable_directions[start : start + 1]
            count = " to ".join(dict.fromkeys([str(int(min(inside))), str(int(max(inside)))]))
        row = [significant(values[start]), significant(values[end])]
        for measure in measures:
            row += [significant(branch.measures[measure][start]), significant(branch.measures[measure][end])]
        rows.append([*row, count])
    heads = [head_of_name(case, along), "to"]
    for measure in measures:
        heads += [head_of_measure(case, measure), "to"]
    yield from table([*heads, "unstable directions"], rows)


def _index(arclength: Any, position: float) -> int:
    """The point of a branch that lies nearest to an arclength."""
    return int(abs(arclength - position).argmin())


def _turning_points(result: Traced) -> Lines:
    case, points = result.case, result.turning_points
    if not points:
        yield "No turning point on what was traced."
        return
    measures = list(points[0].measures)
    heads = [head_of_name(case, _along(case)), *(head_of_measure(case, measure) for measure in measures)]
    heads += ["states exist", "observed order", f"on the grid of {result.branches[0].intervals}", "which"]
    rows = []
    for number, point in enumerate(points, start=1):
        uncertainties: Mapping[str, float | None] = getattr(point, "measure_uncertainty", {})
        cells = [_cell(point.measures[measure], uncertainties.get(measure)) for measure in measures]
        order = "not seen" if point.order is None else f"{point.order:.2f}"
        where = "" if len(result.branches) == 1 else f" on {point.branch}"
        where += "" if point.survives else ", does not survive refinement"
        shown = [_cell(point.value, point.uncertainty), *cells, point.states, order, significant(point.on_grid, 8)]
        rows.append([*shown, f"turning point {number}{where}"])
    yield "Turning points"
    yield from table(heads, rows)
    if any(point.uncertainty is None for point in points):
        yield "  A value without ± has no uncertainty; the notes say why."
    if case.caution and any(point.uncertainty is not None for point in points):
        yield f"  The uncertainty is {NUMERICAL_ONLY}."
        yield from _safe_side(case, points[0])
    yield from _sensitivity(case, points)


def _safe_side(case: Case, point: Any) -> Lines:
    """The first turning point, rounded into the side on which the steady states that the trace came along exist."""
    if point.uncertainty is None or not point.survives:
        return
    rounded = rounded_safe(point.value, point.uncertainty, SAFE_DIGITS, "down" if point.states == "below" else "up")
    unit = case.unit(_along(case))
    yield from wrapped(
        f"Turning point 1 rounded to the safe side, {SAFE_DIGITS} digits: {_along(case)} = {rounded}{' ' + unit if unit else ''} "
        f"(steady states exist {point.states} it; {NUMERICAL_ONLY}).",
        indent="  ",
    )


def _sensitivity(case: Case, points: Sequence[Any]) -> Lines:
    names = list(points[0].sensitivity)
    if not names:
        return
    yield ""
    yield f"Sensitivity: by how many per cent {_along(case)} at the turning point moves for one per cent of"
    rows = [
        [*(significant(point.sensitivity.get(name), 4) for name in names), f"turning point {number}"]
        for number, point in enumerate(points, start=1)
    ]
    yield from table([*names, "which"], rows)


def _published(result: Traced) -> Lines:
    case = result.case
    yield "Held against published values"
    rows = []
    for compared in result.compared:
        published = compared.published
        agrees = {True: "agrees", False: "DISAGREES", None: "not judged"}[compared.agrees]
        difference = "-" if compared.difference is None else f"{compared.difference:.1e}"
        values = [_cell(published.value, published.uncertainty), _cell(compared.computed, compared.uncertainty)]
        rows.append([published.quantity, *values, difference, agrees + (f": {compared.note}" if compared.note else "")])
    yield from table(["quantity", "published", "computed", "difference", "verdict"], rows)
    for source in dict.fromkeys(compared.published.source for compared in result.compared):
        quantities = [compared.published.quantity for compared in result.compared if compared.published.source == source]
        yield from wrapped(f"{'; '.join(quantities)}: {source}", indent="  ")
    units = {compared.published.quantity for compared in result.compared}
    if units and case.unit(_along(case)):
        yield f"  Values in {case.unit(_along(case))} unless a measure is named."


def _margin(case: Case, margin: Mapping[str, Any]) -> Lines:
    """How far the parameter is from the nearest turning point."""
    if not margin:
        return
    along = _along(case)
    unit = f" {case.unit(along)}" if case.unit(along) else ""
    size = None if margin["share"] is None else abs(margin["share"])
    share = "" if size is None else f", {significant(100 * size, 3)} % of it" if size < MANY else f", {significant(size, 3)} times as much"
    way = "beyond" if margin["past"] else "short of"
    yield ""
    yield from wrapped(
        f"This is {significant(abs(margin['distance']), 4)}{unit} {way} the turning point at {along} = "
        f"{_cell(margin['turning_point'], margin['uncertainty'])}{unit}{share}."
    )


def _notes(case: Case, notes: Sequence[str]) -> Lines:
    if notes:
        yield ""
        yield "Notes"
        for note in notes:
            yield from wrapped(note, indent="  ", opening="- ")


def _cell(value: float | None, uncertainty: float | None) -> str:
    """A number for a column: with its uncertainty, and without more words where that is not known."""
    return significant(value) if uncertainty is None else with_uncertainty(value, uncertainty)


def _count(unstable: int | None) -> str:
    return "not defined" if unstable is None else str(unstable)
