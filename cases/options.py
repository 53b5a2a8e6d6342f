"""The options of the command line: each is defined once and means the same for every command that takes it."""

from __future__ import annotations

import argparse
import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any, NoReturn

from bvp.errors import InputError, nearest
from cases.schema import MOST_DIGITS, MOST_INTERVALS
from cases.settings import Settings


@dataclass(frozen=True)
class Command:
    """One command: what it does, whether it takes a case, and which options."""

    about: str
    takes_case: bool
    options: tuple[str, ...]


_HOW = ("--at", "--scheme", "--intervals", "--grid", "--digits", "--branches", "--look-for-others")
_RUN = (*_HOW, "--workers", "--out", "--resume")
_SAY = ("--json", "--quiet")

COMMANDS: Mapping[str, Command] = {
    "list": Command("the bundled cases, one line each", False, _SAY),
    "show": Command("a case in words: equations, conditions, parameters, what is published about it", True, ("--toml", *_SAY)),
    "check": Command("what is wrong or doubtful in a case, solving nothing", True, (*_HOW, *_SAY)),
    "solve": Command(
        "the steady states at given parameter values, with the margin to the nearest turning point", True, ("--discrete", *_RUN, *_SAY)
    ),
    "trace": Command("the branch, its turning points, their uncertainty and sensitivity", True, (*_RUN, *_SAY)),
    "reach": Command("the parameter at which a measure takes a value", True, ("--when", *_RUN, *_SAY)),
}

NOT_BUILT = ("compare", "examine", "locus")


class _Parser(argparse.ArgumentParser):
    """argparse, with errors as the one message of an InputError."""

    def error(self, message: str) -> NoReturn:
        raise InputError(f"{self.prog}: {message.removeprefix('argument ')}.\nhairpin --help lists commands and options.")


def parse(argv: Sequence[str]) -> argparse.Namespace:
    """A command line as a namespace with `command`, `case` where the command takes one, and its options.

    Raises InputError naming what is unknown and the nearest known name. `--help` prints and leaves with status 0.
    """
    name, rest = _command(argv)
    command = COMMANDS[name]
    parser = _parser(name, command)
    found, left_over = parser.parse_known_args(rest)
    for word in left_over:
        if word.startswith("-"):
            option = word.split("=", 1)[0]
            raise InputError(f"hairpin {name}: {option} is no option of this command. {nearest(option, [*command.options, '--help'])}")
        raise InputError(f"hairpin {name}: {word!r} is one word too many.\nExpected: {_usage(name, command)}.")
    found.command = name
    if command.takes_case and found.case is None:
        raise InputError(
            f"hairpin {name}: the case is missing.\nExpected: {_usage(name, command)}; CASE is a bundled case's name or a path."
        )
    if "--when" in command.options and found.when is None:
        raise InputError(
            'hairpin reach: --when is missing.\nExpected: a comparison of a measure with a number, such as --when "max(u) = 1.2".'
        )
    return found


def settings_of(found: argparse.Namespace) -> Settings:
    """The options that mean the same everywhere, as a record."""
    at: dict[str, float] = {}
    for name, value in getattr(found, "at", None) or ():
        if at.get(name, value) != value:
            raise InputError(f"--at gives {name} twice, {at[name]:g} and {value:g}.\nExpected: one value for each parameter.")
        at[name] = value
    others = {name: value for name in Settings.__dataclass_fields__ if name != "at" and (value := getattr(found, name, None)) is not None}
    return Settings(at=at, **others)


def help_text() -> str:
    """What `hairpin --help` prints."""
    width = max(map(len, COMMANDS))
    lines = ["Turning points of steady states: from a typed equation to a value with its uncertainty.", ""]
    lines += ["usage: hairpin COMMAND …", ""]
    lines += [f"  {_usage(name, command).removeprefix('hairpin '):{width + 30}} {command.about}" for name, command in COMMANDS.items()]
    lines += ["", "CASE is a bundled case's name or a path to a TOML file. hairpin COMMAND --help lists a command's options.", ""]
    lines += [f"Not built yet: {', '.join(NOT_BUILT)}."]
    lines += ["Exit status: 0 done; 2 the input is wrong; 3 the computation could not be completed as asked, or was interrupted."]
    return "\n".join(lines) + "\n"


