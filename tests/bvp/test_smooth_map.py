"""Maps that follow a density: exact ends and reflections, positions kept, shares made equal, precision where it is narrow."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from mpmath import mp, mpf

from bvp.monitor import density, graded, is_symmetric, roughness
from bvp.smooth_map import SmoothMap

S = np.linspace(0.0, 1.0, 201)


def followed(profile: np.ufunc, moves: int = 9, even: bool = False) -> SmoothMap:
    """The map after so many moves toward a profile of x."""
    made = SmoothMap.identity()
    for _ in range(moves):
        x = made(S)
        made = made.redistributed(density(x, np.asarray(profile(x)), even))
    return made


def test_identity() -> None:
    made = SmoothMap.identity()
    assert np.max(np.abs(made(S) - S)) < 1e-15
    assert np.max(np.abs(made.slope(S) - 1.0)) < 1e-12


@pytest.mark.parametrize("width", [1e-2, 1e-4, 1e-6])
@pytest.mark.parametrize("place", [0.0, 0.3, 1.0])
def test_a_narrow_layer_is_found_and_resolved_wherever_it_is(width: float, place: float) -> None:
    made = followed(lambda x: np.tanh((x - place) / width))  # type: ignore[arg-type]
    x = made(S)
    assert abs(x[0]) < 1e-15
    assert x[-1] == pytest.approx(1.0, abs=1e-15)
    assert np.all(np.diff(x) > 0.0)
    assert np.count_nonzero(np.abs(x - place) < 2 * width) > 25
    shares = density(x, np.tanh((x - place) / width), False)
    assert shares.max() < 2.5 * shares.mean()
    steps = np.log(np.diff(x))
    assert np.max(np.abs(np.diff(steps))) < 1.0  # neighbouring steps within a factor e, on a grid of 200


def test_several_features_at_once() -> None:
    made = followed(lambda x: np.tanh((x - 0.2) / 1e-4) + np.tanh((x - 0.7) / 1e-3) + np.exp(-x / 1e-5))  # type: ignore[arg-type]
    x = made(S)
    for place, width in ((0.2, 1e-4), (0.7, 1e-3), (0.0, 1e-5)):
        assert np.count_nonzero(np.abs(x - place) < 3 * width) > 8


def test_reflection_at_both_ends_and_inverse() -> None:
    made = followed(lambda x: np.exp(-x / 1e-3))  # type: ignore[arg-type]
    s = np.linspace(-0.05, 1.05, 501)
    x = made(s)
    assert np.allclose(x[s < 0], -made(-s[s < 0]), rtol=0, atol=1e-16)
    assert np.allclose(x[s > 1], 2.0 - made(2.0 - s[s > 1]), rtol=0, atol=1e-15)
    assert np.max(np.abs(made.inverse(x) - s)) < 1e-9
    assert np.max(np.abs(made(made.inverse(x)) - x)) < 1e-14


def test_a_rise_keeps_its_relative_precision_far_from_zero() -> None:
    """Against the same polynomials summed with 40 digits."""
    made = followed(lambda x: np.tanh((x - 0.3) / 1e-6))  # type: ignore[arg-type]
    mp.dps = 40

    def exact(s: float) -> mpf:
        panel = min(int(s * 128), 127)
        t = 2 * (mpf(s) * 128 - panel) - 1
        total = sum((mpf(float(one)) for one in made._rises[:panel]), mpf(0))
        for order, row in enumerate(made._series):
            total += mpf(float(row[panel])) * mp.cos(order * mp.acos(t))
        return total

    a = np.linspace(0.4, 0.6, 40)
    b = a + 1.0 / 400.0
    rises = made.rise(a, b)
    for low, high, rise in zip(a.tolist(), b.tolist(), rises.tolist(), strict=True):
        assert abs(rise - (exact(high) - exact(low))) < 1e-11 * rise


def test_smoothness_lets_errors_be_a_series() -> None:
    """The second difference of exp on the map's grids has errors that fall by four with the step: the map has no kinks."""
    made = followed(lambda x: np.tanh((x - 0.4) / 1e-2))  # type: ignore[arg-type]
    errors = []
    for count in (400, 800, 1600):
        s = np.arange(count + 1) / count
        x, faces = made(s), made(s[:-1] + 0.5 / count)
        flux = np.diff(np.exp(x)) / np.diff(x)
        errors.append(np.max(np.abs(np.diff(flux) / np.diff(faces) - np.exp(x[1:-1]))))
    assert np.log2(errors[0] / errors[1]) == pytest.approx(2.0, abs=0.05)
    assert np.log2(errors[1] / errors[2]) == pytest.approx(2.0, abs=0.05)


def test_symmetry_is_seen_and_kept() -> None:
    x, made = S, SmoothMap.identity()
    for _ in range(6):
        shares = density(x, np.exp(-(((x - 0.5) / 1e-3) ** 2)), False)
        assert is_symmetric(shares)
        made = made.redistributed(shares, symmetric=True)
        x = made(S)
    assert np.max(np.abs(x + x[::-1] - 1.0)) < 1e-14
    assert not is_symmetric(density(S, np.exp(S), False))


def test_a_state_without_shape_keeps_equal_steps() -> None:
    shares = density(S, 300.0 + 1e-10 * np.sin(9.0 * S), False)
    assert np.max(np.abs(shares / shares.mean() - 1.0)) < 1e-9


@given(st.lists(st.floats(0.01, 100.0), min_size=8, max_size=30))
def test_grading_only_adds_and_bounds_how_lengths_change(shares: list[float]) -> None:
    x = np.linspace(0.0, 1.0, len(shares))
    raised = graded(x, np.array(shares))
    assert np.all(raised >= np.array(shares) * (1.0 - 1e-12))
    assert np.all(np.abs(np.diff(1.0 / raised)) <= 4.0 * np.diff(x) * (1.0 + 1e-9))


def test_roughness_tells_a_peak_on_one_node_from_a_resolved_one() -> None:
    nodes = np.linspace(-0.01, 1.01, 103)
    assert roughness(np.exp(-(((nodes - 0.5) / 0.2) ** 2))) < 0.05
    assert roughness(1.0 - np.abs(nodes - 0.5)) > 1.5
