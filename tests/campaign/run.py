"""Holds the tool against the campaign's truths: `python -m tests.campaign.run --schemes central,compact --workers 2 --out FILE`.

Every problem is traced with every scheme that applies. A miss is a truth outside of value ± (uncertainty + the truth's own): there may be
none. With --out each finished pair is a line of a file, and a second run goes on from there.
"""

from __future__ import annotations

import argparse
import json
import os
import sys
import time
from collections.abc import Iterable, Iterator
from concurrent.futures import ProcessPoolExecutor
from pathlib import Path
from typing import Any

import numpy as np

import bvp
import continuation
from bvp.errors import ComputationError, InputError
from tests.campaign.statement import Statement, read

Row = dict[str, Any]
LOST = ("not found", "state not found", "failed", "fault")
NEAR = 1e-2  # relative: a computed turning point farther from a truth than this is another one
DIGITS = 8
LONGEST = 150  # points of a branch: the states asked for lie before and after the first turning point


def held_against(statement: Statement, scheme: str, *, grid: str = "adaptive", states: bool = True) -> list[Row]:
    """One row for each truth of a problem (turning points, their measures, states), or one that says why there is none."""
    began = time.perf_counter()
    about = {"name": statement.name, "kind": statement.kind, "scheme": scheme}
    keywords = {**statement.trace, "measure": statement.measure, "scheme": scheme, "grid": grid, "digits": DIGITS, "compiled": False}
    keywords |= {"longest": LONGEST} if states else {"turning_points_wanted": len(statement.turning_points)}
    try:
        problem = bvp.Problem(**{**statement.problem, "measured": _arrays(statement.problem.get("measured"))})
        values = [statement.states.at] if states and statement.states is not None else []
        branch, found = continuation.traced_with_states(problem, values, **keywords)
    except InputError as refused:
        return [{**about, "what": "refused", "why": str(refused).splitlines()[0]}]
    except ComputationError as failed:
        return [{**about, "what": "failed", "why": str(failed).splitlines()[0]}]
    rows: list[Row] = []
    real = [point for point in branch.turning_points if point.survives]
    for number, truth in enumerate(statement.turning_points):
        near = [point for point in real if abs(point.value - truth.number) <= NEAR * abs(truth.number)]
        if not near:
            rows.append(
                {**about, "what": "not found", "number": number + 1, "truth": truth.number, "why": f"{branch.ended}; {branch.notes}"}
            )
            continue
        point = min(near, key=lambda one: abs(one.value - truth.number))
        row = _row(about, "turning point", number + 1, point.value, point.uncertainty, truth.number, truth.uncertainty)
        rows.append({**row, "order": point.order, "grids": [(one.intervals, one.value) for one in point.refinement]})
        if truth.measured:
            value, uncertainty = point.measures[statement.measure], point.measure_uncertainty.get(statement.measure)
            own = _of_text(truth.measured)
            rows.append(_row(about, "measure there", number + 1, value, uncertainty, float(truth.measured), own))
    invented = len(real) - len(statement.turning_points)
    if invented > 0 and not states:
        rows.append({**about, "what": "invented", "why": f"{len(real)} turning points, {len(statement.turning_points)} are there"})
    for value in values:
        assert statement.states is not None
        left = list(found[value].states)
        for number, text in enumerate(statement.states.measured):
            if not left:
                rows.append({**about, "what": "state not found", "why": "; ".join(found[value].notes)})
                break
            # The branch may have a third state at the value, whose truth is not known.
            state = min(left, key=lambda one: abs(one.measures[statement.measure] - float(text)))
            left.remove(state)
            uncertainty = state.uncertainty.get(statement.measure)
            rows.append(
                _row(about, "state", number + 1, state.measures[statement.measure], uncertainty, float(text), statement.states.uncertainty)
            )
    spent = time.perf_counter() - began
    return [{**row, "seconds": spent / len(rows)} for row in rows]


def _arrays(measured: Any) -> Any:
    return {name: tuple(np.asarray(column, dtype=float) for column in columns) for name, columns in measured.items()} if measured else None


def _of_text(text: str) -> float:
    """Half a unit of the last digit of a decimal."""
    mantissa, _, power = text.lower().partition("e")
    return 0.5 * 10.0 ** (int(power or 0) - len(mantissa.partition(".")[2]))


