"""Grids: nodes, faces and ghosts of uniform grids and of maps, and what is refused."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
import pytest
from hypothesis import given
from hypothesis import strategies as st

from bvp.errors import InputError
from bvp.grid import Grid

Array = npt.NDArray[np.float64]


@given(st.integers(2, 3000))
def test_uniform_nodes_and_faces(intervals: int) -> None:
    grid = Grid(intervals)
    assert grid.uniform
    assert grid.nodes.shape == (intervals + 3,)
    assert grid.faces.shape == (intervals + 2,)
    assert (grid.nodes[1], grid.nodes[-2]) == (0.0, 1.0)
    assert np.max(np.abs(np.diff(grid.nodes) * intervals - 1.0)) < 1e-12 * intervals
    assert np.max(np.abs(grid.faces - (grid.nodes[1:] + grid.nodes[:-1]) / 2)) < 1e-15


@given(st.integers(2, 500), st.floats(0.1, 4.0))
def test_nodes_are_the_map_of_equal_steps_also_past_the_ends(intervals: int, stretch: float) -> None:
    def bent(s: Array) -> Array:
        return np.asarray(np.sinh(stretch * s) / np.sinh(stretch))

    grid = Grid(intervals, bent)
    assert not grid.uniform
    assert np.max(np.abs(grid.nodes - bent(np.arange(-1, intervals + 2) / intervals))) < 1e-14
    assert np.max(np.abs(grid.faces - bent((np.arange(-1, intervals + 1) + 0.5) / intervals))) < 1e-14
    assert np.all(grid.nodes[:-1] < grid.faces)
    assert np.all(grid.faces < grid.nodes[1:])


def test_halving_keeps_every_node() -> None:
    grid = Grid(8, lambda s: s + 0.1 * np.sin(np.pi * s))
    assert np.array_equal(grid.refined(16).nodes[1:-1][::2], grid.nodes[1:-1])
    assert np.array_equal(grid.refined(16).nodes[2:-1:2], grid.faces[1:-1])


def test_ends_are_exact_where_the_map_is_not() -> None:
    grid = Grid(5, lambda s: s * (1 + 1e-16) + 0.0)
    assert (grid.nodes[1], grid.nodes[-2]) == (0.0, 1.0)


def test_a_map_that_folds_back_gives_mirrored_ghosts() -> None:
    grid = Grid(10, lambda s: s * s)
    assert grid.nodes[0] == -grid.nodes[2] == pytest.approx(-0.01)
    assert grid.nodes[-1] == pytest.approx(1.21)
    assert grid.faces[0] == -grid.faces[1]
    other = Grid(10, lambda s: s * (2 - s))
    assert other.nodes[-1] == pytest.approx(1.01)  # s = 1.1 would lie at 0.99
    assert other.nodes[0] == pytest.approx(-0.21)
    assert other.faces[-1] - 1.0 == pytest.approx(1.0 - other.faces[-2])


@pytest.mark.parametrize("intervals", [1, 0, -3, 50_000_001, 10.0, True, "20", None])
def test_numbers_of_intervals_that_no_grid_has(intervals: object) -> None:
    with pytest.raises(InputError, match="intervals"):
        Grid(intervals)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    "bad",
    [lambda s: 1.0 - s, lambda s: s * (1.6 - s), lambda s: np.where(s > 0.5, np.nan, s), lambda s: 2.0 * s, lambda s: np.sin(9.0 * s)],
)
def test_maps_that_do_not_increase_from_0_to_1(bad: object) -> None:
    with pytest.raises(InputError, match="does not increase"):
        _ = Grid(20, bad).nodes  # type: ignore[arg-type]
