"""A formula being read: its words, how far reading has come, and the errors that show the place."""

from __future__ import annotations

from fractions import Fraction

from bvp.errors import FormulaError
from bvp.formula import advice
from bvp.formula.tree import Node
from bvp.formula.vocabulary import Vocabulary
from bvp.formula.words import Word, words

DEEPEST = 60  # brackets or powers within each other; also what keeps the parser within Python's own stack
HIGHEST = 150  # operations one after another, as in a long sum, or within each other
SHORTER = "Name parts of the formula under [where]."


class Reader:
    """The words of one formula, read from the first to the last."""

    def __init__(self, text: str, place: str, vocabulary: Vocabulary, origin: str) -> None:
        self.text, self.place, self.origin = text, place, origin
        self.vocabulary = vocabulary
        own = vocabulary.own_spelling()
        self.words = [Word(word.kind, own.get(word.text, word.text), word.column) for word in words(text, origin)]
        self.position = 0
        self.depth = 0

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

    def deeper(self) -> None:
        self.depth += 1
        if self.depth > DEEPEST:
            raise self.error(self.word, f"more than {DEEPEST} brackets or powers within each other; that is the bound.", SHORTER)

    def bounded(self, tree: Node) -> Node:
        if tree.height > HIGHEST:
            raise self.error(tree.place, f"more than {HIGHEST} operations one after another; that is the bound.", SHORTER)
        return tree

    def close(self, opening: Word, sign: str) -> None:
        if not self.at_sign(sign):
            raise self.error(opening if self.word.kind == "end" else self.word, *advice.of_unclosed(opening, self.word, sign))
        self.take()

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
