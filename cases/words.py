"""What parameters and measures are called at the head of a column: their names and units."""

from __future__ import annotations

import re

from cases.case import Case

NUMERICAL_ONLY = "numerical only, material data not included"  # what an uncertainty is where work can hurt someone

_OF_NAME = re.compile(r"(max|min|mean|rms)\(\s*(\w+)\s*\)")
_AT_PLACE = re.compile(r"(\w+)('?)\((.+)\)")


def unit_of_measure(case: Case, measure: str) -> str:
    """The unit of max(T), T(0), T'(1), …; empty where the case gives none or the measure is a longer formula."""
    if found := _OF_NAME.fullmatch(measure):
        return case.unit(found[2])
    found = _AT_PLACE.fullmatch(measure)
    if found is None or found[1] not in case.unknowns:
        return ""
    unit, length = case.unit(found[1]), case.unit(case.coordinate)
    if not found[2] or not length:
        return unit
    return f"{unit or '1'}/{length}"


def head_of_measure(case: Case, measure: str) -> str:
    """A measure as the head of a column: the formula with its unit."""
    return with_unit(measure, unit_of_measure(case, measure))


def head_of_name(case: Case, name: str) -> str:
    """A name as the head of a column, with its unit."""
    return with_unit(name, case.unit(name))


def with_unit(words: str, unit: str) -> str:
    """Words with a unit behind them in brackets."""
    return f"{words} ({unit})" if unit else words
