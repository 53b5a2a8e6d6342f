"""Results as JSON: the documents that other programs read. Strict JSON: what is no finite number becomes null."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from functools import singledispatch
from pathlib import PurePath
from typing import Any

from cases.case import Case
from cases.published import Compared
from cases.results import ReachedMeasure, Solved, Traced


def json_text(document: Mapping[str, Any]) -> str:
    """One strict JSON object on one line."""
    return json.dumps(plain(document), allow_nan=False, ensure_ascii=False)


def plain(value: Any) -> Any:
    """A value made of dicts, lists, text, numbers, true, false and null alone; NaN and infinity become null."""
    if value is None or isinstance(value, (bool, str)):
        return value
    if isinstance(value, int):
        return int(value)
    if isinstance(value, float):
        return float(value) if math.isfinite(value) else None
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [plain(item) for item in value]
    if hasattr(value, "tolist"):  # numpy's arrays and scalars, without importing numpy here
        return plain(value.tolist())
    if isinstance(value, PurePath):
        return str(value)
    raise TypeError(f"{type(value).__name__} has no place in a JSON document")


@singledispatch
def document_of(result: object) -> dict[str, Any]:
    """The JSON document of a result."""
    raise TypeError(f"{type(result).__name__} has no document")


@document_of.register
def _(result: Traced) -> dict[str, Any]:
    return {
        **_asked(result.case),
        "branches": [_branch(branch) for branch in result.branches],
        "turning_points": [_turning_point(point) for point in result.turning_points],
        "branch_points": [],  # none are looked for yet
        "published": [_compared(compared) for compared in result.compared],
        "work": {
            "seconds": sum(branch.seconds for branch in result.branches),
            "newton_steps": sum(branch.newton_steps for branch in result.branches),
            "factorizations": sum(branch.factorizations for branch in result.branches),
        },
        "complete": result.complete,
        "notes": list(result.notes),
    }


@document_of.register
def _(result: Solved) -> dict[str, Any]:
    found = result.found
    return {
        "asked": found.asked,
        "at": found.at if isinstance(found.at, Mapping) else {result.case.trace.along: found.at},
        "states": [
            {
                "measures": state.measures,
                "unstable_directions": state.unstable_directions,
                "residual": state.residual,
                "uncertainty": state.uncertainty,
                "branch": state.branch,
            }
            for state in found.states
        ],
        "margin": found.margin,
        "complete": result.complete,
        "notes": list(result.notes),
    }


@document_of.register
def _(result: ReachedMeasure) -> dict[str, Any]:
    return {
        **_asked(result.case),
        "when": result.when,
        "points": [
            {
                "branch": result.found.branch.name,
                "value": point.value,
                "uncertainty": point.uncertainty,
                "measures": point.measures,
                "unstable_directions": point.unstable_directions,
                "order": point.order,
                "refinement": _refinement(point),
                "survives": point.survives,
            }
            for point in result.found.points
        ],
        "complete": result.complete,
        "notes": list(result.notes),
    }


def _asked(case: Case) -> dict[str, Any]:
    return {
        "case": case.name,
        "title": case.title,
        "scheme": case.discretization.scheme,
        "along": case.trace.along,
        "intervals": case.discretization.intervals,
    }


def _branch(branch: Any) -> dict[str, Any]:
    return {
        "name": branch.name,
        "points": len(branch.parameter),
        "values": branch.parameter,
        "measures": branch.measures,
        "unstable_directions": branch.unstable_directions,
        "began": branch.began,
        "ended": branch.ended,
    }


def _turning_point(point: Any) -> dict[str, Any]:
    return {
        "branch": point.branch,
        "value": point.value,
        "uncertainty": point.uncertainty,
        "measures": point.measures,
        "states": point.states,
        "order": point.order,
        "on_grid": point.on_grid,
        "refinement": _refinement(point),
        "survives": point.survives,
        "sensitivity": point.sensitivity,
    }


def _refinement(point: Any) -> list[dict[str, Any]]:
    return [{"intervals": step.intervals, "value": step.value} for step in point.refinement]


def _compared(compared: Compared) -> dict[str, Any]:
    return {
        "quantity": compared.published.quantity,
        "value": compared.published.value,
        "computed": compared.computed,
        "difference": compared.difference,
        "agrees": compared.agrees,
        "source": compared.published.source,
    }


def case_document(case: Case) -> dict[str, Any]:
    """The JSON document of a case that was only read: `hairpin show --json`."""
    from dataclasses import asdict

    left_out = ("folder", "text", "origin")
    return {name: value for name, value in asdict(case).items() if name not in left_out}
