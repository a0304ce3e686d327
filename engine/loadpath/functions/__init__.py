"""The built-in functions: what each takes and gives, and how it is worked. One file holds them, by family."""

from loadpath.functions.families import ANGLES, CHOOSING, MAGNITUDE, POWERS, ROOTS
from loadpath.functions.model import Function, Rule

FUNCTIONS: dict[str, Function] = {f.name: f for f in (*ROOTS, *MAGNITUDE, *POWERS, *ANGLES, *CHOOSING)}
"""Every function that this version works, by name."""

LATER: frozenset[str] = frozenset(
    [
        "sum", "count", "interp", "lookup", "integral", "derivative", "limit_of", "largest", "smallest",
        "where_largest", "where_smallest", "simplified",
    ]
)  # fmt: skip
"""Functions of the language that this version cannot work yet."""

NAMES: frozenset[str] = frozenset(FUNCTIONS) | LATER
"""Words that no sheet can use as a name."""

__all__ = ["FUNCTIONS", "LATER", "NAMES", "Function", "Rule"]
