"""Results of Newton's method kept as they come, so that a computation that was cut off can be gone through again without them.

All else on the way to a result is cheap and follows from these: the same program with the same results of Newton's
method in the same order takes the same decisions and ends with the same numbers.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from typing import TYPE_CHECKING, NamedTuple

if TYPE_CHECKING:
    from bvp.newton import Corrected

Key = tuple[float, float, float, float]  # size of the system, parameter at the start, distance and tolerance asked for


class Entry(NamedTuple):
    """One result, and what it was asked with."""

    key: Key
    found: Corrected


class Ledger:
    """Earlier results, given back in their order as long as the same is asked; what is new goes to `note`."""

    def __init__(self, earlier: Iterable[Entry] = ()) -> None:
        self._earlier = deque(earlier)

    def known(self, key: Key) -> Corrected | None:
        """The next earlier result, if it is one of the same question; from the first that is not, all are dropped."""
        if not self._earlier:
            return None
        entry = self._earlier.popleft()
        if entry.key != key:
            self._earlier.clear()
            return None
        return entry.found

    def note(self, entry: Entry) -> None:
        """Sees every new result."""


_LEDGER: ContextVar[Ledger | None] = ContextVar("ledger", default=None)


def ledger_in_use() -> Ledger | None:
    """The ledger of the computation at hand, if it keeps one."""
    return _LEDGER.get()


@contextmanager
def kept_in(ledger: Ledger) -> Iterator[None]:
    """Within, every result of Newton's method goes through the ledger."""
    token = _LEDGER.set(ledger)
    try:
        yield
    finally:
        _LEDGER.reset(token)
