"""A computation from the command line: the case as asked for, its watch, its folder, and the text that is printed."""

from __future__ import annotations

import dataclasses
import sys
import time
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from bvp.errors import InputError
from cases import documents, report, run, settings, store
from cases.build import along_of
from cases.case import Case
from cases.load import load
from cases.measured_data import read_columns
from cases.progress import Watch
from cases.results import Result, Traced
from cases.settings import Settings, asked_for
from cases.toml_text import measured_copy, toml_text

SECONDS_BETWEEN_PIECES = 2.0


@dataclass(frozen=True)
class Outcome:
    """What is to be printed, and what went wrong on the way (then the exit status is 3)."""

    output: str
    troubles: tuple[str, ...] = ()


def run_and_deliver(command: str, name_or_path: str, asked: Settings, *, when: str | None = None, discrete: bool = False) -> Outcome:
    """Run trace, solve or reach; the result goes to the folder asked for, and comes back as the text to print.

    A folder that cannot be written at the end costs nothing but the folder: the text still comes back.
    """
    settings.refuse_not_built(asked)
    case = load(name_or_path)
    along = along_of(case)
    # `solve` follows the branch from the case's own start to the value asked for.
    kept = (
        dataclasses.replace(asked, at={name: value for name, value in asked.at.items() if name != along}) if command == "solve" else asked
    )
    _refuse_unknown(case, asked)
    case, notices = asked_for(case, kept)
    if command == "solve":
        notices = []  # nothing is held against published values there
    remark = _command_line(command, case, asked, when, discrete)
    folder = None
    if asked.out is not None:
        folder = store.open_folder(asked.out)
    try:
        identity = store.identity_of(command, case.name, toml_text(case) + remark)
        if folder is not None:
            earlier = _begin(folder, identity, asked, case, remark)
            if earlier is not None:
                return Outcome(earlier)
        _say_first_run(asked)
        with Watch(along, quiet=asked.quiet, also=None) as watch:
            result = _work(command, case, asked, when, discrete, watch)
        result = dataclasses.replace(result, notes=(*notices, *result.notes))
        troubles = [] if result.complete else [result.reason]
        document = documents.document_of(result)
        text = report.text_of(result)
        if folder is not None:
            try:
                save(folder, result, document, text, identity)
                if not asked.quiet:
                    print(f"written to {asked.out}", file=sys.stderr)
            except store.StoreError as error:
                troubles.append(f"{error}\nThe result itself was computed and is printed.")
        return Outcome(documents.json_text(document) + "\n" if asked.json else text, tuple(troubles))
    finally:
        if folder is not None:
            folder.close()


def _work(command: str, case: Case, asked: Settings, when: str | None, discrete: bool, watch: Watch) -> Result:
    if command == "trace":
        return run.trace(case, watch)
    if command == "solve":
        return run.solve(case, asked.at, discrete=discrete, watch=watch)
    return run.reach(case, when or "", watch)


def _begin(folder: store.Folder, identity: Mapping[str, str], asked: Settings, case: Case, remark: str) -> str | None:
    """Mark the folder and put the case into it; the text of an earlier, finished result where `--resume` finds one."""
    store.refuse_other_run(folder.path, identity)
    unfinished, finished = store.mark_of(folder.path)
    if asked.resume:
        same = finished is not None and finished.get("asked") == identity["asked"]
        if finished is not None and same and finished.get("complete") and store.intact(folder.path, finished):
            if not asked.quiet:
                print(f"{folder.path} holds this result already, finished.", file=sys.stderr)
            return (folder.path / (store.RESULT if asked.json else store.REPORT)).read_text(encoding="utf-8")
        if unfinished is None and finished is None:
            raise InputError(f"--resume: {folder.path} holds no unfinished work.\nLeave --resume out to begin.")
        if unfinished is not None and unfinished.get("asked") != identity["asked"]:
            raise InputError(
                f"--resume: the work in {folder.path} was begun with another case file or options.\nUse the same, or leave --resume out."
            )
    try:
        folder.begin(identity)
        folder.write(store.CASE, toml_text(case, remark).encode())
        for name, file in case.measured.items():
            first, second = read_columns(case.folder / file, f"{case.origin}, [measured] {name}")
            lines = [f"{x!r},{y!r}" for x, y in zip(first, second, strict=True)]
            folder.write(measured_copy(name), ("\n".join(lines) + "\n").encode())
    except store.StoreError as error:
        raise InputError(f"--out: {error}\nChoose another folder.") from None
    return None


def save(folder: store.Folder, result: Result, document: Mapping[str, Any], text: str, identity: Mapping[str, str]) -> None:
    """The files of a result, what made it last. Raises StoreError."""
    from cases import exports

    case = result.case
    if isinstance(result, Traced):
        folder.write(store.BRANCH, exports.branch_csv(result))
        for name, data in _figures(result).items():
            folder.write(name, data)
    folder.write(store.STATES, exports.states_npz(result.kept_states, case.unknowns, case.coordinate))
    folder.write(store.REPORT, text.encode())
    folder.write(store.RESULT, (documents.json_text(document) + "\n").encode())
    folder.finish(identity, exports.versions(), result.complete)


def _figures(result: Traced) -> dict[str, bytes]:
    from cases.figures import branch_figure, rendered

    case = result.case
    return rendered(branch_figure(result.branches[0], title=case.title, caution=case.caution or None, published=result.compared))


def _refuse_unknown(case: Case, asked: Settings) -> None:
    """InputError for a parameter that the case has not; `solve` takes the traced one out before `asked_for` sees it."""
    asked_for(case, asked)


def _command_line(command: str, case: Case, asked: Settings, when: str | None, discrete: bool) -> str:
    """How the run was asked for, as a remark above the case as it was run."""
    words = [f"hairpin {command} {case.name}"]
    words += [f"--at {name}={value!r}" for name, value in asked.at.items()]
    words += [f'--when "{when}"'] if when else []
    words += ["--discrete"] if discrete else []
    return " ".join(words) + "\nDefaults and options are written out below."


def _say_first_run(asked: Settings) -> None:
    """One line before kernels are compiled for the first time, which takes seconds."""
    from bvp.cache_folder import cache_folder

    folder = cache_folder()
    if not asked.quiet and folder is not None and not any(folder.iterdir()):
        print("compiling kernels, once for this version: some seconds", file=sys.stderr)


__all__ = ["Outcome", "Path", "run_and_deliver", "save", "time"]
