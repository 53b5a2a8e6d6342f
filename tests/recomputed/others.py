"""The cubic source, stars, the strut and the critical loads: elliptic integrals and Taylor series."""

from __future__ import annotations

from typing import Any

from mpmath import mp, mpf

from tests.taylor import Series, advance, radial_until


def star_radius(index: Any) -> Any:
    """The first zero of u'' + (2/r) u' + u^index = 0, u(0) = 1.

    The series in r converges up to just below the zero where the index is fractional (u^1.5 has a branch point there), so the last
    piece is taken with the radius as the unknown function of u, from u = 1/5 down to 0.
    """
    index = mpf(index)

    def power(_: Series, u: Series) -> Series:
        raised: Series = u**index
        return raised

    r, (u, v) = radial_until(power, 2, 1, lambda r, u, v: u - mpf(1) / 5)
    # With s = sqrt(u) everything is analytic: dr/ds = 2s/v, dv/ds = -(u^index + 2v/r) 2s/v, u^1.5 = s^3.
    twice = int(2 * index)

    def field(t: Series, r: Series, v: Series) -> list[Series]:
        s = top - t
        slope = -2 * s / v
        return [slope, -(s**twice + 2 * v / r) * slope]

    top = mp.sqrt(u)
    return advance(field, 0, (r, v), top)[0]


def values() -> dict[str, Any]:
    """u'' + u^3 = 0, stars, strut, critical loads."""
    # u'^2/2 = (m^4 - u^4)/4: half the length 1 is (sqrt(2)/m) times the integral of dt/sqrt(1 - t^4) from 0 to 1, and the integral of u
    # is 2 sqrt(2) times that of t dt/sqrt(1 - t^4); tanh-sinh nodes bear the square root at the end.
    largest = 2 * mp.sqrt(2) * mp.gamma(mpf(1) / 4) ** 2 / (4 * mp.sqrt(2 * mp.pi))
    area = 2 * mp.sqrt(2) * mp.quad(lambda s: 2 * s * (1 - s * s) / (s * mp.sqrt((2 - s * s) * (1 + (1 - s * s) ** 2))), [0, 1])
    found = {"cubic, max u": largest, "cubic, integral of u": area}
    found |= {"star of index 1.5, first zero": star_radius("1.5"), "star of index 3, first zero": star_radius(3)}
    for angle in (20, 40, 60, 80, 100, 120, 140, 160, 176):
        modulus = mp.sin(mp.radians(mpf(angle)) / 2)
        found[f"strut, load over critical load, angle {angle}"] = (2 * mp.ellipk(modulus**2) / mp.pi) ** 2
    found["strut, critical load, hinged ends"] = mp.pi**2
    found["strut, critical load, cantilever"] = mp.pi**2 / 4
    found["strut, critical load, clamped ends"] = 4 * mp.pi**2
    found["strut, critical load, clamped and hinged"] = mp.findroot(lambda x: mp.tan(x) - x, mpf("4.493")) ** 2
    return found
