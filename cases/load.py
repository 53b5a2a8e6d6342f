"""From a bundled case's name or a path to a TOML file to a frozen case; the file is read as data and never run."""

from __future__ import annotations

import math
import tomllib
from collections.abc import Iterator, Mapping
from decimal import Decimal
from pathlib import Path
from typing import Any

from bvp.errors import InputError, nearest
from cases import schema
from cases.case import Case, Discretization, PublishedValue, TraceQuestion
from cases.faults import faults

CATALOGUE = Path(__file__).parent / "catalogue"
MOST_BYTES = 1_000_000  # of a case file; the largest bundled one has three thousand
MOST_DEPTH = 100  # of brackets: tomllib recurses into arrays and inline tables


def bundled_names() -> list[str]:
    """The names of the bundled cases, sorted."""
    return sorted(path.stem for path in CATALOGUE.glob("*.toml"))


def bundled_titles() -> Iterator[tuple[str, str]]:
    """Name and title of each bundled case."""
    for name in bundled_names():
        yield name, tomllib.loads((CATALOGUE / f"{name}.toml").read_text(encoding="utf-8"))["title"]


def load(name_or_path: str) -> Case:
    """The case of a bundled name or of a path; InputError with the first thing that is wrong with it."""
    name, path = located(name_or_path)
    text = read_text(path)
    document = document_of(text, path.name)
    for fault in faults(document, path.name):
        raise InputError(fault)
    return case_of(document, name, path, text)


def located(name_or_path: str) -> tuple[str, Path]:
    """The case's name and the file it stands in."""
    looks_like_path = name_or_path.endswith(".toml") or "/" in name_or_path or "\\" in name_or_path
    path = CATALOGUE / f"{name_or_path}.toml"
    if not looks_like_path and path.is_file():
        return name_or_path, path
    path = Path(name_or_path)
    if looks_like_path or path.is_file():
        return path.stem or name_or_path, path
    if name_or_path and path.is_dir():
        raise InputError(f"{name_or_path} is a folder.\nExpected: the name of a bundled case, or a path to a TOML file.")
    near = nearest(name_or_path, bundled_names())
    raise InputError(f'"{name_or_path}" is no bundled case and no file. {near}\nA case file of your own is given by its path.')


def read_text(path: Path) -> str:
    """The text of a case file; InputError where it is missing, a folder, unreadable, too large or not UTF-8."""
    try:
        with path.open("rb") as file:
            data = file.read(MOST_BYTES + 1)
    except FileNotFoundError:
        raise InputError(
            f"there is no file {path}.\nExpected: a path to a TOML file, or the name of a bundled case (hairpin list)."
        ) from None
    except IsADirectoryError:
        raise InputError(f"{path} is a folder.\nExpected: a path to a TOML file.") from None
    except PermissionError:
        raise InputError(f"{path} may not be read: no permission.") from None
    except (OSError, ValueError) as error:  # ValueError: a null character in the path
        raise InputError(f"{path} cannot be read: {getattr(error, 'strerror', None) or error}.") from None
    if len(data) > MOST_BYTES:
        raise InputError(f"{path} holds more than {MOST_BYTES} bytes.\nExpected: a case file, which has a few thousand.")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        raise InputError(f"{path}, line {line}: not UTF-8.\nExpected: a text file in UTF-8.") from None


def document_of(text: str, origin: str) -> dict[str, Any]:
    """The tables of a TOML text; InputError where it is none."""
    depth = deepest = 0
    for character in text:  # an upper bound, since brackets in strings count too; they hardly nest
        depth += (character in "[{") - (character in "]}")
        deepest = max(deepest, depth)
    if deepest > MOST_DEPTH:
        raise InputError(f"{origin}: brackets stand {deepest} deep.\nExpected: at most {MOST_DEPTH}.")
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise InputError(f"{origin} is not TOML: {error}.\nhairpin show slab --toml prints a file to start from.") from None
    except (ValueError, RecursionError) as error:  # a date that is none, a whole number too long for Python
        raise InputError(f"{origin} cannot be read as TOML: {error}.") from None


def case_of(document: Mapping[str, Any], name: str, path: Path, text: str) -> Case:
    """The record of a document without faults, defaults filled in."""
    domain = document["domain"]
    coordinate = next(key for key in domain if key != "geometry")
    parameters = {key: float(value) for key, value in document.get("parameters", {}).items()}
    return Case(
        name=name,
        origin=path.name,
        folder=path.parent,
        text=text,
        title=document["title"].strip(),
        about=document.get("about", "").strip(),
        caution=document.get("caution", "").strip(),
        unknowns=tuple(document["unknowns"]),
        equations=tuple(document["equations"]),
        conditions=tuple(document.get("conditions", ())),
        coordinate=coordinate,
        ends=(_end(domain[coordinate][0]), _end(domain[coordinate][1])),
        geometry=domain.get("geometry", schema.GEOMETRY.default),
        parameters=parameters,
        where=_formulas(document.get("where", {})),
        measured=dict(document.get("measured", {})),
        initial_guess=_formulas(document.get("initial_guess", {})),
        units=dict(document.get("units", {})),
        labels=dict(document.get("labels", {})),
        trace=_question(document.get("trace", {}), document["unknowns"], parameters),
        discretization=Discretization(**_filled(document.get("discretization", {}), schema.DISCRETIZATION)),
        schemes={key: dict(value) for key, value in document.get("scheme", {}).items()},
        published=tuple(_published(entry) for entry in document.get("published", ())),
    )


def _question(table: Mapping[str, Any], unknowns: list[str], parameters: Mapping[str, float]) -> TraceQuestion:
    values = _filled(table, schema.TRACE)
    measure = values["measure"]
    values["measure"] = (measure,) if isinstance(measure, str) else tuple(dict.fromkeys(measure or [f"max({unknowns[0]})"]))
    values["along"] = values["along"] or next(iter(parameters), None)
    values["start"] = None if values["start"] is None else float(values["start"])
    values["within"] = None if values["within"] is None else (float(values["within"][0]), float(values["within"][1]))
    return TraceQuestion(**values)


def _published(entry: Mapping[str, Any]) -> PublishedValue:
    value = float(entry["value"])
    uncertainty = float(entry["uncertainty"]) if "uncertainty" in entry else half_of_last_digit(value)
    return PublishedValue(entry["quantity"].strip(), value, uncertainty, entry["source"].strip())


def half_of_last_digit(value: float) -> float:
    """Half a unit of the last digit with which a number was given: 0.005 for 0.88, 0 for a whole number (it is exact)."""
    exponent = Decimal(repr(value)).as_tuple().exponent
    if value == math.floor(value) or not isinstance(exponent, int):
        return 0.0
    return 0.5 * 10.0**exponent


def _filled(table: Mapping[str, Any], keys: Mapping[str, schema.Key]) -> dict[str, Any]:
    return {name: table.get(name, key.default) for name, key in keys.items()}


def _end(value: float | str) -> float | str:
    return value if isinstance(value, str) else float(value)


def _formulas(table: Mapping[str, Any]) -> dict[str, str]:
    return {name: value if isinstance(value, str) else repr(value) for name, value in table.items()}
