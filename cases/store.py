"""Result folders: whole files only, one process at a time, and nothing in them that is not ours."""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from bvp.errors import InputError

RESULT, VERSIONS, CASE, REPORT, BRANCH, STATES = "result.json", "versions.json", "case.toml", "report.txt", "branch.csv", "states.npz"
FIGURES = ("figure.png", "figure.svg")
PARTIAL, START = "partial", "start.json"
FILES = frozenset({RESULT, VERSIONS, CASE, REPORT, BRANCH, STATES, *FIGURES})
TEMPORARY = ".unfinished-"  # opens the name of a file that is being written; a crash may leave one behind


class StoreError(Exception):
    """A result could not be written; the message says which file and why."""


def write_whole(path: Path, data: bytes) -> None:
    """Write a file so that a crash at any moment leaves the old one or the new one, whole. Raises StoreError.

    The data reach the disk under another name before that name is exchanged, and the exchange reaches it before
    this returns.
    """
    temporary = path.with_name(f"{TEMPORARY}{os.getpid()}-{path.name}")
    try:
        with temporary.open("wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        os.replace(temporary, path)  # noqa: PTH105  (the tests let the process die at this very call)
        _sync_folder(path.parent)
    except OSError as error:
        with contextlib.suppress(OSError):  # the folder is read-only or gone; the first error is the one to tell
            temporary.unlink(missing_ok=True)
        raise StoreError(f"{path} cannot be written: {error.strerror or error}.") from error


class Folder:
    """A result folder that this process holds; `close` lets go of it. Made by `open_folder`."""

    def __init__(self, path: Path, lock: int | None) -> None:
        self.path = path
        self._lock = lock
        self._sums: dict[str, str] = {}

    @property
    def partial(self) -> Path:
        """Where numbered pieces of unfinished work are kept."""
        return self.path / PARTIAL

    def begin(self, identity: Mapping[str, Any], *, fresh: bool = True) -> None:
        """Mark the folder as ours before any work is done; what an earlier run left unfinished goes where the work is begun afresh."""
        if fresh:
            _remove_pieces(self.partial, mark_too=False)  # the mark itself is exchanged below, so that there always is one
        try:
            self.partial.mkdir(exist_ok=True)
        except OSError as error:
            raise StoreError(f"{self.partial} cannot be made: {error.strerror or error}.") from error
        write_whole(self.partial / START, _json({"made_by": "hairpin", **identity}))

    def write(self, name: str, data: bytes) -> None:
        """One file of the result."""
        write_whole(self.path / name, data)
        self._sums[name] = hashlib.sha256(data).hexdigest()

    def finish(self, identity: Mapping[str, Any], versions: Mapping[str, str], complete: bool) -> None:
        """The last file: what made the result, and the sums of its files. Finished work needs its pieces no longer."""
        write_whole(
            self.path / VERSIONS, _json({"made_by": "hairpin", **identity, "complete": complete, "versions": versions, "files": self._sums})
        )
        if complete:
            _remove_pieces(self.partial, mark_too=True)

    def close(self) -> None:
        """Let other processes have the folder."""
        if self._lock is not None:
            os.close(self._lock)
            self._lock = None


def open_folder(path: Path) -> Folder:
    """The folder, made where it is missing, held for this process alone.

    Raises InputError where it cannot be made or written, is in use, or holds something else.
    """
    try:
        path.mkdir(parents=True, exist_ok=True)
    except FileExistsError:
        raise InputError(f"--out {path} is a file.\nExpected: a folder, or a name for a new one.") from None
    except OSError as error:
        raise InputError(f"--out {path} cannot be made: {error.strerror or error}.\nChoose another folder.") from None
    folder = Folder(path, _locked(path))
    try:
        _refuse_others(path)
        for leftover in path.glob(f"{TEMPORARY}*"):
            leftover.unlink(missing_ok=True)
    except OSError as error:
        folder.close()
        raise InputError(f"--out {path} cannot be used: {error.strerror or error}.\nChoose another folder.") from None
    except InputError:
        folder.close()
        raise
    return folder


def mark_of(path: Path) -> tuple[dict[str, Any] | None, dict[str, Any] | None]:
    """What unfinished and what finished work in a folder says of itself; None where there is none."""
    return _read_mark(path / PARTIAL / START), _read_mark(path / VERSIONS)


def intact(path: Path, finished: Mapping[str, Any]) -> bool:
    """Whether the files of a finished result are those that it was finished with."""
    try:
        return all(hashlib.sha256((path / name).read_bytes()).hexdigest() == total for name, total in finished["files"].items())
    except (OSError, KeyError, AttributeError, TypeError):
        return False


def identity_of(command: str, case_name: str, asked: str) -> dict[str, str]:
    """What a folder remembers of its run: two runs of the same case with the same settings have the same `asked`."""
    return {"command": command, "case": case_name, "asked": hashlib.sha256(asked.encode()).hexdigest()}


def refuse_other_run(path: Path, identity: Mapping[str, str]) -> None:
    """InputError where the folder holds the result of another command or another case."""
    for mark in mark_of(path):
        if mark is not None and (mark.get("command"), mark.get("case")) != (identity["command"], identity["case"]):
            raise InputError(f"--out {path} holds a result of hairpin {mark.get('command')} {mark.get('case')}.\nChoose another folder.")


def _refuse_others(path: Path) -> None:
    """A folder is ours when all names in it are ours and one of the two marks is there; an empty one may become ours."""
    names = _names(path)
    strangers = [
        name for name in names if name not in FILES and name != PARTIAL and not (name.startswith("measured-") and name.endswith(".csv"))
    ]
    if mark_of(path) == (None, None):
        # Without a mark only an empty folder `partial` can be ours: a run was killed before it wrote its first file.
        strangers = [name for name in names if name != PARTIAL or not (path / PARTIAL).is_dir() or _names(path / PARTIAL)]
    if strangers:
        more = f" and {len(strangers) - 1} more" if len(strangers) > 1 else ""
        raise InputError(
            f"--out {path} holds something else: {strangers[0]}{more}.\nExpected: a new or an empty folder, or one with an earlier result."
        )


def _names(path: Path) -> list[str]:
    return sorted(entry.name for entry in path.iterdir() if not entry.name.startswith(TEMPORARY))


def _remove_pieces(partial: Path, *, mark_too: bool) -> None:
    """Take away what we put under `partial`, and the folder itself where nothing else is in it; failures do no harm."""
    try:
        for path in partial.iterdir():
            ours = path.name.startswith(TEMPORARY) or (path.suffix == ".npz" and path.stem.isdigit())
            if ours or (mark_too and path.name == START):
                path.unlink(missing_ok=True)
        if mark_too:
            partial.rmdir()
    except OSError:
        return


def _locked(path: Path) -> int | None:
    """A lock on the folder itself, which leaves no file behind and goes with the process, however that ends."""
    try:
        import fcntl
    except ImportError:  # a system without such locks
        return None
    try:
        handle = os.open(path, os.O_RDONLY)
    except OSError as error:
        raise InputError(f"--out {path} cannot be opened: {error.strerror}.\nChoose another folder.") from None
    try:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except BlockingIOError:
        os.close(handle)
        raise InputError(f"--out {path} is in use by another run.\nWait for its end, or choose another folder.") from None
    except OSError:  # a file system without locks
        os.close(handle)
        return None
    return handle


def _sync_folder(path: Path) -> None:
    if os.name != "posix":
        return
    handle = os.open(path, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _read_mark(path: Path) -> dict[str, Any] | None:
    try:
        mark = json.loads(path.read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return None
    return mark if isinstance(mark, dict) and mark.get("made_by") == "hairpin" else None


def _json(document: Mapping[str, Any]) -> bytes:
    return (json.dumps(document, indent=1, ensure_ascii=False) + "\n").encode()
