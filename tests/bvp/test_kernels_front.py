"""The bordered band against dense elimination: random, badly ordered, singular by design, coupled at both ends."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.linalg import eigh_tridiagonal

from bvp.bordered_band import GROWTH_UNREFINED, BorderedBand
from bvp.kernels import front, front_solve
from bvp.kernels.jit import interpreted

Floats = npt.NDArray[np.float64]
ROUNDING = np.finfo(float).eps


class System(NamedTuple):
    """A matrix in the pieces that BorderedBand takes."""

    starts: npt.NDArray[np.int64]
    entries: Floats
    border_columns: Floats
    border_rows: Floats
    columns: int

    def dense(self) -> Floats:
        """The same matrix with all its zeros."""
        rows, width = self.entries.shape
        full = np.zeros((rows + self.border_rows.shape[0], self.columns + self.border_columns.shape[1]))
        for row, start in enumerate(self.starts):
            wide = min(width, self.columns - start)
            full[row, start : start + wide] = self.entries[row, :wide]
        full[:rows, self.columns :] = self.border_columns
        full[rows:] = self.border_rows
        return full

    def factored(self) -> BorderedBand:
        """The factorization, which has to go well."""
        matrix = BorderedBand(self.starts, self.entries.shape[1], self.columns, self.border_columns.shape[1])
        assert matrix.factor(self.entries, self.border_columns, self.border_rows).ok, matrix.factorization
        return matrix


def from_dense(band: Floats, starts: npt.ArrayLike, width: int, border_columns: Floats, border_rows: Floats) -> System:
    """The system whose band is given in full."""
    first = np.asarray(starts, dtype=np.int64)
    entries = np.zeros((first.size, width))
    for row, start in enumerate(first):
        wide = min(width, band.shape[1] - start)
        entries[row, :wide] = band[row, start : start + wide]
    return System(first, entries, border_columns, border_rows, band.shape[1])


@st.composite
def random_systems(draw: st.DrawFn) -> System:
    """Three-node rows of 1 to 4 unknowns, conditions on either end or both, up to 2 numbers, rows of any scale."""
    unknowns, nodes, numbers = draw(st.integers(1, 4)), draw(st.integers(2, 9)), draw(st.integers(0, 2))
    columns, width = unknowns * nodes, 3 * unknowns
    at_left = draw(st.integers(0, 2 * unknowns))
    inner = [unknowns * node for node in range(nodes - 2) for _ in range(unknowns)]
    at_right = max(0, columns - at_left - len(inner) + draw(st.integers(-2, 1)))
    starts = sorted([0] * at_left + inner + [max(0, columns - width)] * at_right)[: columns + numbers]
    generator = np.random.default_rng(draw(st.integers(0, 2**32)))
    rows = len(starts)
    entries = generator.standard_normal((rows, width)) * 10.0 ** generator.integers(-6, 7, size=(rows, 1))
    border_columns = generator.standard_normal((rows, numbers)) * np.max(np.abs(entries), axis=1, keepdims=True, initial=0.0)
    border_rows = generator.standard_normal((columns + numbers - rows, columns + numbers))
    if draw(st.booleans()):  # a good part of zeros, as matrices of equations have
        entries *= generator.random(entries.shape) < 0.7
    return System(np.array(starts, dtype=np.int64), entries, border_columns, border_rows, columns)


def backward_error(matrix: Floats, solution: Floats, right: Floats) -> float:
    """The largest residual of a row over the size of its entries times the solution's, and its right-hand side."""
    allowed = np.max(np.abs(matrix), axis=1) * np.max(np.abs(solution)) + np.abs(right)
    return float(np.max(np.abs(matrix @ solution - right) / allowed))


