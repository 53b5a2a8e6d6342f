"""Works out every truth of the campaign twice and writes problems.json: `python -m tests.campaign.make` (about half an hour on one core).

`--kind TEXT` does only the kinds whose name holds TEXT; the problems of the other kinds stay in the file as they are. Each kind is
written when it is done.
"""

from __future__ import annotations

import argparse
import dataclasses
import sys
import time
import zlib
from collections.abc import Callable

import numpy as np
from mpmath import mp

from tests.campaign import kinds_general, kinds_known, kinds_parameters
from tests.campaign.draft import Draft
from tests.campaign.statement import FILE, Statement, read, write
from tests.campaign.truths import NotAgreed, statement_of

KINDS: dict[Callable[..., Draft], int] = {**kinds_known.KINDS, **kinds_general.KINDS, **kinds_parameters.KINDS}
SAMPLED = 30


def drawn(kind: Callable[..., Draft], turn: int, attempt: int) -> Draft:
    """One draft; its random numbers depend on the kind's name, the turn and the attempt only."""
    rng = np.random.default_rng([zlib.crc32(kind.__name__.encode()), turn, attempt])
    return kind(rng, turn)


def made(kind: Callable[..., Draft], turn: int, said: Callable[[str], None]) -> Statement | None:
    """One problem with its truth: parameters are drawn again, up to four times, where no turning point is found."""
    for attempt in range(4):
        name = f"{kind.__name__.replace('_', ' ')} {turn + 1}"
        try:
            return statement_of(drawn(kind, turn, attempt), name)
        except NotAgreed as difference:
            said(f"{name}, attempt {attempt + 1}: the two origins differ: {difference}")
        except (ArithmeticError, np.linalg.LinAlgError, ValueError) as reason:
            said(f"{name}, attempt {attempt + 1}: {type(reason).__name__}: {reason}")
    return None


def kind_of(statement: Statement) -> str:
    """The name of the function that a problem was drawn by: the problem's own name without its number."""
    return statement.name.rpartition(" ")[0].replace(" ", "_")


def main() -> int:
    """Makes all problems, or those of some kinds."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--kind", default="", help="only kinds whose name holds this text")
    wanted = parser.parse_args().kind.replace(" ", "_")
    mp.dps = 30
    for kind, count in KINDS.items():
        if wanted not in kind.__name__:
            continue
        began = time.perf_counter()
        problems = [made(kind, turn, lambda text: print("  " + text, flush=True)) for turn in range(count)]
        kept = [one for one in problems if one is not None]
        print(f"{kind.__name__}: {len(kept)} of {count}, {time.perf_counter() - began:.0f} s", flush=True)
        put(kept, kind.__name__)
    print(f"{len(read())} problems")
    return 0


def put(new: list[Statement], name: str) -> None:
    """Writes the problems of one kind into the file, in place of those of that kind that it holds."""
    found = [one for one in (read() if FILE.exists() else []) if kind_of(one) != name] + new
    order = [kind.__name__ for kind in KINDS]
    found.sort(key=lambda one: (order.index(kind_of(one)), int(one.name.rpartition(" ")[2])))
    write(with_sample(found), "Made by python -m tests.campaign.make; see tests/campaign/__init__.py.")


def with_sample(found: list[Statement]) -> list[Statement]:
    """The same with thirty of them marked, spread evenly over the kinds: the suite runs those."""
    chosen = {round(i * (len(found) - 1) / (SAMPLED - 1)) for i in range(SAMPLED)}
    return [dataclasses.replace(one, sample=i in chosen) for i, one in enumerate(found)]


if __name__ == "__main__":
    sys.exit(main())
