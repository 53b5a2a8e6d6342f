"""The rows of every built-in scheme against slow literal twins, and what each is exact for."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import numpy.typing as npt
import pytest

import bvp
from bvp.discretize import Discretization
from bvp.grid import Grid
from bvp.problem import Problem
from bvp.schemes import names, typed
from tests import naive

Array = npt.NDArray[Any]
GEOMETRIES = {"slab": 0, "cylinder": 1, "sphere": 2}
LAM, BI = 0.7, 2.5


def source(x: Any, u: Any, lam: Any = LAM) -> Any:
    """The source of most problems here: it holds the coordinate, the unknown and the parameter."""
    return lam * np.exp(0.5 * u) + x * x - u


def body(geometry: str, left: float, cooled: bool) -> Problem:
    """laplacian(u) + source = 0 from `left` to 1, fixed at a left end that is no axis."""
    ends = ["u'(1) + Bi*(u(1) - 0.2) = 0" if cooled else "u(1) = 0.3"]
    if geometry == "slab" or left:
        ends.insert(0, f"u({left}) = 0.8")
    text = "laplacian(u) + lam*exp(0.5*u) + x^2 - u = 0"
    return Problem(text, "u", (left, 1), ends, {"lam": LAM, "Bi": BI}, geometry=geometry)


def rows(problem: Problem, scheme: Any, nodal: Array, maps: Callable[[Array], Array] | None = None) -> tuple[Array, Array]:
    """Residuals in the places of the nodal values (ghosts included), and the coordinates of the nodes, ghosts included."""
    along = next(iter(problem.parameters))
    grid = Grid(nodal.size - 3, maps)
    system = Discretization(problem, scheme, along, uniform=maps is None, compiled=False).on(grid)
    left, right = problem.end_values(problem.parameters)
    return system.stored_rows(nodal, problem.parameters[along])[0].copy(), left + (right - left) * grid.nodes


def drawn(intervals: int, seed: int) -> Array:
    """A rough profile, ghosts included."""
    return np.random.default_rng(seed).uniform(-0.5, 1.5, intervals + 3)


@pytest.mark.parametrize("cooled", [False, True])
@pytest.mark.parametrize("left", [0.0, 0.4])
@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_central_rows_are_those_of_the_naive_twin(geometry: str, left: float, cooled: bool) -> None:
    s = GEOMETRIES[geometry]
    at_axis = s > 0 and left == 0.0
    twin = naive.NaiveProblem(
        source,
        lambda x, u, lam: 0.5 * lam * np.exp(0.5 * u) - 1,
        left,
        1.0,
        naive.Cooled() if at_axis else naive.Fixed(0.8),
        naive.Cooled(BI, 0.2) if cooled else naive.Fixed(0.3),
        s,
    )
    nodal = drawn(11, 3)
    h = (1.0 - left) / 11
    if cooled:
        nodal[-1] = nodal[-3] - 2 * h * BI * (nodal[-2] - 0.2)  # the ghost that the condition says
    found, _ = rows(body(geometry, left, cooled), "central", nodal)
    expected = naive.residual(twin, nodal[1:-1], LAM)
    assert np.max(np.abs(found[2:-2] - expected[1:-1])) < 1e-11
    if at_axis:
        assert abs(found[1] - expected[0]) < 1e-11
    else:
        assert abs(found[0] - expected[0]) < 1e-15
    if cooled:
        assert abs(found[-1]) < 1e-12
        assert abs(found[-2] - expected[-1]) < 1e-11
    else:
        assert abs(found[-1] - expected[-1]) < 1e-15


def literal(scheme: str, s: int, x: Array, u: Array, k: int, source_at: Callable[[int], float], faces: Array) -> float:
    """Row k of a scheme from its definition; face k - 1/2 is faces[k - 1]."""
    h = x[k + 1] - x[k]
    if scheme == "log-cosh":
        return float(
            (u[k + 1] - 2 * u[k] + u[k - 1]) / (2 * np.log(np.cosh(h))) + s / x[k] * (u[k + 1] - u[k - 1]) / (2 * h) + source_at(k)
        )

    def flux(left: int) -> float:
        inner, outer = x[left], x[left + 1]
        rise = u[left + 1] - u[left]
        if scheme == "shell-balance":
            return float(faces[left] ** s * rise / (outer - inner))
        integral = {0: outer - inner, 1: np.log(outer / inner) if s == 1 else 0.0, 2: 1 / inner - 1 / outer}[s]  # of r^-s
        return float(rise / integral)

    volume = (faces[k] ** (s + 1) - faces[k - 1] ** (s + 1)) / (s + 1)
    return (flux(k) - flux(k - 1)) / volume + source_at(k)


@pytest.mark.parametrize("geometry", GEOMETRIES)
@pytest.mark.parametrize(
    ("scheme", "graded"),
    [("shell-balance", False), ("shell-balance", True), ("radial-exact", False), ("radial-exact", True), ("log-cosh", False)],
)
def test_rows_from_their_definitions(scheme: str, geometry: str, graded: bool) -> None:
    s = GEOMETRIES[geometry]

    def bent(t: Array) -> Array:
        return np.asarray(np.sinh(1.3 * t) / np.sinh(1.3))

    nodal = drawn(9, 8)
    found, x = rows(body(geometry, 0.4, False), scheme, nodal, bent if graded else None)
    middles = (np.arange(-1, 10) + 0.5) / 9
    faces = 0.4 + 0.6 * (bent(middles) if graded else middles)
    for k in range(2, 10):
        expected = literal(scheme, s, x, nodal, k, lambda at: float(source(x[at], nodal[at])), faces)
        assert found[k] == pytest.approx(expected, rel=1e-11, abs=1e-11)


@pytest.mark.parametrize("scheme", ["shell-balance", "radial-exact"])
@pytest.mark.parametrize("geometry", ["cylinder", "sphere"])
def test_the_axis_cell_balances_itself(geometry: str, scheme: str) -> None:
    """(s+1)/r (u[1] - u[0])/h + f(u[0]) with r = h/2 the cell's radius."""
    s, h = GEOMETRIES[geometry], 1 / 8
    nodal = drawn(8, 1)
    found, _ = rows(body(geometry, 0.0, False), scheme, nodal)
    assert found[1] == pytest.approx((s + 1) / (h / 2) * (nodal[2] - nodal[1]) / h + float(source(0.0, nodal[1])), rel=1e-12)