@settings(max_examples=150, deadline=None)
@given(random_systems())
def test_random_systems_are_solved_to_rounding(system: System) -> None:
    matrix = BorderedBand(system.starts, system.entries.shape[1], system.columns, system.border_columns.shape[1])
    how = matrix.factor(system.entries, system.border_columns, system.border_rows)
    dense = system.dense()
    scaled = dense / np.maximum(np.max(np.abs(dense), axis=1, keepdims=True), 1e-300)
    if not how.ok or how.smallest_pivot < 1e-9:
        assert np.linalg.cond(scaled) > 1e6
        return
    right = np.random.default_rng(0).standard_normal((dense.shape[0],))
    assert backward_error(dense, matrix.solve(right), right) < 200 * ROUNDING
    transposed = matrix.solve_transposed(right)
    # The rows' scales are those of the transposed unknowns.
    scale = np.max(np.abs(dense), axis=1)
    assert backward_error((dense / scale[:, None]).T, transposed * scale, right) < 200 * ROUNDING
    assert how.sign == np.linalg.slogdet(scaled).sign


@settings(max_examples=25, deadline=None)
@given(random_systems())
def test_interpreted_kernels_agree_to_the_last_bit(system: System) -> None:
    compiled = BorderedBand(system.starts, system.entries.shape[1], system.columns, system.border_columns.shape[1])
    plain = BorderedBand(system.starts, system.entries.shape[1], system.columns, system.border_columns.shape[1])
    how = compiled.factor(system.entries, system.border_columns, system.border_rows)
    right = np.random.default_rng(0).standard_normal((2, system.columns + system.border_columns.shape[1]))
    solutions = (compiled.solve(right), compiled.solve_transposed(right)) if how.ok else ()
    with pytest.MonkeyPatch.context() as patch, np.errstate(all="ignore"):
        for module in (front, front_solve):
            for name in ("band_rows_in_front", "factor", "factor_ending", "solve", "solve_transposed", "residual"):
                if hasattr(module, name):
                    patch.setattr(module, name, interpreted(getattr(module, name)))
        assert front.band_rows_in_front(plain.starts, plain.columns) == compiled._front.shape[0] - compiled.borders
        assert plain.factor(system.entries, system.border_columns, system.border_rows) == how
        if how.ok:
            np.testing.assert_array_equal((plain.solve(right), plain.solve_transposed(right)), solutions)


def second_difference(nodes: int, length: float, well: float) -> tuple[Floats, Floats]:
    """(matrix, null vector) of u'' - q u, zero at both ends, shifted to be singular; q has a well at `well` of the length."""
    step = length / (nodes + 1)
    x = step * np.arange(1, nodes + 1)
    potential = 4.0 - 20.0 * np.exp(-((x - well * length) ** 2))
    diagonal = -2.0 - step**2 * potential
    (value,), vectors = eigh_tridiagonal(diagonal, np.ones(nodes - 1), select="i", select_range=(nodes - 1, nodes - 1))
    return np.diag(diagonal - value) + np.eye(nodes, k=1) + np.eye(nodes, k=-1), vectors[:, 0]


@pytest.mark.parametrize("length", [1.0, 10.0, 30.0])
@pytest.mark.parametrize("well", [0.1, 0.5, 0.9])
def test_a_singular_band_costs_no_digits(length: float, well: float) -> None:
    """The border row is the null vector, as at a turning point; where the well is far from an end, it is 1e-30 there."""
    nodes = 150
    band, null = second_difference(nodes, length, well)
    starts = np.maximum(np.arange(nodes) - 1, 0)
    system = from_dense(band, starts, 3, np.full((nodes, 1), 0.01), np.append(null, 0.3)[None])
    assert np.max(np.abs(band @ null)) < 1e-14
    dense = system.dense()
    truth = np.random.default_rng(1).standard_normal(nodes + 1)
    right = dense @ truth
    matrix = system.factored()
    assert matrix.factorization.growth < 2.0
    worst = np.max(np.abs(np.linalg.solve(dense, right) - truth))
    assert np.max(np.abs(matrix.solve(right) - truth)) < 10 * worst + 1e-14
    assert backward_error(dense, matrix.solve(right), right) < 20 * ROUNDING
    assert backward_error(dense.T, matrix.solve_transposed(right), right) < 20 * ROUNDING


