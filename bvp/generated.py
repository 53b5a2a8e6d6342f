"""Modules generated from formulas: written to the cache folder under the hash of their text, so that numba keeps their kernels too."""

from __future__ import annotations

import hashlib
import importlib.abc
import importlib.util
import os
import re
import sys
import tempfile
import threading
import time
from pathlib import Path
from types import CodeType, ModuleType

from bvp.cache_folder import cache_folder

MODULES_KEPT = 400  # about 100 kB each with their compiled kernels
# The date of change of all modules: older versions of numba (0.59 does) compile again where that of a source is another one,
# and the name says what is in a module anyway. When one was used last is said by its date of reading.
CHANGED = 1e9
_lock = threading.RLock()


def load(text: str, name_hint: str) -> ModuleType:
    """The module with this text.

    The text is the program's own: formulas of a user reach it only as arithmetic written by `bvp.formula.source`.
    It is put in `sys.modules` before it is executed: numba looks a kernel's module up there by name when it reads the
    compiled kernel in a later process. The name is made of the hint and the hash of the text, so it is the same there.
    """
    readable = re.sub(r"\W+", "_", name_hint, flags=re.ASCII)[:40]
    name = f"hairpin_generated_{readable}_{hashlib.sha256(text.encode()).hexdigest()[:20]}"
    with _lock:
        if name in sys.modules:
            return sys.modules[name]
        path = _written(text, name)
        specification = importlib.util.spec_from_loader(name, _TextLoader(text, path), origin=path)
        assert specification is not None
        specification.has_location = True
        module = importlib.util.module_from_spec(specification)
        sys.modules[name] = module
        try:
            _TextLoader(text, path).exec_module(module)
        except BaseException:
            del sys.modules[name]
            raise
        return module


class _TextLoader(importlib.abc.InspectLoader):
    """Runs the text that it holds, whatever has become of the file since: that one only tells numba where to keep its own."""

    def __init__(self, text: str, path: str) -> None:
        self.text = text
        self.path = path

    def get_source(self, fullname: str) -> str:
        return self.text

    def get_code(self, fullname: str) -> CodeType:
        return self.source_to_code(self.text, self.path)


def _written(text: str, name: str) -> str:
    """Where the text stands as a file; where it could not be written, a path without a file, so that nothing is cached."""
    folder = cache_folder()
    if folder is None:
        return f"<{name}>"
    path = folder / "generated" / f"{name}.py"
    try:
        if path.is_file() and path.read_text(encoding="utf-8") == text:
            os.utime(path, (time.time(), CHANGED))
        else:
            path.parent.mkdir(exist_ok=True)
            _replace(path, text)
            _remove_old_modules(folder, keep=path)
    except (OSError, UnicodeDecodeError):
        return f"<{name}>"
    return str(path)


def _replace(path: Path, text: str) -> None:
    """Write a whole file or none: two processes may do so at once."""
    number, temporary = tempfile.mkstemp(dir=path.parent, prefix=path.stem, suffix=".part")
    try:
        with os.fdopen(number, "w", encoding="utf-8") as file:
            file.write(text)
        os.utime(temporary, (time.time(), CHANGED))
        Path(temporary).replace(path)
    except BaseException:
        Path(temporary).unlink(missing_ok=True)
        raise


def _remove_old_modules(folder: Path, keep: Path) -> None:
    """Remove the modules longest unused, and what numba keeps of them, once there are too many."""
    dated = []
    for path in (folder / "generated").glob("*.py"):
        try:
            dated.append((path.stat().st_atime, path))
        except OSError:  # another process was faster
            continue
    if len(dated) <= MODULES_KEPT:
        return
    for _, path in sorted(dated)[: len(dated) - MODULES_KEPT // 2]:
        if path != keep:
            for belonging in (path, *folder.glob(f"generated_*/{path.stem}.*")):
                belonging.unlink(missing_ok=True)
