"""A branch taken apart: the curve drawn is the branch, and the states counted are those that a formula has."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest

from continuation.drawing.pieces import pieces_of, stretches_of, unstable_beside
from continuation.records import Branch
from tests import drawn_branches


def states_at(branch: Branch, parameter: float) -> int | None:
    """What the stretches say of a value of the parameter."""
    return next(stretch.states for stretch in stretches_of(branch) if stretch.lower < parameter < stretch.upper)


@pytest.mark.parametrize("parameter", [0.3, 0.45, 0.55, 1.0, 1.7, 1.9, 2.5])
def test_states_on_an_s_are_the_roots_of_its_cubic(parameter: float) -> None:
    roots = np.roots([1 / 3, -2, 3, 0.5 - parameter])
    real = roots[np.abs(roots.imag) < 1e-9].real
    assert states_at(drawn_branches.s_shaped(), parameter) == np.count_nonzero((real > -0.12) & (real < 4.3))


@pytest.mark.parametrize("parameter", [0.5, 1.6, 1.95, 2.05, 2.2, 2.9, 3.2])
def test_states_on_a_spiral_are_the_crossings_of_its_formula(parameter: float) -> None:
    s = np.linspace(0, 10.2 * np.pi, 200001)
    crossings = np.count_nonzero(np.diff(np.sign(2 - 2 * np.exp(-0.22 * s) * np.cos(s) - parameter)))
    assert states_at(drawn_branches.spiral(), parameter) == crossings


def test_states_of_the_cylinder() -> None:
    cylinder = drawn_branches.cylinder()
    end = float(cylinder.parameter[-1])
    counted = [(stretch.lower, stretch.upper, stretch.states, stretch.or_more) for stretch in stretches_of(cylinder)]
    # lam = 8B/(1+B)^2 has two roots B for every 0 < lam < 2; the trace ends before it comes back to 0.
    assert counted == [(-np.inf, 0.0, None, False), (0.0, end, 1, True), (end, 2.0, 2, False), (2.0, np.inf, 0, False)]


@pytest.mark.parametrize("refined", [1.97, 2.03])
def test_a_refined_value_on_either_side_of_the_grid_s_own_invents_no_state(refined: float) -> None:
    cylinder = drawn_branches.cylinder()
    moved = dataclasses.replace(cylinder, turning_points=(dataclasses.replace(cylinder.turning_points[0], value=refined),))
    assert [stretch.states for stretch in stretches_of(moved)] == [None, 1, 2, 0]
    assert stretches_of(moved)[-1].lower == refined


def test_closed_loop_has_two_states_between_its_turning_points_and_none_beyond() -> None:
    angle = np.linspace(0.3, 0.3 + 2 * np.pi, 80)
    turned = [
        drawn_branches.turning_point(1.0, {"max(u)": 0.0}, "above", np.pi - 0.3, 1e-9),
        drawn_branches.turning_point(3.0, {"max(u)": 0.0}, "below", 2 * np.pi - 0.3, 1e-9),
    ]
    loop = drawn_branches.branch_of(2 + np.cos(angle), {"max(u)": np.sin(angle)}, None, angle - 0.3, turned, ended="closed loop")
    assert [(stretch.lower, stretch.upper, stretch.states) for stretch in stretches_of(loop)] == [
        (-np.inf, 1.0, 0),
        (1.0, 3.0, 2),
        (3.0, np.inf, 0),
    ]


def test_turnings_that_nobody_recorded_are_counted_too() -> None:
    bare = dataclasses.replace(drawn_branches.s_shaped(), turning_points=())
    assert [stretch.states for stretch in stretches_of(bare)] == [None, 1, 3, 1, None]


def test_nothing_is_claimed_of_one_point_or_beyond_the_ends() -> None:
    one = drawn_branches.branch_of(np.array([0.3]), {"max(u)": np.array([1.0])}, [0], np.array([0.0]))
    assert [stretch.states for stretch in stretches_of(one)] == [None]
    assert [stretch.states for stretch in stretches_of(drawn_branches.straight())] == [None, 1, None]


def test_pieces_meet_at_the_turning_points() -> None:
    branch = drawn_branches.s_shaped()
    pieces = pieces_of(branch, "max(u)")
    assert [piece.unstable for piece in pieces] == [0, 1, 0]
    for before, after, point in zip(pieces[:-1], pieces[1:], branch.turning_points, strict=True):
        for end in (before.parameter[-1], after.parameter[0]):
            assert end == pytest.approx(point.value, abs=1e-12)
    assert [unstable_beside(branch, point.position) for point in branch.turning_points] == [(0, 1), (1, 0)]


def test_a_change_of_stability_without_a_turning_point_is_drawn_where_it_is() -> None:
    straight = drawn_branches.straight(31)
    counts = (straight.arclength > 0.501).astype(np.int64)
    pieces = pieces_of(dataclasses.replace(straight, unstable_directions=counts), "max(u)")
    assert [piece.unstable for piece in pieces] == [0, 1]
    assert pieces[0].arclength[-1] == pieces[1].arclength[0] == pytest.approx(0.5 + 1 / 60)


def test_curve_drawn_is_the_branch_and_turns_nowhere_else() -> None:
    branch = drawn_branches.s_shaped()
    pieces = pieces_of(branch, "max(u)")
    arclength = np.concatenate([piece.arclength for piece in pieces])
    drawn = np.concatenate([piece.parameter for piece in pieces])
    measured = np.concatenate([piece.measure for piece in pieces])
    place = (np.sqrt(1 + 0.8 * measured) - 1) / 0.4  # where the branch has this measure, s + s^2/5
    assert np.max(np.abs(drawn - (place**3 / 3 - 2 * place**2 + 3 * place + 0.5))) < 2e-3  # 0.1 mm on paper
    assert set(branch.parameter) <= set(drawn)
    assert np.count_nonzero(np.diff(np.sign(np.diff(drawn[np.append(True, np.diff(arclength) > 0)])))) == 2


def test_on_a_logarithmic_axis_the_start_at_zero_is_left_out() -> None:
    branch = drawn_branches.straight()
    (piece,) = pieces_of(branch, "max(u)", log_parameter=True, log_measure=True)
    assert piece.parameter[0] == pytest.approx(branch.parameter[1])
    assert np.all(piece.measure > 0)


def test_without_stability_there_is_one_piece() -> None:
    (piece,) = pieces_of(drawn_branches.s_shaped(stable=False), "max(u)")
    assert piece.unstable is None
    assert unstable_beside(drawn_branches.s_shaped(stable=False), 1.0) is None
