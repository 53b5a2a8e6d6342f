"""The kinds of values that a case file's keys take, and how each is judged."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

from cases.schema import Key

Judgement = tuple[str, str] | None  # what is wrong with it, what was expected


def _text(value: Any, key: Key) -> Judgement:
    if not isinstance(value, str):
        return "is not text", f"{key.meaning}, in quotes"
    return ("is empty", key.meaning) if not value.strip() else None


def _texts(value: Any, key: Key) -> Judgement:
    if not isinstance(value, list):
        return "is not a list", f'{key.meaning}, as a list ["…"]'
    if key.required and not value:
        return "is empty", key.meaning
    wrong = next((item for item in value if _text(item, key)), None)
    return (f"holds {shown(wrong)}", "text in quotes for each") if wrong is not None else None


def _text_or_texts(value: Any, key: Key) -> Judgement:
    if isinstance(value, list):
        return _texts(value, key) if value else ("is empty", key.meaning)
    return _text(value, key)


def _number(value: Any, key: Key) -> Judgement:
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        return "is not a number", f"{key.meaning}, a number without quotes"
    if not _finite(value):
        return "is not finite", f"{key.meaning}, a finite number"
    return _bounds(value, key)


def _whole_number(value: Any, key: Key) -> Judgement:
    if isinstance(value, bool) or not isinstance(value, int):
        return "is not a whole number", f"{key.meaning}, a whole number"
    return _bounds(value, key)


def _bounds(value: float, key: Key) -> Judgement:
    if key.least is not None and value < key.least:
        return "is too small", f"{key.meaning}, at least {key.least:g}"
    if key.most is not None and value > key.most:
        return "is too large", f"{key.meaning}, at most {key.most:.15g}"
    return None


def _formula(value: Any, key: Key) -> Judgement:
    return _text(value, key) if isinstance(value, str) else _number(value, key)


def _choice(value: Any, key: Key) -> Judgement:
    if not isinstance(value, str):
        return "is not text", f"one of {', '.join(key.choices)}"
    return None if value in key.choices else ("is not known", f"{key.meaning}, one of {', '.join(key.choices)}")


def _yes_or_no(value: Any, key: Key) -> Judgement:
    return None if isinstance(value, bool) else ("is neither true nor false", f"{key.meaning}, true or false")


def _range(value: Any, key: Key) -> Judgement:
    if not isinstance(value, list) or len(value) != 2 or any(_number(item, key) for item in value):
        return "is not a range", f"{key.meaning}, two finite numbers such as [0, 10]"
    return None if value[0] < value[1] else ("has its first number not below the second", f"{key.meaning}, [smallest, largest]")


def _term_for_term(value: Any, key: Key) -> Judgement:
    if not isinstance(value, dict) or not value or any(not isinstance(text, str) for text in value.values()):
        return "is not a table of formulas", 'a term for a term, such as {"u^2" = "u[k]*u[k+1]"}'
    return None


def _is_table(value: Any, key: Key) -> Judgement:
    return None if isinstance(value, dict) else ("is not a table", key.meaning)


def _tables(value: Any, key: Key) -> Judgement:
    return None if isinstance(value, list) and all(isinstance(entry, dict) for entry in value) else ("is not a list of tables", key.meaning)


KINDS: Mapping[str, Callable[[Any, Key], Judgement]] = {
    "text": _text,
    "texts": _texts,
    "text or texts": _text_or_texts,
    "number": _number,
    "whole number": _whole_number,
    "formula": _formula,
    "choice": _choice,
    "yes or no": _yes_or_no,
    "range": _range,
    "term for term": _term_for_term,
    "table": _is_table,
    "tables": _tables,
}


def _finite(value: float) -> bool:
    try:
        return math.isfinite(float(value))
    except OverflowError:  # TOML allows whole numbers of any length
        return False


def shown(value: Any) -> str:
    """A value as it stands in the file, shortened."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, dict):
        return "a table"
    if isinstance(value, int) and abs(value) >= 10**15:
        return f"a number of {int(math.log10(abs(value))) + 1} digits"
    text = f'"{value}"' if isinstance(value, str) else str(value)
    return text if len(text) <= 60 else text[:57] + "…"
