"""A result as files for other programs: the branch as CSV, profiles as NumPy arrays, versions."""

from __future__ import annotations

import csv
import io
import platform
from collections.abc import Sequence
from importlib import metadata
from typing import Any

from cases.results import Traced

PACKAGES = ("hairpin", "numpy", "scipy", "numba", "sympy", "mpmath", "matplotlib")


def branch_csv(result: Traced) -> bytes:
    """One line a point: parameter, measures, unstable directions, arclength, and the branch it is on; all digits."""
    measures = list(result.branches[0].measures) if result.branches else []
    written = io.StringIO()
    rows = csv.writer(written, lineterminator="\n")
    rows.writerow([result.case.trace.along, *measures, "unstable directions", "arclength", "branch"])
    for branch in result.branches:
        for point in range(len(branch.parameter)):
            unstable = "" if branch.unstable_directions is None else int(branch.unstable_directions[point])
            values = [branch.parameter[point], *(branch.measures[measure][point] for measure in measures)]
            rows.writerow([*(repr(float(value)) for value in values), unstable, repr(float(branch.arclength[point])), branch.name])
    return written.getvalue().encode()


def states_npz(named: Sequence[tuple[str, Any]], unknowns: Sequence[str], coordinate: str) -> bytes:
    """The profiles that were kept: `names`, one array of nodes and of each unknown a profile, and the parameters.

    Rows are filled with NaN where profiles have different numbers of nodes.
    """
    import numpy as np

    longest = max((len(state.x) for _, state in named), default=0)
    arrays: dict[str, Any] = {"names": np.array([name for name, _ in named], dtype=str)}
    nodes = np.full((len(named), longest), np.nan)
    values = np.full((len(unknowns), len(named), longest), np.nan)
    for row, (_, state) in enumerate(named):
        nodes[row, : len(state.x)] = state.x
        values[:, row, : len(state.x)] = np.atleast_2d(state.u)
    arrays[coordinate] = nodes
    arrays.update({unknown: values[index] for index, unknown in enumerate(unknowns)})
    for parameter in named[0][1].parameters if named else ():
        arrays[parameter] = np.array([state.parameters[parameter] for _, state in named])
    written = io.BytesIO()
    np.savez(written, **arrays)
    return written.getvalue()


def versions() -> dict[str, str]:
    """What the result was computed with."""
    found = {"python": platform.python_version(), "system": platform.platform()}
    for package in PACKAGES:
        try:
            found[package] = metadata.version(package)
        except metadata.PackageNotFoundError:  # run from a checkout that was not installed
            found[package] = "not installed"
    return found