def test_two_uncoupled_unknowns_of_which_one_is_singular() -> None:
    nodes = 60
    band, null = second_difference(nodes, 5.0, 0.3)
    both = np.zeros((2 * nodes, 2 * nodes))
    both[::2, ::2] = band
    both[1::2, 1::2] = band - 0.5 * np.eye(nodes)
    border = np.zeros((1, 2 * nodes + 1))
    border[0, :-1:2] = null
    starts = np.repeat(2 * np.maximum(np.arange(nodes) - 1, 0), 2)
    system = from_dense(both, starts, 6, border[:, :-1].T.copy(), border)
    right = np.random.default_rng(2).standard_normal(2 * nodes + 1)
    np.testing.assert_allclose(system.factored().solve(right), np.linalg.solve(system.dense(), right), rtol=1e-9, atol=1e-11)


@pytest.mark.parametrize("at_left", [0, 1, 2])
def test_conditions_may_stand_at_either_end(at_left: int) -> None:
    """u'' = f with both conditions at one end; elimination in order meets the zeros on the diagonal that are put there."""
    nodes = 12
    inner = np.zeros((nodes - 2, nodes))
    for k in range(nodes - 2):
        inner[k, k : k + 3] = 1.0, 0.0, 1.0
    ends = np.zeros((2, nodes))
    ends[0, 0] = 1.0
    ends[1, :2] = 0.0, 1.0
    last = ends[:, ::-1]
    band = np.vstack([ends[:at_left], inner, last[: 2 - at_left][::-1]])
    starts = np.concatenate([np.zeros(at_left), np.arange(nodes - 2), np.full(2 - at_left, nodes - 3)]).astype(np.int64)
    system = from_dense(band, starts, 3, np.empty((nodes, 0)), np.empty((0, nodes)))
    right = np.random.default_rng(3).standard_normal(nodes)
    np.testing.assert_allclose(system.factored().solve(right), np.linalg.solve(system.dense(), right), rtol=1e-12)


@pytest.mark.parametrize("length", [1.0, 100.0])
def test_periodic_conditions_are_border_rows(length: float) -> None:
    """u'' - u with u and u' the same at both ends: single shooting would lose exp(length)."""
    nodes = 200
    step = length / (nodes - 1)
    border = np.zeros((2, nodes))
    border[0, [0, -1]] = 1.0, -1.0
    border[1, [0, 1, -2, -1]] = -1.0, 1.0, 1.0, -1.0
    entries = np.tile([1.0, -2.0 - step**2, 1.0], (nodes - 2, 1))
    system = System(np.arange(nodes - 2), entries, np.empty((nodes - 2, 0)), border, nodes)
    truth = np.random.default_rng(4).standard_normal(nodes)
    right = system.dense() @ truth
    worst = np.max(np.abs(np.linalg.solve(system.dense(), right) - truth))
    assert np.max(np.abs(system.factored().solve(right) - truth)) < 10 * worst + 1e-14


def shooting(intervals: int) -> System:
    """x' = M x between 60 or more points with x(0) + x(L) given, for which partial pivoting is unstable.

    S. J. Wright, A collection of problems for which Gaussian elimination with partial pivoting is unstable, SIAM J. Sci.
    Comput. 14, 1993, 231-238, section 2, with M = [[-1/6, 1], [1, -1/6]] and steps of 0.3 (quoted from memory).
    """
    eigenvalues, rotation = np.linalg.eigh(np.array([[-1 / 6, 1.0], [1.0, -1 / 6]]))
    step = rotation @ np.diag(np.exp(0.3 * eigenvalues)) @ rotation.T
    columns = 2 * (intervals + 1)
    entries = np.tile(np.hstack([-step, np.eye(2)]), (intervals, 1))
    border = np.hstack([np.eye(2), np.zeros((2, columns - 4)), np.eye(2)])
    return System(np.repeat(2 * np.arange(intervals), 2), entries, np.empty((2 * intervals, 0)), border, columns)


