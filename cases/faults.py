"""What is wrong with a case file's tables, keys and kinds of values; formulas are judged where the problem is built."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import Any

from bvp.errors import nearest
from cases import schema
from cases.kinds import KINDS, shown
from cases.schema import Key

Faults = Iterator[str]

A_NAME = "Expected: a name of letters, digits and _ that starts with a letter."


def faults(document: Mapping[str, Any], origin: str) -> Faults:
    """Each thing that is wrong with a document read from TOML, as one message; none where it can become a case."""
    for name in document:
        if name in schema.NOT_BUILT:
            yield f"{origin}: [{name}] ({schema.NOT_BUILT[name]}) is not built yet.\nLeave the table out."
        elif name not in schema.TOP:
            yield _unknown(origin, "", name, schema.TOP)
    yield from _table({name: value for name, value in document.items() if name in schema.TOP}, schema.TOP, origin, "")
    for table, keys in schema.CLOSED.items():
        if isinstance(document.get(table), dict):
            yield from _closed(document[table], keys, origin, table)
    for table, (key, names) in schema.OPEN.items():
        if isinstance(document.get(table), dict):
            yield from _open(document[table], key, names, origin, table)
    if isinstance(document.get("domain"), dict):
        yield from _domain(document["domain"], origin)
    if isinstance(document.get("scheme"), dict):
        yield from _schemes(document["scheme"], origin)
    for number, entry in enumerate(_dicts(document.get("published")), start=1):
        yield from _closed(entry, schema.PUBLISHED, origin, f"published {number}")
    yield from _relations(document, origin)


def _relations(document: Mapping[str, Any], origin: str) -> Faults:
    """Names in one table that must stand in another."""
    parameters = document.get("parameters", {})
    along = document.get("trace", {}).get("along") if isinstance(document.get("trace"), dict) else None
    if isinstance(parameters, dict) and isinstance(along, str) and along not in parameters:
        yield f'{origin}, [trace], "along": "{along}" is no parameter. {_choose(along, parameters)}'
    unknowns = document.get("unknowns")
    if isinstance(unknowns, list) and isinstance(parameters, dict) and all(isinstance(name, str) for name in unknowns):
        known = {*unknowns, *parameters}
        for other in ("domain", "where", "measured"):
            known |= set(document[other]) if isinstance(document.get(other), dict) else set()
        for table in ("units", "labels"):
            for name in document[table] if isinstance(document.get(table), dict) else ():
                if name not in known - {"geometry"}:
                    yield f'{origin}, [{table}]: "{name}" is no name of this case. {_choose(name, known - {"geometry"})}'


def _table(entries: Mapping[str, Any], keys: Mapping[str, Key], origin: str, table: str) -> Faults:
    """Missing keys and values of the wrong kind."""
    for name, key in keys.items():
        if name not in entries:
            if key.required:
                yield f'{_place(origin, table)} "{name}" is missing.\nExpected: {key.meaning}.'
        else:
            yield from _value(entries[name], key, f'{_place(origin, table)} "{name}"')


def _closed(entries: Mapping[str, Any], keys: Mapping[str, Key], origin: str, table: str) -> Faults:
    for name in entries:
        if name not in keys:
            yield _unknown(origin, table, name, keys)
    yield from _table(entries, keys, origin, table)


def _open(entries: Mapping[str, Any], key: Key, names: str, origin: str, table: str) -> Faults:
    for name, value in entries.items():
        if not name.isidentifier():
            yield f'{origin}, [{table}]: "{name}" cannot be {names}.\n{A_NAME}'
        else:
            yield from _value(value, key, f'{origin}, [{table}] "{name}"')


def _domain(domain: Mapping[str, Any], origin: str) -> Faults:
    """The coordinate is the key whose name is the user's; its value is a list, which tells it from a mistyped "geometry"."""
    if "geometry" in domain:
        yield from _value(domain["geometry"], schema.GEOMETRY, f'{origin}, [domain] "geometry"')
    others = [name for name in domain if name != "geometry"]
    coordinates = [name for name in others if isinstance(domain[name], list)]
    for name in others:
        if name not in coordinates:
            known = {"geometry", *coordinates}
            expected = "Expected: the coordinate with its two ends, such as x = [0, 1], and geometry."
            yield f'{origin}, [domain]: "{name}" is not a key here. {_choose(name, known)}\n{expected}'
    if len(coordinates) > 1:
        yield f"{origin}, [domain]: {' and '.join(coordinates)} both look like a coordinate.\nExpected: one coordinate with its two ends."
    elif not coordinates and not others:
        yield f"{origin}, [domain]: the coordinate is missing.\nExpected: its name with its two ends, such as x = [0, 1]."
    for name in coordinates:
        ends = domain[name]
        if not name.isidentifier():
            yield f'{origin}, [domain]: "{name}" cannot be a coordinate.\n{A_NAME}'
        if len(ends) != 2:
            yield f'{origin}, [domain] "{name}": {len(ends)} ends.\nExpected: two, each a number or a formula of parameters.'
        for end in ends:
            if _infinite(end):
                yield f'{origin}, [domain] "{name}": an end at infinity is not built yet.\nGive a finite end.'
            else:
                yield from _value(end, Key("formula", "a number or a formula of parameters"), f'{origin}, [domain] "{name}"')


def _schemes(schemes: Mapping[str, Any], origin: str) -> Faults:
    for name, keys in schemes.items():
        if not isinstance(keys, dict):
            yield f'{origin}, [scheme]: "{name}" stands outside a scheme.\nExpected: a table [scheme.NAME] with its formulas.'
        elif not keys:
            yield f"{origin}, [scheme.{name}]: no formula.\nExpected: at least one of {', '.join(schema.SCHEME)}."
        else:
            yield from _closed(keys, schema.SCHEME, origin, f"scheme.{name}")


def _value(value: Any, key: Key, place: str) -> Faults:
    wanted = KINDS[key.kind](value, key)
    if wanted:
        yield f"{place}: {shown(value)} {wanted[0]}.\nExpected: {wanted[1]}."


def _infinite(end: Any) -> bool:
    return (isinstance(end, float) and math.isinf(end)) or (isinstance(end, str) and end.strip().lstrip("+-") == "inf")


def _dicts(value: Any) -> list[dict[str, Any]]:
    return [entry for entry in value if isinstance(entry, dict)] if isinstance(value, list) else []


def _place(origin: str, table: str) -> str:
    return f"{origin}, [{table}]" if table else f"{origin}:"


def _unknown(origin: str, table: str, name: str, keys: Mapping[str, Key]) -> str:
    """A key that is not known here; where it is known elsewhere in the file, that place is named."""
    homes = [home for home, known in {"": schema.TOP, **schema.CLOSED}.items() if name in known and home != table]
    if homes:
        where = f"under [{homes[0]}]" if homes[0] else "above the first table"
        return f'{_place(origin, table)} "{name}" is not a key here. It belongs {where}.'
    return f'{_place(origin, table)} "{name}" is not a key here. {_choose(name, keys)}'


def _choose(name: str, known: Mapping[str, Any] | set[str]) -> str:
    return nearest(name, sorted(known) if isinstance(known, set) else list(known)) if known else "There is none in this case."
