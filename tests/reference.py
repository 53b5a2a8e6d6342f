"""Published and recomputed values that results are held against, each with its source.

"From memory" stands where the source was not opened, "common practice" marks a fact of the trade, "recomputed" digits beyond
those printed. `python -m tests.verify_reference` recomputes them all without any finite differences but where the
difference scheme itself is the subject. This file has the problems of one second-order equation; `reference_systems` has the
others, `reference_schemes` the facts about difference schemes. KNOWN holds all of them by name.

Names: "interval" is [0, 1] with u = 0 at both ends; slab, cylinder and sphere have half width or radius 1, u'(0) = 0, u(1) = 0;
the exponential source is lam*exp(u), the Arrhenius source lam*exp(u/(1 + eps*u)).
"""

from __future__ import annotations

from tests.known import Known, collected, group
from tests.reference_schemes import SCHEMES
from tests.reference_systems import SYSTEMS

PLANE = "abstract of: On exact and numerical solutions of the one-dimensional planar Bratu problem (closed form, read); digits recomputed"
BALLS = (
    "Joseph & Lundgren 1973, Arch. Rat. Mech. Anal. 49:241, from memory; Korman 2014, J. Differential Equations, read; digits recomputed"
)
HANDBOOK = "common practice; Boddington, Gray & Robinson 1979, Proc. R. Soc. A 368:441, abstract read"
COOLED = "Thomas 1958, Trans. Faraday Soc. 54:60, from memory; digits recomputed"
ARRHENIUS = (
    "Boddington, Gray & Robinson 1979, Proc. R. Soc. A 368:441; Boddington, Feng & Gray 1983, Proc. R. Soc. A 385:289; "
    "numbers from memory, digits recomputed"
)
MEMBRANE = "Pelesko & Bernstein 2003; Guo, Pan & Ward 2005 (print 1.401); both from memory; recomputed"
DISK = "Pelesko & Bernstein 2003; Guo, Pan & Ward 2005; from memory; Lindsay & Ward 2010 (structure, read); recomputed"
ROTATED = "Chapman & Farrell 2017, from memory; recomputed"
CUBIC = "Boyd 2017, read; digits recomputed"
STARS = "Chandrasekhar 1939, An Introduction to the Study of Stellar Structure, from memory; digits recomputed"
PELLET = "Weisz & Hicks 1962; Luss 1968; both from memory; digits recomputed"
RECOMPUTED = "recomputed"

_EXPONENTIAL = collected(
    group(
        PLANE,
        {
            "interval, exponential, turning point": "3.513830719125161206",
            "interval, exponential, turning point, u(1/2)": "1.186842168634389097",
            "interval, exponential, lam 0.5, lower, u(1/2)": "0.066036616685550817",
            "interval, exponential, lam 0.5, upper, u(1/2)": "5.1357730484080082",
            "interval, exponential, lam 1, lower, u(1/2)": "0.14053921440047179803",
            "interval, exponential, lam 1, upper, u(1/2)": "4.0914672461892603213",
            "interval, exponential, lam 1, lower, u'(0)": "0.54935272877527081902",
            "interval, exponential, lam 1, upper, u'(0)": "10.846899019389452395",
            "interval, exponential, lam 2, lower, u(1/2)": "0.32895242134111357436",
            "interval, exponential, lam 2, upper, u(1/2)": "2.8955312654927689644",
            "interval, exponential, lam 2, lower, u'(0)": "1.2482175177582026823",
            "interval, exponential, lam 2, upper, u'(0)": "8.2687631805451954222",
            "interval, exponential, lam 3, lower, u(1/2)": "0.64014669604146404716",
            "interval, exponential, lam 3, upper, u(1/2)": "1.9752669711630648751",
            "interval, exponential, lam 3, lower, u'(0)": "2.3196022580815863569",
            "interval, exponential, lam 3, upper, u'(0)": "6.1033812941491409099",
            "interval, exponential, lam 3.5, lower, u(1/2)": "1.0851589477940122854",
            "interval, exponential, lam 3.5, upper, u(1/2)": "1.2945854790938638899",
            "slab, exponential, turning point": "0.87845767978129030155",
        },
    ),
    group(PLANE, {"interval, exponential, turning point, u'(0)": "4"}, exact=True),
    group(
        "Joseph & Lundgren 1973, Arch. Rat. Mech. Anal. 49:241, from memory; exact",
        {"cylinder, exponential, turning point": "2"},
        exact=True,
    ),
    group(RECOMPUTED, {"cylinder, exponential, turning point, u(0)": "1.38629436111989061883"}),
    group(
        BALLS,
        {
            "sphere, exponential, turning point 1": "3.321992118339823988",
            "sphere, exponential, turning point 1, u(0)": "1.60745677508384203",
            "sphere, exponential, turning point 2": "1.664156189756795222",
            "sphere, exponential, turning point 2, u(0)": "6.7407924195618147",
        },
    ),
    group(HANDBOOK, {"slab, handbook": "0.88", "cylinder, handbook": "2.00", "sphere, handbook": "3.32"}),
    group(
        "recomputed; handbooks print 2.52 for the cube, 1.8 % high, and 2.76",
        {"cube, turning point": "2.4750", "short cylinder, turning point": "2.7658"},
    ),
)

