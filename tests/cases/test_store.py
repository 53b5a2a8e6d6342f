"""Result folders: killed at any moment, every file is old or new and whole; nothing of others is touched."""

from __future__ import annotations

import errno
import json
import os
import subprocess
import sys
from collections.abc import Iterable
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from bvp.errors import InputError
from bvp.ledger import Entry
from bvp.newton import Corrected
from cases.keep import Keeper
from cases.pieces import Pieces
from cases.store import StoreError, identity_of, intact, mark_of, open_folder, refuse_other_run, write_whole

IDENTITY = identity_of("trace", "slab", "as asked")


class Killed(BaseException):
    """The process ends here; nothing after this is run, not even what mends errors."""


def kill_at(monkeypatch: pytest.MonkeyPatch, call: int) -> list[int]:
    """Let the process die at the so-many-th call to the system that changes a file."""
    seen = [0]

    def wrap(function: Any) -> Any:
        def counted(*arguments: Any, **keywords: Any) -> Any:
            seen[0] += 1
            if seen[0] == call:
                raise Killed
            return function(*arguments, **keywords)

        return counted

    for name in ("fsync", "replace"):
        monkeypatch.setattr(os, name, wrap(getattr(os, name)))
    return seen


@pytest.mark.parametrize("call", range(1, 4))
def test_a_kill_leaves_the_file_old_or_new(tmp_path: Path, call: int) -> None:
    path = tmp_path / "result.json"
    write_whole(path, b"old")
    with pytest.MonkeyPatch.context() as monkeypatch:
        kill_at(monkeypatch, call)
        with pytest.raises(Killed):
            write_whole(path, b"new" * 1000)
    assert path.read_bytes() == (b"old" if call <= 2 else b"new" * 1000)


def test_a_kill_at_any_moment_of_a_run_leaves_whole_files_and_a_folder_that_can_be_used(tmp_path: Path) -> None:
    files = {"case.toml": b"a case", "branch.csv": b"lam\n1\n", "result.json": b"{}"}

    def run(path: Path, version: bytes) -> None:
        folder = open_folder(path)
        try:
            folder.begin(IDENTITY)
            pieces = Pieces(folder.partial)
            pieces.append({"points": 1}, {"lam": [1.0]})
            for name, data in files.items():
                folder.write(name, version + data)
            folder.finish(IDENTITY, {}, complete=True)
        finally:
            folder.close()

    call, died = 0, True
    while died:
        call += 1
        path = tmp_path / f"out {call}"
        run(path, b"old ")
        with pytest.MonkeyPatch.context() as monkeypatch:
            kill_at(monkeypatch, call)
            try:
                run(path, b"new ")
                died = False
            except Killed:
                pass
        for name, data in files.items():
            assert (path / name).read_bytes() in (b"old " + data, b"new " + data)
        finished = mark_of(path)[1]
        assert finished is not None
        if intact(path, finished):  # then the folder is of one run
            assert len({(path / name).read_bytes()[:4] for name in files}) == 1
        run(path, b"later ")
        assert sorted(entry.name for entry in path.iterdir()) == sorted([*files, "versions.json"])
    assert call > 10


def test_kills_before_there_was_any_result(tmp_path: Path) -> None:
    call, died = 0, True
    while died:
        call += 1
        path = tmp_path / f"out {call}"
        with pytest.MonkeyPatch.context() as monkeypatch:
            kill_at(monkeypatch, call)
            folder = open_folder(path)
            try:
                folder.begin(IDENTITY)
                folder.write("case.toml", b"a case")
                died = False
            except Killed:
                pass
            finally:
                folder.close()
        open_folder(path).close()  # it may be used again
    assert call > 5


@pytest.mark.parametrize("number", [errno.ENOSPC, errno.EROFS, errno.EACCES, errno.EIO])
@pytest.mark.parametrize("where", ["fsync", "replace"])
def test_a_write_that_fails_says_which_file_and_why(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, number: int, where: str) -> None:
    def fail(*_: Any, **__: Any) -> None:
        raise OSError(number, os.strerror(number))

    path = tmp_path / "result.json"
    write_whole(path, b"old")
    monkeypatch.setattr(os, where, fail)
    with pytest.raises(StoreError, match=rf"result.json cannot be written: {os.strerror(number)}"):
        write_whole(path, b"new")
    assert path.read_bytes() == b"old"
    assert [entry.name for entry in tmp_path.iterdir()] == ["result.json"]


@pytest.mark.parametrize("name", ["notes.txt", "result.json", "branch.csv", "figure.png", "versions.json", "measured-k.csv"])
def test_a_folder_of_others_is_refused_and_left_alone(tmp_path: Path, name: str) -> None:
    (tmp_path / name).write_text('{"made_by": "somebody"}')
    with pytest.raises(InputError, match=f"holds something else: {name}"):
        open_folder(tmp_path)
    assert (tmp_path / name).read_text() == '{"made_by": "somebody"}'


def test_a_folder_partial_of_others_is_refused(tmp_path: Path) -> None:
    (tmp_path / "partial").mkdir()
    (tmp_path / "partial" / "thesis.tex").write_text("x")
    with pytest.raises(InputError, match="holds something else: partial"):
        open_folder(tmp_path)


def test_a_stranger_beside_our_result_is_refused(tmp_path: Path) -> None:
    folder = open_folder(tmp_path)
    folder.begin(IDENTITY)
    folder.finish(IDENTITY, {}, complete=True)
    folder.close()
    open_folder(tmp_path).close()
    (tmp_path / "notes.txt").write_text("mine")
    with pytest.raises(InputError, match=r"notes\.txt"):
        open_folder(tmp_path)


