"""The command line: from words to a command, from a result to standard output, a folder and an exit status."""

from __future__ import annotations

import os
import sys
import warnings
from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, Any

from bvp.errors import ComputationError, InputError
from cases import options

if TYPE_CHECKING:
    import argparse

DONE, WRONG_INPUT, NOT_COMPLETED = 0, 2, 3


class OutputError(Exception):
    """Standard output cannot be written; the message says why."""


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command line; the exit status is 0, 2 or 3 as `hairpin --help` says."""
    words = list(sys.argv[1:] if argv is None else argv)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")  # a terminal that lacks a sign shows a question mark
    try:
        status = _run(words)
        _flush()
        return status
    except InputError as error:
        return _said(str(error), WRONG_INPUT)
    except ComputationError as error:
        return _said(str(error), NOT_COMPLETED)
    except KeyboardInterrupt:
        return _said("interrupted; nothing was found until then.", NOT_COMPLETED)
    except BrokenPipeError:  # the reader of our output has gone, as `| head` does: nobody is left to be told
        _discard_output()
        return DONE
    except OutputError as error:
        _discard_output()
        return _said(str(error), NOT_COMPLETED)
    except MemoryError:
        return _said("there is not enough memory for this.\nTry fewer intervals.", NOT_COMPLETED)


def _discard_output() -> None:
    """Send what is still to be written nowhere, so that Python's own last flush does not fail again."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def _run(words: list[str]) -> int:
    if not words or words[0] in ("-h", "--help", "help"):
        _write(options.help_text())
        return DONE if words else WRONG_INPUT
    if words[0] == "--version":
        from importlib.metadata import version

        _write(f"hairpin {version('hairpin')}\n")
        return DONE
    try:
        found = options.parse(words)
    except SystemExit as leaving:  # argparse leaves after --help
        return int(leaving.code or 0)
    return _COMMANDS[found.command](found)


def _list(found: argparse.Namespace) -> int:
    from cases.load import bundled_titles

    titles = list(bundled_titles())
    if found.json:
        _write_json({"cases": [{"name": name, "title": title} for name, title in titles]})
    else:
        width = max(len(name) for name, _ in titles)
        _write("".join(f"{name:{width}}  {title}\n" for name, title in titles))
    return DONE


def _show(found: argparse.Namespace) -> int:
    from cases.load import load

    case = load(found.case)
    if found.toml:
        _write(case.text if case.text.endswith("\n") else case.text + "\n")
    elif found.json:
        from cases.documents import case_document

        _write_json(case_document(case))
    else:
        from cases.describe import described

        _write(described(case))
    return DONE


def _check(found: argparse.Namespace) -> int:
    from cases.check import check, text_of

    settings = options.settings_of(found)
    findings = check(found.case, settings)
    if settings.json:
        _write_json({"case": findings.case, "wrong": findings.wrong, "doubtful": findings.doubtful})
    else:
        _write(text_of(findings))
    return WRONG_INPUT if findings.wrong else DONE


def _compute(found: argparse.Namespace) -> int:
    """trace, solve and reach: the work itself, its folder, its report."""
    from cases.deliver import run_and_deliver

    settings = options.settings_of(found)
    if not settings.quiet:
        _say_notices_plainly()
    outcome = run_and_deliver(
        found.command, found.case, settings, when=getattr(found, "when", None), discrete=getattr(found, "discrete", False)
    )
    _write(outcome.output)
    _flush()
    for trouble in outcome.troubles:
        _said(trouble, NOT_COMPLETED)
    return NOT_COMPLETED if outcome.troubles else DONE


_COMMANDS: Mapping[str, Callable[[Any], int]] = {
    "list": _list,
    "show": _show,
    "check": _check,
    "trace": _compute,
    "solve": _compute,
    "reach": _compute,
}


def _say_notices_plainly() -> None:
    """Warnings of the lower floors (an unwritable cache folder) as one line, without the place in our sources."""

    def plainly(message: Warning | str, *_: Any, **__: Any) -> None:
        print(f"notice: {message}", file=sys.stderr)

    warnings.showwarning = plainly


def _write(text: str) -> None:
    try:
        sys.stdout.write(text)
    except OSError as error:
        raise _unwritable(error) from error


def _flush() -> None:
    try:
        sys.stdout.flush()
    except OSError as error:
        raise _unwritable(error) from error


def _unwritable(error: OSError) -> Exception:
    return error if isinstance(error, BrokenPipeError) else OutputError(f"standard output cannot be written: {error.strerror}.")


def _write_json(document: Mapping[str, Any]) -> None:
    from cases.documents import json_text

    _write(json_text(document) + "\n")


def _said(message: str, status: int) -> int:
    print(message, file=sys.stderr)
    return status
