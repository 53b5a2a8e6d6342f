"""The folder in which compiled kernels are kept between runs; it holds nothing that cannot be made again.

A cached kernel does not notice an edit in another file, so the folder is named by the hash of all kernel sources
and of the versions that compile them: after an edit or an update everything is compiled afresh, in a new folder.
`HAIRPIN_CACHE` names another root; `HAIRPIN_CACHE=off` keeps nothing.
"""

from __future__ import annotations

import hashlib
import os
import shutil
import sys
import tempfile
import warnings
from functools import lru_cache
from pathlib import Path

VARIABLE = "HAIRPIN_CACHE"
FOLDERS_KEPT = 4  # a version in use, one under work, and a little slack for going back and forth between them
PREFIX = "kernels-"


@lru_cache(maxsize=1)
def cache_folder() -> Path | None:
    """The folder of this version's kernels, made if need be; None, after one warning, where it cannot be written."""
    if os.environ.get(VARIABLE) == "off":
        return None
    try:
        folder = cache_root() / (PREFIX + sources_hash())
        new = not folder.is_dir()
        folder.mkdir(parents=True, exist_ok=True, mode=0o700)
        with tempfile.TemporaryFile(dir=folder):
            pass
        os.utime(folder)  # so that the folders longest unused are known by their date
    except (OSError, RuntimeError) as error:  # RuntimeError: there is no home folder
        warnings.warn(
            f"compiled kernels cannot be kept ({error}), so every run compiles them again, which takes seconds.\n"
            f"Set {VARIABLE} to a folder that can be written, or to `off` to silence this.",
            RuntimeWarning,
            stacklevel=2,
        )
        return None
    if new:
        remove_old_folders(folder.parent, keep=folder)
    return folder


def cache_root() -> Path:
    """`HAIRPIN_CACHE`, or hairpin's folder in the user's cache; RuntimeError where there is no home folder."""
    named = os.environ.get(VARIABLE)
    if named:
        return Path(named).expanduser().absolute()
    shared = os.environ.get("XDG_CACHE_HOME")
    return (Path(shared) if shared and Path(shared).is_absolute() else Path.home() / ".cache") / "hairpin"


def sources_hash() -> str:
    """A hash over the kernel sources and the versions of what compiles them."""
    import llvmlite
    import numba
    import numpy

    summary = hashlib.sha256()
    versions = (sys.implementation.cache_tag, sys.version, numba.__version__, llvmlite.__version__, numpy.__version__)
    summary.update(repr(versions).encode())
    for path in sorted((Path(__file__).parent / "kernels").glob("*.py")):
        summary.update(f"\n{path.name}\n".encode())
        summary.update(path.read_bytes())
    return summary.hexdigest()[:20]


def remove_old_folders(root: Path, keep: Path) -> None:
    """Remove the longest unused folders of other versions; what another process has just removed or holds is left."""
    dated = []
    for folder in root.glob(PREFIX + "*"):
        try:
            dated.append((folder.stat().st_mtime, folder))
        except OSError:  # another process was faster
            continue
    others = sorted((entry for entry in dated if entry[1] != keep), reverse=True)
    for _, folder in others[FOLDERS_KEPT - 1 :]:
        shutil.rmtree(folder, ignore_errors=True)
