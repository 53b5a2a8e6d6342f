"""Typed formula to expression tree: one grammar, five places where it stands, each with its own extras.

A construct in the wrong place is an error that names the right one. Depth, length and powers are bounded. Nothing
typed ever runs: the result is a tree of nine kinds of nodes.
"""

from __future__ import annotations

import math
from fractions import Fraction

from bvp.errors import FormulaError, nearest
from bvp.formula import advice
from bvp.formula.evaluate import evaluate, float_functions
from bvp.formula.places import check_location, check_places
from bvp.formula.reader import DEEPEST, Reader
from bvp.formula.tree import At, Binary, Call, Indexed, Name, Negative, Node, Number, Prime, Relation, walk
from bvp.formula.vocabulary import CONSTANTS, MEASURES, ONE_ARGUMENT, OPERATORS, TWO_ARGUMENTS, Vocabulary
from bvp.formula.words import Word

LARGEST_POWER = 64
MOST_PRIMES = 8
PLACES = ("equation", "condition", "measure", "scheme", "plain")
STAND_INS = ("u", "x", "f")  # what a scheme may say for any unknown, any coordinate, the part without derivatives; each at a node
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


class _Parser(Reader):
    """One formula being read by the grammar."""

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
            raise self.error(self.word, *advice.of_word_too_many(self.word))
        if self.place in ("condition", "measure"):
            check_places(tree, self)
        return tree

    def check_relation(self, sign: Word) -> None:
        if self.place == "plain":
            raise self.error(sign, f'"{sign.text}" where a value is asked for.', "Expected: a formula without it.")
        if sign.text != "=" and self.place != "measure":
            message = f'a comparison "{sign.text}" stands only in a measure, such as until = "max(u) > 20".'
            raise self.error(sign, message, 'Write "=".')

    def sum(self) -> Node:
        self.deeper()
        tree = self.product()
        while self.at_sign("+", "-"):
            sign = self.take()
            tree = self.bounded(Binary(sign.text, tree, self.product(), sign.column))
        self.depth -= 1
        return tree

    def product(self) -> Node:
        tree = self.signed()
        while self.at_sign("*", "/"):
            sign = self.take()
            tree = self.bounded(Binary(sign.text, tree, self.signed(), sign.column))
        return tree

    def signed(self) -> Node:
        minus: list[Word] = []
        while self.at_sign("+", "-"):
            sign = self.take()
            if sign.text == "-":
                minus.append(sign)
            if len(minus) > DEEPEST:
                raise self.error(sign, f"more than {DEEPEST} signs in a row; that is the bound.", "Write one.")
        tree = self.power()
        for sign in reversed(minus):
            tree = self.bounded(Negative(tree, sign.column))
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
            message = f"the power {value:g} is beyond {LARGEST_POWER}, the bound."
            raise self.error(sign, message, "Write exp(…) or a parameter for steep functions.")
        return self.bounded(Binary("^", base, exponent, sign.column))

    def primed(self) -> Node:
        tree, may_prime = self.atom()
        first, order = self.word, self.primes()
        if order and isinstance(tree, Name) and tree.name in (*self.vocabulary.measured, *self.vocabulary.functions):
            tree = self.called(tree, order)
            first, order = self.word, self.primes()
        if order == 0:
            return self.located(tree)
        if not may_prime or isinstance(tree, Number):
            raise self.error(first, "a prime on a number.", "A prime follows a name, a call or a closing bracket.")
        return self.differentiated(tree, order, first)

    def primes(self) -> int:
        first, order = self.word, 0
        while self.word.kind == "prime":
            self.take()
            order += 1
        if order > MOST_PRIMES:
            raise self.error(first, f"{order} primes; the bound is {MOST_PRIMES}.", "Split the equation into several of lower order.")
        return order

    def differentiated(self, tree: Node, order: int, first: Word) -> Node:
        vocabulary = self.vocabulary
        if self.place in ("scheme", "plain"):
            raise self.error(first, *advice.of_derivative(self.place))
        if self.place in ("condition", "measure") and not (isinstance(tree, Name) and tree.name in vocabulary.unknowns):
            message = f"a prime in a {self.place} follows an unknown, such as u'(1)."
            raise self.error(first, message, "Write the derivative of the unknown there.")
        if isinstance(tree, Name) and tree.name in (*vocabulary.parameters, *vocabulary.numbers):
            message = f"{tree.name} is a number; its derivative along {vocabulary.coordinate} is 0."
            raise self.error(first, message, "Take the prime away.")
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
        check_location(location, shown, self)
        if self.word.kind == "prime":
            message = f"a prime behind a place; {shown} at a place is a number."
            raise self.error(self.word, message, f"Write {inside.name}'(…) for the derivative there.")
        return At(tree, location, inside.place)

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
        raise self.error(word, *advice.of_missing_operand(word))

    # -- names ------------------------------------------------------------------------------------------------------

    def named(self, word: Word) -> Node:
        name, vocabulary = word.text, self.vocabulary
        if name in CONSTANTS:
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
        fixed = [*vocabulary.parameters, *vocabulary.where, *vocabulary.numbers]
        nodal = [vocabulary.coordinate, *vocabulary.unknowns]
        if self.place == "scheme" and name not in fixed and name in (*nodal, *STAND_INS):
            message = f"A scheme holds values at nodes: {name}[k-1], {name}[k], {name}[k+1]."
            raise self.error(word, f"{name} without its node.", message)
        known = [*nodal, *fixed, *(("h", "step") if self.place == "scheme" else ())]
        if name not in known:
            known += [*vocabulary.measured, *vocabulary.functions]
            raise self.error(word, *advice.of_unknown_name(name, self.place, known, self.at_sign("(")))
        if name in vocabulary.where and self.at_sign("("):
            message = f"{name} is a formula under [where], not a function."
            raise self.error(self.word, message, f'Write {name} by itself; for a product write "*".')
        return Name(name, word.column)

    def indexed(self, word: Word) -> Node:
        opening = self.take()
        if self.place != "scheme":
            message = "an index in square brackets; those belong in schemes, under [scheme]."
            raise self.error(opening, message, f"Here write {word.text} for the function itself.")
        vocabulary = self.vocabulary
        known = [*dict.fromkeys([*vocabulary.unknowns, vocabulary.coordinate, *STAND_INS])]
        if word.text not in known:
            raise self.error(word, f'"{word.text}" has no nodal values.', nearest(word.text, known))
        offset = self.offset()
        self.close(opening, "]")
        half = offset.denominator == 2
        is_coordinate = word.text == vocabulary.coordinate or (
            word.text == "x" and "x" not in (*vocabulary.unknowns, *vocabulary.parameters)
        )
        if half and not is_coordinate:
            instead = f"Only the coordinate has: {vocabulary.coordinate}[k+1/2]. Write ({word.text}[k] + {word.text}[k+1])/2."
            raise self.error(word, f"{word.text} has no value half way between nodes.", instead)
        if offset not in (OFFSETS + HALVES):
            raise self.error(word, f"the node k{'+' * (offset > 0)}{offset} is out of reach.", "A scheme has the nodes k-1, k and k+1.")
        return Indexed(word.text, offset, word.column)

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
            raise self.error(word, *advice.of_operator(name, self.place))
        can_measure = self.place == "measure" or (self.place == "condition" and name == "integral")
        if name in MEASURES and name not in TWO_ARGUMENTS and not can_measure:
            raise self.error(word, *advice.of_measure(name, self.place))
        inside = self.arguments(word)
        if name in ("max", "min") and len(inside) == 1 and not can_measure:
            raise self.error(word, *advice.of_measure(name, self.place))
        expected = (1,) if name not in TWO_ARGUMENTS else (1, 2) if can_measure else (2,)
        if len(inside) not in expected:
            wanted = f"{' or '.join(map(str, expected))} argument{'s' * (expected[-1] > 1)}"
            instead = f"Write {name}({'a, b' if name in TWO_ARGUMENTS else '…'})."
            raise self.error(word, f"{name} takes {wanted}, not {len(inside)}.", instead)
        return Call(name, tuple(inside), (), word.column)

    def called(self, tree: Name, order: int) -> Node:
        word = Word("name", tree.name, tree.place)
        if not self.at_sign("("):
            raise self.error(word, f"{tree.name} is a function and needs its argument.", f"Write {tree.name}(…).")
        inside = self.arguments(word)
        expected = self.vocabulary.functions.get(tree.name, 1)
        if len(inside) != expected:
            instead = f"Write {tree.name}({', '.join(['…'] * expected)})."
            raise self.error(word, f"{tree.name} takes {expected} argument{'s' * (expected > 1)}, not {len(inside)}.", instead)
        if order and expected != 1:
            raise self.error(word, f"a prime on {tree.name}, a function of {expected} arguments.", "Give its derivatives beside it.")
        return Call(tree.name, tuple(inside), (order,) if order else (), tree.place)


def _constant(tree: Node) -> float | None:
    """The value of a formula of numbers alone, None where it holds a name; not finite where it overflows."""
    if all(isinstance(node, Number) for node in walk(tree) if not node.parts):
        return float(evaluate(tree, lambda leaf: math.nan, float_functions()))
    return None
