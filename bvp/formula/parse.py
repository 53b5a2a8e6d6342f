"""Typed formula to expression tree: one grammar, four places where it stands, each with its own extras.

A construct in the wrong place is an error that names the right one. Depth, length and powers are bounded. Nothing is
ever evaluated: the result is a tree of eight kinds of nodes.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from fractions import Fraction

from bvp.errors import FormulaError, nearest
from bvp.formula.tree import At, Binary, Call, Indexed, Name, Negative, Node, Number, Prime, Relation
from bvp.formula.vocabulary import MEASURES, ONE_ARGUMENT, OPERATORS, TWO_ARGUMENTS, Vocabulary
from bvp.formula.words import Word, words

DEEPEST = 60  # brackets within brackets; also what keeps the parser within Python's own stack
LARGEST_POWER = 64
PLACES = ("equation", "condition", "measure", "scheme", "plain")
STAND_INS = ("u", "x", "f", "h", "step")  # what a scheme may say for any unknown, any coordinate, the part without derivatives, the step
OFFSETS = (Fraction(-1), Fraction(0), Fraction(1))
HALVES = (Fraction(-1, 2), Fraction(1, 2))


def parse(text: str, place: str, vocabulary: Vocabulary, origin: str = "") -> Node:
    """The tree of a formula as it may stand in a place: "equation", "condition", "measure", "scheme" or "plain".

    Raises FormulaError with the formula, a caret under the place, what was expected and what to do.
    """
    if place not in PLACES:
        raise AssertionError(place)
    if not isinstance(text, str):
        raise FormulaError(origin, str(text), 0, f"{text!r} is no formula.", "Expected: text in quotes.")
    return _Parser(text, place, vocabulary, origin).whole()


class _Parser:
    """One formula being read: its words and how far reading has come."""

    def __init__(self, text: str, place: str, vocabulary: Vocabulary, origin: str) -> None:
        self.text, self.place, self.origin = text, place, origin
        self.vocabulary = vocabulary
        self.words = words(text, origin)
        self.position = 0
        self.depth = 0
        self.inside_call = 0

    # -- moving along -----------------------------------------------------------------------------------------------

    @property
    def word(self) -> Word:
        return self.words[self.position]

    def take(self) -> Word:
        word = self.words[self.position]
        self.position += word.kind != "end"
        return word

    def at_sign(self, *signs: str) -> bool:
        return self.word.kind == "sign" and self.word.text in signs

    def error(self, word: Word | int, expected: str, advice: str = "") -> FormulaError:
        column = word if isinstance(word, int) else word.column
        return FormulaError(self.origin, self.text, column, expected, advice)

    # -- the grammar, from the loosest binding to the tightest -------------------------------------------------------

    def whole(self) -> Node:
        if self.word.kind == "end":
            raise self.error(0, "the formula is empty.", "Write it, or leave the key out.")
        tree = self.sum()
        if self.at_sign("=", "<", ">", "<=", ">="):
            sign = self.take()
            self.check_relation(sign)
            tree = Relation(sign.text, tree, self.sum(), sign.column)
            if self.at_sign("=", "<", ">", "<=", ">="):
                raise self.error(self.word, f'a second "{self.word.text}".', "Expected: one, between two sides.")
        if self.word.kind != "end":
            raise self.unexpected(self.word)
        return tree

    def check_relation(self, sign: Word) -> None:
        if self.place == "plain":
            raise self.error(sign, f'"{sign.text}" where a value is asked for.', "Expected: a formula without it.")
        if sign.text != "=" and self.place != "measure":
            raise self.error(sign, f'a comparison "{sign.text}" stands only in a measure, such as until = "max(u) > 20".', 'Write "=".')

    def unexpected(self, word: Word) -> FormulaError:
        if word.kind in ("number", "name") or (word.kind == "sign" and word.text == "("):
            return self.error(word, "two factors side by side.", 'Write the product with "*", such as 2*u or lam*exp(u).')
        if word.kind == "prime":
            return self.error(word, "a prime that belongs to nothing.", "A prime follows a name, a call or a closing bracket: u', (k*u')'.")
        if word.kind == "sign" and word.text in ")]":
            return self.error(word, f'a "{word.text}" that was never opened.', "Take it away, or open it.")
        if word.kind == "sign" and word.text == "[":
            return self.error(word, "square brackets that belong to no name.", "They hold an index in a scheme: u[k+1].")
        if word.kind == "end":
            return self.error(word, "the formula ends too early.", "Expected: a number, a name or a bracket.")
        return self.error(word, f'"{word.text}" at a place where it means nothing.', "Expected: a number, a name or a bracket.")

    def sum(self) -> Node:
        self.deeper()
        tree = self.product()
        while self.at_sign("+", "-"):
            sign = self.take()
            tree = Binary(sign.text, tree, self.product(), sign.column)
        self.depth -= 1
        return tree

    def deeper(self) -> None:
        self.depth += 1
        if self.depth > DEEPEST:
            raise self.error(self.word, f"more than {DEEPEST} brackets within brackets; that is the bound.", "Name parts of the formula under [where].")

    def product(self) -> Node:
        tree = self.signed()
        while self.at_sign("*", "/"):
            sign = self.take()
            tree = Binary(sign.text, tree, self.signed(), sign.column)
        return tree

    def signed(self) -> Node:
        minus: list[Word] = []
        while self.at_sign("+", "-"):
            sign = self.take()
            if sign.text == "-":
                minus.append(sign)
            if len(minus) > DEEPEST:
                raise self.error(sign, f"more than {DEEPEST} signs in a row; that is the bound.")
        tree = self.power()
        for sign in reversed(minus):
            tree = Negative(tree, sign.column)
        return tree

    def power(self) -> Node:
        base = self.primed()
        if not self.at_sign("^"):
            return base
        sign = self.take()
        self.deeper()
        exponent = self.signed()
        self.depth -= 1
        value = _constant(exponent)
        if value is not None and not abs(value) <= LARGEST_POWER:
            raise self.error(sign.column, f"the power {value:g} is beyond {LARGEST_POWER}, the bound.", "Write exp(…) or a parameter for steep functions.")
        return Binary("^", base, exponent, sign.column)

    def primed(self) -> Node:
        tree, may_prime = self.atom()
        first = self.word
        order = 0
        while self.word.kind == "prime":
            self.take()
            order += 1
        if order == 0:
            return self.located(tree)
        if not may_prime:
            raise self.error(first, "a prime on a number.", "A prime follows a name, a call or a closing bracket.")
        return self.differentiated(tree, order, first)

    def differentiated(self, tree: Node, order: int, first: Word) -> Node:
        vocabulary = self.vocabulary
        if isinstance(tree, Name) and tree.name in (*vocabulary.measured, *vocabulary.functions):
            return self.called(tree, order)
        if self.place in ("scheme", "plain") and not isinstance(tree, Call):
            right = "a scheme writes differences, such as (u[k+1] - u[k])/h" if self.place == "scheme" else "derivatives belong in equations and conditions"
            raise self.error(first, f"a derivative; {right}.")
        if self.place in ("condition", "measure"):
            if not (isinstance(tree, Name) and tree.name in vocabulary.unknowns):
                raise self.error(first, f"a prime in a {self.place} follows an unknown, such as u'(1).", "Write the derivative of the unknown there.")
            if order > 1 and self.place == "condition" and order > 3:
                raise self.error(first, f"a derivative of order {order} in a condition.", "Expected: an order below that of the equation.")
        if isinstance(tree, Name) and tree.name in vocabulary.parameters:
            raise self.error(first, f"{tree.name} is a parameter; its derivative along {vocabulary.coordinate} is 0.", "Take the prime away.")
        return self.located(Prime(tree, order, first.column))

    def located(self, tree: Node) -> Node:
        """u(0), u'(1): an unknown followed by a bracket holds a place."""
        inside = tree.operand if isinstance(tree, Prime) else tree
        if not (self.at_sign("(") and isinstance(inside, Name) and inside.name in self.vocabulary.unknowns):
            return tree
        opening = self.take()
        shown = inside.name + "'" * (tree.order if isinstance(tree, Prime) else 0)
        if self.place not in ("condition", "measure"):
            raise self.error(
                opening,
                f"{shown}(…) is {shown} at a place, which belongs in conditions and measures.",
                f'In an equation write {shown} for the function; for a product write "*".',
            )
        location = self.sum()
        self.close(opening, ")")
        return At(tree, location, tree.place)

    def close(self, opening: Word, sign: str) -> None:
        if not self.at_sign(sign):
            if self.word.kind == "end":
                raise self.error(opening, f'the bracket opened at column {opening.column + 1} is never closed.', f'Add "{sign}".')
            raise self.unexpected(self.word)
        self.take()

    def atom(self) -> tuple[Node, bool]:
        word = self.take()
        if word.kind == "number":
            return Number(float(word.text), word.column), False
        if word.kind == "sign" and word.text == "(":
            tree = self.sum()
            self.close(word, ")")
            return tree, True
        if word.kind == "name":
            return self.named(word), True
        raise self.unexpected(word)

    # -- names ------------------------------------------------------------------------------------------------------

    def named(self, word: Word) -> Node:
        name, vocabulary = word.text, self.vocabulary
        if name == "pi":
            return Number(math.pi, word.column)
        if self.at_sign("["):
            return self.indexed(word)
        if name in (*ONE_ARGUMENT, *TWO_ARGUMENTS, *OPERATORS, *MEASURES):
            return self.function(word)
        if name in (*vocabulary.measured, *vocabulary.functions):
            tree = Name(name, word.column)
            if self.word.kind == "prime":
                return tree
            return self.called(tree, 0)
        known = self.known_names()
        if name not in known:
            advice = nearest(name, known)
            if name in ("e", "E"):
                advice = "For the base of the natural logarithm write exp(1). " + advice
            elif name == "k" and self.place == "scheme":
                advice = "k is the index inside square brackets only. " + advice
            raise self.error(word, f'"{name}" is not known.', advice)
        return Name(name, word.column)

    def known_names(self) -> list[str]:
        vocabulary = self.vocabulary
        known = [*vocabulary.unknowns, vocabulary.coordinate, *vocabulary.parameters, *vocabulary.where, *vocabulary.numbers]
        if self.place == "scheme":
            known += [name for name in ("h", "step") if name not in known]
            known += [name for name in ("u", "x", "f") if name not in known]
        return known

    def indexed(self, word: Word) -> Node:
        opening = self.take()
        if self.place != "scheme":
            raise self.error(opening, "an index in square brackets; those belong in schemes, under [scheme].", f"Here write {word.text} for the function itself.")
        vocabulary = self.vocabulary
        known = [*dict.fromkeys([*vocabulary.unknowns, vocabulary.coordinate, "u", "x", "f"])]
        if word.text not in known:
            raise self.error(word, f'"{word.text}" has no nodal values.', nearest(word.text, known))
        offset = self.offset()
        self.close(opening, "]")
        half = offset.denominator == 2
        is_coordinate = word.text == vocabulary.coordinate or (word.text == "x" and "x" not in (*vocabulary.unknowns, *vocabulary.parameters))
        if half and not is_coordinate:
            raise self.error(word, f"{word.text} has no value half way between nodes.", f"Only the coordinate has: {vocabulary.coordinate}[k+1/2]. Write ({word.text}[k] + {word.text}[k+1])/2.")
        if offset not in (OFFSETS + HALVES):
            raise self.error(word, f"the node k{'+' * (offset > 0)}{offset} is out of reach.", "A scheme has the nodes k-1, k and k+1.")
        return Indexed(word.text, offset, word.column)

    def offset(self) -> Fraction:
        """k, k+1, k-1/2: what stands between square brackets."""
        word = self.take()
        if word.kind != "name" or word.text != "k":
            raise self.error(word, "an index that does not begin with k.", "Expected: k-1, k, k+1, and k-1/2, k+1/2 for the coordinate.")
        if not self.at_sign("+", "-"):
            return Fraction(0)
        sign = -1 if self.take().text == "-" else 1
        above = self.whole_number()
        if self.at_sign("/"):
            self.take()
            below = self.whole_number()
            if below != 2:
                raise self.error(self.words[self.position - 1], f"a fraction of {below} in an index.", "Expected: halves, as in k+1/2.")
            return sign * Fraction(above, below)
        return Fraction(sign * above)

    def whole_number(self) -> int:
        word = self.take()
        if word.kind != "number" or not word.text.isdigit():
            raise self.error(word, "an index that is no whole number.", "Expected: k-1, k, k+1, and k-1/2, k+1/2 for the coordinate.")
        return int(word.text)

    # -- functions --------------------------------------------------------------------------------------------------

    def arguments(self, word: Word) -> list[Node]:
        if not self.at_sign("("):
            raise self.error(self.word, f"{word.text} without its bracket.", f"Write {word.text}(…).")
        opening = self.take()
        found = [self.sum()]
        while self.at_sign(","):
            self.take()
            found.append(self.sum())
        self.close(opening, ")")
        return found

    def function(self, word: Word) -> Node:
        name = word.text
        if name in OPERATORS and self.place != "equation":
            raise self.error(word, f"{name} belongs in equations.", "Here write differences of nodal values." if self.place == "scheme" else "")
        is_measure = name in MEASURES
        if name in ("mean", "rms") and self.place != "measure":
            raise self.error(word, f"{name}(…) is a measure; measures stand under [trace] and in --when.", "In an equation only pointwise formulas stand.")
        if name == "integral" and self.place not in ("measure", "condition"):
            raise self.error(word, "integral(…) belongs in conditions and measures.", "In an equation only pointwise formulas stand.")
        inside = self.arguments(word)
        if name in ("max", "min") and len(inside) == 1 and self.place != "measure":
            raise self.error(word, f"{name} of one argument is a measure; measures stand under [trace] and in --when.", f"For the {'larger' if name == 'max' else 'smaller'} of two write {name}(a, b).")
        expected = (1, 2) if name in ("max", "min") and is_measure and self.place == "measure" else (2,) if name in TWO_ARGUMENTS else (1,)
        if len(inside) not in expected:
            raise self.error(word, f"{name} takes {expected[0]} argument{'s' * (expected[0] > 1)}, not {len(inside)}.")
        return Call(name, tuple(inside), (), word.column)

    def called(self, tree: Name, order: int) -> Node:
        word = Word("name", tree.name, tree.place)
        if not self.at_sign("("):
            raise self.error(word, f"{tree.name} is a function and needs its argument.", f"Write {tree.name}(…).")
        inside = self.arguments(word)
        expected = self.vocabulary.functions.get(tree.name, 1)
        if len(inside) != expected:
            raise self.error(word, f"{tree.name} takes {expected} argument{'s' * (expected > 1)}, not {len(inside)}.")
        if order and expected != 1:
            raise self.error(word, f"a prime on {tree.name}, a function of {expected} arguments.", "Give its derivatives beside it.")
        return Call(tree.name, tuple(inside), (order,) if order else (), tree.place)


def _constant(tree: Node) -> float | None:
    """The value of a formula of numbers alone, None where it holds a name; not finite where it overflows."""
    if isinstance(tree, Number):
        return tree.value
    if isinstance(tree, Negative):
        inside = _constant(tree.operand)
        return None if inside is None else -inside
    if isinstance(tree, Binary):
        left, right = _constant(tree.left), _constant(tree.right)
        if left is None or right is None:
            return None
        try:
            return {"+": lambda: left + right, "-": lambda: left - right, "*": lambda: left * right, "/": lambda: left / right, "^": lambda: float(left**right)}[tree.operator]()
        except (ZeroDivisionError, OverflowError, TypeError):
            return math.inf
    return None


def parse_all(texts: Sequence[str], place: str, vocabulary: Vocabulary, origin: str = "") -> list[Node]:
    """Several formulas, numbered from 1 in their messages."""
    return [parse(text, place, vocabulary, f"{origin}, {number}" if origin else str(number)) for number, text in enumerate(texts, start=1)]