@pytest.mark.parametrize("scheme", names())
def test_constants_are_harmonic_for_every_scheme(scheme: str) -> None:
    for geometry in GEOMETRIES:
        problem = Problem("laplacian(u) = 0*lam", "u", (0.4, 1), ["u(0.4) = 1", "u(1) = 1"], {"lam": 1.0}, geometry=geometry)
        found, _ = rows(problem, scheme, np.full(11, 1.0))
        assert np.max(np.abs(found[2:-2])) == 0.0


@pytest.mark.parametrize("graded", [False, True])
@pytest.mark.parametrize(
    ("geometry", "harmonic"), [("slab", lambda r: r), ("cylinder", np.log), ("sphere", lambda r: 1 / r)], ids=["slab", "cylinder", "sphere"]
)
@pytest.mark.parametrize("scheme", ["radial-exact", "compact"])
def test_harmonic_functions_are_exact_at_the_nodes(scheme: str, geometry: str, harmonic: Callable[[Any], Any], graded: bool) -> None:
    left, right = float(harmonic(0.1)), float(harmonic(1.0))
    ends = [f"u(0.1) = {left!r}", f"u(1) = {right!r}"]
    problem = Problem("laplacian(u) = 0", "u", (0.1, 1), ends, geometry=geometry)
    grid = Grid(7, (lambda t: np.sinh(1.3 * t) / np.sinh(1.3)) if graded else None)
    state = bvp.solve(problem, scheme=scheme, grid=grid, compiled=False)
    assert state.ok
    assert np.max(np.abs(state.u - harmonic(state.x))) < 1e-13 * max(1.0, abs(left))
    if geometry == "cylinder":  # where the standard scheme is not exact: the check can fail
        standard = bvp.solve(problem, scheme="central", grid=grid, compiled=False)
        assert np.max(np.abs(standard.u - harmonic(standard.x))) > 1e-3


