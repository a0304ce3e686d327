"""Formulas in print: the tree as MathML for pages and as LaTeX for Markdown. Pure functions, no state."""

from loadpath.render.math.latex import latex, latex_equations, latex_lines
from loadpath.render.math.mathml import equations, flow, mathml, pieces, widest
from loadpath.render.math.width import COLUMN, PAGE

__all__ = [
    "COLUMN", "PAGE", "equations", "flow", "latex", "latex_equations", "latex_lines", "mathml", "pieces",
    "widest",
]  # fmt: skip
