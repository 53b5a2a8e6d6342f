"""The rule that places labels: nearest first, never on anything."""

from __future__ import annotations

import numpy as np
import pytest

from continuation.drawing.places import REACHES, Box, Field, dense_points, line_to

FRAME = Box(0.0, 0.0, 200.0, 100.0)


def test_a_free_label_stands_next_to_its_anchor_on_the_side_asked_for() -> None:
    box = Field(FRAME).place((30.0, 10.0), (100.0, 50.0), (1.0, 0.0), REACHES)
    assert box == Box(105.0, 45.0, 135.0, 55.0)


def test_a_label_at_the_frame_goes_to_the_other_side() -> None:
    box = Field(FRAME).place((30.0, 10.0), (198.0, 50.0), (1.0, 0.0), REACHES)
    assert box is not None
    assert box.right < 198.0


def test_twenty_labels_of_one_anchor_meet_neither_each_other_nor_a_curve() -> None:
    field = Field(FRAME)
    curve = field.add_curve(np.array([0.0, 200.0]), np.array([20.0, 80.0]))
    boxes = [field.place((20.0, 8.0), (100.0, 50.0), (0.0, 1.0), REACHES) for _ in range(20)]
    placed = [box for box in boxes if box is not None]
    assert len(placed) > 5
    assert not any(one.meets(other) for index, one in enumerate(placed) for other in placed[:index])
    assert not any(box.holds_any(curve) for box in placed)
    assert all(box.within(FRAME) for box in placed)


def test_no_room_is_said() -> None:
    assert Field(FRAME).place((250.0, 10.0), (100.0, 50.0), (1.0, 0.0), REACHES) is None


def test_what_is_not_accepted_is_not_taken() -> None:
    field = Field(FRAME)
    assert field.place((30.0, 10.0), (100.0, 50.0), (1.0, 0.0), REACHES, lambda box: False) is None
    assert field.taken == []


def test_dense_points_cover_what_is_seen_and_no_more() -> None:
    points = dense_points(np.array([0.0, 1e9]), np.array([0.0, 0.0]), FRAME)
    assert len(points) < 1000
    assert np.max(np.hypot(*np.diff(points, axis=0).T)) <= 1.5
    assert points[-1, 0] == pytest.approx(220.0)
    assert dense_points(np.array([np.nan]), np.array([1.0]), FRAME).shape == (0, 2)


def test_line_from_an_anchor_to_a_box_is_the_shortest() -> None:
    line = line_to(Box(10.0, 10.0, 20.0, 20.0), (0.0, 15.0))
    assert tuple(line[-1]) == (10.0, 15.0)