@pytest.mark.parametrize("sign", [1, -1])
@pytest.mark.parametrize(("geometry", "left"), [("slab", 0.0), ("cylinder", 0.3), ("sphere", 0.3), ("cylinder", 0.0), ("sphere", 0.0)])
def test_compact_is_exact_where_the_source_is_a_parabola(geometry: str, left: float, sign: int) -> None:
    """u = 1 + a r^2 + c r^4, and b r^3 away from an axis: laplacian(r^p) = p (p + s - 1) r^(p-2). A cooled end included."""
    s = GEOMETRIES[geometry]
    a, b, c = 0.7 * sign, 0.0 if s and not left else -0.4, 0.3

    def exact(r: Any) -> Any:
        return 1 + a * r**2 + b * r**3 + c * r**4

    text = f"laplacian(u) = {2 * (1 + s) * a!r} + {3 * (2 + s) * b!r}*x + {4 * (3 + s) * c!r}*x^2"
    slope = 2 * a + 3 * b + 4 * c
    ends = [f"u'(1) + 2*u(1) = {slope + 2 * float(exact(1.0))!r}"]
    if not s or left:
        ends.insert(0, f"u({left}) = {float(exact(left))!r}")
    state = bvp.solve(Problem(text, "u", (left, 1), ends, geometry=geometry), scheme="compact", intervals=6, compiled=False)
    assert state.ok
    assert np.max(np.abs(state.u - exact(state.x))) < 1e-13


def test_compact_weights_of_the_slab() -> None:
    """(u[k+1] - 2 u[k] + u[k-1])/h^2 + (f[k-1] + 10 f[k] + f[k+1])/12 (Numerov; Cowell; from memory)."""
    nodal, h = drawn(9, 5), 1 / 9
    found, x = rows(body("slab", 0.0, False), "compact", nodal)
    f = source(x, nodal)
    expected = np.diff(nodal, 2) / h**2 + (f[:-2] + 10 * f[1:-1] + f[2:]) / 12
    assert np.max(np.abs(found[2:-2] - expected[1:-1])) < 1e-11


@pytest.mark.parametrize("slope", [3.0, -3.0, 1e-9])
@pytest.mark.parametrize("drift", [0.0, 4.0, -4.0])
def test_fitted_rows_are_those_exact_for_the_frozen_equation(drift: float, slope: float) -> None:
    """alpha, beta, gamma from the equation's own three solutions exp(m t), exp(n t) and the constant -c/b, by a dense solve."""
    text = f"u'' + {drift}*u' + {slope}*u + lam*u^2 = 0"
    problem = Problem(text, "u", (0, 1), ["u(0) = 0.1", "u(1) = 0.2"], {"lam": 0.5})
    nodal, h = drawn(8, 4), 1 / 8
    found, _ = rows(problem, "fitted", nodal)
    for k in range(2, 9):
        u = nodal[k]
        f, b = slope * u + 0.5 * u * u, slope + u
        roots = np.roots([1.0, drift, b]).astype(complex)
        matrix = np.array([[np.exp(-m * h), 1.0, np.exp(m * h)] for m in roots] + [[1.0, 1.0, 1.0]])
        below, here, above = np.linalg.solve(matrix, [0.0, 0.0, b]).real
        expected = below * nodal[k - 1] + here * u + above * nodal[k + 1] + f - b * u
        if drift == 0.0:
            expected /= above * h * h  # without a drift the second difference has the coefficient 1/h^2, f the fitted one
        assert found[k] == pytest.approx(expected, rel=1e-8, abs=1e-8)


