"""What is seen of long work while it goes on: one line on a terminal, and the ear for Ctrl-C."""

from __future__ import annotations

import shutil
import signal
import sys
import time
from types import FrameType, TracebackType
from typing import Any, TextIO

SECONDS_BETWEEN = 0.1


class Watch:
    """Sees each accepted point of a trace: keeps a line on a terminal up to date, and stops the trace after Ctrl-C.

    Used as a context manager. The first Ctrl-C asks the trace to stop with what it has; the second one ends the work at
    once.
    """

    def __init__(self, along: str, *, quiet: bool, stream: TextIO | None = None) -> None:
        self.along = along
        self.stopped = False
        self._stream = sys.stderr if stream is None else stream
        self._shown = not quiet and self._stream.isatty()
        self._began = self._last = time.monotonic()
        self._line_open = False
        self._earlier: dict[int, Any] = {}

    def __enter__(self) -> Watch:
        for number in (signal.SIGINT, signal.SIGTERM):
            try:
                self._earlier[number] = signal.signal(number, self._interrupted)
            except ValueError:  # not in the main thread, where signals are somebody else's
                break
        return self

    def __exit__(self, kind: type[BaseException] | None, error: BaseException | None, where: TracebackType | None) -> None:
        for number, handler in self._earlier.items():
            signal.signal(number, handler)
        self._earlier = {}
        self.clear()

    def __call__(self, event: Any) -> bool:
        """True asks the trace to stop."""
        now = time.monotonic()
        if self._shown and now - self._last >= SECONDS_BETWEEN:
            self._last = now
            self._show(event, now - self._began)
        return self.stopped

    def clear(self) -> None:
        """Take the line away."""
        if self._line_open:
            self._stream.write("\r\x1b[K")
            self._stream.flush()
            self._line_open = False

    def _show(self, event: Any, seconds: float) -> None:
        measures = ", ".join(f"{name} = {value:.5g}" for name, value in list(event.measures.items())[:2])
        turning = event.turning_points if isinstance(event.turning_points, int) else len(event.turning_points)
        line = f"{self.along} = {event.parameter:.6g}, {measures}; {event.point + 1} points, {turning} turning points, {seconds:.0f} s"
        width = shutil.get_terminal_size().columns - 1
        self._stream.write("\r\x1b[K" + line[:width])
        self._stream.flush()
        self._line_open = True

    def _interrupted(self, number: int, frame: FrameType | None) -> None:
        if self.stopped:
            raise KeyboardInterrupt
        self.stopped = True
        self.clear()
        self._stream.write("stopping at the next point; once more ends at once\n")
