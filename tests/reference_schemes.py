"""Exact facts about difference schemes on a fixed number of intervals N, with h = 1/N, and the constants of their errors.

"interval" is [0, 1] with u = 0 at both ends and the source lam*exp(u); the cylinder has radius 1, u(1) = 0 and the same source.
An error constant C stands for: scheme's turning point - true turning point = C h^p (1 + o(1)).
"""

from __future__ import annotations

from tests.known import Known, collected, group

SCHEME_FACT = "recomputed with 40 digits from the scheme's own recurrence"
EXACT_FACT = "exact by elimination on so few nodes; digits recomputed"
NUMEROV = "recomputed with 40 digits; the scheme is common practice (Numerov's three-point formula)"

_CENTRAL = collected(
    group(
        EXACT_FACT,
        {
            "central, interval, N 2, turning point": "2.94303552937153857276",  # 8/e, u = 1
            "central, interval, N 3, turning point": "3.31091497054298089436",  # 9/e, u = 1
            "central, interval, N 3, pitchfork": "1.34425084593232646044",  # 27/e^3, u = 3; the differential equation has none
        },
    ),
    group(
        SCHEME_FACT,
        {
            "central, interval, N 10, turning point": "3.495493294280911",
            "central, interval, N 256, turning point": "3.513802824474695",
            "central, interval, error constant, h^2": "-1.8281",
            "2 ln cosh h, interval, error constant, h^2": "-1.2425",
            "4 sinh^2(h/2), interval, error constant, h^2": "-2.1209",
            "fitted, interval, N 10, turning point": "3.5242341533926",
            "fitted, interval, N 20, turning point": "3.5164100255888",
            "fitted, interval, error constant, h^2": "1.029",
            "logarithmic source, interval, N 8, turning point": "3.622776601683793",
            "logarithmic source, interval, N 64, turning point": "3.51547779005806",
            "logarithmic source, interval, error constant, h^2": "6.743",
            "central, cylinder, node on the axis, error constant, h^2": "-0.778",
            # check that the source of the axis cell reaches the first shell: where it is lost the constant changes its sign
            "logarithmic flux, cylinder, node on the axis, error constant, h^2": "-1.278",
            "logarithmic flux, cylinder, node on the axis, source of its cell lost, error constant, h^2": "0.722",
            "central, cylinder, axis half a step off, error constant, h^2": "-0.778",
            "logarithmic flux, cylinder, axis half a step off, error constant, h^2": "-1.278",
        },
    ),
    group(
        NUMEROV,
        {
            "fourth order, interval, N 32, turning point": "3.5138291167603",
            "fourth order, interval, error constant, h^4": "-1.6786",
        },
    ),
)

# States of the central scheme with three and four intervals: interior nodal values, in order of the first measure.
# At N = 4, lam = 0.01 there are six, the differential equation has two; at lam = 0.2 two.
CENTRAL_STATES_THREE_INTERVALS: dict[str, tuple[tuple[float, ...], ...]] = {
    "lam 1": ((0.12603587, 0.12603587), (3.42969629, 3.42969629), (3.76079798, 2.74573911), (2.74573911, 3.76079798)),
}
CENTRAL_INVENTED_FOUR_INTERVALS: tuple[tuple[float, float, float], ...] = (
    (4.857599, 9.634751, 4.857599),
    (9.791655, 8.405884, 4.224294),
    (9.918199, 7.151142, 3.586859),
)  # at lam = 0.01; the last two have mirrors

# scipy.integrate.solve_bvp at its default tolerance reports success here, where no state exists.
NO_STATE_AT = (3.514, 3.515)

SCHEMES: dict[str, Known] = _CENTRAL
