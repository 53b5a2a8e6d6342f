"""A typed formula cut into words with their columns; pasted typography is read as meant."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass

from bvp.errors import FormulaError

LONGEST = 4000  # characters; a formula that is longer is no formula on paper
LARGEST_LITERAL = 1e300

PRIMES = {"'": 1, "’": 1, "‘": 1, "′": 1, "´": 1, "ʹ": 1, "ʼ": 1, "″": 2, "”": 2, "“": 2, '"': 2, "ʺ": 2, "‴": 3, "⁗": 4}
SUPERSCRIPTS = dict(zip("⁰¹²³⁴⁵⁶⁷⁸⁹⁻", "0123456789-", strict=True))
SAME = {"−": "-", "–": "-", "—": "-", "‐": "-", "‑": "-", "·": "*", "×": "*", "⋅": "*", "∗": "*", "∙": "*", "•": "*"}
SAME |= {"÷": "/", "∕": "/", "⁄": "/", "≤": "<=", "≥": ">=", "ˆ": "^"}
SIGNS = ("**", "<=", ">=", "==", "+", "-", "*", "/", "^", "(", ")", "[", "]", ",", "=", "<", ">")
SPOKEN_FOR = {".": "a dot", "@": "an at sign", ";": "a semicolon", ":": "a colon", "{": "a brace", "}": "a brace"}
SPOKEN_FOR |= {"!": "an exclamation mark", "%": "a per cent sign"}
INSTEAD = {
    "√": "Write sqrt(…).",
    "∂": "Write u' and u'' for derivatives.",
    "∇": "Write laplacian(u), or div(k*grad(u)).",
    "|": "Write abs(…).",
    "{": "Use round brackets.",
    "}": "Use round brackets.",
    "\\": "Write the formula as plain text, such as lam*exp(u).",
}


@dataclass(frozen=True)
class Word:
    """kind is number, name, sign, prime or end; `column` counts from 0 in the typed text."""

    kind: str
    text: str
    column: int


def normal(name: str) -> str:
    """A name in the one spelling under which it is known: accents put together, the micro sign a Greek mu, variant letters plain."""
    return unicodedata.normalize("NFKC", name)


def is_name(text: str) -> bool:
    """Whether a text is read as one name: a letter or underscore, then letters, digits or underscores."""
    return bool(text) and all(_in_name(character) for character in text) and (text[0].isalpha() or text[0] == "_")


def words(text: str, origin: str) -> list[Word]:
    """The words of a formula, closed by one of kind "end"; FormulaError at a character that means nothing."""
    if len(text) > LONGEST:
        message = f"the formula has {len(text)} characters; the bound is {LONGEST}."
        raise FormulaError(origin, text, LONGEST, message, "Name parts of it under [where].")
    found: list[Word] = []
    column = 0
    while column < len(text):
        character = _meant(text[column])
        if character.isspace():
            column += 1
        elif _is_digit(character) or (character == "." and _is_digit(text[column + 1 : column + 2])):
            end = _number_end(text, column)
            literal = text[column:end].replace("−", "-")
            _check_size(literal, text, column, origin)
            found.append(Word("number", literal, column))
            column = end
        elif character in PRIMES:
            found += [Word("prime", "'", column)] * PRIMES[character]
            column += 1
        elif character in SUPERSCRIPTS:
            end = column
            while text[end : end + 1] in SUPERSCRIPTS:
                end += 1
            found += [Word("sign", "^", column), *_raised(text, column, end, origin)]
            column = end
        elif _in_name(character):
            end = column
            while end < len(text) and _in_name(text[end]):
                end += 1
            found.append(Word("name", normal(text[column:end]), column))
            column = end
        else:
            sign, length = _sign(text, column, character, origin)
            found.append(Word("sign", sign, column))
            column += length
    found.append(Word("end", "", len(text)))
    return found


def _check_size(literal: str, text: str, column: int, origin: str) -> None:
    if float(literal) > LARGEST_LITERAL:
        message = f"the number {literal[:30]} is too large; the bound is {LARGEST_LITERAL:g}."
        raise FormulaError(origin, text, column, message, "Scale the problem.")
    if float(literal) == 0.0 and any(digit in "123456789" for digit in literal.lower().partition("e")[0]):
        message = f"the number {literal[:30]} is too small to be told from 0."
        raise FormulaError(origin, text, column, message, "Scale the problem, or write 0.")


def _meant(character: str) -> str:
    """What a typographic sign stands for: a wide bracket for a bracket, an invisible character for a space."""
    if character in SAME:
        return SAME[character]
    if unicodedata.category(character) == "Cf":
        return " "
    plain = unicodedata.normalize("NFKC", character)
    return plain if len(plain) == 1 and plain.isascii() and not character.isalnum() else character


def _is_digit(character: str) -> bool:
    return character.isascii() and character.isdigit()


def _in_name(character: str) -> bool:
    if character in PRIMES or character in SUPERSCRIPTS or character in SAME:
        return False
    return character.isalpha() or character.isdigit() or character == "_" or unicodedata.combining(character) > 0


def _sign(text: str, column: int, character: str, origin: str) -> tuple[str, int]:
    """The sign that begins at a column, and how many characters it takes."""
    sign = character if len(character) > 1 else next((sign for sign in SIGNS if text.startswith(sign, column)), character)
    if sign == "==":
        raise FormulaError(origin, text, column, 'two equals signs; an equation has one "=".', 'Write "=".')
    if text.startswith(("=>", "=<"), column):
        raise FormulaError(origin, text, column, f'"{text[column : column + 2]}" is no comparison.', f'Write "{text[column + 1]}=".')
    if sign not in SIGNS:
        name = SPOKEN_FOR.get(character, f"the character {character!r}")
        instead = INSTEAD.get(character, "Expected: numbers, names, + - * / ^ and brackets.")
        raise FormulaError(origin, text, column, f"{name} means nothing in a formula.", instead)
    return "^" if sign == "**" else sign, 1 if len(character) > 1 else len(sign)


def _raised(text: str, start: int, end: int, origin: str) -> list[Word]:
    """The exponent written in raised figures: digits, with a minus sign before them or not."""
    exponent = "".join(SUPERSCRIPTS[character] for character in text[start:end])
    digits = exponent.removeprefix("-")
    if not digits.isdigit():
        raise FormulaError(origin, text, start, f"the raised {exponent} is no whole number.", "Write the exponent after ^.")
    column = start + len(exponent) - len(digits)
    minus = [Word("sign", "-", start)] if digits != exponent else []
    return [*minus, Word("number", digits, column)]


def _number_end(text: str, start: int) -> int:
    """Where a decimal number that begins at `start` ends: digits, a dot, digits, an exponent."""

    def digits(at: int) -> int:
        while _is_digit(text[at : at + 1]):
            at += 1
        return at

    end = digits(start)
    if text[end : end + 1] == ".":
        end = digits(end + 1)
    if text[end : end + 1] in ("e", "E"):
        signed = end + 2 if text[end + 1 : end + 2] in ("+", "-", "−") else end + 1
        after = digits(signed)
        if after > signed:
            return after
    return end