@pytest.mark.parametrize(("drift", "slope"), [(0.0, 30.0), (0.0, -30.0), (25.0, -4.0), (-25.0, 8.0), (200.0, -1.0)])
def test_fitted_is_exact_for_constant_coefficients(drift: float, slope: float) -> None:
    """u'' + a u' + b u + 3 = 0 on 6 intervals: u = A exp(m x) + B exp(n x) - 3/b."""
    problem = Problem(f"u'' + {drift}*u' + {slope}*u + 3 = 0", "u", (0, 1), ["u(0) = 1", "u(1) = -1"])
    state = bvp.solve(problem, scheme="fitted", intervals=6, compiled=False)
    m, n = np.roots([1.0, drift, slope]).astype(complex)
    # Each exponential is 1 at the end where it is largest, so that neither overflows.
    starts = [1.0 if root.real > 0 else 0.0 for root in (m, n)]
    first, second = (np.exp(root * (state.x - start)) for root, start in zip((m, n), starts, strict=True))
    factors = np.linalg.solve([[first[0], second[0]], [first[-1], second[-1]]], np.array([1.0, -1.0]) + 3 / slope)
    exact = (factors[0] * first + factors[1] * second - 3 / slope).real
    assert state.ok
    assert np.max(np.abs(state.u - exact)) < 1e-11 * max(1.0, np.max(np.abs(exact)))


def test_upwind_takes_the_difference_against_the_flow() -> None:
    """u'' + c(x) u': forward where c > 0, backward where c < 0; here c changes its sign inside."""
    problem = Problem("u'' + (40*x - 21)*u' + lam*u = 0", "u", (0, 1), ["u(0) = 1", "u(1) = 0"], {"lam": LAM})
    nodal, h = drawn(10, 2), 0.1
    found, x = rows(problem, "upwind", nodal)
    for k in range(2, 11):
        flow = 40 * x[k] - 21
        slope = (nodal[k + 1] - nodal[k]) / h if flow > 0 else (nodal[k] - nodal[k - 1]) / h
        expected = (nodal[k + 1] - 2 * nodal[k] + nodal[k - 1]) / h**2 + flow * slope + LAM * nodal[k]
        assert found[k] == pytest.approx(expected, rel=1e-11, abs=1e-10)


def test_upwind_has_no_wiggles_where_central_has() -> None:
    """u'' + 400 u' = 0 from 0 to 1 on 20 intervals: the profile is monotone, the central one is not."""
    problem = Problem("u'' + 400*u' = 0", "u", (0, 1), ["u(0) = 0", "u(1) = 1"])
    upwind, central = (bvp.solve(problem, scheme=name, intervals=20, compiled=False).u for name in ("upwind", "central"))
    assert np.all(np.diff(upwind) >= 0)
    assert np.min(np.diff(central)) < -0.1


@pytest.mark.parametrize("conductivity", ["1 + 0.5*u", "1 + x"])
@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_fluxes_are_differenced_at_the_faces(geometry: str, conductivity: str) -> None:
    s = GEOMETRIES[geometry]
    problem = Problem(
        f"div(({conductivity})*grad(u)) + lam*u = 0", "u", (0.4, 1), ["u(0.4) = 1", "u(1) = 0"], {"lam": LAM}, geometry=geometry
    )
    nodal, h = drawn(8, 9), 0.6 / 8
    found, x = rows(problem, "central", nodal)

    def flux(left: int) -> float:
        face, mean = (x[left] + x[left + 1]) / 2, (nodal[left] + nodal[left + 1]) / 2
        k = 1 + 0.5 * mean if "u" in conductivity else 1 + face
        return float(face**s * k * (nodal[left + 1] - nodal[left]) / h)

    for k in range(2, 9):
        volume = ((x[k] + h / 2) ** (s + 1) - (x[k] - h / 2) ** (s + 1)) / (s + 1)
        assert found[k] == pytest.approx((flux(k) - flux(k - 1)) / volume + LAM * nodal[k], rel=1e-11, abs=1e-10)


def test_every_scheme_of_the_registry_is_looked_at_here() -> None:
    assert set(names()) == {"central", "shell-balance", "radial-exact", "fitted", "log-cosh", "compact", "upwind"}


@pytest.mark.parametrize("key", ["denominator", "flux", "volume", "first", "end", "source", "right_hand_side", "replace"])
def test_an_equals_sign_is_refused_where_a_value_is_wanted(key: str) -> None:
    text = "h^2 = u[k]"
    keys: dict[str, object] = {key: {"u^2": text} if key == "replace" else text}
    if key == "volume":
        keys["flux"] = "(u[k+1] - u[k])/h"
    with pytest.raises(bvp.errors.SchemeError, match="is an equation"):
        typed("mine", keys, body("slab", 0.0, False))
