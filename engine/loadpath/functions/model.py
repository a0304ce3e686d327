"""What a built-in function is."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

Rule = Literal["plain", "root", "same", "like-first", "choose", "steps"]
"""How a function treats dimensions:

* `plain`: plain numbers in, a plain number out
* `root`: any dimension in, its root out
* `same`: any dimension in, the same out
* `choose`: any number of arguments of one dimension, the same out; a single one is a column
* `steps`: value and step of one dimension, the same out
* `like-first`: two arguments of one dimension, a plain number out
"""


@dataclass(frozen=True, slots=True)
class Function:
    """A built-in function."""

    name: str
    rule: Rule
    least: int
    most: int
    """Number of arguments, both ends included."""
    work: Callable[..., float]
    """Coherent SI floats in and out. Raises ValueError outside its domain, with what it needs."""
    example: str
    """A formula line that a test reads, with its value: `x = sqrt(16 mm^2) | 4 mm`."""
    root: int = 1
    """The root that rule `root` takes."""
    angle: bool = False
    """True where the arguments are angles: a value in degrees may stand in a substitution as it is."""
