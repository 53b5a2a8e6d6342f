"""A case in words: what `hairpin show` prints. Nothing is computed and no formula is read."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from cases.case import Case
from cases.tables import wrapped
from cases.words import head_of_name
from continuation.digits import with_uncertainty

_SHAPES = {"slab": "a slab", "cylinder": "a cylinder", "sphere": "a sphere"}
_WAYS = {"up": "upwards", "down": "downwards", "both": "both ways"}


def described(case: Case) -> str:
    """The case in words."""
    return "\n".join(_lines(case)) + "\n"


def _lines(case: Case) -> Iterator[str]:
    yield case.title
    yield f"{case.name} ({case.origin})"
    for opening, text in (("", case.about), ("Caution: ", case.caution)):
        if text:
            yield ""
            yield from wrapped(text, opening=opening)
    yield ""
    yield from _part("Equations", case.equations)
    yield from _part("Unknowns", [_named(case, name) for name in case.unknowns])
    left, right = (end if isinstance(end, str) else f"{end:g}" for end in case.ends)
    yield from _part(
        "Domain", [f"{left} <= {case.coordinate} <= {right}{_bracketed(case.unit(case.coordinate))}, {_SHAPES[case.geometry]}"]
    )
    yield from _part("Conditions", case.conditions)
    yield from _part("Parameters", [_parameter(case, name, value) for name, value in case.parameters.items()])
    yield from _part("Where", _pairs(case.where))
    yield from _part("Measured", [f"{name} from {file}" for name, file in case.measured.items()])
    yield from _part("First guess", _pairs(case.initial_guess) or [f"{', '.join(case.unknowns)} = 0"])
    yield from _part("Trace", list(_trace(case)))
    how = case.discretization
    yield from _part("Discretization", [f"scheme {how.scheme}, {how.intervals} intervals, grid {how.grid}, {how.digits} digits wanted"])
    for name, keys in case.schemes.items():
        yield from _part(f"Scheme {name}", [f"{key}: {text}" for key, text in keys.items()])
    if case.published:
        yield ""
        yield "Published"
        for published in case.published:
            yield f"  {published.quantity}: {with_uncertainty(published.value, published.uncertainty)}"
            yield from wrapped(published.source, indent="    ")


def _trace(case: Case) -> Iterator[str]:
    question = case.trace
    if question.along is None:
        yield "nothing: there is no parameter"
        return
    yield f"along {question.along} from {case.start:g}, {_WAYS[question.direction]}"
    if question.within:
        yield f"within {question.within[0]:g} to {question.within[1]:g}"
    if question.until:
        yield f"until {question.until}"
    if question.turning_points_wanted:
        yield f"until {question.turning_points_wanted} turning point{'s' * (question.turning_points_wanted != 1)} are met"
    yield f"measured: {', '.join(question.measure)}"
    if question.branches != "one":
        yield "with the branches met at branch points"
    if question.look_for_others:
        yield "with a search for states off the traced branches"


def _parameter(case: Case, name: str, value: float) -> str:
    traced = " (traced)" if name == case.trace.along else ""
    words = f"  {case.labels[name]}" if name in case.labels else ""
    unit = case.unit(name)
    return f"{name} = {value:.12g}{' ' + unit if unit else ''}{traced}{words}"


def _named(case: Case, name: str) -> str:
    return f"{head_of_name(case, name)}{'  ' + case.labels[name] if name in case.labels else ''}"


def _bracketed(unit: str) -> str:
    return f" ({unit})" if unit else ""


def _pairs(formulas: Mapping[str, str]) -> list[str]:
    return [f"{name} = {formula}" for name, formula in formulas.items()]


def _part(head: str, entries: list[str] | tuple[str, ...]) -> Iterator[str]:
    """A head with its entries set beside it, one a line."""
    for number, entry in enumerate(entries):
        yield f"{head if number == 0 else '':15} {entry}"
