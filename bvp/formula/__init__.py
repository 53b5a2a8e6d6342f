"""The formula language: typed text to trees, and what can be done with trees. No formula is ever evaluated as a program."""

from bvp.formula.cancel import cancel, down, up
from bvp.formula.derivative import derivative, folded
from bvp.formula.evaluate import evaluate, evaluate_all, float_functions, mpmath_functions
from bvp.formula.parse import parse
from bvp.formula.source import source
from bvp.formula.tree import Node
from bvp.formula.vocabulary import Vocabulary
from bvp.formula.write import write

__all__ = [
    "Node",
    "Vocabulary",
    "cancel",
    "derivative",
    "down",
    "evaluate",
    "evaluate_all",
    "float_functions",
    "folded",
    "mpmath_functions",
    "parse",
    "source",
    "up",
    "write",
]
