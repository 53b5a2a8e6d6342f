"""Kinds traced along something else than a factor of the source, with two turning points, or in physical units."""

from __future__ import annotations

import sympy

from tests.campaign.draft import BI, LAM, Draft, draft
from tests.campaign.model import U, V, X
from tests.campaign.sources import Generator, number, smooth, symbol

GEOMETRIES = ("slab", "cylinder", "sphere")
CRITICAL = (0.8784576797812903, 2.0, 3.321992118339824)  # of the exponential source: to choose parameters on the right side of it
L, EPS, A, VELOCITY = (symbol(name) for name in ("L", "eps", "a", "vel"))


def length(rng: Generator, turn: int) -> Draft:
    """Traced along the length, which stands in the domain and in the conditions: from small and cool to the turning point."""
    source = smooth(rng, turn)
    geometry = GEOMETRIES[turn % 3]
    bi = {"Bi": number(rng, 0.5, 20.0, logarithmic=True)} if turn % 2 else {}
    rate = number(rng, 0.3, 3.0)
    parameters = source.parameters | bi | {"lam": rate}
    end = V + BI * U if turn % 2 else U
    return draft(
        "along a length",
        "laplacian",
        LAM * source.expression,
        (V, end),
        parameters,
        ends=(0, "L"),
        geometry=geometry,
        along="L",
        start=0.05,
    )


def cooling(rng: Generator, turn: int) -> Draft:
    """Traced along the cooling, downward, with the source strong enough that some cooling is needed."""
    geometry = GEOMETRIES[turn % 3]
    strength = number(rng, 0.3, 0.8) * CRITICAL[turn % 3]
    parameters = {"lam": float(f"{strength:.4g}")}
    return draft(
        "along the cooling",
        "laplacian",
        LAM * sympy.exp(U),
        (V, V + BI * U),
        parameters,
        geometry=geometry,
        along="Bi",
        start=number(rng, 40.0, 80.0),
        direction="down",
        along_unit=4.0,
    )


def activation(rng: Generator, turn: int) -> Draft:
    """Traced along the activation number, downward from where the source is tame."""
    geometry = GEOMETRIES[turn % 3]
    strength = float(f"{number(rng, 1.05, 1.25) * CRITICAL[turn % 3]:.4g}")
    return draft(
        "along the activation number",
        "laplacian",
        LAM * sympy.exp(U / (1 + EPS * U)),
        (V, U),
        {"lam": strength},
        geometry=geometry,
        along="eps",
        start=number(rng, 0.24, 0.3),
        direction="down",
        along_unit=0.0625,
    )


def coefficient(rng: Generator, turn: int) -> Draft:
    """Traced along a number inside a coefficient: a weight of x, or a velocity that carries the heat away."""
    if turn % 2:
        strength = number(rng, 3.7, 6.0)
        return draft(
            "along a coefficient",
            "plain",
            LAM * sympy.exp(U) + VELOCITY * V,
            (U, U),
            {"lam": strength},
            along="vel",
            start=number(rng, 9.0, 12.0),
            direction="down",
            along_unit=4.0,
        )
    geometry = GEOMETRIES[turn // 2 % 3]
    strength = float(f"{number(rng, 0.4, 0.7) * CRITICAL[turn // 2 % 3]:.4g}")
    weight = 1 + A * X**2
    return draft(
        "along a coefficient", "laplacian", LAM * weight * sympy.exp(U), (V, U), {"lam": strength}, geometry=geometry, along="a", start=0.0
    )


def ignition_and_extinction(rng: Generator, turn: int) -> Draft:
    """Arrhenius source with both its turning points."""
    geometry = GEOMETRIES[turn % 3]
    eps = number(rng, 0.16, 0.228)
    bi = {"Bi": number(rng, 2.0, 30.0, logarithmic=True)} if turn % 2 else {}
    end = V + BI * U if turn % 2 else U
    return draft(
        "two turning points",
        "laplacian",
        LAM * sympy.exp(U / (1 + EPS * U)),
        (V, end),
        {"eps": eps} | bi,
        geometry=geometry,
        wanted=2,
    )


def pellet(rng: Generator, turn: int) -> Draft:
    """A reacting pellet traced along the Thiele modulus phi: y'' + (s/x) y' = phi^2 y exp(gamma beta (1 - y)/(1 + beta (1 - y)))."""
    gamma, beta, phi = symbol("gamma"), symbol("beta"), symbol("phi")
    rate = phi**2 * U * sympy.exp(gamma * beta * (1 - U) / (1 + beta * (1 - U)))
    return draft(
        "two turning points",
        "laplacian",
        -rate,
        (V, U - 1),
        {"gamma": number(rng, 19.0, 24.0), "beta": number(rng, 0.36, 0.5)},
        geometry=GEOMETRIES[turn % 3],
        along="phi",
        start=0.01,
        guess=sympy.Integer(1),
        names=("y", "x"),
        along_unit=0.5,
        wanted=2,
        smallest=True,
    )


def store(rng: Generator, turn: int) -> Draft:
    """Self-heating in physical units: k T'' + heat exp(-E/(R T)) = 0 in kelvin and metres.

    Traced along the half depth or the ambient temperature.
    """
    k, heat, energy, gas, ambient, film = (symbol(name) for name in ("k", "heat", "E", "R", "Ta", "film"))
    geometry = GEOMETRIES[turn % 3]
    parameters = {
        "k": number(rng, 0.05, 0.3),
        "E": number(rng, 8.5e4, 1.2e5),
        "R": 8.314,
        "heat": 0.0,
        "film": number(rng, 4.0, 15.0),
    }
    warm = number(rng, 305.0, 345.0)
    # The rate is chosen so that the turning point lies near the given half depth at the given ambient temperature.
    depth = number(rng, 0.3, 4.0, logarithmic=True)
    slope = parameters["E"] / (parameters["R"] * warm**2)
    rate = CRITICAL[turn % 3] * parameters["k"] / (slope * depth**2) * float(sympy.exp(parameters["E"] / (parameters["R"] * warm)))
    parameters["heat"] = float(f"{rate:.4g}")
    cooled = turn % 4 > 1
    if not cooled:
        del parameters["film"]
    f = heat * sympy.exp(-energy / (gas * U))
    wall = k * V + film * (U - ambient) if cooled else U - ambient
    by_depth = turn % 2 == 0
    parameters |= {"Ta": warm} if by_depth else {"L": depth}
    return draft(
        "physical units",
        "flux" if geometry == "slab" else "divergence",
        f,
        (V, wall),
        parameters,
        k=k,
        ends=(0, "L"),
        geometry=geometry,
        along="L" if by_depth else "Ta",
        start=float(f"{depth / 20:.3g}") if by_depth else 250.0,
        guess=ambient,
        names=("T", "x"),
        unit=16.0,
        base=256.0 if not by_depth else float(round(warm)),
        along_unit=float(f"{depth:.2g}") if by_depth else 32.0,
    )


KINDS = {length: 16, cooling: 9, activation: 9, coefficient: 12, ignition_and_extinction: 12, pellet: 9, store: 14}
