"""The bordered band against LAPACK's banded solver, on the same systems in the same run.

`python tests/benchmarks/blocks.py` prints, for three-node rows of 1 to 4 unknowns, nanoseconds a node and the ratio of
the times: elimination and one right-hand side by BorderedBand over dgbsv on the same matrix; and with one border, over
dgbsv with the two right-hand sides that the classical bordering needs. One unknown is held against dgtsv too, which is
made for it and twice as fast as the general elimination: scalar problems have a kernel of their own. Each ratio is
the median over pairs timed one after the other. `--most 5` takes grids of up to 10^5 intervals; 10^6 with four unknowns need 4 GB.
"""

from __future__ import annotations

import argparse
import time
from collections.abc import Callable

import numpy as np
import numpy.typing as npt
from scipy.linalg import lapack

from bvp.bordered_band import BorderedBand

Floats = npt.NDArray[np.float64]
WORK = 4e6  # columns eliminated in all for one line of the table, at least three times


def system(unknowns: int, intervals: int) -> tuple[npt.NDArray[np.int64], Floats]:
    """(starts, entries) of u'' + coupling, on nodes 0 to `intervals`, with noise so that pivots are not all of one kind."""
    generator = np.random.default_rng(0)
    nodes = intervals + 1
    starts = unknowns * np.maximum(np.repeat(np.arange(nodes), unknowns) - 1, 0)
    entries = 0.1 * generator.standard_normal((nodes * unknowns, 3 * unknowns))
    for unknown in range(unknowns):
        entries[unknown::unknowns, unknown] += 1.0
        entries[unknown::unknowns, unknowns + unknown] -= 2.0
        entries[unknown::unknowns, 2 * unknowns + unknown] += 1.0
    entries[:unknowns, : 2 * unknowns] = entries[:unknowns, unknowns:]  # the first node has none before it
    entries[:unknowns, 2 * unknowns :] = 0.0
    return starts, entries


def banded(starts: npt.NDArray[np.int64], entries: Floats, unknowns: int) -> Floats:
    """The same matrix as dgbsv takes it, with room for the fill."""
    below = 2 * unknowns - 1
    columns = starts.size
    stored = np.zeros((3 * below + 1, columns), order="F")
    rows = np.arange(columns)
    for t in range(entries.shape[1]):
        at = starts + t
        there = (at < columns) & (np.abs(rows - at) <= below)
        stored[2 * below + rows[there] - at[there], at[there]] = entries[there, t]
    return stored


def seconds(work: Callable[[], object]) -> float:
    """How long it takes."""
    began = time.perf_counter()
    work()
    return time.perf_counter() - began


def measure(unknowns: int, intervals: int, border: int, tridiagonal: bool = False) -> tuple[float, float, float]:
    """(nanoseconds a node of BorderedBand, of LAPACK, median ratio)."""
    starts, entries = system(unknowns, intervals)
    columns = starts.size
    generator = np.random.default_rng(1)
    border_columns, border_rows = generator.standard_normal((columns, border)), generator.standard_normal((border, columns + border))
    right = generator.standard_normal(columns + border)
    stored, rights = banded(starts, entries, unknowns), np.asfortranarray(generator.standard_normal((columns, 1 + border)))
    matrix = BorderedBand(starts, 3 * unknowns, columns, border)
    below = 2 * unknowns - 1

    def ours() -> None:
        matrix.factor(entries, border_columns, border_rows)
        matrix.solve(right)

    def theirs() -> None:
        if tridiagonal:
            lapack.dgtsv(*diagonals, rights_copy, overwrite_dl=1, overwrite_d=1, overwrite_du=1, overwrite_b=1)
        else:
            lapack.dgbsv(below, below, copy, rights_copy, overwrite_ab=1, overwrite_b=1)

    ours()
    pairs = []
    for _ in range(max(3, min(200, int(WORK / columns)))):
        copy, rights_copy = stored.copy(order="F"), rights.copy(order="F")
        diagonals = copy[3, :-1].copy(), copy[2].copy(), copy[1, 1:].copy()
        pairs.append((seconds(ours), seconds(theirs)))
    timed = np.array(pairs)
    band_time, lapack_time = np.median(timed, axis=0) / (intervals + 1) * 1e9
    return float(band_time), float(lapack_time), float(np.median(timed[:, 0] / timed[:, 1]))


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0] if __doc__ else "")
    parser.add_argument("--most", type=int, default=6, help="power of ten of the largest number of intervals (3 to 6)")
    most = parser.parse_args().most
    print("unknowns  intervals    band  LAPACK  ratio   with a border: band  LAPACK  ratio    (ns a node)")
    for unknowns, tridiagonal in ((1, True), (1, False), (2, False), (3, False), (4, False)):
        for power in range(3, most + 1):
            plain, bordered = (measure(unknowns, 10**power, border, tridiagonal) for border in (0, 1))
            print(
                f"{'dgtsv' if tridiagonal else '':5s}{unknowns:3d}  {10**power:9d}  {plain[0]:6.0f}  {plain[1]:6.0f}  {plain[2]:5.2f}",
                end="",
            )
            print(f"                 {bordered[0]:6.0f}  {bordered[1]:6.0f}  {bordered[2]:5.2f}")


if __name__ == "__main__":
    main()