def test_files_of_others_under_partial_survive(tmp_path: Path) -> None:
    folder = open_folder(tmp_path)
    folder.begin(IDENTITY)
    (folder.partial / "notes.txt").write_text("mine")
    folder.finish(IDENTITY, {}, complete=True)
    folder.close()
    assert (tmp_path / "partial" / "notes.txt").read_text() == "mine"


def test_another_case_in_the_folder_is_refused(tmp_path: Path) -> None:
    folder = open_folder(tmp_path)
    folder.begin(IDENTITY)
    refuse_other_run(tmp_path, identity_of("trace", "slab", "asked otherwise"))
    with pytest.raises(InputError, match="holds a result of hairpin trace slab"):
        refuse_other_run(tmp_path, identity_of("trace", "sphere", "as asked"))
    with pytest.raises(InputError, match="holds a result of hairpin trace slab"):
        refuse_other_run(tmp_path, identity_of("solve", "slab", "as asked"))
    folder.close()


def test_out_that_is_a_file_or_has_no_place(tmp_path: Path) -> None:
    (tmp_path / "a file").write_text("x")
    with pytest.raises(InputError, match="is a file"):
        open_folder(tmp_path / "a file")
    with pytest.raises(InputError, match="cannot be made: Not a directory"):
        open_folder(tmp_path / "a file" / "below")


def test_out_without_permission(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(*_: object, **__: object) -> None:
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))

    monkeypatch.setattr(Path, "mkdir", refused)  # root, who often runs tests, may write everywhere
    with pytest.raises(InputError, match="Permission denied"):
        open_folder(tmp_path / "out")


HOLDER = """
import sys
from pathlib import Path
from cases.store import open_folder
folder = open_folder(Path(sys.argv[1]))
print("held", flush=True)
sys.stdin.read()
"""


def test_two_processes_on_one_folder(tmp_path: Path) -> None:
    out = tmp_path / "out"
    with subprocess.Popen([sys.executable, "-c", HOLDER, str(out)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True) as other:
        assert other.stdout is not None
        assert other.stdout.readline() == "held\n"
        with pytest.raises(InputError, match="in use by another run"):
            open_folder(out)
        other.kill()  # however it ends, the folder is free again
        other.wait()
        open_folder(out).close()


def test_pieces_come_back_in_order_and_as_far_as_they_are_whole(tmp_path: Path) -> None:
    pieces = Pieces(tmp_path)
    for number in range(1, 5):
        pieces.append({"number": number, "not finite": float("nan")}, {"values": [number, number + 0.5]})
    assert [piece.document["number"] for piece in Pieces(tmp_path).read()] == [1, 2, 3, 4]
    assert Pieces(tmp_path).read()[1].arrays["values"].tolist() == [2.0, 2.5]
    damaged = tmp_path / "000003.npz"
    damaged.write_bytes(damaged.read_bytes()[:100])
    assert [piece.document["number"] for piece in Pieces(tmp_path).read()] == [1, 2]
    (tmp_path / "000002.npz").unlink()
    assert [piece.document["number"] for piece in Pieces(tmp_path).read()] == [1]
    Pieces(tmp_path).append({"number": 5}, {})
    assert json.loads(json.dumps(Pieces(tmp_path).read()[0].document)) == {"number": 1, "not finite": None}


def entry(number: int) -> Entry:
    """A result of Newton's method such as a trace keeps."""
    values = {"pace": 0.5, "ok": True, "reason": "", "steps": 2, "sweeps": 3, "first": 1.0, "last": 1e-12}
    counts = {"positive": 0, "negative": 5, "alike": True, "coupling": 1.0}
    u = np.arange(5.0) + number
    found = Corrected(u=u, parameter=0.1 * number, tangent=-u, **values, **counts)  # type: ignore[arg-type]
    return Entry((5.0, float(number), 0.0, 1e-9), found)


def same(one: Corrected, other: Corrected) -> bool:
    """Equality of all numbers, arrays among them."""
    pairs: Iterable[tuple[Any, Any]] = zip(one, other, strict=True)
    return all(np.array_equal(a, b) for a, b in pairs)


def test_results_are_kept_while_the_work_goes_on_and_come_back(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    clock = [0.0]
    monkeypatch.setattr("cases.keep.time.monotonic", lambda: clock[0])
    keeper = Keeper(Pieces(tmp_path), quiet=True)
    for number in range(10):
        clock[0] += 0.7
        keeper.note(entry(number))
    assert [len(piece.document["reasons"]) for piece in Pieces(tmp_path).read()] == [3, 3, 3]
    keeper.flush()
    again = Keeper(Pieces(tmp_path), quiet=True, resume=True)
    for number in range(8):
        known = again.known(entry(number).key)
        assert known is not None
        assert same(known, entry(number).found)
    assert again.known((6.0, 8.0, 0.0, 1e-9)) is None  # another question: what follows belongs to another computation
    assert again.known(entry(9).key) is None


def test_keeping_that_fails_ends_the_keeping_alone(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def fail(*_: Any) -> None:
        raise StoreError("a piece cannot be written: No space left on device.")

    pieces = Pieces(tmp_path)
    monkeypatch.setattr(pieces, "append", fail)
    keeper = Keeper(pieces, quiet=False)
    for number in range(3):
        keeper.note(entry(number))
        keeper.flush()
    assert capsys.readouterr().err.count("No space left on device") == 1
