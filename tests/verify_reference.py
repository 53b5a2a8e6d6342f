"""Recomputes the recorded values and says which of them differ: `python -m tests.verify_reference` (about a minute).

Exit status 1 where a value differs or is not recomputed by any module.
"""

from __future__ import annotations

import importlib
import sys
from typing import Any

from mpmath import mp, mpf

from tests.known import Known
from tests.reference import KNOWN
from tests.reference_schemes import CENTRAL_INVENTED_FOUR_INTERVALS, CENTRAL_STATES_THREE_INTERVALS
from tests.reference_systems import LINEAR_LAYERS, arch_buckling_load, arch_limit_load

MODULES = ("exponential", "membrane", "arrhenius", "others", "layers", "schemes", "solids")
DIGITS = 34


def differs(known: Known, number: Any) -> bool:
    """Whether a recomputed number lies outside what is recorded; an exact one may be off by the recomputation's own 1e-18."""
    with mp.workdps(DIGITS):
        return bool(abs(mpf(known.digits) - number) > mpf(known.uncertainty) + mpf("1e-18"))


def recomputed(module: str) -> dict[str, Any]:
    """The values of one module of tests/recomputed, with 34 digits."""
    with mp.workdps(DIGITS):
        found: dict[str, Any] = importlib.import_module(f"tests.recomputed.{module}").values()
        return found


def wrong_states() -> list[str]:
    """Recorded discrete states that Newton moves by more than their last digit."""
    from tests.recomputed.schemes import state_residual

    listed = [(state, 1.0, 2e-8) for state in CENTRAL_STATES_THREE_INTERVALS["lam 1"]]
    listed += [(state, 0.01, 2e-6) for state in CENTRAL_INVENTED_FOUR_INTERVALS]
    return [f"state {state} at lam {lam}" for state, lam, allowed in listed if state_residual(state, lam) > allowed]


def wrong_layers() -> list[str]:
    """Linear layers whose recorded solution does not satisfy the equation."""
    from tests.recomputed.layers import layer_residuals

    with mp.workdps(DIGITS):
        found = {(eps, x): layer_residuals(eps, x) for eps in ("1e-2", "1e-4", "1e-6") for x in ("0.037", "0.083")}
    missing = {layer.name for layer in LINEAR_LAYERS} ^ next(iter(found.values())).keys()
    wrong = [f"{name} at eps {eps}, x {x}" for (eps, x), one in found.items() for name, left in one.items() if abs(left) > mpf("1e-18")]
    return [*sorted(missing), *wrong]


def wrong_arch() -> list[str]:
    """The arch's loads against the stationary points of q(b) = (c - b) + b (c^2 - b^2) and b^2 = c^2 - 4, for c^2 = 5, 5.5, 6."""
    wrong = []
    for square in (5.0, 5.5, 6.0):
        c = square**0.5
        at = ((square - 1.0) / 3.0) ** 0.5
        loads = [(c - b) + b * (square - b * b) for b in (-at, at)]
        if max(abs(a - b) for a, b in zip(arch_limit_load(c), loads, strict=True)) > 1e-14:
            wrong.append(f"arch, limit loads at c^2 = {square}")
        b = (square - 4.0) ** 0.5
        if abs(arch_buckling_load(c) - ((c - b) + b * (square - b * b))) > 1e-14 or (b > at + 1e-12) != (square > 5.5):
            wrong.append(f"arch, loss of symmetry at c^2 = {square}")
    return wrong


def main() -> int:
    """Prints one line a value, then what differs."""
    mp.dps = DIGITS
    waiting = dict(KNOWN)
    wrong = []
    for module in MODULES:
        for name, number in recomputed(module).items():
            known = waiting.pop(name, None)
            if known is None:
                continue
            if differs(known, number):
                wrong.append(name)
            verdict = "differs" if name in wrong else "agrees"
            print(f"{verdict:8} {name}: recorded {known.digits}, recomputed {mp.nstr(mpf(number), len(known.digits) + 2)}")
    wrong += [*wrong_states(), *wrong_layers(), *wrong_arch()]
    print(f"\n{len(KNOWN) - len(waiting)} of {len(KNOWN)} values recomputed; different: {wrong or 'none'}")
    print(f"not recomputed: {sorted(waiting) or 'none'}")
    return 1 if wrong or waiting else 0


if __name__ == "__main__":
    sys.exit(main())