def test_unstable_eliminations_are_refined_or_refused() -> None:
    system = shooting(60)
    truth = np.random.default_rng(5).standard_normal(system.columns)
    right = system.dense() @ truth
    matrix = system.factored()
    assert matrix.factorization.growth > GROWTH_UNREFINED
    assert np.max(np.abs(np.linalg.solve(system.dense(), right) - truth)) > 1e-12  # what partial pivoting alone leaves
    np.testing.assert_allclose(matrix.solve(right), truth, rtol=0, atol=1e-14)
    right = system.dense().T @ truth
    np.testing.assert_allclose(matrix.solve_transposed(right), truth, rtol=0, atol=1e-14)
    system = shooting(200)
    matrix = BorderedBand(system.starts, 4, system.columns)
    how = matrix.factor(system.entries, system.border_columns, system.border_rows)
    assert not how.ok
    with pytest.raises(ValueError, match=r"^cannot solve: "):
        matrix.solve(np.ones(system.columns))


def test_several_right_hand_sides_are_rows() -> None:
    system = from_dense(
        second_difference(9, 1.0, 0.5)[0] - np.eye(9), np.maximum(np.arange(9) - 1, 0), 3, np.empty((9, 0)), np.empty((0, 9))
    )
    rights = np.random.default_rng(6).standard_normal((3, 9))
    matrix = system.factored()
    np.testing.assert_array_equal(matrix.solve(rights), [matrix.solve(right) for right in rights])
    np.testing.assert_array_equal(matrix.solve_transposed(rights), [matrix.solve_transposed(right) for right in rights])


@pytest.mark.parametrize("bad", [np.nan, 0.0])
def test_a_column_without_a_usable_entry_is_named(bad: float) -> None:
    entries = np.tile([1.0, -2.0, 1.0], (5, 1))
    starts = np.maximum(np.arange(5) - 1, 0)
    entries[0] = [-2.0, 1.0, 0.0]
    for row, start in enumerate(starts):
        if 0 <= 3 - start < 3:
            entries[row, 3 - start] = bad
    matrix = BorderedBand(starts, 3, 5)
    how = matrix.factor(entries)
    assert not how.ok
    assert "column 3 of 5" in how.reason
    assert how.sign == 0.0
    with pytest.raises(ValueError, match="column 3 of 5"):
        matrix.solve(np.ones(5))


def test_an_infinite_entry_is_no_pivot() -> None:
    matrix = BorderedBand([0, 0], 2, 2)
    assert not matrix.factor(np.array([[np.inf, 1.0], [1.0, np.inf]])).ok


def test_misfits_are_refused() -> None:
    with pytest.raises(ValueError, match="does not decrease"):
        BorderedBand([1, 0], 2, 2)
    with pytest.raises(ValueError, match="does not decrease"):
        BorderedBand([0, 2], 2, 2)
    with pytest.raises(ValueError, match="3 rows are more than 2 columns"):
        BorderedBand([0, 0, 0], 2, 2)
    matrix = BorderedBand([0, 0], 2, 2)
    with pytest.raises(ValueError, match="nothing was factored yet"):
        matrix.solve([1.0, 2.0])
    with pytest.raises(ValueError, match=r"entries has the shape \(2, 3\) where \(2, 2\) is needed"):
        matrix.factor(np.ones((2, 3)))
    assert matrix.factor(np.array([[1.0, 2.0], [3.0, 4.0]])).ok
    with pytest.raises(ValueError, match=r"do not end in 2"):
        matrix.solve([1.0, 2.0, 3.0])
    np.testing.assert_allclose(matrix.solve([5.0, 11.0]), [1.0, 2.0], rtol=1e-14)
