"""Plots: a `Picture` is data, `svg` draws it, `describe` says in words what it shows.

matplotlib is loaded when something is drawn.
"""

from loadpath.figures.picture import MOST_CURVES, MOST_PEAKS, MOST_POINTS, Curve, Peak, Picture, describe
from loadpath.figures.plot import svg

__all__ = ["MOST_CURVES", "MOST_PEAKS", "MOST_POINTS", "Curve", "Peak", "Picture", "describe", "svg"]
