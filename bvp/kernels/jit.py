"""The one decorator of all compiled kernels, and an account of what was compiled.

A kernel takes arrays and numbers, allocates nothing, never raises, and calls only kernels of its own file. There is
no fastmath, because turning points are read off the signs of small numbers, and no signature, because that would
compile at import.
"""

from __future__ import annotations

import threading
import time
import warnings
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

import numba
from numba.core import event

from bvp.cache_folder import cache_folder

Function = TypeVar("Function", bound=Callable[..., Any])

FLAGS: dict[str, Any] = {"error_model": "numpy", "nogil": True}
config: Any = numba.config  # its entries are made at run time


def kernel(function: Function) -> Function:
    """Compile a function at its first call for each kind of arguments, from the cache folder where it was compiled before."""
    dispatcher: Function = _dispatcher(function, cache_folder())
    _account.known.add(id(dispatcher))
    return dispatcher


def interpreted(function: Function) -> Function:
    """The same kernel as plain Python, for comparison."""
    plain: Function = getattr(function, "py_func", function)
    return plain


def compiled() -> int:
    """How many kernels were compiled in this process so far; those read from the cache do not count."""
    return _account.compiled


def compile_seconds() -> float:
    """Seconds that this thread has spent so far on compiling kernels and on reading compiled ones from the cache."""
    return _clock.seconds


class _Account(event.Listener):
    """Counts the compilations of this project's kernels."""

    def __init__(self) -> None:
        self.compiled = 0
        self.known: set[int] = set()  # kernels live as long as the process, so their ids are not used again
        self.lock = threading.Lock()

    def on_start(self, happened: Any) -> None:
        if id(happened.data["dispatcher"]) in self.known:
            with self.lock:
                self.compiled += 1

    def on_end(self, happened: Any) -> None:
        """The start is what counts."""


class _Clock(event.Listener, threading.local):
    """Times the outermost stay under numba's compiler lock; a kernel that calls kernels takes it several times over."""

    def __init__(self) -> None:
        self.depth = 0
        self.began = 0.0
        self.seconds = 0.0

    def on_start(self, happened: Any) -> None:
        if self.depth == 0:
            self.began = time.perf_counter()
        self.depth += 1

    def on_end(self, happened: Any) -> None:
        self.depth -= 1
        if self.depth == 0:
            self.seconds += time.perf_counter() - self.began


class _ForgivingCache:
    """numba's cache of one kernel, where a damaged or vanished file means compiling again and not an error."""

    def __init__(self, cache: Any) -> None:
        self.cache = cache

    def __getattr__(self, name: str) -> Any:
        return getattr(self.cache, name)

    def load_overload(self, signature: Any, context: Any) -> Any:
        try:
            return self.cache.load_overload(signature, context)
        except Exception:  # unpickling a damaged file can raise anything
            self._start_again()
            return None

    def save_overload(self, signature: Any, compilation: Any) -> None:
        try:
            self.cache.save_overload(signature, compilation)
        except OSError as error:  # the disk is full, or the folder was removed
            warnings.warn(f"a compiled kernel could not be kept ({error}); the next run compiles it again.", RuntimeWarning, stacklevel=2)

    def _start_again(self) -> None:
        try:
            self.cache.flush()
        except OSError:  # then saving fails too, and says so
            return


def _dispatcher(function: Callable[..., Any], folder: Path | None) -> Any:
    """What numba makes of a function: the function itself where compiling is switched off (NUMBA_DISABLE_JIT)."""
    if folder is None:
        return numba.njit(**FLAGS)(function)
    # The folder is set for this one decoration only: other users of numba in the same process keep theirs.
    before = config.CACHE_DIR
    config.CACHE_DIR = str(folder)
    try:
        dispatcher: Any = numba.njit(cache=True, **FLAGS)(function)
    except RuntimeError:  # no place for this function: its source is no file, or the folder has just gone
        return numba.njit(**FLAGS)(function)
    finally:
        config.CACHE_DIR = before
    if hasattr(dispatcher, "_cache"):
        dispatcher._cache = _ForgivingCache(dispatcher._cache)
    return dispatcher


_account = _Account()
_clock = _Clock()
listen: Any = event.register
listen("numba:compile", _account)
listen("numba:compiler_lock", _clock)
