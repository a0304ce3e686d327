"""The built-in functions: what each takes and gives, and how it is worked. By family."""

from loadpath.functions.families import ANGLES, CHOOSING, MAGNITUDE, POWERS, ROOTS
from loadpath.functions.model import Function, Rule
from loadpath.functions.special import CALCULUS, COLUMNS, EXTREMES, Special

FUNCTIONS: dict[str, Function] = {f.name: f for f in (*ROOTS, *MAGNITUDE, *POWERS, *ANGLES, *CHOOSING)}
"""Functions of values, by name."""

SPECIAL: dict[str, Special] = {f.name: f for f in (*CALCULUS, *EXTREMES, *COLUMNS)}
"""Functions of whole expressions and of columns, by name."""

NAMES: frozenset[str] = frozenset(FUNCTIONS) | frozenset(SPECIAL)
"""Words that no sheet can use as a name."""

__all__ = ["FUNCTIONS", "NAMES", "SPECIAL", "Function", "Rule", "Special"]
