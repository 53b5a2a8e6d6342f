"""The named formulas of a problem, put into each other; and a bound on what formulas may grow to so."""

from __future__ import annotations

from collections.abc import Mapping

from bvp.errors import ProblemError
from bvp.formula import Vocabulary, parse
from bvp.formula.tree import Name, Node, transform

LARGEST_TREE, HIGHEST_TREE = 20_000, 300  # nodes, and levels: what formulas put into formulas may grow to


def bounded(tree: Node, origin: str) -> Node:
    """The tree; ProblemError where [where] formulas put into each other have made it too large."""
    if tree.size > LARGEST_TREE or tree.height > HIGHEST_TREE:
        raise ProblemError(
            f"{origin}, where: the formulas put into each other make one of {tree.size} parts on {tree.height} levels.\n"
            f"The bounds are {LARGEST_TREE} and {HIGHEST_TREE}.\nShorten them, or name less by way of each other."
        )
    return tree


def named_formulas(texts: Mapping[str, str], vocabulary: Vocabulary, origin: str) -> dict[str, Node]:
    """The named formulas, each with those before it put in; a circle among them is an error."""
    raw = {name: parse(str(text), "plain", vocabulary, f"{origin}, where, {name}") for name, text in texts.items()}
    done: dict[str, Node] = {}

    def resolve(name: str, above: tuple[str, ...]) -> Node:
        if name in above:
            raise ProblemError(
                f"{origin}, where: {' needs '.join([*above, name])}, a circle.\n"
                "Expected: formulas that can be worked out one after the other."
            )
        if name not in done:
            put_in = transform(
                raw[name], lambda node: resolve(node.name, (*above, name)) if isinstance(node, Name) and node.name in raw else None
            )
            done[name] = bounded(put_in, origin)
        return done[name]

    return {name: resolve(name, ()) for name in raw}
