"""Where unknowns may stand in conditions and measures: at a place, or inside a measure."""

from __future__ import annotations

from bvp.formula import advice
from bvp.formula.reader import Reader
from bvp.formula.tree import At, Call, Name, Node, Prime, walk
from bvp.formula.vocabulary import MEASURES


def is_measure(node: Node) -> bool:
    """max(F), min(F), mean(F), rms(F) or integral(F): a number made of a whole profile."""
    return isinstance(node, Call) and node.function in MEASURES and len(node.arguments) == 1


def check_places(tree: Node, reader: Reader) -> None:
    """FormulaError where an unknown stands by itself, or one value of a whole profile inside another."""
    if isinstance(tree, At):
        return
    if isinstance(tree, Call) and is_measure(tree):
        for node in walk(tree):
            if node is not tree and (isinstance(node, At) or is_measure(node)):
                message = f"one value of the whole profile inside {tree.function}(…)."
                raise reader.error(node.place, message, "Expected: a formula of the unknowns there.")
        return
    name = tree.operand if isinstance(tree, Prime) else tree
    if isinstance(name, Name) and name.name in (*reader.vocabulary.unknowns, reader.vocabulary.coordinate):
        if name.name == reader.vocabulary.coordinate:
            message = f"{name.name} in a {reader.place}, which is about values at places."
            raise reader.error(name.place, message, "Write the place itself, a number or a formula of parameters.")
        primes = "'" * (tree.order if isinstance(tree, Prime) else 0)
        raise reader.error(name.place, *advice.of_no_place(name.name + primes, name.name, reader.place))
    for part in tree.parts:
        check_places(part, reader)


def check_location(location: Node, shown: str, reader: Reader) -> None:
    """FormulaError where the brackets of u(…) hold something that is no place."""
    for node in walk(location):
        if isinstance(node, Name) and node.name in (*reader.vocabulary.unknowns, reader.vocabulary.coordinate):
            message = f"{node.name} inside the brackets of {shown}(…), which hold a place."
            raise reader.error(node.place, message, f"A place is a number or a formula of parameters: {shown}(0).")