def _command(argv: Sequence[str]) -> tuple[str, Sequence[str]]:
    if not argv:
        raise InputError(f"hairpin: a command is missing.\nExpected: one of {', '.join(COMMANDS)}; hairpin --help says more.")
    name = argv[0]
    if name in NOT_BUILT:
        raise InputError(f"hairpin {name} is not built yet.\nBuilt are {', '.join(COMMANDS)}.")
    if name.startswith("-"):
        raise InputError(f"hairpin: {name} stands before the command.\nExpected: the command first, then the case, then options.")
    if name not in COMMANDS:
        raise InputError(f'hairpin: "{name}" is no command. {nearest(name, list(COMMANDS))}')
    return name, argv[1:]


def _usage(name: str, command: Command) -> str:
    extra = ' --when "max(u) = 1.2"' if "--when" in command.options else ""
    return f"hairpin {name}{' CASE' if command.takes_case else ''}{extra}{' [options]' if command.options else ''}"


def _parser(name: str, command: Command) -> _Parser:
    parser = _Parser(prog=f"hairpin {name}", usage=_usage(name, command), description=command.about, allow_abbrev=False)
    if command.takes_case:
        parser.add_argument("case", nargs="?", metavar="CASE", help="a bundled case's name or a path to a TOML file")
    for option in command.options:
        parser.add_argument(option, **OPTIONS[option])
    return parser


def _at(text: str) -> tuple[str, float]:
    name, sign, value = text.partition("=")
    if not sign or not name.strip():
        raise argparse.ArgumentTypeError(f'"{text}" is not of the form name=number, such as --at lam=2')
    try:
        number = float(value)
    except ValueError:
        number = math.nan
    if not math.isfinite(number):
        raise argparse.ArgumentTypeError(f'"{value}" in "{text}" is no finite number')
    return name.strip(), number


def _whole(least: int, most: int) -> Any:
    def read(text: str) -> int:
        try:
            number = float(text)  # so that 1e6 is read, too
        except ValueError:
            number = math.nan
        if not number.is_integer():
            raise argparse.ArgumentTypeError(f'"{text}" is no whole number')
        if not least <= number <= most:
            raise argparse.ArgumentTypeError(f"{text} is outside {least} to {most}")
        return int(number)

    return read


def _one_of(*choices: str) -> Any:
    def read(text: str) -> str:
        if text not in choices:
            raise argparse.ArgumentTypeError(f'"{text}" is not known. {nearest(text, list(choices)).rstrip(".")}')
        return text

    return read


OPTIONS: Mapping[str, dict[str, Any]] = {
    "--at": {"action": "append", "type": _at, "metavar": "name=value", "help": "a parameter's value; may be repeated"},
    "--scheme": {"metavar": "NAME", "help": "a built-in scheme, or one of the case's own"},
    "--intervals": {"type": _whole(2, MOST_INTERVALS), "metavar": "N", "help": "intervals of the grid where the work starts"},
    "--grid": {"metavar": "GRID", "help": "adaptive, uniform, or a map of s in [0, 1]"},
    "--digits": {"type": _whole(1, MOST_DIGITS), "metavar": "N", "help": "digits wanted of each turning point"},
    "--branches": {"type": _one_of("one", "all"), "metavar": "one|all", "help": "all: also branches met at branch points (not built yet)"},
    "--look-for-others": {"action": "store_true", "help": "search for states off the traced branches (not built yet)"},
    "--workers": {"type": _whole(1, 1024), "metavar": "N", "help": "work in N processes (more than 1 is not built yet)"},
    "--out": {"type": Path, "metavar": "DIR", "help": "leave a folder with the result, figures and the case as it was run"},
    "--resume": {"action": "store_true", "help": "go on with unfinished work in the folder"},
    "--json": {"action": "store_true", "help": "one JSON object on standard output"},
    "--quiet": {"action": "store_true", "help": "no progress and no notices"},
    "--toml": {"action": "store_true", "help": "print the case file itself, to start one's own from"},
    "--discrete": {"action": "store_true", "help": "the states of the difference scheme on exactly the grid asked for"},
    "--when": {"metavar": "COMPARISON", "help": 'a measure and its value, such as "max(u) = 1.2"'},
}
