"""A typed formula cut into words with their columns; pasted typography is read as meant."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass

from bvp.errors import FormulaError

LONGEST = 4000  # characters; a formula that is longer is no formula on paper
LARGEST_LITERAL = 1e300

PRIMES = {"'": 1, "’": 1, "‘": 1, "′": 1, "´": 1, "″": 2, "”": 2, '"': 2, "‴": 3, "⁗": 4}
SUPERSCRIPTS = {"²": "2", "³": "3", "⁴": "4"}
SAME = {"−": "-", "–": "-", "—": "-", "·": "*", "×": "*", "⋅": "*", "∗": "*", "÷": "/", "∕": "/", "≤": "<=", "≥": ">=", "\u00a0": " ", "\u2009": " "}
SIGNS = ("**", "<=", ">=", "==", "+", "-", "*", "/", "^", "(", ")", "[", "]", ",", "=", "<", ">")
SPOKEN_FOR = {".": "a dot", "@": "an at sign", ";": "a semicolon", ":": "a colon", "{": "a brace", "}": "a brace", "!": "an exclamation mark", "%": "a per cent sign"}


@dataclass(frozen=True)
class Word:
    """kind is number, name, sign, prime or end; `column` counts from 0 in the typed text."""

    kind: str
    text: str
    column: int


def words(text: str, origin: str) -> list[Word]:
    """The words of a formula, closed by one of kind "end"; FormulaError at a character that means nothing."""
    if len(text) > LONGEST:
        raise FormulaError(origin, text, LONGEST, f"the formula has {len(text)} characters; the bound is {LONGEST}.", "Name parts of it under [where].")
    found: list[Word] = []
    column = 0
    while column < len(text):
        character = SAME.get(text[column], text[column])
        if character.isspace():
            column += 1
        elif character.isdigit() and character.isascii() or (character == "." and text[column + 1 : column + 2].isdigit()):
            end = _number_end(text, column)
            literal = text[column:end]
            if abs(float(literal)) > LARGEST_LITERAL:
                raise FormulaError(origin, text, column, f"the number {literal} is too large; the bound is {LARGEST_LITERAL:g}.")
            found.append(Word("number", literal, column))
            column = end
        elif character.isalpha() or character == "_":
            end = column
            while end < len(text) and (text[end].isalnum() or text[end] == "_") and text[end] not in SUPERSCRIPTS:
                end += 1
            found.append(Word("name", unicodedata.normalize("NFC", text[column:end]).replace("µ", "μ"), column))
            column = end
        elif character in PRIMES:
            found += [Word("prime", "'", column)] * PRIMES[character]
            column += 1
        elif character in SUPERSCRIPTS:
            found += [Word("sign", "^", column), Word("number", SUPERSCRIPTS[character], column)]
            column += 1
        else:
            sign = character if len(character) > 1 else next((sign for sign in SIGNS if text.startswith(sign, column)), character)
            if sign not in SIGNS:
                name = SPOKEN_FOR.get(character, f"the character {character!r}")
                raise FormulaError(origin, text, column, f"{name} means nothing in a formula.", "Expected: numbers, names, + - * / ^ and brackets.")
            if sign == "==":
                raise FormulaError(origin, text, column, 'two equals signs; an equation has one "=".', 'Write "=".')
            found.append(Word("sign", "^" if sign == "**" else sign, column))
            column += len(sign) if len(character) == 1 else 1
    found.append(Word("end", "", len(text)))
    return found


def _number_end(text: str, start: int) -> int:
    """Where a decimal number that begins at `start` ends: digits, a dot, digits, an exponent."""

    def digits(at: int) -> int:
        while at < len(text) and text[at].isascii() and text[at].isdigit():
            at += 1
        return at

    end = digits(start)
    if text[end : end + 1] == ".":
        end = digits(end + 1)
    if text[end : end + 1] in ("e", "E"):
        signed = end + 2 if text[end + 1 : end + 2] in ("+", "-", "−") and text[end + 1] != "" else end + 1
        after = digits(signed)
        if after > signed and "−" not in text[end:after]:
            return after
    return end
