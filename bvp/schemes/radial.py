"""Conservative schemes of the geometry: shell-balance and radial-exact."""

from __future__ import annotations

from dataclasses import dataclass

from bvp.formula.tree import Node
from bvp.problem import Equation, Problem
from bvp.schemes.scheme import Scheme, Shape

# Area times gradient between k and k+1. The shell form takes the area at the face; the exact one is constant along r
# for the geometry's own harmonic functions, 1 and x, 1 and ln r, 1 and 1/r (the idea of Scharfetter & Gummel 1969,
# from memory, with the geometry in place of a field).
SHELL_FLUX = (
    "(u[k+1] - u[k])/(x[k+1] - x[k])",
    "x[k+1/2]*(u[k+1] - u[k])/(x[k+1] - x[k])",
    "x[k+1/2]^2*(u[k+1] - u[k])/(x[k+1] - x[k])",
)
EXACT_FLUX = (
    "(u[k+1] - u[k])/(x[k+1] - x[k])",
    "(u[k+1] - u[k])/log(x[k+1]/x[k])",
    "x[k]*x[k+1]*(u[k+1] - u[k])/(x[k+1] - x[k])",
)
# In the first cell at the axis the exact fluxes vanish, which says nothing: the axis node balances its own cell,
# of outer radius x[k+1/2], with the plain gradient.
AXIS = (
    "",
    "2*(u[k+1] - u[k])/((x[k+1] - x[k])*x[k+1/2])",
    "3*(u[k+1] - u[k])/((x[k+1] - x[k])*x[k+1/2])",
)


@dataclass(frozen=True)
class RadialScheme(Scheme):
    """A scheme whose flux formula depends on the geometry: one text for each of slab, cylinder, sphere."""

    fluxes: tuple[str, str, str] = SHELL_FLUX

    def formula(self, key: str, problem: Problem, unknown: str) -> Node | None:
        """The formula under a key, the flux and the axis cell chosen by the geometry."""
        return self._of_geometry(problem.exponent).formula(key, problem, unknown)

    def row(self, equation: Equation, unknown: str, shape: Shape) -> Node:
        """The difference equation of the geometry's own scheme."""
        return self._of_geometry(shape.exponent).row(equation, unknown, shape)

    def _of_geometry(self, exponent: int) -> Scheme:
        texts = {"flux": self.fluxes[exponent]}
        if AXIS[exponent]:
            texts["axis"] = AXIS[exponent]
        return Scheme(self.name, self.about, texts, origin=self.origin)


SHELL_BALANCE = RadialScheme("shell-balance", "conservative: areas of the shells' faces, volumes of the shells", fluxes=SHELL_FLUX)
RADIAL_EXACT = RadialScheme(
    "radial-exact",
    "flux between neighbours exact for the geometry's harmonic functions; the axis cell by its own balance",
    fluxes=EXACT_FLUX,
)
