"""A case written back as TOML: the case as it was run, defaults and changes from the command line included."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import asdict
from typing import Any

from cases.case import Case

_ESCAPES = {'"': '\\"', "\\": "\\\\", "\n": "\\n", "\t": "\\t", "\r": "\\r", "\b": "\\b", "\f": "\\f"}


def toml_text(case: Case, remark: str = "") -> str:
    """The text of a TOML file that reads as the same case; measured files stand beside it under `measured_copy`."""
    lines = [f"# {line}" for line in remark.splitlines()]
    top = {"title": case.title, "about": case.about, "caution": case.caution}
    lines += _entries({name: text for name, text in top.items() if text})
    lines += _entries({"unknowns": case.unknowns, "equations": case.equations, "conditions": case.conditions})
    lines += _table("domain", {case.coordinate: case.ends, "geometry": case.geometry})
    lines += _table("parameters", case.parameters)
    lines += _table("where", case.where)
    lines += _table("measured", {name: measured_copy(name) for name in case.measured})
    lines += _table("initial_guess", case.initial_guess)
    lines += _table("units", case.units)
    lines += _table("labels", case.labels)
    lines += _table("trace", {name: value for name, value in asdict(case.trace).items() if value is not None})
    lines += _table("discretization", asdict(case.discretization))
    for name, keys in case.schemes.items():
        lines += _table(f"scheme.{_key(name)}", keys)
    for published in case.published:
        lines += ["", "[[published]]", *_entries(asdict(published))]
    return "\n".join(lines) + "\n"


def measured_copy(name: str) -> str:
    """The name under which the data of a measured function are kept beside the case as it was run."""
    return f"measured-{name}.csv"


def _table(name: str, entries: Mapping[str, Any]) -> Iterator[str]:
    if entries:
        yield ""
        yield f"[{name}]"
        yield from _entries(entries)


def _entries(entries: Mapping[str, Any]) -> Iterator[str]:
    for name, value in entries.items():
        yield f"{_key(name)} = {_value(value)}"


def _key(name: str) -> str:
    bare = name.isascii() and name.replace("_", "").replace("-", "").isalnum()
    return name if bare else _value(name)


def _value(value: Any) -> str:
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, (int, float)):
        return repr(value)  # the shortest text that reads as the same double
    if isinstance(value, str):
        return '"' + "".join(_character(character) for character in value) + '"'
    if isinstance(value, Mapping):
        return "{" + ", ".join(f"{_key(name)} = {_value(item)}" for name, item in value.items()) + "}"
    return "[" + ", ".join(_value(item) for item in value) + "]"


def _character(character: str) -> str:
    if character in _ESCAPES:
        return _ESCAPES[character]
    return character if character.isprintable() else f"\\U{ord(character):08X}"
