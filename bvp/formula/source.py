"""Trees as lines of Python source, each subtree worked out once, names spelled by whoever asks.

Only validated trees come here: the text that results holds the spellings given, numbers, and temporaries t0, t1, …
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence

from bvp.formula.tree import Binary, Call, Negative, Node, Number, bottom_up, number_of

LARGEST_PRODUCT = 16  # whole powers up to here become products; beyond, pow is as good


def source(trees: Sequence[Node], spell: Callable[[Node], str], functions: Mapping[str, str]) -> tuple[list[str], list[str]]:
    """Assignment lines, and one expression (a temporary, a leaf or a number) for each tree."""
    lines: list[str] = []
    done: dict[Node, str] = {}

    def assign(text: str) -> str:
        name = f"t{len(lines)}"
        lines.append(f"{name} = {text}")
        return name

    def power(base: str, exponent: int) -> str:
        """base^exponent by squaring, written as nested products."""
        if exponent == 1:
            return base
        half = power(base, exponent // 2)
        squared = assign(f"{half} * {half}")
        return squared if exponent % 2 == 0 else assign(f"{squared} * {base}")

    def made(node: Node) -> str:
        if isinstance(node, Number):
            return repr(node.value) if node.value >= 0 else f"({node.value!r})"
        if isinstance(node, Negative):
            value = number_of(node)
            return assign(f"-{done[node.operand]}") if value is None else f"({value!r})"
        if isinstance(node, Binary):
            left, right = done[node.left], done[node.right]
            if node.operator != "^":
                return assign(f"{left} {node.operator} {right}")
            exponent = number_of(node.right)
            if exponent is not None and 1 <= abs(exponent) <= LARGEST_PRODUCT and exponent == int(exponent):
                whole = power(left, int(abs(exponent)))
                return whole if exponent > 0 else assign(f"1.0 / {whole}")
            return assign(f"{left} ** {right}")
        if isinstance(node, Call):
            inside = ", ".join(done[part] for part in node.arguments)
            key = node.function if not any(node.orders) else f"{node.function}:{','.join(map(str, node.orders))}"
            spelled = functions[key]
            return assign(spelled.format(inside) if "{}" in spelled else f"{spelled}({inside})")
        return spell(node)

    for node in bottom_up(trees, lambda node: isinstance(node, (Binary, Negative, Call))):
        done[node] = made(node)
    return lines, [done[tree] for tree in trees]
