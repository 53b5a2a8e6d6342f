"""Keeping what a computation finds while it goes on: results of Newton's method in numbered pieces, for `--resume`."""

from __future__ import annotations

import sys
import time
from collections.abc import Iterable, Iterator
from typing import TYPE_CHECKING, Any

from bvp.ledger import Entry, Ledger
from cases.pieces import Piece, Pieces
from cases.store import StoreError

if TYPE_CHECKING:
    from bvp.newton import Corrected

SECONDS_BETWEEN = 2.0  # a piece waits for the disk twice; this keeps the share of that below a per cent
MOST_BYTES = 4_000_000_000  # of pieces; what comes after is computed again after a crash
NUMBERS = ("parameter", "pace", "ok", "steps", "sweeps", "first", "last", "positive", "negative", "alike", "coupling")


class Keeper(Ledger):
    """A ledger that writes what is new every two seconds.

    A piece that cannot be written ends the keeping, not the work: it is said once.
    """

    def __init__(self, pieces: Pieces, *, quiet: bool, resume: bool = False) -> None:
        super().__init__(entry for piece in (pieces.read() if resume else []) for entry in entries_of(piece))
        self._pieces: Pieces | None = pieces
        self._quiet = quiet
        self._last = time.monotonic()
        self._fresh: list[Entry] = []
        self._bytes = 0

    def note(self, entry: Entry) -> None:
        """One new result."""
        if self._pieces is None:
            return
        self._fresh.append(entry)
        self._bytes += 2 * entry.found.u.nbytes
        if time.monotonic() - self._last >= SECONDS_BETWEEN:
            self.flush()
        if self._bytes > MOST_BYTES:
            self._pieces = None

    def flush(self) -> None:
        """Write what has come since the last piece."""
        if self._pieces is None or not self._fresh:
            return
        try:
            self._pieces.append(*columns_of(self._fresh))
        except StoreError as error:
            self._pieces = None
            if not self._quiet:
                print(f"notice: {error}\nThe work goes on; nothing more is kept until it ends.", file=sys.stderr)
        self._fresh = []
        self._last = time.monotonic()


def columns_of(entries: list[Entry]) -> tuple[dict[str, Any], dict[str, Any]]:
    """Entries as a piece: their reasons, and arrays of their numbers and of all states and tangents one after the other."""
    import numpy as np

    found = [entry.found for entry in entries]
    arrays = {
        "keys": np.array([entry.key for entry in entries]),
        "numbers": np.array([[float(getattr(one, name)) for name in NUMBERS] for one in found]),
        "states": np.concatenate([one.u for one in found]),
        "tangents": np.concatenate([one.tangent for one in found]),
    }
    return {"reasons": [one.reason for one in found]}, arrays


def entries_of(piece: Piece) -> Iterator[Entry]:
    """The entries of a piece."""
    from bvp.newton import Corrected

    begin = 0
    columns: Iterable[Any] = zip(piece.arrays["keys"], piece.arrays["numbers"], piece.document["reasons"], strict=True)
    for key, numbers, reason in columns:
        end = begin + int(key[0])
        named = dict(zip(NUMBERS, numbers.tolist(), strict=True))
        for name in ("steps", "sweeps", "positive", "negative"):
            named[name] = int(named[name])
        for name in ("ok", "alike"):
            named[name] = bool(named[name])
        found: Corrected = Corrected(
            u=piece.arrays["states"][begin:end], tangent=piece.arrays["tangents"][begin:end], reason=reason, **named
        )
        yield Entry(tuple(key.tolist()), found)
        begin = end
