"""A computation from the command line: the case as asked for, its watch, its folder, and the text that is printed."""

from __future__ import annotations

import contextlib
import sys
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from typing import Any

from bvp.errors import InputError
from bvp.ledger import kept_in
from cases import documents, report, run, settings, store
from cases.build import along_of
from cases.case import Case
from cases.keep import Keeper
from cases.load import load
from cases.measured_data import read_columns
from cases.pieces import Pieces
from cases.progress import Watch
from cases.results import Result, Traced
from cases.settings import Settings, asked_for
from cases.toml_text import measured_copy, toml_text


@dataclass(frozen=True)
class Question:
    """What is to be computed: a command, the case as it is asked for, and what the command takes besides."""

    command: str
    case: Case
    at: Mapping[str, float]
    when: str
    discrete: bool

    @property
    def command_line(self) -> str:
        """How the run was asked for, as it stands above the case as it was run."""
        words = [f"hairpin {self.command} {self.case.name}", *(f"--at {name}={value!r}" for name, value in self.at.items())]
        words += [f'--when "{self.when}"'] if self.when else []
        words += ["--discrete"] if self.discrete else []
        return " ".join(words) + "\nDefaults and options are written out below."

    @property
    def identity(self) -> dict[str, str]:
        """What a folder remembers of the question."""
        return store.identity_of(self.command, self.case.name, toml_text(self.case) + self.command_line)


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
    # `solve` follows the branch from the case's own start to the value asked for.
    case, notices = asked_for(load(name_or_path), asked, keep_start=command == "solve")
    question = Question(command, case, asked.at, when or "", discrete)
    along_of(case)
    if asked.out is None:
        return _outcome(_computed(question, notices, asked, None), asked, None)
    folder = store.open_folder(asked.out)
    try:
        earlier = _finished_earlier(folder, question, asked) if asked.resume else None
        if earlier is not None:
            return earlier
        _begin(folder, question, fresh=not asked.resume)
        return _outcome(_computed(question, notices, asked, folder), asked, folder, question.identity)
    finally:
        folder.close()


def _computed(question: Question, notices: list[str], asked: Settings, folder: store.Folder | None) -> Result:
    _say_first_run(asked)
    with _keeping(folder, asked), Watch(along_of(question.case), quiet=asked.quiet) as watch:
        if question.command == "trace":
            result: Result = run.trace(question.case, watch)
        elif question.command == "solve":
            result = run.solve(question.case, question.at, discrete=question.discrete, watch=watch)
        else:
            result = run.reach(question.case, question.when, watch)
    # The notices are about published values, which a trace alone is held against.
    return replace(result, notes=(*notices, *result.notes)) if isinstance(result, Traced) else result


@contextlib.contextmanager
def _keeping(folder: store.Folder | None, asked: Settings) -> Iterator[None]:
    """Keeps what is found while the work goes on; whatever ends the work, what came last is kept too."""
    if folder is None:
        yield
        return
    keeper = Keeper(Pieces(folder.partial), quiet=asked.quiet, resume=asked.resume)
    try:
        with kept_in(keeper):
            yield
    finally:
        keeper.flush()


def _outcome(result: Result, asked: Settings, folder: store.Folder | None, identity: Mapping[str, str] | None = None) -> Outcome:
    troubles = [] if result.complete else [result.reason]
    document, text = documents.document_of(result), report.text_of(result)
    if folder is not None:
        try:
            save(folder, result, document, text, identity or {})
            if not asked.quiet:
                print(f"written to {folder.path}", file=sys.stderr)
        except store.StoreError as error:
            troubles.append(f"{error}\nThe result itself was computed and is printed.")
    return Outcome(documents.json_text(document) + "\n" if asked.json else text, tuple(troubles))


# -- folders ----------------------------------------------------------------------------------------------------------


def _finished_earlier(folder: store.Folder, question: Question, asked: Settings) -> Outcome | None:
    """The text of a finished result that `--resume` finds; InputError where it finds nothing that belongs to the question."""
    store.refuse_other_run(folder.path, question.identity)
    unfinished, finished = store.mark_of(folder.path)
    if unfinished is None and finished is None:
        raise InputError(f"--resume: {folder.path} holds no unfinished work.\nLeave --resume out to begin.")
    mark = unfinished if unfinished is not None else finished
    if mark is None or mark.get("asked") != question.identity["asked"]:
        raise InputError(
            f"--resume: the work in {folder.path} was begun with another case file or options.\nUse the same, or leave --resume out."
        )
    if finished == mark and finished.get("complete") and store.intact(folder.path, finished):
        if not asked.quiet:
            print(f"{folder.path} holds this result already, finished.", file=sys.stderr)
        return Outcome((folder.path / (store.RESULT if asked.json else store.REPORT)).read_text(encoding="utf-8"))
    return None


def _begin(folder: store.Folder, question: Question, *, fresh: bool) -> None:
    """Mark the folder and put the case into it, before any work is done; InputError where that cannot be.

    fresh : what an earlier run left unfinished goes.
    """
    case = question.case
    store.refuse_other_run(folder.path, question.identity)
    try:
        folder.begin(question.identity, fresh=fresh)
        folder.write(store.CASE, toml_text(case, question.command_line).encode())
        for name, file in case.measured.items():
            first, second = read_columns(case.folder / file, f"{case.origin}, [measured] {name}")
            lines = [f"{x!r},{y!r}" for x, y in zip(first, second, strict=True)]
            folder.write(measured_copy(name), ("\n".join(lines) + "\n").encode())
    except store.StoreError as error:
        raise InputError(f"--out: {error}\nChoose another folder.") from None


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


def _say_first_run(asked: Settings) -> None:
    """One line before kernels are compiled for the first time, which takes seconds."""
    from bvp.cache_folder import cache_folder

    folder = cache_folder()
    if not asked.quiet and folder is not None and not any(folder.iterdir()):
        print("compiling kernels, once for this version: some seconds", file=sys.stderr)