def _row(about: Row, what: str, number: int, value: float, uncertainty: float | None, truth: float, own: float) -> Row:
    error = abs(value - truth)
    missed = uncertainty is not None and error > uncertainty + own + 1e-15 * abs(truth)
    row = {**about, "what": what, "number": number, "value": value, "uncertainty": uncertainty, "truth": truth, "own": own, "error": error}
    return {**row, "missed": missed}


def _work(pair: tuple[Statement, str, str, bool]) -> list[Row]:
    statement, scheme, grid, states = pair
    try:
        return held_against(statement, scheme, grid=grid, states=states)
    except Exception as fault:  # a fault of the tool: the rest of the campaign still counts
        about = {"name": statement.name, "kind": statement.kind, "scheme": scheme}
        return [{**about, "what": "fault", "why": f"{type(fault).__name__}: {fault}", "seconds": 0.0}]


def table(rows: Iterable[Row], by: str) -> Iterator[str]:
    """Lines of a table: one for each scheme or kind."""
    groups: dict[str, list[Row]] = {}
    for row in rows:
        groups.setdefault(row[by], []).append(row)
    heads = (
        "problems",
        "values",
        "misses",
        "no uncertainty",
        "not found",
        "median uncertainty/error",
        "95 %",
        "largest error/uncertainty",
        "seconds",
    )
    yield f"| {by} | {' | '.join(heads)} |"
    yield "| " + "--- | " * (len(heads) + 1)
    for name, group in groups.items():
        values = [row for row in group if "missed" in row]
        given = [row for row in values if row["uncertainty"] is not None]
        wide = [row["uncertainty"] / max(row["error"], row["own"], 1e-16 * abs(row["truth"])) for row in given]
        worst = max((row["error"] / (row["uncertainty"] + row["own"]) for row in given if row["uncertainty"] + row["own"] > 0), default=0.0)
        lost = sum(row["what"] in LOST for row in group)
        problems = len({row["name"] for row in group if row["what"] != "refused"})
        middle, most = (np.percentile(wide, 50), np.percentile(wide, 95)) if wide else (np.nan, np.nan)
        missed, seconds = sum(row["missed"] for row in values), sum(row.get("seconds", 0.0) for row in group)
        cells = [
            problems,
            len(values),
            missed,
            len(values) - len(given),
            lost,
            f"{middle:.0f}",
            f"{most:.0f}",
            f"{worst:.2f}",
            f"{seconds:.0f}",
        ]
        yield f"| {name} | {' | '.join(map(str, cells))} |"


def main() -> int:
    """Run what is asked for and print the tables; 1 where anything missed."""
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--schemes", default=",".join(bvp.schemes.names()))
    options.add_argument("--kinds", default="")
    options.add_argument("--grid", default="adaptive")
    options.add_argument("--workers", type=int, default=1)
    options.add_argument("--every", type=int, default=1, help="every n-th problem only")
    options.add_argument("--first", type=int, default=0, help="and of those, starting with this one")
    options.add_argument("--no-states", action="store_true", help="turning points only, the trace ends with the last")
    options.add_argument("--out", type=Path)
    asked = options.parse_args()
    os.environ["OMP_NUM_THREADS"] = "1"
    rows: list[Row] = []
    if asked.out and asked.out.exists():
        rows = [row for line in asked.out.read_text().splitlines() for row in json.loads(line)]
    done = {(row["name"], row["scheme"]) for row in rows}
    chosen = [one for one in read()[asked.first :: asked.every] if asked.kinds.replace("_", " ") in one.kind.replace("_", " ")]
    pairs = [
        (one, scheme, asked.grid, not asked.no_states)
        for scheme in asked.schemes.split(",")
        for one in chosen
        if (one.name, scheme) not in done
    ]
    with ProcessPoolExecutor(asked.workers) as workers:
        for new in workers.map(_work, pairs):
            rows += new
            if asked.out:
                with asked.out.open("a") as file:
                    file.write(json.dumps(new) + "\n")
    for by in ("scheme", "kind", "what"):
        print(*table(rows, by), "", sep="\n")
    for row in rows:
        if row.get("missed") or row["what"] in (*LOST, "invented"):
            print({name: value for name, value in row.items() if name not in ("seconds", "missed")})
    return 1 if any(row.get("missed") for row in rows) else 0


if __name__ == "__main__":
    sys.exit(main())
