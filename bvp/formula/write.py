"""A tree back to the notation of paper, with as few brackets as it takes to be read as the same tree."""

from __future__ import annotations

from bvp.formula.tree import At, Binary, Call, Indexed, Name, Negative, Node, Number, Prime, Relation

SUM, PRODUCT, SIGNED, POWER, ATOM = range(5)
TIGHTNESS = {"+": SUM, "-": SUM, "*": PRODUCT, "/": PRODUCT, "^": POWER}


def write(tree: Node) -> str:
    """The formula of a tree; `parse(write(tree))` gives the tree again."""
    return _written(tree)[0]


def _written(tree: Node) -> tuple[str, int]:
    """The text, and how tightly its outermost operation binds."""
    if isinstance(tree, Number):
        text = repr(tree.value)
        return (text.removesuffix(".0"), ATOM) if tree.value >= 0 else (text.removesuffix(".0"), SIGNED)
    if isinstance(tree, Name):
        return tree.name.removeprefix("#"), ATOM
    if isinstance(tree, Indexed):
        offset = tree.offset
        shift = "" if offset == 0 else f"+{offset}" if offset > 0 else str(offset)
        return f"{tree.name.removeprefix('#')}[k{shift}]", ATOM
    if isinstance(tree, Negative):
        return f"-{_bracketed(tree.operand, SIGNED)}", SIGNED
    if isinstance(tree, Call):
        return f"{tree.function}{chr(39) * sum(tree.orders)}({', '.join(write(part) for part in tree.arguments)})", ATOM
    if isinstance(tree, Prime):
        inside = tree.operand
        plain = isinstance(inside, (Name, Call, At))
        return (write(inside) if plain else f"({write(inside)})") + "'" * tree.order, ATOM
    if isinstance(tree, At):
        return f"{write(tree.operand)}({write(tree.location)})", ATOM
    if isinstance(tree, Relation):
        return f"{write(tree.left)} {tree.sign} {write(tree.right)}", SUM
    assert isinstance(tree, Binary)
    tight = TIGHTNESS[tree.operator]
    if tree.operator == "^":
        return f"{_bracketed(tree.left, ATOM)}^{_bracketed(tree.right, SIGNED)}", POWER
    left = _bracketed(tree.left, tight)
    right = _bracketed(tree.right, tight + 1)
    spaced = f" {tree.operator} " if tight == SUM else tree.operator
    return left + spaced + right, tight


def _bracketed(tree: Node, at_least: int) -> str:
    text, tight = _written(tree)
    return text if tight >= at_least else f"({text})"
