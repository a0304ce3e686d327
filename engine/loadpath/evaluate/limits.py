"""How long working a sheet may take."""

STEP_SECONDS = 10.0
"""That one step may take."""
ALGEBRA_IN_ALL = 120.0
"""Seconds for all algebra of a sheet."""
