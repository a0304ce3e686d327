"""The only door to SymPy: trees of formulas in, trees out.

Names and quantities have no sign here and no value; decimals are exact. SymPy runs in a process of its own
(`worker`), started by the first call that needs it. Every call ends within TIME_LIMIT seconds, in an answer,
in None where no closed form exists, or in AlgebraFailure.
"""

from loadpath.algebra.derivatives import breaks_in, derivative, jumps_in
from loadpath.algebra.door import close
from loadpath.algebra.equations import real_roots, roots, solve_linear
from loadpath.algebra.failure import TIME_LIMIT, AlgebraFailure, time_limit
from loadpath.algebra.frame import MOST_NODES
from loadpath.algebra.integrals import AboveZero, antiderivative, definite, denominators, vanishes_at_zero
from loadpath.algebra.limits import limit, simplified, single_brackets
from loadpath.algebra.trees import depends_on, substitute_name

__all__ = [
    "MOST_NODES",
    "TIME_LIMIT",
    "AboveZero",
    "AlgebraFailure",
    "antiderivative",
    "breaks_in",
    "close",
    "definite",
    "denominators",
    "depends_on",
    "derivative",
    "jumps_in",
    "limit",
    "real_roots",
    "roots",
    "simplified",
    "single_brackets",
    "solve_linear",
    "substitute_name",
    "time_limit",
    "vanishes_at_zero",
]
