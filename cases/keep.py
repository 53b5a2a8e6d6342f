"""Keeping what a trace finds while it goes on: points in numbered pieces, so that a run that is killed leaves them."""

from __future__ import annotations

import sys
import time
from typing import Any

from cases.pieces import Pieces
from cases.store import StoreError

SECONDS_BETWEEN = 2.0  # a piece waits for the disk twice; this keeps the share of that below a per cent


class Keeper:
    """Sees each accepted point and writes those since the last piece every two seconds.

    A piece that cannot be written ends the keeping, not the work: it is said once.
    """

    def __init__(self, pieces: Pieces, *, quiet: bool) -> None:
        self._pieces: Pieces | None = pieces
        self._quiet = quiet
        self._last = time.monotonic()
        self._points: list[Any] = []

    def __call__(self, event: Any) -> None:
        """One accepted point."""
        if self._pieces is None:
            return
        self._points.append((event.branch, event.parameter, dict(event.measures)))
        if time.monotonic() - self._last >= SECONDS_BETWEEN:
            self.flush()

    def flush(self) -> None:
        """Write what has come since the last piece."""
        if self._pieces is None or not self._points:
            return
        names = list(self._points[0][2])
        arrays = {"parameter": [parameter for _, parameter, _ in self._points]}
        arrays.update({name: [measures[name] for _, _, measures in self._points] for name in names})
        try:
            self._pieces.append({"branches": [branch for branch, _, _ in self._points]}, arrays)
        except StoreError as error:
            self._pieces = None
            if not self._quiet:
                print(f"notice: {error}\nThe work goes on; nothing more is kept until it ends.", file=sys.stderr)
        self._points = []
        self._last = time.monotonic()