_COOLED = collected(
    group(
        COOLED,
        {
            "slab, exponential, Bi 0.5, turning point": "0.15667787520931",
            "slab, exponential, Bi 1, turning point": "0.27067056647322538379",
            "slab, exponential, Bi 2, turning point": "0.42084663155608",
            "slab, exponential, Bi 20, turning point": "0.79763284320413",
            "sphere, exponential, Bi 0.5, turning point": "0.49876478060990",
            "sphere, exponential, Bi 2, turning point": "1.48002772701187",
            "sphere, exponential, Bi 20, turning point": "3.01099505677388",
        },
    ),
)

_ARRHENIUS = group(
    ARRHENIUS,
    {
        "slab, Arrhenius, cusp, eps": "0.245780427",
        "slab, Arrhenius, cusp, lam": "1.307373564",
        "slab, Arrhenius, cusp, u(0)": "4.8965479",
        "cylinder, Arrhenius, cusp, eps": "0.242106166",
        "cylinder, Arrhenius, cusp, lam": "3.006301479",
        "cylinder, Arrhenius, cusp, u(0)": "5.9432434",
        "sphere, Arrhenius, cusp, eps": "0.238797090",
        "sphere, Arrhenius, cusp, lam": "5.041112463",
        "sphere, Arrhenius, cusp, u(0)": "7.1849436",
        "slab, Arrhenius, eps 0.22, turning point 1": "1.214264895",
        "slab, Arrhenius, eps 0.22, turning point 2": "1.092145286",
        "slab, Arrhenius, eps 0.01, turning point 1": "0.8878049692",
    },
)

_MEMBRANE = collected(
    group(
        MEMBRANE,
        {
            "strip, membrane, turning point": "1.40001647737099896",
            "strip, membrane, turning point, w(0)": "0.388346718912782825",
        },
    ),
    group(
        DISK,
        {
            "disk, membrane, turning point 1": "0.78922926786456929",
            "disk, membrane, turning point 1, 1-w(0)": "0.555707715218609",
            "disk, membrane, turning point 2": "0.41533025488006",
            "disk, membrane, turning point 3": "0.44768983704054",
            "disk, membrane, limit": "0.44444444444444444444",
        },
    ),
)

_OTHERS = collected(
    group(
        ROTATED,
        {
            "rotated layer, pitchfork 1, eps": "0.468862513852",
            "rotated layer, pitchfork 2, eps": "0.234725290330",
            "rotated layer, turning point 1, eps": "0.285225382",
            "rotated layer, turning point 2, eps": "0.171869699",
        },
    ),
    group(CUBIC, {"cubic, max u": "3.708149354602744", "cubic, integral of u": "2.22144146907918312351"}),
    group(STARS, {"star of index 1.5, first zero": "3.653753736219122", "star of index 3, first zero": "6.89684861937696"}),
    group(
        PELLET,
        {
            "slab, pellet, turning point 1, phi": "0.370887369",
            "slab, pellet, turning point 1, y(0)": "0.7928387",
            "slab, pellet, turning point 2, phi": "0.279160010",
            "slab, pellet, turning point 2, y(0)": "0.2273252",
        },
    ),
)

KNOWN: dict[str, Known] = collected(_EXPONENTIAL, _COOLED, _ARRHENIUS, _MEMBRANE, _OTHERS, SYSTEMS, SCHEMES)
