"""Values of problems that are not one second-order equation with a turning point: systems, higher orders, layers, struts."""

from __future__ import annotations

from dataclasses import dataclass

from tests.known import Known, collected, group

LINDSAY = "Lindsay & Ward, from memory; recomputed"
LAYER = "Stewartson 1954; Hartree 1937; both from memory; recomputed"
HARTREE = "Hartree 1937, from memory; digits recomputed"
STRUT = (
    "Timoshenko & Gere, Theory of Elastic Stability, section 2.7 (prints 1.015 1.063 1.152 1.293 1.518 1.884 2.541 4.029 9.116: "
    "three digits), from memory; digits recomputed"
)
TEXT_BOOK = "text-books (common practice); digits recomputed"
ARCH = "Fung & Kaplan 1952, NACA TN 2840, from memory; recomputed"
TROESCH = "20-digit table, read; recomputed (a 2012 perturbation table is wrong from the 5th digit)"
LINEAR = "Cash; Mazzia & Cash 2015, AIP Conf. Proc. 1648:020009, read; each solution substituted into its equation"

SYSTEMS: dict[str, Known] = collected(
    group(LINDSAY, {"clamped strip, turning point": "70.095048285"}),
    group(LAYER, {"boundary layer, turning point, beta": "-0.19883773504667755"}),
    group("exact: f''(0) = 0 at the turning point, null vector f'", {"boundary layer, turning point, f''(0)": "0"}, exact=True),
    group(
        HARTREE,
        {
            "boundary layer, beta 0, f''(0)": "0.46959998836101330",
            "boundary layer, beta 1/2, f''(0)": "0.92768003983665114",
            "boundary layer, beta 1, f''(0)": "1.23258765682028102",
        },
    ),
    group(
        STRUT,
        {
            f"strut, load over critical load, angle {angle}": ratio
            for angle, ratio in {
                20: "1.01539687",
                40: "1.06366327",
                60: "1.15171962",
                80: "1.29388932",
                100: "1.51838879",
                120: "1.88480087",
                140: "2.54225837",
                160: "4.03008597",
                176: "9.11621830",
            }.items()
        },
    ),
    group(
        TEXT_BOOK,
        {
            "strut, critical load, hinged ends": "9.86960440108935861883",
            "strut, critical load, cantilever": "2.46740110027233965471",
            "strut, critical load, clamped ends": "39.4784176043574344753",
            "strut, critical load, clamped and hinged": "20.19072856",
        },
    ),
    group(
        TROESCH,
        {
            "Troesch, L 1, u'(0)": "0.84520268530995106",
            "Troesch, L 1, u'(1)": "1.3418378623684904",
            "Troesch, L 5, u'(0)": "0.0457504614063187401",
            "Troesch, L 5, u'(1)": "12.100495450777814",
            "Troesch, L 10, u'(0)": "3.5833778463081369e-4",
            "Troesch, L 10, u'(1)": "148.40642115601013",
            "Troesch, L 20, u'(0)": "1.6487731827804036e-8",
            "Troesch, L 20, u'(1)": "22026.465749406787",
        },
    ),
)


@dataclass(frozen=True)
class LinearLayer:
    """A linear problem with a layer and its exact solution, all as typed formulas of x and eps."""

    name: str
    equation: str
    ends: tuple[float, float]
    conditions: tuple[str, str]
    solution: str
    source: str = LINEAR


# The three whose printed solution adds exp(-(1 -+ x)/sqrt(eps)) to cos(pi*x) miss the far condition by exp(-2/sqrt(eps)): below they have
# the value that their solution takes there.
LINEAR_LAYERS: tuple[LinearLayer, ...] = (
    LinearLayer(
        "layer at the left end",
        "eps*y'' - y = 0",
        (0.0, 1.0),
        ("y(0) = 1", "y(1) = 0"),
        "(exp(-x/sqrt(eps)) - exp((x - 2)/sqrt(eps)))/(1 - exp(-2/sqrt(eps)))",
    ),
    LinearLayer(
        "convection to the right",
        "eps*y'' - y' = 0",
        (0.0, 1.0),
        ("y(0) = 1", "y(1) = 0"),
        "(1 - exp((x - 1)/eps))/(1 - exp(-1/eps))",
    ),
    LinearLayer(
        "smooth solution of a convective equation",
        "eps*y'' + (2 + cos(pi*x))*y' - y = -(1 + eps*pi^2)*cos(pi*x) - (2 + cos(pi*x))*pi*sin(pi*x)",
        (-1.0, 1.0),
        ("y(-1) = -1", "y(1) = -1"),
        "cos(pi*x)",
    ),
    LinearLayer(
        "interior layer where the convection turns",
        "eps*y'' + x*y' = -eps*pi^2*cos(pi*x) - pi*x*sin(pi*x)",
        (-1.0, 1.0),
        ("y(-1) = -2", "y(1) = 0"),
        "cos(pi*x) + erf(x/sqrt(2*eps))/erf(1/sqrt(2*eps))",
    ),
    LinearLayer(
        "peak at the middle",
        "(eps + x^2)*y'' + 4*x*y' + 2*y = 0",
        (-1.0, 1.0),
        ("y(-1) = 1/(1 + eps)", "y(1) = 1/(1 + eps)"),
        "1/(eps + x^2)",
    ),
    LinearLayer(
        "steep middle",
        "y'' + 3*eps*y/(eps + x^2)^2 = 0",
        (-0.1, 0.1),
        ("y(-0.1) = -0.1/sqrt(eps + 0.01)", "y(0.1) = 0.1/sqrt(eps + 0.01)"),
        "x/sqrt(eps + x^2)",
    ),
    LinearLayer(
        "layers at both ends",
        "eps*y'' - y = -(1 + eps*pi^2)*cos(pi*x)",
        (-1.0, 1.0),
        ("y(-1) = exp(-2/sqrt(eps))", "y(1) = exp(-2/sqrt(eps))"),
        "cos(pi*x) + exp((x - 1)/sqrt(eps)) + exp(-(x + 1)/sqrt(eps))",
    ),
)


def arch_limit_load(rise: float) -> tuple[float, float]:
    """The two limit loads q = c -+ sqrt((4/27)(c^2 - 1)^3) of a sinusoidal arch of rise c (Fung & Kaplan 1952, from memory; recomputed)."""
    swing = (4.0 / 27.0 * (rise**2 - 1.0) ** 3) ** 0.5
    return rise - swing, rise + swing


def arch_buckling_load(rise: float) -> float:
    """The load c + 3 sqrt(c^2 - 4) at which the arch loses its symmetry; it comes first if and only if c^2 > 5.5 (the same source)."""
    return float(rise + 3.0 * (rise**2 - 4.0) ** 0.5)
