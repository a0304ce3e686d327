"""Numerical methods over trees and curves: linear systems, extremes, roots, quadrature, points of a plot."""

from loadpath.numeric.extremes import Extremes, Spot, extremes, left_of
from loadpath.numeric.linear import Solution, linear_form, solve
from loadpath.numeric.pieces import Piece, bracket_places, pieces
from loadpath.numeric.quadrature import Quadrature, quadrature
from loadpath.numeric.roots import Roots, coefficients, degree_in, roots_between
from loadpath.numeric.sampling import sample
from loadpath.numeric.trouble import Curve, NoConvergence, NotDefined

__all__ = [
    "Curve",
    "Extremes",
    "NoConvergence",
    "NotDefined",
    "Piece",
    "Quadrature",
    "Roots",
    "Solution",
    "Spot",
    "bracket_places",
    "coefficients",
    "degree_in",
    "extremes",
    "left_of",
    "linear_form",
    "pieces",
    "quadrature",
    "roots_between",
    "sample",
    "solve",
]
