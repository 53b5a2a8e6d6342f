"""What a message says about a word that does not belong where it stands: what was expected, and what to do."""

from __future__ import annotations

from collections.abc import Sequence

from bvp.errors import LONGEST_NAME, nearest
from bvp.formula.vocabulary import ONE_ARGUMENT, OPERATORS, TWO_ARGUMENTS
from bvp.formula.words import Word

# What else is in use on paper for functions that are here.
OTHERWISE_CALLED = {
    "ln": "log",
    "arcsin": "asin",
    "arccos": "acos",
    "arctan": "atan",
    "tg": "tan",
    "sh": "sinh",
    "ch": "cosh",
    "th": "tanh",
}
OPERAND = "Expected: a number, a name or a bracket."
Said = tuple[str, str]


def of_unknown_name(name: str, place: str, known: Sequence[str], is_called: bool) -> Said:
    """A name that nothing is known by; `is_called` where a bracket follows."""
    functions = [*ONE_ARGUMENT, *TWO_ARGUMENTS, *(OPERATORS if place == "equation" else ())]
    advice = nearest(name, [*known, *functions] if is_called else known)
    if name in ("e", "E"):
        advice = f"For the base of the natural logarithm write exp(1). {advice}"
    elif is_called and name in OTHERWISE_CALLED:
        advice = f"Write {OTHERWISE_CALLED[name]}(…). {advice}"
    elif is_called and name == "log10":
        advice = f"Write log(…)/log(10). {advice}"
    elif name == "k" and place == "scheme":
        advice = f"k is the index inside square brackets only. {advice}"
    elif name in ("h", "step") and place != "scheme":
        advice = f"The step belongs in schemes, under [scheme]. {advice}"
    return f'"{name[:LONGEST_NAME]}{"…" if len(name) > LONGEST_NAME else ""}" is not known.', advice


def of_word_too_many(word: Word) -> Said:
    """A word where the formula could end."""
    if word.kind in ("number", "name") or (word.kind == "sign" and word.text == "("):
        return "two factors side by side.", 'Write the product with "*", such as 2*u or lam*exp(u).'
    if word.kind == "prime":
        return "a prime that belongs to nothing.", "A prime follows a name, a call or a closing bracket: u', (k*u')', u'(0)."
    if word.text in (")", "]"):
        return f'a "{word.text}" that was never opened.', "Take it away, or open it."
    if word.text == "[":
        return "square brackets that belong to no name.", "They hold an index in a scheme, u[k+1]; for grouping write round ones."
    if word.text == ",":
        return "a comma outside of a function's brackets.", "Decimal fractions have a dot: 0.5."
    return f'"{word.text}" at a place where it means nothing.', OPERAND


def of_missing_operand(word: Word) -> Said:
    """A word where a number, a name or a bracket has to stand."""
    if word.kind == "end":
        return "the formula ends too early.", OPERAND
    if word.kind == "prime" or word.text in ("[", "]"):
        return of_word_too_many(word)
    return f'"{word.text}" where a number, a name or a bracket has to stand.', "Write what is missing before it, or take it away."


def of_unclosed(opening: Word, word: Word, sign: str) -> Said:
    """A word that stands where a bracket could close."""
    if word.kind == "end":
        return f"the bracket opened at column {opening.column + 1} is never closed.", f'Add "{sign}".'
    if word.kind == "sign" and word.text in (")", "]"):
        return f'a "{word.text}" where the bracket opened at column {opening.column + 1} closes with "{sign}".', f'Write "{sign}".'
    if word.kind == "sign" and word.text in ("=", "<", ">", "<=", ">="):
        return f'"{word.text}" inside a bracket.', "It stands between the two sides of the whole formula."
    return of_word_too_many(word)


def of_operator(name: str, place: str) -> Said:
    """laplacian, div or grad outside of an equation."""
    advice = {
        "scheme": "Here write differences of nodal values, such as (u[k+1] - u[k])/h.",
        "condition": "In a condition write a derivative at an end: u'(1).",
        "measure": "In a measure write a derivative at a place: u'(1).",
        "plain": "Here write a formula without derivatives.",
    }
    return f"{name} belongs in equations.", advice[place]


def of_derivative(place: str) -> Said:
    """A prime in a scheme, or in a formula that is no equation."""
    if place == "scheme":
        return "a derivative in a scheme.", "A scheme writes differences, such as (u[k+1] - u[k])/h."
    return "a derivative; those belong in equations, conditions and measures.", "Take the prime away, or write the formula there."


def of_no_place(shown: str, name: str, place: str) -> Said:
    """An unknown by itself in a condition or measure."""
    if place == "condition":
        return f"{shown} without a place.", f"Write {shown}(…) with an end of the domain, such as {shown}(0)."
    return f"{shown} without a place.", f"Write max({name}), mean({name}), {shown}(…) at a place, or the like."


def of_measure(name: str, place: str) -> Said:
    """A measure where none can stand."""
    one = f"{name} of one argument" if name in ("max", "min") else f"{name}(…)"
    where = f"{one} is a measure; measures stand under [trace] and in --when."
    if name == "integral":
        where = "integral(…) belongs in conditions and measures."
    if name in ("max", "min"):
        return where, f"For the {'larger' if name == 'max' else 'smaller'} of two write {name}(a, b)."
    if place == "condition":
        return where, "A condition holds unknowns at an end, u(1), or an integral, integral(u)."
    return where, "Here stand pointwise formulas only."
